"""From sizes to the wall of a rolled or folded can: way of the strip, seam, tabs and their screws.

Depends on: errors, stock, parts (strip_path, wall_strip, wall_drains, bend_rule, nesting), theory.bending,
sizing.records.
"""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass, replace

from fabgen.errors import GeometryError
from fabgen.parts.bend_rule import chosen_k
from fabgen.parts.can_printed import SKIRT_MM
from fabgen.parts.nesting import SPACING_MM
from fabgen.parts.strip_path import Joggle, StripPath, joggle
from fabgen.parts.wall_drains import SIDES_DEG, wall_drains
from fabgen.parts.wall_strip import EDGE_GAP_MM, SEAM_GAP_MM, Seam, TabShape, Wall, WallHole, check_wall
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from fabgen.stock.joints import joint_screw
from fabgen.stock.records import Screw
from fabgen.theory.bending import min_inside_radius_mm

SOLDERED_PITCH_FACTOR = 3.0
"""A soldered joint carries its current in the solder; its tabs only hold it while it is soldered."""


@dataclass(frozen=True)
class _Bends:
    """Inside radius and K of every fold of the wall, and its step at the seam."""

    inside_mm: float
    k_factor: float
    step_mm: float


@dataclass(frozen=True)
class Fixings:
    """What holds a choke on the wall: holes at a height over the lower edge, about so many, each with that much
    room along the wall, and at least ``end_mm`` from a fold, the lap or the step."""

    height_mm: float
    count: int
    room_mm: float
    end_mm: float


def fold_radius_mm(feed: Feed, thickness_mm: float) -> float:
    """Inside radius of the can's folds: the temper's least, and one thickness for ordinary tools."""
    temper = tables.temper(feed.job.can.metal, feed.job.can.temper)
    ordinary = tables.limit("inside_radius_min_thicknesses", feed.job.overrides).value * thickness_mm
    return max(min_inside_radius_mm(temper, thickness_mm), ordinary)


def wall_plan(
    feed: Feed, bore_mm: float, depth_mm: float, base_z_mm: float, name: str, fixings: Fixings | None = None
) -> Wall:
    """The wall of a can of that bore (across flats where the can has flats), in two halves where the stock sheet is
    too short for it: then with seams at +y and -y, both in the E-plane.

    ``fixings``: the holes that hold a choke. Raises GeometryError where tabs, seam or folds do not fit.
    """
    t = feed.sizes.wall_mm
    inside = fold_radius_mm(feed, t)
    temper = tables.temper(feed.job.can.metal, feed.job.can.temper)
    bends = _Bends(inside, chosen_k(feed.job.limits, temper, inside, t, can=True), t + SEAM_GAP_MM)
    screw = joint_screw(bore_mm)
    overlap = 4 * screw.clearance_medium_mm
    flats = feed.sizes.can_flats

    def way(copies: int) -> StripPath:
        if flats:
            return _folded(bore_mm, flats, t, bends, overlap, copies)
        return _rolled(bore_mm, t, bends, overlap, copies)

    longest = max(feed.job.limits.sheet_mm) - 2 * SPACING_MM
    copies = 1 if way(1).flat_mm <= longest else 2
    path = way(copies)
    seam = _seam(feed, path, depth_mm, bends, overlap, screw)
    tab = tab_shape(feed, screw, t)
    tabs = _tab_places(feed, path, seam, tab)
    holes: tuple[WallHole, ...] = ()
    if fixings:
        share = replace(fixings, count=math.ceil(fixings.count / copies))
        holes = _fixing_holes(path, tabs, seam, overlap, share, math.ceil(3 / copies), screw.clearance_medium_mm)
    # Two halves have their drains at the other two sides by themselves.
    sides = SIDES_DEG if copies == 1 else SIDES_DEG[1:3]
    drains = wall_drains(feed, path, tab, tabs, seam, holes, sides)
    wall = Wall(path, depth_mm, base_z_mm, tab, tabs, seam, holes, drains, copies)
    check_wall(wall, name)
    return wall


def _rolled(bore_mm: float, t: float, bends: _Bends, overlap: float, copies: int) -> StripPath:
    """Once (for halves half) round from the E-plane (phi = 90 degrees) at the bore, the step, and the tail outside."""
    middle = bore_mm / 2 + t / 2
    step = joggle(bends.inside_mm, t, bends.step_mm, middle)
    gap = math.degrees(EDGE_GAP_MM / middle)
    path = StripPath(t, (0.0, middle), 180.0).roll(middle, 360.0 / copies - step.turn_deg - gap)
    path = _stepped(path, step, bends)
    outer = middle + bends.step_mm
    return path.roll(outer, math.degrees((overlap + EDGE_GAP_MM) / outer))


def _stepped(path: StripPath, step: Joggle, bends: _Bends) -> StripPath:
    out = path.bend(bends.inside_mm, -step.out_deg, bends.k_factor)
    return out.bend(bends.inside_mm, step.back_deg, bends.k_factor)


def _folded(bore_mm: float, flats: int, t: float, bends: _Bends, overlap: float, copies: int) -> StripPath:
    """Round a prism, or half round. The seam is in the middle of the flat on the E-plane; with six flats the E-plane
    meets a corner, and the seam lies beside it."""
    middle, radius = bore_mm / 2 + t / 2, bends.inside_mm + t / 2
    half = math.tan(math.pi / flats) * (middle - radius)
    step = joggle(bends.inside_mm, t, bends.step_mm, None)
    length = 2 * radius * math.sin(math.radians(step.out_deg))
    corner = flats == 6
    at = -half + length + EDGE_GAP_MM + 1.0 if corner else 0.0
    phi = math.radians(120.0 if corner else 90.0)
    start = (middle * math.cos(phi) - at * math.sin(phi), middle * math.sin(phi) + at * math.cos(phi))
    if half - at < overlap:
        raise GeometryError(
            f"flats of {2 * half:.1f} mm are too short for a seam of {overlap:.1f} mm; use fewer flats or a rolled can"
        )
    path = StripPath(t, start, math.degrees(phi) + 90.0).straight(half - at)
    corners = flats // copies
    for i in range(corners):
        path = path.bend(bends.inside_mm, 360.0 / flats, bends.k_factor)
        path = path.straight(2 * half if i < corners - 1 else half + at - length - EDGE_GAP_MM)
    return _stepped(path, step, bends).straight(overlap + EDGE_GAP_MM)


def _seam(feed: Feed, path: StripPath, depth_mm: float, bends: _Bends, overlap: float, screw: Screw) -> Seam:
    starts = path.starts_mm()
    tail, step = starts[-2], starts[-4]
    t, hole = path.thickness_mm, screw.clearance_medium_mm
    low = bends.inside_mm + 2 * t + 1.0
    inner = overlap / 2
    last, first = path.stretches[-1], path.stretches[0]
    # The same angle, or the same place along a flat, seen from the tail's own start.
    ratio = last.radius_mm / first.radius_mm if last.radius_mm else 1.0
    outer = tail + (inner + EDGE_GAP_MM) * ratio
    bottom, top = low + 2 * hole, depth_mm - 2 * hole
    if feed.job.can.radome:
        # Nuts stand outside, below the cap's skirt.
        top = max(bottom, min(top, depth_mm - SKIRT_MM - screw.nut_across_flats_mm / math.sqrt(3) - 0.5))
    pitch = tables.limit("seam_screw_pitch_max_wavelengths", feed.job.overrides).value * feed.job.wavelength_mm
    count = max(1, math.ceil((top - bottom) / pitch) + 1)
    while count > 1 and (top - bottom) / (count - 1) < 3 * hole:
        count -= 1
    heights = tuple(bottom + (top - bottom) * i / (count - 1) for i in range(count)) if count > 1 else (
        (bottom + top) / 2,
    )
    return Seam(step, tail, low, inner, outer, heights, hole, screw.key)


def tab_shape(feed: Feed, screw: Screw, t: float) -> TabShape:
    """A tab folded from the can's sheet of thickness ``t`` for that screw, by the limits of the trade."""
    limit = feed.job.overrides
    inside = fold_radius_mm(feed, t)
    temper = tables.temper(feed.job.can.metal, feed.job.can.temper)
    relief = max(t, tables.limit("relief_min_mm", limit).value, 2 * feed.job.limits.corner_radius_mm)
    hole = screw.clearance_medium_mm
    edge = hole / 2 + max(1.0, tables.limit("hole_to_edge_thicknesses", limit).value * t)
    from_bend = max(hole / 2 + tables.limit("hole_to_fold_thicknesses", limit).value * t, screw.head_mm / 2 + 0.5)
    least = tables.limit("flange_min_thicknesses", limit).value * t - inside - t
    length = max(from_bend + max(edge, screw.head_mm / 2), least)
    k = chosen_k(feed.job.limits, temper, inside, t, can=True)
    return TabShape(max(2 * edge, screw.head_mm), inside, k, hole, from_bend, length, relief, screw.key)


def _tab_places(feed: Feed, path: StripPath, seam: Seam, tab: TabShape) -> tuple[float, ...]:
    """Tabs at equal pitch, on a folded can within each flat, clear of folds and of the step."""
    pitch = tables.limit("seam_screw_pitch_max_wavelengths", feed.job.overrides).value * feed.job.wavelength_mm
    if tables.metal(feed.job.can.metal).solderable:
        pitch *= SOLDERED_PITCH_FACTOR
    least = tab.width_mm + 2 * tab.relief_mm + 1.0
    half = tab.width_mm / 2 + tab.relief_mm + 0.5
    places: list[float] = []
    for at, piece in zip(path.starts_mm(), path.stretches, strict=False):
        room = min(at + piece.flat_mm, seam.step_at_mm) - at
        if (piece.radius_mm and not piece.rolled) or room < 2 * half:
            continue
        count = max(1, min(math.ceil(room / pitch), math.floor(room / least)))
        places += [at + room * (i + 0.5) / count for i in range(count)]
    return tuple(places)


def _fixing_holes(
    path: StripPath, tabs_mm: tuple[float, ...], seam: Seam, overlap: float, fixings: Fixings, least: int,
    hole_mm: float,
) -> tuple[WallHole, ...]:
    """Holes above tabs, at least ``least``, spread evenly, clear of the lap and of folds."""
    free: list[float] = []
    end = fixings.end_mm
    for at, piece in zip(path.starts_mm(), path.stretches, strict=False):
        low, high = max(at, overlap), min(at + piece.flat_mm, seam.step_at_mm)
        if piece.rolled or not piece.radius_mm:
            free += [s for s in tabs_mm if low + end <= s <= high - end]
    if len(free) < least:
        raise GeometryError(
            f"the can's wall has room for {len(free)} of the choke's fixings and needs {least}; "
            "use a rolled can or fewer flats"
        )
    count = max(least, min(fixings.count, len(free)))
    while count > least and min(b - a for a, b in itertools.pairwise(_spread(free, count))) < fixings.room_mm:
        count -= 1
    return tuple(WallHole(s, fixings.height_mm, hole_mm) for s in _spread(free, count))


def _spread(places: list[float], count: int) -> list[float]:
    return [places[math.floor((i + 0.5) * len(places) / count)] for i in range(count)]
