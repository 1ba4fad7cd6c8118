"""Distances on flat patterns: flanges, holes, webs, slots, reliefs. Exact arcs are sampled to 0.01 mm.

Depends on: parts (contour, records). Imports shapely when called.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from fabgen.parts.contour import Circle, FoldLine, Outline, bounds_mm, sampled
from fabgen.parts.records import FlatPattern

if TYPE_CHECKING:
    from shapely import Polygon

AROUND_MM = 0.02
"""Slack for sampled arcs."""
ON_EDGE_MM = 0.05
"""A fold that ends this close to a hole's edge ends on it."""
STEP_DEG = 60.0
"""Largest bend of a step; steeper pairs are flanges."""


@dataclass(frozen=True)
class Hole:
    """A hole: its number and narrowest width."""

    number: int
    width_mm: float
    outline: Outline


@dataclass(frozen=True)
class Shapes:
    """A flat pattern as shapely geometry, with the distances that several checks need.

    ``to_fold_mm`` and ``hangs`` have a row per fold and a column per hole; a fold hangs on a hole when both its
    ends lie on the hole's edge (a tab that hangs into an opening)."""

    outer: Polygon
    material: Polygon
    holes: tuple[Hole, ...]
    regions: Any
    lines: Any
    to_fold_mm: Any
    hangs: Any


@lru_cache(maxsize=64)
def shapes_of(flat: FlatPattern) -> Shapes:
    """The flat pattern's geometry, made once for all checks."""
    import numpy as np
    import shapely

    rings = [sampled(hole) for hole in flat.holes]
    regions = np.array([shapely.Polygon(ring) for ring in rings], dtype=object)
    lines = np.array([shapely.LineString([f.start, f.end]) for f in flat.folds], dtype=object)
    edges = shapely.get_exterior_ring(regions) if len(regions) else regions
    hangs = np.ones((len(lines), len(regions)), dtype=bool)
    if hangs.size:
        for end in (0, -1):
            points = shapely.get_point(lines, end)
            hangs &= shapely.distance(points[:, None], edges[None, :]) < ON_EDGE_MM
    ring = sampled(flat.outline)
    return Shapes(
        outer=shapely.Polygon(ring),
        material=shapely.Polygon(ring, rings),
        holes=tuple(Hole(i, narrowest_mm(hole), hole) for i, hole in enumerate(flat.holes, start=1)),
        regions=regions,
        lines=lines,
        to_fold_mm=shapely.distance(lines[:, None], regions[None, :]) if hangs.size else hangs.astype(float),
        hangs=hangs,
    )


def narrowest_mm(outline: Outline) -> float:
    """Width of the narrowest strip that holds the outline (the short side of its least rectangle)."""
    if isinstance(outline, Circle):
        return outline.diameter_mm
    from shapely import Polygon

    corners = list(Polygon(sampled(outline)).minimum_rotated_rectangle.exterior.coords)
    return min(math.dist(corners[0], corners[1]), math.dist(corners[1], corners[2]))


def holes_to_edge_mm(flat: FlatPattern) -> list[float]:
    """Edge of each hole to the part's outer edge."""
    shapes = shapes_of(flat)
    return [float(region.distance(shapes.outer.exterior)) for region in shapes.regions]


def closest_holes(flat: FlatPattern) -> tuple[float, int, int] | None:
    """The narrowest web between two holes and their numbers; None with less than two holes."""
    import numpy as np
    import shapely

    regions = shapes_of(flat).regions
    if len(regions) < 2:
        return None
    first, second = np.triu_indices(len(regions), k=1)
    webs = shapely.distance(regions[first], regions[second])
    least = int(np.argmin(webs))
    return float(webs[least]), int(first[least]) + 1, int(second[least]) + 1


def step_folds(flat: FlatPattern, closer_than_mm: float) -> frozenset[int]:
    """Numbers of folds that make a step: two folds, one up and one down, close to each other."""
    lines = shapes_of(flat).lines
    slight = [(f, line) for f, line in zip(flat.folds, lines, strict=True) if abs(f.angle_deg) <= STEP_DEG]
    found: set[int] = set()
    for i, (first, line) in enumerate(slight):
        for second, other in slight[i + 1 :]:
            if first.angle_deg * second.angle_deg < 0 and line.distance(other) < closer_than_mm:
                found |= {first.number, second.number}
    return frozenset(found)


def leg_mm(flat: FlatPattern, index: int) -> float:
    """The shorter leg of the fold at that index, measured outside: from the other leg's outer face to its end.

    Along the normal in the fold's middle, to the part's edge or to the next parallel fold line. The flat distance
    from the fold line, less half the allowance, plus the outside setback."""
    fold = flat.folds[index]
    legs = [reach for side in (1.0, -1.0) if (reach := _reach(flat, index, side)) is not None]
    beta = math.radians(abs(fold.angle_deg))
    setback = (fold.inside_radius_mm + flat.thickness_mm) * math.tan(beta / 2)
    return min(legs, default=0.0) - fold.allowance_mm / 2 + setback


def _reach(flat: FlatPattern, index: int, side: float) -> float | None:
    import shapely

    shapes, fold = shapes_of(flat), flat.folds[index]
    (x0, y0), (x1, y1) = fold.start, fold.end
    length = math.hypot(x1 - x0, y1 - y0)
    if length == 0:
        return None
    middle = ((x0 + x1) / 2, (y0 + y1) / 2)
    normal = (-side * (y1 - y0) / length, side * (x1 - x0) / length)
    ray = shapely.LineString([middle, (middle[0] + 1e4 * normal[0], middle[1] + 1e4 * normal[1])])
    stops = [shapes.outer.exterior]
    stops += [region.exterior for region, on in zip(shapes.regions, shapes.hangs[index], strict=True) if on]
    stops += [line for i, line in enumerate(shapes.lines) if i != index]
    hits = shapely.distance(shapely.Point(middle), shapely.intersection(ray, stops))
    return min((float(hit) for hit in hits if hit > AROUND_MM), default=None)


def relieved(flat: FlatPattern, fold: FoldLine, width_mm: float) -> bool:
    """Whether the sheet is cut away beside both ends of the fold, so that nothing tears when it is folded."""
    from shapely import Point

    (x0, y0), (x1, y1) = fold.start, fold.end
    length = math.hypot(x1 - x0, y1 - y0) or 1.0
    along = ((x1 - x0) / length, (y1 - y0) / length)
    sheet, step = shapes_of(flat).material, 0.5 * width_mm
    ends = ((x0 - step * along[0], y0 - step * along[1]), (x1 + step * along[0], y1 + step * along[1]))
    return not any(sheet.contains(Point(end)) for end in ends)


def has_web_under(flat: FlatPattern, width_mm: float) -> bool:
    """Whether the part has a place narrower than ``width_mm``: shrunk by half of it, it falls apart."""
    shrunk = shapes_of(flat).material.buffer(-(width_mm - AROUND_MM) / 2, quad_segs=4)
    return bool(shrunk.geom_type != "Polygon" or shrunk.is_empty)


def slot_area_under_mm2(flat: FlatPattern, width_mm: float) -> float:
    """Area of gaps in the outer edge that are narrower than ``width_mm``: what closing by half of it fills.

    The filling of inner corners (a few hundredths of the width squared each) is taken off by shrinking the rest."""
    outer = shapes_of(flat).outer
    half = (width_mm - AROUND_MM) / 2
    closed = outer.buffer(half, quad_segs=4).buffer(-half, quad_segs=4)
    filled = closed.difference(outer.buffer(AROUND_MM / 2, quad_segs=2))
    return float(filled.buffer(-width_mm / 8, quad_segs=2).area)


def size_mm(flat: FlatPattern) -> tuple[float, float]:
    """Length and width of the box around the flat pattern, longer side first."""
    x0, y0, x1, y1 = bounds_mm(flat.outline)
    return max(x1 - x0, y1 - y0), min(x1 - x0, y1 - y0)


def tab_gaps(flat: FlatPattern) -> Iterator[tuple[int, int, float]]:
    """Neighbouring folds on one line by their numbers, and the gap between their ends, negative where they overlap."""
    lines: dict[tuple[float, float], list[tuple[float, float, int]]] = {}
    for fold in flat.folds:
        (x0, y0), (x1, y1) = sorted((fold.start, fold.end))
        angle = math.atan2(y1 - y0, x1 - x0)
        u, v = math.cos(angle), math.sin(angle)
        key = round(angle, 4), round(y0 * u - x0 * v, 2) + 0.0
        lines.setdefault(key, []).append((x0 * u + y0 * v, x1 * u + y1 * v, fold.number))
    for spans in lines.values():
        for (_, end, first), (start, _, second) in pairwise(sorted(spans)):
            yield first, second, start - end
