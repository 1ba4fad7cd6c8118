"""Physical constants in the units that the closed forms use.

Depends on: nothing of the project.
"""

from __future__ import annotations

import math

LIGHT_MM_PER_US = 299_792.458
"""Speed of light in mm times MHz; exact (SI)."""

FREE_SPACE_OHM = 376.730313412
"""Impedance of free space (CODATA 2018)."""

MU_0_H_PER_M = FREE_SPACE_OHM / 299_792_458.0
"""Magnetic constant."""

BOLTZMANN_J_PER_K = 1.380649e-23
"""Boltzmann constant; exact (SI)."""

REFERENCE_K = 290.0
"""Reference temperature of noise figures (IEEE, Federal Standard 1037C)."""

TWO_PI = 2.0 * math.pi
