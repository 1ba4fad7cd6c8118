"""Conducting faces of a can, round or with flats, with or without a choke, as surfaces for netgen; half y >= 0.

Section, right half; with flats the radii are those of the flats' middles, one of which lies on +x::

            |         |      choke_floor + choke_depth
            |  bore   |
     depth  |         |
            |_________|      choke_floor
            |
     _______|                z = 0

Depends on: errors.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from fabgen.errors import GeometryError

SMALL_MM = 1e-4
NEAR_WALL = 0.97
"""A face all of whose corners lie farther out than this share of the bore is the can's or the choke's."""


@dataclass(frozen=True)
class DrawnCan:
    """Inner faces of the can, millimetres; ``flats`` 0 for a round one, ``choke_bore_mm`` 0 without a choke.

    ``section``: outline of the drawn metal in (distance from the axis, z), from the axis on the floor's inner face to
    the axis below; it takes the place of the inner faces.
    """

    bore_mm: float
    depth_mm: float
    flats: int = 0
    choke_bore_mm: float = 0.0
    choke_floor_mm: float = 0.0
    choke_depth_mm: float = 0.0
    section: tuple[tuple[float, float], ...] = ()


def can_faces(can: DrawnCan, quarter: Any, loop: Any) -> list[Any]:
    """Faces of floor and wall, and of the choke; ``quarter`` is the space y, z >= 0, ``loop`` what stands on the floor.

    Raises GeometryError for an odd number of flats, whose corner would lie in the plane of symmetry.
    """
    if can.flats % 2:
        raise GeometryError(f"a can of {can.flats} flats has no plane of symmetry through the gap; use 6, 8 or 12")
    if can.section:
        return _metal_faces(can, loop)
    choke = can.choke_bore_mm > 0
    level = choke and can.choke_floor_mm < SMALL_MM
    floor = _disc(can, can.choke_bore_mm if level else can.bore_mm, 0.0, quarter) - loop
    faces = [floor, *_walls(can, can.bore_mm, 0.0, can.depth_mm, quarter)]
    if choke:
        low = can.choke_floor_mm
        faces += _walls(can, can.choke_bore_mm, low, low + can.choke_depth_mm, quarter)
        if not level:
            hole = _disc(can, can.bore_mm, low, quarter)
            faces.append(_disc(can, can.choke_bore_mm, low, quarter) - hole)
    return faces


def _metal_faces(can: DrawnCan, loop: Any) -> list[Any]:
    """The outline carried round the half turn: about the axis, or with equal flats."""
    import OCP.gp  # noqa: F401 - first: loaded after netgen, the CAD kernel runs on netgen's older copy of itself
    from netgen.occ import Axis, Pnt, Segment, Z

    faces: list[Any] = []
    for (r1, z1), (r2, z2) in itertools.pairwise(can.section):
        if can.flats:
            for (a, b), (c, d) in zip(_sides(can, 2 * r1), _sides(can, 2 * r2), strict=True):
                corners = [(*a, z1), (*b, z1), (*d, z2), (*c, z2)]
                faces.append(_polygon(_distinct(corners)))
        else:
            edge = Segment(Pnt(r1, 0, z1), Pnt(r2, 0, z2))
            faces += list(edge.Revolve(Axis(Pnt(0, 0, 0), Z), 180).faces)
    return [face - loop if _on_the_floor(face) else face for face in faces]


def _distinct(corners: Sequence[tuple[float, float, float]]) -> list[tuple[float, float, float]]:
    """Without corners that fall together, as at the axis."""
    return [p for p, q in zip(corners, (*corners[1:], corners[0]), strict=True) if math.dist(p, q) > SMALL_MM]


def _on_the_floor(face: Any) -> bool:
    low, high = face.bounding_box
    return bool(low.z > -SMALL_MM and high.z < SMALL_MM)


def _sides(can: DrawnCan, bore_mm: float) -> list[tuple[tuple[float, float], tuple[float, float]]]:
    return list(itertools.pairwise(_corners(can, bore_mm)))


def can_name(face: Any, can: DrawnCan) -> str:
    """"floor", "wall" or "choke" for a face of the glued can; empty for a face of the loop."""
    low, high = face.bounding_box
    if high.z < SMALL_MM:
        return "floor"
    nearest = min(math.hypot(v.p.x, v.p.y) for v in face.vertices)
    if nearest < NEAR_WALL * can.bore_mm / 2:
        return ""
    if can.section:
        return "wall"
    beyond = nearest > (can.bore_mm + can.choke_bore_mm) / 4 if can.choke_bore_mm else False
    return "choke" if beyond or high.z - low.z < SMALL_MM else "wall"


def _corners(can: DrawnCan, bore_mm: float) -> Sequence[tuple[float, float]]:
    """Half of the polygon, from +x to -x, both ends in the middle of a flat."""
    radius, half = bore_mm / 2, math.pi / can.flats
    angles = ((2 * i + 1) * half for i in range(can.flats // 2))
    return (
        (radius, 0.0),
        *((radius / math.cos(half) * math.cos(a), radius / math.cos(half) * math.sin(a)) for a in angles),
        (-radius, 0.0),
    )


def _polygon(points: Sequence[tuple[float, float, float]]) -> Any:
    import OCP.gp  # noqa: F401 - first: loaded after netgen, the CAD kernel runs on netgen's older copy of itself
    from netgen.occ import Face, Pnt, Segment, Wire

    ring = [Pnt(*p) for p in points]
    return Face(Wire([Segment(a, b) for a, b in zip(ring, (*ring[1:], ring[0]), strict=True)]))


def _disc(can: DrawnCan, bore_mm: float, z_mm: float, quarter: Any) -> Any:
    import OCP.gp  # noqa: F401 - first: loaded after netgen, the CAD kernel runs on netgen's older copy of itself
    from netgen.occ import Cylinder, Pnt, Z

    if can.flats:
        return _polygon([(x, y, z_mm) for x, y in _corners(can, bore_mm)])
    return Cylinder(Pnt(0, 0, z_mm), Z, bore_mm / 2, 1).faces.Min(Z) * quarter


def _walls(can: DrawnCan, bore_mm: float, low_mm: float, high_mm: float, quarter: Any) -> list[Any]:
    import OCP.gp  # noqa: F401 - first: loaded after netgen, the CAD kernel runs on netgen's older copy of itself
    from netgen.occ import Cylinder, Pnt, Z

    if can.flats:
        return [
            _polygon([(*a, low_mm), (*b, low_mm), (*b, high_mm), (*a, high_mm)])
            for a, b in itertools.pairwise(_corners(can, bore_mm))
        ]
    side = Cylinder(Pnt(0, 0, low_mm), Z, bore_mm / 2, high_mm - low_mm).faces
    middle = (low_mm + high_mm) / 2
    upright = [f for f in side if f.bounding_box[0].z < middle < f.bounding_box[1].z]
    return [upright[0] * quarter]
