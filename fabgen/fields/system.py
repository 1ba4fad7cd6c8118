"""The Galerkin matrix of the electric-field integral equation and its solution.

    Z_mn = j k eta [ <f_m, f_n>_G - (1/k^2) <div f_m, div f_n>_G ] + <Zs f_m, f_n>

with G = e^{-jkR}/(4 pi R). Images in perfect planes enter with their sign. Time factor e^{+j omega t}.

Depends on: errors, fields.
"""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from fabgen.errors import GeometryError
from fabgen.fields import kernel
from fabgen.fields.functions import EdgeFunctions
from fabgen.fields.geometry import FREE_SPACE_IMPEDANCE, SPEED_OF_LIGHT
from fabgen.fields.mesh import FloatArray, IntArray, Mesh
from fabgen.fields.quadrature import triangle_rule

ComplexArray = NDArray[np.complex128]
SLICES = 4
"""Shares of the work, a fixed number so that results do not depend on the number of processors."""
NEAR_COST = 7.0
"""Work of a near pair against a far one, for shares of equal size."""


@dataclass(frozen=True)
class QuadratureSettings:
    """Points on each triangle for far pairs, for the smooth part of near pairs, for the analytic part's outer
    integral, and the reach of "near" in mean triangle sizes (longest edges)."""

    far_points: int = 3
    smooth_points: int = 6
    outer_points: int = 6
    reach: float = 1.6


@dataclass(frozen=True)
class _Reflection:
    mirror: FloatArray
    factor: float


def reflections(planes: tuple[int, ...]) -> tuple[_Reflection, ...]:
    """The source itself and its images; an image of the mirrored triangle counts -1 for each plane crossed."""
    found = [_Reflection(np.ones(3), 1.0)]
    for axis in planes:
        flip = np.ones(3)
        flip[axis] = -1.0
        found += [_Reflection(r.mirror * flip, -r.factor) for r in found]
    return tuple(found)


@dataclass(frozen=True)
class NearTable:
    """Near pairs and their static moments, independent of frequency; ``start`` (I, T + 1) for I reflections."""

    start: IntArray
    source: IntArray
    static: FloatArray


class Assembler:
    """Matrix of a mesh at any frequency; keeps what does not depend on frequency.

    ``kept``: pairs of triangles that are both below it are left out (they are known already).
    """

    def __init__(
        self,
        mesh: Mesh,
        functions: EdgeFunctions,
        planes: tuple[int, ...] = (),
        kept: int = 0,
        quadrature: QuadratureSettings | None = None,
    ) -> None:
        self.mesh = mesh
        self.functions = functions
        self.kept = kept
        self.quadrature = quadrature or QuadratureSettings()
        self._corners = np.ascontiguousarray(mesh.corners_m)
        self._area = mesh.areas_m2()
        edges = [np.linalg.norm(self._corners[:, i] - self._corners[:, i - 1], axis=1) for i in range(3)]
        self._size = np.max(edges, axis=0)
        self._reflections = reflections(planes)
        self._images = [np.ascontiguousarray(self._corners * r.mirror) for r in self._reflections]
        self._near = _stacked([self._near_table(image) for image in self._images])
        self._marks = self._balanced_marks()
        self._place = _shared_rows(functions.dof, self._marks, functions.count)

    def _near_table(self, image: FloatArray) -> NearTable:
        centre, image_centre = self._corners.mean(1), image.mean(1)
        start = np.zeros(len(self._corners) + 1, dtype=np.int64)
        none = np.zeros(1, dtype=np.int64)
        reach = self.quadrature.reach
        count = kernel.near_pairs(centre, image_centre, self._size, reach, self.kept, start, none, True)
        source = np.zeros(max(count, 1), dtype=np.int64)
        kernel.near_pairs(centre, image_centre, self._size, reach, self.kept, start, source, False)
        test = np.repeat(np.arange(len(self._corners)), np.diff(start))
        static = np.zeros((count, 8))
        bary, weight = triangle_rule(self.quadrature.outer_points)

        def work(first: int, last: int, _: int) -> None:
            kernel.static_moments(
                first, last, test, source, self._corners, image, bary, weight, self._area, static
            )

        _run_slices(work, np.linspace(0, count, SLICES + 1).astype(int))
        return NearTable(start[None, :], source[:count], static)

    def matrix(self, frequency_hz: float) -> ComplexArray:
        """Galerkin matrix (N, N), complex symmetric, without surface impedance."""
        k = 2 * np.pi * frequency_hz / SPEED_OF_LIGHT
        n = self.functions.count
        total = np.zeros((n, n), dtype=np.complex128)
        extra = [np.zeros((int(place.max(initial=-1)) + 1, n), dtype=np.complex128) for place in self._place]
        points, weight = self._points(self._corners[None], self.quadrature.far_points)
        image_points = _padded(self._points(np.stack(self._images), self.quadrature.far_points)[0])
        smooth_points, smooth_weight = self._points(self._corners[None], self.quadrature.smooth_points)
        smooth_image_points, _ = self._points(np.stack(self._images), self.quadrature.smooth_points)
        images = _padded(np.stack(self._images).transpose(0, 2, 3, 1))
        factors = np.array([r.factor for r in self._reflections])
        f, near = self.functions, self._near
        image_length = _padded(f.length_m.T)

        def work(first: int, last: int, part: int) -> None:
            kernel.fill_rows(
                first, last, k, FREE_SPACE_IMPEDANCE, self.kept, points[0], image_points, weight, smooth_points[0],
                smooth_image_points, smooth_weight, near.start, near.source, near.static, self._corners, images,
                factors, f.length_m, image_length, f.dof, f.sign, self._place[part], total, extra[part],
            )

        _run_slices(work, self._marks)
        for place, rows in zip(self._place, extra, strict=True):
            shared = np.flatnonzero(place >= 0)
            total[shared] += rows[place[shared]]
        return mirrored_sum(total)

    def _points(self, corners: FloatArray, count: int) -> tuple[FloatArray, FloatArray]:
        """Quadrature points (I, 3, n, T) of corners (I, T, 3, 3), and weights (n,)."""
        bary, weight = triangle_rule(count)
        return np.ascontiguousarray(np.einsum("ic,mtcx->mxit", bary, corners)), weight

    def _balanced_marks(self) -> IntArray:
        total = len(self._corners)
        rows = np.arange(total)
        far = np.where(rows < self.kept, total - self.kept, total - rows) * float(len(self._images))
        work = far + NEAR_COST * np.diff(self._near.start, axis=1).sum(0)
        cumulative = np.concatenate([[0], np.cumsum(work)])
        return np.searchsorted(cumulative, np.linspace(0, cumulative[-1], SLICES + 1)).astype(np.int64)


def _padded(values: FloatArray) -> FloatArray:
    """A block's worth of columns more, so that the compiled code may run over the end."""
    return np.ascontiguousarray(np.pad(values, [(0, 0)] * (values.ndim - 1) + [(0, kernel.BLOCK)], mode="edge"))


def _stacked(tables: list[NearTable]) -> NearTable:
    """Tables of single reflections one after the other."""
    offsets = np.cumsum([0] + [len(t.source) for t in tables[:-1]])
    start = np.concatenate([t.start + offset for t, offset in zip(tables, offsets, strict=True)])
    return NearTable(
        start, np.concatenate([t.source for t in tables]), np.concatenate([t.static for t in tables])
    )


def _shared_rows(dof: IntArray, marks: IntArray, count: int) -> list[IntArray]:
    """For each slice (N,): where among its own copies it keeps a row that an earlier slice writes to, else -1."""
    taken = np.zeros(count, dtype=bool)
    places = []
    for first, last in pairwise(marks.tolist()):
        used = np.unique(dof[first:last])
        used = used[used >= 0]
        shared = used[taken[used]]
        place = np.full(count, -1, dtype=np.int64)
        place[shared] = np.arange(len(shared))
        taken[used] = True
        places.append(place)
    return places


def _local_overlap(mesh: Mesh, f: EdgeFunctions, per_triangle: NDArray[Any]) -> NDArray[Any]:
    """x_t <f_a, f_b>_t for the three edges of each triangle without sign, in closed form (T, 3, 3)."""
    c = mesh.corners_m
    centre = c.mean(1)
    square = (np.einsum("tcx,tcx->t", c, c) + 9 * np.einsum("tx,tx->t", centre, centre)) / 12
    rest = np.einsum("tcx,tx->tc", c, centre)
    local = square[:, None, None] - rest[:, :, None] - rest[:, None, :] + np.einsum("tax,tbx->tab", c, c)
    local = local * (f.length_m[:, :, None] * f.length_m[:, None, :])
    return np.asarray(local * (np.asarray(per_triangle) / (4 * mesh.areas_m2()))[:, None, None])


def add_overlap(matrix: ComplexArray, mesh: Mesh, f: EdgeFunctions, per_triangle: NDArray[Any]) -> ComplexArray:
    """Add sum over triangles of x_t <f_m, f_n>_t to ``matrix`` (N, N); ``per_triangle`` (T,)."""
    used = np.flatnonzero(per_triangle)
    local = _local_overlap(mesh, f, per_triangle)[used]
    for s in range(2):
        for t in range(2):
            rows = np.broadcast_to(f.dof[used, :, None, s], local.shape)
            cols = np.broadcast_to(f.dof[used, None, :, t], local.shape)
            mask = (rows >= 0) & (cols >= 0)
            value = local * f.sign[used, :, None, s] * f.sign[used, None, :, t]
            np.add.at(matrix, (rows[mask], cols[mask]), value[mask])
    return matrix


def dissipated(mesh: Mesh, f: EdgeFunctions, per_triangle: FloatArray, currents: ComplexArray) -> float:
    """Sum over triangles of R_t times the integral of |J|^2; currents (N,), ``per_triangle`` (T,) in ohm per square."""
    edge = (np.append(currents, 0.0)[f.dof] * f.sign).sum(-1)
    local = _local_overlap(mesh, f, per_triangle)
    return float(np.einsum("ta,tab,tb->", edge.conj(), local, edge).real)


def mirrored_sum(matrix: ComplexArray, block: int = 256) -> ComplexArray:
    """matrix + its transpose, in place and in blocks, so that no second matrix is needed."""
    marks = range(0, len(matrix), block)

    def work(pair: tuple[int, int]) -> None:
        i, j = pair
        upper = matrix[i : i + block, j : j + block]
        lower = matrix[j : j + block, i : i + block]
        upper += lower.T
        lower[:] = upper.T

    with ThreadPoolExecutor(SLICES) as pool:
        list(pool.map(work, [(i, j) for i in marks for j in marks if j > i]))
        list(pool.map(work, [(i, i) for i in marks]))
    return matrix


def _run_slices(work: Callable[[int, int, int], None], marks: Any) -> None:
    jobs = [(int(marks[i]), int(marks[i + 1]), i) for i in range(SLICES)]
    with ThreadPoolExecutor(SLICES) as pool:
        for done in [pool.submit(work, *job) for job in jobs]:
            done.result()


def check_memory(unknowns: int, available_bytes: float | None = None) -> None:
    """Refuse a system that would not fit: 3.5 complex matrices are needed at the peak."""
    import os

    if available_bytes is None:
        available_bytes = os.sysconf("SC_AVPHYS_PAGES") * os.sysconf("SC_PAGE_SIZE")
    need = 3.5 * 16.0 * unknowns**2
    if need > available_bytes:
        raise GeometryError(
            f"{unknowns} unknowns need {need / 2**30:.1f} GiB of memory but {available_bytes / 2**30:.1f} GiB "
            "are free; use a coarser mesh or a smaller structure"
        )
