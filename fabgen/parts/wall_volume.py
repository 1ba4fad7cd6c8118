"""Volume of the wall of a sheet can, as it is drawn.

A folded wall's follows from its flat pattern. In a rolled one tools and tabs have parallel sides while the metal
between them is round; see curved_cuts.

Depends on: parts (contour, curved_cuts, wall_strip).
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from fabgen.parts.contour import area_mm2
from fabgen.parts.curved_cuts import (
    drilled_shell_mm3,
    integral,
    parallel_width_mm,
    round_end_corner_mm2,
    rounded_corner_mm3,
    slotted_shell_mm3,
)
from fabgen.parts.wall_strip import Wall, corner_round_mm, relief_top_mm, wall_flat


def wall_volume_mm3(wall: Wall, corner_mm: float) -> float:
    """Volume of the finished wall. ``corner_mm``: least inner corner radius of the flat strip."""
    return _rolled(wall, corner_mm) if wall.path.stretches[0].rolled else _folded(wall, corner_mm)


def _folded(wall: Wall, corner_mm: float) -> float:
    """From the flat: area times t, and the neutral-fibre term of every fold over its length."""
    flat = wall_flat(wall, corner_mm)
    t = wall.path.thickness_mm
    area = area_mm2(flat.outline) - math.fsum(area_mm2(h) for h in flat.holes)
    extra = math.fsum(
        math.radians(abs(f.angle_deg)) * math.dist(f.start, f.end) * t * t * (0.5 - f.k_factor) for f in flat.folds
    )
    return area * t + extra


def _rolled(wall: Wall, corner_mm: float) -> float:
    """Ring and step over the full height, the tail above its lower edge, then what is cut out and folded on."""
    path, seam, t = wall.path, wall.seam, wall.path.thickness_mm
    ring, tail = path.stretches[0], path.stretches[-1]
    inner, outer = ring.radius_mm - t / 2, ring.radius_mm + t / 2
    volume = math.fsum(piece.middle_mm for piece in path.stretches[:-1]) * t * wall.depth_mm
    volume += tail.middle_mm * t * (wall.depth_mm - seam.tail_low_mm)
    tail_faces = tail.radius_mm - t / 2, tail.radius_mm + t / 2
    volume += rounded_corner_mm3(*tail_faces, 0.0, corner_mm)
    holes = math.fsum(drilled_shell_mm3(inner, outer, hole.diameter_mm) for hole in (*wall.holes, *wall.drains))
    seam_hole = drilled_shell_mm3(inner, outer, seam.hole_mm) + drilled_shell_mm3(*tail_faces, seam.hole_mm)
    taken = _under_tab_mm3(wall, inner, outer) - _tab_mm3(wall, ring.radius_mm)
    return volume - holes - len(seam.heights_mm) * seam_hole - len(wall.tabs_mm) * taken


def _under_tab_mm3(wall: Wall, inner_mm: float, outer_mm: float) -> float:
    """Cut out of the wall for one tab: below its bend, and the two reliefs with their round ends."""
    tab, half, top = wall.tab, wall.tab.width_mm / 2, relief_top_mm(wall)
    beside = half + tab.relief_mm
    relief = top * slotted_shell_mm3(inner_mm, outer_mm, half, beside)
    for corner, side in ((half, 1.0), (beside, -1.0)):
        relief -= rounded_corner_mm3(inner_mm, outer_mm, corner, side * tab.relief_mm / 2)
    return 2 * relief + wall.root_mm * slotted_shell_mm3(inner_mm, outer_mm, -half, half)


def _tab_mm3(wall: Wall, radius_mm: float) -> float:
    """One tab: bend and plate swept about the axis between parallel sides, without its hole and corners."""
    tab, t, mid, width = wall.tab, wall.path.thickness_mm, wall.bend_mid_mm, wall.tab.width_mm
    end = radius_mm + wall.reach_mm

    def fibre(radius: float) -> float:
        """The bend at one radius: a quarter turn from upright to level."""
        place = radius_mm + mid
        return radius * integral(
            lambda a: parallel_width_mm(place - radius * np.cos(a), width), 0.0, math.pi / 2
        )

    def bend(radii: NDArray[np.float64]) -> NDArray[np.float64]:
        return np.array([fibre(float(radius)) for radius in radii])

    plate = integral(lambda r: parallel_width_mm(r, width), radius_mm + mid, end)
    corners = 2 * round_end_corner_mm2(end, width / 2, corner_round_mm(tab))
    hole = math.pi / 4 * tab.hole_mm**2
    return integral(bend, tab.inside_radius_mm, tab.inside_radius_mm + t) + t * (plate - corners - hole)
