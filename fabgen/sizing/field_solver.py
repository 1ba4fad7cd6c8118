"""The field computation as sizing's ``Solver``: losses from the job's stock, mesh density, solutions with a pattern.

Depends on: job, fields, sizing.field_model, sizing.records, sizing.solver, sizing.wall_current, stock.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from fabgen.fields.model import FieldSolution
from fabgen.fields.plan import DEFAULT_DENSITY
from fabgen.job import Job
from fabgen.sizing.field_model import FieldModel, FieldSweep, Losses
from fabgen.sizing.records import Sizes, WallCurrent
from fabgen.sizing.solver import Complex, Real, Solution
from fabgen.sizing.wall_current import wall_current
from fabgen.stock import tables

PAIR_RATIO = 1.02
"""Solves of a sweep come in close pairs; of those nearer than this one is kept."""


@dataclass(frozen=True)
class SolvedFeed:
    """A field solution with its pattern."""

    fields: FieldSolution

    @property
    def impedance_ohm(self) -> complex:
        """At the tap, before the capacitor."""
        return self.fields.impedance_ohm

    @property
    def ohmic_power_w(self) -> float:
        """Lost in the surfaces, for 1 A peak."""
        return self.fields.ohmic_power_w

    @property
    def power_balance(self) -> float:
        """(input - radiated - ohmic) / input."""
        return self.fields.power_balance

    @property
    def residual(self) -> float:
        """Of the linear system."""
        return self.fields.residual

    @property
    def condition(self) -> float:
        """Of the system that was factorised."""
        return self.fields.condition

    @property
    def largest_edge_wavelengths(self) -> float:
        """Longest edge of the mesh."""
        return self.fields.largest_edge_wavelengths

    @property
    def triangles(self) -> int:
        """Of the mesh, one half of the feed."""
        return self.fields.triangles

    @property
    def unknowns(self) -> int:
        """Edge functions."""
        return self.fields.unknowns

    def far_field(self, theta_rad: Real, phi_rad: Real) -> tuple[Complex, Complex]:
        """(E_theta, E_phi), volts."""
        return self.fields.elements.far_field(self.fields.frequency_hz, theta_rad, phi_rad)

    def wall_current(self, sizes: Sizes) -> WallCurrent:
        """At the can's seams and joints, for the sizes that were solved."""
        return wall_current(self.fields, sizes)


@dataclass(frozen=True)
class SolvedSweep:
    """A field sweep with the full solutions behind it."""

    fields: FieldSweep
    solutions: Sequence[tuple[float, Solution]]

    @property
    def solves(self) -> int:
        """Full solves."""
        return self.fields.solves

    @property
    def error_estimate(self) -> float:
        """Of the reflection's magnitude."""
        return self.fields.error_estimate

    def impedance_ohm(self, frequency_mhz: Real) -> Complex:
        """At the tap, before the capacitor."""
        return self.fields.impedance_ohm(frequency_mhz)

    def on_axis_field(self, frequency_mhz: Real) -> Complex:
        """E_y on the axis, volts for 1 A."""
        return self.fields.on_axis_field(frequency_mhz)


class _KeepingModel(FieldModel):
    """A field model that keeps the solutions behind a sweep, for their patterns."""

    def __init__(self, target_mhz: float, edges_per_wavelength: float, losses: Losses) -> None:
        super().__init__(target_mhz, edges_per_wavelength, losses)
        self.kept: list[FieldSolution] = []

    def _quantities(self, solution: FieldSolution) -> list[complex]:
        self.kept.append(solution)
        return super()._quantities(solution)

    def kept_apart(self) -> tuple[tuple[float, SolvedFeed], ...]:
        """Kept solutions by frequency in MHz, one of each close pair."""
        found: list[tuple[float, SolvedFeed]] = []
        for solution in sorted(self.kept, key=lambda s: s.frequency_hz):
            frequency = solution.frequency_hz / 1e6
            if not found or frequency > PAIR_RATIO * found[-1][0]:
                found.append((frequency, SolvedFeed(solution)))
        return tuple(found)


class FieldSolver:
    """Solves sizes with one mesh plan per neighbourhood of sizes. A new one forgets all meshes, so what it says does
    not depend on what was solved before it was made."""

    def __init__(self, job: Job, edges_per_wavelength: float = DEFAULT_DENSITY) -> None:
        self.edges_per_wavelength: float = edges_per_wavelength
        self._model = _KeepingModel(job.target.frequency_mhz, edges_per_wavelength, job_losses(job))

    def solve(self, sizes: Sizes, frequency_mhz: float) -> SolvedFeed:
        """One frequency."""
        return SolvedFeed(self._model.solve(sizes, frequency_mhz))

    def sweep(self, sizes: Sizes, start_mhz: float, stop_mhz: float, target_mhz: float) -> SolvedSweep:
        """A band; the capacitor of ``sizes`` weighs where the interpolation must be good."""
        del target_mhz
        self._model.kept.clear()
        sweep = self._model.sweep(sizes, start_mhz, stop_mhz, sizes.series_capacitor_pf)
        return SolvedSweep(sweep, self._model.kept_apart())


def job_losses(job: Job) -> Losses:
    """What loop and can are made of, from the stock tables."""
    loop = tables.metal(job.loop.metal)
    if job.can.make == "printed":
        return Losses(
            loop, lining=tables.lining(job.can.lining), lining_sheet_resistance_ohm=job.can.lining_sheet_resistance_ohm
        )
    return Losses(loop, can_metal=tables.metal(job.can.metal))
