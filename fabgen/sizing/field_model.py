"""The border between sizes in millimetres and the field computation in metres; the only place that converts.

    round wire of diameter d  -> strip of width 2 d (four radii); the bars: the width whose coplanar pair has the
                                 impedance of the two wires
    sheet w x t               -> strip of width w + t (the edge faces count half each)

Both are corrected for the number of cells across (``fields.strips``). The strips of the bars are wider than the
bars, so the crossing between them comes out short; its missing length counts as mu0/(2 pi) of series inductance
(0.2 nH per mm), fitted and tested on the surfaces of the drawn solids.

Depends on: stock, theory, fields, sizing.records.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fabgen.errors import GeometryError
from fabgen.fields.geometry import CanGeometry, ChokeGeometry, FeedGeometry, LoopGeometry
from fabgen.fields.model import FeedSolver, FieldSolution, SurfaceImpedance
from fabgen.fields.plan import DEFAULT_DENSITY, cells_across, cells_across_crossing, plan_mesh
from fabgen.fields.strips import crowding, lone_strip_width_m, paired_strip_width_m
from fabgen.fields.sweep import SweepResult, adaptive_sweep
from fabgen.sizing.records import Sizes
from fabgen.stock.records import Lining, Metal
from fabgen.theory.lines import coplanar_strips_ohm, two_wire_ohm
from fabgen.theory.skin import lining_impedance_ohm, metal_impedance_ohm

SWEEP_STEP = 0.005
SWEEP_ERROR = 0.03
"""Error of the reflection that a sweep may keep; the self-check has the same limit."""
MU0_OVER_TWO_PI = 2e-7
WITNESSES = 10
"""Currents spread over the structure that a sweep follows besides impedance and axial field."""
WITNESS_DIRECTION = np.array([0.6, 0.64, 0.48])
"""A direction that no current of a feed is square to everywhere."""
PHASE_PLANE = 0.2
"""Height, in wavelengths at the target, to which the axial field's phase is referred while it is interpolated."""


@dataclass(frozen=True)
class Losses:
    """What the surfaces are made of. ``lining`` rules over ``can_metal`` where the can is plastic."""

    loop_metal: Metal
    can_metal: Metal | None = None
    lining: Lining | None = None
    lining_sheet_resistance_ohm: float | None = None


def feed_geometry(sizes: Sizes, edges_per_wavelength: float = DEFAULT_DENSITY) -> FeedGeometry:
    """Sizes as thin surfaces in metres, for a mesh of the density given."""
    choke = None
    if sizes.choke is not None:
        choke = ChokeGeometry(
            sizes.choke.bore_mm / 2e3, sizes.choke.floor_z_mm / 1e3, sizes.choke.depth_mm / 1e3
        )
    can = CanGeometry(sizes.can_bore_mm / 2e3, sizes.can_depth_mm / 1e3, sizes.can_flats, choke)
    band, leg_band = strip_widths_m(sizes, cells_across(edges_per_wavelength))
    crossing = lone_strip_width_m(sizes.crossing_width_mm / 4e3, cells_across_crossing(edges_per_wavelength))
    bend = sizes.leg_bend_radius_mm + (sizes.sheet_mm or 0.0) / 2
    if sizes.conductor == "wire":
        # a strip needs room on the inside of the bend
        bend = max(bend, 0.55e3 * band)
    return FeedGeometry(
        can,
        LoopGeometry(
            "wire" if sizes.conductor == "wire" else "sheet",
            sizes.loop_diameter_mm / 2e3, sizes.loop_height_mm / 1e3, band, leg_band,
            sizes.leg_pitch_mm / 1e3, sizes.leg_x_mm / 1e3, bend / 1e3, sizes.tap_height_mm / 1e3,
            crossing, sizes.tabs != "outward",
        ),
    )


def strip_widths_m(sizes: Sizes, cells: int) -> tuple[float, float]:
    """Widths of the meshed strips, ``cells`` across, that stand for ring and bars."""
    pitch = sizes.leg_pitch_mm
    if sizes.wire_mm is not None:
        ring_radius, pair = sizes.wire_mm / 2, two_wire_ohm(pitch, sizes.wire_mm)
    else:
        thickness = sizes.sheet_mm or 0.0
        ring_radius = ((sizes.strip_width_mm or 0.0) + thickness) / 4
        bar = sizes.leg_width_mm + thickness
        if bar >= pitch:
            raise GeometryError(
                f"bars {sizes.leg_width_mm:g} mm wide and {thickness:g} mm thick at a pitch of {pitch:g} mm touch; "
                f"the pitch must be above {bar:g} mm"
            )
        pair = coplanar_strips_ohm(pitch - bar, bar)
    return lone_strip_width_m(ring_radius / 1e3, cells), paired_strip_width_m(pair, pitch / 1e3, cells)


@dataclass(frozen=True)
class FieldSweep:
    """Impedance and axial field over frequency, interpolated; ``solves`` full solves, error of reflection."""

    result: SweepResult
    target_mhz: float

    @property
    def solves(self) -> int:
        """Full solves made."""
        return self.result.solves

    @property
    def error_estimate(self) -> float:
        """Estimated error of the reflection's magnitude."""
        return self.result.error_estimate

    def impedance_ohm(self, frequency_mhz: NDArray[np.float64]) -> NDArray[np.complex128]:
        """Impedance at the tap before the capacitor."""
        return self.result.fit(np.asarray(frequency_mhz, float) / self.target_mhz)[:, 0]

    def on_axis_field(self, frequency_mhz: NDArray[np.float64]) -> NDArray[np.complex128]:
        """E_y on the axis, volts for 1 A at the port."""
        x = np.asarray(frequency_mhz, float) / self.target_mhz
        return np.asarray(self.result.fit(x)[:, 1] * np.exp(2j * np.pi * PHASE_PLANE * x))


class FieldModel:
    """Solves sizes; meshes are moved, not made anew, while sizes stay near those of an earlier call.

    ``edges_per_wavelength`` is the mesh density at the target. Without ``losses`` conductors are perfect.
    """

    def __init__(
        self, target_mhz: float, edges_per_wavelength: float = DEFAULT_DENSITY, losses: Losses | None = None
    ) -> None:
        self.target_mhz = target_mhz
        self.edges_per_wavelength = edges_per_wavelength
        self.losses = losses
        self._solvers: list[FeedSolver] = []
        self.solves = 0

    def solve(self, sizes: Sizes, frequency_mhz: float) -> FieldSolution:
        """One solve. Raises GeometryError for sizes that clash."""
        geometry = feed_geometry(sizes, self.edges_per_wavelength)
        self.solves += 1
        solution = self._solver(geometry).solve(geometry, frequency_mhz * 1e6, self.surface(sizes, frequency_mhz))
        return _with_full_crossing(solution, sizes, geometry)

    def surface(self, sizes: Sizes, frequency_mhz: float) -> SurfaceImpedance:
        """Surface impedance of can and loop.

        A wire's current spreads evenly over its perimeter pi d, the strip's over a width of 2 d and denser at its
        edges: 2 / (pi crowding) of the metal's impedance gives the wire's loss. A sheet's flows on both faces.
        """
        if self.losses is None:
            return SurfaceImpedance()
        metal = metal_impedance_ohm(self.losses.loop_metal, frequency_mhz)
        share = 0.5
        if sizes.wire_mm is not None:
            cells = cells_across(self.edges_per_wavelength)
            width = lone_strip_width_m(sizes.wire_mm / 2e3, cells)
            share = width / (np.pi * sizes.wire_mm / 1e3) / crowding(cells)
        if self.losses.lining is not None:
            can = lining_impedance_ohm(
                self.losses.lining, frequency_mhz, self.losses.lining_sheet_resistance_ohm
            )
        elif self.losses.can_metal is not None:
            can = metal_impedance_ohm(self.losses.can_metal, frequency_mhz)
        else:
            can = 0j
        return SurfaceImpedance(complex(can), complex(metal * share))

    def sweep(self, sizes: Sizes, start_mhz: float, stop_mhz: float, capacitor_pf: float) -> FieldSweep:
        """Impedance and axial field over a band by at most 15 full solves."""
        geometry = feed_geometry(sizes, self.edges_per_wavelength)
        solver = self._solver(geometry)
        middle = 0.5 * (start_mhz + stop_mhz)

        def sample(x: float) -> tuple[NDArray[np.float64], NDArray[np.complex128]]:
            frequency = x * self.target_mhz
            step = SWEEP_STEP if frequency < middle else -SWEEP_STEP
            pair = solver.solve_pair(geometry, frequency * 1e6, step, self.surface(sizes, frequency))
            self.solves += 1
            return np.array([p.frequency_hz / 1e6 / self.target_mhz for p in pair]), np.array(
                [self._quantities(_with_full_crossing(p, sizes, geometry)) for p in pair]
            )

        def reflection(x: NDArray[np.float64], values: NDArray[np.complex128]) -> NDArray[np.complex128]:
            omega = 2e6 * np.pi * x * self.target_mhz
            z = values[:, 0] + 1 / (1j * omega * capacitor_pf * 1e-12)
            return np.asarray((z - 50) / (z + 50))

        band = start_mhz / self.target_mhz, stop_mhz / self.target_mhz
        result = adaptive_sweep(sample, *band, reflection, 1.0)
        return FieldSweep(result, self.target_mhz)

    def _quantities(self, solution: FieldSolution) -> list[complex]:
        """Impedance, axial field, and some of the currents, which have the same poles and tell them apart."""
        x = solution.frequency_hz / 1e6 / self.target_mhz
        axial, _ = solution.elements.far_field(solution.frequency_hz, 0.0, np.pi / 2)
        moments = solution.elements.moment_am
        witnesses = moments[np.linspace(0, len(moments) - 1, WITNESSES).astype(int)] @ WITNESS_DIRECTION
        return [solution.impedance_ohm, complex(axial) * complex(np.exp(-2j * np.pi * PHASE_PLANE * x)), *witnesses]

    def _solver(self, geometry: FeedGeometry) -> FeedSolver:
        for solver in self._solvers:
            if _near(solver.plan.reference, geometry):
                return solver
        wavelength = 299.792458 / self.target_mhz
        solver = FeedSolver(plan_mesh(geometry, wavelength, self.edges_per_wavelength))
        self._solvers.append(solver)
        if len(self._solvers) > 4:
            self._solvers.pop(0)
        return solver


def _with_full_crossing(solution: FieldSolution, sizes: Sizes, geometry: FeedGeometry) -> FieldSolution:
    missing = max(0.0, geometry.loop.leg_band_m - sizes.leg_width_mm / 1e3)
    reactance = 2 * np.pi * solution.frequency_hz * MU0_OVER_TWO_PI * missing
    return replace(solution, impedance_ohm=solution.impedance_ohm + 1j * reactance)


def _on_the_floor(can: CanGeometry) -> bool:
    """Whether a choke stands on the can's own floor; then the wall has no rows below it."""
    return can.choke is not None and can.choke.floor_z_m == 0.0


def _near(reference: FeedGeometry, wanted: FeedGeometry) -> bool:
    """Whether the meshes of the reference can be moved to the wanted sizes without losing their quality."""
    if replace(reference.can, radius_m=1, depth_m=1, choke=None) != replace(
        wanted.can, radius_m=1, depth_m=1, choke=None
    ):
        return False
    if _on_the_floor(reference.can) != _on_the_floor(wanted.can):
        return False
    if (reference.can.choke is None) != (wanted.can.choke is None) or reference.loop.form != wanted.loop.form:
        return False
    if reference.loop.inward != wanted.loop.inward:
        return False
    pairs = [
        (reference.can.radius_m, wanted.can.radius_m, 0.03),
        (reference.can.depth_m, wanted.can.depth_m, 0.05),
        (reference.loop.radius_m, wanted.loop.radius_m, 0.06),
        (reference.loop.height_m, wanted.loop.height_m, 0.15),
        (reference.loop.band_m, wanted.loop.band_m, 0.1),
        (reference.loop.leg_pitch_m, wanted.loop.leg_pitch_m, 0.05),
    ]
    if reference.can.choke is not None and wanted.can.choke is not None:
        pairs += [
            (reference.can.choke.radius_m, wanted.can.choke.radius_m, 0.05),
            (reference.can.choke.depth_m, wanted.can.choke.depth_m, 0.1),
            (reference.can.choke.floor_z_m + 1e-3, wanted.can.choke.floor_z_m + 1e-3, 0.2),
        ]
    return all(abs(a / b - 1) <= limit for a, b, limit in pairs)
