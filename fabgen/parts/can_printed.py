"""The printed can: floor, wall and flange in one, standing on its floor on the bed without support.

Section through the axis; the lining (thin, drawn ``=``) is between the plastic and the sizes of the feed::

              |<----- can_bore ----->|          z = can_depth
            | |                      | |
       wall |=|                      |=|
            | |                      | |
            | |======================| |        z = 0, inner face of the lining
     .------' '----------------------' '------.
     |o           floor                      o|  flange, flush with the floor's outer face
     '----------------------------------------'
     |<--------------- flange --------------->|

Depends on: errors, stock, parts.contour, parts.records, parts.kernel, parts.floor_plan, sizing.records.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from fabgen.parts import kernel
from fabgen.parts.contour import Circle, Outline
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.floor_plan import flange_plan, lining_mm
from fabgen.parts.records import Part
from fabgen.parts.shell import Body, shell_solid
from fabgen.sizing.records import Feed
from fabgen.stock import tables

if TYPE_CHECKING:
    import cadquery

PRINT_HOLE_MM = 0.2
"""Printed holes come out smaller; added to every diameter. Common practice (shop guides agree), no source."""


def body_of(feed: Feed) -> Body:
    """The plastic's sizes: the bore is drawn larger and the floor lower by the lining."""
    sizes, lining = feed.sizes, lining_mm(feed)
    inner = sizes.can_bore_mm / 2 + lining
    outer = inner + sizes.wall_mm
    return Body(
        inner_radius_mm=inner,
        outer_radius_mm=outer,
        floor_top_mm=-lining,
        floor_bottom_mm=-lining - sizes.floor_mm,
        rim_mm=sizes.can_depth_mm,
        flange=flange_plan(feed, 2 * outer),
    )


def wider(outline: Outline, by_mm: float) -> Outline:
    """A round hole with a larger diameter; other outlines are drawn with their clearance already."""
    if isinstance(outline, Circle):
        return Circle(outline.x_mm, outline.y_mm, outline.diameter_mm + by_mm)
    return outline


def floor_outlines(feed: Feed) -> tuple[Outline, ...]:
    """All openings through the floor as printed."""
    return tuple(wider(hole.outline, PRINT_HOLE_MM) for hole in floor_holes(feed))


def can_printed(feed: Feed) -> tuple[Part, ...]:
    """The printed can as parts: one, or several pieces where it is larger than the bed."""
    body = body_of(feed)
    plastic = tables.plastic(feed.job.can.plastic)
    solid = kernel.once(lambda: can_solid(feed))
    part = Part(
        key="can",
        name="printed can",
        process=("print",),
        material=plastic.key,
        material_name=plastic.name,
        temper="",
        colour=plastic.colour,
        quantity=1,
        sizes=(
            ("bore_before_lining_mm", 2 * body.inner_radius_mm),
            ("can_bore_mm", feed.sizes.can_bore_mm),
            ("can_depth_mm", feed.sizes.can_depth_mm),
            ("wall_mm", feed.sizes.wall_mm),
            ("floor_mm", feed.sizes.floor_mm),
        ),
        tolerance="bore and depth +-0.2 mm after lining",
        finish=f"lined with {tables.lining(feed.job.can.lining).name} inside, up to the rim",
        solid=solid,
        print_solid=kernel.once(lambda: kernel.on_bed(solid())),
        mass_kg=0.0 * 1e-9 * plastic.density_kg_per_m3,
        notes=("print on the floor, no support",),
    )
    return (part,)


def can_solid(feed: Feed) -> cadquery.Shape:
    """The whole can in the feed's frame."""
    body = body_of(feed)
    return shell_solid(body, floor_outlines(feed), flange_outlines(body), "printed can")


def flange_outlines(body: Body) -> tuple[Outline, ...]:
    """The flange's holes as printed."""
    return tuple(wider(hole, PRINT_HOLE_MM) for hole in body.flange.holes) if body.flange else ()
