"""The closing pages: findings with severity in words, cautions and limits, settings and sources.

Depends on: drawing, checks.records, sizing.records, stock.
"""

from __future__ import annotations

import fabgen
from fabgen.checks.records import Finding
from fabgen.drawing.flow import Block, gap, heading, kept, paragraph, table
from fabgen.drawing.model import BLACK, RED, Table, number
from fabgen.drawing.pages.base import Context, Draft, draft
from fabgen.drawing.texts import say, size_name

CAUTIONS = ("sheet", "solder", "glue", "tools", "paint", "mast", "lightning", "transmit", "sun", "lift", "codes")
ORDER = {"stop": 0, "caution": 1, "note": 2}


def drafts(context: Context) -> list[Draft]:
    """Findings, cautions, settings."""
    return [
        draft(context, "findings", say("page.findings"), findings_blocks(context.findings), scale="–"),
        draft(context, "cautions", say("page.cautions"), cautions_blocks(context), scale="–"),
        draft(context, "settings", say("page.settings"), settings_blocks(context), scale="–"),
    ]


def findings_blocks(findings: tuple[Finding, ...]) -> list[Block]:
    """Every finding: severity in words first, stop in red as well."""
    if not findings:
        return [heading(say("findings.head")), *paragraph(say("findings.none"))]
    ordered = sorted(findings, key=lambda f: (ORDER[f.severity], f.code, f.part, f.feature))
    blocks: list[Block] = [heading(say("findings.head"))]
    stops = sum(f.severity == "stop" for f in findings)
    if stops:
        blocks += paragraph(say("findings.stops", count=stops), bold=True, colour=RED)
    head = tuple(say(f"findings.{k}") for k in ("severity", "code", "where", "measured", "what"))
    rows = tuple(
        (f.severity, f.code, _where(f), say("findings.value", value=f.value, limit=f.limit), f.message) for f in ordered
    )
    blocks.append(Block(0.01, (), tables=(Table("findings", head, rows),), stay=True))
    for finding in ordered:
        blocks += _finding(finding)
    return blocks


def _where(finding: Finding) -> str:
    return f"{finding.part}: {finding.feature}" if finding.feature else finding.part


def _finding(finding: Finding) -> list[Block]:
    """Severity, code and place as a heading; then what, value and limit, cure, source."""
    stop = finding.severity == "stop"
    colour = RED if stop else BLACK
    title = f"{say(f'severity.{finding.severity}')}  {finding.code}  {_where(finding)}"
    lines = kept(paragraph(title, bold=True, colour=colour))
    values = say("findings.value", value=finding.value, limit=finding.limit)
    lines += paragraph(f"{_sentence(finding.message)} {say('findings.values')} {values}.", colour=colour)
    lines += paragraph(f"{say('findings.cure')} {_sentence(finding.cure)}")
    lines += paragraph(f"{say('findings.source')} {finding.source}", 1.8)
    return [*lines, gap(2)]


def _sentence(text: str) -> str:
    """The text with a capital and a full stop."""
    text = text.strip()
    text = text[:1].upper() + text[1:]
    return text if text.endswith((".", "!", "?")) else text + "."


def cautions_blocks(context: Context) -> list[Block]:
    """Cautions of the work and the site, and the limits within which the figures hold."""
    blocks: list[Block] = [heading(say("cautions.head"))]
    rows = [(say(f"caution.{key}.head"), say(f"caution.{key}")) for key in CAUTIONS]
    blocks += table("cautions", (say("cautions.hazard"), say("cautions.what")), rows, widths=(38, 132))
    blocks += [gap(2), heading(say("limits.head"))]
    for i in range(1, 6):
        blocks += paragraph(say(f"limits.{i}"), bullet="–")
    for remark in context.feed.remarks:
        blocks += paragraph(remark, bullet="–")
    return blocks


def settings_blocks(context: Context) -> list[Block]:
    """Version, mesh, uncertainty, self-checks, modes, tolerances, sources."""
    feed, s = context.feed, context.feed.settings
    rows = [
        (say("settings.version"), fabgen.__version__),
        (say("settings.method"), s.method),
        (say("settings.mesh"), say("settings.mesh_value", edge=number(s.edge_per_wavelength, 1),
                                   triangles=s.triangles, largest=number(s.largest_edge_wavelengths, 4))),
        (say("settings.unknowns"), say("settings.unknowns_value", unknowns=s.unknowns, solves=s.solves)),
        (say("settings.uncertainty"), say("settings.uncertainty_value", mhz=number(s.resonance_uncertainty_mhz, 2),
                                          db=number(s.return_loss_uncertainty_db, 1))),
        (say("settings.capacitor"), f"{feed.capacitor.formula} ({feed.capacitor.source})"),
    ]  # fmt: skip
    blocks = [
        heading(say("settings.head")),
        *table("settings", (say("settings.what"), say("table.value")), rows, widths=(50, 120)),
    ]
    # What tolerances do and where figures come from stay together: no short table has a sheet of its own.
    last = kept([*_yield_table(context), *_sources(context)])
    return [*blocks, *_checks_table(context), *_modes_table(context), *last]


def _checks_table(context: Context) -> list[Block]:
    rows = [
        (c.name, f"{c.value:.3g}", f"{c.limit:.3g}", say("settings.passed") if c.passed else say("settings.failed"),
         c.meaning)
        for c in context.feed.self_checks
    ]  # fmt: skip
    if not rows:
        return []
    head = tuple(say(f"settings.check_{k}") for k in ("name", "value", "limit", "result", "meaning"))
    return [heading(say("settings.checks_head"), 2.5), *table("self-checks", head, rows, widths=(30, 18, 16, 17, 89))]


def _modes_table(context: Context) -> list[Block]:
    rows = [
        (m.name, number(m.cutoff_mhz, 1), say("words.yes") if m.propagates else say("words.no"),
         say("words.yes") if m.excited else say("words.no"), m.why)
        for m in context.feed.modes
    ]  # fmt: skip
    if not rows:
        return []
    head = tuple(say(f"settings.mode_{k}") for k in ("name", "cutoff", "propagates", "excited", "why"))
    return [heading(say("settings.modes_head"), 2.5), *table("modes", head, rows, widths=(15, 26, 25, 17, 87))]


def _yield_table(context: Context) -> list[Block]:
    y = context.feed.yields
    rows = [
        (say("yield.before"), f"{number(100 * y.before_trimming, 1)} %"),
        (say("yield.after"), f"{number(100 * y.after_trimming, 1)} %"),
        (say("yield.dominant"), ", ".join(size_name(name) for name in y.dominant)),
        (say("yield.samples"), say("yield.samples_value", samples=y.samples, solves=y.model_check_samples,
                                   error=number(y.model_error, 3))),
        (say("yield.cold"), say("yield.drift", mhz=number(y.drift_mhz_cold, 2), db=number(y.return_loss_cold_db, 1))),
        (say("yield.hot"), say("yield.drift", mhz=number(y.drift_mhz_hot, 2), db=number(y.return_loss_hot_db, 1))),
    ]  # fmt: skip
    head = (say("settings.what"), say("table.value"))
    return [heading(say("yield.head"), 2.5), *table("yield", head, rows, widths=(80, 90))]


def _sources(context: Context) -> list[Block]:
    """Where the stock's figures come from, one line each."""
    from fabgen.stock import tables

    job = context.feed.job
    rows = []
    for label, row in (
        (say("source.loop"), tables.metal(job.loop.metal)),
        (
            say("source.can"),
            tables.metal(job.can.metal) if job.can.make != "printed" else tables.plastic(job.can.plastic),
        ),
        (say("source.coax"), tables.coax(job.cable.coax)),
        (say("source.connector"), tables.connector(job.cable.connector)),
    ):
        rows.append((label, row.name, row.source.text, row.source.known_from))
    if job.can.make == "printed":
        lining = tables.lining(job.can.lining)
        rows.append((say("source.lining"), lining.name, lining.source.text, lining.source.known_from))
    head = tuple(say(f"source.{k}") for k in ("use", "stock", "text", "known"))
    return [heading(say("source.head"), 2.5), *table("sources", head, rows, size=1.8, widths=(24, 40, 62, 44))]
