"""The wall of a can cut from sheet: a strip with a stepped lap seam, and tabs that fold out onto the floor.

Flat, seen from outside the can; s runs counter-clockwise round the can from the seam::

        s = 0                                        step  tail        y = depth (rim)
         .--------------------------------------------:-:-----.
         | o   row that meets the tail's              : : o   |   seam holes
         | o                                          : : o   |
         |                                            : '-----'   tail_low
         '--. .-----. .------. .-----. .--------------'           y = 0 on the floor
            | | tab | |  (o) | | tab | |  reliefs beside the tabs, (o) a drain close to the floor
            '-'  o  '-'      '-'  o  '-'  tab holes meet the floor's

The tail lies outside the beginning of the strip, lifted by a step of t + SEAM_GAP. Between the tabs the wall's
edge stands on the floor.

Depends on: errors, stock, parts (contour, strip_path, folding, kernel, records), theory.bending.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from fabgen.errors import GeometryError
from fabgen.parts.contour import Circle, FoldLine, rounded
from fabgen.parts.records import FlatPattern
from fabgen.parts.strip_path import StripPath, outward
from fabgen.theory.bending import bend_allowance, bend_deduction

SEAM_GAP_MM = 0.05
"""Between the two layers of the lap: room for solder or for burrs, so that the layers do not have to be forced."""
EDGE_GAP_MM = 0.3
"""Between the strip's beginning and the step, along the wall."""


@dataclass(frozen=True)
class TabShape:
    """A tab: width, bend and where its hole is. ``length_mm`` from the bend's end to the tip."""

    width_mm: float
    inside_radius_mm: float
    k_factor: float
    hole_mm: float
    hole_from_bend_mm: float
    length_mm: float
    relief_mm: float
    screw: str


@dataclass(frozen=True)
class Seam:
    """The lap: where the tail starts and ends on the flat strip, how far above the floor its edge is, and its
    holes (inner row, outer row and heights)."""

    step_at_mm: float
    tail_at_mm: float
    tail_low_mm: float
    inner_row_mm: float
    outer_row_mm: float
    heights_mm: tuple[float, ...]
    hole_mm: float
    screw: str


@dataclass(frozen=True)
class WallHole:
    """A round hole in the wall at a position along the flat strip and a height over its lower edge."""

    along_mm: float
    height_mm: float
    diameter_mm: float


@dataclass(frozen=True)
class Wall:
    """All that makes a wall. ``base_z_mm``: height of its lower edge in the feed's frame; ``holes`` hold a choke,
    ``drains`` stay open. A wall longer than the stock sheet is ``copies`` = 2 equal halves, each with its lap on the
    beginning of the other; all else is of one half."""

    path: StripPath
    depth_mm: float
    base_z_mm: float
    tab: TabShape
    tabs_mm: tuple[float, ...]
    seam: Seam
    holes: tuple[WallHole, ...] = ()
    drains: tuple[WallHole, ...] = ()
    copies: int = 1

    @property
    def turns_deg(self) -> tuple[float, ...]:
        """Where its copies stand, by turn about z."""
        return tuple(360.0 * i / self.copies for i in range(self.copies))

    @property
    def bend_mid_mm(self) -> float:
        """Mid-surface radius of the tabs' bends."""
        return self.tab.inside_radius_mm + self.path.thickness_mm / 2

    @property
    def root_mm(self) -> float:
        """Height at which a tab's bend starts: mid-surface of the folded tab at t/2, bend above it."""
        return self.path.thickness_mm / 2 + self.bend_mid_mm

    @property
    def reach_mm(self) -> float:
        """From the wall's mid-surface to a tab's tip."""
        return self.bend_mid_mm + self.tab.length_mm


def relief_top_mm(wall: Wall) -> float:
    """Reliefs reach past the fold line by r + t, and at least a round end past the bend's start."""
    t, tab = wall.path.thickness_mm, wall.tab
    zone = bend_allowance(90.0, tab.inside_radius_mm, tab.k_factor, t)
    return max(wall.root_mm - zone / 2 + tab.inside_radius_mm + t, wall.root_mm + tab.relief_mm / 2)


def tab_tip_mm(wall: Wall) -> float:
    """Height of a tab's tip on the flat strip (negative: below the lower edge)."""
    tab = wall.tab
    zone = bend_allowance(90.0, tab.inside_radius_mm, tab.k_factor, wall.path.thickness_mm)
    return wall.root_mm - zone - tab.length_mm


def wall_flat(wall: Wall, corner_mm: float) -> FlatPattern:
    """The strip before rolling or folding, seen from outside. ``corner_mm``: least inner corner radius."""
    tab, seam = wall.tab, wall.seam
    tip, top = tab_tip_mm(wall), relief_top_mm(wall)
    half, outer = tab.width_mm / 2, tab.width_mm / 2 + tab.relief_mm
    soft = corner_round_mm(tab)
    edge: list[tuple[float, float, float]] = [(0.0, 0.0, 0.0)]
    for s in wall.tabs_mm:
        edge += [
            (s - outer, 0.0, 0.0), (s - outer, top, tab.relief_mm / 2), (s - half, top, tab.relief_mm / 2),
            (s - half, tip, soft), (s + half, tip, soft), (s + half, top, tab.relief_mm / 2),
            (s + outer, top, tab.relief_mm / 2), (s + outer, 0.0, 0.0),
        ]
    end = wall.path.flat_mm
    edge += [
        (seam.tail_at_mm, 0.0, 0.0), (seam.tail_at_mm, seam.tail_low_mm, corner_mm), (end, seam.tail_low_mm, 0.0),
        (end, wall.depth_mm, 0.0), (0.0, wall.depth_mm, 0.0),
    ]
    rows = (seam.inner_row_mm, seam.outer_row_mm)
    holes = [Circle(s, z, seam.hole_mm) for s in rows for z in seam.heights_mm]
    holes += [Circle(h.along_mm, h.height_mm, h.diameter_mm) for h in (*wall.holes, *wall.drains)]
    holes += [Circle(s, tip + tab.length_mm - tab.hole_from_bend_mm, tab.hole_mm) for s in wall.tabs_mm]
    return FlatPattern(rounded(edge), tuple(holes), _fold_lines(wall), wall.path.thickness_mm, "outside")


def _fold_lines(wall: Wall) -> tuple[FoldLine, ...]:
    """Upright folds in order along the strip, then the tabs.

    The step is folded first, while the strip is flat; then the corners, and the tabs last, once the wall is closed.
    """
    t, tab = wall.path.thickness_mm, wall.tab
    folds: list[FoldLine] = []
    upright = sum(1 for piece in wall.path.stretches if piece.radius_mm and not piece.rolled)
    for at, piece in zip(wall.path.starts_mm(), wall.path.stretches, strict=False):
        if piece.rolled or not piece.radius_mm:
            continue
        s, inside, angle = at + piece.flat_mm / 2, piece.radius_mm - t / 2, abs(piece.sweep_deg)
        deduction = bend_deduction(angle, inside, piece.k_factor, t)
        number = len(folds) + 1
        # Bends to the left, around the can, go away from who looks from outside.
        folds.append(
            FoldLine(
                number, (s, 0.0), (s, wall.depth_mm), -piece.sweep_deg, inside, piece.k_factor, piece.flat_mm,
                deduction, (number + 1) % upright + 1,
            )
        )
    zone = bend_allowance(90.0, tab.inside_radius_mm, tab.k_factor, t)
    deduction = bend_deduction(90.0, tab.inside_radius_mm, tab.k_factor, t)
    y, last = wall.root_mm - zone / 2, len(folds) + 1
    for s in wall.tabs_mm:
        start, end = (s - tab.width_mm / 2, y), (s + tab.width_mm / 2, y)
        folds.append(
            FoldLine(
                len(folds) + 1, start, end, 90.0, tab.inside_radius_mm, tab.k_factor, zone, deduction, last,
            )
        )
    return tuple(folds)


def tab_holes(wall: Wall) -> tuple[Circle, ...]:
    """Where the tabs' holes of all copies are over the floor, in the feed's frame."""
    out = wall.bend_mid_mm + wall.tab.hole_from_bend_mm
    circles = []
    for turn in wall.turns_deg:
        for s in wall.tabs_mm:
            (x, y), heading = wall.path.at(s)
            ox, oy = outward(heading)
            circles.append(turned_circle(Circle(x + out * ox, y + out * oy, wall.tab.hole_mm), turn))
    return tuple(circles)


def turned_circle(circle: Circle, turn_deg: float) -> Circle:
    """The circle turned about the axis; untouched for a turn of 0."""
    if turn_deg == 0.0:
        return circle
    a = math.radians(turn_deg)
    x, y = circle.x_mm, circle.y_mm
    return Circle(x * math.cos(a) - y * math.sin(a), x * math.sin(a) + y * math.cos(a), circle.diameter_mm)


def tabs_width_mm(wall: Wall) -> float:
    """Diameter of the circle about the axis that all tabs lie in, and the seam's tail."""
    reach = [_corner_mm(wall, s) for s in wall.tabs_mm]
    tail, heading = wall.path.end
    ox, oy = outward(heading)
    t = wall.path.thickness_mm
    reach.append(math.hypot(tail[0] + ox * t / 2, tail[1] + oy * t / 2))
    return 2 * max(reach)


def _corner_mm(wall: Wall, along_mm: float) -> float:
    (x, y), heading = wall.path.at(along_mm)
    ox, oy = outward(heading)
    return math.hypot(math.hypot(x, y) * abs(x * ox + y * oy) / math.hypot(x, y) + wall.reach_mm,
                      abs(x * oy - y * ox) + wall.tab.width_mm / 2)


def corner_round_mm(tab: TabShape) -> float:
    """Rounding of a tab's outer corners, easy on hands."""
    return min(2.0, tab.width_mm / 4)


def check_wall(wall: Wall, name: str) -> None:
    """Raises GeometryError where tabs overlap each other or the seam."""
    gap = wall.tab.width_mm + 2 * wall.tab.relief_mm
    for a, b in zip(wall.tabs_mm, wall.tabs_mm[1:], strict=False):
        if b - a < gap:
            raise GeometryError(
                f"{name}: two tabs {b - a:.2f} mm apart overlap with their reliefs ({gap:.2f} mm); "
                f"use tabs of at most {b - a - 2 * wall.tab.relief_mm:.2f} mm width"
            )
    if wall.depth_mm <= wall.seam.tail_low_mm + 4 * wall.seam.hole_mm:
        raise GeometryError(f"{name}: a wall {wall.depth_mm:.1f} mm high leaves no room for the seam's holes")
