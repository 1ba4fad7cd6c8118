"""Modes of a circular waveguide: cut-off, guide wavelength, decay below cut-off.

Depends on: errors, theory.constants.
"""

from __future__ import annotations

import math

from fabgen.errors import JobError
from fabgen.theory.constants import LIGHT_MM_PER_US
from fabgen.theory.limits import require_positive

ROOTS = {
    "TE11": 1.841183781340659,
    "TM01": 2.404825557695773,
    "TE21": 3.054236928227140,
    "TE01": 3.831705970207512,
    "TM11": 3.831705970207512,
    "TE31": 4.201188941210528,
}
"""Zeros of J'm (TE) and Jm (TM). Marcuvitz, Waveguide Handbook; Abramowitz and Stegun, tables 9.5."""


def _root(mode: str) -> float:
    if mode not in ROOTS:
        raise JobError(f"unknown mode '{mode}'; allowed: {', '.join(ROOTS)}")
    return ROOTS[mode]


def cutoff_mhz(mode: str, bore_mm: float) -> float:
    """Cut-off frequency c p / (pi D) of a mode (``TE11`` ...) in a round bore, MHz."""
    require_positive(bore_mm=bore_mm)
    return LIGHT_MM_PER_US * _root(mode) / (math.pi * bore_mm)


def cutoff_bore_mm(mode: str, frequency_mhz: float) -> float:
    """Bore in which the mode is just cut off at the frequency, mm."""
    require_positive(frequency_mhz=frequency_mhz)
    return LIGHT_MM_PER_US * _root(mode) / (math.pi * frequency_mhz)


def decay_per_mm(mode: str, bore_mm: float, frequency_mhz: float) -> float:
    """Field decay constant sqrt(kc^2 - k^2) of a mode below its cut-off, nepers per mm; 0 where it runs."""
    cutoff = cutoff_mhz(mode, bore_mm)
    if frequency_mhz >= cutoff:
        return 0.0
    return 2 * math.pi / LIGHT_MM_PER_US * math.sqrt(cutoff**2 - frequency_mhz**2)


def decay_db_per_mm(mode: str, bore_mm: float, frequency_mhz: float) -> float:
    """The same decay in dB per mm."""
    return 20 / math.log(10) * decay_per_mm(mode, bore_mm, frequency_mhz)


def guide_wavelength_mm(mode: str, bore_mm: float, frequency_mhz: float) -> float:
    """Wavelength in the guide, lambda / sqrt(1 - (fc/f)^2), mm. Raises JobError at or below cut-off."""
    cutoff = cutoff_mhz(mode, bore_mm)
    if frequency_mhz <= cutoff:
        raise JobError(f"{mode} does not run at {frequency_mhz:g} MHz in {bore_mm:g} mm: cut-off {cutoff:.1f} MHz")
    return LIGHT_MM_PER_US / math.sqrt(frequency_mhz**2 - cutoff**2)
