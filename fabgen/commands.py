"""What each command does. Heavy packages are imported by the command that needs them.

Depends on: everything below the command line.
"""

from __future__ import annotations

import argparse
import json
import os
import shlex
import sys
from collections.abc import Callable, Mapping, Sequence
from dataclasses import asdict
from pathlib import Path
from typing import TYPE_CHECKING, Any

from fabgen.errors import JobError
from fabgen.progress import Display, open_display

if TYPE_CHECKING:
    from fabgen.checks.records import Finding
    from fabgen.parts.records import Part
    from fabgen.sizing.records import Feed


def _wants_colour(arguments: argparse.Namespace, stream: Any) -> bool:
    """Colour on a terminal only, unless NO_COLOR is set to anything or ``--plain`` is given."""
    return bool(
        stream.isatty() and not arguments.plain and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"
    )


def _display(arguments: argparse.Namespace) -> Display:
    return open_display(arguments.quiet, arguments.plain, _wants_colour(arguments, sys.stderr))


def _cache(arguments: argparse.Namespace) -> Any:
    from fabgen.cache import Cache, default_folder

    return Cache(None if arguments.no_cache else default_folder())


def start(arguments: argparse.Namespace) -> int:
    """Writes a job file; asks only on a terminal and only when no template is named."""
    from fabgen.start import DEFAULT_TEMPLATE, refuse_existing, template, templates, write_job_file

    if arguments.keys:
        from fabgen.job_page import job_page

        sys.stdout.write(job_page())
        return 0
    asks = sys.stdin.isatty() and sys.stdout.isatty() and arguments.template is None and not arguments.list
    if arguments.list or (arguments.template is None and arguments.output is None and not asks):
        width = max(len(item.name) for item in templates())
        for item in templates():
            sys.stdout.write(f"{item.name:<{width}}  {item.purpose}\n")
        return 0
    path = arguments.output or Path(f"{arguments.template or 'job'}.toml")
    refuse_existing(path)
    write_job_file(_answers() if asks else template(arguments.template or DEFAULT_TEMPLATE).text, path)
    name = shlex.quote(str(path))
    _out(f"{path} is written. Look through it, then: fabgen pack {name} -o {shlex.quote(path.stem + '-pack')}")
    return 0


def _answers() -> str:
    from fabgen.start import ask_job

    try:
        return ask_job(input, _out)
    except EOFError:
        raise JobError(
            "the answers ended before the questions; nothing was written. Answer all five, or name a template: "
            "fabgen start --list"
        ) from None


def _out(line: str) -> None:
    sys.stdout.write(line + "\n")


def size(arguments: argparse.Namespace) -> int:
    """Prints sizes and predictions, or the selectivity front; writes plots where asked."""
    from fabgen.job_reader import read_job
    from fabgen.resources import time_limit

    job = read_job(arguments.job)
    with time_limit(arguments.time_limit), _display(arguments) as display:
        if arguments.front:
            from fabgen.sized import selectivity_front_of

            front = selectivity_front_of(job, display)
        else:
            from fabgen.sized import sized_feed

            feed = sized_feed(job, display, _cache(arguments))
    if arguments.plots is not None:
        from fabgen.plots import feed_plots, front_plot, write_plots

        write_plots({"front.svg": front_plot(front)} if arguments.front else feed_plots(feed), arguments.plots)
    if arguments.front:
        from fabgen.report import front_report

        sys.stdout.write(json.dumps(asdict(front), indent=2) + "\n" if arguments.json else front_report(job, front))
    elif arguments.json:
        from fabgen.writers.record import record_data, record_text

        sys.stdout.write(record_text(record_data(feed)))
    else:
        from fabgen.report import size_report

        sys.stdout.write(size_report(feed))
    return 0


def check(arguments: argparse.Namespace) -> int:
    """Prints all findings of a job, or of a written pack; the exit status tells the worst."""
    from fabgen.report import findings_report

    name, findings = _pack_findings(arguments) if arguments.job.is_dir() else _job_findings(arguments)
    if arguments.json:
        sys.stdout.write(json.dumps([asdict(f) for f in findings], indent=2, ensure_ascii=False) + "\n")
    else:
        sys.stdout.write(findings_report(name, findings, _wants_colour(arguments, sys.stdout)))
    worst = {"stop", "caution"} if arguments.strict else {"stop"}
    return 4 if any(finding.severity in worst for finding in findings) else 0


def _pack_findings(arguments: argparse.Namespace) -> tuple[str, Sequence[Finding]]:
    from fabgen.checks.read_files import read_pack
    from fabgen.checks.readback import findings_of_pack
    from fabgen.resources import time_limit
    from fabgen.writers.sheets_back import sheets_findings
    from fabgen.writers.tables_back import tables_findings

    with time_limit(arguments.time_limit), _display(arguments) as display:
        display.step("reading the pack back")
        pack = read_pack(arguments.job)
        found = (*findings_of_pack(pack, solids=True), *tables_findings(pack))
        display.step("drawing the sheets anew to compare them")
        return f"pack {arguments.job}", (*found, *sheets_findings(pack))


def _job_findings(arguments: argparse.Namespace) -> tuple[str, Sequence[Finding]]:
    from fabgen.job_reader import read_job
    from fabgen.resources import time_limit

    job = read_job(arguments.job)
    with time_limit(arguments.time_limit), _display(arguments) as display:
        from fabgen.pack import build_content
        from fabgen.sized import sized_feed

        feed = sized_feed(job, display, _cache(arguments))
        display.step("planning the parts and checking them")
        parts, findings = build_content(feed)
        if arguments.solid:
            findings = (*findings, *_drawn_findings(feed, parts, display))
        return job.target.name, findings


def _drawn_findings(feed: Feed, parts: Sequence[Part], display: Display) -> Sequence[Finding]:
    """The sizing model against the drawn solids: containment, and a solve on the true surface of the loop."""
    import tempfile

    from fabgen.checks.solid import solid_findings
    from fabgen.writers.step import write_step

    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "loop.step"
        write_step(next(part for part in parts if part.key == "loop"), path)
        return solid_findings(feed, parts, path, display.step)


def pack(arguments: argparse.Namespace) -> int:
    """Writes the pack; all that can be refused without computing is refused first."""
    from fabgen.folder import resolve_target
    from fabgen.job_reader import read_job
    from fabgen.pack import PackOptions, chosen_groups, write_pack
    from fabgen.resources import require_memory, time_limit

    job = read_job(arguments.job)
    options = PackOptions(tuple(arguments.only), tuple(arguments.despite))
    chosen_groups(options.only)
    resolve_target(arguments.output)
    require_memory()
    with time_limit(arguments.time_limit), _display(arguments) as display:
        from fabgen.sized import sized_feed

        feed = sized_feed(job, display, _cache(arguments))
        report = write_pack(feed, arguments.output, options, display)
    from fabgen.report import loss_text

    counts = {word: sum(f.severity == word for f in report.findings) for word in ("stop", "caution", "note")}
    _out(
        f"{report.folder}: {len(report.files) + 1} files, return loss {loss_text(feed.predicted.return_loss_db)} at "
        f"{job.target.frequency_mhz:g} MHz; {counts['caution']} cautions and {counts['note']} notes in findings.csv"
        + (f"; WRITTEN DESPITE {counts['stop']} STOP FINDINGS" if counts["stop"] else "")
    )
    return 0


def stock(arguments: argparse.Namespace) -> int:
    """Lists stock rows, filtered by kind and words."""
    from fabgen.stock import tables

    words = [word.lower() for word in arguments.words]
    kinds = [kind for kind in tables.KINDS if {kind, f"{kind}s", f"{kind}es"} & set(words)]
    words = [word for word in words if not any(word in {kind, f"{kind}s", f"{kind}es"} for kind in kinds)]
    found: dict[str, list[dict[str, Any]]] = {}
    for kind in kinds or list(tables.KINDS):
        rows = [asdict(row) for row in tables.all_rows(kind)]
        rows = [row for row in rows if all(word in f"{kind} {row}".lower() for word in words)]
        if rows:
            found[kind] = rows
    if not found:
        raise JobError(
            f"no stock row holds {' '.join(arguments.words)!r}; kinds: {', '.join(tables.KINDS)}. Leave the words out"
            " to see all"
        )
    if arguments.json:
        sys.stdout.write(json.dumps(found, indent=2, ensure_ascii=False) + "\n")
        return 0
    from fabgen.report import stock_report

    sys.stdout.write(stock_report(found))
    return 0


COMMANDS: Mapping[str, Callable[[argparse.Namespace], int]] = {
    "start": start,
    "size": size,
    "check": check,
    "pack": pack,
    "stock": stock,
}
