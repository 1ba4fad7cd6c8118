"""A flat pattern as a view: outline, holes, fold lines, the dimensions that make it, and its tables.

Coordinates are those of the cutting file, so a table here can be checked against it. Corners are numbered along
the contour; an arc is given by its radius and its turn, which is enough because no arc is longer than 90 degrees.

Depends on: drawing.model, drawing.dimension, drawing.texts, parts (contour, bend_table, records).
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import groupby

from fabgen.drawing.dimension import DIAMETER, Ask, Mark, along_x, along_y, leader
from fabgen.drawing.model import Arc, Item, Line, Point, number
from fabgen.drawing.texts import say
from fabgen.parts import contour as c
from fabgen.parts.bend_table import fold_edges_mm
from fabgen.parts.records import FlatPattern

SPARED_ROWS = 24
MOST_IN_SET = 40
EXACT_MM = 1e-6
ROUND_DEG = 330.0  # an edge with this much of one circle is that of a disc


@dataclass(frozen=True)
class HoleRow:
    """A round hole as listed: number, centre and diameter."""

    label: str
    x_mm: float
    y_mm: float
    diameter_mm: float


def outline_items(outline: c.Outline, role: str = "outline") -> tuple[Item, ...]:
    """A contour as lines and arcs."""
    if isinstance(outline, c.Circle):
        return (Arc(outline.x_mm, outline.y_mm, outline.diameter_mm / 2, outline.diameter_mm / 2, role=role),)
    items: list[Item] = []
    for a, b in c.pairs(outline):
        if a.bulge == 0.0:
            items.append(Line(a.x_mm, a.y_mm, b.x_mm, b.y_mm, role))
        else:
            arc = c.arc_between(a, b)
            r = arc.radius_mm
            items.append(Arc(*arc.centre, r, r, arc.start_deg, arc.sweep_deg, role=role))
    return tuple(items)


def flat_items(flat: FlatPattern) -> tuple[Item, ...]:
    """Outline, holes and fold lines in model mm."""
    items = list(outline_items(flat.outline))
    for hole in flat.holes:
        items += outline_items(hole)
    items += [Line(*f.start, *f.end, "fold") for f in flat.folds]
    return tuple(items)


def round_holes(flat: FlatPattern) -> tuple[HoleRow, ...]:
    """Round holes, numbered by diameter, then by angle about the origin."""
    circles = [h for h in flat.holes if isinstance(h, c.Circle)]
    order = sorted(
        circles,
        key=lambda h: (
            round(h.diameter_mm, 3),
            round(math.hypot(h.x_mm, h.y_mm), 2),
            round(math.degrees(math.atan2(h.y_mm, h.x_mm)) % 360, 3),
        ),
    )
    return tuple(HoleRow(str(i + 1), h.x_mm, h.y_mm, h.diameter_mm) for i, h in enumerate(order))


def contours(flat: FlatPattern) -> tuple[tuple[str, c.Contour], ...]:
    """Contours that need a corner table: the outline as "A", holes that are not round as "B", "C" and so on."""
    shaped = [o for o in (flat.outline, *flat.holes) if isinstance(o, c.Contour)]
    return tuple((_letters(i), o) for i, o in enumerate(shaped))


def _letters(index: int) -> str:
    name = ""
    index += 1
    while index:
        index, rest = divmod(index - 1, 26)
        name = chr(65 + rest) + name
    return name


@dataclass(frozen=True)
class Repeat:
    """A stretch of a contour that comes again: ``count`` corners from index ``first`` on, then further sets, each
    the one before moved by its pitch (x, y in mm)."""

    first: int
    count: int
    pitches_mm: tuple[Point, ...]

    @property
    def left_out(self) -> range:
        """Indices of the corners that the first set and the pitches tell."""
        return range(self.first + self.count, self.first + self.count * (len(self.pitches_mm) + 1))


@cache
def repeat_of(contour: c.Contour) -> Repeat | None:
    """The longest exact repetition in the contour, when it spares at least ``SPARED_ROWS`` rows of its table."""
    v = contour.vertices
    best: Repeat | None = None
    for count in range(2, min(MOST_IN_SET, len(v) // 2) + 1):
        for first in range(len(v) - 2 * count + 1):
            found = Repeat(first, count, tuple(_pitches(v, first, count)))
            if len(found.left_out) >= SPARED_ROWS and (best is None or len(found.left_out) > len(best.left_out)):
                best = found
    return best


def _pitches(v: Sequence[c.Vertex], first: int, count: int) -> Iterator[Point]:
    """Pitches of the sets that follow the first without a corner between them."""
    for at in range(first + count, len(v) - count + 1, count):
        dx, dy = v[at].x_mm - v[at - count].x_mm, v[at].y_mm - v[at - count].y_mm
        if not all(_moved_by(v[i - count], v[i], dx, dy) for i in range(at, at + count)):
            return
        yield dx, dy


def _moved_by(a: c.Vertex, b: c.Vertex, dx: float, dy: float) -> bool:
    return max(abs(b.x_mm - a.x_mm - dx), abs(b.y_mm - a.y_mm - dy), abs(b.bulge - a.bulge)) < EXACT_MM


def repeat_rows(letter: str, repeat: Repeat) -> tuple[tuple[str, ...], ...]:
    """Rows: the corners left out, how many sets they are, and the pitch; sets of one pitch stand in one row."""
    shown = [(f"{_plain(x, 4)}", f"{_plain(y, 4)}") for x, y in repeat.pitches_mm]
    rows, at = [], repeat.left_out.start
    for pitch, sets in ((key, len(list(group))) for key, group in groupby(shown)):
        end = at + sets * repeat.count
        rows.append((f"{letter}{at + 1}–{letter}{end}", f"{sets} ×", *pitch))
        at = end
    return tuple(rows)


def _told(contour: c.Contour) -> range:
    repeat = repeat_of(contour)
    return repeat.left_out if repeat is not None else range(0)


def corner_rows(letter: str, contour: c.Contour) -> tuple[tuple[str, str, str, str], ...]:
    """Rows: corner, x, y, and the way to the next corner; without those that a repetition tells."""
    rows = []
    told = _told(contour)
    for i, (a, b) in enumerate(c.pairs(contour)):
        if i in told:
            continue
        if a.bulge == 0.0:
            way = say("flat.line")
        else:
            arc = c.arc_between(a, b)
            turn = "flat.arc_left" if a.bulge > 0 else "flat.arc_right"
            way = say(turn, radius=f"{_rounded(arc.radius_mm):.2f}")
        rows.append((f"{letter}{i + 1}", f"{_plain(a.x_mm)}", f"{_plain(a.y_mm)}", way))
    return tuple(rows)


def _plain(value: float, places: int = 2) -> str:
    text = f"{value:.{places}f}"
    return text.removeprefix("-") if float(text) == 0 else text


def _rounded(radius_mm: float) -> float:
    """To 0.01 mm, the same for radii that differ by rounding only."""
    return round(radius_mm + EXACT_MM, 2)


def hole_rows(flat: FlatPattern) -> tuple[tuple[str, str, str, str], ...]:
    """Rows of the hole table: number, x, y, diameter."""
    return tuple((h.label, _plain(h.x_mm), _plain(h.y_mm), f"{DIAMETER}{h.diameter_mm:.2f}") for h in round_holes(flat))


def fold_rows(flat: FlatPattern) -> tuple[tuple[str, ...], ...]:
    """Rows of the bend table, folds of one kind together: numbers, order, angle, direction, inside radius, K,
    allowance, deduction, and how far the line's middle is from the edge on its left and on its right."""
    groups: dict[tuple[str, ...], list[int]] = {}
    for f in flat.folds:
        kind = (
            str(f.order),
            f"{number(abs(f.angle_deg), 1)}°",
            say("flat.up") if f.angle_deg > 0 else say("flat.down"),
            number(f.inside_radius_mm),
            number(f.k_factor, 3),
            number(f.allowance_mm, 2),
            number(f.deduction_mm, 2),
            *(f"{edge:.2f}" for edge in fold_edges_mm(flat, f)),
        )
        groups.setdefault(kind, []).append(f.number)
    return tuple((_runs(numbers), *kind) for kind, numbers in groups.items())


def _runs(numbers: Sequence[int]) -> str:
    """``1, 3–7`` for 1, 3, 4, 5, 6, 7."""
    runs: list[list[int]] = []
    for n in sorted(numbers):
        if runs and n == runs[-1][1] + 1:
            runs[-1][1] = n
        else:
            runs.append([n, n])
    return ", ".join(str(a) if a == b else f"{a}–{b}" for a, b in runs)


def fold_line_rows(flat: FlatPattern) -> tuple[tuple[str, ...], ...]:
    """Rows: fold, and both ends of its line."""
    return tuple((f"F{f.number}", *(_plain(v) for v in (*f.start, *f.end))) for f in flat.folds)


def labels(flat: FlatPattern) -> tuple[Mark, ...]:
    """Numbers of folds, holes and corners, and where they belong."""
    wanted: list[Mark] = [(f"F{f.number}", _middle(f.start, f.end)) for f in flat.folds]
    wanted += [(h.label, _edge_point(h)) for h in round_holes(flat)]
    for letter, contour in contours(flat):
        told = _told(contour)
        corners = [(i, v) for i, v in enumerate(contour.vertices) if i not in told]
        wanted += [(f"{letter}{i + 1}", (v.x_mm, v.y_mm)) for i, v in corners]
    return tuple(wanted)


def _middle(a: Point, b: Point) -> Point:
    return ((a[0] + b[0]) / 2, (a[1] + b[1]) / 2)


def _edge_point(hole: HoleRow) -> Point:
    s = hole.diameter_mm / 2 * math.sqrt(0.5)
    return (hole.x_mm + s, hole.y_mm + s)


def asks(flat: FlatPattern) -> list[Ask]:
    """Dimensions of the pattern: overall sizes, folds from the edges, hole groups, bolt circles, arc radii."""
    x0, y0, x1, y1 = c.bounds_mm(flat.outline)
    wanted: list[Ask] = []
    if isinstance(flat.outline, c.Circle):
        d = flat.outline.diameter_mm
        wanted.append(along_x("outline", x0, x1, (y0 + y1) / 2, "bottom", text=f"{DIAMETER}{number(d)}"))
    elif (radius := round_radius_mm(flat.outline)) is not None:
        text = f"{DIAMETER}{number(2 * radius)}"
        wanted.append(along_x("diameter", -radius, radius, 0.0, "bottom", text=text))
        wanted += [*_fold_asks(flat, x0, y0, x1, y1), *_radius_asks(flat, radius)]
    else:
        wanted += [along_x("width", x0, x1, y0, "bottom"), along_y("height", y0, y1, x0, "left")]
        wanted += _fold_asks(flat, x0, y0, x1, y1)
        wanted += _radius_asks(flat)
    return [*wanted, *hole_asks(round_holes(flat))]


def round_radius_mm(outline: c.Contour) -> float | None:
    """Radius of a disc about the origin whose edge has notches only: arcs of it make up most of the contour."""
    turned: dict[float, float] = {}
    for a, b in c.pairs(outline):
        arc = c.arc_between(a, b) if a.bulge else None
        if arc is not None and math.hypot(*arc.centre) < EXACT_MM * 1e3:
            radius = _rounded(arc.radius_mm)
            turned[radius] = turned.get(radius, 0.0) + arc.sweep_deg
    return next((radius for radius, sweep in turned.items() if sweep > ROUND_DEG), None)


def _fold_asks(flat: FlatPattern, x0: float, y0: float, x1: float, y1: float) -> list[Ask]:
    uprights = sorted({round(f.start[0], 3) for f in flat.folds if abs(f.start[0] - f.end[0]) < 1e-6})
    levels = sorted({round(f.start[1], 3) for f in flat.folds if abs(f.start[1] - f.end[1]) < 1e-6})
    out: list[Ask] = []
    if len(uprights) <= 9:
        out += [along_x("fold", x0, x, y1, "top") for x in uprights]
    if len(levels) <= 9:
        out += [along_y("fold", y0, y, x1, "right") for y in levels]
    return out


def _radius_asks(flat: FlatPattern, outer_mm: float | None = None) -> list[Ask]:
    groups: dict[float, list[c.Arc]] = {}
    for _, contour in contours(flat):
        for a, b in c.pairs(contour):
            if a.bulge:
                arc = c.arc_between(a, b)
                groups.setdefault(_rounded(arc.radius_mm), []).append(arc)
    out = []
    for radius, arcs in sorted(groups.items())[:6]:
        if radius == outer_mm:
            continue
        arc = arcs[0]
        angle = arc.start_deg + arc.sweep_deg / 2
        t = math.radians(angle)
        at = (arc.centre[0] + arc.radius_mm * math.cos(t), arc.centre[1] + arc.radius_mm * math.sin(t))
        out.append(leader("radius", radius, f"R{number(radius)}", at, angle))
    return out


def hole_groups(rows: Sequence[HoleRow]) -> list[list[HoleRow]]:
    """Bolt circles, each a group; the other holes by diameter."""
    rings: dict[tuple[float, float], list[HoleRow]] = {}
    for row in rows:
        rings.setdefault((round(row.diameter_mm, 3), round(math.hypot(row.x_mm, row.y_mm), 1)), []).append(row)
    groups: list[list[HoleRow]] = []
    loose: dict[float, list[HoleRow]] = {}
    for (diameter, _), found in sorted(rings.items()):
        if is_bolt_circle(found):
            groups.append(found)
        else:
            loose.setdefault(diameter, []).extend(found)
    return [*groups, *(loose[d] for d in sorted(loose))]


def hole_asks(rows: Sequence[HoleRow]) -> list[Ask]:
    """A leader for each group of holes, on its outermost hole."""
    out: list[Ask] = []
    for found in hole_groups(rows):
        first = max(found, key=lambda h: (round(h.x_mm + h.y_mm, 3), h.y_mm))
        diameter = first.diameter_mm
        far = math.hypot(first.x_mm, first.y_mm)
        angle = math.degrees(math.atan2(first.y_mm, first.x_mm)) if far > 1 else 45.0
        t = math.radians(angle)
        at = (first.x_mm + diameter / 2 * math.cos(t), first.y_mm + diameter / 2 * math.sin(t))
        text = f"{len(found)} × " if len(found) > 1 else ""
        text += f"{DIAMETER}{number(diameter)}"
        if is_bolt_circle(found):
            text += " " + say("flat.on_circle", diameter=f"{DIAMETER}{number(2 * far)}")
        out.append(leader("hole", diameter, text, at, angle))
    return out


def is_bolt_circle(holes: Sequence[HoleRow]) -> bool:
    """Three holes or more of one diameter at equal angles and one distance from the origin."""
    if len(holes) < 3:
        return False
    angles = sorted(math.degrees(math.atan2(h.y_mm, h.x_mm)) % 360 for h in holes)
    steps = [(b - a) % 360 for a, b in zip(angles, [*angles[1:], angles[0]], strict=True)]
    return max(steps) - min(steps) < 0.1 and math.hypot(holes[0].x_mm, holes[0].y_mm) > 1


def centre_lines(flat: FlatPattern, scale: float) -> tuple[Item, ...]:
    """Crosses in holes, bolt circles, and the cross of a round outline, in paper mm."""
    items: list[Item] = []
    groups: dict[tuple[float, float], list[HoleRow]] = {}
    for h in round_holes(flat):
        half = h.diameter_mm / 2 * scale + 1.5
        x, y = h.x_mm * scale, h.y_mm * scale
        items += [Line(x - half, y, x + half, y, "centre"), Line(x, y - half, x, y + half, "centre")]
        groups.setdefault((round(h.diameter_mm, 3), round(math.hypot(h.x_mm, h.y_mm), 2)), []).append(h)
    for (_, radius), holes in sorted(groups.items()):
        if is_bolt_circle(holes):
            items.append(Arc(0, 0, radius * scale, radius * scale, role="centre"))
    if isinstance(flat.outline, c.Circle):
        x, y = flat.outline.x_mm * scale, flat.outline.y_mm * scale
        half = flat.outline.diameter_mm / 2 * scale + 3
        items += [Line(x - half, y, x + half, y, "centre"), Line(x, y - half, x, y + half, "centre")]
    return tuple(items)
