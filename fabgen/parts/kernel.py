"""The few CAD-kernel operations that the parts need; the kernel is imported when the first solid is built.

All lengths in millimetres, angles in degrees, z up. Every function returns a new shape. Booleans take all
their tools at once, since the kernel is faster that way, and a result that is not one valid solid is an
error, never a silent repair.

Depends on: errors, parts.contour, parts.records.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterable, Sequence
from typing import TYPE_CHECKING, TypeAlias

from fabgen.errors import GeometryError
from fabgen.parts.contour import Circle, Outline, Point
from fabgen.parts.records import Place

if TYPE_CHECKING:
    import cadquery

Shape: TypeAlias = "cadquery.Shape"
Point3 = tuple[float, float, float]


def once(build: Callable[[], cadquery.Shape]) -> Callable[[], cadquery.Shape]:
    """The same builder, which keeps its solid after the first call (a part is drawn, written and checked)."""
    kept: list[cadquery.Shape] = []

    def solid() -> cadquery.Shape:
        if not kept:
            kept.append(build())
        return kept[0]

    return solid


def revolved(profile: Sequence[Point]) -> cadquery.Shape:
    """A full turn about the z axis of a closed polygon in (radius, z)."""
    import cadquery as cq

    if min(r for r, _ in profile) < 0:
        raise GeometryError("a profile of revolution has a negative radius; give radii of 0 or more")
    wire = cq.Wire.makePolygon([cq.Vector(r, 0, z) for r, z in profile], close=True)
    return cq.Solid.revolve(cq.Face.makeFromWires(wire), 360.0, cq.Vector(0, 0, 0), cq.Vector(0, 0, 1))


def contour_wire(outline: Outline, z_mm: float = 0.0) -> cadquery.Wire:
    """The outline as a closed wire of exact lines and arcs in the plane z = ``z_mm``."""
    import cadquery as cq

    if isinstance(outline, Circle):
        centre = cq.Vector(outline.x_mm, outline.y_mm, z_mm)
        return cq.Wire.makeCircle(outline.diameter_mm / 2, centre, cq.Vector(0, 0, 1))
    ring = outline.vertices
    edges = []
    for a, b in zip(ring, (*ring[1:], ring[0]), strict=True):
        start, end = cq.Vector(a.x_mm, a.y_mm, z_mm), cq.Vector(b.x_mm, b.y_mm, z_mm)
        if a.bulge == 0.0:
            edges.append(cq.Edge.makeLine(start, end))
        else:
            # Sagitta = bulge * half chord, to the right of the chord for a counter-clockwise arc.
            mid = (
                (a.x_mm + b.x_mm) / 2 + a.bulge * (b.y_mm - a.y_mm) / 2,
                (a.y_mm + b.y_mm) / 2 - a.bulge * (b.x_mm - a.x_mm) / 2,
            )
            edges.append(cq.Edge.makeThreePointArc(start, cq.Vector(*mid, z_mm), end))
    return cq.Wire.assembleEdges(edges)


def prism(outline: Outline, holes: Iterable[Outline], z_mm: float, height_mm: float) -> cadquery.Shape:
    """The outline without its holes, extruded from ``z_mm`` by ``height_mm`` upwards."""
    import cadquery as cq

    inner = [contour_wire(hole, z_mm) for hole in holes]
    return cq.Solid.extrudeLinear(contour_wire(outline, z_mm), inner, cq.Vector(0, 0, height_mm))


def rod(start: Point3, end: Point3, diameter_mm: float) -> cadquery.Shape:
    """A cylinder between two points."""
    import cadquery as cq

    axis = cq.Vector(*end) - cq.Vector(*start)
    return cq.Solid.makeCylinder(diameter_mm / 2, axis.Length, cq.Vector(*start), axis)


def tube(start: Point3, end: Point3, outer_mm: float, inner_mm: float) -> cadquery.Shape:
    """A round tube between two points."""
    import cadquery as cq

    axis = cq.Vector(*end) - cq.Vector(*start)
    plane = cq.Plane(origin=start, normal=axis.toTuple())
    rings = [cq.Wire.makeCircle(d / 2, plane.origin, plane.zDir) for d in (outer_mm, inner_mm)]
    return cq.Solid.extrudeLinear(rings[0], rings[1:], axis)


def box(low: Point3, high: Point3) -> cadquery.Shape:
    """A box between two opposite corners."""
    import cadquery as cq

    return cq.Solid.makeBox(*(b - a for a, b in zip(low, high, strict=True)), cq.Vector(*low))


TEARDROP_FLAT = 1.1
"""Height of a teardrop's flat roof over its axis, in radii."""


def teardrop_roof_mm(diameter_mm: float) -> float:
    """Width of a teardrop hole's flat roof: what the printer has to bridge, 2 (sqrt 2 - 1.1) r."""
    return diameter_mm * (math.sqrt(2) - TEARDROP_FLAT)


def teardrop(start: Point3, end: Point3, diameter_mm: float) -> cadquery.Shape:
    """A horizontal hole that prints without support: a cylinder with a 45 degree roof, flat at 1.1 radii so
    that the roof's bridge stays short."""
    import cadquery as cq

    radius = diameter_mm / 2
    axis = cq.Vector(*end) - cq.Vector(*start)
    if abs(axis.z) > 1e-9:
        raise GeometryError("a teardrop hole lies level; its ends must have the same height")
    plane = cq.Plane(origin=start, xDir=(-axis.y, axis.x, 0), normal=axis.toTuple())
    up = 1.0 if plane.yDir.z > 0 else -1.0
    s, flat = radius * math.sqrt(0.5), TEARDROP_FLAT * radius
    half = teardrop_roof_mm(diameter_mm) / 2
    corners = ((s, s), (half, flat), (-half, flat), (-s, s))
    points = [plane.toWorldCoords((u, up * v)) for u, v in corners]
    below = plane.toWorldCoords((0.0, -up * radius))
    edges = [cq.Edge.makeLine(p, q) for p, q in itertools.pairwise(points)]
    edges.append(cq.Edge.makeThreePointArc(points[-1], below, points[0]))
    return cq.Solid.extrudeLinear(cq.Wire.assembleEdges(edges), [], axis)


def one_solid(shape: cadquery.Shape, what: str) -> cadquery.Shape:
    """The single valid solid in ``shape``; raises GeometryError when there is none or more than one."""
    solids = shape.Solids()
    if len(solids) != 1 or not solids[0].isValid():
        raise GeometryError(
            f"{what}: the sizes give {len(solids)} bodies instead of one sound one; "
            "two features of the part meet or cut it through, change the size named last"
        )
    return solids[0]


def fused(first: cadquery.Shape, *others: cadquery.Shape, what: str = "part") -> cadquery.Shape:
    """Union of bodies that touch or overlap, as one solid with merged faces."""
    if not others:
        return first
    return one_solid(first.fuse(*others).clean(), what)


def cut(body: cadquery.Shape, *tools: cadquery.Shape, what: str = "part") -> cadquery.Shape:
    """``body`` without the tools, as one solid."""
    return one_solid(body.cut(*tools), what) if tools else body


def moved(shape: cadquery.Shape, x_mm: float = 0.0, y_mm: float = 0.0, z_mm: float = 0.0) -> cadquery.Shape:
    """The shape shifted."""
    import cadquery as cq

    return shape.moved(cq.Location(cq.Vector(x_mm, y_mm, z_mm)))


def turned(
    shape: cadquery.Shape, angle_deg: float, axis: Point3 = (0, 0, 1), through: Point3 = (0, 0, 0)
) -> cadquery.Shape:
    """The shape turned about an axis through a point."""
    import cadquery as cq

    start = cq.Vector(*through)
    return shape.rotate(start, start + cq.Vector(*axis), angle_deg)


def placed(shape: cadquery.Shape, place: Place) -> cadquery.Shape:
    """The shape turned about z, then shifted, as a part's ``places`` say."""
    if place == Place():
        return shape
    return moved(turned(shape, place.turn_deg), place.x_mm, place.y_mm, place.z_mm)


def on_bed(shape: cadquery.Shape) -> cadquery.Shape:
    """The shape with its lowest point on z = 0 and its box centred on the z axis."""
    low = shape.BoundingBox(1e-6)
    return moved(shape, -low.center.x, -low.center.y, -low.zmin)


def circle_points(count: int, radius_mm: float, start_deg: float) -> tuple[Point, ...]:
    """Points equally spaced on a circle about the origin."""
    angles = (math.radians(start_deg + 360.0 * i / count) for i in range(count))
    return tuple((radius_mm * math.cos(a), radius_mm * math.sin(a)) for a in angles)




def extruded(corners: Sequence[Point3], along: Point3) -> cadquery.Shape:
    """A plane polygon in space, pushed along a vector."""
    import cadquery as cq

    wire = cq.Wire.makePolygon([cq.Vector(*c) for c in corners], close=True)
    return cq.Solid.extrudeLinear(wire, [], cq.Vector(*along))


def common(body: cadquery.Shape, *tools: cadquery.Shape, what: str = "part") -> cadquery.Shape:
    """What of ``body`` lies inside all the tools, as one solid."""
    for tool in tools:
        body = body.intersect(tool)
    return one_solid(body, what)
