"""Thermal expansion and the drift of a resonance with it.

Depends on: nothing of the project.
"""

from __future__ import annotations


def length_change_mm(length_mm: float, expansion_per_k: float, temperature_change_k: float) -> float:
    """Change of a length, alpha L dT, mm."""
    return expansion_per_k * length_mm * temperature_change_k


def drift_mhz(frequency_mhz: float, expansion_per_k: float, temperature_change_k: float) -> float:
    """Drift of the resonance of a body of one material: -alpha dT f, MHz (negative when it warms)."""
    return -expansion_per_k * temperature_change_k * frequency_mhz
