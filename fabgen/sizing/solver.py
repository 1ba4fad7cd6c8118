"""What sizing asks of a field computation: three protocols, so that any solver with these nouns will do.

Depends on: sizing.records.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from fabgen.sizing.records import Sizes, WallCurrent

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]


class Pattern(Protocol):
    """Far field ``(e_theta, e_phi)`` = r e^{jkr} E in volts over angles in radians, phase referred to the origin."""

    def __call__(self, theta_rad: Real, phi_rad: Real, /) -> tuple[Complex, Complex]: ...


class Solution(Protocol):
    """One frequency solved for 1 A (peak) at the port."""

    @property
    def impedance_ohm(self) -> complex: ...

    @property
    def ohmic_power_w(self) -> float: ...

    @property
    def power_balance(self) -> float: ...

    @property
    def residual(self) -> float: ...

    @property
    def condition(self) -> float: ...

    @property
    def largest_edge_wavelengths(self) -> float: ...

    @property
    def triangles(self) -> int: ...

    @property
    def unknowns(self) -> int: ...

    def far_field(self, theta_rad: Real, phi_rad: Real, /) -> tuple[Complex, Complex]: ...

    def wall_current(self, sizes: Sizes, /) -> WallCurrent: ...


class Sweep(Protocol):
    """A frequency sweep: impedance and axial field (E_y, volts, 1 A) at any frequency inside it."""

    @property
    def solves(self) -> int: ...

    @property
    def error_estimate(self) -> float: ...

    @property
    def solutions(self) -> Sequence[tuple[float, Solution]]: ...

    def impedance_ohm(self, frequency_mhz: Real, /) -> Complex: ...

    def on_axis_field(self, frequency_mhz: Real, /) -> Complex: ...


class Solver(Protocol):
    """Keeps the factorised can between calls, per frequency and can sizes."""

    @property
    def edges_per_wavelength(self) -> float: ...

    def solve(self, sizes: Sizes, frequency_mhz: float, /) -> Solution: ...

    def sweep(self, sizes: Sizes, start_mhz: float, stop_mhz: float, target_mhz: float, /) -> Sweep: ...
