"""Parts and stock: a picture with item numbers, the parts list with cut sizes and masses, and stock by material.

Depends on: drawing, parts.records.
"""

from __future__ import annotations

from fabgen.drawing.dimension import Ask, leader
from fabgen.drawing.flow import COLUMN_WIDTH_MM, Block, column_height, flow, gap, heading, paragraph, table
from fabgen.drawing.hidden import Curve, dressed
from fabgen.drawing.model import Arc, Item, Line, Point, Polyline, number
from fabgen.drawing.pages.base import Context, Draft, draft, grams
from fabgen.drawing.pages.lining import is_coated, reading
from fabgen.drawing.picture import Drawn, free_labelled, shape_of
from fabgen.drawing.texts import say
from fabgen.parts.contour import bounds_mm
from fabgen.parts.records import Part
from fabgen.stock import tables

SHARES = (0.4, 0.33, 0.26)  # of the column's height for the picture


def drafts(context: Context) -> list[Draft]:
    """The parts and stock list; the picture is as large as the fewest sheets allow."""
    blocks = [*_parts_table(context), *_stock_table(context)]
    if context.bodies:
        room = column_height(context.paper)

        def sheets(share: float) -> int:
            return len(flow(context.paper, [Block(share * room + 11, (Line(0, 0, 0, 0),)), *blocks]))

        share = min(SHARES, key=sheets)
        blocks = [heading(say("view.assembled")), numbered_picture(context, room * share), gap(3), *blocks]
    return [draft(context, "stock", say("page.stock"), blocks, scale=say("title.not_to_scale"))]


def items_of(parts: tuple[Part, ...]) -> dict[str, int]:
    """Item number of each part, by key, in the order of the list."""
    return {part.key: i for i, part in enumerate(parts, start=1)}


def numbered_picture(context: Context, room: float) -> Block:
    """The whole feed with item numbers on leaders."""
    numbers = items_of(context.parts)
    seen = context.isometric
    items: list[Item] = []
    for s in seen:
        items += dressed(s.visible, "outline")
    labels = item_leaders([(str(numbers[b.part.key]), s.visible) for b, s in zip(context.bodies, seen, strict=True)])
    return free_labelled(Drawn("assembled", tuple(items)), labels, COLUMN_WIDTH_MM, room)


def item_leaders(shown: list[tuple[str, tuple[Curve, ...]]]) -> list[Ask]:
    """One leader for each label that shows anything, from the middle of its longest visible edge outward."""
    asks: list[Ask] = []
    done: set[str] = set()
    middle = _centre([c for _, curves in shown for c in curves])
    for label, curves in shown:
        if label in done or not curves:
            continue
        done.add(label)
        at = max(((_length(c), _middle(c)) for c in curves), key=lambda t: (round(t[0], 3), t[1]))[1]
        asks.append(leader("item", float(label.split()[0]), label, at, 60.0 if at[0] >= middle[0] else 120.0))
    return asks


def _centre(curves: list[Curve]) -> Point:
    boxes = [c.box() for c in curves]
    if not boxes:
        return (0.0, 0.0)
    return (
        (min(b.x0 for b in boxes) + max(b.x1 for b in boxes)) / 2,
        (min(b.y0 for b in boxes) + max(b.y1 for b in boxes)) / 2,
    )


def _length(curve: Curve) -> float:
    box = curve.box()
    return box.width + box.height


def _middle(curve: Curve) -> Point:
    match curve:
        case Line():
            return ((curve.x0 + curve.x1) / 2, (curve.y0 + curve.y1) / 2)
        case Arc():
            return curve.at(curve.start_deg + curve.sweep_deg / 2)
        case Polyline():
            return curve.points[len(curve.points) // 2]


def cut_size(part: Part) -> str:
    """What to cut from stock: sheet blank, wire length, or the finished box."""
    if part.wire is not None:
        return say("stock.wire", diameter=number(part.wire.diameter_mm), length=number(part.wire.piece_length_mm, 1))
    if part.flat is not None:
        x0, y0, x1, y1 = bounds_mm(part.flat.outline)
        return f"{number(x1 - x0, 1)} × {number(y1 - y0, 1)} × {number(part.flat.thickness_mm, 3)}"
    if _is_length(part):
        sizes = dict(part.sizes)
        length = sizes["cut_length_mm"] if "cut_length_mm" in sizes else sizes["length_mm"]
        return say("stock.wire", diameter=number(sizes["outer_mm"]), length=number(length, 1))
    shape = shape_of(part)
    if part.process == ("buy",) or shape is None:
        return say("stock.bought")
    box = shape.BoundingBox(1e-3)
    return say("stock.box", x=number(box.xlen, 1), y=number(box.ylen, 1), z=number(box.zlen, 1))


def _is_length(part: Part) -> bool:
    """True for what is cut from bought cable or tube by the length."""
    keys = {key for key, _ in part.sizes}
    return part.process == ("buy", "wire") and "outer_mm" in keys and bool({"cut_length_mm", "length_mm"} & keys)


def process_words(part: Part) -> str:
    """How the part is made, in words."""
    return ", ".join(say(f"process.{p}") for p in part.process)


def _parts_table(context: Context) -> list[Block]:
    rows = [
        (
            str(i),
            part.name,
            str(part.quantity),
            ", ".join(w for w in (part.material_name, part.temper) if w),
            cut_size(part),
            process_words(part),
            grams(part.mass_kg * part.quantity),
        )
        for i, part in enumerate(context.parts, start=1)
    ]
    total = sum(p.mass_kg * p.quantity for p in context.parts)
    rows.append(("", say("stock.total"), "", "", "", "", grams(total)))
    head = tuple(say(f"stock.{k}") for k in ("item", "part", "quantity", "material", "cut", "process", "mass"))
    return [heading(say("stock.parts_head")), *table("parts", head, rows, widths=(12, 37, 10, 36, 34, 24, 17))]


def _stock_table(context: Context) -> list[Block]:
    """Stock by material and form, with the allowance for cutting said in words."""
    groups: dict[tuple[str, str], list[Part]] = {}
    for part in context.parts:
        if part.process != ("buy",):
            groups.setdefault((part.material_name, _form(part)), []).append(part)
    rows = []
    for (material, form), parts in sorted(groups.items()):
        need = "; ".join(f"{p.quantity} × {cut_size(p)}" for p in parts)
        rows.append((material, form, need, grams(sum(p.mass_kg * p.quantity for p in parts))))
    if is_coated(context.feed):
        rows.append(_coating(context))
    if not rows:
        return []
    head = (say("stock.material"), say("stock.form"), say("stock.need"), say("stock.mass"))
    return [
        heading(say("stock.stock_head")),
        *table("stock", head, rows, widths=(46, 32, 74, 18)),
        *paragraph(say("stock.allowance")),
    ]


def _coating(context: Context) -> tuple[str, str, str, str]:
    """Paint or plating: no part, but stock to have."""
    lining = tables.lining(context.feed.job.can.lining)
    area = number(reading(context.feed).area_mm2 / 100, 0)
    return (lining.name, say("stock.form_coating"), say("stock.area", area=area, thickness=lining.thickness_mm), "")


def _form(part: Part) -> str:
    if part.wire is not None:
        return say("stock.form_wire", diameter=number(part.wire.diameter_mm))
    if part.flat is not None:
        return say("stock.form_sheet", thickness=number(part.flat.thickness_mm, 3))
    if "print" in part.process:
        return say("stock.form_print")
    if part.key.startswith("coax"):
        return say("stock.form_cable")
    return say("stock.form_tube") if _is_length(part) else say("stock.form_bar")
