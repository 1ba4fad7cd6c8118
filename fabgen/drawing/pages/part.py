"""One page for each made part: views, dimensions, hole, corner and bend tables, material, tolerance, finish.

Depends on: drawing, parts.records.
"""

from __future__ import annotations

from fabgen.drawing import flat as flat_view
from fabgen.drawing.flow import COLUMN_WIDTH_MM, Block, column_height, gap, heading, paragraph, table
from fabgen.drawing.hidden import ISOMETRIC
from fabgen.drawing.model import Item, number, scale_text
from fabgen.drawing.pages.base import Context, Draft, draft, sizes_table
from fabgen.drawing.picture import Body, Drawn, Set, dimensioned, fitted, outside
from fabgen.drawing.texts import say
from fabgen.parts.records import FlatPattern, Part

WIDTH_MM = COLUMN_WIDTH_MM


def drafts(context: Context) -> list[Draft]:
    """A draft for each part that is made."""
    return [_draft(context, part) for part in context.parts if part.process != ("buy",)]


def _draft(context: Context, part: Part) -> Draft:
    blocks: list[Block] = []
    scale = ""
    room = column_height(context.paper)
    if part.flat is not None:
        block, scale = flat_block(part.flat, room * 0.62)
        blocks += [block, gap(3)]
    if part.solid is not None:
        block, iso = solid_block(part, room * (0.3 if part.flat else 0.5))
        scale = scale or iso
        blocks += [block, gap(3)]
    blocks += notes(part)
    if part.flat is not None:
        blocks += flat_tables(part.flat)
    blocks += sizes_table(part, part.tolerance or say("table.general"))
    return draft(
        context, "part", part.name, blocks, part_key=part.key, scale=scale, group="parts",
        material=material_text(part), finish=part.finish, tolerance=part.tolerance,
    )  # fmt: skip


def material_text(part: Part) -> str:
    """Material, temper and thickness in one line."""
    words = [part.material_name, part.temper]
    if part.thickness_mm is not None:
        words.append(f"t = {number(part.thickness_mm)}")
    return ", ".join(w for w in words if w)


def flat_block(flat: FlatPattern, room: float) -> tuple[Block, str]:
    """The flat pattern with dimensions, at the largest scale that fits."""
    drawn = Drawn(say("view.flat"), flat_view.flat_items(flat))

    def extras(scale: float, items: tuple[Item, ...]) -> tuple[Item, ...]:
        lines = flat_view.centre_lines(flat, scale)
        return (*lines, *flat_view.labels(flat, scale, (*items, *lines)))

    def build(scale: float) -> Set:
        return dimensioned(drawn, flat_view.asks(flat), scale, extras)

    block, _, scale = fitted(build, WIDTH_MM, room)
    return block, scale_text(scale)


def solid_block(part: Part, room: float) -> tuple[Block, str]:
    """The part as it looks when made."""
    assert part.solid is not None
    drawn = outside(say("view.isometric"), [Body(part, part.solid())], ISOMETRIC)

    def build(scale: float) -> Set:
        return dimensioned(drawn, (), scale)

    block, _, scale = fitted(build, WIDTH_MM, room)
    return block, scale_text(scale)


def notes(part: Part) -> list[Block]:
    """What the maker must know besides sizes."""
    if not part.notes:
        return []
    blocks = [heading(say("part.notes"), 2.5)]
    for note in part.notes:
        blocks += paragraph(note, bullet="–")
    return blocks


def flat_tables(flat: FlatPattern) -> list[Block]:
    """Holes, corners and bends."""
    blocks: list[Block] = []
    holes = flat_view.hole_rows(flat)
    if holes:
        head = (say("flat.hole"), "x", "y", say("flat.diameter"))
        blocks += [heading(say("flat.holes_head"), 2.5), *table("holes", head, holes, widths=(30, 40, 40, 40))]
    for letter, contour in flat_view.contours(flat):
        head = (say("flat.corner"), "x", "y", say("flat.next"))
        rows = flat_view.corner_rows(letter, contour)
        blocks += [heading(say("flat.corners_head", letter=letter), 2.5), *table(f"corners:{letter}", head, rows)]
    if flat.folds:
        head = tuple(say(f"fold.{k}") for k in ("no", "order", "angle", "way", "radius", "k", "ba", "bd", "from", "to"))
        blocks += [heading(say("fold.head"), 2.5), *table("bends", head, flat_view.fold_rows(flat))]
    return blocks
