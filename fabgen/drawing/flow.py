"""Blocks of text, tables and pictures set down the columns of as many sheets as they need.

A block is drawn from its upper left corner: x from 0 to its width, y from 0 down to minus its height.

Depends on: drawing.model, drawing.fonts, drawing.paper.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from fabgen.drawing.fonts import fit, text_width_mm, wrap
from fabgen.drawing.model import (
    BLACK,
    RED,
    Box,
    Colour,
    Dimension,
    Item,
    Line,
    Polyline,
    Table,
    Text,
    View,
    moved,
    tidy_text,
)
from fabgen.drawing.paper import TITLE_HEIGHT_MM, Paper

LINE_PITCH = 1.72  # base line to base line over the capital height
WHOLE_TABLE_MM = 48.0  # a table no higher than this is not broken
INSET_MM = 5.0  # between the frame and what stands in it
COLUMN_WIDTH_MM = 170.0


@dataclass(frozen=True)
class Block:
    """Something to set. ``repeat`` is set again when a break falls right before this block; ``stay`` keeps the
    block together with the next one; ``slack`` is what may be taken off the height where that saves a sheet."""

    height: float
    items: tuple[Item, ...]
    dimensions: tuple[Dimension, ...] = ()
    views: tuple[View, ...] = ()
    tables: tuple[Table, ...] = ()
    repeat: Block | None = None
    stay: bool = False
    slack: float = 0.0


@dataclass
class Page:
    """A sheet while it is being filled."""

    items: list[Item] = field(default_factory=list)
    dimensions: list[Dimension] = field(default_factory=list)
    views: list[View] = field(default_factory=list)
    tables: list[Table] = field(default_factory=list)


@dataclass(frozen=True)
class Column:
    """Where blocks go: left edge, upper and lower limit."""

    x: float
    top: float
    bottom: float


def columns(paper: Paper) -> tuple[Column, ...]:
    """One column above the title block; on landscape sheets a full-height one on its left too."""
    box = paper.frame
    above_title = box.y0 + TITLE_HEIGHT_MM + 4
    if not paper.landscape:
        left = (box.x0 + box.x1 - COLUMN_WIDTH_MM) / 2
        return (Column(left, box.y1 - INSET_MM, above_title),)
    return (
        Column(box.x0 + INSET_MM + 5, box.y1 - INSET_MM, above_title),
        Column(box.x1 - INSET_MM - COLUMN_WIDTH_MM, box.y1 - INSET_MM, above_title),
    )


def column_height(paper: Paper) -> float:
    """Height that every column has."""
    return min(c.top - c.bottom for c in columns(paper))


def flow(paper: Paper, blocks: Sequence[Block]) -> list[Page]:
    """Set the blocks, closer together where that saves a sheet: no tail of a table takes one of its own.

    A block higher than a column is set alone and the caller must have made it fit."""
    pages = _flow(paper, blocks)
    for share in (0.4, 0.7, 1.0) if len(pages) > 1 else ():
        close = _flow(paper, [replace(block, height=block.height - share * block.slack) for block in blocks])
        if len(close) < len(pages):
            return close
    return pages


def _flow(paper: Paper, blocks: Sequence[Block]) -> list[Page]:
    pages = [Page()]
    spots = columns(paper)
    index, y = 0, spots[0].top
    fresh = True
    for n, block in enumerate(blocks):
        empty = not block.items and not block.tables
        if empty and (fresh or y - block.height < spots[index].bottom):
            continue
        need = _need(blocks, n)
        if not fresh and y - need < spots[index].bottom:
            index += 1
            if index == len(spots):
                pages.append(Page())
                index = 0
            y, fresh = spots[index].top, True
            if block.repeat is not None:
                _set(pages[-1], block.repeat, spots[index].x, y)
                y -= block.repeat.height
        _set(pages[-1], block, spots[index].x, y)
        y -= block.height
        fresh = False
    return pages


def _need(blocks: Sequence[Block], n: int) -> float:
    """Height of a block with those it must stay with."""
    total = blocks[n].height
    while blocks[n].stay and n + 1 < len(blocks):
        n += 1
        total += blocks[n].height
    return total


def _set(page: Page, block: Block, x: float, y: float) -> None:
    page.items += moved(block.items, x, y)
    page.dimensions += [d.moved(x, y) for d in block.dimensions]
    page.views += [v.moved(x, y) for v in block.views]
    page.tables += block.tables


def gap(height: float = 4.0) -> Block:
    """Empty space."""
    return Block(height, (), slack=0.6 * height)


def heading(text: str, size: float = 3.5, width: float = COLUMN_WIDTH_MM) -> Block:
    """A heading that stays with what follows, made smaller or cut where it is too long for the column."""
    text, fitted = fit(tidy_text(text), width, size, bold=True)
    return Block(size * 2.2, (Text(0, -size * 1.35, text, fitted, bold=True),), stay=True, slack=0.4 * size)


def paragraph(
    text: str,
    size: float = 2.5,
    width: float = COLUMN_WIDTH_MM,
    *,
    bold: bool = False,
    colour: Colour = BLACK,
    bullet: str = "",
) -> list[Block]:
    """Wrapped text, one block a line so that it may break over sheets; ``bullet`` hangs at the left."""
    indent = text_width_mm(bullet + " ", size, bold) + 1.0 if bullet else 0.0
    pitch = size * LINE_PITCH
    blocks = []
    for i, line in enumerate(wrap(tidy_text(text), width - indent, size, bold)):
        items: list[Item] = [Text(indent, -size * 1.3, line, size, bold=bold, colour=colour)]
        if bullet and i == 0:
            items.append(Text(0, -size * 1.3, bullet, size, bold=bold, colour=colour))
        blocks.append(Block(pitch, tuple(items)))
    # No line stands alone: three lines stay whole, of more the first two and the last two.
    held = {0, len(blocks) - 2} if len(blocks) > 3 else set(range(len(blocks) - 1))
    blocks = [replace(block, stay=i in held and len(blocks) > 1) for i, block in enumerate(blocks)]
    return [*blocks, gap(size * 0.5)]


def kept(blocks: Sequence[Block]) -> list[Block]:
    """The blocks bound to each other and to what follows."""
    return [replace(block, stay=True) for block in blocks]


def shares(head: Sequence[str], rows: Sequence[Sequence[str]], width: float, size: float) -> tuple[list[float], bool]:
    """Column widths: each at least its longest word, the rest by the width of whole texts; False when they do
    not fit at this size of text."""
    natural, least = [], []
    for c in range(len(head)):
        cells = [row[c] for row in rows]
        words = [text_width_mm(word, size) for cell in cells for word in cell.split()]
        words += [text_width_mm(word, size, True) for word in head[c].split()]
        least.append(max([*words, 0.0]) + 2.2)
        natural.append(max([text_width_mm(t, size) for t in cells] + [text_width_mm(head[c], size, True)]) + 2.4)
    if sum(natural) <= width:
        spare = (width - sum(natural)) / len(head)
        return [n + spare for n in natural], True
    over = width - sum(least)
    wish = [max(n - low, 0.0) for n, low in zip(natural, least, strict=True)]
    widths = [low + max(over, 0.0) * w / max(sum(wish), 1e-9) for low, w in zip(least, wish, strict=True)]
    return [w * width / sum(widths) for w in widths], over >= 0


def table(
    name: str,
    head: Sequence[str],
    rows: Sequence[Sequence[str]],
    *,
    size: float = 2.5,
    width: float = COLUMN_WIDTH_MM,
    red: Sequence[int] = (),
    widths: Sequence[float] | None = None,
) -> list[Block]:
    """A ruled table; its head is repeated after a break, and no break leaves fewer than two rows under a head.

    Rows listed in ``red`` are set bold and red. Text that does not fit at 2.5 mm is set at 1.8 mm (ISO 3098).
    """
    rows = [[tidy_text(cell) for cell in row] for row in rows]
    cols = list(widths) if widths else []
    if not cols:
        cols, fits = shares(head, rows, width, size)
        if not fits:
            size = 1.8
            cols, _ = shares(head, rows, width, size)
    record = Table(name, tuple(head), tuple(tuple(row) for row in rows))
    top = _row_block(head, cols, size, bold=True, colour=BLACK, rule="outline")
    blocks = [replace(top, tables=(record,), stay=True)]
    for i, row in enumerate(rows):
        colour = RED if i in red else BLACK
        blocks.append(replace(_row_block(row, cols, size, bold=i in red, colour=colour, rule="fine"), repeat=top))
    return [*_unbroken(blocks), gap(3)]


def _unbroken(blocks: Sequence[Block]) -> list[Block]:
    """The rows of a table under its head: a short table stays whole, of a long one neither the first nor the last
    row is left alone."""
    rows = len(blocks) - 1
    whole = sum(b.height for b in blocks) <= WHOLE_TABLE_MM
    held = {1, rows - 1} if not whole else set(range(1, rows))
    return [replace(b, stay=b.stay or (i in held and i < rows)) for i, b in enumerate(blocks)]


def side_by_side(
    name: str, head: Sequence[str], rows: Sequence[Sequence[str]], count: int = 2, space: float = 6.0
) -> list[Block]:
    """A long narrow table set in ``count`` columns, read down each column; one record for the whole."""
    if len(rows) < 6:
        return table(name, head, rows)
    size = 2.5
    if len(rows) > 80:
        count, size = count + 1, 1.8
    each = -(-len(rows) // count)
    width = (COLUMN_WIDTH_MM - space * (count - 1)) / count
    cols, fits = shares(head, rows, width, size)
    if not fits:
        size = 1.8
        cols, _ = shares(head, rows, width, size)
    record = Table(name, tuple(head), tuple(tuple(row) for row in rows))
    lefts = [i * (width + space) for i in range(count)]
    top = beside([_row_block(head, cols, size, bold=True, colour=BLACK, rule="outline")] * count, lefts)
    blocks = [replace(top, tables=(record,), stay=True)]
    for i in range(each):
        line = [_row_block(rows[i + k * each], cols, size, bold=False, colour=BLACK, rule="fine")
                for k in range(count) if i + k * each < len(rows)]  # fmt: skip
        row = beside(line, lefts[: len(line)])
        blocks.append(replace(row, repeat=top, slack=line[0].slack))
    return [*_unbroken(blocks), gap(3)]


def _row_block(
    cells: Sequence[str], widths: Sequence[float], size: float, *, bold: bool, colour: Colour, rule: str
) -> Block:
    items: list[Item] = []
    height, x = 0.0, 0.0
    pitch = size * 1.55
    for cell, width in zip(cells, widths, strict=True):
        lines = wrap(cell, width - 2.0, size, bold)
        for i, line in enumerate(lines):
            items.append(Text(x + 1.0, -size * 1.45 - i * pitch, line, size, bold=bold, colour=colour))
        height = max(height, len(lines) * pitch + size * 0.5)
        x += width
    items.append(Line(0, -height, x, -height, rule))
    if rule == "outline":
        items.insert(0, Polyline(((0, 0), (x, 0), (x, -height), (0, -height)), None, True, (0.93, 0.93, 0.93)))
    return Block(height, tuple(items), slack=0.1 * size)


def beside(blocks: Sequence[Block], offsets: Sequence[float]) -> Block:
    """Blocks set side by side at the given left edges, as one block."""
    items: list[Item] = []
    dims: list[Dimension] = []
    views: list[View] = []
    for block, x in zip(blocks, offsets, strict=True):
        items += moved(block.items, x, 0)
        dims += [d.moved(x, 0) for d in block.dimensions]
        views += [v.moved(x, 0) for v in block.views]
    tables = tuple(t for b in blocks for t in b.tables)
    return Block(max(b.height for b in blocks), tuple(items), tuple(dims), tuple(views), tables)


def stack(blocks: Sequence[Block]) -> Block:
    """Blocks set one under the other, as one block that never breaks."""
    items: list[Item] = []
    dims: list[Dimension] = []
    views: list[View] = []
    y = 0.0
    for block in blocks:
        items += moved(block.items, 0, y)
        dims += [d.moved(0, y) for d in block.dimensions]
        views += [v.moved(0, y) for v in block.views]
        y -= block.height
    return Block(-y, tuple(items), tuple(dims), tuple(views), tuple(t for b in blocks for t in b.tables))


def framed(block: Block, width: float = COLUMN_WIDTH_MM) -> Block:
    """The block with a thin frame."""
    box = Box(0, -block.height, width, 0)
    line = Polyline(((box.x0, box.y0), (box.x1, box.y0), (box.x1, box.y1), (box.x0, box.y1)), "thin", closed=True)
    return replace(block, items=(*block.items, line))
