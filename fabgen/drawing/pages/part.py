"""One page for each made part: views, dimensions, hole, corner and bend tables, material, tolerance, finish; and
one listing for the bought parts.

Depends on: drawing, parts.records.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

from fabgen.drawing import flat as flat_view
from fabgen.drawing import solid as solid_view
from fabgen.drawing.clip import clipped
from fabgen.drawing.dimension import Ask, along_y
from fabgen.drawing.flow import (
    COLUMN_WIDTH_MM,
    Block,
    beside,
    column_height,
    gap,
    heading,
    paragraph,
    side_by_side,
    stack,
    table,
)
from fabgen.drawing.hidden import ABOVE, GAP, ISOMETRIC, Curve, dressed
from fabgen.drawing.model import SCALES, Box, Item, Polyline, number, scale_text
from fabgen.drawing.pages.base import Context, Draft, draft, grams, quantity, tolerance_of, tolerance_text
from fabgen.drawing.pages.general import loop_views
from fabgen.drawing.paper import fits_title
from fabgen.drawing.picture import (
    Body,
    Drawn,
    Set,
    cut,
    cutting_plane,
    dimensioned,
    fitted,
    free,
    outside,
    scales_for,
    shape_of,
    shifted,
    stacked,
)
from fabgen.drawing.section import opened
from fabgen.drawing.texts import say, size_name
from fabgen.parts.records import FlatPattern, Part
from fabgen.sizing.records import Feed

WIDTH_MM = COLUMN_WIDTH_MM
BOUGHT = ("buy",)
CUT_LENGTH = ("buy", "wire")
BOUGHT_PICTURE_MM = 28.0
FOLD_HEAD = ("no", "order", "angle", "way", "radius", "k", "ba", "bd", "left", "right")


def drafts(context: Context) -> list[Draft]:
    """A draft for each part that is made, then the bought parts."""
    out = [_draft(context, part) for part in context.parts if part.process != BOUGHT]
    bought = [part for part in context.parts if part.process == BOUGHT]
    return [*out, _bought(context, bought)] if bought else out


def _draft(context: Context, part: Part) -> Draft:
    words = [*sizes_blocks(part, feed=context.feed), *making(part), *notes(part), *_tables(part)]
    views, scale, left_over = _views(context, part, sum(b.height for b in words) + 6)
    return draft(
        context,
        "part",
        part.name,
        [*views, *left_over_blocks(left_over), *words],
        part_key=part.key,
        scale=scale,
        group="parts",
        material=material_text(part),
        finish=part.finish,
        tolerance=tolerance_text(part),
    )


Built = tuple[list[Block], str, tuple[Ask, ...]]


def _views(context: Context, part: Part, words: float) -> Built:
    """The part's views above ``words`` mm of tables: with them on one sheet when they leave half of it, else the
    views as large as a sheet allows, and the picture where there is room."""
    room, view_of = column_height(context.paper), _view_of(context, part)
    pictured = shape_of(part) is not None and part.wire is None and _tells_more(part)
    if part.flat is not None and _slender(Drawn("", flat_view.flat_items(part.flat))):
        views, scale, left_over = view_of(0.84 * room - 3)
        return [*views, *_pictured(context, part, pictured, room)], scale, left_over
    if words < 0.5 * room:
        left = room - words
        views, scale, left_over = view_of(left * (0.68 if pictured else 1.0) - 3)
        left -= sum(b.height for b in views) + 3
        return [*views, *_pictured(context, part, pictured, left)], scale, left_over
    if not pictured and 0.3 * room < room - words:
        small = view_of(room - words - 3)
        if sum(b.height for b in small[0]) <= room - words:
            return small
    views, scale, left_over = view_of((room if words + 60 <= room or not pictured else 0.68 * 0.84 * room) - 3)
    left = room - sum(b.height for b in views) - 3
    return [*views, *_pictured(context, part, pictured, left if left > 50 else room - words)], scale, left_over


def _pictured(context: Context, part: Part, wanted: bool, room: float) -> list[Block]:
    """The picture in the room that is left; where that is next to nothing it goes to the following sheet."""
    height = min(room, 70.0) if room > 25 else 50.0
    return [picture(part, height, shown=context.shown(part)), gap(3)] if wanted else []


def _view_of(context: Context, part: Part) -> Callable[[float], Built]:
    """What sets the part's views into a height; hidden lines are computed once."""
    if part.flat is not None:
        flat = part.flat
        return lambda room: _with_gap(flat_block(flat, room))
    if part.wire is not None and part.solid is not None:
        seen = [Body(part, part.solid())]
        return lambda room: _with_gap((*loop_views(context, seen, room), ()))
    if shape_of(part) is not None:
        views = _solid_views(part)
        return lambda room: _with_gap(solid_block(part, views, room, context.feed))
    return lambda room: ([], "", ())


def _with_gap(made: tuple[Block, str, tuple[Ask, ...]]) -> Built:
    return [made[0], gap(3)], made[1], made[2]


def _slender(drawn: Drawn) -> bool:
    return drawn.box.width > 4 * drawn.box.height


def _tells_more(part: Part) -> bool:
    """True when a picture shows what the views do not: folded, rolled and solid parts, not flat sheet."""
    return part.flat is None or bool(part.flat.folds) or "roll" in part.process


def _tables(part: Part) -> list[Block]:
    if part.flat is not None:
        return flat_tables(part.flat)
    shape = _made_shape(part)
    return solid_tables(shape, is_tool(part)) if shape is not None else []


def is_tool(part: Part) -> bool:
    """True for a bending form: it is drawn where it is printed, not where it stands in the feed."""
    return part.key.startswith("jig")


def _made_shape(part: Part) -> Any | None:
    """The part's solid as it is made: a length of tube or cable straight, whatever way it lies in the feed."""
    shape = shape_of(part)
    return solid_view.squared(shape) if shape is not None and part.process == CUT_LENGTH else shape


def material_text(part: Part) -> str:
    """Material, temper and thickness in one line."""
    words = [part.material_name, part.temper]
    if part.thickness_mm is not None:
        words.append(f"t = {number(part.thickness_mm, 2 if part.thickness_mm >= 0.1 else 3)}")
    return ", ".join(w for w in words if w)


def flat_block(flat: FlatPattern, room: float) -> tuple[Block, str, tuple[Ask, ...]]:
    """The flat pattern with dimensions, at the largest scale that fits; a long strip gets its ends enlarged."""
    drawn = Drawn(say("view.flat", face=flat.face), flat_view.flat_items(flat))
    slender = _slender(drawn)
    labels = flat_view.labels(flat)

    def extras(scale: float, items: tuple[Item, ...]) -> tuple[Item, ...]:
        del items
        return flat_view.centre_lines(flat, scale)

    def build(scale: float) -> Set:
        return dimensioned(
            drawn, flat_view.asks(flat), scale, extras, labels=() if slender else labels, width=WIDTH_MM - 14
        )

    block, made, scale = fitted(drawn, build, WIDTH_MM, room * (0.4 if slender else 1.0))
    if slender:
        block = stack((block, gap(2), *_ends(flat, drawn, room - block.height - 2)))
    return block, scale_text(scale), made.left_over


def _ends(flat: FlatPattern, drawn: Drawn, room: float) -> list[Block]:
    """Both ends of a long strip, enlarged, with all numbers."""
    box = drawn.box
    scale = next((s for s in SCALES if box.height * s <= room / 2 - 24 and s <= 5), SCALES[-1])
    reach = min(box.width, (WIDTH_MM - 24) / scale)
    blocks = []
    for name, x0 in (("view.left_end", box.x0 - 1), ("view.right_end", box.x1 + 1 - reach)):
        window = Box(x0, box.y0 - 1, x0 + reach, box.y1 + 1)
        edge = x0 + reach if name == "view.left_end" else x0
        break_line = _break_line(edge, box.y0, box.y1, 3.0 / scale)
        shown = clipped((*drawn.items, *flat_view.centre_lines(flat, 1.0)), window)
        part = Drawn(say(name), (*shown, break_line))
        inside = [m for m in flat_view.labels(flat) if window.x0 <= m[1][0] <= window.x1]
        made = dimensioned(part, (), scale, labels=inside)
        x = (WIDTH_MM - made.box.width) / 2 - made.box.x0
        blocks += [replace(shifted(made, x, -made.box.y1), height=made.box.height), gap(2)]
    return blocks


def _break_line(x: float, y0: float, y1: float, over: float) -> Item:
    """A narrow line with one zigzag: the part goes on beyond it (ISO 128-2, line 01.1)."""
    middle, half = (y0 + y1) / 2, over / 2
    points = (
        (x, y0 - over),
        (x, middle - half),
        (x + over, middle - half / 3),
        (x - over, middle + half / 3),
        (x, middle + half),
        (x, y1 + over),
    )
    return Polyline(points, "thin")


@dataclass(frozen=True)
class SolidViews:
    """A solid's sizes, its front view (cut open where it is hollow) and its view from above."""

    measured: solid_view.Measured
    front: Drawn
    plan: Drawn
    hollow: bool


def _solid_views(part: Part) -> SolidViews:
    shape = _made_shape(part)
    m = solid_view.measured(shape)
    bodies = [Body(part, shape)]
    hollow = any(r.hole for r in solid_view.about_axis(m)) and m.low[1] < -1 < 1 < m.high[1]
    if hollow and opened(shape, GAP) is not None:
        front = cut(say("view.section_h"), bodies, GAP)
    else:
        front = outside(say("view.front"), bodies, GAP, with_hidden=True)
    return SolidViews(m, front, outside(say("view.above"), bodies, ABOVE, with_hidden=not hollow), hollow)


def solid_block(part: Part, views: SolidViews, room: float, feed: Feed) -> tuple[Block, str, tuple[Ask, ...]]:
    """Front view and view from above, one scale, on one axis."""
    m = views.measured
    front_asks = _toleranced(part, feed, [*solid_view.front_asks(m), *_depth_asks(part, feed, m)])

    def extras(scale: float, items: tuple[Item, ...]) -> tuple[Item, ...]:
        plane = cutting_plane("B")(scale, items) if views.hollow else ()
        return (*solid_view.centre_lines(m, scale), *plane)

    for scale in scales_for((views.front, views.plan), WIDTH_MM, room):
        a = dimensioned(views.front, front_asks, scale)
        b = dimensioned(
            views.plan, solid_view.plan_asks(m), scale, extras, labels=solid_view.labels(m), width=WIDTH_MM - 14
        )
        if max(a.box.width, b.box.width) <= WIDTH_MM and a.box.height + b.box.height + 8 <= room:
            break
    upper, lower = (a, b) if feed.job.limits.projection == "first" else (b, a)
    return stacked(upper, lower, WIDTH_MM), scale_text(scale), (*a.left_over, *b.left_over)


def _depth_asks(part: Part, feed: Feed, m: solid_view.Measured) -> list[Ask]:
    """The depth of a bare can, from the floor's inner face to its rim."""
    sizes, rim = dict(part.sizes), feed.sizes.can_depth_mm
    if "print" in part.process or "can_depth_mm" not in sizes or "floor_mm" not in sizes or 0.0 not in m.levels:
        return []
    text = number(rim) + _own_tolerance(feed, "can_depth_mm")
    return [along_y("can_depth_mm", 0.0, rim, feed.sizes.can_bore_mm / 2, "right", text=text)]


def _toleranced(part: Part, feed: Feed, asks: list[Ask]) -> list[Ask]:
    """The bore's dimension with its own tolerance, on parts that have the bore as a size and are not lined: the
    plastic's is larger by the lining."""
    if "print" in part.process or "can_bore_mm" not in dict(part.sizes):
        return asks
    bore, text = feed.sizes.can_bore_mm, _own_tolerance(feed, "can_bore_mm")
    return [replace(a, text=a.text + text) if a.name == "diameter" and abs(a.value - bore) < 1e-3 else a for a in asks]


def picture(part: Part, room: float, width: float = WIDTH_MM, shown: tuple[Curve, ...] | None = None) -> Block:
    """The part as it looks when made, not to scale; ``shown`` is what is known of it already."""
    if shown is not None:
        return free(Drawn("", dressed(shown, "outline")), width, room)
    return free(outside("", [Body(part, shape_of(part))], ISOMETRIC), width, room)


def making(part: Part) -> list[Block]:
    """Quantity, and of material, tolerance and finish what the title block is too small for."""
    fields = (
        ("title.material", material_text(part)),
        ("title.tolerance", tolerance_text(part)),
        ("title.finish", part.finish),
    )
    rows = [(say(key), text) for key, text in fields if text and not fits_title(key, text)]
    mass = grams(part.mass_kg)
    rows.append((say("part.quantity"), say("part.quantity_value", count=part.quantity, mass=mass)))
    head = (say("part.making"), "")
    return table(f"making:{part.key}", head, rows, widths=(40, WIDTH_MM - 40))


def notes(part: Part) -> list[Block]:
    """What the maker must know besides sizes."""
    if not part.notes:
        return []
    blocks = [heading(say("part.notes"), 2.5)]
    for note in part.notes:
        blocks += paragraph(note, bullet="–")
    return blocks


def sizes_blocks(part: Part, width: float = WIDTH_MM, feed: Feed | None = None) -> list[Block]:
    """The sizes that make a part, two columns of names and values, with the tolerance of those that have their own;
    foil is cut to its own tolerance, not to that of the can it lines."""
    own = feed if "foil" not in part.process else None
    rows = [
        (size_name(key), quantity(key, value) + (_own_tolerance(own, key) if own is not None else ""))
        for key, value in part.sizes
    ]
    if not rows:
        return []
    head = (say("part.sizes"), say("table.value"))
    if width < WIDTH_MM:
        return table(f"sizes:{part.key}", (say("table.size"), say("table.value")), rows, width=width)
    return side_by_side(f"sizes:{part.key}", head, rows)


def _own_tolerance(feed: Feed, key: str) -> str:
    tolerance = tolerance_of(feed, key) or tolerance_of(feed, key.replace("choke_", "choke.", 1))
    return f" ±{number(tolerance)}" if tolerance else ""


def left_over_blocks(asks: tuple[Ask, ...]) -> list[Block]:
    """Dimensions that found no free place on the view, as a list: none is lost."""
    if not asks:
        return []
    rows = [(size_name(a.name), a.text) for a in asks]
    return table("further", (say("part.further"), say("table.value")), rows)


def flat_tables(flat: FlatPattern) -> list[Block]:
    """Bends, holes, corners."""
    blocks: list[Block] = []
    if flat.folds:
        head = tuple(say(f"fold.{k}") for k in FOLD_HEAD)
        blocks += [heading(say("fold.head"), 2.5), *table("bends", head, flat_view.fold_rows(flat))]
        blocks += paragraph(say("fold.edges"), 1.8)
        ends = (say("fold.no"), "x1", "y1", "x2", "y2")
        blocks += [heading(say("fold.lines_head"), 2.5)]
        blocks += side_by_side("fold lines", ends, flat_view.fold_line_rows(flat))
    holes = flat_view.hole_rows(flat)
    if holes:
        head = (say("flat.hole"), "x", "y", say("flat.diameter"))
        blocks += [heading(say("flat.holes_head"), 2.5), *side_by_side("holes", head, holes)]
    for letter, contour in flat_view.contours(flat):
        head = (say("flat.corner"), "x", "y", say("flat.next"))
        rows = flat_view.corner_rows(letter, contour)
        blocks += [heading(say("flat.corners_head", letter=letter), 2.5)]
        blocks += side_by_side(f"corners:{letter}", head, rows)
        repeat = flat_view.repeat_of(contour)
        if repeat is not None:
            first, last = repeat.first + 1, repeat.first + repeat.count
            head = tuple(say(f"flat.{k}") for k in ("left_out", "sets", "pitch_x", "pitch_y"))
            title = say("flat.repeat_head", first=f"{letter}{first}", last=f"{letter}{last}")
            blocks += [heading(title, 2.5)]
            blocks += side_by_side(f"repeat:{letter}", head, flat_view.repeat_rows(letter, repeat))
    return blocks


def solid_tables(shape: Any, tool: bool = False) -> list[Block]:
    """Holes of a solid, by the feed's own coordinates; those of a tool by the coordinates of its model file."""
    m = solid_view.measured(shape)
    blocks: list[Block] = []
    rows = solid_view.hole_rows(m)
    if rows:
        head = (say("flat.hole"), "x", "y", say("flat.diameter"), say("solid.from"), say("solid.to"))
        title = say("solid.tool_holes_head" if tool else "solid.holes_head")
        blocks += [heading(title, 2.5), *side_by_side("holes", head, rows)]
    slots = solid_view.slot_rows(m)
    if slots:
        ends = (say("solid.slot"), "x1", "y1", "x2", "y2", say("solid.width"), say("solid.from"), say("solid.to"))
        blocks += [heading(say("solid.slots_head"), 2.5), *table("slots", ends, slots)]
    crosses = solid_view.cross_rows(m)
    if crosses:
        head = (say("flat.hole"), "x", "y", "z", say("solid.axis"), say("flat.diameter"))
        blocks += [heading(say("solid.cross_head"), 2.5), *table("cross holes", head, crosses)]
    return blocks


def _bought(context: Context, parts: list[Part]) -> Draft:
    """Bought parts, two beside each other: a picture and the sizes to order by."""
    cells = [_bought_cell(part) for part in parts]
    blocks: list[Block] = []
    for i in range(0, len(cells), 2):
        pair = cells[i : i + 2]
        blocks += [beside(pair, (0.0, WIDTH_MM / 2 + 2)[: len(pair)]), gap(3)]
    return draft(context, "bought", say("page.bought"), blocks, scale=say("title.not_to_scale"), group="parts")


def _bought_cell(part: Part) -> Block:
    text_mm = WIDTH_MM / 2 - 2 - BOUGHT_PICTURE_MM
    lines = [heading(say("part.bought", part=part.name, count=part.quantity), 2.5, text_mm)]
    lines += paragraph(material_text(part), width=text_mm)
    lines += sizes_blocks(part, text_mm)
    text = stack(lines)
    if shape_of(part) is None:
        return beside((text,), (BOUGHT_PICTURE_MM,))
    image = picture(part, max(22.0, text.height - 2), BOUGHT_PICTURE_MM - 2)
    return beside((image, text), (0.0, BOUGHT_PICTURE_MM))
