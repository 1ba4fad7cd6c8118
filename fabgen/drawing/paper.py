"""Paper sizes, frame (ISO 5457) and title block (ISO 7200).

Depends on: drawing.model, drawing.fonts, drawing.texts.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

from fabgen.drawing.fonts import fit
from fabgen.drawing.model import Arc, Box, Item, Line, Text, tidy_text
from fabgen.drawing.texts import say

TITLE_WIDTH_MM = 180.0
TITLE_HEIGHT_MM = 32.0
REFER_MM = {"title.tolerance": 40.0, "title.material": 62.0, "title.finish": 38.0}  # too long: said on the sheet


@dataclass(frozen=True)
class Paper:
    """A trimmed sheet; ``landscape`` sheets carry two columns."""

    name: str
    width_mm: float
    height_mm: float

    @property
    def landscape(self) -> bool:
        """Wider than high."""
        return self.width_mm > self.height_mm

    @property
    def frame(self) -> Box:
        """Drawing space: margin 20 at the filing edge, 10 elsewhere (ISO 5457)."""
        return Box(20.0, 10.0, self.width_mm - 10.0, self.height_mm - 10.0)


# ISO 216 for A4 and A3 (A4 upright only: ISO 5457); ANSI A and B otherwise.
PAPERS = {
    "A4": Paper("A4", 210.0, 297.0),
    "A3": Paper("A3", 420.0, 297.0),
    "letter": Paper("Letter", 215.9, 279.4),
    "tabloid": Paper("Tabloid", 431.8, 279.4),
}


@dataclass(frozen=True)
class TitleFields:
    """What the title block says. Date of issue and approval are left open: they are given by hand at release."""

    owner: str
    title: str
    supplement: str
    identification: str
    revision: str
    document_type: str
    creator: str
    tolerance: str
    material: str
    finish: str
    scale: str
    projection: str
    number: int
    count: int


def frame_items(paper: Paper) -> tuple[Item, ...]:
    """Frame line 0.7, centring marks, and the grid reference border of letters and numerals at 50 mm pitch."""
    box = paper.frame
    items: list[Item] = [
        Line(box.x0, box.y0, box.x1, box.y0, "frame"),
        Line(box.x1, box.y0, box.x1, box.y1, "frame"),
        Line(box.x1, box.y1, box.x0, box.y1, "frame"),
        Line(box.x0, box.y1, box.x0, box.y0, "frame"),
    ]
    mid_x, mid_y = (box.x0 + box.x1) / 2, (box.y0 + box.y1) / 2
    items += [
        # The mark at the bottom stops at the frame where the title block begins.
        Line(mid_x, box.y0 - 5, mid_x, box.y0 + (3 if paper.landscape else 0), "frame"),
        Line(mid_x, box.y1 + 5, mid_x, box.y1 - 3, "frame"),
        Line(box.x0 - 5, mid_y, box.x0 + 3, mid_y, "frame"),
        Line(box.x1 + 5, mid_y, box.x1 - 3, mid_y, "frame"),
    ]
    return (*items, *_grid(box, mid_x, mid_y))


def _grid(box: Box, mid_x: float, mid_y: float) -> list[Item]:
    letters = "ABCDEFGHJKLMNP"  # no I, no O
    items: list[Item] = []
    x_marks = _marks(mid_x, box.x0, box.x1)
    y_marks = _marks(mid_y, box.y0, box.y1)
    for x in x_marks[1:-1]:
        items += [Line(x, box.y0 - 5, x, box.y0, "thin"), Line(x, box.y1, x, box.y1 + 5, "thin")]
    for y in y_marks[1:-1]:
        items += [Line(box.x0 - 5, y, box.x0, y, "thin"), Line(box.x1, y, box.x1 + 5, y, "thin")]
    for i, (a, b) in enumerate(pairwise(x_marks)):
        for y in (box.y0 - 3.75, box.y1 + 1.25):
            items.append(Text((a + b) / 2, y, str(i + 1), 2.5, "middle"))
    for i, (a, b) in enumerate(zip(y_marks[::-1], y_marks[-2::-1], strict=False)):
        for x in (box.x0 - 2.5, box.x1 + 2.5):
            items.append(Text(x, (a + b) / 2 - 1.25, letters[i], 2.5, "middle"))
    return items


def _marks(middle: float, low: float, high: float) -> list[float]:
    """Field borders every 50 mm from the centring mark, the rest at the ends joined to the last field."""
    n = int((high - middle - 10) // 50)
    return [low, *(middle + 50 * k for k in range(-n, n + 1)), high]


def title_block(box: Box, fields: TitleFields) -> tuple[Item, ...]:
    """The title block, 180 x 32, at the lower right corner of the frame."""
    x, y = box.x1 - TITLE_WIDTH_MM, box.y0
    items = _rules(x, y)
    items += _row(
        x,
        y + 24,
        (
            (20, "title.scale", fields.scale),
            (20, "title.projection", ""),
            (REFER_MM["title.tolerance"], "title.tolerance", fields.tolerance),
            (REFER_MM["title.material"], "title.material", fields.material),
            (REFER_MM["title.finish"], "title.finish", fields.finish),
        ),
    )
    items += _row(
        x,
        y + 16,
        (
            (35, "title.creator", fields.creator),
            (35, "title.approved", ""),
            (45, "title.document", fields.document_type),
            (30, "title.status", say("title.status_value")),
            (35, "title.date", ""),
        ),
    )
    items += _row(
        x + 125,
        y,
        (
            (18, "title.language", "en"),
            (18, "title.revision", fields.revision),
            (19, "title.sheet", f"{fields.number}/{fields.count}"),
        ),
    )
    items += _cell((x, y), 45, 16, "title.owner", fields.owner)
    items += _cell((x + 45, y), 80, 16, "title.title", fields.title, size=3.5, second=fields.supplement)
    items += _cell((x + 125, y + 8), 55, 8, "title.number", fields.identification)
    return (*items, *projection_symbol(x + 30, y + 26.6, fields.projection))


def fits_title(label_key: str, value: str) -> bool:
    """True when the title block has room for the whole value of one of the fields in ``REFER_MM``."""
    return not fit(tidy_text(value), REFER_MM[label_key] - 2, 2.5)[0].endswith("…")


def _rules(x: float, y: float) -> list[Item]:
    """The block's own lines."""
    return [
        Line(x, y + 32, x + 180, y + 32, "outline"),
        Line(x, y, x, y + 32, "outline"),
        Line(x, y + 24, x + 180, y + 24, "thin"),
        Line(x, y + 16, x + 180, y + 16, "thin"),
        Line(x + 125, y + 8, x + 180, y + 8, "thin"),
        Line(x + 45, y, x + 45, y + 16, "thin"),
        Line(x + 125, y, x + 125, y + 16, "thin"),
    ]


def _row(x: float, y: float, cells: tuple[tuple[float, str, str], ...]) -> list[Item]:
    items: list[Item] = []
    left = x
    for i, (width, key, value) in enumerate(cells):
        items += _cell((left, y), width, 8, key, value)
        if i:
            items.append(Line(left, y, left, y + 8, "thin"))
        left += width
    return items


def _cell(
    at: tuple[float, float],
    width: float,
    height: float,
    label_key: str,
    value: str,
    *,
    size: float = 2.5,
    second: str = "",
) -> list[Item]:
    x, y = at
    label, label_height = fit(say(label_key), width - 2, 1.8)
    items: list[Item] = [Text(x + 1, y + height - 2.5, label, label_height)]
    if second:
        text, fitted = fit(second, width - 2, 2.5)
        items.append(Text(x + 1, y + 2.0, text, fitted))
    if value:
        text, fitted = fit(tidy_text(value), width - 2, size, bold=size > 3)
        if label_key in REFER_MM and not fits_title(label_key, value):
            text, fitted = say("title.see_sheet"), 2.5
        items.append(Text(x + 1, y + (6.5 if height > 10 else 1.4), text, fitted, bold=size > 3))
    return items


def projection_symbol(x: float, y: float, projection: str) -> tuple[Item, ...]:
    """The symbol of ISO 5456-2, centred: a frustum, small end left, and its view from the left. First angle
    puts that view on the right of the frustum, third angle on the left."""
    small, large, length = 0.9, 1.8, 4.0
    left, eye = (x - 6.0, x + 4.0) if projection == "first" else (x + 2.0, x - 4.0)
    right = left + length
    return (
        Line(left, y - small, left, y + small, "thin"),
        Line(right, y - large, right, y + large, "thin"),
        Line(left, y + small, right, y + large, "thin"),
        Line(left, y - small, right, y - large, "thin"),
        Line(left - 0.8, y, right + 0.8, y, "fine"),
        Arc(eye, y, small, small, role="thin"),
        Arc(eye, y, large, large, role="thin"),
        Line(eye - 2.4, y, eye + 2.4, y, "fine"),
        Line(eye, y - 2.4, eye, y + 2.4, "fine"),
    )
