"""The tables and order notes of a written pack against those written anew from its record: every cell, every line.

Depends on: errors, checks (pack_register, read_files, records), parts, writers (csv, nesting, order).
"""

from __future__ import annotations

import csv
from collections.abc import Iterator
from itertools import zip_longest

from fabgen import __version__
from fabgen.checks.pack_register import SOURCE, TABLES_CODE
from fabgen.checks.read_files import Pack
from fabgen.checks.records import Finding
from fabgen.errors import FabgenError
from fabgen.folder import files_in

TOLD = 12
"""Differences that are told of one file."""


def tables_findings(pack: Pack) -> tuple[Finding, ...]:
    """Where a table or note says something else than the record; nothing for a pack of another version, whose tables
    may differ. Groups of files that the pack was written without are left out."""
    if pack.record["fabgen_version"] != __version__:
        return ()
    try:
        wanted = _written_anew(pack)
    except FabgenError as error:
        return (_finding("record.json", "tables", "unreadable", "as written", str(error)),)
    there = set(files_in(pack.folder))
    groups = {name.partition("/")[0] for name in there}
    found: list[Finding] = []
    for name, text in wanted.items():
        if name in there:
            written = (pack.folder / name).read_bytes().decode("utf-8", errors="replace")
            compare = _cells if name.endswith(".csv") else _lines
            found += list(compare(name, written, text))[:TOLD] if written != text else []
        elif "/" in name and name.partition("/")[0] in groups:
            found.append(_finding(name, "file", "missing", "in the pack", f"{name} belongs to the record's parts"))
    return tuple(found)


def _finding(part: str, feature: str, value: str, limit: str, message: str) -> Finding:
    cure = f"write the pack anew; do not use {part} as it is: {feature} is wrong"
    return Finding(TABLES_CODE, "stop", part, feature, value, limit, SOURCE, message, cure)


def _written_anew(pack: Pack) -> dict[str, str]:
    """Name in the pack -> text, for every table and note but pattern.csv and predicted.s1p: the feed is read from
    those, their figures stand nowhere else, and the record is checked against them."""
    from fabgen.checks.run import run_checks
    from fabgen.parts.build import build_parts
    from fabgen.writers import csv as tables
    from fabgen.writers.nesting import nesting_files
    from fabgen.writers.order import order_notes

    feed, parts = pack.feed, tuple(build_parts(pack.feed))
    texts = {
        "parts.csv": tables.parts_csv(parts),
        "findings.csv": tables.findings_csv(run_checks(feed, parts)),
    }
    texts |= {f"bend/{part.key}_wire_schedule.csv": tables.wire_schedule_csv(part) for part in parts if part.wire}
    if any(part.flat is not None and part.flat.folds for part in parts):
        texts["bend/bend_table.csv"] = tables.bend_table_csv(parts)
    if (pack.folder / "order").is_dir():
        notes = {**order_notes(feed, parts, files_in(pack.folder)), **nesting_files(parts, feed.job.limits)}
        texts |= {f"order/{name}": text for name, text in notes.items()}
    return texts


def _cells(name: str, written: str, wanted: str) -> Iterator[Finding]:
    """Differing cells of two tables, each with its row's first cell and its column's heading."""
    have, want = (list(csv.reader(text.splitlines())) for text in (written, wanted))
    heading, no_cells = want[0], list[str]()
    for number, (row, expected) in enumerate(zip_longest(have, want, fillvalue=no_cells), start=1):
        of = (expected or row or [""])[0]
        for column, (cell, right) in enumerate(zip_longest(row, expected, fillvalue="nothing")):
            if cell != right:
                feature = heading[column] if column < len(heading) else f"column {column + 1}"
                message = f"row {number} ({of}) says {feature} {cell!r}, the record gives {right!r}"
                yield _finding(name, f"{feature} of {of}", cell, right, message)
    if have == want:
        yield _finding(name, "text", "other marks", "as written", "the cells are the record's, their writing is not")


def _lines(name: str, written: str, wanted: str) -> Iterator[Finding]:
    both = zip_longest(written.split("\n"), wanted.split("\n"), fillvalue="nothing")
    for number, (line, right) in enumerate(both, start=1):
        if line != right:
            message = f"line {number} says {line.strip()!r}, the record gives {right.strip()!r}"
            yield _finding(name, f"line {number}", line.strip(), right.strip(), message)
