"""Surfaces that cut each other where they should not.

Depends on: errors, fields.kernel (compilation), fields.mesh.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from fabgen.errors import GeometryError
from fabgen.fields.kernel import compiled
from fabgen.fields.mesh import Mesh


def check_no_crossings(mesh: Mesh) -> None:
    """Refuse a mesh in which an edge of one triangle pierces another that it does not touch.

    Raises GeometryError with the place of the first crossing in millimetres.
    """
    corners = np.ascontiguousarray(mesh.corners_m)
    p, q = _first_crossing(corners, mesh.triangles, corners.min(1), corners.max(1))
    if p >= 0:
        x, y, z = corners[p].mean(0) * 1e3
        raise GeometryError(
            f"two surfaces cut each other near x = {x:.1f}, y = {y:.1f}, z = {z:.1f} mm "
            f"(triangles {p} and {q}); change the sizes of the parts that meet there"
        )


@compiled(fastmath=False)
def _first_crossing(corners: Any, triangles: Any, low: Any, high: Any) -> tuple[int, int]:
    for p in range(len(corners)):
        for q in range(p + 1, len(corners)):
            apart = False
            for c in range(3):
                if low[p, c] > high[q, c] or low[q, c] > high[p, c]:
                    apart = True
            if apart:
                continue
            for i in range(3):
                for j in range(3):
                    if triangles[p, i] == triangles[q, j]:
                        apart = True
            if not apart and (_pierces(corners[p], corners[q]) or _pierces(corners[q], corners[p])):
                return p, q
    return -1, -1


@compiled(fastmath=False)
def _pierces(edges_of: Any, triangle: Any) -> bool:
    """Whether an edge of the first triangle passes through the inside of the second (Moeller and Trumbore 1997)."""
    e1 = triangle[1] - triangle[0]
    e2 = triangle[2] - triangle[0]
    for i in range(3):
        a = edges_of[i]
        d = edges_of[(i + 1) % 3] - a
        h = np.array([d[1] * e2[2] - d[2] * e2[1], d[2] * e2[0] - d[0] * e2[2], d[0] * e2[1] - d[1] * e2[0]])
        det = e1[0] * h[0] + e1[1] * h[1] + e1[2] * h[2]
        if abs(det) < 1e-12 * np.sqrt((d * d).sum() * (e1 * e1).sum() * (e2 * e2).sum()):
            continue
        s = a - triangle[0]
        u = (s[0] * h[0] + s[1] * h[1] + s[2] * h[2]) / det
        if u < 1e-9 or u > 1 - 1e-9:
            continue
        r = np.array([s[1] * e1[2] - s[2] * e1[1], s[2] * e1[0] - s[0] * e1[2], s[0] * e1[1] - s[1] * e1[0]])
        v = (d[0] * r[0] + d[1] * r[1] + d[2] * r[2]) / det
        t = (e2[0] * r[0] + e2[1] * r[1] + e2[2] * r[2]) / det
        if v > 1e-9 and u + v < 1 - 1e-9 and 1e-9 < t < 1 - 1e-9:
            return True
    return False
