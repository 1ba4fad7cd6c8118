"""Symmetric quadrature rules on the triangle: barycentric points and weights that sum to one.

Depends on: errors.

Source: D. A. Dunavant, "High degree efficient symmetrical Gaussian quadrature rules for the triangle",
Int. J. Numer. Meth. Eng. 21 (1985) 1129-1148 (points from memory; the tests check that each rule integrates all
monomials of its degree exactly).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fabgen.errors import GeometryError

Array = NDArray[np.float64]


def _orbit(a: float, weight: float) -> tuple[list[tuple[float, float, float]], list[float]]:
    b = 1.0 - 2.0 * a
    return [(b, a, a), (a, b, a), (a, a, b)], [weight] * 3


_SIX = (
    (0.445948490915965, 0.223381589678011),
    (0.091576213509771, 0.109951743655322),
)
_TWELVE = (
    (0.249286745170910, 0.116786275726379),
    (0.063089014491502, 0.050844906370207),
)
_TWELVE_GENERAL = (0.310352451033785, 0.053145049844816, 0.082851075618374)


def triangle_rule(points: int) -> tuple[Array, Array]:
    """Barycentric points (n, 3) and weights (n,) for n = 1, 3, 6 or 12 (degree 1, 2, 4, 6).

    Raises GeometryError for another n.
    """
    nodes: list[tuple[float, float, float]] = []
    weights: list[float] = []
    if points == 1:
        nodes, weights = [(1 / 3, 1 / 3, 1 / 3)], [1.0]
    elif points == 3:
        nodes, weights = _orbit(1 / 6, 1 / 3)
    elif points in (6, 12):
        for a, weight in _SIX if points == 6 else _TWELVE:
            n, w = _orbit(a, weight)
            nodes += n
            weights += w
        if points == 12:
            a, b, weight = _TWELVE_GENERAL
            c = 1.0 - a - b
            nodes += [(a, b, c), (a, c, b), (b, a, c), (b, c, a), (c, a, b), (c, b, a)]
            weights += [weight] * 6
    else:
        raise GeometryError(f"{points} quadrature points given; allowed are 1, 3, 6 and 12")
    total = np.array(weights)
    return np.array(nodes), total / total.sum()
