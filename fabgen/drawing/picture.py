"""Views of solids at a scale, with their dimensions, as blocks for a page.

Depends on: drawing.hidden, drawing.section, drawing.dimension, drawing.flow, parts.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any

from fabgen.drawing.dimension import Ask, place
from fabgen.drawing.flow import Block
from fabgen.drawing.hidden import Curve, Direction, dressed, look
from fabgen.drawing.model import SCALES, Box, Item, Line, Text, View, bounds, moved, scale_text
from fabgen.drawing.section import cut_faces, hatched, opened
from fabgen.parts.records import Part


@dataclass(frozen=True)
class Body:
    """A solid at its place in the feed, with the part it belongs to."""

    part: Part
    shape: Any


@dataclass(frozen=True)
class Drawn:
    """A view in model mm, before a scale is chosen. ``cuts`` are shapely polygons per part, to be hatched."""

    name: str
    items: tuple[Item, ...]
    cuts: tuple[tuple[Any, ...], ...] = ()

    @property
    def box(self) -> Box:
        """Bounds in model mm."""
        return bounds(self.items)


def bodies(parts: Sequence[Part]) -> tuple[Body, ...]:
    """Every solid of the parts at every place."""
    from fabgen.parts.kernel import placed

    out = []
    for part in parts:
        if part.solid is None:
            continue
        solid = part.solid()
        out += [Body(part, placed(solid, place_)) for place_ in part.places]
    return tuple(out)


def outside(name: str, things: Sequence[Body], direction: Direction, with_hidden: bool = False) -> Drawn:
    """A plain view of the bodies."""
    seen = look([b.shape for b in things], direction, with_hidden)
    items: list[Item] = []
    for s in seen:
        items += dressed(s.hidden, "hidden")
    for s in seen:
        items += dressed(s.visible, "outline")
    return Drawn(name, tuple(items))


def cut(name: str, things: Sequence[Body], direction: Direction) -> Drawn:
    """A section by the plane through the axis square to the view."""
    halves = [(b, opened(b.shape, direction)) for b in things]
    kept = [(b, h) for b, h in halves if h is not None]
    seen = look([h for _, h in kept], direction)
    items: list[Item] = []
    for s in seen:
        items += dressed(s.visible, "outline")
    cuts = tuple(tuple(cut_faces(h, direction)) if h is not b.shape else () for b, h in kept)
    return Drawn(name, tuple(items), cuts)


def emphasised(name: str, old: Sequence[Body], new: Sequence[Body], direction: Direction) -> Drawn:
    """A picture of a state of the assembly: new parts in wide lines, the rest narrow and grey."""
    seen = look([b.shape for b in (*old, *new)], direction)
    items: list[Item] = []
    for i, s in enumerate(seen):
        items += dressed(s.visible, "old" if i < len(old) else "new")
    return Drawn(name, tuple(items))


def at_scale(drawn: Drawn, scale: float) -> tuple[Item, ...]:
    """The view's items in paper mm, hatching below the lines."""
    items: list[Item] = []
    for i, polygons in enumerate(drawn.cuts):
        items += hatched(polygons, scale, 45.0 if i % 2 == 0 else 135.0, 1.6 + 0.4 * (i % 3))
    return (*items, *(_scaled(item, scale) for item in drawn.items))


def _scaled(item: Item, scale: float) -> Item:
    if isinstance(item, Text):
        return replace(item, x=item.x * scale, y=item.y * scale)
    return item.scaled(scale)


@dataclass(frozen=True)
class Set:
    """A view with its dimensions placed at a scale, model origin at 0, 0."""

    drawn: Drawn
    items: tuple[Item, ...]
    block: Block
    box: Box
    left_over: tuple[Ask, ...]


Extras = Callable[[float, tuple[Item, ...]], tuple[Item, ...]]


def dimensioned(
    drawn: Drawn, asks: Sequence[Ask], scale: float, extras: Extras | None = None, title: bool = True
) -> Set:
    """The view at ``scale`` with dimensions and its name; ``extras`` adds marks in paper mm."""
    items = at_scale(drawn, scale)
    if extras is not None:
        items = (*items, *extras(scale, items))
    placed_ = place(drawn.name, items, asks, scale)
    drawings = (*items, *placed_.items)
    box = placed_.box
    if title and drawn.name:
        caption = Text((box.x0 + box.x1) / 2, box.y1 + 3.0, f"{drawn.name}  {scale_text(scale)}", 3.5, "middle")
        drawings = (*drawings, caption)
        box = box.joined(caption.box())
    view = View(drawn.name, scale, (0.0, 0.0), bounds(items))
    block = Block(box.height, drawings, placed_.dimensions, (view,))
    return Set(drawn, items, block, box, placed_.left_over)


def shifted(made: Set, x: float, y: float) -> Block:
    """The set's block with the model origin at (x, y)."""
    b = made.block
    return replace(
        b,
        items=moved(b.items, x, y),
        dimensions=tuple(d.moved(x, y) for d in b.dimensions),
        views=tuple(v.moved(x, y) for v in b.views),
    )


def together(blocks: Sequence[Block], height: float, tables: Sequence[Block] = ()) -> Block:
    """Blocks that are already in place, as one block of a given height."""
    every = (*blocks, *tables)
    return Block(
        height,
        tuple(i for b in every for i in b.items),
        tuple(d for b in every for d in b.dimensions),
        tuple(v for b in every for v in b.views),
        tuple(t for b in every for t in b.tables),
    )


def fitted(
    build: Callable[[float], Set], width: float, height: float, largest: float = 10.0, smallest: float = 0.0
) -> tuple[Block, Set, float]:
    """The view at the largest standard scale at which it fits with its dimensions, centred in the width."""
    tries = [s for s in SCALES if smallest <= s <= largest]
    for scale in tries:
        made = build(scale)
        if (made.box.width <= width and made.box.height <= height) or scale == tries[-1]:
            break
    x = (width - made.box.width) / 2 - made.box.x0
    return replace(shifted(made, x, -made.box.y1), height=made.box.height), made, scale


def centre_cross(x: float, y: float, half: float) -> tuple[Item, ...]:
    """Centre lines of a hole or a round view."""
    return (Line(x - half, y, x + half, y, "centre"), Line(x, y - half, x, y + half, "centre"))
