"""Assembly in numbered steps: a picture of each state, tools, how to join, what to measure before going on.

Depends on: drawing, parts.records.
"""

from __future__ import annotations

from fabgen.drawing.flow import COLUMN_WIDTH_MM, Block, beside, framed, gap, heading, paragraph, stack
from fabgen.drawing.hidden import ISOMETRIC, Curve, dressed
from fabgen.drawing.model import Item, bounds, number
from fabgen.drawing.pages.base import Context, Draft, draft
from fabgen.drawing.pages.lining import is_coated, limit_text, lined, one_digit, reading
from fabgen.drawing.pages.steps import ABOVE_EYE, Step, StepView
from fabgen.drawing.pages.stock import item_leaders, items_of
from fabgen.drawing.picture import Body, Drawn, close_up, free, outside, shape_of
from fabgen.drawing.texts import has, say
from fabgen.stock import tables

PICTURE_MM = 78.0
PICTURE_HEIGHT_MM = 62.0
TEXT_MM = 85.0
CHOKE_FOILS = ("foil-choke-floor", "foil-choke-wall", "foil-choke-can")
WHOLE = {"loop", "lining"}  # steps that need the whole floor to show which way things point


def drafts(context: Context) -> list[Draft]:
    """All steps and the closing measurements."""
    blocks: list[Block] = [heading(say("assembly.head")), *paragraph(say("assembly.intro")), gap(1)]
    for n, view in enumerate(context.steps, start=1):
        blocks += [_step_block(context, n, view), gap(3)]
    if context.parts:
        blocks.append(_last_block(context, len(context.steps) + 1))
    return [draft(context, "assembly", say("page.assembly"), blocks, scale=say("title.not_to_scale"))]


def _step_block(context: Context, n: int, view: StepView) -> Block:
    text = _text(context, n, view.step)
    picture = picture_block(context, view) if view.seen else _forms(view.step)
    return framed(beside((picture, text), (1.0, PICTURE_MM + 4.0)))


def _forms(step: Step) -> Block:
    """Forms and strips that are no part of the feed, one under the other, of more than three two beside each other."""
    shapes = [(p, s) for p in step.parts if (s := shape_of(p)) is not None]
    across = 1 if len(shapes) <= 3 else 2
    wide, high = PICTURE_MM / across, PICTURE_HEIGHT_MM / max(-(-len(shapes) // across), 1)
    pictures = [free(outside("", [Body(p, s)], ISOMETRIC), wide, high) for p, s in shapes]
    rows = [pictures[i : i + across] for i in range(0, len(pictures), across)]
    return stack([beside(row, [wide * k for k in range(len(row))]) for row in rows]) if rows else Block(1.0, ())


def picture_block(context: Context, view: StepView) -> Block:
    """The state after the step: new parts in wide lines with item numbers, the rest narrow and grey."""
    numbers = items_of(context.parts)
    old, new, seen = view.old, view.new, view.seen
    items: list[Item] = []
    shown: list[tuple[str, tuple[Curve, ...]]] = []
    for i, s in enumerate(seen):
        fresh = i >= len(old)
        items += dressed(s.visible, "new" if fresh else "old")
        if fresh:
            shown.append((str(numbers[new[i - len(old)].part.key]), s.visible))
    lining = _lined(context, view)
    for label, lines in lining:
        items += dressed(lines, "new" if not new else "hatch")
        shown += [(label, lines)] if label else []
    fresh_items = tuple(c for _, curves in (*shown, *lining) for c in curves)
    drawn = Drawn(f"step {view.step.kind}", tuple(items))
    around = bounds(fresh_items) if fresh_items and view.step.kind not in WHOLE else drawn.box
    return close_up(drawn, around, item_leaders(shown), PICTURE_MM, PICTURE_HEIGHT_MM)


def _lined(context: Context, view: StepView) -> list[tuple[str, tuple[Curve, ...]]]:
    """Item numbers of the foils, or none for paint and plating, and the lines that show what is covered."""
    sizes, numbers = context.feed.sizes, items_of(context.parts)
    keys = [p.key for p in view.step.parts if p.key.startswith("foil")]
    if is_coated(context.feed):
        ring = any(step.step.kind == "choke" for step in context.steps)
        choke = list(CHOKE_FOILS) if (view.step.kind == "choke") == ring else []
        keys = {"lining": ["foil-floor", "foil-wall", *choke], "choke": choke}.get(view.step.kind, [])
    outer = sizes.can_bore_mm + 2 * sizes.wall_mm
    faces = [(str(numbers.get(key, "")), lined(key, sizes, outer, ABOVE_EYE)) for key in keys]
    return [(label, lines) for label, lines in faces if lines]  # a low choke may hide its floor from the eye


def _text(context: Context, n: int, step: Step) -> Block:
    numbers = items_of(context.parts)
    names = "; ".join(say("assembly.item", item=numbers[p.key], part=p.name, quantity=p.quantity) for p in step.parts)
    blocks = [Block(1.5, ()), heading(say(_key(context, step.kind, "title"), n=n), 3.5, TEXT_MM)]
    values = _values(context)
    blocks += paragraph(names or say("assembly.coating", **values), 2.5, TEXT_MM)
    for field in ("do", "tools", "caution", "join", "measure"):
        key = _key(context, step.kind, field)
        if has(key):
            label = say(f"assembly.{field}")
            blocks += paragraph(f"{label} {say(key, n=n, **values)}", 2.5, TEXT_MM, bold=False)
    return stack(blocks)


def _key(context: Context, kind: str, field: str) -> str:
    """The most particular text: by make and form, by one of them and the joint, by one alone; then the general."""
    job = context.feed.job
    make, form = job.can.make, job.loop.form
    joint = "solder" if make == "printed" or tables.metal(job.can.metal).solderable else "bond"
    particular = (_special(context, kind), f"{make}-{form}", f"{make}-{joint}", f"{form}-{joint}")
    for variant in (*particular, make, form, joint):
        key = f"step.{kind}.{variant}.{field}"
        if has(key):
            return key
    return f"step.{kind}.{field}"


def _special(context: Context, kind: str) -> str:
    """The variant of a step that its parts decide; empty for the general one."""
    job, keys = context.feed.job, [part.key for part in context.parts]
    if kind == "tool" and not any(k.startswith("jig") for k in keys):
        return "strip"
    if kind == "tool" and not any(k.startswith("bend-strip") for k in keys):
        return "form"
    if kind == "body" and "can-1" in keys:
        return "pieces"
    if kind == "loop" and job.loop.form == "sheet" and "screw-foot" not in keys:
        return "soldered"
    if job.can.make == "printed" and kind in {"lining", "loop", "choke"}:
        lining = tables.lining(job.can.lining).kind
        return {"lining": lining, "loop": f"{lining}-{job.loop.form}", "choke": lining}[kind]
    return "level" if kind == "choke" and _on_the_floor(context) else ""


def _on_the_floor(context: Context) -> bool:
    """True when the choke is a second wall on the can's own floor, not a ring with a floor of its own."""
    keys = {part.key for part in context.parts}
    choke = context.feed.sizes.choke
    return choke is not None and choke.floor_z_mm == 0.0 and "choke-wall" in keys and "choke-floor" not in keys


def _values(context: Context) -> dict[str, str]:
    """Numbers that the step texts may name."""
    feed = context.feed
    s, lining, read = feed.sizes, tables.lining(feed.job.can.lining), reading(feed)
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
        "lining": lining.name,
        "thickness": number(lining.thickness_mm, 3),
        "expected": one_digit(read.expected_ohm),
        "limit": limit_text(feed),
        "gain": number(read.gain_g, 1),
    }


def _last_block(context: Context, n: int) -> Block:
    blocks = [heading(say("step.last.title", n=n), 3.5)]
    blocks += paragraph(say("step.last.do"), 2.5, COLUMN_WIDTH_MM)
    return stack(blocks)
