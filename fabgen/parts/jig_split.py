r"""Bending forms larger than the printer's bed, in pieces that key into each other.

Loop form, seen from above, and leg form::

          . - : - .                        :        knob in the neighbour's socket,
        /  ._(:)_. \                  ====(:)====   the cut through its neck
       |  /       \  |                     :
       | (:)     (:) |                ====(:)====
        \  '-(:)-' /                       :
          ' - : - '

The pieces lie face to face; the knobs only keep them from sliding, and each piece has screws of its own. A large
loop form is a ring in sectors, whose closing sets its size; its marks lie in the first sector.

Depends on: parts (contour, kernel).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from fabgen.parts.contour import Circle, Point, polygon

if TYPE_CHECKING:
    import cadquery

SECTORS = (2, 3, 4, 6, 8, 10, 12)
FIT_MM = 0.1
"""Between knob and socket, all round: pressed in by hand. Common practice, no source."""
NECK = 0.6
"""A knob's centre lies this part of its radius beyond the cut, so that it cannot be pulled out."""
LOOP_KNOB_MM = 7.0
"""Radius of the knobs of the loop form. Common practice, no source."""
RING_MM = 40.0
"""Width of a ring, beside the plate's rim: knobs, screws and a good stand. Common practice, no source."""
LEAST_HOLE_MM = 40.0
MARK_MARGIN_DEG = 1.5
FAR_MM = 2000.0


@dataclass(frozen=True)
class Knob:
    """A knob on one side of a cut: its circle's centre, beyond the cut, its radius and the body's height there."""

    at: Point
    radius_mm: float
    height_mm: float


def knob_balance_mm3(knob: Knob) -> float:
    """What a piece with this knob gains less what one with its socket loses: negative, the clearance."""
    beyond = NECK * knob.radius_mm
    return (_beyond_mm2(knob.radius_mm, beyond) - _beyond_mm2(knob.radius_mm + FIT_MM, beyond)) * knob.height_mm


def knob_mm3(knob: Knob, grown_mm: float = 0.0) -> float:
    """Volume of a knob beyond its cut; of its socket with ``grown_mm`` = FIT_MM."""
    return _beyond_mm2(knob.radius_mm + grown_mm, NECK * knob.radius_mm) * knob.height_mm


def _beyond_mm2(radius_mm: float, centre_mm: float) -> float:
    """Area of a circle beyond a line ``centre_mm`` from its centre."""
    segment = radius_mm**2 * math.acos(centre_mm / radius_mm) - centre_mm * math.sqrt(radius_mm**2 - centre_mm**2)
    return math.pi * radius_mm**2 - segment


def bed_turn_deg(points: Sequence[Point], bed_mm: tuple[float, float]) -> float | None:
    """Turn that lays a piece with these corners onto the bed; None when none does."""
    for turn in range(0, 180, 3):
        c, s = math.cos(math.radians(turn)), math.sin(math.radians(turn))
        xs, ys = [c * x - s * y for x, y in points], [s * x + c * y for x, y in points]
        if max(xs) - min(xs) <= bed_mm[0] and max(ys) - min(ys) <= bed_mm[1]:
            return float(turn)
    return None


def round_points(radius_mm: float, half_deg: float = 180.0) -> list[Point]:
    """Points on a circle, or on its arc about +x."""
    angles = [math.radians(half_deg * (i / 60 - 1)) for i in range(121)]
    return [(radius_mm * math.cos(a), radius_mm * math.sin(a)) for a in angles]


@dataclass(frozen=True)
class LoopSplit:
    """How a loop form is split: sectors, turn of a sector on the bed, and the diameter of the open middle (0: none)."""

    sectors: int
    turn_deg: float
    disc_mm: float
    open_mm: float

    @property
    def middle_mm(self) -> float:
        """Radius half way over the ring."""
        return (self.disc_mm + self.open_mm) / 4

    def knob(self, height_mm: float = 0.0) -> Knob:
        """The knob of the piece about +x, over its cut at half a sector."""
        half, beyond = math.pi / self.sectors, NECK * LOOP_KNOB_MM
        along = self.middle_mm if self.open_mm else 0.8 * self.middle_mm
        at = (along * math.cos(half) - beyond * math.sin(half), along * math.sin(half) + beyond * math.cos(half))
        return Knob(at, LOOP_KNOB_MM, height_mm)

    def screws(self, hole_mm: float) -> tuple[Circle, ...]:
        """Two screw holes in every sector, a third of it apart; in a disc without open middle further out."""
        pitch, r = 2 * math.pi / self.sectors, self.middle_mm * (1.0 if self.open_mm else 1.6)
        angles = (pitch * (i + side / 6) for i in range(self.sectors) for side in (1, -1))
        return tuple(Circle(r * math.cos(a), r * math.sin(a), hole_mm) for a in angles)


def loop_split(
    plate_mm: float, disc_mm: float, half_gap_deg: float, bed_mm: tuple[float, float]
) -> LoopSplit | None:
    """The fewest equal sectors of the loop form that fit the bed; None when twelve do not."""
    hole = disc_mm - 2 * RING_MM
    hole = hole if hole >= LEAST_HOLE_MM else 0.0
    for sectors in SECTORS:
        half, plan = 180.0 / sectors, LoopSplit(sectors, 0.0, disc_mm, hole)
        knob = plan.knob()
        head = [(knob.at[0] + x, knob.at[1] + y) for x, y in round_points(knob.radius_mm)]
        inner = round_points(hole / 2, half) if hole else [(0.0, 0.0)]
        turn = bed_turn_deg([*inner, *round_points(plate_mm / 2, half), *head], bed_mm)
        if turn is not None and half_gap_deg < half - MARK_MARGIN_DEG:
            return replace(plan, turn_deg=turn)
    return None


def loop_piece(whole: cadquery.Shape, plan: LoopSplit, number: int) -> cadquery.Shape:
    """Sector ``number`` (0 is about +x) of the loop form, in print."""
    from fabgen.parts import kernel

    half = 180.0 / plan.sectors
    corners = [(FAR_MM * math.cos(a), FAR_MM * math.sin(a)) for a in (math.radians(half * k) for k in (-1, 0, 1))]
    tool = kernel.prism(polygon([(0.0, 0.0), *corners]), (), -1.0, FAR_MM)
    knob = plan.knob()
    tool = kernel.fused(tool, _rod(knob.at, knob.radius_mm), what="form's tool")
    socket = kernel.turned(_rod(knob.at, knob.radius_mm + FIT_MM), -2 * half)
    tool = kernel.turned(kernel.cut(tool, socket, what="form's tool"), 2 * half * number)
    piece = kernel.common(whole, tool, what="piece of the loop's form")
    return kernel.on_bed(kernel.turned(piece, plan.turn_deg - 2 * half * number))


def strip_piece(
    whole: cadquery.Shape, cuts_mm: Sequence[float], knobs: Sequence[Sequence[Knob]], number: int
) -> cadquery.Shape:
    """What of a form lies between two upright cuts across x; the knobs of a cut belong to the piece at its left."""
    from fabgen.parts import kernel

    ends = (-FAR_MM, *cuts_mm, FAR_MM)
    tool = kernel.box((ends[number], -FAR_MM, -1.0), (ends[number + 1], FAR_MM, FAR_MM))
    if number < len(cuts_mm):
        tool = kernel.fused(tool, *(_rod(k.at, k.radius_mm) for k in knobs[number]), what="form's tool")
    if number > 0:
        tool = kernel.cut(tool, *(_rod(k.at, k.radius_mm + FIT_MM) for k in knobs[number - 1]), what="form's tool")
    return kernel.on_bed(kernel.common(whole, tool, what="piece of the bars' form"))


def _rod(at: Point, radius_mm: float) -> cadquery.Shape:
    from fabgen.parts import kernel

    return kernel.rod((*at, -1.0), (*at, FAR_MM - 1.0), 2 * radius_mm)
