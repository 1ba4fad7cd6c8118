"""A solver in closed form for tests of the search: a resonant loop with a tapped bar and a cos^n pattern.

It behaves like the field computation (resistance rises with the tap, an inductive reactance, a wider can narrows the
beam) but its figures mean nothing outside these tests.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fabgen.job import Job
from fabgen.sizing.records import JointCurrent, SeamCurrent, Sizes, WallCurrent
from fabgen.sizing.solver import Complex, Real, Solution


@dataclass(frozen=True)
class ToySolution:
    """One frequency."""

    impedance_ohm: complex
    exponent: float
    phase_centre_mm: float
    wavelength_mm: float
    power_balance: float = 0.0
    residual: float = 1e-14
    condition: float = 1e4
    largest_edge_wavelengths: float = 0.08
    triangles: int = 900
    unknowns: int = 1300

    @property
    def input_power_w(self) -> float:
        return 0.5 * self.impedance_ohm.real

    @property
    def ohmic_power_w(self) -> float:
        return 0.004 * self.input_power_w

    def far_field(self, theta: Real, phi: Real) -> tuple[Complex, Complex]:
        theta, phi = np.broadcast_arrays(theta, phi)
        shape = np.maximum(np.cos(theta), 0.0) ** (self.exponent / 2) + 0.02
        power = 2 * math.pi * np.trapezoid(
            (np.maximum(np.cos(t := np.linspace(0, math.pi, 721)), 0) ** (self.exponent / 2) + 0.02) ** 2 * np.sin(t), t
        )
        scale = math.sqrt(2 * 376.730313412 * 0.996 * self.input_power_w / power)
        field = scale * shape * np.exp(2j * np.pi * self.phase_centre_mm / self.wavelength_mm * np.cos(theta))
        return field * np.sin(phi), field * np.cos(phi)

    def wall_current(self, sizes: Sizes) -> WallCurrent:
        angles = tuple(15.0 * i for i in range(13))
        crossing = tuple(abs(math.cos(math.radians(a))) for a in angles)
        joint = JointCurrent("wall on floor", 1.0, 1.0, math.pi / 2 * sizes.can_bore_mm / 1e3)
        return WallCurrent((SeamCurrent("wall", 1.0, angles, crossing),), (joint,))


def toy_impedance(sizes: Sizes, frequency_mhz: float, target_mhz: float) -> complex:
    """Closed form: R rises with the tap and peaks where the loop is a wavelength long."""
    wavelength = 299_792.458 / target_mhz
    ratio = frequency_mhz / target_mhz
    electrical = math.pi * sizes.loop_diameter_mm / wavelength * ratio
    bell = 1 / (1 + (8 * (electrical - 1.0)) ** 2)
    lever = (sizes.tap_height_mm / (0.062 * wavelength)) ** 1.7
    resistance = 50 * lever * bell * (0.15 * wavelength / sizes.loop_height_mm) ** 0.5 + 0.01
    bars = (sizes.leg_pitch_mm / (0.07 * wavelength)) ** 0.5
    reactance = ratio * 75 * bars * (0.6 + 0.4 * lever) + 60 * lever * (electrical - 1)
    return complex(resistance, reactance + 5 * (sizes.can_bore_mm / wavelength - 1))


class ToySolver:
    """Solver protocol in closed form; counts its calls."""

    def __init__(self, job: Job, edges_per_wavelength: float = 16.0) -> None:
        self.target_mhz = job.target.frequency_mhz
        self.edges_per_wavelength = edges_per_wavelength
        self.calls = 0

    def solve(self, sizes: Sizes, frequency_mhz: float) -> ToySolution:
        self.calls += 1
        wavelength = 299_792.458 / frequency_mhz
        exponent = 3.0 * (sizes.can_bore_mm / wavelength) ** 1.5 + 2 * (sizes.can_depth_mm / wavelength - 0.27) ** 2
        mesh = 1 + 0.002 * (16 / self.edges_per_wavelength - 1)
        impedance = mesh * toy_impedance(sizes, frequency_mhz, self.target_mhz)
        return ToySolution(impedance, exponent, 0.8 * sizes.can_depth_mm, wavelength)

    def sweep(self, sizes: Sizes, start_mhz: float, stop_mhz: float, target_mhz: float) -> ToySweep:
        assert start_mhz < target_mhz < stop_mhz
        return ToySweep(self, sizes)


@dataclass(frozen=True)
class ToySweep:
    """Direct solves at every frequency."""

    solver: ToySolver
    sizes: Sizes
    solves: int = 9
    error_estimate: float = 1e-4

    @property
    def solutions(self) -> tuple[tuple[float, Solution], ...]:
        return tuple((f, self.solver.solve(self.sizes, f)) for f in (0.5 * self.solver.target_mhz,))

    def impedance_ohm(self, frequency_mhz: Real) -> Complex:
        return np.array([toy_impedance(self.sizes, f, self.solver.target_mhz) for f in frequency_mhz])

    def on_axis_field(self, frequency_mhz: Real) -> Complex:
        zero = np.zeros(1)
        return np.array([complex(self.solver.solve(self.sizes, f).far_field(zero, zero)[1][0]) for f in frequency_mhz])
