"""All openings through the floor, whatever the loop's form: the list that every make of can cuts.

Depends on: parts.floor_plan, parts.loop_sheet, sizing.records.
"""

from __future__ import annotations

from fabgen.parts.floor_plan import FloorHole, coax_holes, connector_screw_holes, drain_holes
from fabgen.parts.loop_sheet import foot_holes
from fabgen.sizing.records import Feed


def floor_holes(feed: Feed) -> tuple[FloorHole, ...]:
    """Coax, connector screws, the loop's feet and drains; the flange's holes are in its own plan."""
    feet = foot_holes(feed) if feed.sizes.conductor == "strip" else ()
    return (*coax_holes(feed), *connector_screw_holes(feed), *feet, *drain_holes(feed))
