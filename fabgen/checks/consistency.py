"""Consistency: sizes of the feed, of the parts and of what is drawn are the same numbers.

Each drawn thing is measured again from its own geometry (radii of contours, marks of the wire), so a size that was
changed in one place only is found.

Depends on: checks (registry, texts), parts (contour, records), sizing (records, match).
"""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterator

from fabgen.checks.registry import Context, Fault, check
from fabgen.checks.texts import mm
from fabgen.errors import GeometryError
from fabgen.parts.can_sheet import can_wall, choke_wall
from fabgen.parts.capacitor import crossing_of
from fabgen.parts.contour import Arc, Circle, Contour, Outline, arc_between, bounds_mm, pairs
from fabgen.parts.floor_plan import floor_bottom_mm
from fabgen.parts.records import Part, WirePath
from fabgen.sizing.match import reflection, return_loss_db
from fabgen.stock import tables
from fabgen.theory.bending import bend_allowance, bend_deduction, wire_arc_mm

SAME_REFLECTION = 0.03
"""Reflections that count as the same: both under 30 dB, or a few tenths of a dB apart at 20 dB."""


def feed_sizes(context: Context) -> dict[str, float]:
    """The feed's sizes that are numbers, by name."""
    values = {f.name: getattr(context.sizes, f.name) for f in dataclasses.fields(context.sizes)}
    return {k: float(v) for k, v in values.items() if isinstance(v, int | float) and not isinstance(v, bool)}


def _differs(a: float, b: float, context: Context) -> bool:
    return not abs(a - b) <= context.limit("consistency_mm")


def _fault(part: str, feature: str, drawn: float, wanted: float, what: str) -> Fault:
    return Fault(
        part=part,
        feature=feature,
        value=mm(drawn),
        limit=mm(wanted),
        message=f"{what}: {drawn:.3f} mm in the part, {wanted:.3f} mm in the feed",
        cure=f"make the pack anew from the job; do not change {feature} by {drawn - wanted:+.3f} mm in one place only",
    )


@check("CONS-101", "stop", "consistency_mm")
def part_sizes(context: Context) -> Iterator[Fault]:
    """Named sizes of each part against the sizes that were simulated."""
    sizes = feed_sizes(context)
    for part in context.parts:
        # The choke has a bore and a wall of its own; bought parts have their makers' sizes.
        if "buy" in part.process or part.key.startswith("choke"):
            continue
        for name, value in part.sizes:
            if name in sizes and _differs(value, sizes[name], context):
                yield _fault(part.key, name, value, sizes[name], f"{name} of {part.name}")


def arcs_of(outline: Outline) -> Iterator[Arc]:
    """The arcs of a contour."""
    if isinstance(outline, Contour):
        for a, b in pairs(outline):
            if a.bulge:
                yield arc_between(a, b)


def radii_about_origin_mm(outline: Outline) -> frozenset[float]:
    """Radii of the circles and arcs about the origin, to 1 um."""
    if isinstance(outline, Circle):
        near = math.hypot(outline.x_mm, outline.y_mm) < 1e-3
        return frozenset({round(outline.diameter_mm / 2, 3)}) if near else frozenset()
    return frozenset(round(a.radius_mm, 3) for a in arcs_of(outline) if math.hypot(*a.centre) < 1e-3)


def _loop(context: Context) -> Part | None:
    return next((part for part in context.parts if part.key == "loop"), None)


@check("CONS-102", "stop", "consistency_mm")
def flat_ring(context: Context) -> Iterator[Fault]:
    """Radii of the flat ring as drawn against loop diameter and strip width."""
    part, s = _loop(context), context.sizes
    if part is None or part.flat is None or s.strip_width_mm is None:
        return
    drawn = radii_about_origin_mm(part.flat.outline)
    for name, radius in (
        ("outer radius of the ring", (s.loop_diameter_mm + s.strip_width_mm) / 2),
        ("inner radius of the ring", (s.loop_diameter_mm - s.strip_width_mm) / 2),
    ):
        nearest = min(drawn, key=lambda r: abs(r - radius), default=0.0)
        if _differs(nearest, radius, context):
            yield _fault(part.key, name, nearest, radius, name)


@check("CONS-103", "stop", "consistency_mm")
def folded_height(context: Context) -> Iterator[Fault]:
    """Length of the flat tabs as drawn against the height of the loop above the floor.

    Between the fold lines of a tab lies the bar: its straight part and half of each bend."""
    part, s = _loop(context), context.sizes
    if part is None or part.flat is None or s.sheet_mm is None:
        return
    folds = sorted(part.flat.folds, key=lambda f: f.number)
    rows: dict[float, list[tuple[float, float]]] = {}
    for fold in folds:
        x, y = (fold.start[0] + fold.end[0]) / 2, (fold.start[1] + fold.end[1]) / 2
        rows.setdefault(round(y, 2), []).append((x, fold.allowance_mm))
    straight = s.loop_height_mm - s.sheet_mm / 2 - 2 * (s.leg_bend_radius_mm + s.sheet_mm / 2)
    for row in rows.values():
        if len(row) != 2:
            continue
        drawn = abs(row[0][0] - row[1][0]) - (row[0][1] + row[1][1]) / 2
        if _differs(drawn, straight, context):
            yield _fault(part.key, "straight bar", drawn, straight, "straight length of a bar between its bends")


@check("CONS-104", "stop", "consistency_mm")
def fold_figures(context: Context) -> Iterator[Fault]:
    """Allowance and deduction printed for each fold against its own angle, radius and K."""
    for part in context.parts:
        if part.flat is None:
            continue
        t = part.flat.thickness_mm
        for fold in part.flat.folds:
            figures = (abs(fold.angle_deg), fold.inside_radius_mm, fold.k_factor, t)
            allowance, deduction = bend_allowance(*figures), bend_deduction(*figures)
            if _differs(fold.allowance_mm, allowance, context):
                yield _fault(part.key, f"allowance of fold {fold.number}", fold.allowance_mm, allowance, "allowance")
            if _differs(fold.deduction_mm, deduction, context):
                yield _fault(part.key, f"deduction of fold {fold.number}", fold.deduction_mm, deduction, "deduction")
        if part.thickness_mm is not None and _differs(t, part.thickness_mm, context):
            yield _fault(part.key, "thickness", t, part.thickness_mm, "thickness of the flat pattern")


@check("CONS-105", "stop", "consistency_mm")
def wire_marks(context: Context) -> Iterator[Fault]:
    """Marks and radii of the bent wire against loop, bars and bends that were simulated."""
    part, s = _loop(context), context.sizes
    if part is None or part.wire is None or s.wire_mm is None:
        return
    wire = part.wire
    if _differs(wire.diameter_mm, s.wire_mm, context):
        yield _fault(part.key, "wire_mm", wire.diameter_mm, s.wire_mm, "diameter of the wire")
    for bend in wire.bends:
        wanted = s.loop_diameter_mm / 2 if bend.angle_deg > 180 else s.leg_bend_radius_mm
        if _differs(bend.radius_mm, wanted, context):
            yield _fault(part.key, f"radius of {bend.name}", bend.radius_mm, wanted, f"axis radius of {bend.name}")
        length = wire_arc_mm(bend.angle_deg, bend.radius_mm, wire.diameter_mm)
        if _differs(bend.end_mm - bend.start_mm, length, context):
            yield _fault(part.key, f"marks of {bend.name}", bend.end_mm - bend.start_mm, length, "marks of a bend")
    yield from _wire_ends(context, part, wire)


def _wire_ends(context: Context, part: Part, wire: WirePath) -> Iterator[Fault]:
    """Straight ends: bar above the floor plus foot; both ends and the loop's arc close the cut length."""
    s = context.sizes
    if len(wire.bends) != 3:
        return
    foot = dict(part.sizes).get("foot_mm", 0.0)
    bar = s.loop_height_mm - s.leg_bend_radius_mm + foot
    ends = {"first end": wire.bends[0].start_mm, "last end": wire.cut_length_mm - wire.bends[-1].end_mm}
    for name, drawn in ends.items():
        if _differs(drawn, bar, context):
            yield _fault(part.key, name, drawn, bar, f"straight {name} of the wire")
    reach = math.hypot(s.loop_diameter_mm / 2, s.leg_bend_radius_mm)
    if s.leg_pitch_mm / 2 < reach:
        lean = math.atan2(s.leg_bend_radius_mm, s.loop_diameter_mm / 2)
        sweep = 360 - 2 * math.degrees(math.asin(s.leg_pitch_mm / 2 / reach) + lean)
        loop = max(wire.bends, key=lambda bend: bend.angle_deg)
        arc, wanted = math.radians(loop.angle_deg) * loop.radius_mm, math.radians(sweep) * s.loop_diameter_mm / 2
        if _differs(arc, wanted, context):
            yield _fault(part.key, "arc of the loop", arc, wanted, "arc of the loop by pitch of the bars")


@check("CONS-106", "stop", "consistency_mm")
def turned_tube_and_floor(context: Context) -> Iterator[Fault]:
    """Floor thickness and flat can walls as drawn against the sizes."""
    for part in context.parts:
        if part.flat is None:
            continue
        if part.key == "floor" and _differs(part.flat.thickness_mm, context.sizes.floor_mm, context):
            yield _fault(part.key, "floor_mm", part.flat.thickness_mm, context.sizes.floor_mm, "floor's thickness")
        if part.key == "wall" and _differs(part.flat.thickness_mm, context.sizes.wall_mm, context):
            yield _fault(part.key, "wall_mm", part.flat.thickness_mm, context.sizes.wall_mm, "wall's thickness")


@check("CONS-107", "stop", "consistency_mm")
def wall_strip_length(context: Context) -> Iterator[Fault]:
    """Developed length and width of a rolled or folded wall as drawn, against bore, flats, thickness and depth.

    The wanted length is laid out anew from the sizes: once round the neutral line, step and lap of the seam."""
    if context.job.can.make not in {"rolled", "folded"}:
        return
    walls = {"wall": can_wall, "choke-wall": choke_wall}
    for part in context.parts:
        if part.key not in walls or part.flat is None:
            continue
        try:
            wall = walls[part.key](context.feed)
        except GeometryError as error:
            yield Fault(
                part=part.key,
                feature="flat length",
                value="drawn",
                limit="possible",
                message=f"the sizes do not make this wall: {error}",
                cure="make the pack anew from the job: 1 wall is wrong",
            )
            continue
        x0, _, x1, y1 = bounds_mm(part.flat.outline)
        if wall is None:
            continue
        for feature, drawn, wanted in (("flat length", x1 - x0, wall.path.flat_mm), ("rim", y1, wall.depth_mm)):
            if _differs(drawn, wanted, context):
                yield _fault(part.key, feature, drawn, wanted, f"{feature} of {part.name}")


@check("CONS-108", "stop", source="Z - j/(omega C) against 50 ohm")
def match_adds_up(context: Context) -> Iterator[Fault]:
    """Return loss as stated against impedance and capacitor as stated."""
    predicted, s = context.feed.predicted, context.sizes
    reflected = reflection(predicted.impedance_ohm, s.series_capacitor_pf, context.frequency_mhz)
    computed = return_loss_db(reflected)
    if abs(abs(reflected) - 10 ** (-predicted.return_loss_db / 20)) > SAME_REFLECTION:
        yield Fault(
            part="feed",
            feature="match",
            value=f"{predicted.return_loss_db:.1f} dB",
            limit=f"{computed:.1f} dB",
            message=f"{predicted.impedance_ohm.real:.1f}{predicted.impedance_ohm.imag:+.1f}j ohm behind "
            f"{s.series_capacitor_pf:.3f} pF gives {computed:.1f} dB, not {predicted.return_loss_db:.1f} dB",
            cure=f"size the feed anew: the numbers differ by {abs(computed - predicted.return_loss_db):.1f} dB",
        )


@check("CONS-109", "stop", source="capacitor part against the sizes")
def capacitor_matches(context: Context) -> Iterator[Fault]:
    """Capacitor part against the series capacitance that was simulated, and inside its own range."""
    part, wanted = context.feed.capacitor, context.sizes.series_capacitor_pf
    off = abs(part.capacitance_pf - wanted)
    inside = part.minimum_pf - 1e-9 <= wanted <= part.maximum_pf + 1e-9
    if off <= 0.02 * wanted and inside:
        return
    yield Fault(
        part="capacitor",
        feature="capacitance",
        value=f"{part.capacitance_pf:.3f} pF",
        limit=f"{wanted:.3f} pF",
        message=f"the part is sized for {part.capacitance_pf:.3f} pF ({part.minimum_pf:.2f} to {part.maximum_pf:.2f}), "
        f"the feed needs {wanted:.3f} pF",
        cure=f"size the feed anew; the overlap is off by {off / max(part.pf_per_mm, 1e-6):.1f} mm",
    )


@check("CONS-110", "stop", "consistency_mm")
def metal_in_the_job(context: Context) -> Iterator[Fault]:
    """Metal and thickness of loop and can against the job's stock."""
    job, s = context.job, context.sizes
    part = _loop(context)
    if part is not None and part.material != tables.metal(job.loop.metal).key:
        yield Fault(
            part=part.key,
            feature="material",
            value=part.material,
            limit=job.loop.metal,
            message=f"the loop is made of {part.material}, the job has {job.loop.metal}",
            cure="make the pack anew from the job: 1 part with a wrong metal",
        )
    for name, drawn, wanted in (
        ("wire_mm", s.wire_mm, job.loop.wire_mm if job.loop.form == "wire" else None),
        ("sheet_mm", s.sheet_mm, job.loop.sheet_mm if job.loop.form == "sheet" else None),
        ("wall_mm", s.wall_mm, job.can.wall_mm),
        ("floor_mm", s.floor_mm, job.can.floor_mm),
    ):
        if drawn is not None and wanted is not None and _differs(drawn, wanted, context):
            yield _fault("feed", name, drawn, wanted, f"{name} against the job's stock")


def _stock_sizes(context: Context, key: str) -> dict[str, float]:
    """Sizes of tubes and of the choke under the names that the parts give them."""
    s, choke = context.sizes, context.sizes.choke
    if key == "can-tube":
        return {"length_mm": s.can_depth_mm, "bore_mm": s.can_bore_mm, "wall_mm": s.wall_mm}
    if key == "wall":
        return {"depth_mm": s.can_depth_mm}
    if choke is None or not key.startswith("choke"):
        return {}
    if key == "choke-tube":
        return {"length_mm": choke.depth_mm, "bore_mm": choke.bore_mm, "wall_mm": s.wall_mm}
    wall = {"depth_mm": choke.depth_mm, "wall_mm": s.wall_mm} if key == "choke-wall" else {}
    return {"choke_bore_mm": choke.bore_mm, "choke_depth_mm": choke.depth_mm, **wall}


@check("CONS-111", "stop", "consistency_mm")
def bought_and_cut_lengths(context: Context) -> Iterator[Fault]:
    """Tubes, walls, choke and coax against bore, depth, choke and tap height, by the names of their sizes."""
    for part in context.parts:
        sizes = dict(part.sizes)
        for name, wanted in _stock_sizes(context, part.key).items():
            if name in sizes and _differs(sizes[name], wanted, context):
                yield _fault(part.key, name, sizes[name], wanted, f"{name} of {part.name}")
        if "jacket_mm" in sizes:
            wanted = crossing_of(context.feed).jacket_top_mm - floor_bottom_mm(context.feed)
            if _differs(sizes["jacket_mm"], wanted, context):
                yield _fault(part.key, "jacket_mm", sizes["jacket_mm"], wanted, "jacket of the coax up to the tap")
