"""Triangle meshes: vertices, triangles, what each triangle belongs to, and their checks.

Depends on: errors.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from fabgen.errors import GeometryError

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

FLOOR, WALL, CHOKE, PATCH, LOOP, CROSSING, BODY = range(7)


@dataclass(frozen=True)
class Mesh:
    """``vertices_m`` (V, 3); ``triangles`` (T, 3); ``label`` (T,), one of the constants of this module."""

    vertices_m: FloatArray
    triangles: IntArray
    label: IntArray

    @property
    def corners_m(self) -> FloatArray:
        """Corner points (T, 3, 3)."""
        return self.vertices_m[self.triangles]

    def areas_m2(self) -> FloatArray:
        """Area of each triangle (T,)."""
        c = self.corners_m
        return 0.5 * np.asarray(np.linalg.norm(np.cross(c[:, 1] - c[:, 0], c[:, 2] - c[:, 0]), axis=1))

    def longest_edge_m(self) -> float:
        """Length of the longest edge."""
        c = self.corners_m
        return float(max(np.linalg.norm(c[:, i] - c[:, i - 1], axis=1).max() for i in range(3)))


def single(vertices: FloatArray, triangles: IntArray, label: int = BODY) -> Mesh:
    """A mesh of one label."""
    tri = np.asarray(triangles, dtype=np.int64)
    return Mesh(np.asarray(vertices, dtype=float), tri, np.full(len(tri), label, dtype=np.int64))


def grid(nodes: FloatArray, label: int, flip: bool = False) -> Mesh:
    """Triangles of a structured grid of nodes (n, m, 3); the diagonal alternates so that no direction is favoured."""
    n, m = nodes.shape[:2]
    index = np.arange(n * m).reshape(n, m)
    a, b, c, d = index[:-1, :-1], index[1:, :-1], index[1:, 1:], index[:-1, 1:]
    i, j = np.meshgrid(np.arange(n - 1), np.arange(m - 1), indexing="ij")
    even = ((i + j + int(flip)) % 2 == 0)[..., None]
    first = np.where(even, np.stack([a, b, c], -1), np.stack([a, b, d], -1))
    second = np.where(even, np.stack([a, c, d], -1), np.stack([b, c, d], -1))
    return single(nodes.reshape(-1, 3), np.stack([first, second], 2).reshape(-1, 3), label)


def merged(meshes: Sequence[Mesh], tolerance_m: float) -> Mesh:
    """Join meshes; vertices nearer than the tolerance become one. Order of triangles and first vertices is kept.

    The result has conforming edges only where the pieces' nodes agree, which the makers of surfaces ensure.
    """
    points = np.concatenate([m.vertices_m for m in meshes])
    offsets = np.cumsum([0] + [len(m.vertices_m) for m in meshes])
    triangles = np.concatenate([m.triangles + o for m, o in zip(meshes, offsets[:-1], strict=True)])
    labels = np.concatenate([m.label for m in meshes])
    representative = _representatives(points, tolerance_m)
    used = np.unique(representative)
    renumber = np.full(len(points), -1, dtype=np.int64)
    renumber[used] = np.arange(len(used))
    return Mesh(points[used], renumber[representative][triangles], labels)


def _representatives(points: FloatArray, tolerance_m: float) -> IntArray:
    from scipy.spatial import cKDTree

    pairs = cKDTree(points).query_pairs(tolerance_m, output_type="ndarray")
    graph = coo_array((np.ones(len(pairs)), (pairs[:, 0], pairs[:, 1])), shape=(len(points), len(points)))
    count, component = connected_components(graph, directed=False)
    lowest = np.full(count, len(points), dtype=np.int64)
    np.minimum.at(lowest, component, np.arange(len(points)))
    return np.asarray(lowest[component])


def check_mesh(mesh: Mesh, wavelength_m: float, connected: bool = True) -> None:
    """Refuse a mesh that cannot be computed with.

    Raises GeometryError for a wavelength that is no finite number above zero, non-finite points, triangles without
    area, an edge longer than lambda/5 and, where ``connected``, for pieces that do not hang together.
    """
    if not (math.isfinite(wavelength_m) and wavelength_m > 0):
        raise GeometryError(f"the wavelength is {wavelength_m:g} m; a finite number above zero is needed")
    if not np.isfinite(mesh.vertices_m).all():
        raise GeometryError("the mesh has points that are not finite numbers; check the sizes given")
    areas = mesh.areas_m2()
    if areas.min() <= 1e-9 * areas.mean():
        raise GeometryError(f"{int((areas <= 1e-9 * areas.mean()).sum())} triangles have no area: two sizes coincide")
    longest = mesh.longest_edge_m()
    if longest > wavelength_m / 5:
        raise GeometryError(
            f"the longest mesh edge is {longest / wavelength_m:.3f} wavelengths; 0.2 is allowed: use a finer mesh"
        )
    if connected:
        pieces = _piece_count(mesh)
        if pieces > 1:
            raise GeometryError(f"the surfaces fall into {pieces} pieces that do not touch; all must be bonded")


def _piece_count(mesh: Mesh) -> int:
    t = mesh.triangles
    rows = np.concatenate([t[:, 0], t[:, 1]])
    cols = np.concatenate([t[:, 1], t[:, 2]])
    n = len(mesh.vertices_m)
    _, component = connected_components(coo_array((np.ones(len(rows)), (rows, cols)), shape=(n, n)), directed=False)
    return len(np.unique(component[np.unique(t)]))
