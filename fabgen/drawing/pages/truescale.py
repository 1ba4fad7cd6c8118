"""True-scale pages: templates to print at 100 %, each with a 100 mm bar in x and y, tiled when larger than the page.

Depends on: drawing, parts.records.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from fabgen.drawing import flat as flat_view
from fabgen.drawing.clip import clipped
from fabgen.drawing.dimension import marks
from fabgen.drawing.flow import Page, columns
from fabgen.drawing.hidden import ABOVE, FROM_GAP, GAP, look
from fabgen.drawing.hidden import dressed as dress
from fabgen.drawing.model import Arc, Box, Item, Line, Point, Text, View, bounds, moved, number
from fabgen.drawing.pages.base import Context, Draft
from fabgen.drawing.paper import Paper
from fabgen.drawing.solid import squared
from fabgen.drawing.texts import say
from fabgen.parts.contour import Contour
from fabgen.parts.records import Part

OVERLAP_MM = 10.0
BAR_MM = 100.0
STRIP_MM = 13.0  # along the left and lower edge, for the bars
HEAD_MM = 13.0
MOST_TILES = 12
CLEAR_MM = 8.0  # from a cross on a joint to the middle of any hole
SHARES = (0.25, 0.75, 0.4, 0.6, 0.15, 0.85)  # where crosses may stand along a joint
PLATE_SHARE = 0.32  # thinner than this share of its width, a part is a plate: its edge shows nothing


@dataclass(frozen=True)
class Template:
    """Something to print at true scale, in mm."""

    title: str
    part_key: str
    items: tuple[Item, ...]
    middle: Point | None = None  # what is shown of a part that is too large: the surroundings of this point


def drafts(context: Context) -> list[Draft]:
    """A draft for each template."""
    return [_draft(context, t) for t in templates(context)]


def templates(context: Context) -> tuple[Template, ...]:
    """Drilling templates of drilled and cut floors, bent loops, foils, and the capacitor."""
    out: list[Template] = []
    for part in context.parts:
        if part.flat is not None and _wanted(part):
            kind = "true.foil" if "foil" in part.process else "true.drill"
            out.append(Template(say(kind, part=part.name), part.key, _flat(part), _hand_work(part)))
        elif part.wire is not None and part.solid is not None:
            out += _wire(part)
    small = [p for p in context.parts if p.key.startswith(("capacitor", "coax")) and p.solid is not None]
    if small:
        out.append(Template(say("true.capacitor"), small[0].key, _row(small)))
    return tuple(out)


def _row(parts: list[Part]) -> tuple[Item, ...]:
    """Small parts one under the other, their names beside them."""
    items: list[Item] = []
    y = 0.0
    for part in parts:
        drawn = _small(part)
        box = bounds(drawn)
        items += moved(drawn, -box.x1 - 8, y - box.y1)
        name = part.name
        if part.thickness_mm is not None:
            name = say("true.thick", part=part.name, thickness=number(part.thickness_mm))
        items.append(Text(0, y - box.height / 2 - 1.2, name, 2.5))
        y -= box.height + 10
    return tuple(items)


def _wanted(part: Part) -> bool:
    """Flat parts that are worked by hand from a print: drilled, foil, and those without a fold."""
    if part.flat is None:
        return False
    return bool({"drill", "foil"} & set(part.process)) or (not part.flat.folds and bool(part.flat.holes))


def _flat(part: Part) -> tuple[Item, ...]:
    if part.flat is None:
        return ()
    items = flat_view.flat_items(part.flat)
    lines = flat_view.centre_lines(part.flat, 1.0)
    return (*items, *lines, *marks(flat_view.labels(part.flat), (*items, *lines), 1.0))


def _hand_work(part: Part) -> Point | None:
    """Middle of the hole that is not round, where connector and bars sit; None when there is none."""
    found = [flat_view.outline_items(h) for h in part.flat.holes if isinstance(h, Contour)] if part.flat else []
    if not found:
        return None
    box = bounds(found[0])
    return (round((box.x0 + box.x1) / 2), 0.0)


def _wire(part: Part) -> list[Template]:
    """The bent wire seen from the aperture and along the bars, one under the other."""
    if part.solid is None:
        return []
    shape = part.solid()
    above = dress(look([shape], ABOVE)[0].visible, "outline")
    side = dress(look([shape], GAP)[0].visible, "outline")
    low = bounds(above).y0 - bounds(side).y1 - 12
    box = bounds(above).grown(4)
    lines = (Line(box.x0, 0, box.x1, 0, "centre"), Line(0, box.y0, 0, box.y1, "centre"))
    return [Template(say("true.wire", part=part.name), part.key, (*above, *lines, *moved(side, 0, low)))]


def _small(part: Part) -> tuple[Item, ...]:
    """A small part seen on its largest face; one that is no plate also from its end, to the left of that."""
    if part.solid is None:
        return ()
    shape = squared(part.solid())
    box = shape.BoundingBox(1e-3)
    extents = sorted(((box.xlen, FROM_GAP), (box.ylen, GAP), (box.zlen, ABOVE)), key=lambda e: round(e[0], 3))
    face = dress(look([shape], extents[0][1])[0].visible, "outline")
    if extents[0][0] < PLATE_SHARE * extents[1][0]:
        return face
    end = dress(look([shape], extents[2][1])[0].visible, "outline")
    at, beside = bounds(face), bounds(end)
    return (*face, *moved(end, at.x0 - 8 - beside.x1, (at.y0 + at.y1 - beside.y0 - beside.y1) / 2))


def window(paper: Paper) -> Box:
    """Where the drawing may lie on the page: beside and above the bars, below the heading."""
    column = columns(paper)[0]
    left = paper.frame.x0 + 5 + STRIP_MM
    return Box(left, column.bottom + STRIP_MM, paper.frame.x1 - 5, column.top - HEAD_MM)


def _draft(context: Context, t: Template) -> Draft:
    area = window(context.paper)
    body = bounds(t.items)
    across, down = (_tiles(body.width, area.width), _tiles(body.height, area.height))
    fields = {"part_key": t.part_key, "scale": "1:1", "group": "true"}
    if across * down > MOST_TILES and t.middle is not None:
        return Draft("true", t.title, (_near(context.paper, t, t.middle, area, across * down),), **fields)
    if across * down > MOST_TILES:
        page = _frame_page(context.paper, say("true.too_large", tiles=across * down))
        return Draft("true", t.title, (page,), **fields)
    if across * down == 1:
        x = (area.x0 + area.x1) / 2 - (body.x0 + body.x1) / 2
        y = (area.y0 + area.y1) / 2 - (body.y0 + body.y1) / 2
        page = _frame_page(context.paper, say("true.print"))
        page.items += moved(t.items, x, y)
        page.views.append(View(t.title, 1.0, (x, y), body.moved(x, y)))
        return Draft("true", t.title, (page,), **fields)
    pages = tuple(_tile(context.paper, t, area, (i, j), (across, down)) for j in range(down) for i in range(across))
    return Draft("true", t.title, pages, **fields)


def _near(paper: Paper, t: Template, middle: Point, area: Box, tiles: int) -> Page:
    """One page of a part that is too large: the surroundings of ``middle`` with both lines that place it."""
    dx, dy = (area.x0 + area.x1) / 2 - middle[0], (area.y0 + area.y1) / 2 - middle[1]
    page = _frame_page(paper, say("true.near", tiles=tiles))
    window = Box(area.x0, area.y0, area.x1, area.y1 - 4)
    page.items += clipped(moved(t.items, dx, dy), window)
    x, y = middle[0] + dx, middle[1] + dy
    page.items += [Line(window.x0, y, window.x1, y, "centre"), Line(x, window.y0, x, window.y1, "centre")]
    page.items.append(Text(x, window.y1 + 1, f"x = {number(middle[0])}", 2.5, "middle"))
    page.items.append(Text(window.x1 - 1, y + 1, f"y = {number(middle[1])}", 2.5, "end"))
    page.views.append(View(t.title, 1.0, (dx, dy), window))
    return page


def _tiles(size: float, room: float) -> int:
    return 1 if size <= room else math.ceil((size - OVERLAP_MM) / (room - OVERLAP_MM))


def _tile(paper: Paper, t: Template, area: Box, at: tuple[int, int], of: tuple[int, int]) -> Page:
    """One tile; columns are numbered from the left, rows lettered from the top."""
    body = bounds(t.items)
    step_x, step_y = area.width - OVERLAP_MM, area.height - OVERLAP_MM
    left = (body.x0 + body.x1) / 2 - (step_x * of[0] + OVERLAP_MM) / 2 + at[0] * step_x
    top = (body.y0 + body.y1) / 2 + (step_y * of[1] + OVERLAP_MM) / 2 - at[1] * step_y
    dx, dy = area.x0 - left, area.y1 - top
    name = f"{chr(65 + at[1])}{at[0] + 1}"
    last = f"{chr(64 + of[1])}{of[0]}"
    page = _frame_page(paper, say("true.tile", tile=name, first="A1", last=last))
    page.items += clipped(moved(t.items, dx, dy), area)
    page.items += _edge_marks(area, at, of, moved(t.items, dx, dy))
    page.views.append(View(t.title, 1.0, (dx, dy), area))
    return page


def _edge_marks(area: Box, at: tuple[int, int], of: tuple[int, int], drawn: tuple[Item, ...]) -> list[Item]:
    """Crosses in the overlap that fall on each other when neighbouring tiles lie right, and the cutting edge."""
    half = OVERLAP_MM / 2
    items: list[Item] = []
    xs = ([area.x0 + half] if at[0] > 0 else []) + ([area.x1 - half] if at[0] < of[0] - 1 else [])
    # Rows count from the top: the tile before this one lies above it.
    ys = ([area.y1 - half] if at[1] > 0 else []) + ([area.y0 + half] if at[1] < of[1] - 1 else [])
    for x in xs:
        items.append(Line(x, area.y0, x, area.y1, "fine"))
        for _, y in _free([(x, area.y0 + area.height * share) for share in SHARES], drawn):
            items += _cross(x, y)
    for y in ys:
        items.append(Line(area.x0, y, area.x1, y, "fine"))
        for x, _ in _free([(area.x0 + area.width * share, y) for share in SHARES], drawn):
            items += _cross(x, y)
    return items


def _free(points: list[Point], drawn: tuple[Item, ...]) -> list[Point]:
    """The first two points, those first where no hole is near that a cross could be mistaken for.

    Both tiles of a joint see the same items around it and so choose the same points.
    """
    holes = [(i.cx, i.cy) for i in drawn if isinstance(i, Arc) and max(i.rx, i.ry) < CLEAR_MM]
    free = [p for p in points if all(math.dist(p, hole) > CLEAR_MM for hole in holes)]
    return [*free, *(p for p in points if p not in free)][:2]


def _cross(x: float, y: float) -> list[Item]:
    return [Line(x - 4, y, x + 4, y, "thin"), Line(x, y - 4, x, y + 4, "thin"), Arc(x, y, 2, 2, role="thin")]


def _frame_page(paper: Paper, text: str) -> Page:
    """A page with its heading and both bars."""
    page = Page()
    column = columns(paper)[0]
    left, bottom = paper.frame.x0 + 5, column.bottom
    page.items.append(Text(left, column.top - 3.5, say("true.head"), 3.5, bold=True))
    page.items.append(Text(left, column.top - 9.0, text, 2.5))
    page.items += bar(left + STRIP_MM, bottom + 3, False)
    page.items += bar(left + 4, bottom + STRIP_MM, True)
    return page


def bar(x: float, y: float, upright: bool) -> list[Item]:
    """A bar of 100 mm with a stroke every 10 mm, to lay a ruler on."""
    items: list[Item] = []
    end = (x, y + BAR_MM) if upright else (x + BAR_MM, y)
    items.append(Line(x, y, *end, "outline"))
    for k in range(11):
        long = 3.0 if k % 5 == 0 else 1.8
        at = (x, y + 10 * k) if upright else (x + 10 * k, y)
        items.append(Line(*at, at[0] + long, at[1], "thin") if upright else Line(*at, at[0], at[1] + long, "thin"))
    if upright:
        items.append(Text(x + 6.5, y + BAR_MM / 2, say("true.bar"), 2.5, "middle", 90.0))
    else:
        items.append(Text(x + BAR_MM / 2, y + 4.2, say("true.bar"), 2.5, "middle"))
    return items
