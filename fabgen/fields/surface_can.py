"""Floor, wall and choke of the can: the half y >= 0.

The floor's outer part is meshed by netgen between prescribed boundary nodes; wall and choke are extruded from its
rim, finer towards the rim of the can. Round the feet a rectangular patch of the floor is left out: it is filled
anew for every loop (``floor_patch``), so the rest of the can stays as it is while the loop changes.

Depends on: errors, fields.geometry, fields.mesh, fields.plan.
"""

from __future__ import annotations

import math
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from fabgen.errors import GeometryError
from fabgen.fields.geometry import CanGeometry
from fabgen.fields.mesh import CHOKE, FLOOR, PATCH, WALL, FloatArray, Mesh, grid, single
from fabgen.fields.plan import MeshPlan, PatchFrame, rim_row_m

LONGEST = 1.35
"""Longest edge of the floor, of the nominal edge: it may stretch by three percent and stays under lambda/5 at 2.2
times the target."""


def can_surface(can: CanGeometry, plan: MeshPlan) -> tuple[Mesh, ...]:
    """Meshes of the floor outside the patch, the wall and the choke."""
    rim = rim_nodes(can, plan.can.rim)
    floor = _moved_floor(can, plan)
    heights = wall_heights(can, plan)
    meshes = [floor, grid(_extruded(rim, heights), WALL)]
    if can.choke is not None:
        meshes += _choke(can, rim, plan)
    return tuple(meshes)


def rim_nodes(can: CanGeometry, cells: int) -> FloatArray:
    """Plan of the wall (n, 2) from +x round to -x; a circle is a polygon of equal area, flats keep their corners.

    ``cells``: on the half circle, or on each flat (even, since half flats lie at the plane of symmetry).
    """
    if can.flats:
        return _flat_rim(can, cells)
    step = math.pi / cells
    radius = can.radius_m * math.sqrt(step / math.sin(step))
    angle = step * np.arange(cells + 1)
    points = np.stack([radius * np.cos(angle), radius * np.sin(angle)], -1)
    points[[0, -1], 1] = 0.0
    return points


def _flat_rim(can: CanGeometry, cells: int) -> FloatArray:
    half = math.pi / can.flats
    corner = can.radius_m / math.cos(half)
    angles = [half * (2 * i + 1) for i in range(can.flats // 2)]
    corners = [(can.radius_m, 0.0), *((corner * math.cos(a), corner * math.sin(a)) for a in angles)]
    corners.append((-can.radius_m, 0.0))
    pieces = [np.array(corners[:1])]
    for i, (a, b) in enumerate(zip(np.array(corners[:-1]), np.array(corners[1:]), strict=True)):
        count = cells // 2 if i in (0, len(corners) - 2) else cells
        t = np.arange(1, count + 1)[:, None] / count
        pieces.append(a * (1 - t) + b * t)
    return np.concatenate(pieces)


def wall_heights(can: CanGeometry, plan: MeshPlan) -> FloatArray:
    """Rows of the wall; the last is a third as high, for the current that crowds at the rim."""
    z = can.choke.floor_z_m if can.choke is not None else 0.0
    body = can.depth_m - rim_row_m(can.depth_m - z, plan.edge_m)
    if can.choke is None:
        stops = [(0.0, body, plan.can.wall)]
    else:
        stops = [(0.0, z, plan.can.wall), (z, body, plan.can.wall_above)]
    rows = [np.zeros(1)]
    rows += [low + (high - low) * np.arange(1, n + 1) / n for low, high, n in stops if n]
    return np.concatenate([*rows, np.array([can.depth_m])])


def _extruded(plan: FloatArray, heights: FloatArray) -> FloatArray:
    nodes = np.zeros((len(heights), len(plan), 3))
    nodes[..., :2] = plan
    nodes[..., 2] = heights[:, None]
    return nodes


def _choke(can: CanGeometry, rim: FloatArray, plan: MeshPlan) -> list[Mesh]:
    choke = can.choke
    if choke is None:
        return []
    # with flats the ring is a prism too
    outer = rim * (choke.radius_m / can.radius_m)
    cells = plan.can.choke_floor
    t = (np.arange(cells + 1) / cells)[:, None, None]
    nodes = np.zeros((cells + 1, len(rim), 3))
    nodes[..., :2] = rim * (1 - t) + outer * t
    nodes[..., 2] = choke.floor_z_m
    body = choke.depth_m - rim_row_m(choke.depth_m, plan.edge_m)
    heights = np.concatenate([np.linspace(0.0, body, plan.can.choke_wall + 1), np.array([choke.depth_m])])
    return [grid(nodes, CHOKE), grid(_extruded(outer, choke.floor_z_m + heights), CHOKE)]


def _moved_floor(can: CanGeometry, plan: MeshPlan) -> Mesh:
    """The reference floor, stretched outside the patch to the bore asked for."""
    base = plan.reference.can
    floor = _floor(base.radius_m, base.flats, plan.can.rim, plan.frame, plan.edge_m)
    if can.radius_m == base.radius_m:
        return floor
    points = floor.vertices_m.copy()
    radius = np.linalg.norm(points, axis=1)
    hold = math.hypot(plan.frame.x1_m, plan.frame.y1_m)
    reach = np.maximum(radius, 1e-12)
    edge = base.radius_m
    if base.flats:
        half = math.pi / base.flats
        angle = np.abs(np.mod(np.arctan2(points[:, 1], points[:, 0]) + half, 2 * half) - half)
        edge_at = base.radius_m / np.cos(angle)
    else:
        edge_at = np.full(len(points), edge)
    share = np.clip((radius - hold) / (edge_at - hold), 0.0, None)
    growth = share * edge_at * (can.radius_m / base.radius_m - 1.0)
    points[:, :2] *= (1 + growth / reach)[:, None]
    moved = single(points, floor.triangles, FLOOR)
    return single(_snapped(points, rim_nodes(can, plan.can.rim), plan.edge_m), moved.triangles, FLOOR)


@lru_cache(maxsize=64)
def _floor(radius_m: float, flats: int, rim_cells: int, frame: PatchFrame, edge_m: float) -> Mesh:
    import OCP.gp  # noqa: F401 - first: loaded after netgen, the CAD kernel runs on netgen's older copy of itself
    from netgen.geom2d import SplineGeometry

    rim = rim_nodes(CanGeometry(radius_m, radius_m, flats), rim_cells)
    boundary = _floor_boundary(rim, frame, edge_m)
    geometry = SplineGeometry()
    numbers = [geometry.AppendPoint(float(x), float(y)) for x, y in boundary]
    for a, b in zip(numbers, numbers[1:] + numbers[:1], strict=True):
        geometry.Append(["line", a, b], leftdomain=1, rightdomain=0, maxh=10 * edge_m)
    for share in (1.0, 0.9, 0.8, 0.7, 0.6):
        # the mesher takes the size asked for as a wish
        floor = _netgen(geometry, share * edge_m, boundary, edge_m)
        if floor.longest_edge_m() <= LONGEST * edge_m:
            return floor
    raise GeometryError("the floor between bars and wall cannot be meshed finely enough; use a larger bore")


def _netgen(geometry: Any, size_m: float, boundary: FloatArray, edge_m: float) -> Mesh:
    try:
        mesh = geometry.GenerateMesh(maxh=size_m, quad_dominated=False)
    except Exception as error:
        raise GeometryError(f"the floor cannot be meshed ({error}); use a larger bore or a smaller loop") from error
    points = np.array([[*p.p] for p in mesh.Points()])
    triangles = np.array([[v.nr - 1 for v in e.vertices] for e in mesh.Elements2D()])
    points[:, 2] = 0.0
    return single(_snapped(points, boundary, edge_m), triangles, FLOOR)


def _snapped(points: FloatArray, boundary: FloatArray, edge_m: float) -> FloatArray:
    """Put the mesher's boundary points back on the prescribed nodes to the last bit."""
    from scipy.spatial import cKDTree

    distance, index = cKDTree(boundary).query(points[:, :2])
    near = distance < 0.02 * edge_m
    points[near, :2] = boundary[index[near]]
    return points


def _floor_boundary(rim: FloatArray, frame: PatchFrame, edge_m: float) -> FloatArray:
    def line(a: tuple[float, float], b: tuple[float, float], cells: int) -> FloatArray:
        t = (np.arange(cells) / cells)[:, None]
        return np.asarray(np.array(a) * (1 - t) + np.array(b) * t)

    left = max(1, math.ceil((frame.x0_m - rim[-1, 0]) / edge_m))
    right = max(1, math.ceil((rim[0, 0] - frame.x1_m) / edge_m))
    return np.concatenate(
        [
            line((rim[-1, 0], 0.0), (frame.x0_m, 0.0), left),
            line((frame.x0_m, 0.0), (frame.x0_m, frame.y1_m), frame.cells_y),
            line((frame.x0_m, frame.y1_m), (frame.x1_m, frame.y1_m), frame.cells_x),
            line((frame.x1_m, frame.y1_m), (frame.x1_m, 0.0), frame.cells_y),
            line((frame.x1_m, 0.0), (rim[0, 0], 0.0), right),
            rim[:-1],
        ]
    )


def floor_patch(frame: PatchFrame, foot_m: FloatArray) -> Mesh:
    """The floor round one foot: a grid whose middle column carries the foot's nodes, the rest relaxed between.

    ``foot_m`` (n, 3): nodes of the bar's foot from the plane y = 0 outwards. The grid depends smoothly on them.
    """
    across = len(foot_m) - 1
    nx, ny = frame.cells_x, frame.cells_y
    inner = max(1, round((ny - across) * foot_m[0, 1] / (foot_m[0, 1] + frame.y1_m - foot_m[-1, 1])))
    inner = min(inner, ny - across - 1)
    x = np.linspace(frame.x0_m, frame.x1_m, nx + 1)
    y = np.linspace(0.0, frame.y1_m, ny + 1)
    nodes = np.zeros((nx + 1, ny + 1, 2))
    nodes[..., 0], nodes[..., 1] = x[:, None], y[None, :]
    fixed = np.zeros((nx + 1, ny + 1), dtype=bool)
    fixed[[0, -1], :] = True
    fixed[:, -1] = True
    middle = nx // 2
    nodes[middle, inner : inner + across + 1] = foot_m[:, :2]
    fixed[middle, inner : inner + across + 1] = True
    plane = _relaxed(nodes, fixed)
    return grid(np.concatenate([plane, np.zeros((nx + 1, ny + 1, 1))], -1), PATCH)


def _relaxed(nodes: FloatArray, fixed: NDArray[np.bool_]) -> FloatArray:
    """Each free node at the mean of its neighbours; the row y = 0 mirrors the row above it."""
    nx, ny = fixed.shape
    index = np.arange(nx * ny).reshape(nx, ny)
    matrix = np.eye(nx * ny)
    rhs = nodes.reshape(-1, 2).copy()
    for i in range(1, nx - 1):
        for j in range(ny - 1):
            if fixed[i, j]:
                continue
            row = index[i, j]
            rhs[row] = 0.0
            below = index[i, j - 1] if j else index[i, 1]
            for neighbour in (index[i - 1, j], index[i + 1, j], index[i, j + 1], below):
                matrix[row, neighbour] -= 0.25
    solved = np.linalg.solve(matrix, rhs).reshape(nx, ny, 2)
    # the row on the plane of symmetry slides along it
    solved_y = _relaxed_y(nodes, fixed)
    return np.stack([solved[..., 0], solved_y], -1)


def _relaxed_y(nodes: FloatArray, fixed: NDArray[np.bool_]) -> FloatArray:
    nx, ny = fixed.shape
    index = np.arange(nx * ny).reshape(nx, ny)
    matrix = np.eye(nx * ny)
    rhs = nodes[..., 1].reshape(-1).copy()
    for i in range(1, nx - 1):
        for j in range(1, ny - 1):
            if fixed[i, j]:
                continue
            rhs[index[i, j]] = 0.0
            for neighbour in (index[i - 1, j], index[i + 1, j], index[i, j + 1], index[i, j - 1]):
                matrix[index[i, j], neighbour] -= 0.25
    for i in range(nx):
        rhs[index[i, 0]] = 0.0
    return np.asarray(np.linalg.solve(matrix, rhs).reshape(nx, ny))
