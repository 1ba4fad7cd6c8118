"""Sizes, predictions, findings and stock as plain text tables for the terminal.

Depends on: units, job, sizing.records, checks.records.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import TYPE_CHECKING, Any

from fabgen.checks.records import Finding
from fabgen.job import AsWritten, Job
from fabgen.sizing.records import BENCH_LIMIT_DB, CanTrial, CapacitorPart, Feed, Sizes
from fabgen.units import INCH_MM

if TYPE_CHECKING:
    from fabgen.sizing.front import Front

_SEVERITIES = (("stop", "Stops the pack"), ("caution", "Caution"), ("note", "Note"))
_COLOURS = {"stop": "\x1b[31m", "caution": "\x1b[33m", "note": "\x1b[36m"}
_RESET = "\x1b[0m"
_MAX_COLUMN = 60


def table(rows: Iterable[Sequence[str]], indent: str = "  ") -> list[str]:
    """Rows in aligned columns."""
    cells = [tuple(row) for row in rows]
    if not cells:
        return []
    count = max(len(row) for row in cells)
    widths = [min(_MAX_COLUMN, max((len(row[i]) for row in cells if i < len(row)), default=0)) for i in range(count)]
    return [indent + "  ".join(c.ljust(w) for c, w in zip(row, widths, strict=False)).rstrip() for row in cells]


def size_report(feed: Feed) -> str:
    """A feed's sizes and predictions, with its uncertainty, as text."""
    lines = [
        f"{feed.job.target.name}: {feed.job.target.frequency_mhz:g} MHz, wavelength {feed.job.wavelength_mm:.2f} mm"
    ]
    lines += _section("As written", ((w.key, w.text, f"= {_with_unit(w)}") for w in feed.job.as_written))
    lines += _section("Sizes", _size_rows(feed.sizes))
    lines += _section("Series capacitor", _capacitor_rows(feed))
    lines += _section("Expected at the target", _predicted_rows(feed))
    lines += _section(
        "Gain on the axis",
        ((f"{p.frequency_mhz:.1f} MHz", f"{p.gain_dbi:+.1f} dBi", f"{p.relative_db:+.1f} dB to target") for p in
         feed.predicted.gain),
    )  # fmt: skip
    lines += _section("What moves the resonance most", _sensitivity_rows(feed))
    lines += _section("Cans compared (bore x depth)", _can_rows(feed))
    settings = feed.settings
    lines += _section(
        "How sure",
        (
            ("resonance", f"+-{settings.resonance_uncertainty_mhz:.2g} MHz", "from a second mesh"),
            ("return loss", _least_loss(feed), "from a second mesh"),
            (
                f"yield of {_wished(feed.job)}",
                f"{feed.yields.before_trimming:.0%}",
                f"{feed.yields.after_trimming:.0%} after trimming",
            ),
            (
                "-20 to +50 degC",
                f"{feed.yields.drift_mhz_cold:+.2g} to {feed.yields.drift_mhz_hot:+.2g} MHz",
                "by expansion",
            ),
        ),
    )
    lines += ["", *(f"Remark: {remark}" for remark in feed.remarks)] if feed.remarks else []
    return "\n".join(lines) + "\n"


def _with_unit(written: AsWritten) -> str:
    """A converted value with the unit that its key names: millimetres also in inches, metres also in feet."""
    ending = written.key.rstrip(".0123456789").rpartition("_")[2]
    value = f"{written.value:.6g}"
    if ending == "mm":
        return f"{value} mm ({written.value / INCH_MM:.4g} in)"
    if ending == "m":
        return f"{value} m ({written.value * 1000 / INCH_MM / 12:.4g} ft)"
    return f"{value} MHz"


def loss_text(loss_db: float) -> str:
    """A return loss as it can be measured: no bench tells losses above 40 dB apart."""
    return f"above {BENCH_LIMIT_DB:g} dB" if loss_db > BENCH_LIMIT_DB else f"{loss_db:.1f} dB"


def _least_loss(feed: Feed) -> str:
    """The return loss less its uncertainty."""
    least = feed.predicted.return_loss_db - feed.settings.return_loss_uncertainty_db
    return loss_text(least) if least > BENCH_LIMIT_DB else f"at least {least:.1f} dB"


def _can_rows(feed: Feed) -> list[tuple[str, ...]]:
    """The cans that were computed, by bore and depth."""
    return [
        (f"{t.bore_mm:.1f} x {t.depth_mm:.1f} mm", f"efficiency {t.aperture_efficiency:.3f}",
         f"G/T {t.g_over_t_db_per_k:.2f} dB/K", _choke_of(t))
        for t in sorted(feed.can_trials, key=lambda t: (t.bore_mm, t.depth_mm))
    ]  # fmt: skip


def _choke_of(trial: CanTrial) -> str:
    if trial.choke is None:
        return ""
    back = trial.depth_mm - trial.choke.floor_z_mm - trial.choke.depth_mm
    return f"choke {trial.choke.bore_mm:.1f} x {trial.choke.depth_mm:.1f} mm, set back {back:.1f} mm"


def _section(title: str, rows: Iterable[Sequence[str]]) -> list[str]:
    body = table(rows)
    return ["", title, *body] if body else []


def _length(name: str, value_mm: float | None) -> list[tuple[str, str, str]]:
    return [] if value_mm is None else [(name, f"{value_mm:.2f} mm", f"{value_mm / INCH_MM:.3f} in")]


def _size_rows(sizes: Sizes) -> list[tuple[str, ...]]:
    rows: list[tuple[str, ...]] = [
        *_length("can bore" if not sizes.can_flats else f"can across {sizes.can_flats} flats", sizes.can_bore_mm),
        *_length("can depth", sizes.can_depth_mm),
        *_length("wall", sizes.wall_mm),
        *_length("floor", sizes.floor_mm),
    ]
    if sizes.choke is not None:
        rows += _length("choke bore", sizes.choke.bore_mm)
        rows += _length("choke depth", sizes.choke.depth_mm)
        rows += _length("choke floor above can floor", sizes.choke.floor_z_mm)
    rows += _length("loop diameter (centreline)", sizes.loop_diameter_mm)
    rows += _length("loop height", sizes.loop_height_mm)
    rows += _length("wire", sizes.wire_mm)
    rows += _length("strip width", sizes.strip_width_mm)
    rows += _length("sheet", sizes.sheet_mm)
    rows += _length("bars from the axis", sizes.leg_x_mm)
    rows += _length("bars, centre to centre", sizes.leg_pitch_mm)
    rows += _length("tap height", sizes.tap_height_mm)
    return rows


def _capacitor_rows(feed: Feed) -> list[tuple[str, ...]]:
    part = feed.capacitor
    rows: list[tuple[str, ...]] = [
        (
            "value",
            f"{_picofarads(feed.sizes.series_capacitor_pf)} pF",
            f"trims {_picofarads(part.minimum_pf)} to {_picofarads(part.maximum_pf)} pF",
        ),
        ("form", part.form, f"overlap {part.overlap_mm:.1f} mm, {part.pf_per_mm:.3f} pF per mm"),
        _insulation_row(part),
    ]
    power = feed.job.wishes.transmit_w
    if power > 0:
        rows.append(("voltage", f"{part.peak_voltage_v:.0f} V peak", f"at {power:g} W"))
    return rows


def _wished(job: Job) -> str:
    band = job.wishes.bandwidth_mhz
    return f"{job.wishes.return_loss_db:g} dB" + (f" over {band:g} MHz" if band else "")


def _picofarads(value: float) -> str:
    """The digits that the sizing keeps: hundredths, thousandths below half a picofarad."""
    return f"{value:.2f}" if value >= 0.5 else f"{value:.3f}"


def _insulation_row(part: CapacitorPart) -> tuple[str, str, str]:
    if part.form == "sleeve":
        return ("PTFE", f"{part.outer_mm:.2f} mm outside", f"on wire of {part.inner_mm:.2f} mm, in brass tube")
    return ("PTFE", f"{part.film_mm:g} mm film", f"between plates {part.plate_width_mm:.2f} mm wide")


def _predicted_rows(feed: Feed) -> list[tuple[str, ...]]:
    p = feed.predicted
    return [
        ("impedance at the tap", f"{p.impedance_ohm.real:.1f} {p.impedance_ohm.imag:+.1f}j ohm"),
        ("return loss", loss_text(p.return_loss_db)),
        ("bandwidth", f"{p.bandwidth_mhz:.1f} MHz at {p.bandwidth_return_loss_db:g} dB"),
        ("aperture efficiency", f"{p.aperture_efficiency:.3f}"),
        ("spillover", f"{p.spillover:.3f}"),
        ("edge taper", f"{p.edge_taper_db:.1f} dB"),
        ("half-power beamwidth", f"{p.half_power_beamwidth_e_deg:.1f} deg E, {p.half_power_beamwidth_h_deg:.1f} deg H"),
        ("directivity", f"{p.directivity_dbi:.2f} dBi"),
        ("front to back", f"{p.front_to_back_db:.1f} dB"),
        ("phase centre", f"{p.phase_centre_mm:.1f} mm above the floor's inner face"),
        ("ohmic loss", f"{p.ohmic_loss_db:.3f} dB"),
        ("system noise", f"{p.system_noise_k:.1f} K"),
        ("G/T", f"{p.g_over_t_db_per_k:.2f} dB/K"),
    ]


def _sensitivity_rows(feed: Feed) -> list[tuple[str, ...]]:
    rows: list[tuple[str, ...]] = []
    for item in sorted(feed.sensitivities, key=lambda s: -abs(s.effect_mhz))[:3]:
        unit = "pF" if item.size.endswith("_pf") else "mm"
        name = item.size.removesuffix("_mm").removesuffix("_pf").replace("_", " ").replace(".", " ")
        rows.append(
            (
                name,
                f"{item.resonance_mhz_per_mm:+.1f} MHz per {unit}",
                f"{item.effect_mhz:.1f} MHz at +-{item.tolerance_mm:.2g} {unit}",
            )
        )
    return rows


def front_report(job: Job, front: Front) -> str:
    """The selectivity front: one row per matched point, sharp first."""
    lines = [f"{job.target.name}: rejection against efficiency at {job.target.frequency_mhz:g} MHz", ""]
    neighbours = front.points[0].neighbour_mhz
    head = ("place", "loop", "height", *(f"{f:g} MHz" for f in neighbours), "efficiency", "G/T", "return loss")
    rows = [
        (
            f"{point.share:.2f}",
            f"{point.sizes.loop_diameter_mm:.1f} mm",
            f"{point.sizes.loop_height_mm:.1f} mm",
            *(f"{value:+.1f} dB" for value in point.rejection_db),
            f"{point.aperture_efficiency:.3f}",
            f"{point.g_over_t_db_per_k:.2f} dB/K",
            loss_text(point.return_loss_db),
        )
        for point in front.points
    ]
    lines += table([head, *rows])
    lines += ["", *(f"Not matched: {text}" for text in front.refused)] if front.refused else []
    return "\n".join(lines) + "\n"


def findings_report(title: str, findings: Sequence[Finding], colour: bool) -> str:
    """All findings grouped by severity, worst first."""
    lines = [f"{title}: {len(findings)} findings"]
    for severity, heading in _SEVERITIES:
        chosen = [finding for finding in findings if finding.severity == severity]
        if not chosen:
            continue
        start, end = (_COLOURS[severity], _RESET) if colour else ("", "")
        lines += ["", f"{start}{heading} ({len(chosen)}){end}"]
        for finding in chosen:
            lines += [
                f"  {start}{finding.code}{end}  {finding.part}, {finding.feature}: {finding.value}, "
                f"limit {finding.limit}",
                f"      {finding.message}",
                f"      what to do: {finding.cure}",
                f"      source: {finding.source}",
            ]
    return "\n".join(lines) + "\n"


def stock_report(found: Mapping[str, Sequence[Mapping[str, Any]]]) -> str:
    """Stock rows by kind: key, name or meaning, the main figures, and the source."""
    lines: list[str] = []
    for kind, rows in found.items():
        lines += ["", f"{kind} ({len(rows)})"]
        for row in rows:
            lines.append(f"  {row['key']:<16} {row.get('name') or row.get('meaning') or ''}")
            figures = "; ".join(_figures(row))
            if figures:
                lines.append(f"  {'':<16} {figures}")
            source = row.get("source") or {}
            lines.append(f"  {'':<16} source: {source.get('text', '')} [{source.get('known_from', '')}]")
    return "\n".join(lines[1:]) + "\n"


def _figures(row: Mapping[str, Any]) -> Iterator[str]:
    for name, value in row.items():
        if name in {"key", "name", "meaning", "source", "colour"} or value is None:
            continue
        if name == "tempers":
            yield "tempers " + ", ".join(str(temper["key"]) for temper in value)
        elif name == "rows":
            yield ", ".join(f"to {up_to:g}: {figure:g}" for up_to, figure in value)
        elif name.endswith("_mm") and isinstance(value, tuple):
            yield f"{name} " + ", ".join(f"{item:g}" for item in value)
        elif isinstance(value, float):
            yield f"{name} {value:g}"
        elif not isinstance(value, dict | list | tuple):
            yield f"{name} {value}"
