"""What a printer sees of a solid, measured on its mesh and with the CAD kernel, independent of how it was drawn."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import trimesh

from fabgen.writers.mesh import mesh_of


def trimesh_of(shape: Any, chord_mm: float = 0.02) -> trimesh.Trimesh:
    """The solid's mesh as the general-purpose mesh library sees it."""
    mesh = mesh_of(shape, chord_mm)
    return trimesh.Trimesh(mesh.vertices_mm, mesh.triangles, process=False)


@dataclass(frozen=True)
class Overhang:
    """One patch of the skin that faces down too flat: the longest span that a bridge has to cross, and how far the
    plastic reaches out where nothing holds its other end (a ledge)."""

    bridge_mm: float
    ledge_mm: float
    height_mm: float


def overhangs_mm(shape: Any, limit_deg: float = 45.0) -> list[Overhang]:
    """All patches that face down flatter than the limit and are not on the bed (z = 0).

    An edge of a patch is held where the skin beyond it goes down, and free where it goes up. At points spread over
    the patch, lines in 36 directions run to its edges: the shortest line between two held edges is the bridge there;
    where there is none, the way to the nearest held edge is a ledge.
    """
    mesh = trimesh_of(shape)
    down = mesh.face_normals[:, 2] < -np.cos(np.radians(limit_deg - 0.5))
    off_bed = mesh.triangles[:, :, 2].max(axis=1) > 1e-3
    chosen = down & off_bed & (mesh.area_faces > 1e-9)
    return [_overhang(mesh, np.array(sorted(group)), chosen) for group in _groups(mesh, chosen)]


def _groups(mesh: trimesh.Trimesh, chosen: np.ndarray) -> list[list[int]]:
    inner = mesh.face_adjacency[chosen[mesh.face_adjacency].all(axis=1)]
    faces = np.flatnonzero(chosen)
    if not len(faces):
        return []
    return [list(g) for g in trimesh.graph.connected_components(inner, nodes=faces, min_len=1)]


def _overhang(mesh: trimesh.Trimesh, faces: np.ndarray, chosen: np.ndarray) -> Overhang:
    starts, ends, held = _edges(mesh, faces, chosen)
    corners = mesh.triangles[faces][:, :, :2]
    weights = np.array([[1, 1, 1], [8, 1, 1], [1, 8, 1], [1, 1, 8], [1, 4, 4], [4, 1, 4], [4, 4, 1]], float)
    points = np.einsum("ki,tij->tkj", weights / weights.sum(1, keepdims=True), corners).reshape(-1, 2)
    spans = [_span(point, starts, ends, held) for point in points]
    bridges = [bridge for bridge, _ in spans if np.isfinite(bridge)]
    ledges = [ledge for bridge, ledge in spans if not np.isfinite(bridge)]
    height = float(mesh.triangles[faces][:, :, 2].max())
    return Overhang(max(bridges, default=0.0), max(ledges, default=0.0), height)


def _edges(mesh: trimesh.Trimesh, faces: np.ndarray, chosen: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Boundary edges of a patch seen from above, and which of them are held from below."""
    here = set(map(int, faces))
    starts, ends, held = [], [], []
    for (a, b), edge in zip(mesh.face_adjacency, mesh.face_adjacency_edges, strict=True):
        if (int(a) in here) == (int(b) in here):
            continue
        beyond = int(b) if int(a) in here else int(a)
        ends_of = mesh.vertices[edge]
        tip = mesh.vertices[next(v for v in mesh.faces[beyond] if v not in edge)]
        along = ends_of[1] - ends_of[0]
        foot = ends_of[0] + along * np.dot(tip - ends_of[0], along) / np.dot(along, along)
        starts.append(ends_of[0][:2])
        ends.append(ends_of[1][:2])
        held.append(tip[2] < foot[2] - 1e-9)
    return np.array(starts), np.array(ends), np.array(held)


def _span(point: np.ndarray, starts: np.ndarray, ends: np.ndarray, held: np.ndarray) -> tuple[float, float]:
    """(shortest bridge through the point, or inf; shortest way to a held edge)."""
    edge = ends - starts
    bridge, ledge = np.inf, np.inf
    for angle in np.radians(np.arange(0.0, 180.0, 5.0)):
        way = np.array([np.cos(angle), np.sin(angle)])
        across = way[0] * edge[:, 1] - way[1] * edge[:, 0]
        off = starts - point
        with np.errstate(divide="ignore", invalid="ignore"):
            along = (off[:, 0] * edge[:, 1] - off[:, 1] * edge[:, 0]) / across
            share = (off[:, 0] * way[1] - off[:, 1] * way[0]) / across
        met = (np.abs(across) > 1e-12) & (share >= -1e-9) & (share <= 1 + 1e-9)
        ends_here = []
        for sign in (1.0, -1.0):
            reach = np.where(met & (sign * along > 1e-9), sign * along, np.inf)
            nearest = int(np.argmin(reach))
            ends_here.append(float(reach[nearest]) if held[nearest] else np.inf)
        bridge = min(bridge, sum(ends_here))
        ledge = min(ledge, *ends_here)
    return bridge, ledge


def wall_thicknesses_mm(shape: Any, count: int = 400, seed: int = 1) -> np.ndarray:
    """Distance straight in from points on the skin to the next skin, for random points spread by area.

    Only skins that face away by less than 60 degrees count: beside an edge of a curved face a ray grazes that face
    after any small distance, which is no wall.
    """
    import cadquery as cq
    from OCP.gp import gp_Dir, gp_Lin, gp_Pnt
    from OCP.IntCurvesFace import IntCurvesFace_ShapeIntersector

    mesh = trimesh_of(shape, 0.02)
    rng = np.random.default_rng(seed)
    chosen = rng.choice(len(mesh.faces), count, p=mesh.area_faces / mesh.area)
    weights = rng.dirichlet((1, 1, 1), count)
    points = np.einsum("ij,ijk->ik", weights, mesh.triangles[chosen])
    inward = -mesh.face_normals[chosen]
    ray = IntCurvesFace_ShapeIntersector()
    ray.Load(shape.wrapped, 1e-6)
    found = []
    for point, way in zip(points, inward, strict=True):
        # Start well inside the chord error so that the skin under the point is not met again.
        start = point + 0.1 * way
        line = gp_Lin(gp_Pnt(*map(float, start)), gp_Dir(*map(float, way)))
        ray.PerformNearest(line, 0.0, 1e4)
        if ray.NbPnt() > 0:
            out = cq.Face(ray.Face(1)).normalAt(cq.Vector(ray.Pnt(1)))
            if np.dot(out.toTuple(), way) > 0.5:
                found.append(0.1 + ray.WParameter(1))
    return np.array(found)
