"""Which screws and nuts hold connector and loop, with their places.

Depends on: stock, parts.contour, parts.records, parts.screws, parts.connector, parts.loop_sheet,
parts.floor_plan, sizing.records.
"""

from __future__ import annotations

from collections.abc import Iterable

from fabgen.parts.connector import flange_face_mm
from fabgen.parts.contour import Circle, Point
from fabgen.parts.floor_plan import FloorHole, connector_screw_holes, floor_bottom_mm
from fabgen.parts.loop_sheet import foot_holes, foot_screw
from fabgen.parts.records import Part
from fabgen.parts.screws import PROUD_MM, nuts, screw_length_mm, screws
from fabgen.sizing.records import Feed
from fabgen.stock import tables


def connector_fasteners(feed: Feed) -> tuple[Part, ...]:
    """Screws from inside the can, whose heads clear the bars, and nuts behind the connector's flange."""
    row = tables.connector(feed.job.cable.connector)
    at = centres(connector_screw_holes(feed))
    if not at:
        return ()
    nut_top = flange_face_mm(feed) - row.flange_thickness_mm
    height = tables.screw(row.screw).nut_height_mm
    length = screw_length_mm(-nut_top + height + PROUD_MM)
    return (
        screws("screw-connector", "connector screw", row.screw, at, length_mm=length, head_z_mm=0.0, up=True),
        nuts("nut-connector", "connector nut", row.screw, at, nut_top - height),
    )


def foot_fasteners(feed: Feed) -> tuple[Part, ...]:
    """Screws from outside and nuts on the feet of a sheet loop; feet that are soldered have none."""
    sizes = feed.sizes
    if sizes.conductor != "strip" or sizes.sheet_mm is None:
        return ()
    screw, at = foot_screw(feed), centres(foot_holes(feed))
    if screw is None:
        return ()
    bottom = floor_bottom_mm(feed)
    length = screw_length_mm(sizes.sheet_mm - bottom + screw.nut_height_mm + PROUD_MM)
    return (
        screws("screw-foot", "foot screw", screw.key, at, length_mm=length, head_z_mm=bottom, up=False),
        nuts("nut-foot", "foot nut", screw.key, at, sizes.sheet_mm),
    )


def centres(holes: Iterable[FloorHole]) -> tuple[Point, ...]:
    """Centres of the round holes."""
    return tuple((h.outline.x_mm, h.outline.y_mm) for h in holes if isinstance(h.outline, Circle))
