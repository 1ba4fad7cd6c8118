"""The can from stock tube or a tin: the tube is cut to length, the floor with its flange is cut from sheet.

Section through the axis::

            |<----- can_bore ----->|        z = can_depth
            | |                    | |
            | |   stock tube       | |
            | |                    | |
     .------'-'--------------------'-'------.  z = 0
     '---------------- floor ---------------'  z = -floor
     |<-------------- flange -------------->|

The tube stands on the floor and is joined to it all round, since the joint carries the can's current.

Depends on: errors, stock, parts.contour, parts.records, parts.kernel, parts.making, parts.floor_plan,
parts.floor_holes, sizing.records.
"""

from __future__ import annotations

import math

from fabgen.errors import GeometryError, NotCoveredError
from fabgen.parts import kernel
from fabgen.parts.contour import Circle, Outline, area_mm2
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.floor_plan import flange_plan, marked_outline
from fabgen.parts.making import metal_part
from fabgen.parts.records import FlatPattern, Part, Place
from fabgen.sizing.records import ChokeSizes, Feed
from fabgen.stock import tables
from fabgen.stock.joints import least_choke_floor_mm

LIP_MM = 3.0
"""Rim of the floor outside the tube that takes the solder where there is no flange. Common practice."""


def can_tube(feed: Feed) -> tuple[Part, ...]:
    """Floor, tube and, where asked for, the choke's floor and tube."""
    stock = (feed.job.can.metal, feed.job.can.temper)
    sizes = feed.sizes
    parts = [
        _floor(feed, stock),
        _tube(feed, stock, "can-tube", bore_mm=sizes.can_bore_mm, length_mm=sizes.can_depth_mm),
    ]
    choke = sizes.choke
    if choke is not None:
        if choke.floor_z_mm > 0:
            parts.append(_choke_floor(feed, stock, choke))
        parts += [
            _tube(
                feed, stock, "choke-tube",
                bore_mm=choke.bore_mm, length_mm=choke.depth_mm, z_mm=choke.floor_z_mm,
            ),
        ]
    return tuple(parts)


def _joint(feed: Feed) -> str:
    if tables.metal(feed.job.can.metal).solderable:
        return "solder to the floor all round without a gap"
    return "weld to the floor all round, or bond all round with silver-filled epoxy"


def _floor(feed: Feed, stock: tuple[str, str | None]) -> Part:
    sizes = feed.sizes
    outer = sizes.can_bore_mm + 2 * sizes.wall_mm
    if sizes.choke is not None and sizes.choke.floor_z_mm == 0:
        # A choke as deep as the can stands on the same floor.
        outer = sizes.choke.bore_mm + 2 * sizes.wall_mm
    plan = flange_plan(feed, outer)
    holes: tuple[Outline, ...] = tuple(h.outline for h in floor_holes(feed))
    outline: Outline = Circle(0.0, 0.0, outer + 2 * LIP_MM)
    width = outer + 2 * LIP_MM
    if plan is not None:
        if abs(plan.thickness_mm - sizes.floor_mm) > 1e-9:
            raise NotCoveredError(
                f"can.flange.thickness_mm = {plan.thickness_mm:g} differs from floor_mm = "
                f"{sizes.floor_mm:g}: floor and flange of a tube can are one sheet; make them equal or leave "
                "the flange's thickness out"
            )
        outline, holes, width = marked_outline(plan), (*holes, *plan.holes), plan.width_mm
    flat = FlatPattern(outline, holes, (), sizes.floor_mm, "inside")
    area = area_mm2(outline) - sum(area_mm2(h) for h in holes)
    return metal_part(
        "floor",
        "floor with flange" if plan else "floor",
        ("laser",),
        stock,
        feed,
        volume_mm3=area * sizes.floor_mm,
        sizes=(("width_mm", width), ("floor_mm", sizes.floor_mm), ("can_bore_mm", sizes.can_bore_mm)),
        flat=flat,
        thickness_mm=sizes.floor_mm,
        solid=kernel.once(lambda: kernel.prism(outline, holes, -sizes.floor_mm, sizes.floor_mm)),
        notes=("the notch on the edge shows the side of the loop's gap",) if plan else (),
    )


def _tube(
    feed: Feed, stock: tuple[str, str | None], key: str, *, bore_mm: float, length_mm: float, z_mm: float = 0.0
) -> Part:
    wall = feed.sizes.wall_mm
    outer = bore_mm + 2 * wall
    ends = ((0.0, 0.0, 0.0), (0.0, 0.0, length_mm))
    return metal_part(
        key,
        key.replace("-", " "),
        ("buy", "turn"),
        stock,
        feed,
        volume_mm3=math.pi / 4 * (outer**2 - bore_mm**2) * length_mm,
        sizes=(("bore_mm", bore_mm), ("wall_mm", wall), ("length_mm", length_mm)),
        thickness_mm=wall,
        solid=kernel.once(lambda: kernel.tube(*ends, outer, bore_mm)),
        places=(Place(z_mm=z_mm),),
        notes=(_joint(feed), "saw to length, face both ends square"),
    )


def _choke_floor(feed: Feed, stock: tuple[str, str | None], choke: ChokeSizes) -> Part:
    sizes = feed.sizes
    least = least_choke_floor_mm("tube", sizes.can_bore_mm, sizes.wall_mm, sizes.floor_mm)
    if choke.floor_z_mm < least:
        raise GeometryError(
            f"can.choke.floor_z_mm = {choke.floor_z_mm:g} puts the choke's floor, {sizes.floor_mm:g} mm thick, into "
            f"the can's; give 0 for one floor, or {least:g} or more"
        )
    outer = choke.bore_mm + 2 * sizes.wall_mm + 2 * LIP_MM
    hole = sizes.can_bore_mm + 2 * sizes.wall_mm
    outline, inner = Circle(0.0, 0.0, outer), Circle(0.0, 0.0, hole)
    return metal_part(
        "choke-floor",
        "choke floor",
        ("laser",),
        stock,
        feed,
        volume_mm3=(area_mm2(outline) - area_mm2(inner)) * sizes.floor_mm,
        sizes=(("outer_mm", outer), ("bore_mm", hole), ("floor_mm", sizes.floor_mm)),
        flat=FlatPattern(outline, (inner,), (), sizes.floor_mm, "inside"),
        thickness_mm=sizes.floor_mm,
        solid=kernel.once(lambda: kernel.prism(outline, (inner,), -sizes.floor_mm, sizes.floor_mm)),
        places=(Place(z_mm=choke.floor_z_mm),),
        notes=("push over the can's tube and join to it all round",),
    )
