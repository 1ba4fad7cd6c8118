"""The sheets of a written pack against the sheets drawn anew from its record: every text on every page.

Depends on: errors, checks (pack_register, read_files, records), drawing, parts, writers.pdf_text.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import zip_longest

from fabgen import __version__
from fabgen.checks.pack_register import SHEETS_CODE, SOURCE
from fabgen.checks.read_files import Pack
from fabgen.checks.records import Finding
from fabgen.errors import FabgenError
from fabgen.writers.pdf_text import page_texts

SHEETS = "sheets.pdf"
TOLD = 12
"""Differences that are told; a drawing of another feed differs in hundreds."""


def sheets_findings(pack: Pack) -> tuple[Finding, ...]:
    """Where the sheets say something else than the record; nothing for a pack without sheets, or of another version,
    whose pages may differ."""
    path = pack.folder / SHEETS
    if not path.is_file() or pack.record["fabgen_version"] != __version__:
        return ()
    try:
        wanted = _drawn_anew(pack)
        faults = list(_differences(page_texts(path), wanted))
    except FabgenError as error:
        return (_finding("sheets", "unreadable", "as drawn", str(error)),)
    alike: dict[tuple[str, str], list[tuple[int, str]]] = {}
    for page, value, limit, message in faults:
        alike.setdefault((value, limit), []).append((page, message))
    found = []
    for (value, limit), places in list(alike.items())[:TOLD]:
        more = f" and {len(places) - 1} more alike" if len(places) > 1 else ""
        found.append(_finding(f"sheet {places[0][0]}{more}", value, limit, places[0][1]))
    if len(alike) > TOLD:
        message = f"{len(alike) - TOLD} more texts of the sheets differ from the record"
        found.append(_finding("sheets", f"{len(faults)} texts", "none", message))
    return tuple(found)


def _finding(feature: str, value: str, limit: str, message: str) -> Finding:
    cure = f"write the pack anew; do not use {SHEETS} as it is: {feature} is wrong"
    return Finding(SHEETS_CODE, "stop", SHEETS, feature, value, limit, SOURCE, message, cure)


def _drawn_anew(pack: Pack) -> tuple[tuple[str, ...], ...]:
    from fabgen.drawing.model import Text
    from fabgen.drawing.pages.sheets import sheets
    from fabgen.parts.build import build_parts

    findings = tuple(Finding(**item) for item in pack.record["findings"])
    drawn = sheets(pack.feed, tuple(build_parts(pack.feed)), findings)
    return tuple(tuple(i.text for i in sheet.items if isinstance(i, Text) and i.text) for sheet in drawn)


def _differences(
    written: Sequence[Sequence[str]], wanted: Sequence[Sequence[str]]
) -> Iterator[tuple[int, str, str, str]]:
    if len(written) != len(wanted):
        yield 1, f"{len(written)} sheets", f"{len(wanted)} sheets", "the number of sheets is not that of the record"
    for page, (have, want) in enumerate(zip(written, wanted, strict=False), start=1):
        for text, expected in zip_longest(have, want, fillvalue="nothing"):
            if text != expected:
                yield page, text, expected, f"sheet {page} says {text!r}, the record gives {expected!r}"
