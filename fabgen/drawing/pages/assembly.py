"""Assembly in numbered steps: a picture of each state, tools, how to join, what to measure before going on.

Depends on: drawing, parts.records.
"""

from __future__ import annotations

from dataclasses import dataclass

from fabgen.drawing.flow import COLUMN_WIDTH_MM, Block, beside, framed, gap, heading, paragraph, stack
from fabgen.drawing.hidden import ISOMETRIC, Curve, Direction, dressed, look
from fabgen.drawing.model import Item, bounds, number
from fabgen.drawing.pages.base import Context, Draft, draft
from fabgen.drawing.pages.stock import item_leaders, items_of
from fabgen.drawing.picture import Body, Drawn, close_up, free, outside, shape_of
from fabgen.drawing.texts import has, say
from fabgen.parts.records import Part

PICTURE_MM = 78.0
PICTURE_HEIGHT_MM = 62.0
TEXT_MM = 85.0

# From the gap's side and above, so that bars and loop lie open; from below for what sits under the floor.
_HIGH = 0.83  # sine of the eye's height over the floor plane: 56 degrees
ABOVE_EYE = Direction("above", (-0.394, -0.394, _HIGH), (0.7071067811865476, -0.7071067811865476, 0.0))
BELOW_EYE = Direction("below", (-0.5, -0.5, -0.7071067811865476), (0.7071067811865476, -0.7071067811865476, 0.0))

# The step that a part joins in, by the beginning of its key; the first that fits counts.
JOINS: tuple[tuple[str, str], ...] = (
    ("bend-strip", "tool"),
    ("jig", "tool"),
    ("can-tube", "wall"),
    ("can-wall", "wall"),
    ("wall", "wall"),
    ("seam", "wall"),
    ("choke", "choke"),
    ("lining", "lining"),
    ("foil", "lining"),
    ("loop", "loop"),
    ("foot", "loop"),
    ("connector", "connector"),
    ("spacer", "connector"),
    ("coax", "coax"),
    ("capacitor", "capacitor"),
    ("radome", "radome"),
    ("can", "body"),
    ("floor", "body"),
    ("flange", "body"),
)
ORDER = ("tool", "body", "wall", "lining", "choke", "loop", "connector", "coax", "capacitor", "radome", "other")
CLOSE_UPS = {"loop", "connector", "coax", "capacitor"}
LEFT_OUT = {"wall", "choke", "lining"}  # the wall would only hide what the step is about
SEEN_FROM_BELOW = {"connector"}
FASTENERS = {"screw", "nut", "rivet", "insert", "washer"}


@dataclass(frozen=True)
class Step:
    """One step: its kind and the parts that join in it."""

    kind: str
    parts: tuple[Part, ...]


def steps(parts: tuple[Part, ...]) -> tuple[Step, ...]:
    """The steps that bring in all parts, each part once."""
    groups: dict[str, list[Part]] = {}
    for part in parts:
        groups.setdefault(_kind_of(part.key), []).append(part)
    return tuple(Step(kind, tuple(groups[kind])) for kind in ORDER if kind in groups)


def _kind_of(key: str) -> str:
    place = _place_of(key)
    return next((kind for start, kind in JOINS if place.startswith(start)), "other")


def _place_of(key: str) -> str:
    """What a part belongs to: a screw, nut, rivet or insert to the part named after the dash."""
    head, _, rest = key.partition("-")
    return rest if rest and head in FASTENERS else key


def drafts(context: Context) -> list[Draft]:
    """All steps and the closing measurements."""
    blocks: list[Block] = [heading(say("assembly.head")), *paragraph(say("assembly.intro")), gap(1)]
    old: list[Body] = []
    for n, step in enumerate(steps(context.parts), start=1):
        keys = {p.key for p in step.parts}
        new = [b for b in context.bodies if b.part.key in keys]
        blocks += [_step_block(context, n, step, old, new), gap(3)]
        old += new
    if context.parts:
        blocks.append(_last_block(context, len(steps(context.parts)) + 1))
    return [draft(context, "assembly", say("page.assembly"), blocks, scale=say("title.not_to_scale"))]


def _step_block(context: Context, n: int, step: Step, old: list[Body], new: list[Body]) -> Block:
    text = _text(context, n, step)
    picture = picture_block(context, step, old, new) if new else _forms(step)
    return framed(beside((picture, text), (1.0, PICTURE_MM + 4.0)))


def _forms(step: Step) -> Block:
    """Forms and strips that are no part of the feed, one under the other."""
    shapes = [(p, shape_of(p)) for p in step.parts]
    found = [(p, s) for p, s in shapes if s is not None][:3]
    high = PICTURE_HEIGHT_MM / max(len(found), 1)
    pictures = [free(outside("", [Body(p, s)], ISOMETRIC), PICTURE_MM, high) for p, s in found]
    return stack(pictures) if pictures else Block(1.0, ())


def picture_block(context: Context, step: Step, old: list[Body], new: list[Body]) -> Block:
    """The state after the step: new parts in wide lines with item numbers, the rest narrow and grey."""
    numbers = items_of(context.parts)
    if step.kind in CLOSE_UPS:
        old = [b for b in old if _kind_of(b.part.key) not in LEFT_OUT]
    direction = BELOW_EYE if step.kind in SEEN_FROM_BELOW else ABOVE_EYE
    seen = look([b.shape for b in (*old, *new)], direction)
    items: list[Item] = []
    shown: list[tuple[str, tuple[Curve, ...]]] = []
    for i, s in enumerate(seen):
        fresh = i >= len(old)
        items += dressed(s.visible, "new" if fresh else "old")
        if fresh:
            shown.append((str(numbers[new[i - len(old)].part.key]), s.visible))
    fresh_items = tuple(c for _, curves in shown for c in curves)
    around = bounds(fresh_items) if fresh_items else bounds(tuple(items))
    drawn = Drawn(f"step {step.kind}", tuple(items))
    return close_up(drawn, around, item_leaders(shown), PICTURE_MM, PICTURE_HEIGHT_MM)


def _text(context: Context, n: int, step: Step) -> Block:
    numbers = items_of(context.parts)
    names = "; ".join(say("assembly.item", item=numbers[p.key], part=p.name, quantity=p.quantity) for p in step.parts)
    blocks = [Block(1.5, ()), heading(say(_key(context, step.kind, "title"), n=n), 3.5, TEXT_MM)]
    blocks += paragraph(names, 2.5, TEXT_MM)
    values = _values(context)
    for field in ("do", "tools", "join", "measure"):
        key = _key(context, step.kind, field)
        if has(key):
            label = say(f"assembly.{field}")
            blocks += paragraph(f"{label} {say(key, n=n, **values)}", 2.5, TEXT_MM, bold=False)
    return stack(blocks)


def _key(context: Context, kind: str, field: str) -> str:
    """The most particular text: by loop form, by make of can, by whether metal is soldered, then the general one."""
    job = context.feed.job
    soldered = "solder" if all(p.material not in {"en-aw-5754", "en-aw-1050"} for p in context.parts) else "bond"
    for variant in (job.can.make, job.loop.form, soldered):
        key = f"step.{kind}.{variant}.{field}"
        if has(key):
            return key
    return f"step.{kind}.{field}"


def _values(context: Context) -> dict[str, str]:
    """Numbers that the step texts may name."""
    feed = context.feed
    s = feed.sizes
    tolerance = {t.size: number(t.tolerance_mm) for t in feed.sensitivities}
    return {
        "bore": number(s.can_bore_mm),
        "depth": number(s.can_depth_mm),
        "height": number(s.loop_height_mm),
        "height_tolerance": tolerance.get("loop_height_mm", "0.3"),
        "pitch": number(s.leg_pitch_mm),
        "tap": number(s.tap_height_mm),
        "tap_tolerance": tolerance.get("tap_height_mm", "0.2"),
        "diameter": number(s.loop_diameter_mm),
        "overlap": number(feed.capacitor.overlap_mm),
        "capacitance": number(feed.capacitor.capacitance_pf, 3),
        "lining": feed.job.can.lining,
    }


def _last_block(context: Context, n: int) -> Block:
    blocks = [heading(say("step.last.title", n=n), 3.5)]
    blocks += paragraph(say("step.last.do"), 2.5, COLUMN_WIDTH_MM)
    return stack(blocks)
