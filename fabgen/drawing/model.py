"""The neutral drawing model: what a sheet holds, in millimetres on paper, origin lower left, y up.

Items are lines, arcs, filled or open paths and texts; each line carries a role, and the role fixes width, dash and
grey (ISO 128-2, line group 0.5). Dimensions, views and tables are kept beside the items as records, so that a
check can read what a page says without reading pictures.

Depends on: drawing.fonts.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, field
from typing import Literal

from fabgen.drawing.fonts import DESCENT, text_width_mm

Point = tuple[float, float]
Colour = tuple[float, float, float]
BLACK: Colour = (0.0, 0.0, 0.0)
RED: Colour = (0.75, 0.0, 0.0)
GREY: Colour = (0.45, 0.45, 0.45)
WHITE: Colour = (1.0, 1.0, 1.0)


@dataclass(frozen=True)
class Pen:
    """Line width and dash pattern (mm; empty = continuous)."""

    width_mm: float
    dash_mm: tuple[float, ...] = ()
    colour: Colour = BLACK


# ISO 128-2: wide 0.5, narrow 0.25 (A4 and A3); dash 12 d, gap 3 d, long dash 24 d, dot 0.5 d. Frame 0.7: ISO 5457.
PENS: dict[str, Pen] = {
    "outline": Pen(0.5),
    "new": Pen(0.5),
    "old": Pen(0.18, (), (0.4, 0.4, 0.4)),
    "thin": Pen(0.25),
    "fine": Pen(0.18),
    "dimension": Pen(0.25),
    "hatch": Pen(0.18),
    "hidden": Pen(0.25, (3.0, 0.75)),
    "centre": Pen(0.25, (6.0, 0.75, 0.125, 0.75)),
    "fold": Pen(0.25, (6.0, 0.75, 0.125, 0.75)),
    "phantom": Pen(0.25, (6.0, 0.75, 0.125, 0.75, 0.125, 0.75)),
    "section": Pen(0.5, (6.0, 0.75, 0.125, 0.75)),
    "frame": Pen(0.7),
    "grid": Pen(0.13, (), (0.6, 0.6, 0.6)),
    "curve": Pen(0.5),
    "curve2": Pen(0.5, (3.0, 1.2)),
    "curve3": Pen(0.35, (0.6, 0.9)),
    "stop": Pen(0.7, (), RED),
}


@dataclass(frozen=True)
class Box:
    """An upright rectangle."""

    x0: float
    y0: float
    x1: float
    y1: float

    @property
    def width(self) -> float:
        """x1 - x0."""
        return self.x1 - self.x0

    @property
    def height(self) -> float:
        """y1 - y0."""
        return self.y1 - self.y0

    def grown(self, by: float) -> Box:
        """The box with a margin on all sides."""
        return Box(self.x0 - by, self.y0 - by, self.x1 + by, self.y1 + by)

    def moved(self, dx: float, dy: float) -> Box:
        """The shifted box."""
        return Box(self.x0 + dx, self.y0 + dy, self.x1 + dx, self.y1 + dy)

    def joined(self, other: Box) -> Box:
        """The smallest box round both."""
        return Box(min(self.x0, other.x0), min(self.y0, other.y0), max(self.x1, other.x1), max(self.y1, other.y1))

    def overlaps(self, other: Box) -> bool:
        """True when the interiors meet."""
        return self.x0 < other.x1 and other.x0 < self.x1 and self.y0 < other.y1 and other.y0 < self.y1

    def contains(self, other: Box, slack: float = 1e-6) -> bool:
        """True when ``other`` lies inside."""
        return (
            other.x0 >= self.x0 - slack
            and other.y0 >= self.y0 - slack
            and other.x1 <= self.x1 + slack
            and other.y1 <= self.y1 + slack
        )


@dataclass(frozen=True)
class Line:
    """A straight line."""

    x0: float
    y0: float
    x1: float
    y1: float
    role: str = "outline"

    def moved(self, dx: float, dy: float) -> Line:
        """The shifted line."""
        return Line(self.x0 + dx, self.y0 + dy, self.x1 + dx, self.y1 + dy, self.role)

    def scaled(self, s: float) -> Line:
        """The line with all coordinates times ``s``."""
        return Line(self.x0 * s, self.y0 * s, self.x1 * s, self.y1 * s, self.role)

    def box(self) -> Box:
        """Bounds."""
        return Box(min(self.x0, self.x1), min(self.y0, self.y1), max(self.x0, self.x1), max(self.y0, self.y1))


@dataclass(frozen=True)
class Arc:
    """An arc of an ellipse with half axes ``rx`` and ``ry``, turned by ``turn_deg``; a circle has rx = ry.

    ``start_deg`` and ``sweep_deg`` are of the parameter, counter-clockwise positive.
    """

    cx: float
    cy: float
    rx: float
    ry: float
    start_deg: float = 0.0
    sweep_deg: float = 360.0
    turn_deg: float = 0.0
    role: str = "outline"

    def moved(self, dx: float, dy: float) -> Arc:
        """The shifted arc."""
        return Arc(
            self.cx + dx, self.cy + dy, self.rx, self.ry, self.start_deg, self.sweep_deg, self.turn_deg, self.role
        )

    def scaled(self, s: float) -> Arc:
        """The arc with all lengths times ``s``."""
        return Arc(
            self.cx * s,
            self.cy * s,
            self.rx * s,
            self.ry * s,
            self.start_deg,
            self.sweep_deg,
            self.turn_deg,
            self.role,
        )

    def at(self, parameter_deg: float) -> Point:
        """The point at a parameter."""
        t, turn = math.radians(parameter_deg), math.radians(self.turn_deg)
        u, v = self.rx * math.cos(t), self.ry * math.sin(t)
        return (
            self.cx + u * math.cos(turn) - v * math.sin(turn),
            self.cy + u * math.sin(turn) + v * math.cos(turn),
        )

    def points(self, step_deg: float = 10.0) -> tuple[Point, ...]:
        """Points along the arc, both ends included."""
        n = max(2, math.ceil(abs(self.sweep_deg) / step_deg))
        return tuple(self.at(self.start_deg + self.sweep_deg * i / n) for i in range(n + 1))

    def box(self) -> Box:
        """Bounds: both ends and those of the four extreme points that lie on the arc."""
        if self.rx == self.ry and abs(self.sweep_deg) >= 360.0:
            return Box(self.cx - self.rx, self.cy - self.rx, self.cx + self.rx, self.cy + self.rx)
        turn = math.radians(self.turn_deg)
        c, s = math.cos(turn), math.sin(turn)
        across = math.degrees(math.atan2(-self.ry * s, self.rx * c))
        along = math.degrees(math.atan2(self.ry * c, self.rx * s))
        way = math.copysign(1.0, self.sweep_deg)
        points = [self.at(self.start_deg), self.at(self.start_deg + self.sweep_deg)]
        for t in (across, across + 180.0, along, along + 180.0):
            if (t - self.start_deg) * way % 360.0 <= abs(self.sweep_deg):
                points.append(self.at(t))
        return bounds_of_points(points)

    def beziers(self) -> tuple[tuple[Point, Point, Point, Point], ...]:
        """Cubic pieces of at most 45 degrees; the radial error is below 5e-6 of the radius."""
        n = max(1, math.ceil(abs(self.sweep_deg) / 45.0 - 1e-9))
        step = self.sweep_deg / n
        k = 4 / 3 * math.tan(math.radians(step) / 4)
        pieces = []
        for i in range(n):
            a, b = self.start_deg + i * step, self.start_deg + (i + 1) * step
            pieces.append((self.at(a), self._handle(a, k), self._handle(b, -k), self.at(b)))
        return tuple(pieces)

    def _handle(self, parameter_deg: float, k: float) -> Point:
        t, turn = math.radians(parameter_deg), math.radians(self.turn_deg)
        u = self.rx * (math.cos(t) - k * math.sin(t))
        v = self.ry * (math.sin(t) + k * math.cos(t))
        return (
            self.cx + u * math.cos(turn) - v * math.sin(turn),
            self.cy + u * math.sin(turn) + v * math.cos(turn),
        )


@dataclass(frozen=True)
class Polyline:
    """A polyline; ``fill`` paints its inside, ``role`` None leaves its edge undrawn."""

    points: tuple[Point, ...]
    role: str | None = "outline"
    closed: bool = False
    fill: Colour | None = None

    def moved(self, dx: float, dy: float) -> Polyline:
        """The shifted path."""
        return Polyline(tuple((x + dx, y + dy) for x, y in self.points), self.role, self.closed, self.fill)

    def scaled(self, s: float) -> Polyline:
        """The path with all coordinates times ``s``."""
        return Polyline(tuple((x * s, y * s) for x, y in self.points), self.role, self.closed, self.fill)

    def box(self) -> Box:
        """Bounds."""
        return bounds_of_points(self.points)


@dataclass(frozen=True)
class Text:
    """One line of text. ``height_mm`` is that of a capital (ISO 3098); the anchor is at the base line.

    ``anchor``: "start", "middle" or "end"; ``turn_deg`` 0 or 90.
    """

    x: float
    y: float
    text: str
    height_mm: float = 2.5
    anchor: Literal["start", "middle", "end"] = "start"
    turn_deg: float = 0.0
    bold: bool = False
    colour: Colour = BLACK

    def moved(self, dx: float, dy: float) -> Text:
        """The shifted text."""
        return Text(
            self.x + dx, self.y + dy, self.text, self.height_mm, self.anchor, self.turn_deg, self.bold, self.colour
        )

    def box(self) -> Box:
        """Bounds from the font's own widths, capital height and descent."""
        w = text_width_mm(self.text, self.height_mm, self.bold)
        left = {"start": 0.0, "middle": -w / 2, "end": -w}[self.anchor]
        low, high = -DESCENT * self.height_mm, self.height_mm
        if abs(self.turn_deg - 90) < 1e-9:
            return Box(self.x - high, self.y + left, self.x - low, self.y + left + w)
        return Box(self.x + left, self.y + low, self.x + left + w, self.y + high)


Item = Line | Arc | Polyline | Text


@dataclass(frozen=True)
class Dimension:
    """A dimension as written on a page: what it measures, its text, and where text and lines lie.

    ``kind``: "x", "y", "diameter", "radius", "angle" or "note"; ``points_mm`` are model coordinates of the view.
    """

    kind: str
    name: str
    value: float
    text: str
    view: str
    points_mm: tuple[Point, ...]
    text_box: Box
    lines: tuple[Line, ...]
    items: tuple[Item, ...] = field(repr=False, default=())

    def moved(self, dx: float, dy: float) -> Dimension:
        """The shifted dimension."""
        return Dimension(
            self.kind,
            self.name,
            self.value,
            self.text,
            self.view,
            self.points_mm,
            self.text_box.moved(dx, dy),
            tuple(line.moved(dx, dy) for line in self.lines),
            tuple(item.moved(dx, dy) for item in self.items),
        )


@dataclass(frozen=True)
class View:
    """Where a view lies on the paper: paper = origin + scale * model."""

    name: str
    scale: float
    origin: Point
    box: Box

    def moved(self, dx: float, dy: float) -> View:
        """The shifted view."""
        return View(self.name, self.scale, (self.origin[0] + dx, self.origin[1] + dy), self.box.moved(dx, dy))


@dataclass(frozen=True)
class Table:
    """A table as printed: every cell is the text on the page."""

    name: str
    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]


@dataclass(frozen=True)
class Sheet:
    """One page."""

    number: int
    count: int
    kind: str
    title: str
    part_key: str
    width_mm: float
    height_mm: float
    frame: Box
    items: tuple[Item, ...]
    dimensions: tuple[Dimension, ...] = ()
    views: tuple[View, ...] = ()
    tables: tuple[Table, ...] = ()
    bookmark: str = ""
    level: int = 0

    @property
    def texts(self) -> tuple[Text, ...]:
        """All texts of the page."""
        return tuple(item for item in self.items if isinstance(item, Text))


def bounds_of_points(points: list[Point] | tuple[Point, ...]) -> Box:
    """Bounds of points; raises ValueError when there are none."""
    xs, ys = [p[0] for p in points], [p[1] for p in points]
    return Box(min(xs), min(ys), max(xs), max(ys))


def bounds(items: list[Item] | tuple[Item, ...]) -> Box:
    """Bounds of items; a box of no size at the origin when there are none."""
    if not items:
        return Box(0, 0, 0, 0)
    box = items[0].box()
    for item in items[1:]:
        box = box.joined(item.box())
    return box


def moved(items: tuple[Item, ...], dx: float, dy: float) -> tuple[Item, ...]:
    """All items shifted."""
    return tuple(item.moved(dx, dy) for item in items)


def scale_text(scale: float) -> str:
    """``1:2``, ``1:1`` or ``5:1`` (ISO 5455)."""
    return f"{scale:g}:1" if scale >= 1 else f"1:{1 / scale:g}"


# ISO 5455: 1, 2, 5 times powers of ten.
SCALES = (50.0, 20.0, 10.0, 5.0, 2.0, 1.0, 0.5, 0.2, 0.1, 0.05, 0.02, 0.01, 0.005, 0.002, 0.001)


def number(value: float, places: int = 2) -> str:
    """A size as written on a drawing: at most ``places`` decimals, no trailing zeros, no minus zero."""
    text = f"{value:.{places}f}"
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    return "0" if text in {"-0", ""} else text


def tidy_text(text: str) -> str:
    """Signs of a keyboard as the signs of the trade: +- as ±, the x of M3x12 as ×."""
    return re.sub(r"(?<=\d)x(?=\d)", "×", text.replace("+-", "±").replace("+/-", "±"))
