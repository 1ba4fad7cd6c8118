"""The way of a bent or rolled strip, seen along its width: straights and arcs of its mid-surface.

The way runs counter-clockwise round the can as seen from the aperture, so outside is to the right. Every stretch
knows the length that it takes of the flat strip, which for a bend is that of the neutral fibre.

        flat position s  ->  place (x, y) of the mid-surface and heading

Depends on: errors, parts.contour, theory.bending.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from fabgen.errors import GeometryError
from fabgen.parts.contour import Contour, Point, Vertex, split_arc, tidied
from fabgen.theory.bending import bend_allowance


@dataclass(frozen=True)
class Stretch:
    """A straight (``radius_mm`` 0) or an arc of the mid-surface; ``sweep_deg`` positive to the left.

    ``inside_mm`` and ``k_factor`` of a bend; a rolled arc has its neutral fibre in the middle.
    """

    start: Point
    heading_deg: float
    radius_mm: float
    sweep_deg: float
    flat_mm: float
    rolled: bool = False
    k_factor: float = 0.5

    @property
    def middle_mm(self) -> float:
        """Length along the mid-surface."""
        return math.radians(abs(self.sweep_deg)) * self.radius_mm if self.radius_mm else self.flat_mm

    def at(self, share: float) -> tuple[Point, float]:
        """Place and heading at a share of the stretch."""
        h = math.radians(self.heading_deg)
        x, y = self.start
        if not self.radius_mm:
            return (x + self.flat_mm * share * math.cos(h), y + self.flat_mm * share * math.sin(h)), self.heading_deg
        side = math.copysign(self.radius_mm, self.sweep_deg)
        turned = math.radians(self.heading_deg + self.sweep_deg * share)
        place = (x + side * (math.sin(turned) - math.sin(h)), y - side * (math.cos(turned) - math.cos(h)))
        return place, self.heading_deg + self.sweep_deg * share


@dataclass(frozen=True)
class StripPath:
    """Stretches end to end; a new one is added with ``straight``, ``bend`` or ``roll``."""

    thickness_mm: float
    start: Point
    heading_deg: float
    stretches: tuple[Stretch, ...] = ()

    @property
    def end(self) -> tuple[Point, float]:
        """Place and heading where the strip ends so far."""
        return self.stretches[-1].at(1.0) if self.stretches else (self.start, self.heading_deg)

    @property
    def flat_mm(self) -> float:
        """Length of the flat strip."""
        return math.fsum(s.flat_mm for s in self.stretches)

    @property
    def middle_mm(self) -> float:
        """Length of the mid-surface."""
        return math.fsum(s.middle_mm for s in self.stretches)

    def _with(self, radius_mm: float, sweep_deg: float, flat_mm: float, rolled: bool, k_factor: float) -> StripPath:
        place, heading = self.end
        new = Stretch(place, heading, radius_mm, sweep_deg, flat_mm, rolled, k_factor)
        return replace(self, stretches=(*self.stretches, new))

    def straight(self, length_mm: float) -> StripPath:
        """Straight on; nothing for a length of 0."""
        if length_mm < -1e-9:
            raise GeometryError(f"a flat of the wall would be {length_mm:.2f} mm long; use a smaller bend radius")
        return self if length_mm < 1e-9 else self._with(0.0, 0.0, length_mm, False, 0.5)

    def bend(self, inside_mm: float, sweep_deg: float, k_factor: float) -> StripPath:
        """A bend of that inside radius, to the left where the sweep is positive."""
        flat = bend_allowance(abs(sweep_deg), inside_mm, k_factor, self.thickness_mm)
        return self._with(inside_mm + self.thickness_mm / 2, sweep_deg, flat, False, k_factor)

    def roll(self, middle_radius_mm: float, sweep_deg: float) -> StripPath:
        """A rolled arc of that mid-surface radius; its neutral fibre is the middle (K = 0.5 for R/t above 5)."""
        return self._with(middle_radius_mm, sweep_deg, math.radians(abs(sweep_deg)) * middle_radius_mm, True, 0.5)

    def at(self, flat_mm: float) -> tuple[Point, float]:
        """Place and heading of the mid-surface at a position along the flat strip."""
        if not -1e-9 <= flat_mm <= self.flat_mm + 1e-9:
            raise GeometryError(f"position {flat_mm:.2f} mm lies off a strip of {self.flat_mm:.2f} mm")
        rest = flat_mm
        for stretch in self.stretches[:-1]:
            if rest <= stretch.flat_mm:
                return stretch.at(rest / stretch.flat_mm)
            rest -= stretch.flat_mm
        return self.stretches[-1].at(rest / self.stretches[-1].flat_mm)

    def starts_mm(self) -> tuple[float, ...]:
        """Position along the flat strip where each stretch starts, and the strip's end."""
        total, starts = 0.0, [0.0]
        for stretch in self.stretches:
            total += stretch.flat_mm
            starts.append(total)
        return tuple(starts)


def outward(heading_deg: float) -> Point:
    """Unit vector to the right of the heading."""
    h = math.radians(heading_deg)
    return math.sin(h), -math.cos(h)


def profile(path: StripPath, first: int = 0, last: int | None = None) -> Contour:
    """The strip's cross-section between stretches ``first`` and ``last`` (not included): mid-surface -+ t/2."""
    pieces = path.stretches[first:last]
    half = path.thickness_mm / 2
    right = [v for piece in pieces for v in offset_side(piece, half)]
    left = [v for piece in reversed(pieces) for v in offset_side(_backwards(piece), half)]
    end, heading = pieces[-1].at(1.0)
    start, first_heading = pieces[0].at(0.0)
    (ex, ey), (sx, sy) = outward(heading), outward(first_heading)
    return tidied(
        Contour(
            (
                *right,
                Vertex(end[0] + half * ex, end[1] + half * ey),
                *left,
                Vertex(start[0] - half * sx, start[1] - half * sy),
            )
        )
    )


def _backwards(piece: Stretch) -> Stretch:
    end, heading = piece.at(1.0)
    return replace(piece, start=end, heading_deg=heading + 180.0, sweep_deg=-piece.sweep_deg)


def part_of(piece: Stretch, first: float, last: float) -> Stretch:
    """The stretch between two shares of its length."""
    start, heading = piece.at(first)
    share = last - first
    return replace(
        piece, start=start, heading_deg=heading, sweep_deg=piece.sweep_deg * share, flat_mm=piece.flat_mm * share
    )


def offset_side(piece: Stretch, right_mm: float) -> Sequence[Vertex]:
    """The stretch moved to the right, without its end point."""
    (x, y), heading = piece.at(0.0)
    ox, oy = outward(heading)
    if not piece.radius_mm:
        return (Vertex(x + right_mm * ox, y + right_mm * oy),)
    side = math.copysign(1.0, piece.sweep_deg)
    centre = (x - side * piece.radius_mm * ox, y - side * piece.radius_mm * oy)
    radius = piece.radius_mm + side * right_mm
    return split_arc(centre, radius, heading - side * 90.0, piece.sweep_deg)


@dataclass(frozen=True)
class Joggle:
    """Step of a lap seam outwards: two bends of opposite sense; ``turn_deg`` is how far the
    heading turns left over both (0 on a flat)."""

    out_deg: float
    back_deg: float
    turn_deg: float


def joggle(inside_mm: float, thickness_mm: float, step_mm: float, middle_radius_mm: float | None) -> Joggle:
    """The two bends that lift a strip by ``step_mm``: from a flat (None), 2 r (1 - cos a) = step with
    r = inside + t/2; from a circle of ``middle_radius_mm`` to the concentric one that is a step larger, by the
    triangle of the three centres."""
    r = inside_mm + thickness_mm / 2
    if middle_radius_mm is None:
        angle = math.degrees(math.acos(1 - step_mm / (2 * r)))
        return Joggle(angle, angle, 0.0)
    first, second, span = middle_radius_mm + r, middle_radius_mm + step_mm - r, 2 * r
    if second <= 0:
        raise GeometryError(f"a can of {2 * middle_radius_mm:.1f} mm is too narrow for a stepped seam")
    out = math.degrees(math.acos((first**2 + span**2 - second**2) / (2 * first * span)))
    inner = math.degrees(math.acos((second**2 + span**2 - first**2) / (2 * second * span)))
    return Joggle(out, 180.0 - inner, 180.0 - inner - out)
