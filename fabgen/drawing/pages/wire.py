"""Wire schedule: the straight wire with its marks, the bend table, and how to work through it.

Depends on: drawing, parts.records.
"""

from __future__ import annotations

from collections.abc import Sequence

from fabgen.drawing.dimension import arrow
from fabgen.drawing.flow import COLUMN_WIDTH_MM, Block, heading, paragraph, table
from fabgen.drawing.fonts import text_width_mm
from fabgen.drawing.model import Dimension, Item, Line, Polyline, Text, View, bounds, number
from fabgen.drawing.pages.base import Context, Draft, draft, tolerance_text
from fabgen.drawing.texts import say
from fabgen.parts.records import Part, WireBend, WirePath

STRAIGHT_MM = 160.0
TEXT_MM = 2.5


def drafts(context: Context) -> list[Draft]:
    """A schedule for each part that is a wire."""
    return [_draft(context, part) for part in context.parts if part.wire is not None]


def _draft(context: Context, part: Part) -> Draft:
    path = part.wire
    blocks: list[Block] = []
    if path is not None:
        blocks = [
            heading(say("wire.head", length=number(path.cut_length_mm, 1), diameter=number(path.diameter_mm))),
            *paragraph(say("wire.how")),
            straight(path),
            *bend_table(path),
            *_work(path),
        ]
    return draft(
        context, "wire", say("page.wire", part=part.name), blocks, part_key=part.key, scale=say("title.not_to_scale"),
        material=f"{part.material_name}, {part.temper}", finish=part.finish, tolerance=tolerance_text(part),
    )  # fmt: skip


def marks(path: WirePath) -> tuple[tuple[float, str], ...]:
    """Where to mark the straight wire, from end A: start and end of every bend, and the ends."""
    out: list[tuple[float, str]] = [(0.0, say("wire.end_a"))]
    for bend in path.bends:
        out += [
            (bend.start_mm, say("wire.start", number=bend.number)),
            (bend.end_mm, say("wire.stop", number=bend.number)),
        ]
    out.append((path.cut_length_mm, say("wire.end_b")))
    return tuple(out)


def spread(positions: Sequence[float], pitch: float, low: float, high: float) -> list[float]:
    """Positions moved apart to at least ``pitch``, in order, within the limits where they fit."""
    out = list(positions)
    for i in range(1, len(out)):
        out[i] = max(out[i], out[i - 1] + pitch)
    if out and out[-1] > high:
        out[-1] = high
        for i in range(len(out) - 2, -1, -1):
            out[i] = min(out[i], out[i + 1] - pitch)
    return [max(low, v) for v in out] if out else out


def straight(path: WirePath) -> Block:
    """The wire as a bar; running dimensions from end A on narrow lines that fan out to their numbers."""
    scale = STRAIGHT_MM / path.cut_length_mm
    left, y, half = (COLUMN_WIDTH_MM - STRAIGHT_MM) / 2, -26.0, 2.0
    right = left + STRAIGHT_MM
    items: list[Item] = [
        Polyline(((left, y - half), (right, y - half), (right, y + half), (left, y + half)), "outline", True),
        Line(left - 4, y, right + 4, y, "centre"),
        Text(left - 3, y + 3.2, "A", 3.5, "end", bold=True),
        Text(right + 3, y + 3.2, "B", 3.5, bold=True),
    ]
    for bend in path.bends:
        items += _zone(bend, left, scale, y, half)
    listed = marks(path)
    xs = [left + at * scale for at, _ in listed]
    dims: list[Dimension] = []
    for (at, name), x, tx in zip(listed, xs, spread(xs, 5.0, left, right + 4), strict=True):
        text = Text(tx + TEXT_MM / 2, y - 19.0, number(at, 1), TEXT_MM, "end", 90.0)
        lines = (Line(x, y - half, x, y - 8, "dimension"), Line(x, y - 8, tx, y - 17, "dimension"))
        dims.append(Dimension("x", name, at, text.text, "wire", ((0.0, 0.0), (at, 0.0)), text.box(), lines))
        items += [*lines, text]
    origin = arrow((left, y - half - 0.2), (left, y - 8))
    items.append(origin)
    view = View("wire", scale, (left, y), bounds(items))
    return Block(64.0, tuple(items), tuple(dims), (view,))


def _zone(bend: WireBend, left: float, scale: float, y: float, half: float) -> list[Item]:
    """A bend zone: grey where the wire bends, its number and angle above."""
    a, b = left + bend.start_mm * scale, left + bend.end_mm * scale
    label = (
        f"{bend.number}: {bend.angle_deg:g}°"
        if bend.angle_deg == round(bend.angle_deg)
        else f"{bend.number}: {bend.angle_deg:.1f}°"
    )
    width = text_width_mm(label, TEXT_MM)
    rise = 4.0 + 4.5 * ((bend.number - 1) % 3)
    return [
        Polyline(((a, y - half), (b, y - half), (b, y + half), (a, y + half)), "thin", True, (0.82, 0.82, 0.82)),
        Line((a + b) / 2, y + half, (a + b) / 2, y + half + rise - 0.8, "thin"),
        Text((a + b) / 2 - width / 2, y + half + rise, label, TEXT_MM),
    ]


def bend_table(path: WirePath) -> list[Block]:
    """One row a bend, in order along the wire."""
    rows = [
        (
            str(b.number),
            b.name,
            number(b.start_mm, 1),
            number(b.end_mm, 1),
            f"{number(b.angle_deg, 1)}°",
            number(b.radius_mm),
            number(b.mandrel_mm),
            f"{number(b.plane_deg, 1)}°",
            str(b.order),
        )
        for b in path.bends
    ]
    head = tuple(say(f"wire.{k}") for k in ("no", "bend", "from", "to", "angle", "radius", "mandrel", "plane", "order"))
    return [heading(say("wire.table_head"), 2.5), *table("wire bends", head, rows)]


def _work(path: WirePath) -> list[Block]:
    """The work in order."""
    length, beyond = number(path.piece_length_mm, 1), number(path.beyond_mm, 1)
    mark = say("wire.step_mark_beyond", beyond=beyond) if path.beyond_mm else say("wire.step_mark")
    steps = [say("wire.step_cut", length=length), mark]
    for place, (bend, turn_deg) in enumerate(path.work()):
        turn = say("wire.turn", plane=number(turn_deg, 1)) if turn_deg else say("wire.no_turn")
        steps.append(
            say(
                "wire.step_bend", number=bend.number, angle=number(bend.angle_deg, 1),
                mandrel=number(bend.mandrel_mm), turn=turn if place else "",
            )
        )  # fmt: skip
    steps += [say("wire.step_check"), say("wire.step_end", preparation=path.end_preparation)]
    blocks = [heading(say("wire.work_head"), 2.5)]
    for i, step in enumerate(steps, start=1):
        blocks += paragraph(step, bullet=f"{i}.")
    return blocks
