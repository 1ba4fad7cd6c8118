"""Screws and nuts of a sheet can: tabs on floor and choke ring, lap seams, the ring on the wall.

Section of a seam and of a tab on the floor, the can's inside on the left::

        inside  | | |  outside                  inside |  |
            .---| | |---.                              |  |   .---.  head on the tab
       head |===|=|=|===|== nut                        |  '---|===|---.
            '---| | |---'                        ======'======|===|======  floor
                tail                                         '-|-|-'  nut

A blind rivet of the same hole does as well.

Depends on: stock, parts (screws, records, strip_path, wall_strip), sizing.records.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from fabgen.parts.choke_ring import CLEARANCE_MM
from fabgen.parts.contour import Circle, Point
from fabgen.parts.records import Part, Place
from fabgen.parts.screws import PROUD_MM, nuts, screw_length_mm, screws, side_nuts, side_screws
from fabgen.parts.strip_path import outward
from fabgen.parts.wall_strip import SEAM_GAP_MM, Wall, tab_holes, turned_circle
from fabgen.sizing.records import Feed
from fabgen.stock import tables


@dataclass(frozen=True)
class _Row:
    """Level screws through one wall: places on its mid-surface, turned outwards, and what lies between head and
    nut, from the mid-surface."""

    size: str
    places: tuple[Place, ...]
    head_mm: float
    nut_mm: float


def joint_screws(feed: Feed, wall: Wall, outer: Wall | None) -> tuple[Part, ...]:
    """All screws and nuts of the can's joints at their places."""
    floor = feed.sizes.floor_mm
    parts = [*_tab_screws("wall", "wall", wall, floor)]
    parts += _level("seam", "seam", _seam_row(wall))
    if outer is not None:
        parts += _tab_screws("choke", "choke's wall", outer, floor)
        if wall.holes:
            parts += _level("choke-ring", "choke ring", _ring_row(wall, floor))
        parts += _level("choke-seam", "choke's seam", _seam_row(outer))
    return tuple(parts)


def _tab_screws(key: str, name: str, wall: Wall, floor_mm: float) -> tuple[Part, ...]:
    """Heads on the tabs, nuts under the sheet that the wall stands on."""
    size, t, base = wall.tab.screw, wall.path.thickness_mm, wall.base_z_mm
    at: tuple[Point, ...] = tuple((hole.x_mm, hole.y_mm) for hole in tab_holes(wall))
    nut = tables.screw(size).nut_height_mm
    length = screw_length_mm(t + floor_mm + nut + PROUD_MM)
    return (
        screws(f"screw-{key}", f"{name} screw", size, at, length_mm=length, head_z_mm=base + t, up=True),
        nuts(f"nut-{key}", f"{name} nut", size, at, base - floor_mm - nut),
    )


def _seam_row(wall: Wall) -> _Row:
    seam, t = wall.seam, wall.path.thickness_mm
    places = _places(wall, [(seam.inner_row_mm, z) for z in seam.heights_mm])
    return _Row(seam.screw, places, _head_seat_mm(wall, seam.screw), 1.5 * t + SEAM_GAP_MM)


def _ring_row(wall: Wall, floor_mm: float) -> _Row:
    """Through the can's wall and the tabs of the choke's floor outside it."""
    size, t = wall.tab.screw, wall.path.thickness_mm
    places = _places(wall, [(hole.along_mm, hole.height_mm) for hole in wall.holes])
    return _Row(size, places, _head_seat_mm(wall, size), t / 2 + CLEARANCE_MM + floor_mm)


def _places(wall: Wall, spots: Sequence[Point]) -> tuple[Place, ...]:
    """On the mid-surface of every copy of the wall, at places along it and heights, +y turned outwards."""
    places = []
    for turn in wall.turns_deg:
        for along, height in spots:
            (x, y), heading = wall.path.at(along)
            ox, oy = outward(heading)
            at = turned_circle(Circle(x, y, 0.0), turn)
            angle = math.degrees(math.atan2(oy, ox)) - 90.0 + turn
            places.append(Place(at.x_mm, at.y_mm, wall.base_z_mm + height, angle))
    return tuple(places)


def _head_seat_mm(wall: Wall, size: str) -> float:
    """From the mid-surface inwards to a head's seat: on a rolled wall the head's rim touches first."""
    t, ring = wall.path.thickness_mm, wall.path.stretches[0]
    if not ring.rolled:
        return t / 2
    bore = ring.radius_mm - t / 2
    return ring.radius_mm - math.sqrt(bore**2 - (tables.screw(size).head_mm / 2) ** 2)


def _level(key: str, name: str, row: _Row) -> tuple[Part, ...]:
    """Heads inside, where they are lower than nuts with the screw's end; nuts outside."""
    nut = tables.screw(row.size).nut_height_mm
    length = screw_length_mm(row.head_mm + row.nut_mm + nut + PROUD_MM)
    return (
        side_screws(
            f"screw-{key}", f"{name} screw", row.size, row.places, seat_y_mm=-row.head_mm, length_mm=length
        ),
        side_nuts(f"nut-{key}", f"{name} nut", row.size, row.places, seat_y_mm=row.nut_mm),
    )
