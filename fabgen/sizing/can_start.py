"""Cans in wavelengths that were best for a row of dishes: where the search starts.

Computed with a loop of 0.019 wavelength wire at a density of 10 edges per wavelength: 22 bores from 0.64 to 2.1 and
8 depths from 0.16 to 0.7 wavelengths without a choke; 5 bores, 2 depths, 3 gaps, 3 choke depths and 3 set-backs with
one. G/T is for a receiver of 35 K at 45 degrees elevation.

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


@dataclass(frozen=True)
class StartRow:
    """Best cans for a dish's half angle: for efficiency, and for G/T with little efficiency given away."""

    half_angle_deg: float
    efficiency: CanRatio
    g_over_t: CanRatio


PLAIN = (
    StartRow(25, CanRatio(1.60, 0.60), CanRatio(1.60, 0.65)),
    StartRow(30, CanRatio(1.55, 0.58), CanRatio(1.56, 0.62)),
    StartRow(35, CanRatio(1.40, 0.46), CanRatio(1.45, 0.55)),
    StartRow(40, CanRatio(1.27, 0.42), CanRatio(1.28, 0.42)),
    StartRow(45, CanRatio(1.22, 0.45), CanRatio(1.22, 0.45)),
    StartRow(50, CanRatio(1.205, 0.45), CanRatio(1.205, 0.45)),
    StartRow(55, CanRatio(1.20, 0.43), CanRatio(1.205, 0.45)),
    StartRow(60, CanRatio(0.93, 0.195), CanRatio(1.20, 0.44)),
    StartRow(65, CanRatio(0.77, 0.18), CanRatio(1.045, 0.24)),
    StartRow(70, CanRatio(0.68, 0.18), CanRatio(0.88, 0.18)),
    StartRow(75, CanRatio(0.68, 0.20), CanRatio(0.79, 0.18)),
    StartRow(80, CanRatio(0.68, 0.23), CanRatio(0.735, 0.18)),
    StartRow(90, CanRatio(0.68, 0.275), CanRatio(0.68, 0.205)),
)
BEST_EFFICIENCY = (0.555, 0.645, 0.70, 0.744, 0.775, 0.780, 0.766, 0.751, 0.749, 0.745, 0.733, 0.715, 0.665)
"""Aperture efficiency of the best plain can, row by row."""
EFFICIENCY_GIVEN = 0.02
CHOKED = (
    StartRow(50, CanRatio(1.14, 0.30), CanRatio(1.14, 0.30)),
    StartRow(55, CanRatio(1.14, 0.20), CanRatio(1.14, 0.30)),
    StartRow(60, CanRatio(1.02, 0.20), CanRatio(1.14, 0.28)),
    StartRow(65, CanRatio(0.90, 0.20), CanRatio(1.08, 0.20)),
    StartRow(70, CanRatio(0.80, 0.20), CanRatio(0.92, 0.20)),
    StartRow(75, CanRatio(0.72, 0.20), CanRatio(0.80, 0.20)),
    StartRow(80, CanRatio(0.68, 0.20), CanRatio(0.74, 0.20)),
    StartRow(90, CanRatio(0.68, 0.22), CanRatio(0.68, 0.20)),
)
CHOKE = ChokeRatio(gap=0.14, depth=0.15, set_back=0.08)
"""Depth and set-back are the best nearly everywhere; twice the gap gives 0.1 dB of G/T at most for twice the area."""


def start_can(half_angle_deg: float, goal: str, choke: bool) -> CanRatio:
    """Bore and depth by linear interpolation over the half angle; the ends of the table hold beyond it."""
    import numpy as np

    if goal not in ("efficiency", "g_over_t"):
        raise JobError(f"goal '{goal}' is unknown; use efficiency or g_over_t")
    table = CHOKED if choke else PLAIN
    angles = [row.half_angle_deg for row in table]
    cans = [row.efficiency if goal == "efficiency" else row.g_over_t for row in table]
    return CanRatio(
        float(np.interp(half_angle_deg, angles, [can.bore for can in cans])),
        float(np.interp(half_angle_deg, angles, [can.depth for can in cans])),
    )


def least_efficiency(half_angle_deg: float) -> float:
    """Aperture efficiency that the search for G/T keeps: the table's best less ``EFFICIENCY_GIVEN``.

    Without it the search would buy a few hundredths of a dB of G/T with an ever larger can, whose shadow on the
    dish is not computed.
    """
    import numpy as np

    angles = [row.half_angle_deg for row in PLAIN]
    return float(np.interp(half_angle_deg, angles, BEST_EFFICIENCY)) - EFFICIENCY_GIVEN
