"""What the benchmarks compute: a sphere of any number of edges, and a feed like those of the templates."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import trimesh

from fabgen.fields.factors import SymmetricFactors
from fabgen.fields.functions import edge_functions
from fabgen.fields.geometry import SPEED_OF_LIGHT, CanGeometry, FeedGeometry, LoopGeometry
from fabgen.fields.mesh import Mesh, merged, single
from fabgen.fields.system import Assembler, check_memory

WAVELENGTH_M = 0.2110611
TARGET_HZ = SPEED_OF_LIGHT / WAVELENGTH_M
SPHERE_HZ = SPEED_OF_LIGHT / (2 * math.pi)
"""ka = 1 on a sphere of radius 1 m."""


def sphere(parts: int) -> Mesh:
    """Sphere of radius 1 m: an icosahedron whose edges are cut in ``parts``; 30 parts^2 edges, 20 parts^2 triangles.

    8 parts have the connection and the size of trimesh's icosphere of three subdivisions.
    """
    ball = trimesh.creation.icosahedron()
    weight = np.array([(i, j, parts - i - j) for i in range(parts + 1) for j in range(parts + 1 - i)]) / parts
    index = {(round(a * parts), round(b * parts)): n for n, (a, b, _) in enumerate(weight)}
    cells = []
    for i in range(parts):
        for j in range(parts - i):
            cells.append((index[i, j], index[i + 1, j], index[i, j + 1]))
            if i + j < parts - 1:
                cells.append((index[i + 1, j], index[i + 1, j + 1], index[i, j + 1]))
    faces = [single(weight @ ball.vertices[face], np.array(cells)) for face in ball.faces]
    joined = merged(faces, 1e-6 / parts)
    points = joined.vertices_m / np.linalg.norm(joined.vertices_m, axis=1)[:, None]
    return Mesh(points, joined.triangles, joined.label)


def fill_and_solve(mesh: Mesh) -> Callable[[], Any]:
    """Everything from the mesh to the currents: numbering, near table, matrix, factors, one right-hand side."""

    def work() -> Any:
        functions = edge_functions(mesh)
        check_memory(functions.count)
        matrix = Assembler(mesh, functions).matrix(SPHERE_HZ)
        return SymmetricFactors(matrix).solve(np.ones(functions.count))

    return work


def feed() -> FeedGeometry:
    """A sheet loop in a round can, sizes in wavelengths as in the templates."""
    wave = WAVELENGTH_M
    band, radius = 0.036 * wave, wave / (2 * math.pi)
    loop = LoopGeometry(
        form="sheet",
        radius_m=radius,
        height_m=0.15 * wave,
        band_m=band,
        leg_band_m=band,
        leg_pitch_m=band + 0.008,
        leg_x_m=radius - band / 2 - 0.004,
        bend_radius_m=0.003,
        tap_height_m=0.06 * wave,
        crossing_band_m=0.004,
    )
    return FeedGeometry(CanGeometry(0.52 * wave, 0.3 * wave), loop)
