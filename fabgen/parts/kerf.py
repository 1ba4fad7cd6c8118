"""Kerf compensation: a contour moved by half the kerf into the waste, still lines and arcs only.

Shops compensate themselves and want nominal contours, so the default is no kerf; a hobby laser may want it.

Depends on: errors, parts.contour.
"""

from __future__ import annotations

import math

from fabgen.errors import GeometryError
from fabgen.parts.contour import (
    Circle,
    Contour,
    Outline,
    Point,
    Vertex,
    arc_between,
    pairs,
    signed_area_mm2,
    split_arc,
    tidied,
)


def compensated(outline: Outline, offset_mm: float) -> Outline:
    """The outline grown by ``offset_mm`` (shrunk where negative).

    Outer corners get an arc about the corner, inner corners the crossing of the moved segments. Raises
    GeometryError when a segment would vanish: the feature is smaller than the kerf.
    """
    if offset_mm == 0.0:
        return outline
    if isinstance(outline, Circle):
        if outline.diameter_mm + 2 * offset_mm <= 0:
            raise GeometryError(f"a hole of {outline.diameter_mm:g} mm is smaller than the kerf; leave the kerf out")
        return Circle(outline.x_mm, outline.y_mm, outline.diameter_mm + 2 * offset_mm)
    # To the right of travel is outside for a counter-clockwise ring.
    right = math.copysign(offset_mm, offset_mm * signed_area_mm2(outline))
    moved = [_moved(a, b, right) for a, b in pairs(outline)]
    count = len(moved)
    starts, ends = [m[0] for m in moved], [m[1] for m in moved]
    joints: list[tuple[Vertex, ...]] = [()] * count
    corners = [a for a, _ in pairs(outline)]
    for i in range(count):
        j = (i + 1) % count
        if math.dist(ends[i], starts[j]) < 1e-7:
            continue
        turn = _turn(outline, i, j)
        if turn * right > 0:
            joints[i] = _corner(corners[j], ends[i], starts[j], right)
        else:
            meeting = _crossing(outline, i, j, right)
            ends[i], starts[j] = meeting, meeting
    vertices: list[Vertex] = []
    for i in range(count):
        vertices.append(Vertex(*starts[i], _bulge(outline, i, starts[i], ends[i], right)))
        if joints[i]:
            vertices += joints[i]
    return tidied(Contour(tuple(vertices)))


def _tangents(a: Vertex, b: Vertex) -> tuple[Point, Point]:
    """Unit directions of travel at the segment's start and end."""
    dx, dy = b.x_mm - a.x_mm, b.y_mm - a.y_mm
    chord = math.hypot(dx, dy)
    half = 2 * math.atan(a.bulge)
    c, s = math.cos(half), math.sin(half)
    ux, uy = dx / chord, dy / chord
    return (c * ux + s * uy, -s * ux + c * uy), (c * ux - s * uy, s * ux + c * uy)


def _moved(a: Vertex, b: Vertex, right: float) -> tuple[Point, Point]:
    (sx, sy), (ex, ey) = _tangents(a, b)
    return (a.x_mm + right * sy, a.y_mm - right * sx), (b.x_mm + right * ey, b.y_mm - right * ex)


def _turn(ring: Contour, i: int, j: int) -> float:
    segments = list(pairs(ring))
    (_, (ux, uy)), ((wx, wy), _) = _tangents(*segments[i]), _tangents(*segments[j])
    return ux * wy - uy * wx


def _corner(corner: Vertex, start: Point, end: Point, right: float) -> tuple[Vertex, ...]:
    a0 = math.degrees(math.atan2(start[1] - corner.y_mm, start[0] - corner.x_mm))
    a1 = math.degrees(math.atan2(end[1] - corner.y_mm, end[0] - corner.x_mm))
    sweep = (a1 - a0) % 360.0 if right > 0 else -((a0 - a1) % 360.0)
    return split_arc((corner.x_mm, corner.y_mm), abs(right), a0, sweep)


def _bulge(ring: Contour, i: int, start: Point, end: Point, right: float) -> float:
    a, b = list(pairs(ring))[i]
    if a.bulge == 0.0:
        if (end[0] - start[0]) * (b.x_mm - a.x_mm) + (end[1] - start[1]) * (b.y_mm - a.y_mm) <= 0:
            raise GeometryError("a side of the part is shorter than the kerf needs; leave the kerf out")
        return 0.0
    arc = arc_between(a, b)
    radius = arc.radius_mm + math.copysign(right, right * a.bulge)
    chord = math.dist(start, end)
    if radius <= 0 or chord > 2 * radius + 1e-9:
        raise GeometryError(
            f"an inner radius of {arc.radius_mm:.2f} mm is smaller than half the kerf; leave the kerf out"
        )
    return math.copysign(math.tan(math.asin(min(1.0, chord / (2 * radius))) / 2), a.bulge)


def _crossing(ring: Contour, i: int, j: int, right: float) -> Point:
    """Where two neighbouring moved segments meet, nearest to their common corner."""
    segments = list(pairs(ring))
    first, second = _carrier(*segments[i], right), _carrier(*segments[j], right)
    corner = segments[j][0]
    points = _meet(first, second)
    if not points:
        raise GeometryError("an inner corner of the part is narrower than the kerf; leave the kerf out")
    return min(points, key=lambda p: math.hypot(p[0] - corner.x_mm, p[1] - corner.y_mm))


Carrier = tuple[Point, Point, float]
"""A line (point, direction, 0) or a circle (centre, unused, radius)."""


def _carrier(a: Vertex, b: Vertex, right: float) -> Carrier:
    if a.bulge == 0.0:
        start, end = _moved(a, b, right)
        length = math.dist(start, end)
        return start, ((end[0] - start[0]) / length, (end[1] - start[1]) / length), 0.0
    arc = arc_between(a, b)
    return arc.centre, (0.0, 0.0), arc.radius_mm + math.copysign(right, right * a.bulge)


def _meet(first: Carrier, second: Carrier) -> list[Point]:
    if first[2] == 0.0 and second[2] == 0.0:
        (px, py), (ux, uy), _ = first
        (qx, qy), (wx, wy), _ = second
        cross = ux * wy - uy * wx
        s = ((qx - px) * wy - (qy - py) * wx) / cross
        return [(px + s * ux, py + s * uy)]
    if first[2] != 0.0 and second[2] == 0.0:
        first, second = second, first
    if first[2] == 0.0:
        (px, py), (ux, uy), _ = first
        (cx, cy), _, r = second
        along = (cx - px) * ux + (cy - py) * uy
        away = (cx - px) * uy - (cy - py) * ux
        if abs(away) > r:
            return []
        half = math.sqrt(r * r - away * away)
        return [(px + (along + k * half) * ux, py + (along + k * half) * uy) for k in (-1, 1)]
    (ax, ay), _, r1 = first
    (bx, by), _, r2 = second
    d = math.hypot(bx - ax, by - ay)
    if d < 1e-12 or d > r1 + r2 or d < abs(r1 - r2):
        return []
    along = (r1 * r1 - r2 * r2 + d * d) / (2 * d)
    half = math.sqrt(max(0.0, r1 * r1 - along * along))
    ux, uy = (bx - ax) / d, (by - ay) / d
    return [(ax + along * ux - k * half * uy, ay + along * uy + k * half * ux) for k in (-1, 1)]
