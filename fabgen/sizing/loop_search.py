"""Loop, height and match together: the named place on the front first, its neighbours where that cannot be built.

Depends on: errors, job, sizing.match, sizing.rounding, sizing.solver, sizing.trial.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

from fabgen.errors import GeometryError, NoSolutionError
from fabgen.job import Job
from fabgen.sizing.capacitor_part import series_capacitor_pf
from fabgen.sizing.fixed_tap import match_fixed_tap
from fabgen.sizing.match import (
    Match,
    SolveSizes,
    reflection,
    require_capacitor_in_range,
    tap_for_resistance,
    tap_range_mm,
)
from fabgen.sizing.records import Sizes
from fabgen.sizing.rounding import round_to
from fabgen.sizing.solver import Solution
from fabgen.sizing.trial import FrontPlace, Setting, first_sizes, front_place

NAMED = {"sharp": 0.0, "balanced": 0.5, "broad": 1.0}
FRONT_STEP = 0.125
CAPACITOR_STEP_PF = 0.01


@dataclass(frozen=True)
class Matched:
    """A loop that is matched at rounded sizes, with its solution there."""

    place: FrontPlace
    sizes: Sizes
    solution: Solution
    remarks: tuple[str, ...] = ()

    def reflection(self, frequency_mhz: float) -> complex:
        """Reflection after the series capacitor, at the frequency of the solution."""
        return reflection(self.solution.impedance_ohm, self.sizes.series_capacitor_pf, frequency_mhz)


def match_at(setting: Setting, place: FrontPlace, solve: SolveSizes, tap_mm: float | None = None) -> Matched:
    """Match the loop at a place of the front; everything but the tap is rounded before, the tap after.

    ``tap_mm``: where the tap search starts. Raises ``MatchError`` where no tap or capacitor can be built.
    """
    job, stock = setting.job, setting.stock
    sizes = first_sizes(setting, place)
    if job.fixed.tap_height_mm is not None:
        return round_match(job, place, match_fixed_tap(job, stock, sizes, solve), solve)
    if tap_mm is not None:
        sizes = replace(sizes, tap_height_mm=tap_mm)
    return round_match(job, place, tap_for_resistance(solve, sizes), solve)


def round_match(job: Job, place: FrontPlace, match: Match, solve: SolveSizes) -> Matched:
    """Round the tap to the shop's resolution, solve there, and give the capacitor in steps of 0.01 pF."""
    tap = match.sizes.tap_height_mm
    if job.fixed.tap_height_mm is None:
        tap = _round_inside(tap, job.limits.resolution_mm, *tap_range_mm(match.sizes))
    sizes = replace(match.sizes, tap_height_mm=tap)
    solution = match.solution if sizes == match.sizes else solve(sizes)
    reactance = solution.impedance_ohm.imag
    require_capacitor_in_range(reactance)
    capacitor = series_capacitor_pf(reactance, job.target.frequency_mhz)
    return Matched(place, replace(sizes, series_capacitor_pf=_round_capacitor(capacitor)), solution)


def _round_capacitor(capacitor_pf: float) -> float:
    """Steps of 0.01 pF, finer below 0.5 pF where such a step would move the match."""
    return round_to(capacitor_pf, CAPACITOR_STEP_PF if capacitor_pf >= 0.5 else CAPACITOR_STEP_PF / 10)


def _round_inside(value: float, step: float, low: float, high: float) -> float:
    rounded = round_to(value, step)
    if rounded > high:
        return math.floor(high / step) * step
    return rounded if rounded >= low else round_to(math.ceil(low / step) * step, step)


def nearby_places(share: float, step: float = FRONT_STEP) -> Iterator[FrontPlace]:
    """Places of the front in steps, by distance from ``share``."""
    others = sorted((abs(i * step - share), i * step) for i in range(round(1 / step) + 1))
    yield front_place(share)
    for distance, place in others:
        if distance > step / 4:
            yield front_place(place)


def match_nearby(setting: Setting, share: float, solve: SolveSizes) -> Matched:
    """Match at the wanted place of the front, or at the nearest one that can be built, with a remark that says so.

    Raises ``NoSolutionError`` with the first limit met when the whole front fails.
    """
    first: NoSolutionError | GeometryError | None = None
    # A fixed tap moves the loop itself, so places far apart say as much as near ones.
    step = FRONT_STEP if setting.job.fixed.tap_height_mm is None else 0.5
    for place in nearby_places(share, step):
        try:
            found = match_at(setting, place, solve)
        except (NoSolutionError, GeometryError) as error:
            first = first or error
            continue
        if first is None:
            return found
        return replace(
            found,
            remarks=(
                f"The wanted selectivity (place {share:.2f} of 0 sharp to 1 broad) cannot be built: {first}. "
                f"The nearest that can is place {found.place.share:.2f}.",
            ),
        )
    raise NoSolutionError(f"no loop between sharp and broad can be matched; at the wanted place: {first}") from first
