"""Drift of the match with temperature: expansion of loop, can and capacitor, and the fall of the dielectric's
permittivity.

A warm loop and can resonate lower. A warm capacitor holds less, so its reactance grows and the feed resonates higher:

    sleeve  C'/C = 1 + (a_metal + b) dT                   b: change of the permittivity per kelvin
    plates  C'/C = 1 + (2 a_metal - a_film + b) dT        to first order, without edge fields

Depends on: job, sizing.capacitor_part, sizing.match, sizing.records, sizing.solver, sizing.tolerances, stock.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fabgen.job import Job
from fabgen.sizing.capacitor_part import DIELECTRIC, plates_pf, sleeve_pf
from fabgen.sizing.match import reflection, return_loss_db
from fabgen.sizing.records import CapacitorPart, Sizes
from fabgen.sizing.solver import Complex, Real
from fabgen.sizing.tolerances import CAN_SIZES, FittedModel, size_of
from fabgen.stock import tables

ROOM_DEG_C, COLD_DEG_C, HOT_DEG_C = 20.0, -20.0, 50.0
CAPACITOR_METAL = "cuzn37"
"""Tube and plates are of brass; the wire in the sleeve is copper, whose expansion differs by too little to count."""


@dataclass(frozen=True)
class Bench:
    """What a feed is judged against: the frequencies with their nominal impedance, and the wished return loss."""

    frequency_mhz: Real
    impedance_ohm: Complex
    target_mhz: float
    return_loss_db: float
    slope_ohm_per_mhz: float


def capacitance_ratio(part: CapacitorPart, rise_k: float) -> float:
    """Capacitance at ``rise_k`` above the room's temperature over that at it.

    The part's own formula with every length grown by its material. The dielectric fills the sleeve at any
    temperature (what does not fit creeps out at the ends); the film pushes the plates apart.
    """
    dielectric = tables.dielectric(DIELECTRIC)
    metal = 1 + tables.metal(CAPACITOR_METAL).expansion_per_k * rise_k
    cold = part.relative_permittivity
    warm = cold * (1 + dielectric.permittivity_per_k * rise_k)
    overlap = part.overlap_mm
    if part.form == "sleeve":
        inner, bore = part.inner_mm, part.outer_mm
        return sleeve_pf(overlap * metal, inner * metal, bore * metal, warm) / sleeve_pf(overlap, inner, bore, cold)
    width, film = part.plate_width_mm, part.film_mm
    grown = film * (1 + dielectric.expansion_per_k * rise_k)
    return plates_pf(overlap * metal, width * metal, grown, warm) / plates_pf(overlap, width, film, cold)


def drift(
    job: Job, model: FittedModel, sizes: Sizes, *, part: CapacitorPart, bench: Bench, temperature_deg_c: float
) -> tuple[float, float]:
    """Shift of resonance (MHz) and return loss (dB) at a temperature, the feed being trimmed at 20 degC."""
    rise = temperature_deg_c - ROOM_DEG_C
    loop = tables.metal(job.loop.metal).expansion_per_k
    printed = job.can.make == "printed"
    can = tables.plastic(job.can.plastic).expansion_per_k if printed else tables.metal(job.can.metal).expansion_per_k
    off = np.zeros((1, len(model.deviations)))
    for i, row in enumerate(model.deviations):
        expansion = can if row.size in CAN_SIZES else loop
        off[0, i] = size_of(sizes, row.size) * expansion * rise / row.tolerance_mm
    impedance = complex(model.impedance(off)[0])
    pf = sizes.series_capacitor_pf
    warm = pf * capacitance_ratio(part, rise)
    change = (impedance - model.impedance_ohm).imag - _reactance_ohm(warm, bench) + _reactance_ohm(pf, bench)
    return -change / bench.slope_ohm_per_mhz, return_loss_db(reflection(impedance, warm, bench.target_mhz))


def _reactance_ohm(capacitance_pf: float, bench: Bench) -> float:
    """1 / (omega C) at the target."""
    return 1e6 / (2 * math.pi * bench.target_mhz * capacitance_pf)
