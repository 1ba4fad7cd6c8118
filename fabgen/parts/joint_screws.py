"""Screws and nuts of a sheet can: tabs on floor and choke ring, lap seams, the ring on the wall.

They are counted, not drawn: there are many, and blind rivets of the same hole do as well.

Depends on: stock, parts (screws, records, wall_strip), sizing.records.
"""

from __future__ import annotations

from dataclasses import replace

from fabgen.parts.records import Part, Place
from fabgen.parts.screws import PROUD_MM, nuts, screw_length_mm, screws
from fabgen.parts.wall_strip import Wall
from fabgen.sizing.records import Feed
from fabgen.stock import tables


def joint_screws(feed: Feed, wall: Wall, outer: Wall | None) -> tuple[Part, ...]:
    """All screws and nuts of the can's joints."""
    t, floor = wall.path.thickness_mm, feed.sizes.floor_mm
    parts = [*_counted("wall", "wall", wall.tab.screw, len(wall.tabs_mm), t + floor)]
    seams = {wall.seam.screw: len(wall.seam.heights_mm)}
    if outer is not None:
        parts += _counted("choke", "choke's wall", outer.tab.screw, len(outer.tabs_mm), t + floor)
        if wall.holes:
            parts += _counted("ring", "choke ring", wall.tab.screw, len(wall.holes), t + floor)
        seams[outer.seam.screw] = seams.get(outer.seam.screw, 0) + len(outer.seam.heights_mm)
    for number, (size, count) in enumerate(sorted(seams.items())):
        parts += _counted(f"seam{number or ''}", "seam", size, count, 2 * t)
    return tuple(parts)


def _counted(key: str, name: str, size: str, count: int, grip_mm: float) -> tuple[Part, ...]:
    length = screw_length_mm(grip_mm + tables.screw(size).nut_height_mm + PROUD_MM)
    at = ((0.0, 0.0),) * count
    pair = (
        screws(f"screw-{key}", f"{name} screw", size, at, length_mm=length, head_z_mm=0.0, up=True),
        nuts(f"nut-{key}", f"{name} nut", size, at, 0.0),
    )
    return tuple(replace(part, solid=None, places=(Place(),)) for part in pair)
