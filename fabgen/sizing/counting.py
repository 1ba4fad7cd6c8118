"""A solver that counts its solves and gives a repeated question the same answer without solving again.

Depends on: sizing.records, sizing.solver.
"""

from __future__ import annotations

from dataclasses import replace

from fabgen.sizing.records import Sizes
from fabgen.sizing.solver import Solution, Solver, Sweep


class CountingSolver:
    """Wraps a solver. The series capacitor lies behind the port, so it does not take part in the solve."""

    def __init__(self, solver: Solver) -> None:
        self._solver = solver
        self._known: dict[tuple[Sizes, float], Solution] = {}
        self.solves = 0

    @property
    def edges_per_wavelength(self) -> float:
        """Mesh density of the solver inside."""
        return self._solver.edges_per_wavelength

    def solve(self, sizes: Sizes, frequency_mhz: float) -> Solution:
        """The solution, from memory where the same sizes were solved before."""
        key = (replace(sizes, series_capacitor_pf=0.0), frequency_mhz)
        if key not in self._known:
            self._known[key] = self._solver.solve(sizes, frequency_mhz)
            self.solves += 1
        return self._known[key]

    def sweep(self, sizes: Sizes, start_mhz: float, stop_mhz: float, target_mhz: float) -> Sweep:
        """A sweep; its solves count."""
        sweep = self._solver.sweep(sizes, start_mhz, stop_mhz, target_mhz)
        self.solves += sweep.solves
        return sweep
