"""Checks of printed parts: walls, bed, bridges, inserts, heat, water, warp, lining.

Depends on: checks (registry, texts), parts (can_printed, split, floor_holes), stock, theory.expansion.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from fabgen.checks.registry import Context, Fault, check, source_text
from fabgen.checks.texts import down, mm, up
from fabgen.parts.can_printed import ledge_of, one_piece_bed_mm
from fabgen.parts.contour import bounds_mm
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.kernel import teardrop_roof_mm
from fabgen.parts.records import Part
from fabgen.parts.split import EAR_SCREW
from fabgen.stock import tables


def printed_parts(context: Context) -> tuple[Part, ...]:
    """The parts that come from the printer."""
    return tuple(part for part in context.parts if "print" in part.process)


@check("PRINT-101", "caution", "print_wall_min_mm", "print_wall_thin_mm")
def wall_thickness(context: Context) -> Iterator[Fault]:
    """Wall and floor of a printed can against the thinnest wall; stop under two lines of a nozzle."""
    if not context.printed:
        return
    least, thin = context.limit("print_wall_min_mm"), context.limit("print_wall_thin_mm")
    for name, value in (("wall", context.sizes.wall_mm), ("floor", context.sizes.floor_mm)):
        if value < least - 1e-6:
            yield Fault(
                part="can",
                feature=name,
                value=mm(value),
                limit=mm(least),
                message=f"the {name} is {mm(value)} thick",
                cure=f"use {least:g} mm or more (can.{name}_mm)",
                severity="stop" if value < thin - 1e-6 else "caution",
            )


@check("PRINT-102", "note", source="design guides of print shops; read in a secondary page that quotes the source")
def wall_in_whole_lines(context: Context) -> Iterator[Fault]:
    """Wall as a multiple of the printed line's width."""
    if not context.printed:
        return
    wall, line = context.sizes.wall_mm, context.job.limits.line_width_mm
    lines = wall / line
    if abs(lines - round(lines)) * line > 0.02:
        yield Fault(
            part="can",
            feature="wall",
            value=f"{lines:.2f} lines",
            limit="whole lines",
            message=f"a wall of {mm(wall)} is {lines:.2f} lines of {mm(line)}: it gets a gap or an overfilled line",
            cure=f"use {max(1, round(lines)) * line:g} mm (can.wall_mm)",
        )


@check("PRINT-103", "note", source="the job's own printer bed")
def in_pieces(context: Context) -> Iterator[Fault]:
    """Bodies larger than the bed, which come in pieces with joints that the lining has to bridge."""
    for key in sorted({part.key.rsplit("-", 1)[0] for part in printed_parts(context) if part.key[-1:].isdigit()}):
        pieces = [part for part in printed_parts(context) if part.key.rsplit("-", 1)[0] == key]
        if len(pieces) < 2:
            continue
        crossing = _largest_current(context, key)
        larger = ""
        if key == "can":
            side, height = one_piece_bed_mm(context.feed)
            larger = f"; a bed of {up(side, 10):g} mm and {up(height, 10):g} mm of height takes it in one piece"
        bed = min(context.job.limits.bed_mm[:2])
        yield Fault(
            part=key,
            feature="bed",
            value=f"{len(pieces)} pieces",
            limit=f"bed {bed:g} mm",
            message=f"{key} is larger than the bed and comes in {len(pieces)} pieces; up to {crossing:.2f} A/m for 1 W "
            "at the port cross the joints of its lining",
            cure=f"line over every joint with foil or paint{larger}",
        )


def _largest_current(context: Context, key: str) -> float:
    """Largest computed current of the wall that a body carries, A/m for 1 W."""
    name = "choke wall" if key == "choke" else "wall"
    seams = context.feed.predicted.wall_current.seams
    return max((seam.peak_a_per_m for seam in seams if seam.name == name), default=0.0)


@dataclass(frozen=True)
class Roof:
    """A flat roof of a printed body, and how far the printer has to bridge it."""

    part: str
    feature: str
    span_mm: float


def roofs(context: Context) -> tuple[Roof, ...]:
    """Every flat roof of the printed parts. Bodies have 45 degree cones, chamfers and teardrops where they would have
    ceilings; the flat tops of the joint screws' level holes are what is left. The tests measure all meshes for it."""
    found = []
    for key in ("can", "choke"):
        if any(part.key == f"screw-{key}" for part in context.parts):
            hole = tables.screw(EAR_SCREW).clearance_medium_mm + context.limit("print_hole_allowance_mm")
            found.append(Roof(key, "level holes of the joint screws", teardrop_roof_mm(hole)))
    return tuple(found)


@check("PRINT-104", "caution", "bridge_max_mm")
def bridges(context: Context) -> Iterator[Fault]:
    """Flat roofs of all printed parts, which have to be bridged."""
    most = context.limit("bridge_max_mm")
    for roof in roofs(context):
        if roof.span_mm > most:
            yield Fault(
                part=roof.part,
                feature=roof.feature,
                value=mm(roof.span_mm),
                limit=mm(most),
                message=f"{roof.feature}: a roof of {mm(roof.span_mm)} bridges more than the printer can",
                cure=f"drill them after printing, or allow {up(roof.span_mm):g} mm (overrides.bridge_max_mm)",
            )


@check("PRINT-105", "caution", "insert_wall_min_mm")
def plastic_round_inserts(context: Context) -> Iterator[Fault]:
    """Plastic around heat-set inserts of the choke's ledge."""
    inserts = [part for part in context.parts if part.key.startswith("insert")]
    if not inserts or not context.printed:
        return
    ledge = ledge_of(context.feed)
    if ledge is None:
        return
    least = context.limit("insert_wall_min_mm")
    for part in inserts:
        wall = (ledge.width_mm - dict(part.sizes)["hole_mm"]) / 2
        if wall < least - 1e-6:
            yield Fault(
                part=part.key,
                feature="boss",
                value=mm(wall),
                limit=mm(least),
                message=f"{mm(wall)} of plastic around the insert bursts when it is set",
                cure=f"make the ledge {up(2 * (least - wall)):g} mm wider",
            )


@check("PRINT-106", "caution", "print_hole_min_mm")
def small_holes(context: Context) -> Iterator[Fault]:
    """Printed holes so small that they close."""
    if not context.printed:
        return
    least = context.limit("print_hole_min_mm")
    sizes = [(hole.purpose, bounds_mm(hole.outline)) for hole in floor_holes(context.feed)]
    small = {name: min(x1 - x0, y1 - y0) for name, (x0, y0, x1, y1) in sizes if min(x1 - x0, y1 - y0) < least}
    for name, width in sorted(small.items()):
        yield Fault(
            part="can",
            feature=f"{name} hole",
            value=mm(width),
            limit=mm(least),
            message=f"{name} holes of {mm(width)} close while printing",
            cure=f"drill them to {mm(width)} after printing",
        )


@check("PRINT-201", "caution", "sun_temperature_deg_c", "softening_margin_k")
def softening_in_the_sun(context: Context) -> Iterator[Fault]:
    """Softening temperature of the plastic against its temperature in the sun; stop where it softens."""
    if context.job.limits.environment == "indoor" or not (context.printed or context.job.can.radome):
        return
    part = "can" if context.printed else "radome"
    plastic = tables.plastic(context.job.can.plastic)
    sun = context.limit("sun_temperature_deg_c") - (0 if context.outdoors else 20)
    need = sun + context.limit("softening_margin_k")
    if plastic.softening_deg_c >= need:
        return
    fit = [row.name for row in tables.all_rows("plastic") if row.softening_deg_c >= need]
    yield Fault(
        part=part,
        feature="plastic",
        value=f"{plastic.softening_deg_c:g} degC",
        limit=f"{need:g} degC",
        message=f"{plastic.name} softens at {plastic.softening_deg_c:g} degC; the sun heats it to {sun:g} degC",
        cure=f"print {' or '.join(fit)}, or paint the outside white and shade it",
        severity="stop" if plastic.softening_deg_c < sun else "caution",
        source=source_text(plastic.source),
    )


@check("PRINT-202", "caution", "swelling_max_mm")
def swelling(context: Context) -> Iterator[Fault]:
    """Change of the bore by water that the plastic takes up."""
    if not context.printed:
        return
    plastic, most = tables.plastic(context.job.can.plastic), context.limit("swelling_max_mm")
    change = plastic.swelling_percent / 100 * context.sizes.can_bore_mm
    if change > most:
        yield Fault(
            part="can",
            feature="bore",
            value=mm(change),
            limit=mm(most),
            message=f"{plastic.name} swells by up to {plastic.swelling_percent:g} %: the bore grows by {mm(change)}",
            cure=f"dry it and varnish it outside, or print a plastic that swells by "
            f"{100 * most / context.sizes.can_bore_mm:.2f} % or less",
            source=source_text(plastic.source),
        )


@check("PRINT-203", "caution", "warp_floor_max_mm")
def warp(context: Context) -> Iterator[Fault]:
    """Warp of a large flat floor."""
    most = context.limit("warp_floor_max_mm")
    if not context.printed:
        return
    width = context.sizes.can_bore_mm + 2 * context.sizes.wall_mm
    pieces = sum(1 for part in printed_parts(context) if part.key.startswith("can"))
    if pieces > 1 or width <= most:
        return
    yield Fault(
        part="can",
        feature="floor",
        value=mm(width),
        limit=mm(most),
        message=f"a printed floor {mm(width)} wide lifts at its edge, ABS and ASA most",
        cure="print with a brim of 8 mm and a closed chamber, or make the floor of sheet metal (can.make = 'rolled')",
    )


@check("PRINT-204", "note", "lining_overlap_min_mm")
def lining_holds(context: Context) -> Iterator[Fault]:
    """How the lining holds on the plastic and how its joints carry current."""
    if not context.printed:
        return
    lining = tables.lining(context.job.can.lining)
    overlap = context.limit("lining_overlap_min_mm")
    cures = {
        "foil": f"overlap every joint by {overlap:g} mm and solder it, since adhesive does not conduct",
        "paint": "sand with grit 240, prime for plastic, two coats crosswise; measure 1 ohm or less across the can",
        "plating": "ask the plater which plastic and primer he takes; state 20 um copper inside",
    }
    yield Fault(
        part="can",
        feature="lining",
        value=lining.name,
        limit=f"joints overlap {overlap:g} mm" if lining.kind == "foil" else "unbroken",
        message=f"{lining.name} must be unbroken from floor to rim, above all round the floor's edge and the feet",
        cure=cures[lining.kind],
    )


@check("PRINT-205", "note", "print_tolerance_mm")
def printed_bore_tolerance(context: Context) -> Iterator[Fault]:
    """Tolerance of a printed bore against the one that the sizing reckons with."""
    if not context.printed:
        return
    most = context.limit("print_tolerance_mm")
    for row in context.feed.sensitivities:
        if row.size == "can_bore_mm" and row.tolerance_mm < most - 1e-6:
            yield Fault(
                part="can",
                feature="bore",
                value=f"+-{mm(row.tolerance_mm)} reckoned",
                limit=f"+-{mm(most)} usual",
                message=f"filament printers hold +-{mm(most)}; the yield is reckoned with +-{mm(row.tolerance_mm)}",
                cure=f"calibrate on a printed ring: measure its bore, scale to {down(most / 3, 0.05):g} mm or better",
            )
