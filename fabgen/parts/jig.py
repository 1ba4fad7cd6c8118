"""Printed jigs that bend the wire loop: a leg form for the two bars, and a loop form for the arc.

Leg form, seen from above::

          stop   fence of the block      the block's corner has the mandrel's radius; its far
         .--.---------------------.      side leans over by what the wire springs back
         |  |        block       /
         |  '------------------ (        the wire lies in the channel, its end against the
         |==========wire=========        stop; stop to the bend's start = first mark of the
         |  .----------------.           schedule
         '--'     fence      '

Loop form, seen from above::

             .------------.
           /   .--------.   \\            disc of the mandrel's diameter on a wider plate;
          |   |   o  o   |  -- marks     grooves in the plate: where arc and bars' bends meet
           \\   '--------'   /  --        while the wire is under load
             '------------'

The bars are bent first, both to the same side, on the leg form; then the wire, bars up, is wound round the loop
form. Mandrels allow for spring-back (theory.springback). Forms larger than the bed come in pieces (jig_split).

Depends on: errors, stock, parts (contour, jig_split, kernel, loop_wire, print_rules, records), sizing.records.
"""

from __future__ import annotations

import itertools
import math
import string
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial
from typing import TYPE_CHECKING

from fabgen.errors import GeometryError
from fabgen.parts import jig_split
from fabgen.parts.contour import Circle, Contour, Outline, Vertex, area_mm2, bounds_mm, rectangle, rounded
from fabgen.parts.jig_split import Knob
from fabgen.parts.kernel import once
from fabgen.parts.loop_wire import bend_to_deg, wire_path
from fabgen.parts.print_rules import print_rules
from fabgen.parts.records import Part, WireBend, WirePath
from fabgen.sizing.records import Feed
from fabgen.stock import tables

if TYPE_CHECKING:
    import cadquery

PLATE_MM = 5.0
CHANNEL_CLEARANCE_MM = 0.2
WALL_MM = 8.0
BLOCK_MM = 30.0
MARK_WIDTH_MM = 0.8
MARK_DEPTH_MM = 0.6
CLAMP_HOLE_MM = 5.5
"""For M5 screws into the bench. Common practice, no source."""
PASSING_DEG = 345.0
"""Beyond it the bars, bent already, meet before the wire is released. Common practice, no source."""
LEG_KNOB_MM = 4.5
"""Radius of the knobs of the leg form. Common practice, no source."""


def bending_jig(feed: Feed) -> tuple[Part, ...]:
    """Leg form and loop form of a wire loop; no parts for a sheet loop.

    A form larger than the printer's bed comes in pieces. Where not even pieces fit, the other form says so; raises
    GeometryError where neither does.
    """
    if feed.sizes.wire_mm is None:
        return ()
    path = wire_path(feed)
    made: list[Part] = []
    missing: list[str] = []
    for build, bend in ((_leg_form, path.bends[0]), (_loop_form, path.bends[1])):
        try:
            made += build(feed, path, bend)
        except BedTooSmallError as error:
            missing.append(str(error))
    if not made:
        raise GeometryError("; ".join(missing))
    made[0] = replace(made[0], notes=(*made[0].notes, *missing))
    return tuple(made)


class BedTooSmallError(GeometryError):
    """Not even a piece of a form fits the printer's bed."""


def _bed_mm(feed: Feed) -> tuple[float, float]:
    bed, margin = feed.job.limits.bed_mm, tables.limit("printer_clearance_mm", feed.job.overrides).value
    return bed[0] - 2 * margin, bed[1] - 2 * margin


def _too_small(feed: Feed, what: str, mandrel_mm: float, least_mm: float) -> BedTooSmallError:
    bed, least = feed.job.limits.bed_mm, math.ceil(least_mm)
    return BedTooSmallError(
        f"a printer bed of {bed[0]:g} x {bed[1]:g} mm is too small even for pieces of the {what}; print it on a bed "
        f"of {least} x {least} mm (limits.bed_mm), or turn it from wood to {mandrel_mm:.1f} mm"
    )


def _plastic(
    feed: Feed, key: str, name: str, sizes: tuple[tuple[str, float], ...], volume_mm3: float, notes: tuple[str, ...],
    solid: partial[cadquery.Shape], quantity: int = 1,
) -> Part:
    plastic = tables.plastic(feed.job.can.plastic)
    return Part(
        key=key,
        name=name,
        process=("print",),
        material=plastic.key,
        material_name=plastic.name,
        temper="",
        colour=plastic.colour,
        quantity=quantity,
        sizes=sizes,
        tolerance=f"+-{print_rules(feed).tolerance_mm:g} mm",
        finish="as printed",
        print_solid=once(solid),
        mass_kg=volume_mm3 * 1e-9 * plastic.density_kg_per_m3,
        notes=notes,
    )  # fmt: skip


def _stop_to_bend_mm(path: WirePath, leg: WireBend) -> float:
    """From the cut end of the wire, beyond the end of the schedule where it gets a thread, to the bend's first mark."""
    return path.beyond_mm + leg.start_mm


def leg_outlines(path: WirePath, leg: WireBend, bend_to: float) -> tuple[Contour, Contour, Contour]:
    """Block, fence and stop of the leg form in its plane; the bend starts at the origin, the wire comes from -x.

    ``bend_to``: angle under load, degrees. Raises GeometryError over 160 degrees.
    """
    if not 45 <= bend_to <= 160:
        raise GeometryError(f"a bar would have to be bent to {bend_to:.0f} degrees; use a softer temper")
    d, r = path.diameter_mm, leg.mandrel_mm / 2
    near, reach = d / 2 + CHANNEL_CLEARANCE_MM / 2, _stop_to_bend_mm(path, leg)
    turn = math.radians(bend_to)
    corner = r * math.tan(turn / 2)
    side = corner + BLOCK_MM
    tip = (corner + side * math.cos(turn), near + side * math.sin(turn))
    left = -reach - CHANNEL_CLEARANCE_MM
    block = rounded([(left, near, 0), (corner, near, r), (*tip, 1.0), (left, tip[1], 0)])
    fence = rectangle((left, -near - WALL_MM), (-r, -near))
    stop = rectangle((left - WALL_MM, -near - WALL_MM), (left, tip[1]))
    return block, fence, stop


@dataclass(frozen=True)
class _Form:
    """A form before it is split: its plate, what stands on it, and its screw holes."""

    plate: Contour
    tops: tuple[Contour, ...]
    holes: tuple[Circle, ...]
    height_mm: float

    def volume_mm3(self, low_mm: float = -math.inf, high_mm: float = math.inf) -> float:
        """Volume between two upright cuts across x."""
        plate = _between_mm2(self.plate, low_mm, high_mm)
        drilled = sum(area_mm2(h) for h in self.holes if low_mm < h.x_mm < high_mm)
        return (plate - drilled) * PLATE_MM + sum(_between_mm2(o, low_mm, high_mm) for o in self.tops) * self.height_mm


def _between_mm2(outline: Contour, low_mm: float, high_mm: float) -> float:
    """Area of a contour between two upright lines that cross no arc of it."""
    ring = outline.vertices
    for at, keep in ((low_mm, 1.0), (high_mm, -1.0)):
        if not math.isfinite(at):
            continue
        kept: list[Vertex] = []
        for a, b in zip(ring, (*ring[1:], *ring[:1]), strict=True):
            inside = keep * (a.x_mm - at) >= 0
            if inside:
                kept.append(a)
            if inside != (keep * (b.x_mm - at) >= 0):
                share = (at - a.x_mm) / (b.x_mm - a.x_mm)
                kept.append(Vertex(at, a.y_mm + share * (b.y_mm - a.y_mm)))
        ring = tuple(kept)
    return area_mm2(Contour(ring)) if len(ring) > 2 else 0.0


def _leg_plan(path: WirePath, leg: WireBend, bend_to: float) -> _Form:
    outlines = leg_outlines(path, leg, bend_to)
    near = path.diameter_mm / 2 + CHANNEL_CLEARANCE_MM / 2
    top = max(v.y_mm for v in outlines[0].vertices)
    left = min(v.x_mm for v in outlines[2].vertices)
    right = max(v.x_mm for v in outlines[0].vertices) + 15.0
    plate = rectangle((left, -near - WALL_MM - 12.0), (right, top))
    y = -near - WALL_MM - 6.0
    holes = (Circle(left + 8.0, y, CLAMP_HOLE_MM), Circle(right - 8.0, y, CLAMP_HOLE_MM))
    return _Form(plate, outlines, holes, path.diameter_mm + 3.0)


def _leg_form(feed: Feed, path: WirePath, leg: WireBend) -> tuple[Part, ...]:
    bend_to = bend_to_deg(feed, leg)
    form = _leg_plan(path, leg, bend_to)
    sizes = (("mandrel_mm", leg.mandrel_mm), ("stop_to_bend_mm", _stop_to_bend_mm(path, leg)), ("bend_to_deg", bend_to))
    text = f"end of the wire against the stop, bend along the block to {bend_to:.1f} degrees; both ends alike"
    key, name = "jig-leg", "bending form for the bars"
    x0, y0, x1, y1 = bounds_mm(form.plate)
    turn = jig_split.bed_turn_deg([(x0, y0), (x1, y0), (x1, y1), (x0, y1)], _bed_mm(feed))
    if turn is not None:
        solid = partial(_laid, form, turn)
        return (_plastic(feed, key, name, sizes, form.volume_mm3(), (text,), solid),)
    cuts = _leg_cuts(feed, form, leg.mandrel_mm)
    knobs = tuple(_leg_knobs(form, x) for x in cuts)
    # A clamp hole for every piece that has none yet.
    more = tuple(Circle((a + b) / 2, form.holes[0].y_mm, CLAMP_HOLE_MM) for a, b in itertools.pairwise(cuts))
    form = replace(form, holes=(*form.holes, *more))
    whole = once(partial(_stepped, form.plate, form.holes, form.tops, form.height_mm))
    ends = (-math.inf, *cuts, math.inf)
    parts = []
    for i, letter in enumerate(string.ascii_lowercase[: len(cuts) + 1]):
        volume = form.volume_mm3(ends[i], ends[i + 1])
        volume += sum(jig_split.knob_mm3(k) for k in knobs[i]) if i < len(cuts) else 0.0
        volume -= sum(jig_split.knob_mm3(k, jig_split.FIT_MM) for k in knobs[i - 1]) if i else 0.0
        words = (text, f"piece {letter} of {len(cuts) + 1} from the stop: press the knobs home, screw all to one board")
        solid = partial(_leg_piece, whole, cuts, knobs, i)
        parts.append(_plastic(feed, f"{key}-{letter}", f"{name}, piece {letter}", sizes, volume, words, solid))
    return tuple(parts)


def _leg_cuts(feed: Feed, form: _Form, mandrel_mm: float) -> tuple[float, ...]:
    """Places of the cuts between stop and bend, so that every piece with its knobs fits the bed."""
    bed = _bed_mm(feed)
    x0, y0, x1, y1 = bounds_mm(form.plate)
    most, stop = max(bed) - 2 * LEG_KNOB_MM, x0 + WALL_MM + 2 * LEG_KNOB_MM
    # The last piece holds the bend; cuts are left of it and not through the stop.
    last = -max(2 * LEG_KNOB_MM, abs(form.tops[1].vertices[1].x_mm) + 2 * LEG_KNOB_MM)
    count = math.ceil((x1 - x0) / max(most, 1.0))
    if y1 - y0 > min(bed) or x1 - last > most or count > 6:
        raise _too_small(feed, "bars' bending form", mandrel_mm, max(y1 - y0, x1 - last + 2 * LEG_KNOB_MM) + 5.0)
    cuts = [x1 - (x1 - x0) * i / count for i in range(count - 1, 0, -1)]
    return tuple(min(last, max(stop, x)) for x in cuts)


def _leg_knobs(form: _Form, x: float) -> tuple[Knob, ...]:
    """One in the block, one in the plate's rim."""
    block, beyond = bounds_mm(form.tops[0]), jig_split.NECK * LEG_KNOB_MM
    middle = (block[1] + block[3]) / 2
    return (
        Knob((x + beyond, middle), LEG_KNOB_MM, PLATE_MM + form.height_mm),
        Knob((x + beyond, form.holes[0].y_mm), LEG_KNOB_MM, PLATE_MM),
    )


def _leg_piece(
    whole: Callable[[], cadquery.Shape], cuts: tuple[float, ...], knobs: tuple[tuple[Knob, ...], ...], number: int
) -> cadquery.Shape:
    return jig_split.strip_piece(whole(), cuts, knobs, number)


def _laid(form: _Form, turn_deg: float) -> cadquery.Shape:
    from fabgen.parts import kernel

    body = _stepped(form.plate, form.holes, form.tops, form.height_mm)
    return kernel.on_bed(kernel.turned(body, turn_deg)) if turn_deg else body


def _loop_form(feed: Feed, path: WirePath, loop: WireBend) -> tuple[Part, ...]:
    bend_to = bend_to_deg(feed, loop)
    d = path.diameter_mm
    plate = Circle(0.0, 0.0, loop.mandrel_mm + 6 * d)
    disc = Circle(0.0, 0.0, loop.mandrel_mm)
    height, half_gap = d + 2.0, (360.0 - bend_to) / 2
    sizes = (("mandrel_mm", loop.mandrel_mm), ("bend_to_deg", bend_to))
    text = f"bars up; wind from mark to mark ({bend_to:.1f} degrees under load), the gap to +x"
    if bend_to > PASSING_DEG:
        text += "; the bars pass each other under load: let the wire climb by its diameter on the last turn"
    key, name, bed = "jig-loop", "bending form for the loop", _bed_mm(feed)
    marks = 2 * _mark_mm3(plate, disc)
    if plate.diameter_mm <= min(bed):
        at = min(12.0, loop.mandrel_mm / 4)
        holes = (Circle(at, 0.0, CLAMP_HOLE_MM), Circle(-at, 0.0, CLAMP_HOLE_MM)) if at > 4 else ()
        drilled = sum(area_mm2(h) for h in holes)
        volume = (area_mm2(plate) - drilled) * PLATE_MM + (area_mm2(disc) - drilled) * height - marks
        solid = partial(_marked, plate, holes, disc, height, half_gap)
        return (_plastic(feed, key, name, sizes, volume, (text,), solid),)
    plan = jig_split.loop_split(plate.diameter_mm, disc.diameter_mm, half_gap, bed)
    if plan is None:
        raise _too_small(feed, "loop's bending form", loop.mandrel_mm, 0.6 * plate.diameter_mm)
    drills = plan.screws(CLAMP_HOLE_MM)
    gone = 2 * area_mm2(drills[0]) + math.pi / 4 * plan.open_mm**2 / plan.sectors
    volume = (area_mm2(plate) / plan.sectors - gone) * PLATE_MM + (area_mm2(disc) / plan.sectors - gone) * height
    volume += jig_split.knob_balance_mm3(plan.knob(PLATE_MM + height))
    middle = (Circle(0.0, 0.0, plan.open_mm),) if plan.open_mm else ()
    whole = once(partial(_marked, plate, (*drills, *middle), disc, height, half_gap))
    first, other = (partial(_loop_piece, whole, plan, i) for i in (0, 1))
    words = (text, f"{plan.sectors} pieces: press the knobs home on a flat board and screw every piece to it")
    return (
        _plastic(feed, key, f"{name}, piece with the marks", sizes, volume - marks, words, first),
        _plastic(feed, f"{key}-plain", f"{name}, plain piece", sizes, volume, words, other, plan.sectors - 1),
    )


def _loop_piece(whole: Callable[[], cadquery.Shape], plan: jig_split.LoopSplit, number: int) -> cadquery.Shape:
    return jig_split.loop_piece(whole(), plan, number)


def _groove_mm(plate: Circle, disc: Circle) -> tuple[float, float]:
    """Ends of a mark's groove: beside the disc, and beyond the plate."""
    return disc.diameter_mm / 2 + 0.5, plate.diameter_mm / 2 + 1.0


def _mark_mm3(plate: Circle, disc: Circle) -> float:
    """Volume of one groove up to the plate's round edge: a rectangle and a segment of the circle."""
    radius, half = plate.diameter_mm / 2, MARK_WIDTH_MM / 2
    flat = math.sqrt(radius**2 - half**2)
    segment = radius**2 * math.asin(half / radius) - half * flat
    return (2 * half * (flat - _groove_mm(plate, disc)[0]) + segment) * MARK_DEPTH_MM


def _stepped(
    plate: Outline, holes: tuple[Circle, ...], tops: tuple[Outline, ...], height_mm: float
) -> cadquery.Shape:
    from fabgen.parts import kernel

    base = kernel.prism(plate, holes, 0.0, PLATE_MM)
    return kernel.fused(base, *(kernel.prism(o, (), PLATE_MM, height_mm) for o in tops), what="bending form")


def _marked(
    plate: Circle, holes: tuple[Circle, ...], disc: Circle, height_mm: float, half_gap_deg: float
) -> cadquery.Shape:
    from fabgen.parts import kernel

    base = kernel.prism(plate, (), 0.0, PLATE_MM)
    body = kernel.fused(base, kernel.prism(disc, (), PLATE_MM, height_mm), what="bending form")
    inner, outer = _groove_mm(plate, disc)
    groove = kernel.box((inner, -MARK_WIDTH_MM / 2, PLATE_MM - MARK_DEPTH_MM), (outer, MARK_WIDTH_MM / 2, PLATE_MM))
    grooves = [kernel.turned(groove, angle) for angle in (half_gap_deg, -half_gap_deg)]
    drills = [
        kernel.rod((h.x_mm, h.y_mm, -1.0), (h.x_mm, h.y_mm, PLATE_MM + height_mm + 1.0), h.diameter_mm) for h in holes
    ]
    return kernel.cut(body, *grooves, *drills, what="bending form")
