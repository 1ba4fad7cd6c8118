"""Drain holes in a wall of sheet, in the corner with its floor.

Which place of a can is the lowest depends on the dish. Before a dish that it looks down at, it is the rim: open, or
closed by a cap with drains of its own. Before one that it looks up at, and on the bench, it is the corner of wall and
floor on one side: these holes are there, at the four sides, so that one is lowest however the feed is turned for
polarisation. The floor's own drains empty a can that stands upright.

Between two tabs, seen from outside::

        | tab |()            ()| tab |      () relief
        |     |()  (o)       ()|     |      (o) drain, as low as the edge allows
        '-----'                '-----'      z = 0

A printed or turned can has its flange outside that corner and drains through the floor alone.

Depends on: stock, parts (floor_plan, strip_path, wall_strip), sizing.records.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

from fabgen.parts.floor_plan import DRAIN_HOLE_MM
from fabgen.parts.strip_path import StripPath
from fabgen.parts.wall_strip import Seam, TabShape, WallHole
from fabgen.sizing.records import Feed
from fabgen.stock import tables

SIDES_DEG = (0.0, 90.0, 180.0, 270.0)
"""Sides of the can that are lowest when the electric field is upright or level."""


def wall_drains(
    feed: Feed, path: StripPath, tab: TabShape, tabs_mm: Sequence[float], seam: Seam, fixings: Sequence[WallHole],
    sides_deg: Sequence[float] = SIDES_DEG,
) -> tuple[WallHole, ...]:
    """Beside the tab nearest to each of the sides that has room; clear of folds, of the lap and of the tabs of
    a choke's ring, which hold on to ``fixings``.

    None where the tabs are too close: their reliefs are the openings then.
    """
    if not feed.job.can.drain_holes:
        return ()
    limits, t, radius = feed.job.overrides, path.thickness_mm, DRAIN_HOLE_MM / 2
    edge = max(1.0, tables.limit("hole_to_edge_thicknesses", limits).value * t)
    fold = tables.limit("hole_to_fold_thicknesses", limits).value * t + tab.inside_radius_mm
    beside = tab.width_mm / 2 + max(tab.relief_mm + edge, fold) + radius
    # A tab of the choke's ring reaches this far below its screw.
    reach = max(tab.hole_mm / 2 + max(1.0, edge * feed.sizes.floor_mm / t), tables.screw(tab.screw).head_mm / 2)
    low = [hole for hole in fixings if hole.height_mm - reach < edge + DRAIN_HOLE_MM]
    free = [
        s + side * beside
        for s in tabs_mm
        for side in (1.0, -1.0)
        if all(abs(s - hole.along_mm) > tab.width_mm for hole in low)
    ]
    # A rolled wall is drawn in equal shares, one about each tab; a hole lies in one of them.
    share = seam.step_at_mm / len(tabs_mm) / 2 if path.stretches[0].rolled else math.inf
    spans = _spans(path, seam, radius + fold)
    places = [
        s for s in free
        if beside + radius < share
        and all(abs(s - other) > beside - 1e-9 for other in tabs_mm)
        and any(start <= s <= end for start, end in spans)
    ]
    height, apart = radius + edge, radius + edge + max((hole.diameter_mm / 2 for hole in fixings), default=0.0)
    places = [s for s in places if all(math.dist((s, height), (f.along_mm, f.height_mm)) > apart for f in fixings)]
    chosen: list[float] = []
    for side in sides_deg:
        clear = [s for s in places if all(abs(s - other) > 2 * (radius + edge) for other in chosen)]
        chosen += [_nearest(path, clear, side)] if clear else []
    return tuple(WallHole(s, height, DRAIN_HOLE_MM) for s in sorted(chosen))


def _spans(path: StripPath, seam: Seam, room_mm: float) -> list[tuple[float, float]]:
    """Stretches of the strip without a fold, less the lap, each without its ends."""
    lap = path.stretches[-1].flat_mm
    spans = []
    for at, piece in zip(path.starts_mm(), path.stretches, strict=False):
        if piece.rolled or not piece.radius_mm:
            low, high = max(at, lap) + room_mm, min(at + piece.flat_mm, seam.step_at_mm) - room_mm
            spans.append((low, high))
    return spans


def _nearest(path: StripPath, places: Sequence[float], side_deg: float) -> float:
    def off(along_mm: float) -> tuple[float, float]:
        x, y = path.at(along_mm)[0]
        return round(abs((math.degrees(math.atan2(y, x)) - side_deg + 180.0) % 360.0 - 180.0), 6), along_mm

    return min(places, key=off)
