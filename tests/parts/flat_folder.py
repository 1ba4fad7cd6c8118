"""Folds a flat pattern the way a workshop does, from outline and fold lines alone.

Written without the folding module: the outline is cut along the bend zones with shapely, and every piece is turned
about the bends that lie between it and the piece that stays on the table.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import shapely

from fabgen.parts.contour import FoldLine, sampled
from fabgen.parts.records import FlatPattern


@dataclass(frozen=True)
class Piece:
    """A flat piece of the pattern and where its points go."""

    region: shapely.Polygon
    matrix: np.ndarray

    def folded(self, x: float, y: float) -> np.ndarray:
        return (self.matrix @ np.array([x, y, 0.0, 1.0]))[:3]


def _zone(fold: FoldLine) -> shapely.Polygon:
    (x0, y0), (x1, y1) = fold.start, fold.end
    line = np.array([x1 - x0, y1 - y0]) / math.dist(fold.start, fold.end)
    across = np.array([-line[1], line[0]]) * fold.allowance_mm / 2
    a, b = np.array(fold.start), np.array(fold.end)
    return shapely.Polygon([a - across, b - across, b + across, a + across])


def _turn_about(fold: FoldLine, thickness_mm: float, towards: np.ndarray) -> np.ndarray:
    """Matrix that carries the far side of a bend from the flat to its folded place, seen from the near side.

    ``towards``: unit vector in the flat, square to the fold, from the near side to the far side.
    """
    near = np.array(fold.start) - towards * fold.allowance_mm / 2
    angle, radius = math.radians(fold.angle_deg), fold.inside_radius_mm + thickness_mm / 2
    t3 = np.array([*towards, 0.0])
    up = np.array([0.0, 0.0, math.copysign(1.0, angle)])
    axis = np.cross(t3, up)
    k = np.array([[0, -axis[2], axis[1]], [axis[2], 0, -axis[0]], [-axis[1], axis[0], 0]])
    rotation = np.eye(3) + math.sin(abs(angle)) * k + (1 - math.cos(angle)) * (k @ k)
    start = np.array([*near, 0.0])
    centre = start + up * radius
    # The far side first closes up over the bend zone, then turns about the bend's axis.
    matrix = np.eye(4)
    matrix[:3, :3] = rotation
    matrix[:3, 3] = centre - rotation @ centre - rotation @ (t3 * fold.allowance_mm)
    return matrix


def fold(flat: FlatPattern, base: tuple[float, float]) -> list[Piece]:
    """All flat pieces with their matrices; the piece that holds ``base`` stays where it is."""
    sheet = shapely.Polygon(sampled(flat.outline, 0.01), [sampled(h, 0.01) for h in flat.holes])
    zones = [_zone(f) for f in flat.folds]
    cut = sheet.difference(shapely.union_all([z.buffer(1e-6) for z in zones]))
    regions = [g for g in getattr(cut, "geoms", [cut]) if g.area > 1e-3]
    first = next(i for i, g in enumerate(regions) if g.contains(shapely.Point(base)))
    matrices: dict[int, np.ndarray] = {first: np.eye(4)}
    queue = [first]
    while queue:
        here = queue.pop()
        for line, zone in zip(flat.folds, zones, strict=True):
            if regions[here].distance(zone) > 1e-4:
                continue
            for there, region in enumerate(regions):
                if there in matrices or region.distance(zone) > 1e-4:
                    continue
                middle = np.array([(line.start[0] + line.end[0]) / 2, (line.start[1] + line.end[1]) / 2])
                along = np.array(line.end) - np.array(line.start)
                square = np.array([-along[1], along[0]]) / np.linalg.norm(along)
                probe = shapely.Point(middle + square * (line.allowance_mm / 2 + 1e-3))
                towards = square if region.distance(probe) < 1e-2 else -square
                matrices[there] = matrices[here] @ _turn_about(line, flat.thickness_mm, towards)
                queue.append(there)
    return [Piece(regions[i], m) for i, m in matrices.items()]
