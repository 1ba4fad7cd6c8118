"""The floor of a rolled or folded can, cut from sheet; its margin outside the wall is the mounting flange.

Seen from the aperture::

              ^ y, E-plane: round notches of E_MARK radius in the edge at +y and -y
        .-----v-----.
      /  o  .---. o   \\     o     flange holes on bolt_circle
     |    /  ...  \\    |    ...   coax, connector, feet, drains
     |   |   ...   |    <   V     notch in the edge at +x: the loop's gap
     |    \\       /    |    '---' wall, outside it the holes of its tabs
      \\  o  '---' o   /
        '-----^-----'

One sheet that is wider than the can is the simplest flange: nothing to weld on, and the can's current crosses no
second joint.

Depends on: errors, stock, parts (contour, floor_plan, floor_holes, wall_strip, kernel, making), sizing.records.
"""

from __future__ import annotations

import math
from dataclasses import replace
from functools import partial

from fabgen.errors import NotCoveredError
from fabgen.parts.contour import (
    Arc,
    Circle,
    Contour,
    Outline,
    Vertex,
    arc_between,
    area_mm2,
    pairs,
    split_arc,
    tidied,
)
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.floor_plan import flange_plan, marked_outline
from fabgen.parts.kernel import once, prism
from fabgen.parts.making import metal_part
from fabgen.parts.records import FlatPattern, Part
from fabgen.parts.wall_strip import Wall, tab_holes, tabs_width_mm
from fabgen.sizing.records import Feed

E_MARK_MM = 1.0
"""Radius of the notches on the E-plane, half as deep as the gap's. Common practice, no source."""
BARE_RIM_MM = 2.0
"""Margin outside the tabs of a floor without flange. Common practice, no source."""


def floor_sheet(feed: Feed, wall: Wall, outer: Wall | None = None) -> Part:
    """The floor for that wall, and for the choke's wall ``outer`` where both stand on one sheet.

    Raises NotCoveredError for a flange of another thickness than the floor.
    """
    s = feed.sizes
    width = tabs_width_mm(outer or wall)
    plan = flange_plan(feed, width)
    tabs = (*tab_holes(wall), *(tab_holes(outer) if outer else ()))
    holes: tuple[Outline, ...] = (*(h.outline for h in floor_holes(feed)), *tabs)
    sizes = [("floor_mm", s.floor_mm), ("can_bore_mm", s.can_bore_mm), ("tab_hole_mm", wall.tab.hole_mm)]
    edge: Outline = Circle(0.0, 0.0, width + 2 * BARE_RIM_MM)
    if plan is not None:
        if abs(plan.thickness_mm - s.floor_mm) > 1e-9:
            raise NotCoveredError(
                f"can.flange.thickness_mm = {plan.thickness_mm:g} differs from floor_mm = {s.floor_mm:g}: floor and "
                "flange are one sheet here; make them equal or leave the flange's thickness out"
            )
        edge, holes = marked_outline(plan), (*holes, *plan.holes)
        sizes += [("flange_width_mm", plan.width_mm), ("bolt_circle_mm", plan.bolt_circle_mm)]
    outline = with_e_marks(edge)
    area = area_mm2(outline) - math.fsum(area_mm2(h) for h in holes)
    return metal_part(
        "floor",
        "floor with flange" if plan else "floor",
        ("laser",),
        (feed.job.can.metal, feed.job.can.temper),
        feed,
        volume_mm3=area * s.floor_mm,
        sizes=tuple(sizes),
        flat=FlatPattern(outline, holes, (), s.floor_mm, "inside"),
        thickness_mm=s.floor_mm,
        solid=once(partial(prism, outline, holes, -s.floor_mm, s.floor_mm)),
        notes=(f"round notches on the edge: E-plane, {_seams(wall)}; pointed notch: gap of the loop",),
    )


def _seams(wall: Wall) -> str:
    return "seam of the wall at +y" if wall.copies == 1 else "seams of the wall at +y and -y"


def with_e_marks(outline: Outline, radius_mm: float = E_MARK_MM) -> Contour:
    """The outline (counter-clockwise) with a half-round notch where the y axis crosses it, above and below."""
    if isinstance(outline, Circle):
        outline = Contour(split_arc((outline.x_mm, outline.y_mm), outline.diameter_mm / 2, 0.0, 360.0))
    vertices: list[Vertex] = []
    for run in _runs(outline):
        vertices += _notched_line(*run, radius_mm) if isinstance(run, tuple) else _notched_arc(run, radius_mm)
    return tidied(Contour(tuple(vertices)))


def _runs(contour: Contour) -> list[Arc | tuple[Vertex, Vertex]]:
    """Lines, and arcs with all their pieces put together."""
    runs: list[Arc | tuple[Vertex, Vertex]] = []
    for a, b in pairs(contour):
        if a.bulge == 0.0:
            runs.append((a, b))
            continue
        arc = arc_between(a, b)
        last = runs[-1] if runs else None
        if isinstance(last, Arc) and math.dist(last.centre, arc.centre) < 1e-6:
            runs[-1] = replace(last, sweep_deg=last.sweep_deg + arc.sweep_deg)
        else:
            runs.append(arc)
    return runs


def _notch(y_mm: float, top: bool, r: float) -> tuple[Vertex, ...]:
    return split_arc((0.0, y_mm), r, 0.0 if top else 180.0, -180.0)


def _notched_line(a: Vertex, b: Vertex, r: float) -> list[Vertex]:
    level = abs(a.y_mm - b.y_mm) < 1e-9 and min(a.x_mm, b.x_mm) < -r and max(a.x_mm, b.x_mm) > r
    if not level:
        return [a]
    top = a.x_mm > b.x_mm
    return [a, *_notch(a.y_mm, top, r), Vertex(-r if top else r, a.y_mm)]


def _notched_arc(arc: Arc, r: float) -> list[Vertex]:
    """The arc without its end, with notches where it passes the y axis; only arcs about the axis are notched."""
    half = math.degrees(math.asin(r / arc.radius_mm))
    at, end = arc.start_deg, arc.start_deg + arc.sweep_deg
    out: list[Vertex] = []
    for quarter in (-270.0, -90.0, 90.0, 270.0, 450.0):
        if math.hypot(*arc.centre) > 1e-6 or not at < quarter - half < quarter + half < end:
            continue
        top = math.sin(math.radians(quarter)) > 0
        y = math.copysign(arc.radius_mm * math.cos(math.radians(half)), 1.0 if top else -1.0)
        out += [*split_arc(arc.centre, arc.radius_mm, at, quarter - half - at), *_notch(y, top, r)]
        at = quarter + half
    return [*out, *split_arc(arc.centre, arc.radius_mm, at, end - at)]
