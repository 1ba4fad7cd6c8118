"""The match: tap height for the cable's resistance, then the series capacitor in closed form.

For any loop over the floor the resistance at the tap rises steadily with the tap's height, so one root is sought.
It goes roughly with the square of the height, so the search runs on logarithms and needs few solves.

Depends on: errors, sizing.records, sizing.solver.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace

from fabgen.errors import NoSolutionError
from fabgen.sizing.records import Sizes
from fabgen.sizing.solver import Solution

LINE_OHM = 50.0
LOW_REACTANCE_OHM, HIGH_REACTANCE_OHM = 22.4, 373.5
"""What 5 pF and 0.3 pF are at 1420 MHz; in ohm the limits hold at every frequency."""
RESISTANCE_TOLERANCE = 0.01
MOST_STEPS = 7

SolveSizes = Callable[[Sizes], Solution]


@dataclass(frozen=True)
class Match:
    """Sizes with the matched tap, their solution, and how many solves it took."""

    sizes: Sizes
    solution: Solution
    solves: int


class MatchError(NoSolutionError):
    """No tap or no capacitor inside the buildable range for this loop; another point of the front may have one."""


def reflection(impedance_ohm: complex, capacitor_pf: float, frequency_mhz: float) -> complex:
    """Reflection at the cable, after the series capacitor: (Z - 50) / (Z + 50)."""
    total = impedance_ohm - 1j * 1e6 / (2 * math.pi * frequency_mhz * capacitor_pf)
    return (total - LINE_OHM) / (total + LINE_OHM)


def return_loss_db(reflected: complex) -> float:
    """Return loss in dB, positive: -20 log10 |reflection|; at most 80, beyond which a figure means nothing."""
    return min(-20 * math.log10(max(abs(reflected), 1e-4)), 80.0)


def tap_range_mm(sizes: Sizes) -> tuple[float, float]:
    """Lowest and highest tap: the crossing clear of the floor by a conductor's depth and of the loop's bend by one."""
    depth = sizes.wire_mm or sizes.sheet_mm or 0.0
    half = sizes.crossing_width_mm / 2
    bend = sizes.leg_bend_radius_mm + (0.0 if sizes.wire_mm else depth)
    return half + depth / 2, sizes.loop_height_mm - max(bend, depth) - half - depth / 2


def tap_in_range_mm(sizes: Sizes) -> float:
    """The tap of ``sizes``, moved into what the bars take. Raises ``MatchError`` when they are too short for any."""
    low, high = tap_range_mm(sizes)
    if low >= high:
        raise MatchError(
            f"the bars are too short for a tap: loop height {sizes.loop_height_mm:.1f} mm leaves no straight part "
            "between floor and bend; use a higher loop, thinner stock or a smaller bend radius"
        )
    return min(max(sizes.tap_height_mm, low), high)


def tap_for_resistance(
    solve: SolveSizes, sizes: Sizes, target_ohm: float = LINE_OHM, tolerance: float = RESISTANCE_TOLERANCE
) -> Match:
    """Find the tap height at which Re Z is ``target_ohm``, starting from the tap of ``sizes``.

    Secant steps on log R against log height, held inside the bracket found so far. Raises ``MatchError`` when the
    straight part of the bars ends before the resistance is reached.
    """
    low, high = tap_range_mm(sizes)
    tap = tap_in_range_mm(sizes)
    seen: list[tuple[float, float]] = []
    for count in range(1, MOST_STEPS + 1):
        trial = replace(sizes, tap_height_mm=tap)
        solution = solve(trial)
        resistance = solution.impedance_ohm.real
        if abs(resistance / target_ohm - 1) <= tolerance:
            return Match(trial, solution, count)
        seen.append((tap, resistance))
        _refuse_end_of_bar(tap, resistance, target_ohm, low, high)
        tap = _next_tap(seen, target_ohm, low, high)
    raise MatchError(
        f"the tap search did not settle: {resistance:.1f} ohm at {tap:.2f} mm after {MOST_STEPS} solves"
    )


def _refuse_end_of_bar(tap: float, resistance: float, target: float, low: float, high: float) -> None:
    if tap >= high and resistance < target:
        raise MatchError(
            f"the highest tap ({high:.1f} mm) gives {resistance:.1f} ohm, less than the {target:g} ohm wanted"
        )
    if tap <= low and resistance > target:
        raise MatchError(
            f"the lowest tap ({low:.1f} mm, one conductor clear of the floor) gives {resistance:.1f} ohm, "
            f"more than the {target:g} ohm wanted"
        )


def _next_tap(seen: list[tuple[float, float]], target: float, low: float, high: float) -> float:
    """Secant in logarithms (first step: exponent 2), kept inside the tightest bracket."""
    x1, r1 = seen[-1]
    exponent = 2.0
    if len(seen) > 1:
        x0, r0 = seen[-2]
        if abs(math.log(x1 / x0)) > 1e-9 and r0 > 0 and r1 > 0:
            exponent = math.log(r1 / r0) / math.log(x1 / x0)
        exponent = min(max(exponent, 0.5), 6.0)
    step = math.log(target / max(r1, 1e-3 * target)) / exponent
    tap = x1 * math.exp(min(max(step, -1.0), 1.0))
    below = max((x for x, r in seen if r < target), default=low)
    above = min((x for x, r in seen if r > target), default=high)
    if below < above and not below < tap < above:
        inner = below > low and above < high
        tap = math.sqrt(below * above) if inner else min(max(tap, low), high)
    return min(max(tap, low), high)


def require_capacitor_in_range(reactance_ohm: float) -> None:
    """Refuse a reactance whose capacitor lies outside 0.3 to 5 pF at 1420 MHz, scaled by frequency."""
    if reactance_ohm < LOW_REACTANCE_OHM:
        raise MatchError(
            f"the reactance at the tap is {reactance_ohm:.1f} ohm; below {LOW_REACTANCE_OHM:g} ohm the series "
            "capacitor gets too large to trim"
        )
    if reactance_ohm > HIGH_REACTANCE_OHM:
        raise MatchError(
            f"the reactance at the tap is {reactance_ohm:.1f} ohm; above {HIGH_REACTANCE_OHM:g} ohm the series "
            "capacitor gets smaller than its own stray field"
        )
