"""The workshop pack: every file from one Feed, written whole or not at all.

Depends on: everything below the command line.
"""

from __future__ import annotations

import functools
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from fabgen.checks.records import Finding
from fabgen.errors import ChecksFailedError, JobError, NumericalError
from fabgen.folder import RECORD_NAME, files_in, new_folder, sha256_of
from fabgen.parts.records import Part
from fabgen.progress import Progress, Silent
from fabgen.sizing.records import Feed
from fabgen.writers import csv as tables
from fabgen.writers.record import as_recorded, record_data, record_text
from fabgen.writers.touchstone import touchstone_text


@dataclass(frozen=True)
class PackOptions:
    """``only``: groups of files to make, empty for all; ``despite``: codes of stop findings that shall not block."""

    only: tuple[str, ...] = ()
    despite: tuple[str, ...] = ()


@dataclass(frozen=True)
class Content:
    """What the files are made of, and where they go."""

    feed: Feed
    parts: tuple[Part, ...]
    findings: tuple[Finding, ...]
    options: PackOptions
    folder: Path
    progress: Progress

    def write(self, name: str, text: str) -> None:
        """A text file of the pack: UTF-8, line feeds on every system."""
        path = self.folder / name
        path.parent.mkdir(exist_ok=True)
        path.write_bytes(text.encode("utf-8"))


@dataclass(frozen=True)
class PackReport:
    """What was written."""

    folder: Path
    files: Mapping[str, str]
    findings: tuple[Finding, ...]


def build_content(feed: Feed) -> tuple[tuple[Part, ...], tuple[Finding, ...]]:
    """Parts with the workshop's aids, and findings; each solid is built once however many files need it."""
    from fabgen.checks.run import run_checks
    from fabgen.parts.build import build_parts

    parts = tuple(_built_once(part) for part in build_parts(feed))
    return parts, tuple(run_checks(feed, parts))


def _built_once(part: Part) -> Part:
    return replace(
        part,
        solid=None if part.solid is None else functools.cache(part.solid),
        print_solid=None if part.print_solid is None else functools.cache(part.print_solid),
    )


def write_pack(
    feed: Feed, target: Path, options: PackOptions | None = None, progress: Progress | None = None
) -> PackReport:
    """Writes the pack of a sized feed into ``target``.

    Raises ChecksFailedError for stop findings not named in ``options.despite``, NumericalError for a failed
    self-check, OutputError for what the disk refuses; then no partial pack is left and an older one still stands.
    """
    options = options or PackOptions()
    progress = progress or Silent()
    chosen = chosen_groups(options.only)
    require_self_checks(feed)
    feed = as_recorded(feed)
    progress.step("planning the parts and checking them")
    parts, findings = build_content(feed)
    require_no_stop(findings, options.despite)
    with new_folder(target) as folder:
        content = Content(feed, parts, findings, options, folder, progress)
        for group in chosen:
            progress.step(GROUPS[group].doing)
            GROUPS[group].write(content)
        files = {name: sha256_of(folder / name) for name in files_in(folder)}
        record = record_data(feed, parts, findings, files, options.despite)
        content.write(RECORD_NAME, record_text(record))
        if "tables" in chosen:
            progress.step("reading the pack back")
            require_agreement(folder)
    return PackReport(target, files, findings)


def chosen_groups(only: Sequence[str]) -> tuple[str, ...]:
    """The groups to write, in the pack's own order; JobError for a name that is no group."""
    unknown = next((name for name in only if name not in GROUPS), None)
    if unknown is not None:
        raise JobError(f"--only {unknown!r} is not a group of files; allowed: {', '.join(GROUPS)}")
    return tuple(name for name in GROUPS if not only or name in only)


def require_self_checks(feed: Feed) -> None:
    """Refuses a feed whose field computation failed one of its own checks."""
    failed = [check for check in feed.self_checks if not check.passed]
    if failed:
        lines = [f"{c.name}: {c.value:.3g}, limit {c.limit:.3g} ({c.meaning})" for c in failed]
        raise NumericalError(
            "the field computation failed its own checks, so its numbers are not used: "
            + "; ".join(lines)
            + ". Change the fixed sizes or the stock a little, and report the job file"
        )


def require_no_stop(findings: Sequence[Finding], despite: Sequence[str]) -> None:
    """Refuses when a stop finding is not named in ``despite``."""
    stops = [finding for finding in findings if finding.severity == "stop" and finding.code not in despite]
    if stops:
        lines = [f"  {f.code} {f.part}: {f.message}; {f.cure}" for f in stops]
        flags = " ".join(f"--despite {code}" for code in sorted({f.code for f in stops}))
        raise ChecksFailedError(
            f"{len(stops)} finding(s) stop the pack:\n" + "\n".join(lines) + f"\nCure them, or accept the risk: {flags}"
        )


def require_agreement(folder: Path) -> None:
    """Refuses a pack whose files, read back alone, do not agree with each other."""
    from fabgen.checks.readback import check_pack

    found = check_pack(folder)
    if found:
        lines = [f"  {f.code} {f.part}: {f.message}" for f in found]
        raise ChecksFailedError(
            "the files of the pack do not agree when read back, so it is not kept:\n"
            + "\n".join(lines)
            + "\nThis is a fault in fabgen; report the job file"
        )


def _write_cut(content: Content) -> None:
    from fabgen.writers.dxf import file_name, write_dxf

    job = content.feed.job
    folder = content.folder / "cut"
    folder.mkdir()
    for part in content.parts:
        if part.flat is None:
            continue
        kerf = job.limits.kerf_mm if "laser" in part.process else 0.0
        name = functools.partial(file_name, part, job.target.revision)
        write_dxf(part, folder / name(), kerf_mm=kerf)
        write_dxf(part, folder / name("r12"), version="R12", kerf_mm=kerf)
        if part.flat.folds:
            write_dxf(part, folder / name("fold"), folds=True)


def _write_bend(content: Content) -> None:
    for part in content.parts:
        if part.wire is not None:
            content.write(f"bend/{part.key}_wire_schedule.csv", tables.wire_schedule_csv(part))
    if any(part.flat is not None and part.flat.folds for part in content.parts):
        content.write("bend/bend_table.csv", tables.bend_table_csv(content.parts))


def _write_print(content: Content) -> None:
    from fabgen.writers.stl import write_stl
    from fabgen.writers.threemf import write_3mf

    for part in content.parts:
        if "print" in part.process:
            content.progress.step(f"meshing printed parts: {part.name}")
            (content.folder / "print").mkdir(exist_ok=True)
            write_stl(part, content.folder / "print" / f"{part.key}.stl")
            write_3mf(part, content.folder / "print" / f"{part.key}.3mf")


def _write_model(content: Content) -> None:
    from fabgen.writers.step import write_step, write_step_assembly

    folder = content.folder / "model"
    folder.mkdir()
    solids = [part for part in content.parts if part.solid is not None]
    for count, part in enumerate(solids):
        content.progress.step(f"building solids: {part.name}")
        content.progress.share(count, len(solids))
        write_step(part, folder / f"{part.key}.step")
    content.progress.step("building solids: assembly")
    write_step_assembly(content.parts, folder / "assembly.step", content.feed.job.target.name)


def _write_order(content: Content) -> None:
    from fabgen.writers.nesting import nesting_files
    from fabgen.writers.order import order_notes

    made = files_in(content.folder) + (["sheets.pdf"] if "sheets" in chosen_groups(content.options.only) else [])
    for name, text in order_notes(content.feed, content.parts, made).items():
        content.write(f"order/{name}", text)
    for name, text in nesting_files(content.parts, content.feed.job.limits).items():
        content.write(f"order/{name}", text)


def _write_tables(content: Content) -> None:
    content.write("parts.csv", tables.parts_csv(content.parts))
    content.write("findings.csv", tables.findings_csv(content.findings))
    content.write("pattern.csv", tables.pattern_csv(content.feed.predicted.patterns))
    content.write("predicted.s1p", touchstone_text(content.feed))


def _write_sheets(content: Content) -> None:
    from fabgen.drawing.pages.sheets import sheets
    from fabgen.writers.pdf import Metadata, write_pdf

    target = content.feed.job.target
    metadata = Metadata(target.name, target.owner, f"assembly sheets, revision {target.revision}")
    pages = sheets(content.feed, content.parts, content.findings)
    write_pdf(tuple(pages), content.folder / "sheets.pdf", metadata)


@dataclass(frozen=True)
class Group:
    """One group of files: what it holds, what the progress says, and who writes it."""

    holds: str
    doing: str
    write: Callable[[Content], None]


GROUPS: Mapping[str, Group] = {
    "tables": Group(
        "parts.csv, findings.csv, pattern.csv, predicted.s1p", "writing parts list and predictions", _write_tables
    ),
    "bend": Group("wire schedule and bend table", "writing bend tables", _write_bend),
    "cut": Group("DXF of the flat parts", "writing and checking cutting files", _write_cut),
    "model": Group("STEP of each part and of the assembly", "building solids", _write_model),
    "print": Group("STL and 3MF of the printed parts", "meshing printed parts", _write_print),
    "order": Group("order notes for the shops", "writing order notes", _write_order),
    "sheets": Group("sheets.pdf", "drawing the assembly sheets", _write_sheets),
}
