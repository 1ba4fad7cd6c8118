"""What a bend table says beyond the fold itself: where the fold line is, measured from two edges of the blank.

Depends on: parts.contour, parts.records.
"""

from __future__ import annotations

import math

from fabgen.errors import GeometryError
from fabgen.parts.contour import FoldLine, sampled
from fabgen.parts.records import FlatPattern

SAGITTA_MM = 0.001


def fold_edges_mm(flat: FlatPattern, fold: FoldLine) -> tuple[float, float]:
    """Distances from the fold line's middle, square to it, to the outermost edge on its left and on its right.

    Left and right as seen along the line from start to end. Exact to a micrometre on arcs.
    """
    (x0, y0), (x1, y1) = fold.start, fold.end
    length = math.dist(fold.start, fold.end)
    ux, uy = (x1 - x0) / length, (y1 - y0) / length
    middle = ((x0 + x1) / 2, (y0 + y1) / 2)
    ring = [((p[0] - middle[0]) * ux + (p[1] - middle[1]) * uy, (p[1] - middle[1]) * ux - (p[0] - middle[0]) * uy)
            for p in sampled(flat.outline, SAGITTA_MM)]  # fmt: skip
    across = [
        a[1] + (b[1] - a[1]) * a[0] / (a[0] - b[0])
        for a, b in zip(ring, ring[1:] + ring[:1], strict=True)
        if (a[0] <= 0.0 < b[0]) or (b[0] <= 0.0 < a[0])
    ]
    if not across or max(across) < 0 or min(across) > 0:
        raise GeometryError(f"fold line {fold.number} does not cross the part")
    return max(across), -min(across)
