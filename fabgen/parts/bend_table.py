"""What a bend table says beyond the fold itself: where the fold line is, measured from two edges of the blank.

Depends on: errors, parts.contour, parts.records.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from fabgen.errors import GeometryError
from fabgen.parts.contour import Circle, FoldLine, Outline, sampled
from fabgen.parts.records import FlatPattern

SAGITTA_MM = 0.001


def fold_edges_mm(flat: FlatPattern, fold: FoldLine) -> tuple[float, float]:
    """Distances from the fold line's middle, square to it, to the edge of the sheet on its left and on its right.

    Left and right as seen along the line from start to end; the edge is the first one met, as a calliper finds it,
    round holes apart. Exact to a micrometre on arcs. Raises GeometryError when the line is not on the part.
    """
    outlines = [flat.outline, *(hole for hole in flat.holes if not isinstance(hole, Circle))]
    across = [y for outline in outlines for y in _crossings(outline, fold)]
    left, right = [y for y in across if y > 0], [-y for y in across if y < 0]
    if not left or not right:
        raise GeometryError(f"fold line {fold.number} does not cross the part")
    return min(left), min(right)


def _crossings(outline: Outline, fold: FoldLine) -> Iterator[float]:
    """Where the outline crosses the line square to the fold through its middle, positive to the left."""
    (x0, y0), (x1, y1) = fold.start, fold.end
    length = math.dist(fold.start, fold.end)
    ux, uy = (x1 - x0) / length, (y1 - y0) / length
    mx, my = (x0 + x1) / 2, (y0 + y1) / 2
    points = sampled(outline, SAGITTA_MM)
    ring = [((x - mx) * ux + (y - my) * uy, (y - my) * ux - (x - mx) * uy) for x, y in points]
    for a, b in zip(ring, ring[1:] + ring[:1], strict=True):
        if (a[0] <= 0.0 < b[0]) or (b[0] <= 0.0 < a[0]):
            yield a[1] + (b[1] - a[1]) * a[0] / (a[0] - b[0])
