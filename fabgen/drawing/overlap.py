"""Where texts and lines lie on a page, and whether they get in each other's way.

Depends on: drawing.model.
"""

from __future__ import annotations

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


class Occupied:
    """What a drawing has taken: boxes of texts, dimension lines, and the lines of the view itself."""

    def __init__(self, view: Iterable[Item] = ()) -> None:
        self.texts: list[Box] = []
        self.lines: list[Line] = []
        self.view = [(s, s.box()) for s in segments(view)]

    def text_is_free(self, box: Box, avoid_view: bool = True) -> bool:
        """True when a text may stand here."""
        if any(box.overlaps(t) for t in self.texts) or any(crosses(box, line) for line in self.lines):
            return False
        if not avoid_view:
            return True
        wide = box.grown(1e-6)
        return not any(wide.overlaps(b.grown(1e-6)) and crosses(box, s) for s, b in self.view)

    def lines_are_free(self, lines: Iterable[Line]) -> bool:
        """True when none of the lines runs through a text."""
        return not any(crosses(t, line) for t in self.texts for line in lines)

    def take(self, box: Box | None, lines: Iterable[Line]) -> None:
        """Note a text and lines as set."""
        if box is not None:
            self.texts.append(box)
        self.lines += lines


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
