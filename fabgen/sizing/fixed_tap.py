"""The match when the job fixes the tap: another size is moved until the tap sees 50 ohm.

Depends on: job, sizing.layout, sizing.match, sizing.records, sizing.rounding, sizing.trial.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from itertools import pairwise

from fabgen.errors import GeometryError, NoSolutionError
from fabgen.job import Job
from fabgen.sizing.layout import LoopStock
from fabgen.sizing.match import (
    LINE_OHM,
    RESISTANCE_TOLERANCE,
    Match,
    MatchError,
    SolveSizes,
    tap_in_range_mm,
    tap_range_mm,
)
from fabgen.sizing.records import Sizes
from fabgen.sizing.rounding import round_to
from fabgen.sizing.trial import place_loop

SCAN_SHARES = (0.5, 0.25, 0.75, 0.0, 1.0)
MOST_STEPS = 6
Point = tuple[float, float]


@dataclass(frozen=True)
class FreeSize:
    """A size that may move: its name, its range in mm and the sizes that go with a value."""

    name: str
    low_mm: float
    high_mm: float
    put: Callable[[float], Sizes]


def free_sizes(job: Job, stock: LoopStock, sizes: Sizes) -> list[FreeSize]:
    """What the job leaves free, in the order in which it is tried: loop height, loop diameter, leg pitch."""
    wavelength, fixed = job.wavelength_mm, job.fixed
    diameter, height = sizes.loop_diameter_mm, sizes.loop_height_mm
    free = []
    if fixed.loop_height_mm is None:
        free.append(
            FreeSize("loop height", 0.09 * wavelength, 0.25 * wavelength,
                     lambda x: place_loop(job, stock, sizes, diameter, x))
        )  # fmt: skip
    if fixed.loop_diameter_mm is None:
        free.append(
            FreeSize("loop diameter", 0.26 * wavelength, 0.37 * wavelength,
                     lambda x: place_loop(job, stock, sizes, x, height))
        )  # fmt: skip
    if fixed.leg_pitch_mm is None:
        step = job.limits.resolution_mm
        free.append(
            FreeSize("leg pitch", 1.4 * stock.leg_width_mm, 0.12 * wavelength + stock.leg_width_mm,
                     lambda x: place_loop(job, replace(stock, leg_pitch_mm=round_to(x, step)), sizes, diameter, height))
        )  # fmt: skip
    return free


def match_fixed_tap(job: Job, stock: LoopStock, sizes: Sizes, solve: SolveSizes) -> Match:
    """Bring 50 ohm to the given tap. The moved size comes out rounded. Raises ``MatchError`` when none reaches."""
    reached: list[str] = []
    for size in free_sizes(job, stock, sizes):
        seen = _scan(size, solve)
        pair = _crossing(seen)
        if pair is not None:
            return _close_in(size, pair, solve)
        if seen:
            values = [r for _, r in seen]
            reached.append(f"{size.name} {size.low_mm:.0f} to {size.high_mm:.0f} mm gives {min(values):.0f} to "
                           f"{max(values):.0f} ohm")  # fmt: skip
    if not reached:
        return _all_fixed(sizes, solve)
    raise MatchError(
        f"fixed.tap_height_mm {sizes.tap_height_mm:g} mm cannot be matched to {LINE_OHM:g} ohm: {'; '.join(reached)}. "
        "Leave the tap height out of the job"
    )


def _all_fixed(sizes: Sizes, solve: SolveSizes) -> Match:
    possible = tap_in_range_mm(sizes)
    if possible != sizes.tap_height_mm:
        low, high = tap_range_mm(sizes)
        raise MatchError(
            f"fixed.tap_height_mm is {sizes.tap_height_mm:g} mm; on these bars {low:.1f} to {high:.1f} mm can be built"
        )
    solution = solve(sizes)
    resistance = solution.impedance_ohm.real
    if abs(resistance / LINE_OHM - 1) > 0.2:
        raise MatchError(
            f"loop, bars and tap are all fixed and the tap gives {resistance:.1f} ohm instead of {LINE_OHM:g}; "
            "leave the tap height or the loop height out of the job"
        )
    return Match(sizes, solution, 1)


def _scan(size: FreeSize, solve: SolveSizes) -> list[Point]:
    """Resistances from the middle of the range outwards, until two neighbours lie on either side of 50 ohm."""
    points: list[Point] = []
    for share in SCAN_SHARES:
        value = size.low_mm + (size.high_mm - size.low_mm) * share
        try:
            trial = size.put(value)
            low, high = tap_range_mm(trial)
            if low <= trial.tap_height_mm <= high:
                points = sorted([*points, (value, solve(trial).impedance_ohm.real)])
        except (NoSolutionError, GeometryError):
            continue
        if _crossing(points) is not None:
            break
    return points


def _crossing(points: list[Point]) -> tuple[Point, Point] | None:
    for a, b in pairwise(points):
        if (a[1] - LINE_OHM) * (b[1] - LINE_OHM) <= 0:
            return a, b
    return None


def _close_in(size: FreeSize, pair: tuple[Point, Point], solve: SolveSizes) -> Match:
    """False position with halving of the stale end (Illinois) on log R; the sizes come out rounded."""
    (x0, r0), (x1, r1) = pair
    y0, y1 = math.log(max(r0, 1e-3) / LINE_OHM), math.log(max(r1, 1e-3) / LINE_OHM)
    for count in range(1, MOST_STEPS + 1):
        x = x1 - y1 * (x1 - x0) / (y1 - y0) if y1 != y0 else (x0 + x1) / 2
        trial = size.put(x)
        solution = solve(trial)
        y = math.log(max(solution.impedance_ohm.real, 1e-3) / LINE_OHM)
        if abs(y) <= RESISTANCE_TOLERANCE or count == MOST_STEPS:
            break
        if y * y1 < 0:
            x0, y0 = x1, y1
        else:
            y0 /= 2
        x1, y1 = x, y
    return Match(trial, solution, count)
