"""Where the holes of the floor and the bolts of the flange are: one plan for every make of can.

Seen from the aperture (from +z), x to the gap of the loop::

        y                 drain
        ^            o           o          flange holes on bolt_circle
        |       o    .-----------.   o
        |           /   (coax)    \\
        |          |     o bar +y  |
        |          |     o bar -y  |-- gap of the loop, +x
        |           \\             /
        |       o    '-----------'   o
        |            o           o
        +-----> x

Depends on: errors, stock, parts.contour, sizing.records.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from fabgen.errors import GeometryError
from fabgen.parts.contour import Circle, Contour, Outline, Point, Vertex, split_arc
from fabgen.sizing.records import Feed
from fabgen.stock import tables

Purpose = Literal["coax", "connector screw", "loop foot", "drain"]
DRAIN_HOLE_MM = 3.0
"""Large enough that a drop does not bridge it; far under a wavelength. Common practice, no source."""
FOOT_CLEARANCE_MM = 0.2
"""On the diameter of a wire's foot hole: the wire goes in and solder draws in. Common practice."""
COAX_CLEARANCE_MM = 0.2
"""On the diameter of a hole for the coax alone. Common practice, no source."""
PLATE_MM = 0.5
"""Thickness of a capacitor plate. Common practice, no source."""
MARK_MM = 2.0
"""Depth and half width of the notch that marks the gap's side. Common practice, no source."""
HEAD_GAP_MM = 0.2
"""Between a screw head and the flat of a bar. Common practice, no source."""
LEAST_WEB_MM = 1.2
"""Between two openings of the floor: three printed lines; in sheet the checks hold it against the thickness."""
SPACER_WEB_MM = 2.0
"""Metal around the bore of a connector's spacer. Common practice, no source."""
HEAD_CLEARANCE_MM = 2.0
"""Room for a washer's rim and a socket key between a screw head and the wall. Common practice, no source."""


@dataclass(frozen=True)
class FloorHole:
    """An opening through the floor and what it is for."""

    purpose: Purpose
    outline: Outline


@dataclass(frozen=True)
class FlangePlan:
    """The mounting flange: its outline, thickness, screw and holes. ``mark`` is the notch in the edge on +x
    that shows where the loop's gap is; it is not in ``outline``, ``marked_outline`` has both."""

    outline: Outline
    mark: Contour
    width_mm: float
    thickness_mm: float
    bolt_circle_mm: float
    screw: str
    holes: tuple[Circle, ...]


def leg_depth_mm(feed: Feed) -> float:
    """Thickness of a bar along x: the wire's diameter or the sheet."""
    sizes = feed.sizes
    return float(sizes.wire_mm if sizes.wire_mm is not None else sizes.sheet_mm or 0.0)


def coax_axis(feed: Feed) -> Point:
    """Axis of the coax: it touches the bar at +y on the side away from the axis of the can.

    The foot of a sheet loop lies on the other side. For bars of strip the coax stands near the strip's inner
    edge, so that the crossing is as short as between round bars. The capacitor's tube or plates, which lie on the
    other bar in line with the coax, may be the thicker of the two and then set the distance.
    """
    sizes, coax, capacitor = feed.sizes, tables.coax(feed.job.cable.coax), feed.capacitor
    sleeve = capacitor.outer_mm + 2 * capacitor.tube_wall_mm
    if capacitor.form != "sleeve":
        # Two plates and the film between the bar and the centre conductor, twice as for a radius.
        sleeve = coax.inner_mm + 2 * (2 * PLATE_MM + capacitor.film_mm)
    beside = max(coax.outer_mm, sleeve) / 2
    if sizes.conductor != "wire" and on_spacer(feed):
        # The screws stand level with the coax, beside the flat of the bar; solder fills the gap.
        screw = tables.screw(tables.connector(feed.job.cable.connector).screw)
        beside = max(beside, screw.head_mm / 2 + HEAD_GAP_MM)
    x = sizes.leg_x_mm + leg_depth_mm(feed) / 2 + beside
    y = sizes.leg_pitch_mm / 2
    if sizes.conductor != "wire":
        y -= max(0.0, (sizes.leg_width_mm - coax.outer_mm) / 2)
    return x, y


def lining_mm(feed: Feed) -> float:
    """Thickness of the lining with its adhesive; 0 for a can of metal."""
    if feed.job.can.make != "printed":
        return 0.0
    lining = tables.lining(feed.job.can.lining)
    return lining.thickness_mm + lining.adhesive_mm


def floor_bottom_mm(feed: Feed) -> float:
    """Height of the floor's outer face, which the connector stands against."""
    return -lining_mm(feed) - feed.sizes.floor_mm


def on_spacer(feed: Feed) -> bool:
    """Whether the connector stands on a spacer: its bore is so much wider than the coax that the floor around
    the bar's foot would be gone."""
    cable = feed.job.cable
    return tables.connector(cable.connector).panel_bore_mm > tables.coax(cable.coax).outer_mm + 1.0


def coax_bore_mm(feed: Feed) -> float:
    """Diameter of the hole that the coax comes through."""
    cable = feed.job.cable
    if on_spacer(feed):
        return tables.coax(cable.coax).outer_mm + COAX_CLEARANCE_MM
    return tables.connector(cable.connector).panel_bore_mm


def connector_reach_mm(feed: Feed) -> float:
    """How far the connector, or its spacer, reaches from the coax towards -x on the floor's outer face."""
    connector = tables.connector(feed.job.cable.connector)
    if on_spacer(feed) and feed.sizes.conductor != "wire":
        # Short towards the bars, where the feet have their screws.
        return connector.panel_bore_mm / 2 + SPACER_WEB_MM
    if connector.hole_count == 4:
        return connector.flange_width_mm / math.sqrt(2)
    return connector.flange_height_mm / 2


def connector_turn_deg(feed: Feed) -> float:
    """Turn of the connector about the coax, clockwise seen from the aperture.

    The head of the screw beside the bar of a sheet loop then clears the bar's flat, and the coax may touch it. A
    connector on a spacer is not turned: its coax stands off instead.
    """
    sizes, connector = feed.sizes, tables.connector(feed.job.cable.connector)
    if sizes.conductor == "wire" or on_spacer(feed):
        return 0.0
    x, y = coax_axis(feed)
    radius, reach = tables.screw(connector.screw).head_mm / 2, _hole_radius_mm(feed)
    beyond_bar = y + reach - radius - (sizes.leg_pitch_mm + sizes.leg_width_mm) / 2
    aside = sizes.leg_x_mm + leg_depth_mm(feed) / 2 + radius + HEAD_GAP_MM - x
    if connector.hole_count == 0 or beyond_bar > HEAD_GAP_MM or aside <= 0:
        return 0.0
    # In whole degrees, for the drawing.
    return float(math.ceil(math.degrees(math.asin(min(aside / reach, 1.0)))))


def _hole_radius_mm(feed: Feed) -> float:
    """Distance of a hole of the connector's flange from the coax."""
    connector = tables.connector(feed.job.cable.connector)
    return connector.hole_pitch_mm / (2.0 if connector.hole_count == 2 else math.sqrt(2))


def turned_about_coax(feed: Feed, offset: Point) -> Point:
    """A point of the connector, given from its axis, in the feed's frame."""
    x, y = coax_axis(feed)
    a = math.radians(connector_turn_deg(feed))
    u, v = offset
    return x + u * math.cos(a) + v * math.sin(a), y - u * math.sin(a) + v * math.cos(a)


def connector_hole_points(feed: Feed) -> tuple[Point, ...]:
    """Centres of all holes of the connector's flange about the coax.

    A square flange stands on its corner, holes on x and y, and a flange with two holes lies along y, so that
    the foot of the bar beside the coax has a hole's width to itself; beside a bar of strip it is turned a little.
    """
    connector, r = tables.connector(feed.job.cable.connector), _hole_radius_mm(feed)
    four: tuple[Point, ...] = ((r, 0.0), (0.0, r), (-r, 0.0), (0.0, -r))
    two: tuple[Point, ...] = ((0.0, r), (0.0, -r))
    offsets = {4: four, 2: two}.get(connector.hole_count, ())
    return tuple(turned_about_coax(feed, offset) for offset in offsets)


def connector_screw_holes(feed: Feed) -> tuple[FloorHole, ...]:
    """Screw holes of the connector in the floor.

    A hole is left out where it would meet the bar's foot or reach beyond a short spacer, or where its screw head
    would stand in a bar; three screws and the solder at the coax hold the connector then.
    """
    connector = tables.connector(feed.job.cable.connector)
    head = tables.screw(connector.screw).head_mm / 2
    edge = coax_axis(feed)[0] - connector_reach_mm(feed)
    return tuple(
        FloorHole("connector screw", Circle(*at, connector.hole_mm))
        for at in connector_hole_points(feed)
        if at[0] > edge + connector.hole_mm / 2 + 0.5
        and not _in_a_bar(feed, at, head)
        and not _in_the_slot(feed, at, connector.hole_mm / 2)
    )


def _in_the_slot(feed: Feed, at: Point, radius_mm: float) -> bool:
    """Whether a hole leaves less than the least web to the slot of coax and wire foot."""
    sizes = feed.sizes
    if sizes.wire_mm is None:
        return False
    x, y = coax_axis(feed)
    width = max(coax_bore_mm(feed), sizes.wire_mm + FOOT_CLEARANCE_MM)
    along = min(max(at[0], sizes.leg_x_mm), x)
    return math.hypot(at[0] - along, at[1] - y) < radius_mm + width / 2 + LEAST_WEB_MM


def _in_a_bar(feed: Feed, at: Point, radius_mm: float) -> bool:
    """Whether a screw head reaches into a bar, or where the foot of a sheet loop may lie."""
    sizes = feed.sizes
    for middle in (sizes.leg_pitch_mm / 2, -sizes.leg_pitch_mm / 2):
        if sizes.wire_mm is not None:
            if math.hypot(at[0] - sizes.leg_x_mm, at[1] - middle) < radius_mm + sizes.wire_mm / 2:
                return True
            continue
        beyond = max(0.0, at[0] - sizes.leg_x_mm - leg_depth_mm(feed) / 2)
        aside = max(0.0, abs(at[1] - middle) - sizes.leg_width_mm / 2)
        if math.hypot(beyond, aside) < radius_mm:
            return True
    return False


def coax_holes(feed: Feed) -> tuple[FloorHole, ...]:
    """What the coax and the feet of a wire loop need.

    The coax touches the bar at +y, so its hole and the hole of that bar's foot are one slot with round ends.
    """
    sizes = feed.sizes
    x, y = coax_axis(feed)
    bore = coax_bore_mm(feed)
    if sizes.wire_mm is None:
        return (FloorHole("coax", Circle(x, y, bore)),)
    foot = sizes.wire_mm + FOOT_CLEARANCE_MM
    width = max(bore, foot)
    slot = (
        *split_arc((x, y), width / 2, -90.0, 180.0),
        Vertex(x, y + width / 2),
        *split_arc((sizes.leg_x_mm, y), width / 2, 90.0, 180.0),
        Vertex(sizes.leg_x_mm, y - width / 2),
    )
    return (
        FloorHole("coax", Contour(slot)),
        FloorHole("loop foot", Circle(sizes.leg_x_mm, -y, foot)),
    )


def drain_holes(feed: Feed) -> tuple[FloorHole, ...]:
    """Up to four holes close to the wall, half way between the axes so that no seam meets them.

    In a small can the ones under the connector or beside the bars are left out.
    """
    if not feed.job.can.drain_holes:
        return ()
    radius = feed.sizes.can_bore_mm / 2 - 1.5 * DRAIN_HOLE_MM
    at = radius * math.sqrt(0.5)
    points = ((at, at), (-at, at), (-at, -at), (at, -at))
    return tuple(FloorHole("drain", Circle(*p, DRAIN_HOLE_MM)) for p in points if _drains_freely(feed, p))


def _drains_freely(feed: Feed, at: Point) -> bool:
    sizes = feed.sizes
    reach = max(connector_reach_mm(feed), tables.connector(feed.job.cable.connector).flange_width_mm / math.sqrt(2))
    bars = ((sizes.leg_x_mm, side * sizes.leg_pitch_mm / 2, sizes.leg_width_mm) for side in (1, -1))
    keep = ((*coax_axis(feed), reach), *bars)
    return all(math.hypot(at[0] - x, at[1] - y) > r + DRAIN_HOLE_MM / 2 + LEAST_WEB_MM for x, y, r in keep)


def flange_plan(feed: Feed, outer_mm: float) -> FlangePlan | None:
    """The flange around a body ``outer_mm`` wide (across corners where it has flats)."""
    flange = feed.job.can.flange
    if flange.pattern == "none":
        return None
    screw = tables.screw(flange.screw)
    room = screw.head_mm + 2 * HEAD_CLEARANCE_MM
    edge = max(1.5 * screw.clearance_medium_mm, screw.head_mm / 2 + 1.0)
    least = outer_mm + room
    if flange.pattern == "square" and flange.count > 4:
        least *= math.sqrt(2)
    circle = flange.bolt_circle_mm or math.ceil(least)
    if circle < outer_mm + screw.head_mm:
        raise GeometryError(
            f"can.flange.bolt_circle_mm = {circle:g} puts the heads of {screw.key} into a can "
            f"{outer_mm:.1f} mm wide; give {math.ceil(least)} mm or more, or leave it out"
        )
    thickness = flange.thickness_mm or feed.sizes.floor_mm
    layout = _circle_holes if flange.pattern == "circle" else _square
    holes = layout(flange.count, circle)
    drilled = tuple(Circle(x, y, screw.clearance_medium_mm) for x, y in holes)
    if flange.pattern == "circle":
        width = circle + 2 * edge
        return FlangePlan(Circle(0, 0, width), _notch(width), width, thickness, circle, screw.key, drilled)
    # The notch must not reach the wall.
    width = max(circle / math.sqrt(2) + 2 * edge, outer_mm + 2 * (MARK_MM + 1.5))
    return FlangePlan(_rounded_square(width, edge), _notch(width), width, thickness, circle, screw.key, drilled)


def marked_outline(plan: FlangePlan) -> Contour:
    """The flange's outline with the notch, for cutting from sheet."""
    tip = Vertex(plan.width_mm / 2 - MARK_MM, 0.0)
    if isinstance(plan.outline, Circle):
        radius = plan.width_mm / 2
        # Where the notch's 45 degree sides meet the circle: (tip + t)^2 + t^2 = radius^2.
        half = (math.sqrt(2 * radius**2 - tip.x_mm**2) - tip.x_mm) / 2
        half_deg = math.degrees(math.asin(half / radius))
        end = math.radians(-half_deg)
        arcs = split_arc((0.0, 0.0), radius, half_deg, 360.0 - 2 * half_deg)
        return Contour((*arcs, Vertex(radius * math.cos(end), radius * math.sin(end)), tip))
    edge = plan.width_mm / 2
    return Contour((*plan.outline.vertices, Vertex(edge, -MARK_MM), tip, Vertex(edge, MARK_MM)))


def _notch(width_mm: float) -> Contour:
    """A right-angled notch whose corners lie on the flange's edge; for a round edge it reaches beyond it."""
    edge = width_mm / 2 + 1.0
    half = MARK_MM + 1.0
    return Contour((Vertex(width_mm / 2 - MARK_MM, 0.0), Vertex(edge, -half), Vertex(edge, half)))


def _circle_holes(count: int, circle_mm: float) -> tuple[Point, ...]:
    # Half a pitch off the x axis: the gap's marker on +x stays free.
    angles = (2 * math.pi * (i + 0.5) / count for i in range(count))
    return tuple((circle_mm / 2 * math.cos(a), circle_mm / 2 * math.sin(a)) for a in angles)


def _square(count: int, circle_mm: float) -> tuple[Point, ...]:
    if count % 4:
        raise GeometryError(
            f"can.flange.pattern = 'square' with count = {count}: a square has the same number of screws on "
            "each side; give count = 4, 8, 12 or 16, or pattern = 'circle'"
        )
    side, per_side = circle_mm / math.sqrt(2), count // 4
    points: list[Point] = []
    for quarter in range(4):
        turn = quarter * math.pi / 2
        for i in range(per_side):
            x, y = side / 2, side / 2 - side * i / per_side
            points.append((x * math.cos(turn) - y * math.sin(turn), x * math.sin(turn) + y * math.cos(turn)))
    return tuple(points)


def _rounded_square(width_mm: float, radius_mm: float) -> Contour:
    inner = width_mm / 2 - radius_mm
    vertices: list[Vertex] = []
    for i, (a, b) in enumerate(((1, 1), (-1, 1), (-1, -1), (1, -1))):
        vertices += split_arc((a * inner, b * inner), radius_mm, 90.0 * i, 90.0)
        end = math.radians(90.0 * (i + 1))
        vertices.append(
            Vertex(a * inner + radius_mm * math.cos(end), b * inner + radius_mm * math.sin(end))
        )
    return Contour(tuple(vertices))
