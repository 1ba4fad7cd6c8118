"""The panel connector as a plain envelope from its dimension table, and its spacer where it needs one.

Section along the coax; the floor's outer face is up::

    ====floor====[ coax ]====floor====     z = floor_bottom
       | spacer |  bore  | spacer |        only for connectors with a wide bore
       '--------+ flange +--------'        flange_width x flange_height x flange_thickness
                |  body  |                 body diameter, body_length
                '--------'

Depends on: errors, stock, parts.contour, parts.records, parts.kernel, parts.floor_plan, sizing.records.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from fabgen.parts import kernel
from fabgen.parts.contour import Circle, Contour, area_mm2, polygon
from fabgen.parts.floor_plan import (
    coax_axis,
    connector_hole_points,
    connector_reach_mm,
    connector_screw_holes,
    floor_bottom_mm,
    on_spacer,
    turned_about_coax,
)
from fabgen.parts.records import FlatPattern, Part
from fabgen.sizing.records import Feed
from fabgen.stock import tables

if TYPE_CHECKING:
    import cadquery

SPACER_MM = 6.0
"""Room for the solder cup behind the connector's flange. From memory of maker drawings; measure the part."""
NICKEL_COLOUR = (0.75, 0.74, 0.70)


def flange_face_mm(feed: Feed) -> float:
    """Height of the face of the connector's flange that looks at the floor."""
    return floor_bottom_mm(feed) - (SPACER_MM if on_spacer(feed) else 0.0)


def connector(feed: Feed) -> Part:
    """The connector: bought, drawn as flange and body only."""
    row = tables.connector(feed.job.cable.connector)
    volume = _flange_area(feed) * row.flange_thickness_mm
    volume += math.pi / 4 * row.body_mm**2 * row.body_length_mm
    return Part(
        key="connector",
        name=f"connector {row.key}",
        process=("buy",),
        material="connector",
        material_name=row.name,
        temper="",
        colour=NICKEL_COLOUR,
        quantity=1,
        sizes=(
            ("flange_width_mm", row.flange_width_mm),
            ("flange_height_mm", row.flange_height_mm),
            ("hole_pitch_mm", row.hole_pitch_mm),
            ("panel_bore_mm", row.panel_bore_mm),
        ),
        tolerance="as bought",
        finish="as bought",
        solid=kernel.once(lambda: _solid(feed)),
        mass_kg=volume * 1e-9 * tables.metal("cuzn37").density_kg_per_m3,
        notes=("envelope only: the part in hand decides, measure it before drilling",),
    )


def spacer(feed: Feed) -> Part | None:
    """The spacer between floor and connector, or None where the connector sits on the floor itself."""
    if not on_spacer(feed):
        return None
    row, metal = tables.connector(feed.job.cable.connector), tables.metal("en-aw-5754")
    screws = [h.outline for h in connector_screw_holes(feed) if isinstance(h.outline, Circle)]
    flat = FlatPattern(
        outline=_spacer_outline(feed),
        holes=(_bore(feed), *screws),
        thickness_mm=SPACER_MM,
        face="floor side",
    )
    face = floor_bottom_mm(feed)
    solid = kernel.once(lambda: kernel.prism(flat.outline, flat.holes, face - SPACER_MM, SPACER_MM))
    area = area_mm2(flat.outline) - sum(area_mm2(hole) for hole in flat.holes)
    return Part(
        key="connector-spacer",
        name="connector spacer",
        process=("drill",),
        material=metal.key,
        material_name=metal.name,
        temper=metal.default_temper.key,
        colour=metal.colour,
        quantity=1,
        sizes=(("thickness_mm", SPACER_MM), ("panel_bore_mm", row.panel_bore_mm)),
        tolerance="m",
        finish="bare, both faces flat",
        flat=flat,
        thickness_mm=SPACER_MM,
        solid=solid,
        mass_kg=area * SPACER_MM * 1e-9 * metal.density_kg_per_m3,
        notes=("keeps the solder cup of the connector clear of the floor",),
    )


def _solid(feed: Feed) -> cadquery.Shape:
    row = tables.connector(feed.job.cable.connector)
    x, y = coax_axis(feed)
    top = flange_face_mm(feed)
    bottom = top - row.flange_thickness_mm
    plate = kernel.prism(_flange_outline(feed), _flange_holes(feed), bottom, row.flange_thickness_mm)
    body = kernel.rod((x, y, bottom), (x, y, bottom - row.body_length_mm), row.body_mm)
    return kernel.fused(plate, body, what="connector envelope")


def _flange_holes(feed: Feed) -> tuple[Circle, ...]:
    row = tables.connector(feed.job.cable.connector)
    return tuple(Circle(*at, row.hole_mm) for at in connector_hole_points(feed))


def _bore(feed: Feed) -> Circle:
    x, y = coax_axis(feed)
    return Circle(x, y, tables.connector(feed.job.cable.connector).panel_bore_mm)


def _flange_outline(feed: Feed) -> Contour:
    row = tables.connector(feed.job.cable.connector)
    corner = row.flange_width_mm / math.sqrt(2)
    corners = ((corner, 0.0), (0.0, corner), (-corner, 0.0), (0.0, -corner))
    if row.hole_count != 4:
        # A flange with two screws lies with its long side along y, as its holes do.
        half_x, half_y = row.flange_height_mm / 2, row.flange_width_mm / 2
        corners = ((half_x, -half_y), (half_x, half_y), (-half_x, half_y), (-half_x, -half_y))
    return polygon(tuple(turned_about_coax(feed, at) for at in corners))


def _spacer_outline(feed: Feed) -> Contour:
    """The connector's flange, cut off towards the bars of a sheet loop."""
    row = tables.connector(feed.job.cable.connector)
    corner, reach = row.flange_width_mm / math.sqrt(2), connector_reach_mm(feed)
    if row.hole_count != 4 or reach >= corner:
        return _flange_outline(feed)
    x, y = coax_axis(feed)
    side = corner - reach
    return polygon(
        ((x + corner, y), (x, y + corner), (x - reach, y + side), (x - reach, y - side), (x, y - corner))
    )


def _flange_area(feed: Feed) -> float:
    holes = sum(area_mm2(hole) for hole in _flange_holes(feed))
    return area_mm2(_flange_outline(feed)) - holes

