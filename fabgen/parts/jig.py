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
form. Mandrels allow for spring-back (theory.springback).

Depends on: errors, stock, parts (contour, kernel, loop_wire, records), sizing.records.
"""

from __future__ import annotations

import math
from functools import partial
from typing import TYPE_CHECKING

from fabgen.errors import GeometryError
from fabgen.parts.contour import Circle, Contour, Outline, area_mm2, rectangle, rounded
from fabgen.parts.kernel import once
from fabgen.parts.loop_wire import bend_to_deg, wire_path
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


def bending_jig(feed: Feed) -> tuple[Part, ...]:
    """Leg form and loop form of a wire loop; no parts for a sheet loop.

    A loop form larger than the printer's bed is left out and the leg form says so.
    """
    if feed.sizes.wire_mm is None:
        return ()
    path = wire_path(feed)
    leg, loop = path.bends[0], path.bends[1]
    bed = min(feed.job.limits.bed_mm[:2])
    needed = loop.mandrel_mm + 6 * path.diameter_mm
    form = _loop_form(feed, path, loop)
    if needed <= bed:
        return _leg_form(feed, path, leg, ()), form
    note = (
        f"the loop's form of {loop.mandrel_mm:.1f} mm does not fit a bed of {bed:g} mm: "
        "turn or saw it from wood to that diameter"
    )
    return (_leg_form(feed, path, leg, (note,)),)


def _plastic(
    feed: Feed, key: str, name: str, sizes: tuple[tuple[str, float], ...], volume_mm3: float, notes: tuple[str, ...],
    solid: partial[cadquery.Shape],
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
        quantity=1,
        sizes=sizes,
        tolerance="+-0.2 mm",
        finish="as printed",
        print_solid=once(solid),
        mass_kg=volume_mm3 * 1e-9 * plastic.density_kg_per_m3,
        notes=notes,
    )  # fmt: skip


def leg_outlines(path: WirePath, leg: WireBend, bend_to: float) -> tuple[Contour, Contour, Contour]:
    """Block, fence and stop of the leg form in its plane; the bend starts at the origin, the wire comes from -x.

    ``bend_to``: angle under load, degrees. Raises GeometryError over 160 degrees.
    """
    if not 45 <= bend_to <= 160:
        raise GeometryError(f"a bar would have to be bent to {bend_to:.0f} degrees; use a softer temper")
    d, r = path.diameter_mm, leg.mandrel_mm / 2
    near, reach = d / 2 + CHANNEL_CLEARANCE_MM / 2, leg.start_mm
    turn = math.radians(bend_to)
    corner = r * math.tan(turn / 2)
    side = corner + BLOCK_MM
    tip = (corner + side * math.cos(turn), near + side * math.sin(turn))
    left = -reach - CHANNEL_CLEARANCE_MM
    block = rounded([(left, near, 0), (corner, near, r), (*tip, 1.0), (left, tip[1], 0)])
    fence = rectangle((left, -near - WALL_MM), (-r, -near))
    stop = rectangle((left - WALL_MM, -near - WALL_MM), (left, tip[1]))
    return block, fence, stop


def _leg_form(feed: Feed, path: WirePath, leg: WireBend, notes: tuple[str, ...]) -> Part:
    bend_to = bend_to_deg(feed, leg)
    outlines = leg_outlines(path, leg, bend_to)
    near = path.diameter_mm / 2 + CHANNEL_CLEARANCE_MM / 2
    top = max(v.y_mm for v in outlines[0].vertices)
    left = min(v.x_mm for v in outlines[2].vertices)
    right = max(v.x_mm for v in outlines[0].vertices) + 15.0
    plate = rectangle((left, -near - WALL_MM - 12.0), (right, top))
    height = path.diameter_mm + 3.0
    y = -near - WALL_MM - 6.0
    holes = (Circle(left + 8.0, y, CLAMP_HOLE_MM), Circle(right - 8.0, y, CLAMP_HOLE_MM))
    volume = (area_mm2(plate) - sum(area_mm2(h) for h in holes)) * PLATE_MM
    volume += sum(area_mm2(o) for o in outlines) * height
    sizes = (("mandrel_mm", leg.mandrel_mm), ("stop_to_bend_mm", leg.start_mm), ("bend_to_deg", bend_to))
    text = f"end of the wire against the stop, bend along the block to {bend_to:.1f} degrees; both ends alike"
    solid = partial(_stepped, plate, holes, outlines, height)
    return _plastic(feed, "jig-leg", "bending form for the bars", sizes, volume, (text, *notes), solid)


def _loop_form(feed: Feed, path: WirePath, loop: WireBend) -> Part:
    bend_to = bend_to_deg(feed, loop)
    d = path.diameter_mm
    plate = Circle(0.0, 0.0, loop.mandrel_mm + 6 * d)
    disc = Circle(0.0, 0.0, loop.mandrel_mm)
    height = d + 2.0
    at = min(12.0, loop.mandrel_mm / 4)
    holes = (Circle(at, 0.0, CLAMP_HOLE_MM), Circle(-at, 0.0, CLAMP_HOLE_MM)) if at > 4 else ()
    drilled = sum(area_mm2(h) for h in holes)
    volume = (area_mm2(plate) - drilled) * PLATE_MM + (area_mm2(disc) - drilled) * height - 2 * _mark_mm3(plate, disc)
    sizes = (("mandrel_mm", loop.mandrel_mm), ("bend_to_deg", bend_to))
    text = f"bars up; wind from mark to mark ({bend_to:.1f} degrees under load), the gap to +x"
    solid = partial(_marked, plate, holes, disc, height, (360.0 - bend_to) / 2)
    return _plastic(feed, "jig-loop", "bending form for the loop", sizes, volume, (text,), solid)


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
