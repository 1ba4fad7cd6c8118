"""Bench test: what to expect on the analyser, what to turn or cut when it is off, and where to mount the feed.

The decision table comes from the computed sensitivities: size change = - wanted shift / (shift per mm).

Depends on: drawing, sizing.records, parts.floor_plan.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from fabgen.drawing.dimension import DIAMETER, along_x, along_y
from fabgen.drawing.flow import COLUMN_WIDTH_MM, Block, gap, heading, kept, paragraph, table
from fabgen.drawing.model import Arc, Item, Line, Polyline, Text, number
from fabgen.drawing.pages import performance
from fabgen.drawing.pages.base import Context, Draft, draft
from fabgen.drawing.pages.lining import limit_text
from fabgen.drawing.picture import Drawn, dimensioned, shifted
from fabgen.drawing.texts import has, say
from fabgen.sizing.records import Feed, Sensitivity

# Sizes that a screwdriver, a file or pliers can still change on the bench, best first.
TRIMMED = ("series_capacitor_pf", "loop_height_mm", "loop_diameter_mm", "can_depth_mm")
LINE_OHM = 50.0


@dataclass(frozen=True)
class Advice:
    """One row of the decision table."""

    seen: str
    do: str
    amount: str


def drafts(context: Context) -> list[Draft]:
    """Plots, decision table, mounting."""
    feed = context.feed
    blocks: list[Block] = [
        heading(say("bench.set_up_head")),
        *paragraph(say("bench.set_up")),
        *performance.blocks(feed),
        *capacitor_blocks(feed),
        *decision_blocks(feed),
    ]
    mount = [*mounting_blocks(context)]
    return [
        draft(context, "bench", say("page.bench"), blocks, scale="–"),
        draft(context, "mounting", say("page.mounting"), mount, scale=say("title.not_to_scale")),
    ]


def decision_blocks(feed: Feed) -> list[Block]:
    """The table of what is seen and what to do."""
    rows = [(a.seen, a.do, a.amount) for a in advice(feed)]
    head = (say("bench.seen"), say("bench.do"), say("bench.amount"))
    return [
        heading(say("bench.table_head")),
        *kept(paragraph(say("bench.table_intro"))),
        *table("decisions", head, rows, widths=(56, 64, 50)),
    ]


def advice(feed: Feed) -> tuple[Advice, ...]:
    """Rows for a dip that is off in frequency, off in reactance, off in resistance, or missing."""
    return (*_off_frequency(feed), *_off_reactance(feed), *_off_resistance(feed), *_missing(feed))


def step_mhz(feed: Feed) -> float:
    """The shift that the frequency rows are written for: the expected spread, as 1, 2 or 5 times a power of ten."""
    raw = max(performance.spread_mhz(feed), 1e-3 * feed.job.target.frequency_mhz)
    power = 10.0 ** math.floor(math.log10(raw))
    return next(m * power for m in (1.0, 2.0, 5.0, 10.0) if m * power >= raw * (1 - 1e-9))


def _off_frequency(feed: Feed) -> list[Advice]:
    shift = step_mhz(feed)
    by_size = {s.size: s for s in feed.sensitivities}
    out = []
    for sign, key in ((1.0, "bench.low"), (-1.0, "bench.high")):
        for size in TRIMMED:
            found = by_size.get(size)
            if found is None or abs(found.resonance_mhz_per_mm) * _reach(feed, size) < 0.2 * shift:
                continue
            change = sign * shift / found.resonance_mhz_per_mm
            more = "more" if change > 0 else "less"
            action = f"bench.{size}.{more}"
            if has(f"{action}.{feed.sizes.conductor}"):
                action = f"{action}.{feed.sizes.conductor}"
            if has(action):
                out.append(Advice(say(key, shift=number(shift, 2)), say(action), _amount(feed, found, abs(change))))
    return out


def _reach(feed: Feed, size: str) -> float:
    """How far a size can be changed on the bench: the capacitor's range, else two millimetres or 3 % of it."""
    if size == "series_capacitor_pf":
        return (feed.capacitor.maximum_pf - feed.capacitor.minimum_pf) / 2
    return max(2.0, 0.03 * float(getattr(feed.sizes, size, 0.0)))


def _amount(feed: Feed, found: Sensitivity, change: float) -> str:
    if found.size == "series_capacitor_pf":
        travel = change / feed.capacitor.pf_per_mm
        return say("bench.amount_pf", change=number(change, 3), travel=number(travel, 2))
    return say("bench.amount_mm", change=number(change, 2), rate=number(found.resonance_mhz_per_mm, 2))


def capacitance_for(feed: Feed, reactance_ohm: float) -> float:
    """Series capacitance that cancels an excess reactance at the target, pF: 1/(w C') = 1/(w C) + X."""
    w = 2 * math.pi * feed.job.target.frequency_mhz * 1e6
    c = feed.sizes.series_capacitor_pf * 1e-12
    return 1e12 / (w * (1 / (w * c) + reactance_ohm))


def _off_reactance(feed: Feed) -> list[Advice]:
    out = []
    for x, key, action in ((15.0, "bench.inductive", "less"), (-15.0, "bench.capacitive", "more")):
        wanted = capacitance_for(feed, x)
        change = abs(wanted - feed.sizes.series_capacitor_pf)
        amount = say("bench.amount_pf", change=number(change, 3), travel=number(change / feed.capacitor.pf_per_mm, 2))
        out.append(Advice(say(key, x=number(abs(x))), say(f"bench.series_capacitor_pf.{action}"), amount))
    return out


def tap_for(feed: Feed, seen_ohm: float) -> float:
    """Tap height that brings a seen resistance to 50 ohm, mm: R grows with the square of the height near the
    shorted end of the bars, so h' = h sqrt(50 / R)."""
    return feed.sizes.tap_height_mm * math.sqrt(LINE_OHM / seen_ohm)


def _off_resistance(feed: Feed) -> list[Advice]:
    out = []
    for r, key, action in ((40.0, "bench.low_r", "bench.tap_up"), (62.5, "bench.high_r", "bench.tap_down")):
        change = abs(tap_for(feed, r) - feed.sizes.tap_height_mm)
        out.append(Advice(say(key, r=number(r)), say(action), say("bench.amount_tap", change=number(change, 2))))
    return out


def _missing(feed: Feed) -> list[Advice]:
    return [
        Advice(say("bench.no_dip"), say("bench.no_dip_do"), say("bench.no_dip_amount", limit=limit_text(feed))),
        Advice(say("bench.shallow"), say("bench.shallow_do"), say("bench.shallow_amount", limit=limit_text(feed))),
        Advice(say("bench.hand"), say("bench.hand_do"), say("bench.hand_amount")),
    ]


def capacitor_blocks(feed: Feed) -> list[Block]:
    """The capacitor's overlap against its capacitance, as a table to trim by."""
    c = feed.capacitor
    rows = []
    for i in range(7):
        value = c.minimum_pf + (c.maximum_pf - c.minimum_pf) * i / 6
        rows.append((number(value, 2), number(c.overlap_mm + (value - c.capacitance_pf) / c.pf_per_mm, 1)))
    first = (say("bench.pf"), *(r[0] for r in rows))
    second = (say("bench.overlap"), *(r[1] for r in rows))
    note = say(
        "bench.capacitor_note", capacitance=number(c.capacitance_pf, 3), overlap=number(c.overlap_mm, 1),
        slope=number(c.pf_per_mm, 3), formula=c.formula, source=c.source,
    )  # fmt: skip
    widths = (44.0, *(18.0,) * 7)
    return [heading(say("bench.capacitor_head")), *table("trim", first, [second], widths=widths), *paragraph(note)]


def flange_to_focus_mm(feed: Feed) -> float:
    """From the floor's outer face (the flange face away from the dish) forward to the focus, mm: the phase centre
    lies at the focus."""
    from fabgen.parts.floor_plan import floor_bottom_mm

    return feed.predicted.phase_centre_mm - floor_bottom_mm(feed)


def mounting_blocks(context: Context) -> list[Block]:
    """Where the feed sits: focal length, distances, and how to check them."""
    feed = context.feed
    focal = 1000 * feed.job.dish.diameter_m * feed.job.dish.focal_ratio
    to_focus = flange_to_focus_mm(feed)
    depth = (1000 * feed.job.dish.diameter_m) ** 2 / (16 * focal)
    rows = [
        (say("mount.focal"), f"{number(focal, 1)} mm", say("mount.focal_how")),
        (say("mount.depth"), f"{number(depth, 1)} mm", say("mount.depth_how")),
        (say("mount.phase"), f"z = {number(feed.predicted.phase_centre_mm, 1)} mm", say("mount.phase_how")),
        (say("mount.flange_to_focus"), f"{number(to_focus, 1)} mm", say("mount.flange_how")),
        (say("mount.vertex_to_flange"), f"{number(focal + to_focus, 1)} mm", say("mount.vertex_how")),
        (say("mount.edge"), f"{number(performance.edge_deg(feed), 1)}°", say("mount.edge_how")),
    ]
    head = (say("table.size"), say("table.value"), say("mount.how"))
    blocks = [
        heading(say("mount.head")),
        _dish_picture(feed, focal, to_focus),
        gap(3),
        *table("mounting", head, rows, widths=(62, 32, 76)),
    ]
    for i in range(1, 6):
        blocks += paragraph(
            say(f"mount.step{i}", focus=number(to_focus, 1), vertex=number(focal + to_focus, 1)), bullet=f"{i}."
        )
    return blocks


def _dish_picture(feed: Feed, focal: float, to_focus: float) -> Block:
    """Dish and feed in section, the axis level; feed drawn three times as large so that it can be seen."""
    radius = 500.0 * feed.job.dish.diameter_m
    scale = min(44.0 / radius, 105.0 / max(focal + 3 * to_focus, radius**2 / (4 * focal)))
    points = tuple(((y * radius / 24) ** 2 / (4 * focal), y * radius / 24) for y in range(-24, 25))
    s, z = feed.sizes, 3.0
    back, rim = focal + to_focus * z, focal + (to_focus - s.can_depth_mm - 0.0) * z
    half = s.can_bore_mm / 2 * z
    half = min(half, 0.45 * radius)
    items: list[Item] = [
        Polyline(points, "outline"),
        Line(-30 / scale * 0.3, 0, back + 12 / scale, 0, "centre"),
        Polyline(((rim, half), (back, half), (back, -half), (rim, -half)), "outline"),
        Line(points[0][0], -radius, focal, 0, "thin"),
        Line(points[-1][0], radius, focal, 0, "thin"),
    ]
    asks = [
        along_x("focal", 0, focal, -radius, "bottom", text=f"f = {number(focal, 1)}", y1=0),
        along_x("vertex_to_flange", 0, back, -radius, "bottom", text=number(focal + to_focus, 1), y1=-half),
        along_x("flange_to_focus", focal, back, half, "top", text=number(to_focus, 1), y1=half),
        along_y("dish", -radius, radius, 0, "left", text=f"{DIAMETER}{number(2 * radius)}", x1=0),
    ]

    def focus(scale_: float, _: tuple[Item, ...]) -> tuple[Item, ...]:
        x = focal * scale_
        return (
            Arc(x, 0, 1.3, 1.3, role="outline"),
            Text(x - 1.5, 3.2, "F", 3.5, "end", bold=True),
        )

    made = dimensioned(Drawn("", tuple(items)), asks, scale, focus, title=False)
    x = (COLUMN_WIDTH_MM - made.box.width) / 2 - made.box.x0
    block = shifted(made, x, -made.box.y1)
    note = Text(COLUMN_WIDTH_MM, -made.box.height, say("mount.picture"), 1.8, "end")
    return Block(made.box.height, (*block.items, note), block.dimensions, block.views)
