"""Section through the drawn can of metal, as one outline in (distance from the axis, z): its true conducting surface.

The drawn solids of floor, wall and choke are cut by half planes through the axis. Holes, tabs and the seam come and go
round the can; the section kept is the one with the least metal of those that are not cut by an opening. Gaps that are
joined all round (ring on wall, wall on floor) are closed.

    (0, 0) floor .. wall inside .. rim .. wall outside .. flange .. (0, -floor)

Depends on: parts (contour, kernel, records).
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

from fabgen.parts.contour import Point
from fabgen.parts.records import Part

if TYPE_CHECKING:
    import cadquery

CAN_KEYS = ("floor", "wall", "can", "choke")
JOINED_MM = 0.2
"""Gaps up to this wide between the can's parts are filled with solder or bonded."""
CHORD_MM = 0.02
PLACES = 9
"""Sections tried, on the side of the can away from the gap. A judgement."""


def can_section(parts: Iterable[Part], flats: int = 0) -> tuple[Point, ...] | None:
    """The outline from the axis on the floor's inner face to the axis on its outer face.

    With ``flats``: across one flat, in its middle or beside it.

    None where every half plane meets an opening.
    """
    import shapely

    solids = [p.solid() for p in parts if p.solid is not None and p.key.split("-")[0] in CAN_KEYS]
    whole = []
    for angle, aside in _places(solids, flats):
        cuts = [cut for solid in solids for cut in _cut(solid, angle, aside)]
        gap = JOINED_MM / 2
        joined = shapely.union_all(cuts).buffer(gap, join_style="mitre").buffer(-gap, join_style="mitre")
        if joined.geom_type == "Polygon" and not joined.interiors and joined.bounds[0] < CHORD_MM:
            whole.append(joined.simplify(CHORD_MM / 2))
    return _outline(min(whole, key=lambda polygon: round(polygon.area, 3))) if whole else None


def _places(solids: Sequence[cadquery.Shape], flats: int) -> list[tuple[float, float]]:
    """Angles of the half planes, and how far beside the axis they lie."""
    if not flats:
        return [(95.0 + 170.0 * (i + 0.5) / PLACES, 0.0) for i in range(PLACES)]
    width = max(solid.BoundingBox().xlen for solid in solids) * math.tan(math.pi / flats)
    return [(180.0, 0.3 * width * (2 * i / (PLACES - 1) - 1)) for i in range(PLACES)]


def _cut(solid: cadquery.Shape, angle_deg: float, aside_mm: float) -> list[Any]:
    """Triangles of the section of a solid with the half plane at an angle, in (radius, z)."""
    import cadquery as cq
    import shapely

    from fabgen.parts import kernel

    box = solid.BoundingBox()
    reach, low, high = math.hypot(box.xlen, box.ylen), box.zmin - 1.0, box.zmax + 1.0
    corners = [cq.Vector(r, 0, z) for r, z in ((0.0, low), (reach, low), (reach, high), (0.0, high))]
    plane = cq.Face.makeFromWires(cq.Wire.makePolygon(corners, close=True))
    met = kernel.moved(kernel.turned(solid, -angle_deg), y_mm=aside_mm).intersect(plane)
    found = []
    for face in met.Faces():
        points, triangles = face.tessellate(CHORD_MM)
        found += [shapely.Polygon([(points[i].x, points[i].z) for i in t]) for t in triangles]
    return found


def _outline(polygon: Any) -> tuple[Point, ...]:
    ring = [(max(0.0, round(r, 4)), round(z, 4)) for r, z in polygon.exterior.coords[:-1]]
    ring = [(0.0 if r < CHORD_MM else r, 0.0 if abs(z) < CHORD_MM else z) for r, z in ring]
    on_axis = [i for i, (r, _) in enumerate(ring) if r == 0.0]
    start = max(on_axis, key=lambda i: ring[i][1])
    turned: Sequence[Point] = [*ring[start:], *ring[:start]]
    if turned[1][0] == 0.0:
        turned = [turned[0], *reversed(turned[1:])]
    return tuple(turned)
