"""How finely each surface is cut, decided once from a reference geometry and then kept while sizes move.

Keeping the counts makes the impedance a smooth function of every size.

Depends on: errors, fields.geometry.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from fabgen.errors import GeometryError
from fabgen.fields.geometry import CanGeometry, FeedGeometry, LoopGeometry

FLOOR_REACH = 0.97
"""How near the floor's patch round the feet may come to the wall, of the can's radius."""

DEFAULT_DENSITY = 16.0
"""Edges of the can per wavelength at the target; no edge exceeds lambda/5 up to 2.2 times the target."""


@dataclass(frozen=True)
class PatchFrame:
    """The rectangle of the floor kept free for the feet: x from x0 to x1, y from 0 to y1, with cells on its sides."""

    x0_m: float
    x1_m: float
    y1_m: float
    cells_x: int
    cells_y: int


@dataclass(frozen=True)
class LoopCounts:
    """Cells across the strips, along the bar below and above the crossing, along ring, tab, bend and crossing."""

    across: int
    below: int
    above: int
    ring: int
    tab: int
    bend: int
    crossing_across: int
    crossing_along: int


@dataclass(frozen=True)
class CanCounts:
    """Cells round the rim (per flat where there are flats), up the wall below and above a choke, and the choke's."""

    rim: int
    wall: int
    wall_above: int
    choke_floor: int
    choke_wall: int


@dataclass(frozen=True)
class MeshPlan:
    """A reference geometry with the mesh's counts; ``edge_m`` is the can's nominal edge length."""

    reference: FeedGeometry
    edge_m: float
    frame: PatchFrame
    loop: LoopCounts
    can: CanCounts


def plan_mesh(feed: FeedGeometry, wavelength_m: float, edges_per_wavelength: float = DEFAULT_DENSITY) -> MeshPlan:
    """Counts for a feed. ``edges_per_wavelength`` is the mesh density at the target frequency (10 to 40).

    The can has edges of wavelength / density; strips have cells 0.6 of that along and 3 to 9 across.
    The crossing's cells along are fixed: they are the width of the gap that drives the feed.
    """
    edge = wavelength_m / edges_per_wavelength
    across = cells_across(edges_per_wavelength)
    loop = _loop_counts(feed.loop, 0.6 * edge, across, cells_across_crossing(edges_per_wavelength))
    return MeshPlan(feed, edge, _frame(feed, wavelength_m, across, edge), loop, _can_counts(feed.can, edge))


def cells_across(edges_per_wavelength: float) -> int:
    """Cells across a strip at a mesh density; strips are widened for just this number (``fields.strips``)."""
    return max(3, min(9, round(5 * edges_per_wavelength / DEFAULT_DENSITY)))


def cells_across_crossing(edges_per_wavelength: float) -> int:
    """Cells across the crossing."""
    return 2 if cells_across(edges_per_wavelength) < 7 else 4


def _loop_counts(loop: LoopGeometry, edge: float, across: int, crossing: int) -> LoopCounts:
    top = loop.height_m - loop.bend_radius_m
    low = loop.tap_height_m - loop.crossing_band_m / 2
    tab = abs(loop.radius_m - loop.band_m / 2 - loop.leg_x_m - loop.bend_radius_m) if loop.inward else 0.0
    return LoopCounts(
        across=across,
        below=max(2, math.ceil(low / edge)),
        above=max(2, math.ceil((top - low - loop.crossing_band_m) / edge)),
        ring=max(8, math.ceil((math.pi * loop.radius_m - loop.leg_pitch_m / 2) / edge)),
        tab=max(1, round(tab / edge)),
        bend=max(2, across - 2),
        crossing_across=crossing,
        crossing_along=2,
    )


def rim_row_m(free_m: float, edge_m: float) -> float:
    """Height of the last row of a wall that rises ``free_m``: a third of an edge, at most half of the wall."""
    return min(edge_m / 3, free_m / 2)


def _can_counts(can: CanGeometry, edge: float) -> CanCounts:
    def cells(length: float) -> int:
        # five percent to spare, by which sizes may move on a plan
        return max(1, math.ceil(1.05 * length / edge - 1e-6))

    side = 2 * can.radius_m * math.tan(math.pi / can.flats) if can.flats else 0.0
    # a choke's wall carries the same spokes farther out
    spread = can.choke.radius_m / can.radius_m if can.choke else 1.0
    rim = 2 * cells(side * spread / 2) if can.flats else max(8, cells(math.pi * can.radius_m * spread))
    if can.choke is None:
        return CanCounts(rim, cells(can.depth_m - rim_row_m(can.depth_m, edge)), 0, 0, 0)
    low, free = can.choke.floor_z_m, can.depth_m - can.choke.floor_z_m
    return CanCounts(
        rim,
        cells(low) if low > 0 else 0,
        cells(free - rim_row_m(free, edge)),
        cells(can.choke.radius_m - can.radius_m),
        cells(can.choke.depth_m - rim_row_m(can.choke.depth_m, edge)),
    )


def _frame(feed: FeedGeometry, wavelength: float, across: int, edge: float) -> PatchFrame:
    """Rectangle round the foot, placed in steps so that loops of similar size share it."""
    loop = feed.loop
    x = foot_x(loop)
    step = 0.04 * wavelength
    half = max(0.06 * wavelength, 0.75 * loop.leg_band_m)
    centre = round(x / step) * step
    y = loop.leg_pitch_m / 2 + loop.leg_band_m / 2 + 0.03 * wavelength
    y1 = math.ceil(y / (step / 2)) * step / 2
    if math.hypot(centre + half, y1) > 0.92 * feed.can.radius_m:
        half = max(0.6 * loop.leg_band_m, 0.92 * feed.can.radius_m - centre) if centre < feed.can.radius_m else half
        y1 = min(y1, y)
    corner = math.hypot(max(abs(centre - half), abs(centre + half)), y1)
    if corner > FLOOR_REACH * feed.can.radius_m:
        raise GeometryError(
            f"the bars stand {x * 1e3:.1f} mm off the axis, {loop.leg_pitch_m * 1e3:.1f} mm apart: too near a wall at "
            f"{feed.can.radius_m * 1e3:.1f} mm for the floor between to be computed; a bore of "
            f"{2e3 * corner / FLOOR_REACH:.1f} mm would do"
        )
    cells_x = 2 * max(2, math.ceil(half / edge))
    return PatchFrame(centre - half, centre + half, y1, cells_x, across + max(3, round(2 * y1 / edge)))


def tangent_angle(loop: LoopGeometry) -> float:
    """Angle phi of the point where the wire's bend meets the loop: R sin phi - r cos phi = pitch / 2."""
    r, b = loop.radius_m, loop.bend_radius_m
    return math.asin(loop.leg_pitch_m / 2 / math.hypot(r, b)) + math.atan2(b, r)


def foot_x(loop: LoopGeometry) -> float:
    """x of the bars' axis on the floor."""
    if loop.form == "sheet":
        return loop.leg_x_m
    phi = tangent_angle(loop)
    return loop.radius_m * math.cos(phi) + loop.bend_radius_m * math.sin(phi)
