"""Noise of lossy parts and of chains.

Depends on: errors, theory.constants.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from fabgen.errors import JobError
from fabgen.theory.constants import BOLTZMANN_J_PER_K, REFERENCE_K


@dataclass(frozen=True)
class Stage:
    """One part of a chain: its gain (negative for a loss) and its noise temperature referred to its input."""

    gain_db: float
    noise_k: float


def attenuator_noise_k(loss_db: float, physical_k: float = REFERENCE_K) -> float:
    """Noise temperature (L - 1) Tp of a matched loss, referred to its input, K. Pozar 10.1. ``loss_db`` >= 0."""
    if loss_db < 0:
        raise JobError(f"loss is {loss_db} dB: a loss is zero or above")
    return (10 ** (loss_db / 10) - 1) * physical_k


def noise_figure_to_k(noise_figure_db: float) -> float:
    """Noise temperature 290 (F - 1), K. Federal Standard 1037C."""
    return attenuator_noise_k(noise_figure_db, REFERENCE_K)


def k_to_noise_figure_db(noise_k: float) -> float:
    """Noise figure 10 log10(1 + T/290), dB."""
    if noise_k < 0:
        raise JobError(f"noise temperature is {noise_k} K: it is zero or above")
    return 10 * math.log10(1 + noise_k / REFERENCE_K)


def chain(stages: Sequence[Stage]) -> Stage:
    """The chain as one stage: T = T1 + T2/G1 + T3/(G1 G2) + ... Friis 1944. At least one stage."""
    if not stages:
        raise JobError("a chain has one stage at least")
    noise, gain = 0.0, 1.0
    for stage in stages:
        noise += stage.noise_k / gain
        gain *= 10 ** (stage.gain_db / 10)
    return Stage(10 * math.log10(gain), noise)


def thermal_noise_dbm_per_hz(temperature_k: float = REFERENCE_K) -> float:
    """Available noise power k T of one hertz, dBm."""
    return 10 * math.log10(BOLTZMANN_J_PER_K * temperature_k) + 30
