"""The joints of a split printed body, and its pieces: see ``split`` for where the cuts are.

A piece is what of the whole body, with ears and bells added, lies in its sector and its ring. The sector's tool
has a tongue on its first face and a groove on its last, so that all pieces of a ring are alike. Tongues are
prisms with 45 degree faces: the floor's runs along the radius, the ears' runs along the wall.

Depends on: parts.kernel, parts.print_rules, parts.split, stock.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING

from fabgen.parts import kernel
from fabgen.parts.print_rules import PrintRules
from fabgen.parts.split import (
    EAR_HALF_MM,
    EAR_REACH_MM,
    EAR_SCREW,
    SPIGOT_MM,
    Envelope,
    Split,
    bed_turn_deg,
    bell_mm,
    free_bed_mm,
)
from fabgen.stock import tables

if TYPE_CHECKING:
    import cadquery

KEY_MM = 4.0
"""Width of the key that turns the rings into line."""
EAR_TONGUE_MM = 1.0
"""Half width of the tongue in the ears."""
FAR = 4.0
"""Tools reach this many times the body's radius."""


@dataclass(frozen=True)
class Joint:
    """What the joints need of the body: thickness of its floor and of its wall, and where the ears end."""

    envelope: Envelope
    split: Split
    rules: PrintRules
    wall_mm: float
    floor_mm: float
    ear_top_mm: float


def ear_spans_mm(joint: Joint) -> tuple[tuple[float, float], ...]:
    """Heights between which the ears run, one span per ring; spans too short for a screw are left out."""
    ends = (joint.envelope.bottom_mm, *joint.split.levels_mm, joint.envelope.top_mm)
    bell = bell_mm(joint.rules)
    spans = []
    for i in range(len(ends) - 1):
        low = ends[i] if i == 0 else ends[i] + SPIGOT_MM + 1.0
        high = min(joint.ear_top_mm, ends[i + 1] - (bell + 1.0 if i < len(ends) - 2 else 0.0))
        if high - low >= 2 * EAR_REACH_MM:
            spans.append((low, high))
    return tuple(spans)


def ear_screw_heights_mm(joint: Joint) -> tuple[float, ...]:
    """Heights of the screws through the ears: near each end and at most 60 mm apart."""
    heights: list[float] = []
    for index, (low, high) in enumerate(ear_spans_mm(joint)):
        first = low + (joint.floor_mm + 6.0 if index == 0 else EAR_REACH_MM + 4.0)
        last = high - 6.0
        count = max(1, math.ceil((last - first) / 60.0))
        heights += [first + (last - first) * i / count for i in range(count + 1)] if last > first else [first]
    return tuple(heights)


def ear_screw_radius_mm(joint: Joint) -> float:
    """Distance of the ears' screws from the axis."""
    return joint.envelope.wall_radius_mm + EAR_REACH_MM - 4.5


def floor_tongue_mm(joint: Joint) -> float:
    """Half width of the tongue in the floor; 0 for a floor too thin for one, which is joined flat.

    The lips beside the groove keep the least wall.
    """
    half = joint.floor_mm / 2 - joint.rules.wall_min_mm - joint.rules.clearance_mm * math.sqrt(2)
    return half if half >= joint.rules.line_mm else 0.0


def with_joints(whole: cadquery.Shape, joint: Joint) -> cadquery.Shape:
    """The body with ears, bells and keys, and the ears' screw holes."""
    extra = [*_ears(joint), *_bells(joint)]
    if not extra:
        return whole
    body = kernel.fused(whole, *extra, what=joint.envelope.name)
    return kernel.cut(body, *_ear_holes(joint), what=joint.envelope.name)


def piece_solid(whole: cadquery.Shape, joint: Joint, ring: int, sector: int) -> cadquery.Shape:
    """One piece in the feed's frame; ``whole`` has its joints already."""
    tools = []
    if joint.split.sectors > 1:
        tools.append(_sector_tool(joint, sector))
    if joint.split.levels_mm:
        tools.append(_ring_tool(joint, ring))
    return kernel.common(whole, *tools, what=f"{joint.envelope.name} piece")


def in_print(piece: cadquery.Shape, joint: Joint, sector: int) -> cadquery.Shape:
    """The piece as it lies on the bed."""
    split = joint.split
    bell = bell_mm(joint.rules) if split.levels_mm else 0.0
    turn = bed_turn_deg(joint.envelope, split.sectors, free_bed_mm(joint.rules), bell) or 0.0
    middle = split.first_deg + 360.0 * (sector + 0.5) / split.sectors if split.sectors > 1 else 0.0
    return kernel.on_bed(kernel.turned(piece, turn - middle))


def _ears(joint: Joint) -> list[cadquery.Shape]:
    wall, reach = joint.envelope.wall_radius_mm, joint.envelope.wall_radius_mm + EAR_REACH_MM
    root = wall - joint.wall_mm / 2
    ears = []
    for low, high in ear_spans_mm(joint):
        # Above a bell the ear starts on a 45 degree slope; at the bottom it stands on the bed.
        start = low if low == joint.envelope.bottom_mm else low + reach - root
        section = ((root, low), (reach, start), (reach, high), (root, high))
        ear = kernel.extruded([(r, -EAR_HALF_MM, z) for r, z in section], (0, 2 * EAR_HALF_MM, 0))
        ears += [kernel.turned(ear, angle) for angle in joint.split.cut_angles_deg()]
    return ears


def _ear_holes(joint: Joint) -> list[cadquery.Shape]:
    diameter = tables.screw(EAR_SCREW).clearance_medium_mm + joint.rules.hole_mm
    radius, half = ear_screw_radius_mm(joint), EAR_HALF_MM + 1.0
    holes = []
    for z in ear_screw_heights_mm(joint):
        hole = kernel.teardrop((radius, -half, z), (radius, half, z), diameter)
        holes += [kernel.turned(hole, angle) for angle in joint.split.cut_angles_deg()]
    return holes


def _bells(joint: Joint) -> list[cadquery.Shape]:
    wall, gap = joint.envelope.wall_radius_mm, joint.rules.clearance_mm
    out = wall + bell_mm(joint.rules)
    shapes = []
    for level in joint.split.levels_mm:
        # The cone starts lower, so that the bell keeps its wall at the foot of the gap.
        least = joint.rules.wall_min_mm * math.sqrt(2) - (out - wall - gap)
        low, top = level - max(gap, least), level + SPIGOT_MM
        bell = kernel.revolved(
            (
                (wall, low - (out - wall)), (out, low), (out, top),
                (wall + gap, top), (wall + gap, level), (wall, level),
            )
        )
        slot = kernel.box(
            (wall - 1, -KEY_MM / 2 - gap, top - KEY_MM), (out + 1, KEY_MM / 2 + gap, top + 1)
        )
        shapes.append(kernel.cut(bell, slot, what="bell"))
        # The key hangs over the bell's floor on a 45 degree face of its own.
        root, low = wall - joint.wall_mm / 2, top - KEY_MM + gap
        rise = min(out - wall, KEY_MM - gap)
        section = ((root, low), (wall, low), (wall + rise, low + rise), (wall + rise, top), (root, top))
        corners = [(r, -KEY_MM / 2, z) for r, z in section]
        shapes.append(kernel.extruded(corners, (0, KEY_MM, 0)))
    return shapes


def _ring_tool(joint: Joint, ring: int) -> cadquery.Shape:
    levels, envelope = joint.split.levels_mm, joint.envelope
    far = FAR * envelope.edge_radius_mm
    low = levels[ring - 1] if ring > 0 else envelope.bottom_mm - 10.0
    high = levels[ring] if ring < len(levels) else envelope.top_mm + 10.0
    tool = kernel.rod((0, 0, low), (0, 0, high), 2 * far)
    seam = envelope.wall_radius_mm + joint.rules.clearance_mm / 2
    bell = partial(_bell_zone, joint, seam, far)
    if ring < len(levels):
        tool = kernel.fused(tool, bell(high), what="ring tool")
    if ring > 0:
        tool = kernel.cut(tool, bell(low), what="ring tool")
    return tool


def _bell_zone(joint: Joint, seam_mm: float, far_mm: float, level_mm: float) -> cadquery.Shape:
    """All outside the spigot over its length, but for the key, which belongs to the upper ring."""
    gap = joint.rules.clearance_mm
    zone = kernel.tube((0, 0, level_mm), (0, 0, level_mm + SPIGOT_MM), 2 * far_mm, 2 * seam_mm)
    key = kernel.box(
        (0, -KEY_MM / 2 - gap / 2, level_mm + SPIGOT_MM - KEY_MM + gap / 2),
        (2 * far_mm, KEY_MM / 2 + gap / 2, level_mm + SPIGOT_MM + 1),
    )
    return kernel.cut(zone, key, what="ring tool")


def _sector_tool(joint: Joint, sector: int) -> cadquery.Shape:
    split, envelope = joint.split, joint.envelope
    far = FAR * envelope.edge_radius_mm
    pitch = 360.0 / split.sectors
    steps = max(2, math.ceil(pitch / 60.0))
    corners = [(0.0, 0.0, envelope.bottom_mm - 10.0)]
    corners += [
        (far * math.cos(math.radians(a)), far * math.sin(math.radians(a)), envelope.bottom_mm - 10.0)
        for a in (pitch * i / steps for i in range(steps + 1))
    ]
    wedge = kernel.extruded(corners, (0, 0, envelope.top_mm - envelope.bottom_mm + 20.0))
    tongues, grooves = _tongues(joint, 0.0), _tongues(joint, joint.rules.clearance_mm)
    if tongues:
        wedge = kernel.fused(wedge, *tongues, what="sector tool")
        wedge = kernel.cut(wedge, *(kernel.turned(g, pitch) for g in grooves), what="sector tool")
    return kernel.turned(wedge, split.cut_angles_deg()[sector])


def _tongues(joint: Joint, gap_mm: float) -> list[cadquery.Shape]:
    """Square prisms on edge along the cut at angle 0, larger by ``gap_mm`` normal to their faces."""
    envelope, spread = joint.envelope, gap_mm * math.sqrt(2)
    shapes = []
    half = floor_tongue_mm(joint)
    start = max(envelope.hub_radius_mm, 0.1 * envelope.wall_radius_mm) + 2.0
    if half > 0:
        z, h = envelope.bottom_mm + joint.floor_mm / 2, half + spread
        end = envelope.wall_radius_mm + EAR_REACH_MM
        square = [(start - gap_mm, 0.0, z - h), (start - gap_mm, h, z), (start - gap_mm, 0.0, z + h),
                  (start - gap_mm, -h, z)]
        shapes.append(kernel.extruded(square, (end - start + 2 * gap_mm, 0, 0)))
    # The groove stays outside the wall.
    radius = envelope.wall_radius_mm + EAR_TONGUE_MM + joint.rules.clearance_mm * math.sqrt(2)
    h = EAR_TONGUE_MM + spread
    for low, high in ear_spans_mm(joint):
        square = [(radius - h, 0.0, low), (radius, h, low), (radius + h, 0.0, low), (radius, -h, low)]
        # Ends short of a bell, so that the groove has no roof.
        shapes.append(kernel.extruded(square, (0, 0, high - low + 0.3)))
    return shapes
