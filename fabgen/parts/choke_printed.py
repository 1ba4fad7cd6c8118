"""The printed choke ring: a floor and a wall around the can, screwed down on the can's ledge.

Section, right half, the can thin::

       |                        | |   z = floor_z + choke depth
       |                        |=|
     can     inserts            |=|<- wall
       |=======o================|=|   z = floor_z, face of the lining
       |'-----------------------'-'
       |_ledge_|
       |<- fit |
               |<- choke_bore / 2 from the axis ->|

Depends on: errors, stock, parts (contour, kernel, shell, split, pieces, print_rules, printed, can_printed,
floor_plan, records, screws), sizing.records.
"""

from __future__ import annotations

import math
from functools import cache

from fabgen.parts import kernel
from fabgen.parts.can_printed import CHOKE_SCREW, body_of, can_split, choke_screw_points, ledge_of
from fabgen.parts.contour import Circle, Point
from fabgen.parts.floor_plan import lining_mm
from fabgen.parts.pieces import Joint
from fabgen.parts.print_rules import PrintRules, print_rules
from fabgen.parts.printed import Printed, ear_fasteners, printed_parts
from fabgen.parts.records import Part
from fabgen.parts.screws import screw_length_mm, screws
from fabgen.parts.shell import Body, revolved_volume_mm3
from fabgen.parts.split import Envelope, plan_split
from fabgen.sizing.records import ChokeSizes, Feed
from fabgen.stock import tables

GRIP_MM = 4.0
"""How far a screw reaches into its insert. A little more than its diameter, common practice."""


def choke_printed(feed: Feed) -> tuple[Part, ...]:
    """The choke ring, whole or in sectors, and its screws; nothing when the feed has no choke
    or has it in one piece with the can.

    Raises GeometryError when it cannot sensibly be cut into pieces for the bed.
    """
    choke = feed.sizes.choke
    if choke is None or ledge_of(feed) is None:
        return ()
    rules, can = print_rules(feed), body_of(feed)
    points = _profile(feed, can, choke, rules)
    at = choke_screw_points(feed, can)
    hole = tables.screw(CHOKE_SCREW).clearance_medium_mm + rules.hole_mm
    low, high = points[0][1], points[-1][1]

    @cache
    def whole() -> kernel.Shape:
        tools = [kernel.rod((x, y, low - 1), (x, y, high + 1), hole) for x, y in at]
        return kernel.cut(kernel.revolved(points), *tools, what="printed choke ring")

    lining = tables.lining(feed.job.can.lining)
    printed = Printed(
        key="choke",
        name="printed choke ring",
        plastic=feed.job.can.plastic,
        sizes=(
            ("choke_bore_mm", choke.bore_mm),
            ("choke_depth_mm", choke.depth_mm),
            ("bore_before_lining_mm", 2 * points[3][0]),
            ("hub_bore_mm", 2 * points[0][0]),
            ("wall_mm", feed.sizes.wall_mm),
            ("floor_mm", feed.sizes.floor_mm),
        ),
        tolerance=f"bore and depth +-{rules.tolerance_mm:g} mm after lining",
        finish=f"lined with {lining.name} on floor and wall, and the can's wall inside the ring",
        notes=("print floor down, without support", "lining of ring and can joined all round at the floor"),
        volume_mm3=revolved_volume_mm3(points) - len(at) * math.pi / 4 * hole**2 * (high - low),
        joint=_joint(feed, points, at),
        whole=whole,
        tied_by="the can's ledge",
    )
    length = screw_length_mm(feed.sizes.floor_mm + GRIP_MM)
    fixing = screws(
        "screw-choke-floor", "choke floor screw", CHOKE_SCREW, at, length_mm=length, head_z_mm=high, up=True
    )
    return (*printed_parts(printed), *ear_fasteners(printed), fixing)


def _profile(feed: Feed, can: Body, choke: ChokeSizes, rules: PrintRules) -> tuple[Point, ...]:
    lining = lining_mm(feed)
    inner = can.outer_radius_mm + rules.clearance_mm
    bore = choke.bore_mm / 2 + lining
    outer = bore + feed.sizes.wall_mm
    floor = choke.floor_z_mm - lining
    bottom, rim = floor - feed.sizes.floor_mm, choke.floor_z_mm + choke.depth_mm
    return ((inner, bottom), (outer, bottom), (outer, rim), (bore, rim), (bore, floor), (inner, floor))


def _joint(feed: Feed, points: tuple[Point, ...], at: tuple[Point, ...]) -> Joint:
    rules, envelope = print_rules(feed), _envelope(feed, points, at)
    return Joint(envelope, plan_split(envelope, rules), rules, feed.sizes.wall_mm, feed.sizes.floor_mm, points[2][1])


def _envelope(feed: Feed, points: tuple[Point, ...], at: tuple[Point, ...]) -> Envelope:
    head = tables.screw(CHOKE_SCREW).head_mm
    clear = [Circle(x, y, head + 3.0) for x, y in at]
    # Cuts of the ring stay off the can's: each then ties the other together.
    can = can_split(feed)
    clear += [
        Circle(r * math.cos(math.radians(a)), r * math.sin(math.radians(a)), 2 * head)
        for a in can.cut_angles_deg()
        for r in (points[1][0],)
    ]
    return Envelope(
        name="printed choke ring",
        wall_radius_mm=points[1][0],
        edge_radius_mm=points[1][0],
        bottom_mm=points[0][1],
        top_mm=points[2][1],
        keep_clear=tuple(clear),
        bands=((points[0][1], points[0][1] + 20.0), (points[2][1] - 20.0, points[2][1])),
        hub_radius_mm=points[0][0],
    )
