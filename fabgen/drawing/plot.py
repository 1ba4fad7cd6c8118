"""Plots as drawing items: same lines, same font as the drawings. Curves differ by line type, never by colour alone.

A plot is made at the origin: its frame's lower left corner is (0, 0); axis numbers and titles lie outside.

Depends on: drawing.model, drawing.overlap.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from fabgen.drawing.flow import Block
from fabgen.drawing.fonts import text_width_mm
from fabgen.drawing.model import Arc, Item, Line, Point, Polyline, Text, bounds, moved, number

TICK_TEXT_MM = 1.8
LABEL_MM = 2.5


@dataclass(frozen=True)
class Axes:
    """Linear axes of a plot, ``width`` x ``height`` mm on paper."""

    width: float
    height: float
    x: tuple[float, float]
    y: tuple[float, float]

    def at(self, x: float, y: float) -> Point:
        """Paper position of a value pair."""
        return (
            (x - self.x[0]) / (self.x[1] - self.x[0]) * self.width,
            (y - self.y[0]) / (self.y[1] - self.y[0]) * self.height,
        )


def nice_step(span: float, most: int) -> float:
    """The step of 1, 2, 5 times a power of ten that gives at most ``most`` intervals."""
    raw = span / most
    power = 10.0 ** math.floor(math.log10(raw))
    return next(m * power for m in (1.0, 2.0, 5.0, 10.0) if m * power >= raw * (1 - 1e-9))


def ticks(low: float, high: float, most: int) -> list[float]:
    """Round values within the range."""
    step = nice_step(high - low, most)
    first = math.ceil(low / step - 1e-9)
    last = math.floor(high / step + 1e-9)
    return [k * step for k in range(first, last + 1)]


def frame(
    axes: Axes, x_title: str, y_title: str, x_step: float | None = None, y_step: float | None = None
) -> tuple[Item, ...]:
    """Frame, grid, numbers and titles of the axes."""
    w, h = axes.width, axes.height
    items: list[Item] = []
    xs = _stepped(axes.x, x_step, max(2, int(w / 14)))
    ys = _stepped(axes.y, y_step, max(2, int(h / 9)))
    deepest = 0.0
    for x in xs:
        px = axes.at(x, axes.y[0])[0]
        items += [Line(px, 0, px, h, "grid"), Text(px, -3.6, number(x, 3), TICK_TEXT_MM, "middle")]
    for y in ys:
        py = axes.at(axes.x[0], y)[1]
        items += [Line(0, py, w, py, "grid"), Text(-1.2, py - 0.9, number(y, 3), TICK_TEXT_MM, "end")]
        deepest = max(deepest, text_width_mm(number(y, 3), TICK_TEXT_MM))
    items.append(Polyline(((0, 0), (w, 0), (w, h), (0, h)), "thin", closed=True))
    items.append(Text(w / 2, -8.6, x_title, LABEL_MM, "middle"))
    items.append(Text(-deepest - 3.2, h / 2, y_title, LABEL_MM, "middle", 90.0))
    return tuple(items)


def _stepped(limits: tuple[float, float], step: float | None, most: int) -> list[float]:
    if step is None:
        return ticks(*limits, most)
    first, last = math.ceil(limits[0] / step - 1e-9), math.floor(limits[1] / step + 1e-9)
    return [k * step for k in range(first, last + 1)]


def curve(axes: Axes, xs: Sequence[float], ys: Sequence[float], role: str = "curve") -> tuple[Item, ...]:
    """A curve, cut at the frame."""
    pieces: list[list[Point]] = [[]]
    points = list(zip(xs, ys, strict=True))
    for (xa, ya), (xb, yb) in pairwise(points):
        part = _clipped(axes, (xa, ya), (xb, yb))
        if part is None:
            continue
        a, b = axes.at(*part[0]), axes.at(*part[1])
        if not pieces[-1] or math.dist(pieces[-1][-1], a) > 1e-6:
            pieces.append([a])
        pieces[-1].append(b)
    return tuple(Polyline(tuple(p), role) for p in pieces if len(p) > 1)


def _clipped(axes: Axes, a: Point, b: Point) -> tuple[Point, Point] | None:
    low, high = 0.0, 1.0
    dx, dy = b[0] - a[0], b[1] - a[1]
    for p, q in (
        (-dx, a[0] - axes.x[0]), (dx, axes.x[1] - a[0]), (-dy, a[1] - axes.y[0]), (dy, axes.y[1] - a[1]),
    ):  # fmt: skip
        if abs(p) < 1e-15:
            if q < 0:
                return None
            continue
        if p < 0:
            low = max(low, q / p)
        else:
            high = min(high, q / p)
    if low > high:
        return None
    return (a[0] + low * dx, a[1] + low * dy), (a[0] + high * dx, a[1] + high * dy)


def band(axes: Axes, xs: Sequence[float], lower: Sequence[float], upper: Sequence[float]) -> tuple[Item, ...]:
    """A light grey band between two curves, held within the frame."""
    inside = [
        (x, max(a, axes.y[0]), min(b, axes.y[1]))
        for x, a, b in zip(xs, lower, upper, strict=True)
        if axes.x[0] <= x <= axes.x[1]
    ]
    if len(inside) < 2:
        return ()
    there = [axes.at(x, max(min(a, axes.y[1]), axes.y[0])) for x, a, _ in inside]
    back = [axes.at(x, max(min(b, axes.y[1]), axes.y[0])) for x, _, b in reversed(inside)]
    return (Polyline((*there, *back), None, True, (0.85, 0.85, 0.85)),)


def upright(axes: Axes, x: float, role: str, text: str = "", row: int = 0) -> tuple[Item, ...]:
    """A vertical line at a value, with a name above the frame."""
    px = axes.at(x, axes.y[0])[0]
    top = axes.height + 1.0 + 3.6 * row
    items: list[Item] = [Line(px, 0, px, top, role)]
    if text:
        items.append(Text(px, top + 0.9, text, TICK_TEXT_MM, "middle"))
    return tuple(items)


def level(axes: Axes, y: float, role: str) -> tuple[Item, ...]:
    """A horizontal line at a value."""
    py = axes.at(axes.x[0], y)[1]
    return (Line(0, py, axes.width, py, role),)


def legend(entries: Sequence[tuple[str, str]], x: float, y: float, pitch: float = 4.2) -> tuple[Item, ...]:
    """Line samples with names, downwards from (x, y)."""
    items: list[Item] = []
    for i, (role, text) in enumerate(entries):
        yy = y - i * pitch
        items += [Line(x, yy, x + 10, yy, role), Text(x + 11.5, yy - 0.9, text, TICK_TEXT_MM)]
    return tuple(items)


def bars(
    names: Sequence[str], values: Sequence[float], texts: Sequence[str], width: float, left: float
) -> tuple[Item, ...]:
    """Horizontal bars from a common zero; a negative one is hatched, a positive one filled."""
    pitch = 6.0
    largest = max((abs(v) for v in values), default=1.0) or 1.0
    room = width - left - max((text_width_mm(t, TICK_TEXT_MM) for t in texts), default=0) - 3
    items: list[Item] = []
    for i, (name, value, text) in enumerate(zip(names, values, texts, strict=True)):
        y = -pitch * (i + 1) + 1.4
        length = abs(value) / largest * room
        fill = (0.55, 0.55, 0.55) if value >= 0 else None
        corners = ((left, y), (left + length, y), (left + length, y + 3.2), (left, y + 3.2))
        items.append(Polyline(corners, "thin", True, fill))
        if value < 0:
            items += _bar_hatch(left, y, length)
        items += [
            Text(left - 1.5, y + 0.5, name, TICK_TEXT_MM, "end"),
            Text(left + length + 1.2, y + 0.7, text, TICK_TEXT_MM),
        ]
    items.append(Line(left, 0, left, -pitch * len(names), "outline"))
    return tuple(items)


def _bar_hatch(x: float, y: float, length: float) -> list[Item]:
    out: list[Item] = []
    k = 0.0
    while k < length:
        rise = min(3.2, length - k)
        out.append(Line(x + k, y, x + k + rise, y + rise, "hatch"))
        k += 1.6
    return out


def smith_chart(radius: float) -> tuple[Item, ...]:
    """Circles of constant resistance and reactance (normalised to 50 ohm), centre at (0, 0)."""
    items: list[Item] = [Arc(0, 0, radius, radius, role="thin"), Line(-radius, 0, radius, 0, "grid")]
    for r in (0.2, 0.5, 1.0, 2.0, 5.0):
        size = radius / (1 + r)
        items.append(Arc(radius * r / (1 + r), 0, size, size, role="thin" if r == 1.0 else "grid"))
        at = radius * (r - 1) / (r + 1)
        if r != 1.0:  # the middle belongs to the trace
            items.append(Text(at + 0.5, 0.6, number(50 * r), TICK_TEXT_MM))
    for x in (0.2, 0.5, 1.0, 2.0, 5.0):
        items += _reactance(radius, x)
    return tuple(items)


def _reactance(radius: float, x: float) -> list[Item]:
    """Both arcs of reactance +-x: centre (1, 1/x), radius 1/x, from the point on the rim to (1, 0)."""
    rim = complex(0, x)
    gamma = (rim - 1) / (rim + 1)
    start = math.degrees(math.atan2(gamma.imag - 1 / x, gamma.real - 1))
    sweep = (270.0 - start) % 360.0
    if sweep > 180:
        sweep -= 360
    up = Arc(radius, radius / x, radius / x, radius / x, start, sweep, role="grid")
    down = Arc(radius, -radius / x, radius / x, radius / x, -start, -sweep, role="grid")
    out = [up, down]
    texts: list[Item] = []
    for sign in (1, -1):
        px, py = gamma.real * (radius + 3.0), sign * gamma.imag * (radius + 3.0)
        name = f"{'+' if sign > 0 else '−'}j{number(50 * x)}"
        texts.append(Text(px, py - 0.9, name, TICK_TEXT_MM, "middle"))
    return [*out, *texts]


def as_block(items: Sequence[Item], title: str = "", width: float | None = None) -> Block:
    """Plot items as a block, centred when a width is given, with a title above."""
    box = bounds(tuple(items))
    x = -box.x0 if width is None else (width - box.width) / 2 - box.x0
    top = 6.5 if title else 0.0
    out = moved(tuple(items), x, -box.y1 - top)
    if title:
        middle = box.width / 2 if width is None else width / 2
        out = (*out, Text(middle, -3.6, title, LABEL_MM, "middle", bold=True))
    return Block(box.height + top, out)
