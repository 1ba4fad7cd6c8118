"""Share of feeds that come out good: Monte Carlo on the fitted model, the model held against true solves.

Each size is drawn evenly from its tolerance band, since a shop warrants the band and not its middle. Trimming is
what the bench does: the tap is moved, then the capacitor's overlap set for no reactance at the target.

Depends on: job, sizing.match, sizing.records, sizing.thermal, sizing.tolerances, sizing.trial.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from fabgen.job import Job
from fabgen.sizing.match import LINE_OHM, reflection, tap_range_mm
from fabgen.sizing.records import CapacitorPart, Sensitivity, Sizes, Yield
from fabgen.sizing.solver import Complex, Real, Solution
from fabgen.sizing.thermal import COLD_DEG_C, HOT_DEG_C, Bench, drift
from fabgen.sizing.tolerances import CAN_SIZES, CAPACITOR, FittedModel, deviated, size_of, with_size
from fabgen.sizing.trial import Setting

SAMPLES = 2000
CHECKS = 20
SEED = 1420
TRIM_WAVELENGTHS = 0.01
TRIM_STEPS = 41


def yield_of(
    job: Job,
    sizes: Sizes,
    model: FittedModel,
    rows: tuple[Sensitivity, ...],
    *,
    part: CapacitorPart,
    bench: Bench,
    error: float,
) -> Yield:
    """Monte Carlo with a fixed seed, trimming and thermal drift. ``error``: what ``model_error`` found."""
    rng = np.random.default_rng(SEED)
    draws = rng.uniform(-1, 1, (SAMPLES, len(model.deviations)))
    pf = rng.uniform(-1, 1, SAMPLES) * next(r.tolerance_mm for r in rows if r.size == CAPACITOR)
    shift = model.impedance(draws) - model.impedance_ohm
    capacitors = np.maximum(sizes.series_capacitor_pf + pf, 1e-3)
    before = worst_return_loss(shift, capacitors, bench) >= bench.return_loss_db
    after = trimmed_return_loss(model, shift, sizes, part=part, bench=bench) >= bench.return_loss_db
    cold, hot = (drift(job, model, sizes, part=part, bench=bench, temperature_deg_c=t) for t in (COLD_DEG_C, HOT_DEG_C))
    return Yield(
        samples=SAMPLES,
        model_check_samples=CHECKS,
        model_error=error,
        before_trimming=float(np.mean(before)),
        after_trimming=float(np.mean(before | after)),
        dominant=tuple(r.size for r in rows[:3]),
        drift_mhz_cold=cold[0],
        drift_mhz_hot=hot[0],
        return_loss_cold_db=cold[1],
        return_loss_hot_db=hot[1],
    )


def worst_return_loss(shift_ohm: Complex, capacitor_pf: Real, bench: Bench) -> Real:
    """Smallest return loss over the bench's frequencies for each sample (dB)."""
    reactance = 1e6 / (2 * math.pi * bench.frequency_mhz[None, :] * capacitor_pf[:, None])
    total = bench.impedance_ohm[None, :] + shift_ohm[:, None] - 1j * reactance
    size = np.abs((total - LINE_OHM) / (total + LINE_OHM))
    worst: Real = -20 * np.log10(np.maximum(size.max(axis=1), 1e-4))
    return worst


def trimmed_return_loss(
    model: FittedModel, shift_ohm: Complex, sizes: Sizes, *, part: CapacitorPart, bench: Bench
) -> Real:
    """Best return loss over tap positions, the capacitor set in its range to cancel the reactance at the target."""
    index = [d.size for d in model.deviations].index("tap_height_mm")
    tap = model.deviations[index]
    reach = TRIM_WAVELENGTHS * 299_792.458 / bench.target_mhz
    low, high = tap_range_mm(sizes)
    moves = np.linspace(
        max(-reach, low - sizes.tap_height_mm), min(reach, high - sizes.tap_height_mm), TRIM_STEPS
    )
    best = np.full(len(shift_ohm), -np.inf)
    for move in moves / tap.tolerance_mm:
        moved = shift_ohm + model.linear[index] * move + model.square[index] * move**2
        reactance = np.maximum((model.impedance_ohm + moved).imag, 1e-3)
        wanted = 1e6 / (2 * math.pi * bench.target_mhz * reactance)
        set_to = np.clip(wanted, part.minimum_pf, part.maximum_pf)
        best = np.maximum(best, worst_return_loss(moved, set_to, bench))
    return best


def model_error(
    setting: Setting, sizes: Sizes, model: FittedModel, solve: Callable[[Sizes], Solution]
) -> float:
    """Largest |reflection of the model - reflection of a true solve| over ``CHECKS`` random feeds.

    Loop sizes are random; the can and its choke are among those already factorised (nominal, or one size off by one
    step), so that a check costs no new can.
    """
    rng = np.random.default_rng(SEED + 1)
    can = [i for i, d in enumerate(model.deviations) if d.size in CAN_SIZES]
    frequency = setting.job.target.frequency_mhz
    worst = 0.0
    for check in range(CHECKS):
        draw = rng.uniform(-1, 1, len(model.deviations))
        draw[can] = 0.0
        trial = sizes
        for i, row in enumerate(model.deviations):
            if i not in can:
                value = size_of(sizes, row.size) + draw[i] * row.tolerance_mm
                trial = with_size(setting, trial, row.size, value)
        choice = check % (2 * len(can) + 1)
        if choice:
            i, sign = can[(choice - 1) // 2], 1.0 if choice % 2 else -1.0
            trial = deviated(setting, trial, model.deviations[i], sign)
            draw[i] = sign * model.deviations[i].step_mm / model.deviations[i].tolerance_mm
        true = solve(trial).impedance_ohm
        fitted = complex(model.impedance(draw[None, :])[0])
        pf = sizes.series_capacitor_pf
        worst = max(worst, abs(reflection(fitted, pf, frequency) - reflection(true, pf, frequency)))
    return worst
