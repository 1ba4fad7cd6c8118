"""The loop of sheet metal: a flat ring with a gap and two tabs that fold down into bars and end in feet.

Flat, seen from the aperture (top side), tabs inward; tabs outward leave the ring's outer edge instead::

              .-----------.          loop_diameter   centreline of the band
            /   .-------.   \\        strip_width     width of the band
           |  /  ________ \\__|_ y    leg_pitch       tab middle to tab middle
           | |  |foot|bar :  |       leg_width       width of a tab
           | |   ~~~~~~~~    |_      ' : ' fold lines, inside radius leg_bend_radius
           | |  |foot|bar :  |       gap between the tabs = leg_pitch - leg_width
           |  \\  ~~~~~~~~ /~~|
            \\   '-------'   /
              '-----------'

Folded: the bars' middle at x = leg_x, ring's middle at z = loop_height, feet on the floor and towards -x (the
coax stands on the other side). Where a fold comes closer to the ring than the process' corner radius, a relief
is cut beside the tab.

Depends on: errors, stock, parts (contour, folding, records, bend_rule, floor_plan), sizing.records.
"""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass
from functools import partial

from fabgen.errors import GeometryError
from fabgen.parts.bend_rule import chosen_k, rule_text
from fabgen.parts.contour import (
    Circle,
    Contour,
    Vertex,
    reversed_contour,
    rounded,
    split_arc,
)
from fabgen.parts.floor_plan import FloorHole, coax_axis, connector_reach_mm
from fabgen.parts.folding import (
    LEVEL,
    Bend,
    Face,
    FoldedSheet,
    Frame,
    allowance_mm,
    box_face,
    edge_of,
    flat_pattern,
    folded_solid,
    folded_volume_mm3,
)
from fabgen.parts.kernel import once
from fabgen.parts.making import metal_part
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from fabgen.stock import joints, tables
from fabgen.stock.records import Screw

SOLDERED_FOOT_MM = 2.0
"""Flat length of a foot without a screw, at least: room for a fillet and a tip. Common practice, no source."""


@dataclass(frozen=True)
class TabPlan:
    """One tab, all lengths of its folded form. ``sign`` is -1 for tabs inward, +1 outward. A foot that is soldered has
    no screw, and its hole is 0."""

    sign: float
    root_x_mm: float
    near_y_mm: float
    far_y_mm: float
    bar_mm: float
    foot_mm: float
    foot_width_mm: float
    foot_hole_mm: float
    hole_from_bend_mm: float
    screw: str | None


def foot_screw(feed: Feed) -> Screw | None:
    """Screw of the feet; None where they are soldered. Raises GeometryError where the metal takes no solder."""
    s = feed.sizes
    screw = joints.foot_screw(s.leg_width_mm, s.leg_pitch_mm, s.sheet_mm or 0.0, feed.job.wavelength_mm)
    metal = tables.metal(feed.job.loop.metal)
    if screw is None and not metal.solderable:
        raise GeometryError(
            f"bars {s.leg_width_mm:g} mm wide at a pitch of {s.leg_pitch_mm:g} mm take no foot screw and {metal.name} "
            "takes no solder; use a loop of brass or copper, or a larger pitch"
        )
    return screw


def _foot_width(feed: Feed, pad_mm: float) -> float:
    """The bar's width, or the pad's with shoulders long enough for their two roundings."""
    width, corner = feed.sizes.leg_width_mm, feed.job.limits.corner_radius_mm
    if pad_mm < width + 0.1:
        return width
    return max(pad_mm, width + math.sqrt(2) * (2 * corner * math.tan(math.pi / 8) + 0.1))


def tab_plan(feed: Feed) -> TabPlan:
    """Lengths of the tabs from the feed's sizes.

    Raises GeometryError when the loop stands too low for two bends and a straight bar between.
    """
    s = feed.sizes
    if s.sheet_mm is None or s.tabs is None:
        raise GeometryError("this feed has a wire loop; a sheet loop needs loop.form = 'sheet'")
    t, r = s.sheet_mm, s.leg_bend_radius_mm
    mid = r + t / 2
    sign = -1.0 if s.tabs == "inward" else 1.0
    bar = s.loop_height_mm - 2 * mid - t / 2
    if bar < 2 * t:
        raise GeometryError(
            f"a loop {s.loop_height_mm:g} mm above the floor leaves {bar:.2f} mm of straight bar between two bends "
            f"of {r:g} mm inside radius; use a bend radius of {max(0.0, r - (2 * t - bar) / 2):.2f} mm or thinner sheet"
        )
    screw = foot_screw(feed)
    half = s.leg_width_mm / 2
    ends = s.leg_x_mm - sign * mid, s.leg_pitch_mm / 2 - half, s.leg_pitch_mm / 2 + half
    if screw is None:
        foot = max(SOLDERED_FOOT_MM, tables.limit("flange_min_thicknesses", feed.job.overrides).value * t)
        return TabPlan(sign, *ends, bar, foot, s.leg_width_mm, 0.0, 0.0, None)
    hole = screw.clearance_medium_mm
    from_bend = max(hole / 2 + 2 * t, screw.head_mm / 2 + 0.5)
    # The screw's head below must clear the connector's flange or its spacer.
    reach = connector_reach_mm(feed) + screw.head_mm / 2 + 0.5
    from_bend = max(from_bend, s.leg_x_mm - mid - (coax_axis(feed)[0] - reach))
    foot = from_bend + max(hole / 2 + 1.5 * t, screw.head_mm / 2)
    width = _foot_width(feed, joints.foot_pad_mm(screw, t))
    return TabPlan(sign, *ends, bar, foot, width, hole, from_bend, screw.key)


def foot_holes(feed: Feed) -> tuple[FloorHole, ...]:
    """Screw holes of the feet in the floor; none for feet that are soldered."""
    plan, s = tab_plan(feed), feed.sizes
    if plan.screw is None:
        return ()
    x = s.leg_x_mm - s.leg_bend_radius_mm - (s.sheet_mm or 0.0) / 2 - plan.hole_from_bend_mm
    y = s.leg_pitch_mm / 2
    return tuple(FloorHole("loop foot", Circle(x, side * y, plan.foot_hole_mm)) for side in (1, -1))


def _beside_tab(feed: Feed, plan: TabPlan, edges: tuple[float, float], zone_mm: float) -> list[Vertex]:
    """From the tab's root along its far side to the ring's edge of radius ``edges[0]``, on the +y half; the last
    vertex lies on the ring's edge.

    A fillet of the process' corner radius where the bend zone keeps clear of it; else a relief slot with a round
    end, as wide as the thickness or 1 mm, that reaches past the fold line by r + t.
    """
    corner, g = feed.job.limits.corner_radius_mm, plan.sign
    across, reach = plan.far_y_mm + corner, edges[0] + g * corner
    if corner > 0 and across < reach:
        # The fillet's centre is ``corner`` away from the tab's side and from the ring's edge.
        x = math.sqrt(reach**2 - across**2)
        if g * (plan.root_x_mm - x) >= 0:
            angle = math.degrees(math.atan2(across, x))
            sweep = angle + 90.0 if g < 0 else angle - 90.0
            touch = Vertex(edges[0] * x / reach, edges[0] * across / reach)
            return [*split_arc((x, across), corner, -90.0, sweep), touch]
    return _relief(feed, plan, edges, zone_mm)


def _relief(feed: Feed, plan: TabPlan, edges: tuple[float, float], zone_mm: float) -> list[Vertex]:
    s, g = feed.sizes, plan.sign
    t = s.sheet_mm or 0.0
    least = tables.limit("relief_min_mm", feed.job.overrides).value
    slot = max(t, least, 2 * feed.job.limits.corner_radius_mm)
    across = plan.far_y_mm + slot
    if across >= edges[0]:
        raise GeometryError(
            f"the relief beside a tab at y = {plan.far_y_mm:.1f} mm does not fit a ring edge of {edges[0]:.1f} mm "
            "radius; use a smaller leg pitch or a narrower strip"
        )
    edge_x = math.sqrt(edges[0] ** 2 - across**2)
    fold = plan.root_x_mm + g * zone_mm / 2
    past = fold - g * (s.leg_bend_radius_mm + t)
    tips = (past, plan.root_x_mm - g * slot / 2, edge_x - g * (slot / 2 + 0.2))
    tip = min(tips) if g > 0 else max(tips)
    room = g * (tip - math.sqrt(max(0.0, edges[1] ** 2 - plan.far_y_mm**2)))
    width = s.strip_width_mm or 0.0
    if room < max(0.4 * width, 2 * t):
        raise GeometryError(
            f"the relief of the fold leaves {room:.2f} mm of a band {width:g} mm wide and it needs "
            f"{max(0.4 * width, 2 * t):.2f} mm; move the bars away from the band or use a wider strip"
        )
    centre = (tip + g * slot / 2, plan.far_y_mm + slot / 2)
    arc = split_arc(centre, slot / 2, -90.0, -180.0 * g)
    return [*arc, Vertex(centre[0], across), Vertex(edge_x, across)]


def _ring(feed: Feed, plan: TabPlan, zone_mm: float) -> Contour:
    """Outline of the ring with the tabs' roots, counter-clockwise."""
    s = feed.sizes
    width = s.strip_width_mm or 0.0
    inner, outer = s.loop_diameter_mm / 2 - width / 2, s.loop_diameter_mm / 2 + width / 2
    edges = (inner, outer) if plan.sign < 0 else (outer, inner)
    near, root = plan.near_y_mm, plan.root_x_mm
    side = _beside_tab(feed, plan, edges, zone_mm)
    touch = side[-1]
    start = math.degrees(math.atan2(touch.y_mm, touch.x_mm))
    half = [Vertex(root, near), Vertex(root, plan.far_y_mm), *side[:-1]]
    half += [*split_arc((0.0, 0.0), edges[0], start, 180.0 - start), Vertex(-edges[0], 0.0)]
    # The same path mirrored in the x axis and run backwards keeps its bulges.
    steps = list(itertools.pairwise(half))
    back = [Vertex(b.x_mm, -b.y_mm, a.bulge) for a, b in reversed(steps)]
    gap = math.degrees(math.asin(near / edges[1]))
    plain = split_arc((0.0, 0.0), edges[1], -gap, 2 * gap - 360.0)
    end = Vertex(edges[1] * math.cos(math.radians(gap)), near)
    ring = Contour((*half[:-1], *back, Vertex(root, -near), *plain, end))
    return ring if plan.sign > 0 else reversed_contour(ring)


def folded_loop(feed: Feed) -> FoldedSheet:
    """Faces and bends of the loop: ring, and for each side a bar and a foot."""
    s, plan = feed.sizes, tab_plan(feed)
    t, r, width = s.sheet_mm or 0.0, s.leg_bend_radius_mm, s.leg_width_mm
    temper = tables.temper(feed.job.loop.metal, feed.job.loop.temper)
    k = chosen_k(feed.job.limits, temper, r, t)
    down = Bend(-90.0, r, k, 2)
    zone = allowance_mm(down, t)
    _refuse_crossing(feed, plan, zone)
    ring = _ring(feed, plan, zone)
    out = Bend(90.0 if plan.sign < 0 else -90.0, r, k, 1)
    foot = _foot(feed, plan)
    holes = () if plan.screw is None else (Circle(width / 2, plan.hole_from_bend_mm, plan.foot_hole_mm),)
    faces = [Face("ring", ring)]
    root, near, far = plan.root_x_mm, plan.near_y_mm, plan.far_y_mm
    for name, a, b in (("+y", near, far), ("-y", -far, -near)):
        ends = ((root, a), (root, b)) if plan.sign > 0 else ((root, b), (root, a))
        edge = edge_of(ring, *ends)
        faces.append(Face(f"bar {name}", box_face(width, plan.bar_mm), (), "ring", (0, edge), down))
        faces.append(Face(f"foot {name}", foot, holes, f"bar {name}", (0, 2), out))
    return FoldedSheet(tuple(faces), t)


def _foot(feed: Feed, plan: TabPlan) -> Contour:
    """Outline of a foot: as wide as its bar, or widening at 45 degrees to the pad that its screw needs."""
    width, more = feed.sizes.leg_width_mm, (plan.foot_width_mm - feed.sizes.leg_width_mm) / 2
    end, inner = min(2.0, width / 4), feed.job.limits.corner_radius_mm
    low, high = (-more, plan.foot_mm, end), (width + more, plan.foot_mm, end)
    if more == 0.0:
        return rounded([(0, 0, 0), (width, 0, 0), high, low])
    # The shoulders begin clear of the bend by the roundings that they need.
    rise = 2 * inner * math.tan(math.pi / 8) + 0.2
    return rounded(
        [
            (0, 0, 0), (width, 0, 0), (width, rise, inner), (width + more, rise + more, inner), high, low,
            (-more, rise + more, inner), (0, rise, inner),
        ]
    )  # fmt: skip


def _refuse_crossing(feed: Feed, plan: TabPlan, zone_mm: float) -> None:
    """A tab that leaves the ring inwards must end before the ring's far side."""
    if plan.sign > 0:
        return
    s = feed.sizes
    inner = (s.loop_diameter_mm - (s.strip_width_mm or 0.0)) / 2
    web = max(1.0, s.sheet_mm or 0.0)
    need = 2 * zone_mm + plan.bar_mm + plan.foot_mm
    outside = plan.far_y_mm + (plan.foot_width_mm - s.leg_width_mm) / 2
    have = plan.root_x_mm + math.sqrt(max(0.0, inner**2 - outside**2)) - web
    if need > have:
        raise GeometryError(
            f"a tab inward needs {need:.1f} mm of flat length but the ring has {have:.1f} mm of room; "
            f"lower the loop by {need - have:.1f} mm or put the tabs outward"
        )


def _tools(plan: TabPlan) -> str:
    """What the folds ask of the tools: the ring's band stands beside the fold lines, the feet beside the die."""
    where = "inside the ring" if plan.sign < 0 else "outside the ring"
    return (
        f"feet first, then both bars at once, {where}: punch and die no longer than {2 * plan.far_y_mm:.0f} mm and "
        f"reaching no more than {plan.bar_mm:.0f} mm beside the fold, or two bars of that length in a vice"
    )


def loop_sheet(feed: Feed) -> Part:
    """The sheet loop as a part in the feed's frame; the top side is the one seen from the aperture."""
    s, plan = feed.sizes, tab_plan(feed)
    sheet = folded_loop(feed)
    base = Frame((0.0, 0.0, s.loop_height_mm), LEVEL.u, LEVEL.v, LEVEL.n)
    sizes: tuple[tuple[str, float], ...] = (
        ("loop_diameter_mm", s.loop_diameter_mm),
        ("strip_width_mm", s.strip_width_mm or 0.0),
        ("loop_height_mm", s.loop_height_mm),
        ("leg_x_mm", s.leg_x_mm),
        ("leg_pitch_mm", s.leg_pitch_mm),
        ("leg_width_mm", s.leg_width_mm),
        ("leg_bend_radius_mm", s.leg_bend_radius_mm),
        ("foot_mm", plan.foot_mm),
        ("foot_width_mm", plan.foot_width_mm),
    )
    feet = "feet: soldered flat to the floor"
    if plan.screw is not None:
        sizes += (("foot_hole_mm", plan.foot_hole_mm), ("hole_from_bend_mm", plan.hole_from_bend_mm))
        feet = f"feet: {plan.screw} screws from below, nuts on the feet"
    return metal_part(
        "loop",
        "loop with bars",
        ("laser", "fold"),
        (feed.job.loop.metal, feed.job.loop.temper),
        feed,
        volume_mm3=folded_volume_mm3(sheet),
        sizes=sizes,
        flat=flat_pattern(sheet, "side towards the aperture"),
        thickness_mm=s.sheet_mm,
        solid=once(partial(folded_solid, sheet, base, "loop")),
        notes=(rule_text(feed.job.limits), _tools(plan), feet),
    )
