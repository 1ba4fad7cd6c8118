"""The wall of a can cut from sheet: a strip with a stepped lap seam, and tabs that fold out onto the floor.

Flat, seen from outside the can; s runs counter-clockwise round the can from the seam::

        s = 0                                        step  tail        y = depth (rim)
         .--------------------------------------------:-:-----.
         | o   row that meets the tail's              : : o   |   seam holes
         | o                                          : : o   |
         |                                            : '-----'   tail_low
         '--. .-----. .------. .-----. .--------------'           y = 0 on the floor
            | | tab | |      | | tab | |  reliefs beside the tabs
            '-'  o  '-'      '-'  o  '-'  tab holes meet the floor's

The tail lies outside the beginning of the strip, lifted by a step of t + SEAM_GAP. Between the tabs the wall's
edge stands on the floor.

Depends on: errors, stock, parts (contour, strip_path, folding, kernel, records), theory.bending.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from fabgen.errors import GeometryError
from fabgen.parts.contour import Circle, Contour, FoldLine, Point, Vertex, area_mm2, rounded, split_arc
from fabgen.parts.records import FlatPattern
from fabgen.parts.strip_path import StripPath, outward, profile
from fabgen.theory.bending import bend_allowance, bend_deduction

if TYPE_CHECKING:
    import cadquery

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
    """All that makes a wall. ``base_z_mm``: height of its lower edge in the feed's frame."""

    path: StripPath
    depth_mm: float
    base_z_mm: float
    tab: TabShape
    tabs_mm: tuple[float, ...]
    seam: Seam
    holes: tuple[WallHole, ...] = ()

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


def _relief_top(wall: Wall) -> float:
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
    tip, top = tab_tip_mm(wall), _relief_top(wall)
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
    holes += [Circle(h.along_mm, h.height_mm, h.diameter_mm) for h in wall.holes]
    holes += [Circle(s, tip + tab.length_mm - tab.hole_from_bend_mm, tab.hole_mm) for s in wall.tabs_mm]
    return FlatPattern(rounded(edge), tuple(holes), _fold_lines(wall), wall.path.thickness_mm, "outside")


def _fold_lines(wall: Wall) -> tuple[FoldLine, ...]:
    """Upright folds (corners, step) in order along the strip, then the tabs, which are folded last."""
    t, tab = wall.path.thickness_mm, wall.tab
    folds: list[FoldLine] = []
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
                deduction, number,
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
    """Where the tabs' holes are over the floor, in the feed's frame."""
    out = wall.bend_mid_mm + wall.tab.hole_from_bend_mm
    circles = []
    for s in wall.tabs_mm:
        (x, y), heading = wall.path.at(s)
        ox, oy = outward(heading)
        circles.append(Circle(x + out * ox, y + out * oy, wall.tab.hole_mm))
    return tuple(circles)


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


def wall_volume_mm3(wall: Wall, corner_mm: float) -> float:
    """Volume from the flat: area times t, and the neutral-fibre term of every fold over its length."""
    flat = wall_flat(wall, corner_mm)
    t = wall.path.thickness_mm
    area = area_mm2(flat.outline) - math.fsum(area_mm2(h) for h in flat.holes)
    extra = math.fsum(
        math.radians(abs(f.angle_deg)) * math.dist(f.start, f.end) * t * t * (0.5 - f.k_factor) for f in flat.folds
    )
    return area * t + extra


def wall_solid(wall: Wall) -> cadquery.Shape:
    """The finished wall in the feed's frame.

    On a rolled wall the tabs follow the circle: sectors with radial sides, as wide as the flat tab at the wall.
    """
    from fabgen.parts import kernel

    last = len(wall.path.stretches) - 1
    seam, t = wall.seam, wall.path.thickness_mm
    body = kernel.prism(profile(wall.path, 0, last), (), 0.0, wall.depth_mm)
    tail = kernel.prism(profile(wall.path, last), (), seam.tail_low_mm, wall.depth_mm - seam.tail_low_mm)
    tools = []
    for hole in (*(WallHole(seam.inner_row_mm, z, seam.hole_mm) for z in seam.heights_mm), *wall.holes):
        (x, y), heading = wall.path.at(hole.along_mm)
        ox, oy = outward(heading)
        ends = [(x + k * ox, y + k * oy, hole.height_mm) for k in (-2 * t, 3 * t)]
        tools.append(kernel.rod(ends[0], ends[1], hole.diameter_mm))
    tabs = []
    tab, under = _tab_body(wall), _under_tab(wall)
    for s in wall.tabs_mm:
        place, heading = wall.path.at(s)
        tabs.append(_put(tab, place, heading))
        tools += [_put(under, place, heading), *_reliefs(wall, s)]
    drilled = kernel.cut(kernel.fused(body, tail, what="wall"), *tools, what="wall")
    return kernel.moved(kernel.fused(drilled, *tabs, what="wall"), z_mm=wall.base_z_mm)


def _put(shape: cadquery.Shape, place: Point, heading_deg: float) -> cadquery.Shape:
    """From a frame with x outward, y along the wall, to the wall at a place."""
    from fabgen.parts import kernel

    return kernel.moved(kernel.turned(shape, heading_deg - 90.0), place[0], place[1])


def _rolled_radius(wall: Wall) -> float:
    return next((p.radius_mm for p in wall.path.stretches if p.rolled), 0.0)


def _swept(wall: Wall, section: Contour) -> cadquery.Shape:
    """A section (outward, up) swept along the wall over a tab's width, centred on y = 0."""
    import cadquery as cq

    from fabgen.parts import kernel

    plane = cq.Plane(origin=(0, 0, 0), xDir=(1, 0, 0), normal=(0, -1, 0))
    ring = kernel.contour_wire(section).moved(cq.Location(plane))
    width, radius = wall.tab.width_mm, _rolled_radius(wall)
    if not radius:
        body = cq.Solid.extrudeLinear(ring, [], cq.Vector(0, width, 0))
        return kernel.moved(body, y_mm=-width / 2)
    angle = math.degrees(width / radius)
    start, end = cq.Vector(-radius, 0, 0), cq.Vector(-radius, 0, 1)
    return cq.Solid.revolve(cq.Face.makeFromWires(ring), angle, start, end).rotate(start, end, -angle / 2)


def _under_tab(wall: Wall) -> cadquery.Shape:
    """What is cut from the wall to be replaced by a tab with its bend and a piece of wall above it.

    The cut ends above the reliefs: the kernel joins plain walls surely, a wall and a bend that touches it not.
    """
    t, top = wall.path.thickness_mm, _column_top(wall)
    return _swept(wall, Contour((Vertex(-t, -t), Vertex(t, -t), Vertex(t, top), Vertex(-t, top))))


def _column_top(wall: Wall) -> float:
    return _relief_top(wall) + wall.path.thickness_mm


def _reliefs(wall: Wall, along_mm: float) -> list[cadquery.Shape]:
    """The slots with round ends at both sides of a tab."""
    import cadquery as cq

    from fabgen.parts import kernel

    t, b, top, half = wall.path.thickness_mm, wall.tab.relief_mm, _relief_top(wall), wall.tab.width_mm / 2
    plane = cq.Plane(origin=(0, 0, 0), xDir=(0, 1, 0), normal=(1, 0, 0))
    bodies = []
    for side in (1.0, -1.0):
        low, high = sorted((0.0, side * b))
        slot = rounded([(low, -t, 0.0), (high, -t, 0.0), (high, top, b / 2), (low, top, b / 2)])
        body = kernel.prism(slot, (), -2 * t, 4 * t).moved(cq.Location(plane))
        place, heading = wall.path.at(along_mm + side * half)
        bodies.append(_put(body, place, heading))
    return bodies


def _tab_body(wall: Wall) -> cadquery.Shape:
    """A folded tab with the wall above its bend, in a frame with x outward from the wall's mid-surface, y along it, z up."""
    from fabgen.parts import kernel

    t, tab, mid = wall.path.thickness_mm, wall.tab, wall.bend_mid_mm
    centre = (mid, t / 2 + mid)
    inner, outer = tab.inside_radius_mm, tab.inside_radius_mm + t
    tip = wall.reach_mm
    top = _column_top(wall)
    section = Contour(
        (
            *split_arc(centre, outer, 180.0, 90.0), Vertex(centre[0], 0.0), Vertex(tip, 0.0), Vertex(tip, t),
            *split_arc(centre, inner, 270.0, -90.0), Vertex(t / 2, centre[1]), Vertex(t / 2, top), Vertex(-t / 2, top),
        )
    )  # fmt: skip
    body = _swept(wall, section)
    corners = [e for e in body.Edges() if e.Center().x > tip - tab.length_mm / 2 and abs(e.tangentAt(0.5).z) > 0.9]
    at = mid + tab.hole_from_bend_mm
    hole = kernel.rod((at, 0.0, -t), (at, 0.0, 2 * t), tab.hole_mm)
    return kernel.cut(body.fillet(corner_round_mm(tab), corners), hole, what="tab")


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
