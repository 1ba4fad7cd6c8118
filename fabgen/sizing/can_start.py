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


HALF_ANGLES_DEG = (25.0, 30.0, 35.0, 40.0, 45.0, 50.0, 55.0, 60.0, 65.0, 70.0, 75.0, 80.0, 90.0)
PLAIN = {
    "efficiency": (
        (1.60, 0.60), (1.55, 0.58), (1.40, 0.46), (1.27, 0.42), (1.22, 0.45), (1.205, 0.45), (1.20, 0.43), (0.93, 0.195), (0.77, 0.18),
        (0.68, 0.18), (0.68, 0.20), (0.68, 0.23), (0.68, 0.275),
    ),
    "g_over_t": (
        (1.60, 0.65), (1.56, 0.62), (1.45, 0.55), (1.28, 0.42), (1.22, 0.45), (1.205, 0.45), (1.205, 0.45), (1.20, 0.44), (1.045, 0.24),
        (0.88, 0.18), (0.79, 0.18), (0.735, 0.18), (0.68, 0.205),
    ),
}  # fmt: skip
"""Best of 22 bores and 8 depths computed with a loop of 0.019 wavelength wire at a density of 10 edges per
wavelength, G/T with 35 K receiver at 45 degrees elevation and at most 0.02 of efficiency given away."""
BEST_EFFICIENCY = (0.555, 0.645, 0.70, 0.744, 0.775, 0.780, 0.766, 0.751, 0.749, 0.745, 0.733, 0.715, 0.665)
EFFICIENCY_GIVEN = 0.02
CHOKED_ANGLES_DEG = (50.0, 55.0, 60.0, 65.0, 70.0, 75.0, 80.0, 90.0)
CHOKED = {
    "efficiency": (
        (1.14, 0.30), (1.14, 0.20), (1.02, 0.20), (0.90, 0.20), (0.80, 0.20), (0.72, 0.20), (0.68, 0.20), (0.68, 0.22),
    ),
    "g_over_t": (
        (1.14, 0.30), (1.14, 0.30), (1.14, 0.28), (1.08, 0.20), (0.92, 0.20), (0.80, 0.20), (0.74, 0.20), (0.68, 0.20),
    ),
}  # fmt: skip
CHOKE = ChokeRatio(gap=0.14, depth=0.15, set_back=0.08)
"""From 5 bores, 2 can depths, 3 gaps, 3 choke depths and 3 set-backs, computed like ``PLAIN``: depth and set-back
are the best nearly everywhere; twice the gap gives 0.1 dB of G/T at most for twice the choke's area."""


def start_can(half_angle_deg: float, goal: str, choke: bool) -> CanRatio:
    """Bore and depth by linear interpolation over the half angle; the ends of the table hold beyond it."""
    import numpy as np

    table, angles = (CHOKED, CHOKED_ANGLES_DEG) if choke else (PLAIN, HALF_ANGLES_DEG)
    if goal not in table:
        raise JobError(f"goal '{goal}' is unknown; use one of {', '.join(table)}")
    bores, depths = zip(*table[goal], strict=True)
    return CanRatio(
        float(np.interp(half_angle_deg, angles, bores)),
        float(np.interp(half_angle_deg, angles, depths)),
    )


def least_efficiency(half_angle_deg: float) -> float:
    """Aperture efficiency that the search for G/T keeps: the table's best less ``EFFICIENCY_GIVEN``.

    Without it the search would buy a few hundredths of a dB of G/T with an ever larger can, whose shadow on the
    dish is not computed.
    """
    import numpy as np

    return float(np.interp(half_angle_deg, HALF_ANGLES_DEG, BEST_EFFICIENCY)) - EFFICIENCY_GIVEN
