"""What each size does when it is off: real solves with the can kept, and the model fitted to them.

    Z(d) = Z_0 + sum_i (a_i d_i + b_i d_i^2),   d_i: deviation over the tolerance of size i

with a and b from solves at plus and minus one step. Resonance is where Im Z cancels the capacitor, so a size moves
it by -(dX/dx) / (dX_total/df).

Depends on: job, sizing.layout, sizing.match, sizing.records, sizing.trial, stock.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from fabgen.job import Job
from fabgen.progress import Progress
from fabgen.sizing.layout import leg_place
from fabgen.sizing.match import reflection, return_loss_db
from fabgen.sizing.records import BENCH_LIMIT_DB, CapacitorPart, Sensitivity, Sizes
from fabgen.sizing.solver import Complex, Real, Solution
from fabgen.sizing.trial import Setting
from fabgen.stock import tables

WIRE_SHARE = 0.01
"""Diameter of drawn wire, plus-minus 1 % (ASTM B258, from memory)."""
OVERLAP_MM = 0.2
"""Setting of the capacitor's overlap by hand before trimming. Common practice, no source."""
CAN_SIZES = ("can_bore_mm", "can_depth_mm", "choke.bore_mm", "choke.depth_mm", "choke.floor_z_mm")
CHOKE = "choke."
CAPACITOR = "series_capacitor_pf"


@dataclass(frozen=True)
class Deviation:
    """A size that can be off, by how much (plus-minus, mm), and the step of its solves."""

    size: str
    tolerance_mm: float
    step_mm: float


@dataclass(frozen=True)
class FittedModel:
    """Impedance over the deviations, in units of the tolerance: ``linear`` and ``square`` hold ohm, one per size."""

    deviations: tuple[Deviation, ...]
    impedance_ohm: complex
    linear: Complex
    square: Complex

    def impedance(self, deviation: Real) -> Complex:
        """Z in ohm for deviations (samples, sizes) in units of the tolerance."""
        value: Complex = self.impedance_ohm + deviation @ self.linear + deviation**2 @ self.square
        return value


def deviations(job: Job, sizes: Sizes) -> tuple[Deviation, ...]:
    """The sizes that matter for the field, with the tolerance of the process that makes each."""
    least_step = 5e-4 * job.wavelength_mm
    rows = [(name, _tolerance(job, sizes, name)) for name in _names(sizes)]
    return tuple(Deviation(name, tolerance, max(tolerance, least_step)) for name, tolerance in rows)


def _names(sizes: Sizes) -> tuple[str, ...]:
    loop: tuple[str, ...] = ("loop_diameter_mm", "loop_height_mm", "leg_pitch_mm", "tap_height_mm")
    if sizes.wire_mm is None:
        loop = (*loop, "leg_x_mm", "strip_width_mm", "leg_bend_radius_mm")
    else:
        loop = (*loop, "wire_mm", "leg_bend_radius_mm")
    return (*loop, *(name for name in CAN_SIZES if not name.startswith(CHOKE) or _choke_has(sizes, name)))


def _choke_has(sizes: Sizes, name: str) -> bool:
    """A choke whose floor is level with the can's is one plate with it, so that height cannot be off."""
    return sizes.choke is not None and (name != "choke.floor_z_mm" or sizes.choke.floor_z_mm > 0)


def size_of(sizes: Sizes, name: str) -> float:
    """A size by its name; those of the choke are named ``choke.bore_mm`` and so on."""
    value: float = getattr(sizes.choke, name.removeprefix(CHOKE)) if name.startswith(CHOKE) else getattr(sizes, name)
    return value


def _tolerance(job: Job, sizes: Sizes, name: str) -> float:
    value = abs(size_of(sizes, name))
    if name in CAN_SIZES:
        if job.can.make == "printed":
            return tables.limit("print_tolerance_mm", job.overrides).value
        return tables.general_tolerance_mm(value, "f" if job.can.make == "turned" else job.limits.tolerance_class)
    if name == "wire_mm":
        return WIRE_SHARE * value
    if sizes.sheet_mm is not None and name in ("loop_diameter_mm", "leg_pitch_mm", "strip_width_mm"):
        return tables.laser_tolerance_mm(value, sizes.sheet_mm)
    return tables.general_tolerance_mm(value, job.limits.tolerance_class)


def with_size(setting: Setting, sizes: Sizes, name: str, value: float) -> Sizes:
    """The same feed with one size changed; the bars of a wire move with its loop, since they are one bent piece, and
    bars are as wide as wire or strip."""
    if name.startswith(CHOKE) and sizes.choke is not None:
        part: dict[str, Any] = {name.removeprefix(CHOKE): value}
        return replace(sizes, choke=replace(sizes.choke, **part))
    update: dict[str, Any] = {name: value}
    if name in ("wire_mm", "strip_width_mm"):
        change = value - size_of(sizes, name)
        update["leg_width_mm"] = round(sizes.leg_width_mm + change, 9)
    changed = replace(sizes, **update)
    if name in ("loop_diameter_mm", "leg_pitch_mm", "leg_bend_radius_mm") and sizes.wire_mm is not None:
        stock = replace(
            setting.stock, leg_pitch_mm=changed.leg_pitch_mm, leg_bend_radius_mm=changed.leg_bend_radius_mm
        )
        legs = leg_place(stock, changed.loop_diameter_mm, changed.loop_height_mm)
        changed = replace(changed, leg_x_mm=legs.leg_x_mm)
    return changed


def deviated(setting: Setting, sizes: Sizes, deviation: Deviation, amount: float) -> Sizes:
    """The feed with one size off by ``amount`` steps."""
    return with_size(setting, sizes, deviation.size, size_of(sizes, deviation.size) + amount * deviation.step_mm)


def fit_model(
    setting: Setting,
    sizes: Sizes,
    solve: Callable[[Sizes], Solution],
    progress: Progress,
) -> FittedModel:
    """Solve at plus and minus one step of each size and fit."""
    rows = deviations(setting.job, sizes)
    nominal = solve(sizes).impedance_ohm
    linear, square = np.zeros(len(rows), complex), np.zeros(len(rows), complex)
    for i, row in enumerate(rows):
        progress.step(f"sensitivity of {row.size.removesuffix('_mm').replace('_', ' ').replace('.', ' ')}")
        progress.share(i, len(rows))
        up = solve(deviated(setting, sizes, row, 1.0)).impedance_ohm - nominal
        down = solve(deviated(setting, sizes, row, -1.0)).impedance_ohm - nominal
        scale = row.tolerance_mm / row.step_mm
        linear[i] = scale * (up - down) / 2
        square[i] = scale**2 * (up + down) / 2
    return FittedModel(rows, nominal, linear, square)


def sensitivities(
    model: FittedModel, sizes: Sizes, part: CapacitorPart, frequency_mhz: float, slope_ohm_per_mhz: float
) -> tuple[Sensitivity, ...]:
    """One row per size, and one for the capacitor (per pF), the largest shift of resonance first.

    ``slope_ohm_per_mhz``: dX/df of tap and capacitor together. The return loss per millimetre is what is lost (from
    at most 40 dB) at the worse end of the tolerance, over the tolerance.
    """
    nominal = bench_loss_db(return_loss_db(reflection(model.impedance_ohm, sizes.series_capacitor_pf, frequency_mhz)))
    rows = []
    for i, row in enumerate(model.deviations):
        shift = -float(model.linear[i].imag) / row.tolerance_mm / slope_ohm_per_mhz
        worst = min(nominal, *(_loss_at(model, sizes, i, sign, frequency_mhz) for sign in (1.0, -1.0)))
        rows.append(
            Sensitivity(row.size, row.tolerance_mm, shift, (worst - nominal) / row.tolerance_mm,
                        abs(shift) * row.tolerance_mm)
        )  # fmt: skip
    rows.append(_capacitor_row(model, sizes, part, frequency_mhz, slope_ohm_per_mhz))
    return tuple(sorted(rows, key=lambda r: (-r.effect_mhz, r.size)))


def bench_loss_db(loss_db: float) -> float:
    """A bench cannot tell return losses apart above 40 dB; without the cap a perfect match would look fragile."""
    return min(loss_db, BENCH_LIMIT_DB)


def _loss_at(model: FittedModel, sizes: Sizes, index: int, amount: float, frequency_mhz: float) -> float:
    off = np.zeros((1, len(model.deviations)))
    off[0, index] = amount
    impedance = complex(model.impedance(off)[0])
    return return_loss_db(reflection(impedance, sizes.series_capacitor_pf, frequency_mhz))


def _capacitor_row(
    model: FittedModel, sizes: Sizes, part: CapacitorPart, frequency_mhz: float, slope: float
) -> Sensitivity:
    """The capacitor's reactance is -1/(omega C): dX/dC = 1/(omega C^2)."""
    capacitance = sizes.series_capacitor_pf
    per_pf = 1e6 / (2 * math.pi * frequency_mhz * capacitance**2)
    tolerance = OVERLAP_MM * part.pf_per_mm
    nominal = bench_loss_db(return_loss_db(reflection(model.impedance_ohm, capacitance, frequency_mhz)))
    ends = (max(capacitance + sign * tolerance, 1e-3) for sign in (1, -1))
    worst = min(nominal, *(return_loss_db(reflection(model.impedance_ohm, c, frequency_mhz)) for c in ends))
    return Sensitivity(
        CAPACITOR, tolerance, -per_pf / slope, (worst - nominal) / tolerance, tolerance * per_pf / abs(slope)
    )
