"""The printed can: floor, wall and flange in one, standing on its floor on the bed without support.

Section through the axis; the lining (thin, drawn ``=``) is between the plastic and the sizes of the feed::

              |<----- can_bore ----->|          z = can_depth
            | |                      | |
       wall |=|                      |=|        ledge with inserts and bead: see shell
            | |                      | |
            | |======================| |        z = 0, inner face of the lining
     .------' '----------------------' '------.
     |o           floor                      o|  flange, flush with the floor's outer face
     '----------------------------------------'
     |<--------------- flange --------------->|

Larger than the bed it comes in pieces: see split and pieces.

Depends on: errors, stock, parts (contour, records, kernel, shell, split, pieces, print_rules, printed,
floor_plan, floor_holes), sizing.records.
"""

from __future__ import annotations

import math
from functools import cache

from fabgen.parts import kernel
from fabgen.parts.contour import Circle, Outline, Point, bounds_mm
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.floor_plan import FlangePlan, coax_axis, flange_plan, floor_bottom_mm, lining_mm
from fabgen.parts.pieces import Joint
from fabgen.parts.print_rules import PrintRules, print_rules
from fabgen.parts.printed import Printed, ear_fasteners, printed_parts
from fabgen.parts.records import Part
from fabgen.parts.screws import inserts
from fabgen.parts.shell import Body, Channel, Ledge, shell_solid, shell_volume_mm3
from fabgen.parts.split import EAR_HALF_MM, Envelope, Split, plan_split
from fabgen.sizing.records import Feed
from fabgen.stock import tables

CHOKE_SCREW = "M3"
CHOKE_SCREWS = 6
INSERT_DEPTH_MM = 1.0
"""The insert's hole is this much deeper than the insert, for the plastic that it pushes down. Maker sheets."""
LEDGE_CLEAR_MM = 0.5
"""Between the ledge's cone and the flange."""
BEAD_MM = 0.6
"""Height of the bead that the radome cap snaps over. Common practice, no source."""
BEAD_BELOW_RIM_MM = 4.0
SKIRT_MM = 8.0
"""How far the radome cap reaches over the wall."""


def as_printed(outline: Outline, rules: PrintRules) -> Outline:
    """A round hole with the printer's allowance; other outlines are drawn with their clearance already.

    A hole too small to print open stays as small and is drilled: it places a bar, and a wider one would not.
    """
    if isinstance(outline, Circle):
        return Circle(outline.x_mm, outline.y_mm, outline.diameter_mm + rules.hole_mm)
    return outline


def ledge_of(feed: Feed) -> Ledge | None:
    """The ledge that carries the choke: wide enough for an insert with its plastic on both sides.

    None without a choke, and where the choke's floor is too low for a ledge: then can and choke are one piece.
    """
    choke, rules = feed.sizes.choke, print_rules(feed)
    if choke is None:
        return None
    screw = tables.screw(CHOKE_SCREW)
    ledge = Ledge(
        top_mm=choke.floor_z_mm - lining_mm(feed) - feed.sizes.floor_mm,
        width_mm=screw.insert_hole_mm + 2 * rules.insert_wall_mm,
        height_mm=screw.insert_length_mm + INSERT_DEPTH_MM + rules.insert_wall_mm,
    )
    flange_top = floor_bottom_mm(feed) + (feed.job.can.flange.thickness_mm or feed.sizes.floor_mm)
    return ledge if ledge.top_mm - ledge.height_mm >= flange_top + LEDGE_CLEAR_MM else None


def body_of(feed: Feed) -> Body:
    """The plastic's sizes: the bore is drawn larger and the floor lower by the lining."""
    sizes, lining = feed.sizes, lining_mm(feed)
    inner = sizes.can_bore_mm / 2 + lining
    outer = inner + sizes.wall_mm
    ledge, channel = ledge_of(feed), None
    widest = outer + (ledge.width_mm if ledge else 0.0)
    if sizes.choke is not None and ledge is None:
        bore = sizes.choke.bore_mm / 2 + lining
        floor, rim = sizes.choke.floor_z_mm - lining, sizes.choke.floor_z_mm + sizes.choke.depth_mm
        channel = Channel(bore, bore + sizes.wall_mm, floor, rim)
        widest = channel.wall_radius_mm
    return Body(
        inner_radius_mm=inner,
        outer_radius_mm=outer,
        floor_top_mm=-lining,
        floor_bottom_mm=floor_bottom_mm(feed),
        rim_mm=sizes.can_depth_mm,
        # The flange's screws stay in reach beside the ledge.
        flange=flange_plan(feed, 2 * widest),
        ledge=ledge,
        channel=channel,
        bead_mm=BEAD_MM if feed.job.can.radome else 0.0,
        bead_z_mm=sizes.can_depth_mm - BEAD_BELOW_RIM_MM,
    )


def openings(feed: Feed) -> tuple[Outline, ...]:
    """All openings through the floor as printed."""
    rules = print_rules(feed)
    return tuple(as_printed(hole.outline, rules) for hole in floor_holes(feed))


def choke_screw_points(feed: Feed, body: Body) -> tuple[Point, ...]:
    """Centres of the choke's screws, half a pitch off +x."""
    if body.ledge is None:
        return ()
    radius = body.outer_radius_mm + body.ledge.width_mm / 2
    return kernel.circle_points(CHOKE_SCREWS, radius, 180.0 / CHOKE_SCREWS)


def can_printed(feed: Feed) -> tuple[Part, ...]:
    """The printed can as parts: one, or several pieces where it is larger than the bed; then the screws of
    their joints and the inserts for the choke.

    Raises GeometryError when it cannot sensibly be cut into pieces for the bed.
    """
    rules, body, sizes = print_rules(feed), body_of(feed), feed.sizes
    envelope = _envelope(feed, body, rules)
    joint = Joint(envelope, plan_split(envelope, rules), rules, sizes.wall_mm, sizes.floor_mm, _ear_top(body))
    holes, flange_holes = openings(feed), _flange_holes(body, rules)
    at = choke_screw_points(feed, body)

    @cache
    def whole() -> kernel.Shape:
        solid = shell_solid(body, holes, flange_holes, "printed can")
        return kernel.cut(solid, *_insert_holes(body, at), what="printed can")

    lining = tables.lining(feed.job.can.lining)
    printed = Printed(
        key="can",
        name="printed can",
        plastic=feed.job.can.plastic,
        sizes=(
            ("bore_before_lining_mm", 2 * body.inner_radius_mm),
            ("can_bore_mm", sizes.can_bore_mm),
            ("can_depth_mm", sizes.can_depth_mm),
            ("wall_mm", sizes.wall_mm),
            ("floor_mm", sizes.floor_mm),
        ),
        tolerance=f"bore and depth +-{rules.tolerance_mm:g} mm after lining",
        finish=f"lined inside with {lining.name}, {lining_mm(feed):g} mm thick, from the floor to the rim",
        notes=("print floor down, without support",),
        volume_mm3=shell_volume_mm3(body, holes, flange_holes) - _insert_volume(len(at)),
        joint=joint,
        whole=whole,
        tied_by="the screwed choke ring" if at else "a strip of glass cloth laid in epoxy under the floor",
    )
    parts = [*printed_parts(printed), *ear_fasteners(printed)]
    if at and body.ledge is not None:
        parts.append(inserts("insert-choke", CHOKE_SCREW, at, body.ledge.top_mm))
    return tuple(parts)


def can_split(feed: Feed) -> Split:
    """How the can is cut for the bed."""
    rules = print_rules(feed)
    return plan_split(_envelope(feed, body_of(feed), rules), rules)


def one_piece_bed_mm(feed: Feed) -> tuple[float, float]:
    """Side and height of the least bed that takes the can in one piece."""
    rules = print_rules(feed)
    envelope = _envelope(feed, body_of(feed), rules)
    height = envelope.top_mm - envelope.bottom_mm
    return 2 * (envelope.edge_radius_mm + rules.margin_mm), height + rules.margin_mm


def _ear_top(body: Body) -> float:
    if body.ledge is not None:
        return body.ledge.top_mm - body.ledge.height_mm - body.ledge.width_mm - 0.5
    if body.channel is not None:
        return body.channel.rim_mm
    return body.rim_mm - (SKIRT_MM + 1.0 if body.bead_mm > 0 else 0.0)


def _flange_holes(body: Body, rules: PrintRules) -> tuple[Outline, ...]:
    return tuple(as_printed(hole, rules) for hole in body.flange.holes) if body.flange else ()


def _insert_holes(body: Body, at: tuple[Point, ...]) -> list[kernel.Shape]:
    screw, ledge = tables.screw(CHOKE_SCREW), body.ledge
    if ledge is None:
        return []
    depth = screw.insert_length_mm + INSERT_DEPTH_MM
    ends = ((x, y, ledge.top_mm - depth) for x, y in at)
    return [kernel.rod(low, (low[0], low[1], ledge.top_mm + 1.0), screw.insert_hole_mm) for low in ends]


def _insert_volume(count: int) -> float:
    screw = tables.screw(CHOKE_SCREW)
    depth = screw.insert_length_mm + INSERT_DEPTH_MM
    return count * math.pi / 4 * screw.insert_hole_mm**2 * depth


def _envelope(feed: Feed, body: Body, rules: PrintRules) -> Envelope:
    flange = body.flange
    ledge = body.ledge
    edge = max(body.hull_radius_mm, body.outer_radius_mm + (ledge.width_mm if ledge else 0.0))
    bands: list[tuple[float, float]] = [(body.floor_bottom_mm, body.flange_top_mm + 20.0)]
    if ledge is not None:
        bands.append((ledge.top_mm - ledge.height_mm - ledge.width_mm - 10.0, ledge.top_mm + 10.0))
    if body.channel is not None:
        # A ring joint would cut the two walls at one height but only one has the room for its bell.
        bands = [(body.floor_bottom_mm, body.rim_mm)]
    bands.append((body.rim_mm - 20.0, body.rim_mm))
    return Envelope(
        name="printed can",
        wall_radius_mm=body.hull_radius_mm,
        edge_radius_mm=max(edge, _reach(flange) if flange else 0.0),
        bottom_mm=body.floor_bottom_mm,
        top_mm=body.rim_mm,
        keep_clear=_keep_clear(feed, body, rules),
        prefer_clear=(_connector_circle(feed),),
        bands=tuple(bands),
    )


def _reach(flange: FlangePlan) -> float:
    """Farthest point of the flange from the axis."""
    if isinstance(flange.outline, Circle):
        return flange.width_mm / 2
    return max(math.hypot(v.x_mm, v.y_mm) for v in flange.outline.vertices)


def _connector_circle(feed: Feed) -> Circle:
    row = tables.connector(feed.job.cable.connector)
    return Circle(*coax_axis(feed), math.hypot(row.flange_width_mm, row.flange_height_mm))


def _keep_clear(feed: Feed, body: Body, rules: PrintRules) -> tuple[Circle, ...]:
    margin = 2 * (rules.wall_min_mm + 1.5)
    circles = []
    for outline in openings(feed):
        low_x, low_y, high_x, high_y = bounds_mm(outline)
        size = max(high_x - low_x, high_y - low_y)
        circles.append(Circle((low_x + high_x) / 2, (low_y + high_y) / 2, size + margin))
    if body.flange is not None:
        head = tables.screw(body.flange.screw).head_mm
        circles += [Circle(h.x_mm, h.y_mm, head + 2 * EAR_HALF_MM + 2.0) for h in body.flange.holes]
    hole = tables.screw(CHOKE_SCREW).insert_hole_mm + 2 * rules.insert_wall_mm
    circles += [Circle(x, y, hole) for x, y in choke_screw_points(feed, body)]
    return tuple(circles)
