"""A can as one body of revolution with its flange, shared by the printed and the turned can.

Section, right half; ``ledge`` carries a printed choke, ``bead`` holds a radome cap, and
a choke in one piece with the can is a ``channel`` outside the wall (not drawn)::

             rim     .--.
            bead     |  <
                     |  |
       ledge_top     |  '----.
                     |       |  ledge_height
                     |     .'   45 degrees
       flange_top    |  .-'-------------.
     floor_top ------'                  |
     floor_bottom ----------------------'
                     inner  outer       flange width / 2

Depends on: errors, parts.contour, parts.kernel, parts.floor_plan.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from fabgen.errors import GeometryError
from fabgen.parts import kernel
from fabgen.parts.contour import Circle, Outline, Point, area_mm2
from fabgen.parts.floor_plan import FlangePlan, marked_outline

if TYPE_CHECKING:
    import cadquery


BEAD_SLOPE = 1.6
"""Rise of the bead's flanks over its height; steeper than 45 degrees, so that a coarse mesh prints as well."""


@dataclass(frozen=True)
class Ledge:
    """A ring around the can: top face, width beyond the wall, height before the 45 degree cone."""

    top_mm: float
    width_mm: float
    height_mm: float


@dataclass(frozen=True)
class Channel:
    """A choke in one piece with the can: inner radius of its wall, its floor's face and its rim."""

    bore_radius_mm: float
    wall_radius_mm: float
    floor_mm: float
    rim_mm: float


@dataclass(frozen=True)
class Body:
    """Radii and heights of the body; for a printed can that is behind the lining."""

    inner_radius_mm: float
    outer_radius_mm: float
    floor_top_mm: float
    floor_bottom_mm: float
    rim_mm: float
    flange: FlangePlan | None
    ledge: Ledge | None = None
    channel: Channel | None = None
    bead_mm: float = 0.0
    bead_z_mm: float = 0.0

    @property
    def hull_radius_mm(self) -> float:
        """Radius of the outermost wall."""
        return self.channel.wall_radius_mm if self.channel else self.outer_radius_mm

    @property
    def flange_top_mm(self) -> float:
        """Upper face of the flange; the floor's outer face where there is none."""
        return self.floor_bottom_mm + (self.flange.thickness_mm if self.flange else 0.0)


def profile(body: Body) -> tuple[Point, ...]:
    """The section's outline in (radius, z), counter-clockwise from the axis at the floor's outer face.

    Raises GeometryError when the ledge reaches down into the flange.
    """
    outer, flange = body.outer_radius_mm, body.flange
    points: list[Point] = [(0.0, body.floor_bottom_mm)]
    if flange is not None:
        # A square flange is added as a plate around this profile.
        edge = flange.width_mm / 2 if isinstance(flange.outline, Circle) else body.hull_radius_mm
        points += [(edge, body.floor_bottom_mm), (edge, body.flange_top_mm)]
    points += _ledge(body, body.flange_top_mm) if body.ledge else [(body.hull_radius_mm, body.flange_top_mm)]
    if body.channel is not None:
        ring = body.channel
        points += [(ring.wall_radius_mm, ring.rim_mm), (ring.bore_radius_mm, ring.rim_mm)]
        points += [(ring.bore_radius_mm, ring.floor_mm), (outer, ring.floor_mm)]
    if body.bead_mm > 0:
        z, bead, rise = body.bead_z_mm, body.bead_mm, BEAD_SLOPE * body.bead_mm
        points += [(outer, z - rise), (outer + bead, z), (outer, z + rise)]
    inner = body.inner_radius_mm
    points += [(outer, body.rim_mm), (inner, body.rim_mm), (inner, body.floor_top_mm), (0.0, body.floor_top_mm)]
    return tuple(_distinct(points))


def _ledge(body: Body, base_mm: float) -> list[Point]:
    ledge, outer = body.ledge, body.outer_radius_mm
    if ledge is None:
        return []
    low, edge = ledge.top_mm - ledge.height_mm, outer + ledge.width_mm
    if low < base_mm:
        raise GeometryError(
            f"the ledge's lower edge would be {base_mm - low:.1f} mm inside the flange; raise the ledge by that"
        )
    start = low - ledge.width_mm
    foot = [(outer, base_mm), (outer, start)] if start > base_mm else [(edge - (low - base_mm), base_mm)]
    return [*foot, (edge, low), (edge, ledge.top_mm), (outer, ledge.top_mm)]


def shell_solid(
    body: Body, openings: Sequence[Outline], flange_holes: Sequence[Outline], what: str
) -> cadquery.Shape:
    """The body with all openings of the floor and of the flange, as one solid."""
    shell = kernel.revolved(profile(body))
    flange = body.flange
    if flange is not None and not isinstance(flange.outline, Circle):
        bore = Circle(0.0, 0.0, 2 * body.hull_radius_mm)
        ring = kernel.prism(flange.outline, (bore,), body.floor_bottom_mm, flange.thickness_mm)
        shell = kernel.fused(shell, ring, what=what)
    cutters = [*openings, *flange_holes, *((flange.mark,) if flange else ())]
    top = max(body.floor_top_mm, body.flange_top_mm) + 1.0
    low = body.floor_bottom_mm - 1.0
    return kernel.cut(shell, *(kernel.prism(o, (), low, top - low) for o in cutters), what=what)


def shell_volume_mm3(body: Body, openings: Sequence[Outline], flange_holes: Sequence[Outline]) -> float:
    """Volume of ``shell_solid`` in closed form."""
    volume = revolved_volume_mm3(profile(body))
    volume -= sum(area_mm2(o) for o in openings) * (body.floor_top_mm - body.floor_bottom_mm)
    flange = body.flange
    if flange is None:
        return volume
    inside = body.hull_radius_mm if not isinstance(flange.outline, Circle) else flange.width_mm / 2
    plate = area_mm2(marked_outline(flange)) - math.pi * inside**2
    return volume + flange.thickness_mm * (plate - sum(area_mm2(o) for o in flange_holes))


def _distinct(points: Sequence[Point]) -> list[Point]:
    return [b for a, b in itertools.pairwise((points[-1], *points)) if math.dist(a, b) > 1e-9]


def revolved_volume_mm3(points: Sequence[Point]) -> float:
    """Volume of a polygon in (radius, z) turned about z: the sum of its edges' frusta (Pappus)."""
    total = 0.0
    for (r1, z1), (r2, z2) in itertools.pairwise((*points, points[0])):
        total += (z2 - z1) * (r1 * r1 + r1 * r2 + r2 * r2)
    return abs(math.pi / 3 * total)
