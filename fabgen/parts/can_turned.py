"""The turned can: floor, wall and flange from one piece of bar, for the lathe; the holes are drilled after.

Section through the axis::

            |<----- can_bore ----->|        z = can_depth
            | |                    | |
       wall | |                    | |
            | |____________________| |      z = 0
     .------'                        '----.
     '------------------------------------'  z = -floor
     |<------------- flange ------------->|

A choke is a ring of its own on a hub with set screws; where its floor is too low for a hub, it is a groove turned
in the same piece.

Depends on: stock, parts.contour, parts.curved_cuts, parts.kernel, parts.making, parts.shell, parts.floor_plan,
parts.floor_holes, parts.records, sizing.records.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from fabgen.parts import kernel
from fabgen.parts.contour import Outline
from fabgen.parts.curved_cuts import drilled_shell_mm3
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.floor_plan import flange_plan
from fabgen.parts.making import metal_part
from fabgen.parts.records import Part
from fabgen.parts.shell import Body, Channel, revolved_volume_mm3, shell_solid, shell_volume_mm3
from fabgen.sizing.records import ChokeSizes, Feed
from fabgen.stock import tables

if TYPE_CHECKING:
    import cadquery

HUB_SCREW = "M4"
HUB_SCREWS = 3
HUB_CLEAR_MM = 0.5
"""Between the hub and the flange."""
HUB_FIT_MM = 0.1
"""On the diameter between can and choke hub: slides on by hand. Common practice, no source."""


def hub_mm(feed: Feed) -> float:
    """Height of the choke's hub below its floor: three screw diameters, or what there is above the flange."""
    choke, sizes = feed.sizes.choke, feed.sizes
    if choke is None:
        return 0.0
    flange = feed.job.can.flange
    flange_top = (flange.thickness_mm or sizes.floor_mm) - sizes.floor_mm if flange.pattern != "none" else 0.0
    room = choke.floor_z_mm - sizes.floor_mm - flange_top - HUB_CLEAR_MM
    return min(3 * tables.screw(HUB_SCREW).diameter_mm, room)


def choke_in_one(feed: Feed) -> bool:
    """Whether can and choke are turned from one piece: the choke's floor is too low for a hub with screws."""
    return feed.sizes.choke is not None and hub_mm(feed) < 2 * tables.screw(HUB_SCREW).diameter_mm


def body_of(feed: Feed) -> Body:
    """The turned body's radii and heights."""
    sizes, channel = feed.sizes, None
    outer = widest = sizes.can_bore_mm / 2 + sizes.wall_mm
    if sizes.choke is not None and choke_in_one(feed):
        choke = sizes.choke
        widest = choke.bore_mm / 2 + sizes.wall_mm
        channel = Channel(choke.bore_mm / 2, widest, choke.floor_z_mm, choke.floor_z_mm + choke.depth_mm)
    return Body(
        inner_radius_mm=sizes.can_bore_mm / 2,
        outer_radius_mm=outer,
        floor_top_mm=0.0,
        floor_bottom_mm=-sizes.floor_mm,
        rim_mm=sizes.can_depth_mm,
        flange=flange_plan(feed, 2 * widest),
        channel=channel,
    )


def can_turned(feed: Feed) -> tuple[Part, ...]:
    """The can as one turned part and, where asked for, the turned choke ring."""
    sizes, body = feed.sizes, body_of(feed)
    openings = tuple(h.outline for h in floor_holes(feed))
    flange_holes: tuple[Outline, ...] = body.flange.holes if body.flange else ()
    widest = max(2 * body.hull_radius_mm, body.flange.width_mm if body.flange else 0.0)
    can = metal_part(
        "can",
        "turned can",
        ("turn", "drill"),
        (feed.job.can.metal, feed.job.can.temper),
        feed,
        volume_mm3=shell_volume_mm3(body, openings, flange_holes),
        sizes=(
            ("can_bore_mm", sizes.can_bore_mm),
            ("can_depth_mm", sizes.can_depth_mm),
            ("wall_mm", sizes.wall_mm),
            ("floor_mm", sizes.floor_mm),
            ("outer_mm", widest),
            ("length_mm", body.rim_mm - body.floor_bottom_mm),
        ),
        solid=kernel.once(lambda: shell_solid(body, openings, flange_holes, "turned can")),
        notes=("inside corner radius 0.4 mm at most", "bore and floor turned in one setting"),
    )
    return (can,) if sizes.choke is None or body.channel else (can, _choke(feed, body, sizes.choke))


def _choke(feed: Feed, body: Body, choke: ChokeSizes) -> Part:
    sizes, screw, hub = feed.sizes, tables.screw(HUB_SCREW), hub_mm(feed)
    bore = 2 * body.outer_radius_mm + HUB_FIT_MM
    low = choke.floor_z_mm - sizes.floor_mm
    inner, hub_outer = bore / 2, bore / 2 + 2 * screw.diameter_mm
    wall = choke.bore_mm / 2
    rim = choke.floor_z_mm + choke.depth_mm
    points = (
        (inner, low - hub), (hub_outer, low - hub), (hub_outer, low), (wall + sizes.wall_mm, low),
        (wall + sizes.wall_mm, rim), (wall, rim), (wall, choke.floor_z_mm), (inner, choke.floor_z_mm),
    )
    drilled = HUB_SCREWS * drilled_shell_mm3(inner, hub_outer, screw.tap_drill_mm)
    return metal_part(
        "choke",
        "turned choke ring",
        ("turn", "drill"),
        (feed.job.can.metal, feed.job.can.temper),
        feed,
        volume_mm3=revolved_volume_mm3(points) - drilled,
        sizes=(
            ("choke_bore_mm", choke.bore_mm), ("choke_depth_mm", choke.depth_mm), ("hub_bore_mm", bore),
            ("hub_mm", hub), ("wall_mm", sizes.wall_mm), ("floor_mm", sizes.floor_mm),
        ),
        solid=kernel.once(lambda: _choke_solid(points, low - hub / 2, hub_outer, screw.tap_drill_mm)),
        notes=(f"{HUB_SCREWS} radial {HUB_SCREW} set screws in the hub", "hub face bare, bright and greased"),
    )


def _choke_solid(
    points: tuple[tuple[float, float], ...], z_mm: float, reach_mm: float, drill_mm: float
) -> cadquery.Shape:
    ring = kernel.revolved(points)
    # One screw on +x, where the gap's marker is.
    ends = kernel.circle_points(HUB_SCREWS, reach_mm + 1.0, 0.0)
    tools = [kernel.rod((x * 0.5, y * 0.5, z_mm), (x, y, z_mm), drill_mm) for x, y in ends]
    return kernel.cut(ring, *tools, what="turned choke ring")

