"""A feed solved at one frequency; the can's factors are kept while loop and bars change.

With the unknowns of the can inside (a), and those of border, patch, loop and bars (b),

    [A  B] [x]   [0]          S = D - B^T A^-1 B,   S y = v,   x = -A^-1 B y
    [B' D] [y] = [v]

A is factorised once for each can and frequency (block elimination); with its factors L and D, B^T A^-1 B is
(L^-1 B)^T D^-1 (L^-1 B), which needs half of A^-1 B only.

Depends on: errors, fields.
"""

from __future__ import annotations

import math
from collections import OrderedDict
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray
from scipy.sparse.linalg import LinearOperator, gmres

from fabgen.errors import GeometryError, NumericalError
from fabgen.fields import kernel
from fabgen.fields.factors import SymmetricFactors, less_product
from fabgen.fields.far_field import CurrentElements, current_elements
from fabgen.fields.functions import EdgeFunctions, edge_functions
from fabgen.fields.geometry import SPEED_OF_LIGHT, CanGeometry, FeedGeometry
from fabgen.fields.intersect import check_no_crossings
from fabgen.fields.mesh import CROSSING, LOOP, Mesh, check_mesh
from fabgen.fields.plan import MeshPlan
from fabgen.fields.surfaces import feed_mesh
from fabgen.fields.system import (
    Assembler,
    ComplexArray,
    QuadratureSettings,
    add_overlap,
    check_memory,
    dissipated,
)

SYMMETRY_PLANES = (1,)
KEPT_CANS = 4
REFINED_RESIDUAL = 1e-10
"""Residual at which a refined solution is as good as a factorised one."""
REFUSED_RESIDUAL = 1e-6
REFINING_TURNS, REFINING_STEPS, REFINING_GAIN = 4, 10, 1e-5


@dataclass(frozen=True)
class SurfaceImpedance:
    """Surface impedance of the can and of loop and bars at the solve's frequency, ohm per square; 0 = perfect."""

    can_ohm: complex = 0.0
    loop_ohm: complex = 0.0

    def per_triangle(self, mesh: Mesh) -> NDArray[np.complex128]:
        """One value for each triangle (T,)."""
        loop = (mesh.label == LOOP) | (mesh.label == CROSSING)
        return np.where(loop, complex(self.loop_ohm), complex(self.can_ohm))


@dataclass(frozen=True)
class FieldSolution:
    """Solved feed. Powers are for a peak current of 1 A at the port.

    ``impedance_ohm`` is seen across the gap in the middle of the crossing, before any capacitor. ``condition`` is not
    estimated (nan) for the pairs of a sweep.
    """

    frequency_hz: float
    impedance_ohm: complex
    elements: CurrentElements
    input_power_w: float
    ohmic_power_w: float
    residual: float
    condition: float
    largest_edge_wavelengths: float
    triangles: int
    unknowns: int
    above_ground: bool = False

    @property
    def radiated_power_w(self) -> float:
        """Power through the far sphere, or through its upper half where there is an infinite ground."""
        return self.elements.radiated_power_w(self.frequency_hz) / (2 if self.above_ground else 1)

    @property
    def power_balance(self) -> float:
        """(input - radiated - ohmic) / input; zero for a perfect computation."""
        return (self.input_power_w - self.radiated_power_w - self.ohmic_power_w) / self.input_power_w


@dataclass(frozen=True)
class _KeptCan:
    matrix: ComplexArray
    factors: SymmetricFactors
    norm: float

    def condition(self) -> float:
        """Estimated one-norm condition of what was factorised."""
        return self.norm * self.factors.inverse_norm()


@dataclass(frozen=True)
class _Prepared:
    """What a feed needs at every frequency: mesh, unknowns and the assembler of all but the can."""

    mesh: Mesh
    kept: int
    functions: EdgeFunctions
    rest: Assembler


Key = TypeVar("Key")
Value = TypeVar("Value")


class _Recent(OrderedDict[Key, Value]):
    """A dictionary that forgets what was not used for longest."""

    def __init__(self, size: int) -> None:
        super().__init__()
        self._size = size

    def recall(self, key: Key, make: Callable[[], Value]) -> Value:
        if key in self:
            self.move_to_end(key)
            return self[key]
        self[key] = value = make()
        if len(self) > self._size:
            self.popitem(last=False)
        return value


class FeedSolver:
    """Solves feeds on the meshes of one plan; keeps the cans it has factorised for as long as they are in use."""

    def __init__(self, plan: MeshPlan, quadrature: QuadratureSettings | None = None) -> None:
        self.plan = plan
        self.quadrature = quadrature or QuadratureSettings()
        self._cans: _Recent[tuple[CanGeometry, float, complex], _KeptCan] = _Recent(KEPT_CANS)
        self._can_assemblers: _Recent[CanGeometry, Assembler] = _Recent(2)
        self._feeds: _Recent[FeedGeometry, _Prepared] = _Recent(2)
        self._whole_assemblers: _Recent[FeedGeometry, Assembler] = _Recent(1)

    def solve(
        self, feed: FeedGeometry, frequency_hz: float, surface: SurfaceImpedance | None = None
    ) -> FieldSolution:
        """Impedance, currents and powers at one frequency.

        Raises GeometryError for sizes that clash or a mesh too coarse, NumericalError where the solution is not finite.
        """
        surface = surface or SurfaceImpedance()
        ready = self._feeds.recall(feed, lambda: self._prepare(feed))
        check_mesh(ready.mesh, SPEED_OF_LIGHT / frequency_hz)
        drive = port_drive(ready.mesh, ready.functions)
        can = self._cans.recall(
            (feed.can, frequency_hz, complex(surface.can_ohm)),
            lambda: self._factorised(feed.can, ready, frequency_hz, surface),
        )
        matrix = self._full(can.matrix, ready, frequency_hz, surface)
        system = _System(can, matrix, ready.functions.inner)
        return _solution(ready, frequency_hz, surface, system.solve(drive), drive, system.condition(), matrix)

    def solve_pair(
        self, feed: FeedGeometry, frequency_hz: float, step: float, surface: SurfaceImpedance | None = None
    ) -> tuple[FieldSolution, FieldSolution]:
        """Solutions at f and at f (1 + step), the second by iterative refinement with the factors of the first.

        ``step`` at most about 0.01. One factorisation serves both, which gives a sweep slopes at little cost. No can
        is kept. Where a resonance is so sharp that the refinement does not settle, the second is factorised too. Raises
        as ``solve``, and NumericalError where the residual stays above 1e-6.
        """
        surface = surface or SurfaceImpedance()
        ready = self._feeds.recall(feed, lambda: self._prepare(feed))
        top = frequency_hz * (1 + step)
        check_mesh(ready.mesh, SPEED_OF_LIGHT / max(frequency_hz, top))
        drive = port_drive(ready.mesh, ready.functions)
        matrix = self._whole(feed, ready, frequency_hz, surface)
        factors, currents = _quickly_solved(matrix, drive)
        first = _solution(ready, frequency_hz, surface, currents, drive, math.nan, matrix)
        del matrix  # makes room for the next one
        matrix = self._whole(feed, ready, top, surface)
        currents = _refined(factors, matrix, currents, drive)
        second = _solution(ready, top, surface, currents, drive, math.nan, matrix)
        if second.residual > REFINED_RESIDUAL:
            _, currents = _quickly_solved(matrix, drive)
            second = _solution(ready, top, surface, currents, drive, math.nan, matrix)
        return _settled(first), _settled(second)

    def _whole(
        self, feed: FeedGeometry, ready: _Prepared, frequency_hz: float, surface: SurfaceImpedance
    ) -> ComplexArray:
        """The full matrix made in one go."""
        assembler = self._whole_assemblers.recall(
            feed, lambda: Assembler(ready.mesh, ready.functions, SYMMETRY_PLANES, 0, self.quadrature)
        )
        matrix = assembler.matrix(frequency_hz)
        if surface.loop_ohm or surface.can_ohm:
            add_overlap(matrix, ready.mesh, ready.functions, surface.per_triangle(ready.mesh))
        return matrix

    def _prepare(self, feed: FeedGeometry) -> _Prepared:
        mesh, kept = feed_mesh(feed, self.plan)
        functions = edge_functions(mesh, SYMMETRY_PLANES, kept)
        check_memory(functions.count)
        check_no_crossings(mesh)
        return _Prepared(mesh, kept, functions, Assembler(mesh, functions, SYMMETRY_PLANES, kept, self.quadrature))

    def _can_assembler(self, ready: _Prepared) -> Assembler:
        mesh, kept, f = ready.mesh, ready.kept, ready.functions
        part = Mesh(mesh.vertices_m, mesh.triangles[:kept], mesh.label[:kept])
        count = f.inner + f.border
        own = EdgeFunctions(f.dof[:kept], f.sign[:kept], f.length_m[:kept], count, f.inner, f.border, ())
        return Assembler(part, own, SYMMETRY_PLANES, 0, self.quadrature)

    def _can_matrix(
        self, can: CanGeometry, ready: _Prepared, frequency_hz: float, surface: SurfaceImpedance
    ) -> ComplexArray:
        assembler = self._can_assemblers.recall(can, lambda: self._can_assembler(ready))
        matrix = assembler.matrix(frequency_hz)
        if surface.can_ohm:
            add_overlap(matrix, assembler.mesh, assembler.functions, surface.per_triangle(assembler.mesh))
        return matrix

    def _factorised(
        self, can: CanGeometry, ready: _Prepared, frequency_hz: float, surface: SurfaceImpedance
    ) -> _KeptCan:
        matrix = self._can_matrix(can, ready, frequency_hz, surface)
        inner = matrix[: ready.functions.inner, : ready.functions.inner]
        return _KeptCan(matrix, SymmetricFactors(inner.copy()), _one_norm(inner))

    @staticmethod
    def _full(
        can_matrix: ComplexArray, ready: _Prepared, frequency_hz: float, surface: SurfaceImpedance
    ) -> ComplexArray:
        full = ready.rest.matrix(frequency_hz)
        if surface.loop_ohm or surface.can_ohm:
            values = surface.per_triangle(ready.mesh)
            values[: ready.kept] = 0.0
            add_overlap(full, ready.mesh, ready.functions, values)
        known = ready.functions.inner + ready.functions.border
        full[:known, :known] += can_matrix
        return full


class _System:
    """The factors of a full matrix by block elimination with the kept factors of the can; keeps no full matrix."""

    def __init__(self, can: _KeptCan, full: ComplexArray, inner: int) -> None:
        self._can = can
        self._border = full[:inner, inner:].copy()
        schur = full[inner:, inner:].copy()
        if inner:
            less_product(schur, *can.factors.halfway(self._border))
        self._schur_norm = _one_norm(schur)
        self._factors = SymmetricFactors(schur)

    def solve(self, right: NDArray[Any]) -> ComplexArray:
        """Solution for one right-hand side (N,)."""
        n, border, can = len(self._border), self._border, self._can.factors
        known = right[n:] - border.T @ can.solve(right[:n]) if right[:n].any() else right[n:]
        y = self._factors.solve(known)
        return np.concatenate([can.solve(right[:n] - border @ y), y]) if n else y

    def condition(self) -> float:
        """Estimated one-norm condition of the two factorised blocks, the larger."""
        outer = self._schur_norm * self._factors.inverse_norm()
        return max(outer, self._can.condition()) if len(self._border) else outer


def _one_norm(symmetric: ComplexArray) -> float:
    """Largest sum of a row, as good as one of a column."""
    return float(max(np.abs(row).sum() for row in symmetric))


def _residual(matrix: ComplexArray, currents: ComplexArray, right: NDArray[Any]) -> tuple[ComplexArray, float]:
    """v - Z x (N,), and the largest backward error of a row, |Z x - v| / (|Z| |x| + |v|)."""
    left = np.empty(len(currents), dtype=np.complex128)
    return left, float(kernel.residual(matrix, currents, right.astype(np.complex128), left))


def _quickly_solved(matrix: ComplexArray, right: NDArray[Any]) -> tuple[SymmetricFactors, ComplexArray]:
    """Factors in single precision, half the time of double ones, with the solution refined to double.

    Where the refinement does not settle, factors in double precision.
    """
    factors = SymmetricFactors(matrix.astype(np.complex64))
    currents = np.zeros(len(right), dtype=np.complex128)
    for _ in range(2 * REFINING_TURNS):
        left, error = _residual(matrix, currents, right)
        if error < REFINED_RESIDUAL:
            return factors, currents
        currents = currents + factors.solve(left)
    factors = SymmetricFactors(matrix.copy())
    return factors, factors.solve(right)


def _refined(
    factors: SymmetricFactors, matrix: ComplexArray, currents: ComplexArray, right: NDArray[Any]
) -> ComplexArray:
    """Solution of Z x = v by GMRES, preconditioned with the factors of a matrix nearby.

    A turn starts from the true residual, so that the precision of the factors does not limit that of the solution.
    """
    shape = matrix.shape
    system = LinearOperator(shape, lambda x: matrix @ x, dtype=np.complex128)
    inverse = LinearOperator(shape, lambda x: factors.solve(x).astype(np.complex128), dtype=np.complex128)
    for _ in range(REFINING_TURNS):
        left, error = _residual(matrix, currents, right)
        if error < REFINED_RESIDUAL:
            break
        change, _ = gmres(system, left, M=inverse, rtol=REFINING_GAIN, restart=REFINING_STEPS, maxiter=1)
        currents = currents + change
    return currents


def _settled(solution: FieldSolution) -> FieldSolution:
    """The solution, unless the factors were no good: nobody else looks at the residuals of a sweep."""
    if not solution.residual <= REFUSED_RESIDUAL:
        raise NumericalError(
            f"the field at {solution.frequency_hz / 1e6:.1f} MHz has a residual of {solution.residual:.1e}; "
            f"{REFUSED_RESIDUAL:g} is allowed: change the sizes a little"
        )
    return solution


def _solution(
    ready: _Prepared, frequency_hz: float, surface: SurfaceImpedance, currents: ComplexArray,
    drive: NDArray[np.float64], condition: float, matrix: ComplexArray, planes: tuple[int, ...] = SYMMETRY_PLANES,
) -> FieldSolution:
    total = complex(2 * drive @ currents)
    if not np.isfinite(currents).all() or total == 0:
        raise NumericalError("the field solution is not finite; the sizes lie outside what can be computed")
    unit = currents / total
    impedance = 1 / total
    return FieldSolution(
        frequency_hz, impedance, current_elements(ready.mesh, ready.functions, planes, unit),
        0.5 * impedance.real, _ohmic_power(ready.mesh, ready.functions, surface, unit),
        _residual(matrix, currents, drive)[1], condition,
        ready.mesh.longest_edge_m() * frequency_hz / SPEED_OF_LIGHT, len(ready.mesh.triangles), ready.functions.count,
        2 in planes,
    )


def _ohmic_power(
    mesh: Mesh, functions: EdgeFunctions, surface: SurfaceImpedance, currents: ComplexArray
) -> float:
    resistance = surface.per_triangle(mesh).real
    if not resistance.any():
        return 0.0
    # half of R |J|^2, twice for the two halves of the symmetric feed
    return dissipated(mesh, functions, resistance, currents)


def solve_mesh(
    mesh: Mesh,
    frequency_hz: float,
    surface: SurfaceImpedance | None = None,
    planes: tuple[int, ...] = SYMMETRY_PLANES,
    quadrature: QuadratureSettings | None = None,
) -> FieldSolution:
    """Any half structure with a port in the plane y = 0, without keeping a part of it.

    ``planes``: axes whose zero plane is a perfect electric image: 1 for the symmetry of the structure, 2 in
    addition for an infinite perfect ground under it. Powers and impedance are those of the whole structure, or of
    the half space above the ground.
    """
    surface = surface or SurfaceImpedance()
    check_mesh(mesh, SPEED_OF_LIGHT / frequency_hz, connected=False)
    functions = edge_functions(mesh, planes)
    check_memory(functions.count)
    assembler = Assembler(mesh, functions, planes, 0, quadrature)
    matrix = assembler.matrix(frequency_hz)
    if surface.can_ohm or surface.loop_ohm:
        add_overlap(matrix, mesh, functions, surface.per_triangle(mesh))
    drive = port_drive(mesh, functions)
    ready = _Prepared(mesh, 0, functions, assembler)
    none = np.zeros((0, 0), dtype=np.complex128)
    system = _System(_KeptCan(none, SymmetricFactors(none), 0.0), matrix, 0)
    return _solution(ready, frequency_hz, surface, system.solve(drive), drive, system.condition(), matrix, planes)


def port_drive(mesh: Mesh, functions: EdgeFunctions) -> NDArray[np.float64]:
    """Right-hand side for 1 V across the gap: half the voltage times the edge length on each port edge."""
    drive = np.zeros(functions.count)
    for unknown, triangle, _ in functions.plane_edges:
        if mesh.label[triangle] == CROSSING:
            corner = int(np.argmax((functions.dof[triangle] == unknown).any(-1)))
            drive[unknown] = 0.5 * functions.length_m[triangle, corner]
    if not drive.any():
        raise GeometryError("the port is not on an edge of the mesh: no edge of the crossing lies in the plane y = 0")
    return drive
