"""Edge functions of Rao, Wilton and Glisson, with junctions of several sheets and planes of symmetry.

On the triangle of area A with the edge of length l opposite its corner v:  f = +- l/(2A) (r - v),
div f = +- l/A. An edge where n sheets meet carries n - 1 functions; an edge that lies in a plane of symmetry
(perfect electric image) carries one half-function for each triangle, since its other half is the image.

Source: S. M. Rao, D. R. Wilton, A. W. Glisson, IEEE Trans. AP-30 (1982) 409-418.

Depends on: fields.mesh.
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from fabgen.fields.mesh import FloatArray, IntArray, Mesh


@dataclass(frozen=True)
class EdgeFunctions:
    """Unknowns of a mesh.

    ``dof`` (T, 3, 2): up to two unknowns for the edge opposite each corner, -1 where none; ``sign`` likewise.
    ``length_m`` (T, 3). Numbering: unknowns whose triangles are all below ``kept`` first (``inner`` of them),
    then those with one triangle on either side (``border``), then the rest.
    ``plane_edges``: unknown, triangle, axis of each half-function.
    """

    dof: IntArray
    sign: FloatArray
    length_m: FloatArray
    count: int
    inner: int
    border: int
    plane_edges: tuple[tuple[int, int, int], ...]


def edge_functions(mesh: Mesh, planes: tuple[int, ...] = (), kept: int = 0) -> EdgeFunctions:
    """Number the unknowns of a mesh. ``planes``: axes (0, 1, 2) whose zero plane is a perfect electric image."""
    tri = mesh.triangles
    owners: dict[tuple[int, int], list[tuple[int, int]]] = defaultdict(list)
    for t, (a, b, c) in enumerate(tri.tolist()):
        for corner, (i, j) in enumerate(((b, c), (c, a), (a, b))):
            owners[(i, j) if i < j else (j, i)].append((t, corner))
    scale = float(np.ptp(mesh.vertices_m, axis=0).max())
    flat = {axis: np.abs(mesh.vertices_m[:, axis]) < 1e-9 * scale for axis in planes}
    functions: list[tuple[int, tuple[int, int], list[tuple[int, int, float]], int]] = []
    for edge, places in owners.items():
        axis = next((x for x in planes if flat[x][edge[0]] and flat[x][edge[1]]), -1)
        if axis >= 0:
            groups = [[(t, c, 1.0)] for t, c in places]
        else:
            groups = [
                [(*first, 1.0), (*second, -1.0)] for first, second in pairwise(places)
            ]
        for group in groups:
            sides = {t < kept for t, _, _ in group}
            order = 1 if len(sides) == 2 else (0 if True in sides else 2)
            functions.append((order, edge, group, axis))
    functions.sort(key=lambda f: (f[0], f[1], f[2][0][0]))
    return _numbered(mesh, functions)


def _numbered(
    mesh: Mesh, functions: list[tuple[int, tuple[int, int], list[tuple[int, int, float]], int]]
) -> EdgeFunctions:
    dof = np.full((len(mesh.triangles), 3, 2), -1, dtype=np.int64)
    sign = np.zeros((len(mesh.triangles), 3, 2))
    plane_edges = []
    for number, (_, _, group, axis) in enumerate(functions):
        for t, corner, s in group:
            slot = 0 if dof[t, corner, 0] < 0 else 1
            dof[t, corner, slot] = number
            sign[t, corner, slot] = s
        if axis >= 0:
            plane_edges.append((number, group[0][0], axis))
    c = mesh.corners_m
    length = np.stack([np.linalg.norm(c[:, (i + 1) % 3] - c[:, (i + 2) % 3], axis=1) for i in range(3)], axis=1)
    orders = [f[0] for f in functions]
    return EdgeFunctions(dof, sign, length, len(functions), orders.count(0), orders.count(1), tuple(plane_edges))
