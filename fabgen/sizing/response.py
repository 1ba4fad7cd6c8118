"""Response over frequency: reflection after the series capacitor, realised gain on the axis, bandwidth.

For 1 A at the port the axial field E (volts, r removed) gives the intensity |E|^2 / (2 eta0); the source behind
the 50 ohm cable that drives 1 A has the available power |50 + Z_total|^2 / (8 * 50), hence

    G_realised = 4 pi |E|^2 / (2 eta0) * 400 / |50 + Z_total|^2

Depends on: job, sizing.dish, sizing.match, sizing.records, sizing.solver.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fabgen.job import Job
from fabgen.sizing.dish import co_cross, half_power_width_deg, plane_cut
from fabgen.sizing.match import LINE_OHM
from fabgen.sizing.records import GainPoint, Response, Sizes
from fabgen.sizing.solver import Complex, Real, Solution, Sweep
from fabgen.theory.constants import FREE_SPACE_OHM

START, STOP = 0.3, 2.2
COARSE_STEP, FINE_STEP, FINE_SPAN = 0.005, 0.0005, 0.06
FLOOR_DB = -120.0
WIDTH_STEP_DEG = 3.0


@dataclass(frozen=True)
class Band:
    """The frequencies around the target over which a return loss holds."""

    low_mhz: float
    high_mhz: float

    @property
    def width_mhz(self) -> float:
        return self.high_mhz - self.low_mhz


def sweep_frequencies(target_mhz: float) -> Real:
    """0.3 to 2.2 times the target, finer within 6 % of it; the target itself is one of them."""
    coarse = np.linspace(START, STOP, round((STOP - START) / COARSE_STEP) + 1)
    count = round(FINE_SPAN / FINE_STEP)
    fine = np.linspace(1 - FINE_SPAN, 1 + FINE_SPAN, 2 * count + 1)
    ratios: Real = np.unique(np.round(np.concatenate([coarse, fine]), 9))
    frequencies: Real = ratios * target_mhz
    return frequencies


def reflections(impedance_ohm: Complex, capacitor_pf: float, frequency_mhz: Real) -> Complex:
    """Reflection at the cable after the series capacitor, one value per frequency.

    No feed reflects more than it gets: where the interpolation over frequency says so, by less than its own error,
    the magnitude is one.
    """
    total = impedance_ohm - 1j * 1e6 / (2 * math.pi * frequency_mhz * capacitor_pf)
    found = (total - LINE_OHM) / (total + LINE_OHM)
    return np.asarray(found / np.maximum(np.abs(found), 1.0), dtype=np.complex128)


def realised_gain_dbi(
    axial_field_v: Complex, impedance_ohm: Complex, capacitor_pf: float, frequency_mhz: Real
) -> Real:
    """Realised gain on the axis in dBi (mismatch and losses included), not below -120."""
    total = impedance_ohm - 1j * 1e6 / (2 * math.pi * frequency_mhz * capacitor_pf)
    per_available = 8 * LINE_OHM / np.abs(LINE_OHM + total) ** 2
    gain = 4 * math.pi * np.abs(axial_field_v) ** 2 / (2 * FREE_SPACE_OHM) * per_available
    level: Real = 10 * np.log10(np.maximum(gain, 10 ** (FLOOR_DB / 10)))
    return level


def axial_field(solution: Solution) -> complex:
    """Co-polar field on the axis, volts for 1 A."""
    zero = np.zeros(1)
    co, _ = co_cross(*solution.far_field(zero, zero), zero)
    return complex(co[0])


def gain_at(solution: Solution, capacitor_pf: float, frequency_mhz: float) -> float:
    """Realised gain on the axis of one solution, dBi."""
    return float(
        realised_gain_dbi(
            np.array([axial_field(solution)]),
            np.array([solution.impedance_ohm]),
            capacitor_pf,
            np.array([frequency_mhz]),
        )[0]
    )


def build_response(sweep: Sweep, sizes: Sizes, job: Job) -> Response:
    """Reflection and gain over the whole sweep, and pattern widths where the sweep has full solutions."""
    frequency = sweep_frequencies(job.target.frequency_mhz)
    impedance, field = sweep.impedance_ohm(frequency), sweep.on_axis_field(frequency)
    widths = [_widths(solution) for _, solution in sweep.solutions]
    return Response(
        frequency_mhz=tuple(map(float, frequency)),
        reflection=tuple(map(complex, reflections(impedance, sizes.series_capacitor_pf, frequency))),
        gain_dbi=tuple(map(float, realised_gain_dbi(field, impedance, sizes.series_capacitor_pf, frequency))),
        width_frequency_mhz=tuple(float(f) for f, _ in sweep.solutions),
        half_power_beamwidth_e_deg=tuple(e for e, _ in widths),
        half_power_beamwidth_h_deg=tuple(h for _, h in widths),
    )


def _widths(solution: Solution) -> tuple[float, float]:
    angle, e_plane, _ = plane_cut(solution.far_field, 90.0, WIDTH_STEP_DEG)
    _, h_plane, _ = plane_cut(solution.far_field, 0.0, WIDTH_STEP_DEG)
    return half_power_width_deg(angle, e_plane), half_power_width_deg(angle, h_plane)


def in_sweep(frequency_mhz: float, target_mhz: float) -> bool:
    """Whether a frequency lies in the band that is swept, where the mesh resolves the wavelength."""
    return START * target_mhz <= frequency_mhz <= STOP * target_mhz


def gain_points(sweep: Sweep, sizes: Sizes, job: Job) -> tuple[GainPoint, ...]:
    """Gain and reflection at the neighbours that the job names, at fixed ratios of the target, and at the target."""
    target = job.target.frequency_mhz
    wanted = {n.frequency_mhz for n in job.wishes.neighbours if in_sweep(n.frequency_mhz, target)}
    ratios = {round(r * target, 3) for r in (0.35, 0.5, 0.65, 0.8, 0.9, 1.1, 1.25, 1.5, 1.75, 2.0)}
    frequency = np.array(sorted(wanted | ratios | {target}))
    impedance = sweep.impedance_ohm(frequency)
    gain = realised_gain_dbi(sweep.on_axis_field(frequency), impedance, sizes.series_capacitor_pf, frequency)
    reflected = reflections(impedance, sizes.series_capacitor_pf, frequency)
    reference = float(gain[list(frequency).index(target)])
    return tuple(
        GainPoint(float(f), float(g), float(g) - reference, 20 * math.log10(max(abs(complex(r)), 1e-6)))
        for f, g, r in zip(frequency, gain, reflected, strict=True)
    )


def band_of(response: Response, target_mhz: float, return_loss_db: float) -> Band:
    """The band around the target at or above ``return_loss_db``; width 0 where the target itself misses it."""
    frequency = np.array(response.frequency_mhz)
    margin = -20 * np.log10(np.maximum(np.abs(np.array(response.reflection)), 1e-9)) - return_loss_db
    middle = int(np.argmin(np.abs(frequency - target_mhz)))
    if margin[middle] < 0:
        return Band(target_mhz, target_mhz)
    ends = []
    for side in (-1, 1):
        i = middle
        while 0 <= i + side < len(frequency) and margin[i + side] >= 0:
            i += side
        j = i + side
        if not 0 <= j < len(frequency):
            ends.append(float(frequency[i]))
            continue
        share = margin[i] / (margin[i] - margin[j])
        ends.append(float(frequency[i] + share * (frequency[j] - frequency[i])))
    return Band(ends[0], ends[1])
