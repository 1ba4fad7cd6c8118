"""How a printed body of revolution that is larger than the bed is cut into pieces, and the joints it gets.

Sectors are screwed together through ears outside the wall, with a tongue in a groove for alignment; rings stand
in each other by a bell and spigot with a key on +x. Seen from above, and in section::

      wall      :                             upper ring   | |   .-- key
    ------------:------------                              | | .-.  bell, spigot_length
        ear  |  <tongue  |   ear                           | | | |
             |  :        |                          level  |=|_| |
             '--o--------'  screw                          | | .'  45 degrees
                : cut                         lower ring   | |'

Cuts keep clear of every opening of the floor and the flange. The cut faces meet without a gap, so that the bore
stays true; the tongue has the print rules' clearance in its groove, and so has the spigot in its bell.

Depends on: errors, parts.contour, parts.print_rules.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from fabgen.errors import GeometryError
from fabgen.parts.contour import Circle, Point
from fabgen.parts.print_rules import PrintRules

SECTORS = (1, 2, 3, 4, 6, 8)
MOST_PIECES = 12
"""More than this is no longer sensible for one body. A judgement, not a measured limit."""
EAR_HALF_MM = 4.0
EAR_REACH_MM = 12.0
EAR_SCREW = "M3"
SPIGOT_MM = 6.0
BELL_LINES = 4
"""Thickness of the bell in printed lines."""


@dataclass(frozen=True)
class Envelope:
    """What the cuts must know of a body: radii, heights, keep-clear circles and keep-clear bands of height.

    ``prefer_clear`` are circles that a cut crosses only when no other angle is left; ``instead`` is what to do when
    the body cannot be cut.
    """

    name: str
    wall_radius_mm: float
    edge_radius_mm: float
    bottom_mm: float
    top_mm: float
    keep_clear: tuple[Circle, ...]
    bands: tuple[tuple[float, float], ...] = ()
    hub_radius_mm: float = 0.0
    prefer_clear: tuple[Circle, ...] = ()
    instead: str = "use can.make = 'rolled', which has no such limit"


@dataclass(frozen=True)
class Split:
    """The cuts: number of sectors, angle of the first cut, heights of the ring joints."""

    sectors: int
    first_deg: float
    levels_mm: tuple[float, ...]

    @property
    def pieces(self) -> int:
        """Number of pieces."""
        return self.sectors * (len(self.levels_mm) + 1)

    def cut_angles_deg(self) -> tuple[float, ...]:
        """Angles of the radial cuts; none for a whole ring."""
        if self.sectors == 1:
            return ()
        return tuple(self.first_deg + 360.0 * i / self.sectors for i in range(self.sectors))


def bell_mm(rules: PrintRules) -> float:
    """How far a bell stands out from the wall."""
    return rules.clearance_mm + rules.wall(BELL_LINES)


def plan_split(envelope: Envelope, rules: PrintRules) -> Split:
    """The fewest pieces that fit the bed.

    Raises GeometryError when more than MOST_PIECES would be needed; it names the bed and the make that work.
    """
    bed = rules.bed_mm
    free = free_bed_mm(rules)
    levels = _levels(envelope, bed[2] - rules.margin_mm)
    bell = bell_mm(rules) if levels else 0.0
    for sectors in SECTORS:
        if sectors * (len(levels) + 1) > MOST_PIECES:
            break
        if bed_turn_deg(envelope, sectors, free, bell) is None:
            continue
        first = _clear_angle(envelope, sectors)
        if first is not None:
            return Split(sectors, first, levels)
    raise GeometryError(
        f"{envelope.name}: {2 * envelope.edge_radius_mm:.0f} mm wide and "
        f"{envelope.top_mm - envelope.bottom_mm:.0f} mm high cannot be cut into {MOST_PIECES} pieces or fewer for "
        f"a printer bed of {bed[0]:g} x {bed[1]:g} x {bed[2]:g} mm; "
        f"{envelope.instead}, or a larger limits.bed_mm"
    )


def free_bed_mm(rules: PrintRules) -> tuple[float, float]:
    """Width and depth of the bed inside its margins."""
    return rules.bed_mm[0] - 2 * rules.margin_mm, rules.bed_mm[1] - 2 * rules.margin_mm


def footprint(envelope: Envelope, sectors: int, bell_mm: float = 0.0) -> tuple[Point, ...]:
    """Points around one piece as it lies in the feed's frame, its middle on +x."""
    edge = max(envelope.edge_radius_mm, envelope.wall_radius_mm + bell_mm)
    if sectors == 1:
        return tuple((edge * math.cos(a), edge * math.sin(a)) for a in _steps(-math.pi, math.pi))
    ear = math.hypot(max(edge, envelope.wall_radius_mm + EAR_REACH_MM), EAR_HALF_MM)
    half = math.pi / sectors
    arc = [(edge * math.cos(a), edge * math.sin(a)) for a in _steps(-half, half)]
    hub = envelope.hub_radius_mm
    tongue = 2.0  # beyond the cut, in a groove of the neighbour
    corners = [(ear * math.cos(a), ear * math.sin(a)) for a in (-half, half)]
    beyond = [
        (x - tongue * math.sin(half), y + s * tongue * math.cos(half))
        for s, (x, y) in zip((-1.0, 1.0), corners, strict=True)
    ]
    inner = [(hub * math.cos(a), hub * math.sin(a)) for a in _steps(-half, half)]
    return (*arc, *corners, *beyond, *inner, (-tongue, 0.0))


def bed_turn_deg(
    envelope: Envelope, sectors: int, free_mm: tuple[float, float], bell_mm: float = 0.0
) -> float | None:
    """Turn of a piece with its middle on +x that makes it fit the free bed; None when none does."""
    points = footprint(envelope, sectors, bell_mm)
    for turn in range(0, 180, 5):
        c, s = math.cos(math.radians(turn)), math.sin(math.radians(turn))
        xs = [c * x - s * y for x, y in points]
        ys = [s * x + c * y for x, y in points]
        if max(xs) - min(xs) <= free_mm[0] and max(ys) - min(ys) <= free_mm[1]:
            return float(turn)
    return None


def _steps(start: float, end: float) -> Iterator[float]:
    count = max(2, math.ceil((end - start) / math.radians(3)))
    return (start + (end - start) * i / count for i in range(count + 1))


def _levels(envelope: Envelope, height_mm: float) -> tuple[float, ...]:
    """Heights of ring joints, evenly spread, moved down where they would meet a keep-clear band."""
    total = envelope.top_mm - envelope.bottom_mm
    if total <= height_mm:
        return ()
    usable = height_mm - SPIGOT_MM
    if usable <= 4 * SPIGOT_MM:
        raise GeometryError(
            f"{envelope.name}: a bed {height_mm:.0f} mm high is too low for the joints between rings; "
            f"limits.bed_mm needs at least {6 * SPIGOT_MM:.0f} mm of height"
        )
    for count in range(math.ceil(total / usable), MOST_PIECES + 1):
        levels = [_outside(envelope.bottom_mm + total * i / count, envelope.bands) for i in range(1, count)]
        ends = [envelope.bottom_mm, *levels, envelope.top_mm]
        if all(0 < b - a <= usable for a, b in itertools.pairwise(ends)):
            return tuple(levels)
    return tuple(float(i) for i in range(MOST_PIECES))


def _outside(level_mm: float, bands: Sequence[tuple[float, float]]) -> float:
    for low, high in sorted(bands, reverse=True):
        if low < level_mm < high:
            level_mm = low
    return level_mm


def _clear_angle(envelope: Envelope, sectors: int) -> float | None:
    """Angle of the first cut, as near as can be to half a sector from +x, at which all cuts keep clear."""
    if sectors == 1:
        return 0.0
    every = (*envelope.keep_clear, *envelope.prefer_clear)
    return next(
        (a for keep in (every, envelope.keep_clear) for a in _angles(sectors) if _all_clear(keep, a, sectors)), None
    )


def _angles(sectors: int) -> Iterator[float]:
    pitch = 360.0 / sectors
    for step in range(int(pitch)):
        yield pitch / 2 + step / 2
        yield pitch / 2 - step / 2


def _all_clear(keep: Sequence[Circle], first_deg: float, sectors: int) -> bool:
    angles = [math.radians(first_deg + 360.0 * i / sectors) for i in range(sectors)]
    return all(_clears(hole, angle) for hole in keep for angle in angles)


def _clears(hole: Circle, angle: float) -> bool:
    along = hole.x_mm * math.cos(angle) + hole.y_mm * math.sin(angle)
    across = -hole.x_mm * math.sin(angle) + hole.y_mm * math.cos(angle)
    distance = abs(across) if along > 0 else math.hypot(hole.x_mm, hole.y_mm)
    return distance > hole.diameter_mm / 2
