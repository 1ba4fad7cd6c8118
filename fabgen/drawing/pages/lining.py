"""What a lining covers, drawn into a picture of the can: floor and wall hatched where the eye sees them.

Depends on: drawing.hidden, drawing.model.
"""

from __future__ import annotations

import math

from fabgen.drawing.hidden import Direction
from fabgen.drawing.model import Line, Point

STEP_DEG = 6.0
FLOOR_LINES = 14
PIECES = 48


def lined_wall(bore_mm: float, depth_mm: float, eye: Direction) -> tuple[Line, ...]:
    """Upright lines on the bore as far as ``eye`` sees them over the rim, and the rim."""
    r = bore_mm / 2
    lines: list[Line] = []
    for i in range(round(360 / STEP_DEG)):
        x, y = _on_circle(r, STEP_DEG * i)
        seen = [k / PIECES for k in range(PIECES + 1) if _clear(x, y, depth_mm * k / PIECES, r, depth_mm, eye)]
        if x * eye.towards_eye[0] + y * eye.towards_eye[1] < 0 and seen and seen[0] < 1:
            lines.append(_line(eye.flat((x, y, depth_mm * seen[0])), eye.flat((x, y, depth_mm))))
    return tuple(lines)


def lined_floor(bore_mm: float, depth_mm: float, eye: Direction) -> tuple[Line, ...]:
    """Lines across the floor, level on the paper, as far as ``eye`` sees them over the rim."""
    r = bore_mm / 2
    ahead = math.atan2(eye.towards_eye[1], eye.towards_eye[0])
    c, s = math.cos(ahead), math.sin(ahead)
    lines: list[Line] = []
    for i in range(1, FLOOR_LINES):
        away = r * (2 * i / FLOOR_LINES - 1)
        half = math.sqrt(r * r - away * away)
        across = [half * (2 * k / PIECES - 1) for k in range(PIECES + 1)]
        points = [(away * c - t * s, away * s + t * c) for t in across]
        seen = [p for p in points if _clear(*p, 0.0, r, depth_mm, eye)]
        if len(seen) > 1:
            lines.append(_line(eye.flat((*seen[0], 0.0)), eye.flat((*seen[-1], 0.0))))
    return tuple(lines)


def _on_circle(r: float, angle_deg: float) -> Point:
    return r * math.cos(math.radians(angle_deg)), r * math.sin(math.radians(angle_deg))


def _clear(x: float, y: float, z: float, r: float, depth: float, eye: Direction) -> bool:
    """True when the way from the point to the eye leaves the can through its aperture."""
    n = eye.towards_eye
    rise = (depth - z) / n[2]
    return math.hypot(x + rise * n[0], y + rise * n[1]) <= r * (1 + 1e-9)


def _line(a: Point, b: Point) -> Line:
    return Line(*a, *b)
