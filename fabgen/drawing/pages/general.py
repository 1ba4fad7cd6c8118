"""General arrangement: section in the E-plane, view into the aperture, key sizes, what it does, result of checks.

Depends on: drawing, checks.records.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

from fabgen.drawing.dimension import DIAMETER, Ask, along_x, along_y, leader
from fabgen.drawing.flow import COLUMN_WIDTH_MM, Block, gap, heading, paragraph, table
from fabgen.drawing.flow import column_height as height_of
from fabgen.drawing.hidden import APERTURE, FROM_GAP, GAP_PLAN, SIDE, dressed
from fabgen.drawing.model import RED, Arc, Item, Line, bounds, number, scale_text
from fabgen.drawing.pages import performance
from fabgen.drawing.pages.base import Context, Draft, draft, quantity, tolerance_of, toleranced
from fabgen.drawing.picture import (
    Body,
    Drawn,
    alone,
    cut,
    cutting_plane,
    dimensioned,
    free,
    outside,
    scales_for,
    stacked,
)
from fabgen.drawing.section import rough_bounds
from fabgen.drawing.texts import say, size_name
from fabgen.sizing.records import BENCH_LIMIT_DB, Feed

WIDTH_MM = COLUMN_WIDTH_MM
SIZE_KEYS = (
    "can_bore_mm", "can_depth_mm", "wall_mm", "floor_mm", "can_flats", "loop_diameter_mm", "loop_height_mm",
    "wire_mm", "strip_width_mm", "sheet_mm", "leg_x_mm", "leg_pitch_mm", "leg_width_mm", "leg_bend_radius_mm",
    "tap_height_mm", "crossing_width_mm", "series_capacitor_pf",
)  # fmt: skip


def drafts(context: Context) -> list[Draft]:
    """The general arrangement with its tables."""
    views, scale = arrangement(context)
    loop, purpose, sizes = detail(context), _purpose(context), _sizes(context)
    after = [*_performance(context), *performance.pattern_blocks(context.feed), *checks_result(context)]
    orders = ([*loop, *purpose, *sizes], [*purpose, *sizes, *loop])
    made = [draft(context, "general", say("page.general"), [*views, *order, *after], scale=scale) for order in orders]
    return [min(made, key=lambda d: len(d.pages))]


def arrangement(context: Context) -> tuple[list[Block], str]:
    """Section over the view into the aperture (first angle; third angle the other way round), one scale; on two
    sheets where that allows a larger scale."""
    section = cut(say("view.section_e"), context.bodies, SIDE)
    front = outside(say("view.aperture"), [b for b in context.bodies if _reaches_inside(b)], APERTURE)
    room = height_of(context.paper) - 1
    first = context.feed.job.limits.projection == "first"
    for scale in scales_for((section,), WIDTH_MM, room):
        if scale > 1 or max(section.box.width, front.box.width) * scale > WIDTH_MM:
            continue
        a = dimensioned(section, section_asks(context), scale, lambda s, i: _axis_and_focus(context, s, i))
        b = dimensioned(front, front_asks(front), scale, cutting_plane("A"))
        if max(a.box.width, b.box.width) > WIDTH_MM or max(a.box.height, b.box.height) > room:
            continue
        upper, lower = (a, b) if first else (b, a)
        if a.box.height + b.box.height + 8 <= room:
            views = [stacked(upper, lower, WIDTH_MM)]
        else:
            views = [alone(upper, WIDTH_MM), alone(lower, WIDTH_MM)]
        break
    left = room - views[0].height - 2
    if left > 55 and context.isometric:
        views.insert(1, free(_isometric(context), WIDTH_MM, left))
    return views, scale_text(scale)


def pictures(context: Context) -> dict[str, tuple[Item, ...]]:
    """The isometric picture, the section and the view into the aperture with their dimensions, loop and bars."""
    section = cut(say("view.section_e"), context.bodies, SIDE)
    front = outside(say("view.aperture"), [b for b in context.bodies if _reaches_inside(b)], APERTURE)
    scale = scales_for((section,), WIDTH_MM - 30, 120.0)[0]
    made = {
        "isometric": free(_isometric(context), WIDTH_MM, 120.0).items,
        "section": dimensioned(section, section_asks(context), scale, title=False).block.items,
        "aperture": dimensioned(front, front_asks(front), scale, title=False).block.items,
    }
    loop = detail(context)
    return {**made, "loop": loop[0].items} if loop else made


def _reaches_inside(body: Body) -> bool:
    """False for what lies wholly under the floor's inner face: the floor hides it in a view into the aperture."""
    return body.part.process != ("buy",) or rough_bounds(body.shape)[1][2] > 0.05


def _isometric(context: Context) -> Drawn:
    return Drawn("", tuple(item for seen in context.isometric for item in dressed(seen.visible, "outline")))


def section_asks(context: Context) -> list[Ask]:
    """Dimensions of the section; paper x is -y of the feed, paper y is z."""
    feed, s = context.feed, context.feed.sizes
    bore, depth = s.can_bore_mm / 2, s.can_depth_mm
    sign = DIAMETER if s.can_flats == 0 else say("view.across_flats") + " "
    r = s.loop_diameter_mm / 2
    asks = [
        along_x("can_bore_mm", -bore, bore, depth, "top", text=toleranced(feed, "can_bore_mm", 2 * bore, sign)),
        along_y("can_depth_mm", 0, depth, -bore, "left", text=toleranced(feed, "can_depth_mm", depth)),
        along_y("loop_height_mm", 0, s.loop_height_mm, bore, "right",
                text=toleranced(feed, "loop_height_mm", s.loop_height_mm), x1=r),
        along_x("loop_diameter_mm", -r, r, s.loop_height_mm, "bottom",
                text=toleranced(feed, "loop_diameter_mm", 2 * r, DIAMETER)),
    ]  # fmt: skip
    if s.choke is not None:
        c = s.choke
        rim = c.floor_z_mm + c.depth_mm
        asks += [
            along_x("choke.bore_mm", -c.bore_mm / 2, c.bore_mm / 2, rim, "top",
                    text=toleranced(feed, "choke.bore_mm", c.bore_mm, DIAMETER)),
            along_y("choke.depth_mm", c.floor_z_mm, rim, -c.bore_mm / 2, "left",
                    text=toleranced(feed, "choke.depth_mm", c.depth_mm)),
            along_y("choke.floor_z_mm", 0, c.floor_z_mm, -c.bore_mm / 2, "left",
                    text=toleranced(feed, "choke.floor_z_mm", c.floor_z_mm), x1=-bore),
        ]  # fmt: skip
    z = feed.predicted.phase_centre_mm
    name = say("general.phase_centre", z=number(z, 1))
    return [*asks, leader("phase_centre_mm", z, name, (0.0, z), 12.0)]


def front_asks(drawn: Drawn) -> list[Ask]:
    """Overall size of the view into the aperture, to 0.1 mm."""
    box = drawn.box
    asks = [along_x("overall", box.x0, box.x1, 0, "bottom", text=number(box.width, 1))]
    if abs(box.width - box.height) > 0.1:
        asks.append(along_y("overall", box.y0, box.y1, 0, "right", text=number(box.height, 1)))
    return asks


def detail(context: Context) -> list[Block]:
    """Loop, bars and crossing alone: from the gap's side, and from above."""
    things = [b for b in context.bodies if b.part.key.split("-")[0] in {"loop", "coax", "capacitor"}]
    if not things:
        return []
    return [loop_views(context, things, 0.86 * height_of(context.paper))[0], gap(3)]


def loop_views(context: Context, things: Sequence[Body], room: float) -> tuple[Block, str]:
    """The bodies from the gap's side and from above, with the sizes of loop and bars."""
    side = outside(say("view.gap_side"), things, FROM_GAP)
    plan = outside(say("view.loop_above"), things, GAP_PLAN)
    for scale in scales_for((side, plan), WIDTH_MM, room):
        a = dimensioned(side, side_asks(context, side), scale, _floor_line)
        b = dimensioned(plan, plan_asks(context), scale, _cross)
        if max(a.box.width, b.box.width) <= WIDTH_MM and a.box.height + b.box.height + 8 <= room:
            break
    upper, lower = (a, b) if context.feed.job.limits.projection == "first" else (b, a)
    return stacked(upper, lower, WIDTH_MM), scale_text(scale)


def side_asks(context: Context, drawn: Drawn) -> list[Ask]:
    """Heights and the pitch of the bars; paper x is y of the feed, paper y is z."""
    feed, s = context.feed, context.feed.sizes
    half, box = s.leg_pitch_mm / 2, drawn.box
    return [
        along_x("leg_pitch_mm", -half, half, box.y0, "bottom", text=toleranced(feed, "leg_pitch_mm", 2 * half)),
        along_y("loop_height_mm", 0, s.loop_height_mm, box.x0, "left",
                text=toleranced(feed, "loop_height_mm", s.loop_height_mm)),
        along_y("tap_height_mm", 0, s.tap_height_mm, box.x1, "right",
                text=toleranced(feed, "tap_height_mm", s.tap_height_mm), x1=half),
    ]  # fmt: skip


def plan_asks(context: Context) -> list[Ask]:
    """Loop and bars from above; paper x is y of the feed, paper y is -x."""
    feed, s = context.feed, context.feed.sizes
    r, half = s.loop_diameter_mm / 2, s.leg_pitch_mm / 2
    asks = [
        along_x("loop_diameter_mm", -r, r, 0, "top", text=toleranced(feed, "loop_diameter_mm", 2 * r, DIAMETER)),
        along_y("leg_x_mm", -s.leg_x_mm, 0, half, "right", text=toleranced(feed, "leg_x_mm", s.leg_x_mm), x1=0),
    ]
    t = math.radians(150)
    width = s.wire_mm if s.wire_mm is not None else s.strip_width_mm or 0.0
    at = ((r + width / 2) * math.cos(t), (r + width / 2) * math.sin(t))
    if s.wire_mm is not None:
        asks.append(leader("wire_mm", s.wire_mm, say("view.wire", diameter=DIAMETER + number(s.wire_mm)), at, 150))
    else:
        text = say("view.strip", width=number(width), thickness=number(s.sheet_mm or 0.0))
        asks.append(leader("strip_width_mm", width, text, at, 150))
    return asks


def _floor_line(scale: float, items: tuple[Item, ...]) -> tuple[Item, ...]:
    """The floor's inner face as a wide line with short hatching below."""
    del scale
    box = bounds(items)
    left, right = box.x0 - 4, box.x1 + 4
    out: list[Item] = [Line(left, 0, right, 0, "outline"), Line(0, box.y0 - 3, 0, box.y1 + 3, "centre")]
    x = left + 2
    while x < right:
        out.append(Line(x, 0, x - 2, -2, "hatch"))
        x += 2.5
    return tuple(out)


def _cross(scale: float, items: tuple[Item, ...]) -> tuple[Item, ...]:
    """Centre lines through the axis."""
    del scale
    box = bounds(items).grown(3)
    return (Line(box.x0, 0, box.x1, 0, "centre"), Line(0, box.y0, 0, box.y1, "centre"))


def _axis_and_focus(context: Context, scale: float, items: tuple[Item, ...]) -> tuple[Item, ...]:
    """The axis as a centre line and the phase centre as a cross in a circle."""
    box = bounds(items)
    z = context.feed.predicted.phase_centre_mm * scale
    return (
        Line(0, box.y0 - 4, 0, box.y1 + 4, "centre"),
        Arc(0, z, 1.2, 1.2, role="thin"),
        Line(-2.2, z, 2.2, z, "thin"),
    )


def _purpose(context: Context) -> list[Block]:
    job, p = context.feed.job, context.feed.predicted
    text = say(
        "general.purpose",
        frequency=number(job.target.frequency_mhz, 3),
        diameter=number(job.dish.diameter_m),
        ratio=number(job.dish.focal_ratio, 3),
        form=say(f"form.{job.loop.form}"),
        make=say(f"make.{job.can.make}"),
        efficiency=number(100 * p.aperture_efficiency, 0),
    )
    return [heading(say("general.purpose_head")), *paragraph(text)]


def _sizes(context: Context) -> list[Block]:
    feed = context.feed
    rows = []
    for key in SIZE_KEYS:
        value = getattr(feed.sizes, key)
        if value is None or (key == "can_flats" and value == 0):
            continue
        rows.append((size_name(key), quantity(key, value), _tolerance(feed, key)))
    if feed.sizes.choke is not None:
        for key in ("bore_mm", "depth_mm", "floor_z_mm"):
            value = getattr(feed.sizes.choke, key)
            rows.append((size_name(f"choke.{key}"), quantity(key, value), _tolerance(feed, f"choke.{key}")))
    head = (say("table.size"), say("table.value"), say("table.tolerance"))
    return [heading(say("general.sizes_head")), *table("sizes", head, rows, widths=(84, 43, 43))]


def _tolerance(feed: Feed, size: str) -> str:
    """The size's own tolerance, a word where the general one holds, a dash for a number of pieces."""
    if size == "can_flats":
        return "–"
    own = tolerance_of(feed, size)
    return say("table.general") if own is None else f"±{quantity(size, own)}"


def _performance(context: Context) -> list[Block]:
    p, u = context.feed.predicted, context.feed.settings
    db, mhz, widths = say("unit.db"), say("unit.mhz"), (p.half_power_beamwidth_e_deg, p.half_power_beamwidth_h_deg)
    rows = [
        (
            say("perf.return_loss"),
            _return_loss(p.return_loss_db),
            f"±{number(u.return_loss_uncertainty_db, 1)} {db}" if p.return_loss_db <= BENCH_LIMIT_DB else "",
        ),
        (
            say("perf.bandwidth", level=number(p.bandwidth_return_loss_db, 0)),
            f"{number(p.bandwidth_mhz, 1)} {mhz}",
            say("perf.resonance", value=number(u.resonance_uncertainty_mhz, 2)),
        ),
        (
            say("perf.efficiency"),
            f"{number(100 * p.aperture_efficiency, 1)} %",
            say("perf.spillover", value=number(100 * p.spillover, 1)),
        ),
        (say("perf.taper"), f"{number(p.edge_taper_db, 1)} {db}", ""),
        (say("perf.width"), f"{number(widths[0], 1)}° / {number(widths[1], 1)}°", ""),
        (
            say("perf.directivity"),
            f"{number(p.directivity_dbi, 2)} dBi",
            say("perf.loss", value=number(p.ohmic_loss_db, 3)),
        ),
        (say("perf.phase_centre"), f"z = {number(p.phase_centre_mm, 1)} mm", say("perf.above_floor")),
        (say("perf.system"), f"{number(p.system_noise_k, 1)} K", f"G/T {number(p.g_over_t_db_per_k, 1)} dB/K"),
    ]
    head = (say("perf.head"), say("table.value"), say("perf.remark"))
    return [heading(say("general.performance_head")), *table("performance", head, rows, widths=(75, 42, 53))]


def _return_loss(value_db: float) -> str:
    """A return loss; above what a bench can tell apart only that it is above."""
    if value_db > BENCH_LIMIT_DB:
        return say("perf.over", value=number(BENCH_LIMIT_DB, 0))
    return f"{number(value_db, 1)} {say('unit.db')}"


def checks_result(context: Context) -> list[Block]:
    """One line on the checks: the worst severity in words, red when it is stop."""
    counts = {s: sum(f.severity == s for f in context.findings) for s in ("stop", "caution", "note")}
    words = say("checks.counts", stop=counts["stop"], caution=counts["caution"], note=counts["note"])
    blocks = [heading(say("checks.head"))]
    if counts["stop"]:
        return [*blocks, *paragraph(say("checks.stop") + " " + words, bold=True, colour=RED), gap(2)]
    verdict = say("checks.caution") if counts["caution"] else say("checks.clear")
    return [*blocks, *paragraph(f"{verdict} {words}"), gap(2)]
