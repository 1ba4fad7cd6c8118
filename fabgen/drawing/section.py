"""Solids cut open by the plane through the axis, with the cut faces hatched (ISO 128-3: thin ones filled).

Depends on: drawing.model, drawing.hidden, parts.kernel.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import Any

from fabgen.drawing.hidden import Direction
from fabgen.drawing.model import Item, Line, Polyline

FLAT_MM = 1e-4
THIN_PAPER_MM = 1.2  # a cut face narrower than this on paper is filled


def opened(shape: Any, direction: Direction) -> Any | None:
    """The half of the shape beyond the plane through the origin square to the view; None when nothing is left."""
    from fabgen.parts import kernel

    low, high = rough_bounds(shape)
    axis, sign = _axis(direction)
    near, far = (low[axis], high[axis]) if sign < 0 else (-high[axis], -low[axis])
    if near >= -FLAT_MM:
        return shape
    if far <= FLAT_MM:
        return None
    corner_a = [v - 1.0 for v in low]
    corner_b = [v + 1.0 for v in high]
    if sign < 0:
        corner_a[axis] = 0.0
    else:
        corner_b[axis] = 0.0
    half = shape.intersect(kernel.box(_point(corner_a), _point(corner_b)))
    return half if half.Solids() else None


def _point(values: Sequence[float]) -> tuple[float, float, float]:
    return values[0], values[1], values[2]


def rough_bounds(shape: Any) -> tuple[tuple[float, float, float], tuple[float, float, float]]:
    """Lower and upper corner of a box round the shape, quickly; it may be a little too large."""
    from OCP.Bnd import Bnd_Box
    from OCP.BRepBndLib import BRepBndLib

    box = Bnd_Box()
    BRepBndLib.Add_s(shape.wrapped, box, False)
    low, high = box.CornerMin(), box.CornerMax()
    return (low.X(), low.Y(), low.Z()), (high.X(), high.Y(), high.Z())


def _axis(direction: Direction) -> tuple[int, float]:
    """Index and sign of the coordinate that points to the eye."""
    values = direction.towards_eye
    index = max(range(3), key=lambda i: abs(values[i]))
    return index, math.copysign(1.0, values[index])


def cut_faces(shape: Any, direction: Direction) -> list[Any]:
    """The faces in the cutting plane as shapely polygons in view coordinates."""
    from OCP.BRepAdaptor import BRepAdaptor_Surface

    axis, _ = _axis(direction)
    faces = []
    for face in shape.Faces():
        if face.geomType() != "PLANE":
            continue
        plane = BRepAdaptor_Surface(face.wrapped).Plane()
        way, at = plane.Axis().Direction(), plane.Location()
        square = abs(abs((way.X(), way.Y(), way.Z())[axis]) - 1) < 1e-9
        if square and abs((at.X(), at.Y(), at.Z())[axis]) < FLAT_MM:
            faces.append(_polygon(face, direction))
    return [f for f in faces if not f.is_empty]


def _polygon(face: Any, direction: Direction) -> Any:
    import shapely

    outer = _ring(face.outerWire(), direction)
    inner = [_ring(w, direction) for w in face.innerWires()]
    return shapely.Polygon(outer, inner).buffer(0)


def _ring(wire: Any, direction: Direction) -> list[tuple[float, float]]:
    """The wire's points in order; edges are chained by their ends."""
    pieces = []
    for edge in wire.Edges():
        n = 1 if edge.geomType() == "LINE" else 16
        pieces.append([direction.flat(edge.positionAt(i / n).toTuple()) for i in range(n + 1)])
    ring = pieces.pop(0)
    while pieces:
        end = ring[-1]
        k, flip = min(
            ((i, f) for i in range(len(pieces)) for f in (False, True)),
            key=lambda t: math.dist(end, pieces[t[0]][-1 if t[1] else 0]),
        )
        piece = pieces.pop(k)
        ring += (piece[::-1] if flip else piece)[1:]
    return ring


def hatched(polygons: Sequence[Any], scale: float, angle_deg: float, pitch_mm: float = 2.0) -> tuple[Item, ...]:
    """Hatching of cut faces in paper mm; a face thinner than 1.2 mm on paper is filled."""
    import shapely
    from shapely import affinity

    items: list[Item] = []
    for polygon in polygons:
        paper = affinity.scale(polygon, scale, scale, origin=(0, 0))
        if paper.buffer(-THIN_PAPER_MM / 2).area < 0.05 * paper.area:
            items += _filled(paper)
            continue
        box = paper.bounds
        reach = math.hypot(box[2] - box[0], box[3] - box[1]) + 1
        t = math.radians(angle_deg)
        u, n = (math.cos(t), math.sin(t)), (-math.sin(t), math.cos(t))
        offsets = [box[i] * n[0] + box[j] * n[1] for i in (0, 2) for j in (1, 3)]
        middle = (box[0] + box[2]) / 2 * u[0] + (box[1] + box[3]) / 2 * u[1]
        k = math.ceil(min(offsets) / pitch_mm)
        while k * pitch_mm < max(offsets):
            x, y = n[0] * k * pitch_mm + u[0] * middle, n[1] * k * pitch_mm + u[1] * middle
            ray = shapely.LineString([(x - u[0] * reach, y - u[1] * reach), (x + u[0] * reach, y + u[1] * reach)])
            items += _lines(paper.intersection(ray))
            k += 1
    return tuple(items)


def _parts(geometry: Any) -> Iterable[Any]:
    return getattr(geometry, "geoms", (geometry,))


def _filled(polygon: Any) -> list[Item]:
    """Thin faces as filled paths; one with a hole is split so that the hole stays open."""
    import shapely

    items: list[Item] = []
    for part in _parts(polygon):
        if part.interiors:
            x = part.interiors[0].centroid.x
            x0, y0, x1, y1 = part.bounds
            for half in (shapely.box(x0 - 1, y0 - 1, x, y1 + 1), shapely.box(x, y0 - 1, x1 + 1, y1 + 1)):
                items += _filled(part.intersection(half))
        elif part.geom_type == "Polygon" and not part.is_empty:
            items.append(Polyline(tuple(part.exterior.coords)[:-1], None, True, (0.15, 0.15, 0.15)))
    return items


def _lines(geometry: Any) -> list[Item]:
    return [
        _hatch_line(part.coords)
        for part in _parts(geometry)
        if part.geom_type == "LineString" and len(part.coords) > 1 and part.length > 0.2
    ]


def _hatch_line(ends: Sequence[tuple[float, ...]]) -> Line:
    return Line(ends[0][0], ends[0][1], ends[-1][0], ends[-1][1], "hatch")
