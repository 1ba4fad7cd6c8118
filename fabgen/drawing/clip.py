"""Items cut to a window, for drawings larger than the page.

Depends on: drawing.model.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from itertools import pairwise

from fabgen.drawing.model import Arc, Box, Item, Line, Polyline, Text


def clipped(items: Iterable[Item], window: Box) -> tuple[Item, ...]:
    """The parts of lines, arcs and open paths inside the window; texts that lie inside whole."""
    out: list[Item] = []
    for item in items:
        match item:
            case Line():
                out += _line(item, window)
            case Arc():
                out += _arc(item, window)
            case Polyline():
                out += _path(item, window)
            case Text() if window.contains(item.box()):
                out.append(item)
    return tuple(out)


def _line(line: Line, w: Box) -> list[Line]:
    dx, dy = line.x1 - line.x0, line.y1 - line.y0
    low, high = 0.0, 1.0
    for p, q in ((-dx, line.x0 - w.x0), (dx, w.x1 - line.x0), (-dy, line.y0 - w.y0), (dy, w.y1 - line.y0)):
        if abs(p) < 1e-12:
            if q < 0:
                return []
        elif p < 0:
            low = max(low, q / p)
        else:
            high = min(high, q / p)
    if high - low < 1e-9:
        return []
    x, y = line.x0, line.y0
    return [Line(x + low * dx, y + low * dy, x + high * dx, y + high * dy, line.role)]


def _arc(arc: Arc, w: Box) -> list[Item]:
    """Circular arcs stay arcs; an ellipse is cut as a fine polyline."""
    box = arc.box()
    if w.contains(box):
        return [arc]
    if not w.overlaps(box):
        return []
    if arc.rx != arc.ry:
        points = arc.points(2.0)
        pieces = (Line(*a, *b, arc.role) for a, b in pairwise(points))
        return [part for piece in pieces for part in _line(piece, w)]
    way = math.copysign(1.0, arc.sweep_deg)
    stops = {0.0, abs(arc.sweep_deg)}
    for angle in _crossings(arc, w):
        along = (angle - arc.start_deg) * way % 360.0
        if 0 < along < abs(arc.sweep_deg):
            stops.add(along)
    ordered = sorted(stops)
    out: list[Item] = []
    for a, b in pairwise(ordered):
        x, y = arc.at(arc.start_deg + way * (a + b) / 2)
        if b - a > 1e-7 and w.x0 <= x <= w.x1 and w.y0 <= y <= w.y1:
            out.append(Arc(arc.cx, arc.cy, arc.rx, arc.ry, arc.start_deg + way * a, way * (b - a), 0.0, arc.role))
    return out


def _crossings(arc: Arc, w: Box) -> list[float]:
    """Angles at which the circle meets the lines of the window's sides."""
    angles = []
    for x in (w.x0, w.x1):
        c = (x - arc.cx) / arc.rx
        if abs(c) <= 1:
            angles += [math.degrees(math.acos(c)), -math.degrees(math.acos(c))]
    for y in (w.y0, w.y1):
        s = (y - arc.cy) / arc.ry
        if abs(s) <= 1:
            angles += [math.degrees(math.asin(s)), 180 - math.degrees(math.asin(s))]
    return [a - arc.turn_deg for a in angles]


def _path(path: Polyline, w: Box) -> list[Item]:
    box = path.box()
    if w.contains(box):
        return [path]
    if path.role is None or not w.overlaps(box.grown(1e-6)):
        return []
    points = (*path.points, path.points[0]) if path.closed else path.points
    pieces = (Line(*a, *b, path.role) for a, b in pairwise(points))
    return [part for piece in pieces for part in _line(piece, w)]
