"""Triangle meshes of solids with a stated chord error, in one fixed order.

Depends on: errors.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from fabgen.errors import GeometryError

if TYPE_CHECKING:
    import cadquery

    from fabgen.parts.records import Part

CHORD_MM = 0.02
"""Largest distance between a mesh facet and the true surface; a print's own error is ten times that."""
ANGLE_RAD = 0.5
"""Largest turn from facet to facet; only holes so small that the chord error allows fewer than 13 facets see it."""
GRID_MM = 1e-5
"""Vertices closer than this are one: neighbouring faces share their edge's nodes but for rounding."""


@dataclass(frozen=True)
class Mesh:
    """Vertices (n, 3) in millimetres and triangles (m, 3), counter-clockwise seen from outside."""

    vertices_mm: NDArray[np.float64]
    triangles: NDArray[np.int64]


def mesh_of(shape: cadquery.Shape, chord_mm: float = CHORD_MM) -> Mesh:
    """A mesh of the solid's skin with at most ``chord_mm`` between facet and surface.

    Raises GeometryError for a chord error that is not positive or a face without triangles.
    """
    from OCP.BRepBuilderAPI import BRepBuilderAPI_Copy
    from OCP.BRepMesh import BRepMesh_IncrementalMesh
    from OCP.TopAbs import TopAbs_ShapeEnum
    from OCP.TopExp import TopExp_Explorer
    from OCP.TopoDS import TopoDS

    if not chord_mm > 0:
        raise GeometryError(f"chord error {chord_mm:g} mm: give a positive length, for example 0.02")
    # A copy without its mesh: the kernel would otherwise keep a finer mesh made before.
    fresh = BRepBuilderAPI_Copy(shape.wrapped, True, False).Shape()
    BRepMesh_IncrementalMesh(fresh, chord_mm, False, ANGLE_RAD, False)
    points: list[tuple[float, float, float]] = []
    triangles: list[tuple[int, int, int]] = []
    explorer = TopExp_Explorer(fresh, TopAbs_ShapeEnum.TopAbs_FACE)
    while explorer.More():
        _collect(TopoDS.Face(explorer.Current()), points, triangles)
        explorer.Next()
    return _canonical(np.array(points), np.array(triangles, dtype=np.int64))


def print_shape(part: Part) -> cadquery.Shape:
    """The part in print position, or as it sits in the feed when it has none."""
    build = part.print_solid or part.solid
    if build is None:
        raise GeometryError(f"{part.name} has no solid; a mesh can only be made of a part that has one")
    return build()


def _collect(
    face: Any, points: list[tuple[float, float, float]], triangles: list[tuple[int, int, int]]
) -> None:
    from OCP.BRep import BRep_Tool
    from OCP.TopAbs import TopAbs_Orientation
    from OCP.TopLoc import TopLoc_Location

    location = TopLoc_Location()
    poly = BRep_Tool.Triangulation_s(face, location)
    if poly is None:
        raise GeometryError("the CAD kernel could not mesh a face; use a larger chord error")
    transform = location.Transformation()
    first = len(points) - 1
    for i in range(1, poly.NbNodes() + 1):
        node = poly.Node(i).Transformed(transform)
        points.append((node.X(), node.Y(), node.Z()))
    inside_out = face.Orientation() == TopAbs_Orientation.TopAbs_REVERSED
    for i in range(1, poly.NbTriangles() + 1):
        a, b, c = poly.Triangle(i).Get()
        triangles.append((first + a, first + c, first + b) if inside_out else (first + a, first + b, first + c))


def _canonical(points: NDArray[np.float64], triangles: NDArray[np.int64]) -> Mesh:
    """Merged and sorted vertices, no empty triangle, each triangle from its lowest vertex, all sorted."""
    keys, inverse = np.unique(np.round(points / GRID_MM).astype(np.int64), axis=0, return_inverse=True)
    faces = inverse.reshape(-1)[triangles]
    distinct = (faces[:, 0] != faces[:, 1]) & (faces[:, 1] != faces[:, 2]) & (faces[:, 2] != faces[:, 0])
    faces = faces[distinct]
    turn = np.argmin(faces, axis=1)
    faces = np.take_along_axis(faces, (turn[:, None] + np.arange(3)) % 3, axis=1)
    return Mesh(np.asarray(keys * GRID_MM, dtype=np.float64), faces[np.lexsort(faces.T[::-1])])
