"""Views of solids at a scale, with their dimensions, as blocks for a page.

Depends on: drawing.hidden, drawing.section, drawing.dimension, drawing.flow, parts.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any

from fabgen.drawing.clip import clipped
from fabgen.drawing.dimension import Ask, Mark, arrow, marks, place
from fabgen.drawing.flow import Block
from fabgen.drawing.hidden import Direction, dressed, look
from fabgen.drawing.model import SCALES, Box, Item, Line, Text, View, bounds, moved, scale_text
from fabgen.drawing.section import cut_faces, hatched, opened
from fabgen.parts.records import Part

LARGEST = 10.0  # nothing is drawn larger than 10:1


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


def shape_of(part: Part) -> Any | None:
    """The part's solid: in the feed, or as printed for a tool that is no part of the feed."""
    build = part.solid or part.print_solid
    return build() if build is not None else None


MOST_COPIES = 8  # of a bought part with more places only the first is drawn; its number stands in the parts list


def bodies(parts: Sequence[Part]) -> tuple[Body, ...]:
    """The solids of the parts at their places; of many equal screws one stands for all."""
    from fabgen.parts.kernel import placed

    out = []
    for part in parts:
        if part.solid is None:
            continue
        solid = part.solid()
        many = part.process == ("buy",) and len(part.places) > MOST_COPIES
        out += [Body(part, placed(solid, spot)) for spot in (part.places[:1] if many else part.places)]
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
    drawn: Drawn,
    asks: Sequence[Ask],
    scale: float,
    extras: Extras | None = None,
    *,
    labels: Sequence[Mark] = (),
    title: bool = True,
    width: float | None = None,
) -> Set:
    """The view at ``scale`` with dimensions, labels beside points, and its name.

    ``extras`` adds marks in paper mm; ``width`` is the room that texts on leaders keep to.
    """
    items = at_scale(drawn, scale)
    if extras is not None:
        items = (*items, *extras(scale, items))
    limits = None
    if width is not None:
        body = bounds(items)
        middle = (body.x0 + body.x1) / 2
        limits = Box(middle - width / 2, body.y0 - 40, middle + width / 2, body.y1 + 40)
    placed_ = place(drawn.name, items, asks, scale, limits=limits)
    texts = marks(labels, items, scale, placed_)
    drawings = (*items, *placed_.items, *texts)
    box = placed_.box.joined(bounds(texts)) if texts else placed_.box
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


def scales_for(views: Sequence[Drawn], width: float, height: float) -> list[float]:
    """Standard scales, largest first, at which the bare views stand in the room one over the other."""
    wide = max(v.box.width for v in views)
    high = sum(v.box.height for v in views)
    return [s for s in SCALES if wide * s <= width and high * s <= height] or [SCALES[-1]]


def fitted(drawn: Drawn, build: Callable[[float], Set], width: float, height: float) -> tuple[Block, Set, float]:
    """The view at the largest standard scale at which it fits with its dimensions, centred in the width."""
    tries = [s for s in scales_for((drawn,), width, height) if s <= LARGEST] or [SCALES[-1]]
    for scale in tries:
        made = build(scale)
        if (made.box.width <= width and made.box.height <= height) or scale == tries[-1]:
            break
    x = (width - made.box.width) / 2 - made.box.x0
    return replace(shifted(made, x, -made.box.y1), height=made.box.height), made, scale


def cutting_plane(letter: str) -> Extras:
    """Marks of a cutting plane through the origin along x, seen from below on the paper: wide ends, arrows up."""

    def plane(scale: float, items: tuple[Item, ...]) -> tuple[Item, ...]:
        del scale
        box = bounds(items)
        left, right = box.x0 - 7, box.x1 + 7
        out: list[Item] = [Line(left, 0, right, 0, "centre"), Line(0, box.y0 - 3, 0, box.y1 + 3, "centre")]
        for x, way in ((left, 1), (right, -1)):
            out += [Line(x, 0, x + 4 * way, 0, "outline"), Line(x, -5.5, x, 0, "thin"), arrow((x, -0.3), (x, -5.5))]
            out.append(Text(x, -9.5, letter, 3.5, "middle"))
        return tuple(out)

    return plane


def free(drawn: Drawn, width: float, height: float) -> Block:
    """A picture without scale that fills the room."""
    box = drawn.box
    scale = min((width - 4) / max(box.width, 1e-6), (height - 4) / max(box.height, 1e-6))
    items = at_scale(drawn, scale)
    box = bounds(items)
    x = (width - box.width) / 2 - box.x0
    return Block(box.height + 4, moved(items, x, -2 - box.y1))


def free_labelled(drawn: Drawn, asks: Sequence[Ask], width: float, height: float) -> Block:
    """A picture without scale, with labels on leaders, as large as the room allows."""
    box = drawn.box
    scale = min(width / max(box.width, 1e-6), height / max(box.height, 1e-6))
    for _ in range(12):
        scale *= 0.93
        made = dimensioned(drawn, asks, scale, title=False)
        if made.box.width <= width and made.box.height <= height:
            break
    x = (width - made.box.width) / 2 - made.box.x0
    return replace(shifted(made, x, -made.box.y1), height=made.box.height)


def close_up(drawn: Drawn, around: Box, asks: Sequence[Ask], width: float, height: float) -> Block:
    """A picture of the surroundings of ``around`` (model mm), cropped to the room; the whole when that is larger."""
    box = drawn.box
    whole = min((width - 16) / max(box.width, 1e-6), (height - 14) / max(box.height, 1e-6))
    near = min(0.5 * width / max(around.width, 1e-6), 0.5 * height / max(around.height, 1e-6))
    scale = min(max(whole, near), 9 * whole)
    if scale < 1.2 * whole:
        scale, around = whole, box
    x, y = (around.x0 + around.x1) / 2 * scale, (around.y0 + around.y1) / 2 * scale
    window = Box(x - width / 2, y - height / 2, x + width / 2, y + height / 2)
    items = clipped(at_scale(drawn, scale), window)
    placed_ = place(drawn.name, items, asks, scale, limits=window.grown(-1.0))
    every = moved((*items, *placed_.items), -window.x0, -window.y1)
    dims = tuple(d.moved(-window.x0, -window.y1) for d in placed_.dimensions)
    view = View(drawn.name, scale, (-window.x0, -window.y1), window.moved(-window.x0, -window.y1))
    return Block(height, every, dims, (view,))


def alone(made: Set, width: float) -> Block:
    """One view with its dimensions, centred in the width."""
    x = (width - made.box.width) / 2 - made.box.x0
    return replace(shifted(made, x, -made.box.y1), height=made.box.height)


def stacked(upper: Set, lower: Set, width: float) -> Block:
    """Two views on one vertical axis, so that they project onto each other."""
    left = min(upper.box.x0, lower.box.x0)
    whole = max(upper.box.x1, lower.box.x1) - left
    x = (width - whole) / 2 - left
    first = shifted(upper, x, -upper.box.y1)
    second = shifted(lower, x, -upper.box.height - 6 - lower.box.y1)
    return together((first, second), upper.box.height + lower.box.height + 8)
