"""What a printer sees of a solid, measured on its mesh and with the CAD kernel, independent of how it was drawn."""

from __future__ import annotations

from typing import Any

import numpy as np
import trimesh

from fabgen.writers.mesh import mesh_of


def trimesh_of(shape: Any, chord_mm: float = 0.02) -> trimesh.Trimesh:
    """The solid's mesh as the general-purpose mesh library sees it."""
    mesh = mesh_of(shape, chord_mm)
    return trimesh.Trimesh(mesh.vertices_mm, mesh.triangles, process=False)


def overhangs_mm(shape: Any, limit_deg: float = 45.0) -> list[float]:
    """Widths of all patches that face down flatter than the limit and are not on the bed (z = 0).

    The width of a patch is the shorter side of its box seen from above: the span a bridge has to cross.
    """
    mesh = trimesh_of(shape)
    down = mesh.face_normals[:, 2] < -np.cos(np.radians(limit_deg - 0.5))
    off_bed = mesh.triangles[:, :, 2].max(axis=1) > 1e-3
    faces = np.flatnonzero(down & off_bed & (mesh.area_faces > 1e-9))
    parent = {int(f): int(f) for f in faces}

    def root(f: int) -> int:
        while parent[f] != f:
            parent[f] = parent[parent[f]]
            f = parent[f]
        return f

    for a, b in mesh.face_adjacency:
        if int(a) in parent and int(b) in parent:
            parent[root(int(a))] = root(int(b))
    groups: dict[int, list[int]] = {}
    for f in parent:
        groups.setdefault(root(f), []).append(f)
    widths = []
    for group in groups.values():
        points = mesh.triangles[group][:, :, :2].reshape(-1, 2)
        widths.append(min(_width(points, a) for a in np.radians(np.arange(0, 180, 5))))
    return widths


def _width(points: Any, angle: float) -> float:
    along = points @ np.array([np.cos(angle), np.sin(angle)])
    return float(along.max() - along.min())


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
