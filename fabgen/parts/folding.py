"""Folded sheet metal as one list of faces and bends, from which flat pattern and folded solid both come.

A face is a flat piece seen from the sheet's top side; every face but the base hangs on a straight edge of an
earlier face by a bend::

        parent's material              A------------B   the edge, run counter-clockwise (material on its left)
        ------------------             :  bend zone :   width |angle| (r + K t) in the flat
              A------>B                +------------+
        frame of the child:   origin at B, u from B to A, v away from the parent, n = u x v (top side)

The child's outline starts with that edge: (0, 0) to (width, 0), counter-clockwise. A positive bend angle folds
the child up, towards the viewer of the top side.

Depends on: errors, parts.contour, parts.records, parts.kernel, theory.bending.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from fabgen.errors import GeometryError
from fabgen.parts.contour import (
    Contour,
    FoldLine,
    Outline,
    Point,
    Vertex,
    moved,
    pairs,
    reversed_contour,
    signed_area_mm2,
    tidied,
)
from fabgen.parts.records import FlatPattern
from fabgen.theory.bending import bend_allowance, bend_deduction

if TYPE_CHECKING:
    import cadquery

Vector = tuple[float, float, float]


@dataclass(frozen=True)
class Bend:
    """One bend: angle (positive up, 0 = flat), inside radius, K of the neutral fibre (R + K t) and when it is
    folded (1 first)."""

    angle_deg: float
    inside_radius_mm: float
    k_factor: float
    order: int = 1


@dataclass(frozen=True)
class Face:
    """A flat face; ``edge`` is (loop, segment) of the parent: loop 0 its outline, loop i its hole i - 1."""

    name: str
    outline: Contour
    holes: tuple[Outline, ...] = ()
    parent: str = ""
    edge: tuple[int, int] = (0, 0)
    bend: Bend | None = None


@dataclass(frozen=True)
class FoldedSheet:
    """Faces (parents first) of one thickness. Raises GeometryError when a face hangs on nothing or on an arc."""

    faces: tuple[Face, ...]
    thickness_mm: float

    def __post_init__(self) -> None:
        seen: dict[str, Face] = {}
        for face in self.faces:
            if bool(face.parent) != bool(face.bend) or (face.parent and face.parent not in seen):
                raise GeometryError(f"face '{face.name}' needs an earlier face and a bend to hang on")
            if face.parent:
                a, b = _edge(seen[face.parent], face.edge)
                width = math.hypot(b.x_mm - a.x_mm, b.y_mm - a.y_mm)
                if a.bulge or abs(width - face.outline.vertices[1].x_mm) > 1e-6:
                    raise GeometryError(f"face '{face.name}' is not as wide as the straight edge it hangs on")
            seen[face.name] = face


@dataclass(frozen=True)
class Frame:
    """Where a face's mid-plane lies: a point is origin + x u + y v, the top side looks along n."""

    origin: Vector
    u: Vector
    v: Vector
    n: Vector

    def at(self, x: float, y: float, z: float = 0.0) -> Vector:
        """The point (x, y) of the face, ``z`` above its mid-plane."""
        o, u, v, n = self.origin, self.u, self.v, self.n
        return (
            o[0] + x * u[0] + y * v[0] + z * n[0],
            o[1] + x * u[1] + y * v[1] + z * n[1],
            o[2] + x * u[2] + y * v[2] + z * n[2],
        )

    def towards(self, x: float, y: float, z: float = 0.0) -> Vector:
        """The direction (x, y, z) of the face."""
        a, o = self.at(x, y, z), self.origin
        return a[0] - o[0], a[1] - o[1], a[2] - o[2]


LEVEL = Frame((0.0, 0.0, 0.0), (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0))


def allowance_mm(bend: Bend, thickness_mm: float) -> float:
    """Width of the bend zone in the flat."""
    return bend_allowance(abs(bend.angle_deg), bend.inside_radius_mm, bend.k_factor, thickness_mm)


def _loop(face: Face, index: int) -> Contour:
    if index == 0:
        return face.outline
    hole = face.holes[index - 1]
    if not isinstance(hole, Contour):
        raise GeometryError(f"nothing can hang on a round hole of face '{face.name}'")
    return hole if signed_area_mm2(hole) < 0 else reversed_contour(hole)


def _edge(face: Face, edge: tuple[int, int]) -> tuple[Vertex, Vertex]:
    return list(pairs(_loop(face, edge[0])))[edge[1]]


def _next_frame(parent: Frame, face: Face, on: Face, thickness_mm: float, folded: bool) -> Frame:
    a, b = _edge(on, face.edge)
    bend = face.bend
    if bend is None:
        raise GeometryError(f"face '{face.name}' has no bend to hang on")
    width = math.hypot(b.x_mm - a.x_mm, b.y_mm - a.y_mm)
    ux, uy = (a.x_mm - b.x_mm) / width, (a.y_mm - b.y_mm) / width
    root = Frame(
        parent.at(b.x_mm, b.y_mm), parent.towards(ux, uy), parent.towards(-uy, ux), parent.n
    )
    if not folded:
        return Frame(root.at(0.0, allowance_mm(bend, thickness_mm)), root.u, root.v, root.n)
    angle, up = math.radians(abs(bend.angle_deg)), math.copysign(1.0, bend.angle_deg)
    radius = bend.inside_radius_mm + thickness_mm / 2
    c, s = math.cos(angle), math.sin(angle)
    return Frame(
        root.at(0.0, radius * s, up * radius * (1 - c)),
        root.u,
        root.towards(0.0, c, up * s),
        root.towards(0.0, -up * s, c),
    )


def frames(sheet: FoldedSheet, base: Frame = LEVEL, folded: bool = True) -> dict[str, Frame]:
    """Frame of every face's mid-plane, folded or lying flat, with the base face in ``base``."""
    placed: dict[str, Frame] = {}
    by_name = {face.name: face for face in sheet.faces}
    for face in sheet.faces:
        placed[face.name] = (
            _next_frame(placed[face.parent], face, by_name[face.parent], sheet.thickness_mm, folded)
            if face.parent
            else base
        )
    return placed


def _flat_outline(outline: Outline, frame: Frame) -> Outline:
    turn = math.degrees(math.atan2(frame.u[1], frame.u[0]))
    return moved(outline, frame.origin[0], frame.origin[1], turn)


def _spliced(face: Face, loop: int, children: Mapping[str, list[Face]], flat: Mapping[str, Frame]) -> list[Vertex]:
    """The face's loop in the flat with every child's outline put in place of the edge it hangs on."""
    placed = _flat_outline(_loop(face, loop), flat[face.name])
    if not isinstance(placed, Contour):
        raise GeometryError(f"face '{face.name}' has a round outline; give it as a contour")
    hung = {child.edge[1]: child for child in children.get(face.name, ()) if child.edge[0] == loop}
    out: list[Vertex] = []
    for index, vertex in enumerate(placed.vertices):
        out.append(vertex)
        if index in hung:
            out += _spliced(hung[index], 0, children, flat)[1:]
            x, y, _ = flat[hung[index].name].origin
            out.append(Vertex(x, y))
    return out


def flat_pattern(sheet: FoldedSheet, face: str = "top") -> FlatPattern:
    """The sheet before folding, seen from its top side: outline, holes, and one fold line per bend."""
    flat = frames(sheet, folded=False)
    children: dict[str, list[Face]] = {}
    for item in sheet.faces[1:]:
        children.setdefault(item.parent, []).append(item)
    holes: list[Outline] = []
    folds: list[FoldLine] = []
    for item in sheet.faces:
        hung = {child.edge[0] for child in children.get(item.name, ())}
        for index, hole in enumerate(item.holes, start=1):
            if index in hung:
                holes.append(tidied(Contour(tuple(_spliced(item, index, children, flat)))))
            else:
                holes.append(_flat_outline(hole, flat[item.name]))
        if item.bend is not None:
            folds.append(_fold_line(len(folds) + 1, item, item.bend, flat[item.name], sheet.thickness_mm))
    outline = tidied(Contour(tuple(_spliced(sheet.faces[0], 0, children, flat))))
    return FlatPattern(outline, tuple(holes), tuple(folds), sheet.thickness_mm, face)


def _fold_line(number: int, face: Face, bend: Bend, flat: Frame, thickness_mm: float) -> FoldLine:
    width, allowance = face.outline.vertices[1].x_mm, allowance_mm(bend, thickness_mm)
    start, end = flat.at(0.0, -allowance / 2), flat.at(width, -allowance / 2)
    angle = abs(bend.angle_deg)
    deduction = bend_deduction(angle, bend.inside_radius_mm, bend.k_factor, thickness_mm)
    return FoldLine(
        number,
        (start[0], start[1]),
        (end[0], end[1]),
        bend.angle_deg,
        bend.inside_radius_mm,
        bend.k_factor,
        allowance,
        deduction,
        bend.order,
    )


def folded_solid(sheet: FoldedSheet, base: Frame = LEVEL, what: str = "folded part") -> cadquery.Shape:
    """The folded sheet as one solid: a prism per face, a sector of a tube per bend."""
    from fabgen.parts.kernel import fused

    placed = frames(sheet, base)
    bodies = []
    for face in sheet.faces:
        bodies.append(_face_body(face, placed[face.name], sheet.thickness_mm))
        if face.bend is not None and face.bend.angle_deg:
            bodies.append(_bend_body(face, face.bend, placed[face.name], sheet.thickness_mm))
    return fused(bodies[0], *bodies[1:], what=what)


def _face_body(face: Face, frame: Frame, thickness_mm: float) -> cadquery.Shape:
    import cadquery as cq

    from fabgen.parts.kernel import prism

    plane = cq.Plane(origin=frame.origin, xDir=frame.u, normal=frame.n)
    return prism(face.outline, face.holes, -thickness_mm / 2, thickness_mm).moved(cq.Location(plane))


def _bend_body(face: Face, bend: Bend, frame: Frame, thickness_mm: float) -> cadquery.Shape:
    import cadquery as cq

    half, width = thickness_mm / 2, face.outline.vertices[1].x_mm
    up = math.copysign(1.0, bend.angle_deg)
    corners = [frame.at(x, 0.0, z) for x, z in ((0, -half), (width, -half), (width, half), (0, half))]
    ring = cq.Wire.makePolygon([cq.Vector(*p) for p in corners], close=True)
    centre = up * (bend.inside_radius_mm + half)
    # Turned back about the bend's axis, from the child towards the parent.
    start, end = frame.at(0.0, 0.0, centre), frame.at(width, 0.0, centre)
    sector = cq.Solid.revolve(
        cq.Face.makeFromWires(ring), -bend.angle_deg, cq.Vector(*start), cq.Vector(*end)
    )
    return sector


def flat_area_mm2(sheet: FoldedSheet) -> float:
    """Area of the flat: faces without their holes, and bend zones."""
    faces = sum(signed_area_mm2(f.outline) - sum(abs(signed_area_mm2(h)) for h in f.holes) for f in sheet.faces)
    zones = sum(
        f.outline.vertices[1].x_mm * allowance_mm(f.bend, sheet.thickness_mm) for f in sheet.faces if f.bend
    )
    return faces + zones


def folded_volume_mm3(sheet: FoldedSheet) -> float:
    """Volume of the folded sheet: faces times t, and angle * width * t (r + t/2) for each bend.

    It differs from flat area times t by angle * width * t^2 (1/2 - K) for each bend: the neutral fibre lies at
    K t, the middle at t/2.
    """
    t = sheet.thickness_mm
    extra = sum(
        math.radians(abs(f.bend.angle_deg)) * f.outline.vertices[1].x_mm * t * t * (0.5 - f.bend.k_factor)
        for f in sheet.faces
        if f.bend
    )
    return flat_area_mm2(sheet) * t + extra


def box_face(width_mm: float, length_mm: float) -> Contour:
    """A rectangle as a child face: base edge first."""
    return Contour((Vertex(0, 0), Vertex(width_mm, 0), Vertex(width_mm, length_mm), Vertex(0, length_mm)))


def edge_of(contour: Contour, start: Point, end: Point) -> int:
    """Index of the segment from ``start`` to ``end``."""
    for index, (a, b) in enumerate(pairs(contour)):
        near = math.hypot(a.x_mm - start[0], a.y_mm - start[1]) < 1e-6
        if near and math.hypot(b.x_mm - end[0], b.y_mm - end[1]) < 1e-6:
            return index
    raise GeometryError(f"the outline has no edge from {start} to {end}")
