"""A can of sheet metal, rolled or folded: the parts that both have in common.

Depends on: errors, stock, parts (wall_plan, wall_strip, floor_sheet, choke_ring, kernel, making), sizing.records.
"""

from __future__ import annotations

from functools import partial

from fabgen.parts.bend_rule import rule_text
from fabgen.parts.choke_ring import choke_fixings, choke_ring, has_ring
from fabgen.parts.floor_sheet import floor_sheet
from fabgen.parts.joint_screws import joint_screws
from fabgen.parts.kernel import once
from fabgen.parts.making import metal_part
from fabgen.parts.records import Part, Place
from fabgen.parts.wall_plan import wall_plan
from fabgen.parts.wall_solid import wall_solid
from fabgen.parts.wall_strip import Wall, wall_flat
from fabgen.parts.wall_volume import wall_volume_mm3
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from fabgen.theory.springback import sheet_tool_radius_mm


def can_wall(feed: Feed) -> Wall:
    """The wall of the can itself."""
    s = feed.sizes
    return wall_plan(feed, s.can_bore_mm, s.can_depth_mm, 0.0, "wall", choke_fixings(feed))


def choke_wall(feed: Feed) -> Wall | None:
    """The wall of the choke, if there is one."""
    choke = feed.sizes.choke
    if choke is None:
        return None
    return wall_plan(feed, choke.bore_mm, choke.depth_mm, choke.floor_z_mm, "choke wall")


def sheet_can(feed: Feed) -> tuple[Part, ...]:
    """Floor and wall, ring and wall of the choke, screws and nuts.

    A choke as deep as the can needs no ring: its wall stands on the can's own, wider floor.
    """
    wall, outer = can_wall(feed), choke_wall(feed)
    ring = outer is not None and has_ring(feed)
    parts = [floor_sheet(feed, wall, None if ring else outer), _wall_part(feed, wall, "wall", "wall of the can")]
    if outer is not None:
        if ring:
            parts.append(choke_ring(feed, wall, outer))
        parts.append(_wall_part(feed, outer, "choke-wall", "wall of the choke"))
    return (*parts, *joint_screws(feed, wall, outer))


def _wall_part(feed: Feed, wall: Wall, key: str, name: str) -> Part:
    corner = feed.job.limits.corner_radius_mm
    tab, seam = wall.tab, wall.seam
    solder = tables.metal(feed.job.can.metal).solderable
    joint = "solder seam and floor joint all round" if solder else "screws or blind rivets in all holes"
    sizes = (
        ("flat_length_mm", wall.path.flat_mm),
        ("depth_mm", wall.depth_mm),
        ("wall_mm", wall.path.thickness_mm),
        ("inside_radius_mm", tab.inside_radius_mm),
        ("seam_hole_mm", seam.hole_mm),
        ("tab_width_mm", tab.width_mm),
        ("tab_count", float(len(wall.tabs_mm))),
    )
    seams = "the tail of the seam outside, seam at +y"
    if wall.copies > 1:
        seams = "two halves, alike: the tail of each outside the beginning of the other, seams at +y and -y"
    form = "fold" if feed.sizes.can_flats else "roll"
    return metal_part(
        key,
        name if wall.copies == 1 else f"{name}, half",
        ("laser", "fold", "roll") if form == "roll" else ("laser", "fold"),
        (feed.job.can.metal, feed.job.can.temper),
        feed,
        volume_mm3=wall_volume_mm3(wall, corner),
        sizes=sizes,
        quantity=wall.copies,
        places=tuple(Place(turn_deg=turn) for turn in wall.turns_deg),
        flat=wall_flat(wall, corner),
        thickness_mm=wall.path.thickness_mm,
        solid=once(partial(wall_solid, wall, corner)),
        notes=(
            f"{form} with the seen side out; {seams}; step first, tabs last",
            *_rolling(feed, wall),
            f"{joint}; holes fit {seam.screw} screws and rivets",
            *(("the holes close to the lower edge are drains: no screw, no solder in them",) if wall.drains else ()),
            rule_text(feed.job.limits),
        ),
    )


def _rolling(feed: Feed, wall: Wall) -> tuple[str, ...]:
    """What to roll to so that the wall springs back to its bore (theory.springback, pure bending)."""
    ring = wall.path.stretches[0]
    if not ring.rolled:
        return ()
    metal = tables.metal(feed.job.can.metal)
    temper = tables.temper(metal, feed.job.can.temper)
    t = wall.path.thickness_mm
    inside = ring.radius_mm - t / 2
    tool = sheet_tool_radius_mm(inside, t, temper.yield_mpa, metal.youngs_gpa)
    return (f"roll to about {2 * tool:.0f} mm inside diameter under load; it springs back to {2 * inside:.1f} mm",)
