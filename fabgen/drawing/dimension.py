"""Dimensions set round a view by themselves (ISO 129-1): short ones near, long ones outside, no text covered.

Linear dimensions stand in rows beside the view; diameters, radii and notes hang on leader lines. A dimension that
finds no free place is handed back, so that the page can list it in a table instead.

Depends on: drawing.model, drawing.overlap, drawing.fonts.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Literal

from fabgen.drawing.fonts import DESCENT, text_width_mm
from fabgen.drawing.model import Box, Dimension, Item, Line, Point, Polyline, Text, bounds, number
from fabgen.drawing.overlap import Occupied

Side = Literal["top", "bottom", "left", "right"]
FIRST_ROW_MM = 8.0
ROW_PITCH_MM = 6.5
ROWS = 14
ARROW_MM = 2.5
ARROW_HALF_MM = 0.4
CLEAR_MM = 1.0
OVERSHOOT_MM = 2.0  # extension line past the dimension line: 8 x 0.25
OFFSET_MM = 1.0
DIAMETER = "⌀"


@dataclass(frozen=True)
class Ask:
    """A dimension wanted, in model coordinates of the view.

    ``kind`` "x" or "y": distance from ``a`` to ``b`` along that axis, on ``side``. "leader": arrow on ``a``,
    coming from the direction ``angle_deg``.
    """

    kind: str
    name: str
    value: float
    text: str
    a: Point
    b: Point = (0.0, 0.0)
    side: Side = "bottom"
    angle_deg: float = 45.0


@dataclass(frozen=True)
class Placed:
    """Result of placing: what to draw (origin = model origin, paper mm) and what found no place."""

    items: tuple[Item, ...]
    dimensions: tuple[Dimension, ...]
    box: Box
    left_over: tuple[Ask, ...]


def along_x(
    name: str, x0: float, x1: float, y: float, side: Side = "bottom", *, text: str = "", y1: float | None = None
) -> Ask:
    """A horizontal dimension between two abscissae; ``y`` (and ``y1``) is where the extension lines begin."""
    value = abs(x1 - x0)
    return Ask("x", name, value, text or number(value), (x0, y), (x1, y if y1 is None else y1), side)


def along_y(
    name: str, y0: float, y1: float, x: float, side: Side = "left", *, text: str = "", x1: float | None = None
) -> Ask:
    """A vertical dimension between two ordinates; ``x`` (and ``x1``) is where the extension lines begin."""
    value = abs(y1 - y0)
    return Ask("y", name, value, text or number(value), (x, y0), (x if x1 is None else x1, y1), side)


def leader(name: str, value: float, text: str, at: Point, angle_deg: float = 45.0) -> Ask:
    """A text on a leader line whose arrow touches ``at``."""
    return Ask("leader", name, value, text, at, angle_deg=angle_deg)


def place(
    view: str,
    items: Sequence[Item],
    asks: Sequence[Ask],
    scale: float,
    *,
    height_mm: float = 2.5,
    limits: Box | None = None,
) -> Placed:
    """Set the dimensions round the view's items (already scaled to paper mm, model origin at 0, 0).

    ``limits``: where texts on leaders may stand; 45 mm round the view when left out.
    """
    occupied = Occupied(items)
    for item in items:
        if isinstance(item, Text):
            occupied.take(item.box(), ())
    body = bounds(tuple(items))
    done: list[Dimension] = []
    left_over: list[Ask] = []
    # A distance of nothing (a choke ring level with the floor) is left to the tables.
    linear = sorted(
        (a for a in asks if a.kind in {"x", "y"} and a.value > 0.005),
        key=lambda a: (a.side, round(a.value, 6), a.a, a.text),
    )
    leaders = [a for a in asks if a.kind == "leader"]
    scene = _Scene(view, body, occupied, scale, height_mm, limits or body.grown(45))
    for ask in linear:
        others = [other for other in linear if other is not ask and other.side == ask.side]
        _keep(_linear(scene, ask, others), ask, done, left_over, occupied)
    for ask in leaders:
        _keep(_leader(scene, ask), ask, done, left_over, occupied)
    drawn = tuple(i for d in done for i in d.items)
    box = bounds((*items, *drawn)) if items or drawn else Box(0, 0, 0, 0)
    return Placed(drawn, tuple(done), box, tuple(left_over))


def _keep(found: Dimension | None, ask: Ask, done: list[Dimension], left_over: list[Ask], occupied: Occupied) -> None:
    if found is None:
        left_over.append(ask)
        return
    done.append(found)
    occupied.take(found.text_box, found.lines)


@dataclass(frozen=True)
class _Scene:
    """What placing needs to know of the view."""

    view: str
    body: Box
    occupied: Occupied
    scale: float
    height: float
    limits: Box


@dataclass(frozen=True)
class _Axis:
    """Maps row coordinates (u along the dimension, v outward from the view) to the paper."""

    side: Side

    def point(self, u: float, v: float) -> Point:
        return {"bottom": (u, -v), "top": (u, v), "left": (-v, u), "right": (v, u)}[self.side]

    def u(self, p: Point) -> float:
        return p[0] if self.side in {"bottom", "top"} else p[1]

    def v(self, p: Point) -> float:
        return {"bottom": -p[1], "top": p[1], "left": -p[0], "right": p[0]}[self.side]

    def line(self, u0: float, v0: float, u1: float, v1: float) -> Line:
        return Line(*self.point(u0, v0), *self.point(u1, v1), "dimension")

    def edge(self, body: Box) -> float:
        return {"bottom": -body.y0, "top": body.y1, "left": -body.x0, "right": body.x1}[self.side]


def _linear(scene: _Scene, ask: Ask, others: Sequence[Ask]) -> Dimension | None:
    axis, scale = _Axis(ask.side), scene.scale
    a, b = ((p[0] * scale, p[1] * scale) for p in (ask.a, ask.b))
    if axis.u(a) > axis.u(b):
        a, b = b, a
    barred = sorted({axis.u((p[0] * scale, p[1] * scale)) for o in others for p in (o.a, o.b)})
    width = text_width_mm(ask.text, scene.height)
    half = width / 2 + 0.5
    # A text must keep clear of the extension lines that dimensions further out will send past it.
    centres = [c for c in _shifts(axis.u(a), axis.u(b), width) if not any(abs(c - u) < half for u in barred)]
    for row in range(ROWS):
        v = axis.edge(scene.body) + FIRST_ROW_MM + row * ROW_PITCH_MM
        for centre in centres:
            made = _linear_at(scene, ask, (a, b), v, centre)
            if _row_is_free(made, scene.occupied):
                return made
    return None


def _shifts(u0: float, u1: float, width: float) -> list[float]:
    """Centres of the text to try: the middle, then along the line, then beyond its ends."""
    middle, room = (u0 + u1) / 2, (u1 - u0) / 2 - width / 2 - ARROW_MM - 0.3
    tries: list[float] = []
    if room >= 0:
        tries.append(middle)
        pitch = max(1.5, room / 20)
        step = pitch
        while step <= room:
            tries += [middle + step, middle - step]
            step += pitch
    if room < 6:
        beyond = ARROW_MM * 1.6 + width / 2 + 0.8
        tries += [u1 + beyond, u0 - beyond, u1 + beyond + 6, u0 - beyond - 6]
    return tries


def _linear_at(scene: _Scene, ask: Ask, ends: tuple[Point, Point], v: float, centre: float) -> Dimension:
    axis, (a, b), height = _Axis(ask.side), ends, scene.height
    u0, u1 = axis.u(a), axis.u(b)
    width = text_width_mm(ask.text, height)
    inside = u0 <= centre <= u1
    reach = (min(u0, centre - width / 2), max(u1, centre + width / 2))
    if not inside or u1 - u0 < 2 * ARROW_MM + 0.5:
        reach = (min(reach[0], u0 - 1.6 * ARROW_MM), max(reach[1], u1 + 1.6 * ARROW_MM))
    lines = [axis.line(reach[0], v, reach[1], v)]
    for p in (a, b):
        start = axis.v(p) + math.copysign(OFFSET_MM, v - axis.v(p))
        lines.append(axis.line(axis.u(p), start, axis.u(p), v + OVERSHOOT_MM))
    out = -1.0 if reach != (u0, u1) and (not inside or u1 - u0 < 2 * ARROW_MM + 0.5) else 1.0
    arrows = [_arrow(axis.point(u0, v), axis.point(u0 + out, v)), _arrow(axis.point(u1, v), axis.point(u1 - out, v))]
    x, y = axis.point(centre, v)
    gap = CLEAR_MM
    if axis.side in {"bottom", "top"}:
        text = Text(x, y + gap, ask.text, height, "middle")
    else:
        text = Text(x - gap, y, ask.text, height, "middle", 90.0)
    return Dimension(
        ask.kind,
        ask.name,
        ask.value,
        ask.text,
        scene.view,
        (ask.a, ask.b),
        text.box(),
        tuple(lines),
        (*lines, *arrows, text),
    )


def _row_is_free(made: Dimension, occupied: Occupied) -> bool:
    box = made.text_box.grown(0.3)
    if not occupied.text_is_free(box, avoid_view=False) or not occupied.lines_are_free(made.lines):
        return False
    return not any(_same_row(made.lines[0], other) for other in occupied.lines)


def _same_row(a: Line, b: Line) -> bool:
    """True when two lines are parallel, nearer than a text needs, and beside each other."""
    ab, bb = a.box(), b.box()
    if ab.height < 1e-9 and bb.height < 1e-9:
        return abs(ab.y0 - bb.y0) < 0.9 * ROW_PITCH_MM and ab.x0 < bb.x1 + 1 and bb.x0 < ab.x1 + 1
    if ab.width < 1e-9 and bb.width < 1e-9:
        return abs(ab.x0 - bb.x0) < 0.9 * ROW_PITCH_MM and ab.y0 < bb.y1 + 1 and bb.y0 < ab.y1 + 1
    return False


def _arrow(tip: Point, towards: Point) -> Polyline:
    """A filled arrow head whose tip is at ``tip``; its tail lies on the side of ``towards``."""
    dx, dy = towards[0] - tip[0], towards[1] - tip[1]
    length = math.hypot(dx, dy)
    ux, uy = dx / length, dy / length
    base = (tip[0] + ux * ARROW_MM, tip[1] + uy * ARROW_MM)
    side = (-uy * ARROW_HALF_MM, ux * ARROW_HALF_MM)
    points = (tip, (base[0] + side[0], base[1] + side[1]), (base[0] - side[0], base[1] - side[1]))
    return Polyline(points, None, True, (0.0, 0.0, 0.0))


def arrow(tip: Point, towards: Point) -> Polyline:
    """A filled arrow head for use outside dimensions."""
    return _arrow(tip, towards)


def _leader(scene: _Scene, ask: Ask) -> Dimension | None:
    tip = (ask.a[0] * scene.scale, ask.a[1] * scene.scale)
    occupied = scene.occupied
    turns = [0, 15, -15, 30, -30, 45, -45, 60, -60, 80, -80, 105, -105, 130, -130, 180]
    for avoid_view in (True, False):
        for reach in (7, 11, 16, 22, 30, 40, 52, 66, 82, 100):
            for turn in turns:
                made = _leader_at(scene, ask, tip, ask.angle_deg + turn, float(reach))
                if not scene.limits.contains(made.text_box):
                    continue
                if occupied.text_is_free(made.text_box.grown(0.4), avoid_view) and occupied.lines_are_free(made.lines):
                    return made
    return None


def _leader_at(scene: _Scene, ask: Ask, tip: Point, angle_deg: float, reach: float) -> Dimension:
    height = scene.height
    t = math.radians(angle_deg)
    knee = (tip[0] + reach * math.cos(t), tip[1] + reach * math.sin(t))
    right = math.cos(t) >= -1e-9
    width = text_width_mm(ask.text, height)
    end = knee[0] + (width + 1.0) * (1 if right else -1)
    lines = (Line(*tip, *knee, "dimension"), Line(knee[0], knee[1], end, knee[1], "dimension"))
    x = knee[0] + 0.5 if right else end + 0.5
    text = Text(x, knee[1] + CLEAR_MM, ask.text, height)
    return Dimension(
        "leader",
        ask.name,
        ask.value,
        ask.text,
        scene.view,
        (ask.a,),
        text.box(),
        lines,
        (*lines, _arrow(tip, knee), text),
    )


Mark = tuple[str, Point]
MANY_MARKS = 150
CROWD_MM = 3.0  # on paper; of many labels those nearer than this to the one before are left out


def marks(
    wanted: Iterable[Mark], items: Sequence[Item], scale: float, placed: Placed | None = None
) -> tuple[Text, ...]:
    """Short labels set beside points (corner and hole numbers), clear of the view's lines and its dimensions.

    A label that finds no place is left out: labels run in order along the contour, so that its number is known.
    """
    occupied = Occupied(items)
    for item in items:
        if isinstance(item, Text):
            occupied.take(item.box(), ())
    for dimension in placed.dimensions if placed is not None else ():
        occupied.take(dimension.text_box.grown(0.2), dimension.lines)
    out: list[Text] = []
    listed = list(wanted)
    crowd = CROWD_MM if len(listed) > MANY_MARKS else 0.0
    last: Point | None = None
    for label, point in listed:
        if last is not None and math.dist(last, point) * scale < crowd:
            continue
        text = _mark(label, (point[0] * scale, point[1] * scale), occupied)
        if text is not None:
            occupied.take(text.box().grown(0.15), ())
            out.append(text)
            last = point
    return tuple(out)


def _mark(label: str, at: Point, occupied: Occupied, height: float = 1.8) -> Text | None:
    width, high = text_width_mm(label, height), height * (1 + DESCENT)
    # The eighths of a turn at every reach, and only then those between them.
    for ways in ((1, 3, 5, 7, 0, 2, 4, 6), (0.5, 1.5, 2.5, 3.5, 4.5, 5.5, 6.5, 7.5)):
        for reach, k in itertools.product((1.0, 1.8, 2.8, 4.0), ways):
            c, s = math.cos(k * math.pi / 4), math.sin(k * math.pi / 4)
            x = at[0] + c * (reach + width / 2)
            y = at[1] + s * (reach + high / 2) - high / 2 + DESCENT * height
            text = Text(x, y, label, height, "middle")
            if occupied.text_is_free(text.box().grown(0.15)):
                return text
    return None
