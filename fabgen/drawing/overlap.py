"""Where texts and lines lie on a page, and whether they get in each other's way.

Depends on: drawing.model.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from itertools import pairwise

from fabgen.drawing.model import Arc, Box, Item, Line, Polyline, Sheet


@dataclass(frozen=True)
class Clash:
    """A broken rule of legibility: ``kind`` "text-text", "text-page" or "line-text"."""

    kind: str
    first: str
    second: str


def crosses(box: Box, line: Line) -> bool:
    """True when a line passes through the inside of a box (clipping by its four sides)."""
    dx, dy = line.x1 - line.x0, line.y1 - line.y0
    low, high = 0.0, 1.0
    for p, q in (
        (-dx, line.x0 - box.x0),
        (dx, box.x1 - line.x0),
        (-dy, line.y0 - box.y0),
        (dy, box.y1 - line.y0),
    ):
        if abs(p) < 1e-12:
            if q <= 0:
                return False
            continue
        t = q / p
        if p < 0:
            low = max(low, t)
        else:
            high = min(high, t)
        if low >= high:
            return False
    return True


def segments(items: Iterable[Item], step_deg: float = 15.0) -> list[Line]:
    """Lines, arcs and open or closed paths as straight pieces."""
    out: list[Line] = []
    for item in items:
        if isinstance(item, Line):
            out.append(item)
        elif isinstance(item, Arc):
            pts = item.points(step_deg)
            out += [Line(*a, *b) for a, b in pairwise(pts)]
        elif isinstance(item, Polyline) and item.role is not None:
            pts = (*item.points, item.points[0]) if item.closed else item.points
            out += [Line(*a, *b) for a, b in pairwise(pts)]
    return out


CELL_MM = 6.0


class Occupied:
    """What a drawing has taken: boxes of texts, dimension lines, and the lines of the view itself.

    The view's lines are kept by the cells of a grid, since most questions concern a few millimetres of it.
    """

    def __init__(self, view: Iterable[Item] = ()) -> None:
        self.texts: list[Box] = []
        self.lines: list[Line] = []
        self._cells: dict[tuple[int, int], list[Line]] = {}
        for segment in segments(view):
            for cell in _cells(segment.box()):
                self._cells.setdefault(cell, []).append(segment)

    def text_is_free(self, box: Box, avoid_view: bool = True) -> bool:
        """True when a text may stand here."""
        if any(box.overlaps(t) for t in self.texts) or any(crosses(box, line) for line in self.lines):
            return False
        if not avoid_view:
            return True
        return not any(crosses(box, line) for cell in _cells(box) for line in self._cells.get(cell, ()))

    def lines_are_free(self, lines: Iterable[Line]) -> bool:
        """True when none of the lines runs through a text."""
        return not any(crosses(t, line) for line in lines for t in self.texts)

    def take(self, box: Box | None, lines: Iterable[Line]) -> None:
        """Note a text and lines as set."""
        if box is not None:
            self.texts.append(box)
        self.lines += lines


def _cells(box: Box) -> Iterable[tuple[int, int]]:
    for i in range(math.floor(box.x0 / CELL_MM), math.floor(box.x1 / CELL_MM) + 1):
        for j in range(math.floor(box.y0 / CELL_MM), math.floor(box.y1 / CELL_MM) + 1):
            yield (i, j)


def clashes(sheet: Sheet) -> tuple[Clash, ...]:
    """All broken rules of a sheet: two texts overlap, a text leaves the page, a dimension line crosses a text."""
    texts = sorted(((t.box().grown(-0.02), t.text) for t in sheet.texts if t.text.strip()), key=lambda p: p[0].x0)
    page = Box(0, 0, sheet.width_mm, sheet.height_mm).grown(-4.0)
    found = [Clash("text-page", text, "") for box, text in texts if not page.contains(box)]
    for i, (box, text) in enumerate(texts):
        for other, second in texts[i + 1 :]:
            if other.x0 >= box.x1:
                break
            if box.overlaps(other):
                found.append(Clash("text-text", text, second))
    for dimension in sheet.dimensions:
        for line in dimension.lines:
            found += [Clash("line-text", dimension.text, text) for box, text in texts if crosses(box, line)]
    return tuple(found)
