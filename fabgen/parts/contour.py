"""Closed plane contours of lines and arcs, the geometry that cutting files are made of.

A contour is a ring of vertices; each vertex carries the bulge of the segment that starts there:
bulge = tan(sweep/4), positive counter-clockwise, 0 for a straight line. |bulge| <= 0.4142 (90 degrees) is kept by
splitting, since several readers mis-turn larger ones. Millimetres.

Depends on: errors.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass

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
