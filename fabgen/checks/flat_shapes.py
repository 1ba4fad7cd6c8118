"""Distances on flat patterns: flanges, holes, webs, slots, reliefs. Exact arcs are sampled to 0.01 mm.

Depends on: parts (contour, records). Imports shapely when called.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from fabgen.parts.contour import Circle, FoldLine, Outline, area_mm2, bounds_mm, sampled
from fabgen.parts.records import FlatPattern

if TYPE_CHECKING:
    from shapely import Polygon

AROUND_MM = 0.02
"""Slack for sampled arcs."""


@dataclass(frozen=True)
class Hole:
    """A hole: narrowest width, and a point for naming it."""

    number: int
    width_mm: float
    x_mm: float
    y_mm: float
    outline: Outline


def holes(flat: FlatPattern) -> tuple[Hole, ...]:
    """Every hole with its narrowest width (diameter; for a slot, four times its area over its half perimeter)."""
    found = []
    for number, outline in enumerate(flat.holes, start=1):
        x0, y0, x1, y1 = bounds_mm(outline)
        found.append(Hole(number, narrowest_mm(outline), (x0 + x1) / 2, (y0 + y1) / 2, outline))
    return tuple(found)


def narrowest_mm(outline: Outline) -> float:
    """Width of the narrowest strip that holds the outline (the short side of its least rectangle)."""
    if isinstance(outline, Circle):
        return outline.diameter_mm
    from shapely import Polygon

    rectangle = Polygon(sampled(outline)).minimum_rotated_rectangle
    corners = list(rectangle.exterior.coords)
    return min(math.dist(corners[0], corners[1]), math.dist(corners[1], corners[2]))


def region(outline: Outline) -> Polygon:
    """The outline as a shapely polygon."""
    from shapely import Polygon

    return Polygon(sampled(outline))


def material(flat: FlatPattern) -> Polygon:
    """The sheet that is left, holes taken out."""
    from shapely import Polygon

    return Polygon(sampled(flat.outline), [sampled(hole) for hole in flat.holes])


def hole_to_edge_mm(flat: FlatPattern, hole: Hole) -> float:
    """Edge of the hole to the part's outer edge."""
    return float(region(hole.outline).distance(region(flat.outline).exterior))


def hole_to_fold_mm(hole: Hole, fold: FoldLine) -> float:
    """Edge of the hole to the fold line."""
    from shapely import LineString

    return float(region(hole.outline).distance(LineString([fold.start, fold.end])))


def hangs_on(hole: Hole, fold: FoldLine) -> bool:
    """Whether the fold ends on the hole's edge on both sides: a tab that hangs into an opening."""
    from shapely import Point

    edge = region(hole.outline).exterior
    return all(edge.distance(Point(end)) < 0.05 for end in (fold.start, fold.end))


def step_folds(flat: FlatPattern, closer_than_mm: float) -> frozenset[int]:
    """Numbers of folds that make a step: two parallel folds, one up and one down, close to each other."""
    from shapely import LineString

    found: set[int] = set()
    for i, first in enumerate(flat.folds):
        for second in flat.folds[i + 1 :]:
            if first.angle_deg * second.angle_deg >= 0 or abs(first.angle_deg) > 60 or abs(second.angle_deg) > 60:
                continue
            gap = LineString([first.start, first.end]).distance(LineString([second.start, second.end]))
            if gap < closer_than_mm:
                found |= {first.number, second.number}
    return frozenset(found)


def closest_holes(flat: FlatPattern) -> tuple[float, int, int] | None:
    """The narrowest web between two holes and their numbers; None with less than two holes."""
    shapes = [(hole.number, region(hole.outline)) for hole in holes(flat)]
    webs = [
        (float(a.distance(b)), first, second)
        for i, (first, a) in enumerate(shapes)
        for second, b in shapes[i + 1 :]
    ]
    return min(webs, default=None)


def leg_mm(flat: FlatPattern, fold: FoldLine) -> float:
    """The shorter leg of a fold, measured outside: from the outer face of the other leg to the leg's end.

    Along the normal in the fold's middle, to the part's edge or to the next parallel fold line. The flat distance
    from the fold line, less half the allowance, plus the outside setback."""
    legs = [distance for side in (1.0, -1.0) if (distance := _reach(flat, fold, side)) is not None]
    beta = math.radians(abs(fold.angle_deg))
    setback = (fold.inside_radius_mm + flat.thickness_mm) * math.tan(beta / 2)
    return min(legs, default=0.0) - fold.allowance_mm / 2 + setback


def _reach(flat: FlatPattern, fold: FoldLine, side: float) -> float | None:
    from shapely import LineString, Point

    (x0, y0), (x1, y1) = fold.start, fold.end
    length = math.hypot(x1 - x0, y1 - y0)
    if length == 0:
        return None
    middle = ((x0 + x1) / 2, (y0 + y1) / 2)
    normal = (-side * (y1 - y0) / length, side * (x1 - x0) / length)
    ray = LineString([middle, (middle[0] + 1e4 * normal[0], middle[1] + 1e4 * normal[1])])
    stops = [region(flat.outline).exterior]
    stops += [region(hole.outline).exterior for hole in holes(flat) if hangs_on(hole, fold)]
    stops += [LineString([f.start, f.end]) for f in flat.folds if f.number != fold.number]
    hits = [Point(middle).distance(ray.intersection(stop)) for stop in stops if ray.intersects(stop)]
    return min((float(hit) for hit in hits if hit > AROUND_MM), default=None)


def relieved(flat: FlatPattern, fold: FoldLine, width_mm: float) -> bool:
    """Whether the sheet is cut away beside both ends of the fold, so that nothing tears when it is folded."""
    from shapely import Point

    (x0, y0), (x1, y1) = fold.start, fold.end
    length = math.hypot(x1 - x0, y1 - y0) or 1.0
    along = ((x1 - x0) / length, (y1 - y0) / length)
    sheet = material(flat)
    step = 0.5 * width_mm
    ends = ((x0 - step * along[0], y0 - step * along[1]), (x1 + step * along[0], y1 + step * along[1]))
    return not any(sheet.contains(Point(end)) for end in ends)


def has_web_under(flat: FlatPattern, width_mm: float) -> bool:
    """Whether the part has a place narrower than ``width_mm``: shrunk by half of it, it falls apart."""
    shape = material(flat)
    shrunk = shape.buffer(-(width_mm - AROUND_MM) / 2)
    return bool(shrunk.geom_type != "Polygon" or shrunk.is_empty)


def slot_area_under_mm2(flat: FlatPattern, width_mm: float) -> float:
    """Area of gaps in the outer edge that are narrower than ``width_mm``: what closing by half of it fills.

    The filling of inner corners (a few hundredths of the width squared each) is taken off by opening the rest."""
    outer = region(flat.outline)
    half = (width_mm - AROUND_MM) / 2
    filled = outer.buffer(half).buffer(-half).difference(outer.buffer(AROUND_MM / 2))
    return float(filled.buffer(-width_mm / 8).area)


def size_mm(flat: FlatPattern) -> tuple[float, float]:
    """Length and width of the box around the flat pattern, longer side first."""
    x0, y0, x1, y1 = bounds_mm(flat.outline)
    return max(x1 - x0, y1 - y0), min(x1 - x0, y1 - y0)


def sheet_area_mm2(flat: FlatPattern) -> float:
    """Area of the flat pattern, holes taken out."""
    return area_mm2(flat.outline) - sum(area_mm2(hole) for hole in flat.holes)
