"""Closed plane contours of lines and arcs, the geometry that cutting files are made of.

A contour is a ring of vertices; each vertex carries the bulge of the segment that starts there:
bulge = tan(sweep/4), positive counter-clockwise, 0 for a straight line. |bulge| <= 0.4142 (90 degrees) is kept
by splitting, since several readers mis-turn larger ones. Millimetres.

Depends on: errors.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass

from fabgen.errors import GeometryError

Point = tuple[float, float]
MAX_BULGE = math.tan(math.pi / 8)


@dataclass(frozen=True)
class Vertex:
    """A corner and the bulge of the segment that leaves it."""

    x_mm: float
    y_mm: float
    bulge: float = 0.0


@dataclass(frozen=True)
class Contour:
    """A closed ring of lines and arcs (last vertex joins the first)."""

    vertices: tuple[Vertex, ...]


@dataclass(frozen=True)
class Circle:
    """A round hole or disc."""

    x_mm: float
    y_mm: float
    diameter_mm: float


@dataclass(frozen=True)
class FoldLine:
    """A fold line of the flat pattern: the middle of the bend zone.

    ``angle_deg`` is the bend angle (0 = flat); positive folds towards the viewer of the stated face ("up").
    """

    number: int
    start: Point
    end: Point
    angle_deg: float
    inside_radius_mm: float
    k_factor: float
    allowance_mm: float
    deduction_mm: float
    order: int


Outline = Contour | Circle


def split_arc(centre: Point, radius_mm: float, start_deg: float, sweep_deg: float) -> tuple[Vertex, ...]:
    """Vertices of an arc cut into pieces of at most 90 degrees; the end point is left to the next segment."""
    pieces = max(1, math.ceil(abs(sweep_deg) / 90.0 - 1e-9))
    step = math.radians(sweep_deg / pieces)
    bulge = math.tan(step / 4)
    first = math.radians(start_deg)
    return tuple(
        Vertex(
            centre[0] + radius_mm * math.cos(first + i * step),
            centre[1] + radius_mm * math.sin(first + i * step),
            bulge,
        )
        for i in range(pieces)
    )


def polygon(points: Iterable[Point]) -> Contour:
    """A contour of straight lines."""
    return Contour(tuple(Vertex(x, y) for x, y in points))


def pairs(contour: Contour) -> Iterator[tuple[Vertex, Vertex]]:
    """Each vertex with the one after it; the first carries the bulge of the segment between."""
    ring = contour.vertices
    return zip(ring, (*ring[1:], ring[0]), strict=True)


@dataclass(frozen=True)
class Arc:
    """The circular segment that a bulge stands for."""

    centre: Point
    radius_mm: float
    start_deg: float
    sweep_deg: float


def arc_between(a: Vertex, b: Vertex) -> Arc:
    """The arc from ``a`` to ``b``: sweep = 4 atan(bulge), radius = chord / (2 sin(sweep/2)).

    Raises GeometryError for a straight segment.
    """
    if a.bulge == 0.0:
        raise GeometryError("a straight segment has no arc; ask for arcs only where the bulge is not 0")
    sweep = 4 * math.atan(a.bulge)
    dx, dy = b.x_mm - a.x_mm, b.y_mm - a.y_mm
    # Signed distance from the chord's middle to the centre, to the left of the chord for a positive bulge.
    height = (1 - a.bulge**2) / (4 * a.bulge)
    centre = ((a.x_mm + b.x_mm) / 2 - height * dy, (a.y_mm + b.y_mm) / 2 + height * dx)
    radius = math.hypot(dx, dy) * (1 + a.bulge**2) / (4 * abs(a.bulge))
    start = math.atan2(a.y_mm - centre[1], a.x_mm - centre[0])
    return Arc(centre, radius, math.degrees(start), math.degrees(sweep))


def segment_length_mm(a: Vertex, b: Vertex) -> float:
    """Length of the line or arc from ``a`` to ``b``."""
    chord = math.hypot(b.x_mm - a.x_mm, b.y_mm - a.y_mm)
    if a.bulge == 0.0:
        return chord
    return chord * math.atan(abs(a.bulge)) * (1 + a.bulge**2) / abs(a.bulge)


def length_mm(outline: Outline) -> float:
    """Length of the cut around the outline."""
    if isinstance(outline, Circle):
        return math.pi * outline.diameter_mm
    return math.fsum(segment_length_mm(a, b) for a, b in pairs(outline))


def signed_area_mm2(outline: Outline) -> float:
    """Area, positive counter-clockwise: shoelace sum plus R^2 (sweep - sin(sweep)) / 2 for each arc."""
    if isinstance(outline, Circle):
        return math.pi * outline.diameter_mm**2 / 4
    terms = []
    for a, b in pairs(outline):
        terms.append((a.x_mm * b.y_mm - b.x_mm * a.y_mm) / 2)
        if a.bulge != 0.0:
            sweep = 4 * math.atan(a.bulge)
            radius = math.hypot(b.x_mm - a.x_mm, b.y_mm - a.y_mm) * (1 + a.bulge**2) / (4 * abs(a.bulge))
            terms.append(radius**2 * (sweep - math.sin(sweep)) / 2)
    return math.fsum(terms)


def area_mm2(outline: Outline) -> float:
    """Area inside the outline."""
    return abs(signed_area_mm2(outline))


def bounds_mm(outline: Outline) -> tuple[float, float, float, float]:
    """Smallest box (x low, y low, x high, y high), exact on arcs."""
    if isinstance(outline, Circle):
        r = outline.diameter_mm / 2
        return outline.x_mm - r, outline.y_mm - r, outline.x_mm + r, outline.y_mm + r
    xs, ys = [], []
    for a, b in pairs(outline):
        xs.append(a.x_mm)
        ys.append(a.y_mm)
        if a.bulge == 0.0:
            continue
        arc = arc_between(a, b)
        low, high = sorted((arc.start_deg, arc.start_deg + arc.sweep_deg))
        for quarter in range(math.ceil(low / 90), math.floor(high / 90) + 1):
            xs.append(arc.centre[0] + arc.radius_mm * math.cos(math.radians(90 * quarter)))
            ys.append(arc.centre[1] + arc.radius_mm * math.sin(math.radians(90 * quarter)))
    return min(xs), min(ys), max(xs), max(ys)


def moved(outline: Outline, x_mm: float = 0.0, y_mm: float = 0.0, turn_deg: float = 0.0) -> Outline:
    """The outline turned about the origin, then shifted."""
    c, s = math.cos(math.radians(turn_deg)), math.sin(math.radians(turn_deg))

    def at(x: float, y: float) -> Point:
        return c * x - s * y + x_mm, s * x + c * y + y_mm

    if isinstance(outline, Circle):
        return Circle(*at(outline.x_mm, outline.y_mm), outline.diameter_mm)
    return Contour(tuple(Vertex(*at(v.x_mm, v.y_mm), v.bulge) for v in outline.vertices))


def mirrored_y(outline: Outline) -> Outline:
    """The outline mirrored in the x axis (y -> -y), running the same way round as before."""
    if isinstance(outline, Circle):
        return Circle(outline.x_mm, -outline.y_mm, outline.diameter_mm)
    return reversed_contour(Contour(tuple(Vertex(v.x_mm, -v.y_mm, -v.bulge) for v in outline.vertices)))


def reversed_contour(contour: Contour) -> Contour:
    """The same ring run the other way round."""
    return Contour(tuple(Vertex(b.x_mm, b.y_mm, -a.bulge) for a, b in pairs(contour))[::-1])


def sampled(outline: Outline, sagitta_mm: float = 0.01) -> tuple[Point, ...]:
    """Points on the outline; arcs are cut so that no chord is further than ``sagitta_mm`` from its arc."""
    if isinstance(outline, Circle):
        start = (outline.x_mm, outline.y_mm)
        outline = Contour(split_arc(start, outline.diameter_mm / 2, 0.0, 360.0))
    points: list[Point] = []
    for a, b in pairs(outline):
        points.append((a.x_mm, a.y_mm))
        if a.bulge == 0.0:
            continue
        arc = arc_between(a, b)
        widest = 2 * math.acos(max(0.0, 1 - sagitta_mm / arc.radius_mm))
        pieces = max(1, math.ceil(math.radians(abs(arc.sweep_deg)) / widest))
        for i in range(1, pieces):
            angle = math.radians(arc.start_deg + arc.sweep_deg * i / pieces)
            x = arc.centre[0] + arc.radius_mm * math.cos(angle)
            points.append((x, arc.centre[1] + arc.radius_mm * math.sin(angle)))
    return tuple(points)


def tidied(contour: Contour, tolerance_mm: float = 1e-6) -> Contour:
    """Without segments of no length and without vertices in the middle of a straight line."""
    ring = [a for a, b in pairs(contour) if math.hypot(b.x_mm - a.x_mm, b.y_mm - a.y_mm) > tolerance_mm]
    kept: list[Vertex] = []
    for i, v in enumerate(ring):
        before, after = ring[i - 1], ring[(i + 1) % len(ring)]
        if before.bulge == 0.0 and v.bulge == 0.0:
            ux, uy = v.x_mm - before.x_mm, v.y_mm - before.y_mm
            wx, wy = after.x_mm - v.x_mm, after.y_mm - v.y_mm
            if abs(ux * wy - uy * wx) <= tolerance_mm * math.hypot(ux, uy) and ux * wx + uy * wy > 0:
                continue
        kept.append(v)
    return Contour(tuple(kept))


def rounded(points: Sequence[tuple[float, float, float]]) -> Contour:
    """A polygon of (x, y, corner radius); radius 0 keeps the corner sharp.

    The tangent length at a corner is radius * tan(turn/2). Raises GeometryError where two roundings do not
    fit on one side.
    """
    count = len(points)
    vertices: list[Vertex] = []
    used = [0.0] * count
    for i, (x, y, radius) in enumerate(points):
        (px, py, _), (nx, ny, _) = points[i - 1], points[(i + 1) % count]
        before, after = math.hypot(x - px, y - py), math.hypot(nx - x, ny - y)
        ux, uy, wx, wy = (x - px) / before, (y - py) / before, (nx - x) / after, (ny - y) / after
        turn = math.atan2(ux * wy - uy * wx, ux * wx + uy * wy)
        tangent = radius * math.tan(abs(turn) / 2)
        used[i - 1] += tangent
        used[i] += tangent
        if tangent <= 1e-9:
            vertices.append(Vertex(x, y))
            continue
        start = math.degrees(math.atan2(uy, ux)) - math.copysign(90.0, turn)
        side = math.copysign(radius, turn)
        sx, sy = x - ux * tangent, y - uy * tangent
        vertices += split_arc((sx - uy * side, sy + ux * side), radius, start, math.degrees(turn))
        vertices.append(Vertex(x + wx * tangent, y + wy * tangent))
    for i, (x, y, _) in enumerate(points):
        side = math.hypot(points[(i + 1) % count][0] - x, points[(i + 1) % count][1] - y)
        if used[i] > side + 1e-9:
            raise GeometryError(
                f"corner roundings need {used[i]:.2f} mm of a side that is {side:.2f} mm long; "
                "use a smaller corner radius"
            )
    return tidied(Contour(tuple(vertices)))


def rectangle(low: Point, high: Point, radius_mm: float = 0.0) -> Contour:
    """An upright rectangle between two opposite corners, its corners rounded."""
    (x0, y0), (x1, y1) = low, high
    return rounded([(x0, y0, radius_mm), (x1, y0, radius_mm), (x1, y1, radius_mm), (x0, y1, radius_mm)])


def hull_of_two(first: Circle, second: Circle) -> Contour:
    """The two circles joined by their outer tangents: one hole in place of two that meet or nearly meet.

    Raises GeometryError when one circle lies inside the other (there is no tangent).
    """
    r1, r2 = first.diameter_mm / 2, second.diameter_mm / 2
    dx, dy = second.x_mm - first.x_mm, second.y_mm - first.y_mm
    distance = math.hypot(dx, dy)
    if distance <= abs(r1 - r2):
        raise GeometryError("one of two holes to be joined lies inside the other; move them apart")
    axis = math.degrees(math.atan2(dy, dx))
    lean = math.degrees(math.acos((r1 - r2) / distance))
    vertices = [
        *split_arc((first.x_mm, first.y_mm), r1, axis + lean, 360 - 2 * lean),
        _on_circle(first, axis - lean),
        *split_arc((second.x_mm, second.y_mm), r2, axis - lean, 2 * lean),
        _on_circle(second, axis + lean),
    ]
    return tidied(Contour(tuple(vertices)))


def _on_circle(circle: Circle, angle_deg: float) -> Vertex:
    a, r = math.radians(angle_deg), circle.diameter_mm / 2
    return Vertex(circle.x_mm + r * math.cos(a), circle.y_mm + r * math.sin(a))
