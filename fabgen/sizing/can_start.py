"""Cans in wavelengths that were best for a row of dishes: where the search starts.

Depends on: errors.
"""

from __future__ import annotations

from dataclasses import dataclass

from fabgen.errors import JobError


@dataclass(frozen=True)
class CanRatio:
    """Bore and depth over the wavelength."""

    bore: float
    depth: float


@dataclass(frozen=True)
class ChokeRatio:
    """Radial gap between the can's outside and the choke's wall, choke depth, and how far the choke's rim lies
    behind the can's, all over the wavelength."""

    gap: float
    depth: float
    set_back: float


HALF_ANGLES_DEG = (40.0, 50.0, 60.0, 70.0, 80.0)
PLAIN = {
    "efficiency": ((1.30, 0.40), (1.20, 0.35), (1.05, 0.30), (0.85, 0.25), (0.75, 0.20)),
    "g_over_t": ((1.30, 0.40), (1.20, 0.35), (1.05, 0.30), (0.90, 0.25), (0.80, 0.20)),
}
CHOKED = {
    "efficiency": ((1.20, 0.35), (1.10, 0.35), (0.90, 0.30), (0.75, 0.30), (0.70, 0.25)),
    "g_over_t": ((1.20, 0.35), (1.10, 0.35), (0.95, 0.30), (0.80, 0.30), (0.70, 0.25)),
}
CHOKE = ChokeRatio(gap=0.20, depth=0.25, set_back=0.0)


def start_can(half_angle_deg: float, goal: str, choke: bool) -> CanRatio:
    """Bore and depth by linear interpolation over the half angle; the ends of the table hold beyond it."""
    import numpy as np

    table = CHOKED if choke else PLAIN
    if goal not in table:
        raise JobError(f"goal '{goal}' is unknown; use one of {', '.join(table)}")
    bores, depths = zip(*table[goal], strict=True)
    return CanRatio(
        float(np.interp(half_angle_deg, HALF_ANGLES_DEG, bores)),
        float(np.interp(half_angle_deg, HALF_ANGLES_DEG, depths)),
    )


def start_choke(half_angle_deg: float, goal: str) -> ChokeRatio:
    """The choke that goes with ``start_can``."""
    del half_angle_deg, goal
    return CHOKE
