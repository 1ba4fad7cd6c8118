"""Drawn equals simulated: how far points of the simulated mid-surfaces lie outside the drawn solids.

Depends on: errors, parts.build, parts.records.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from fabgen.errors import GeometryError
from fabgen.parts.build import assembly
from fabgen.parts.records import Part

if TYPE_CHECKING:
    import cadquery

_ON_SURFACE_MM = 1e-6


def mid_surface_gap(points_mm: ArrayLike, parts: Iterable[Part]) -> float:
    """Largest distance, in millimetres, of a point outside the union of the parts; 0 when all lie inside.

    ``points_mm``: (n, 3) in the feed's frame. Each point is classified by the CAD kernel against the exact solids,
    and its distance measured to the nearest of those that do not hold it. Raises GeometryError for an empty list
    of points or of solids.
    """
    return float(np.max(gaps_mm(points_mm, parts)))


def gaps_mm(points_mm: ArrayLike, parts: Iterable[Part]) -> NDArray[np.float64]:
    """Distance of each point outside the union of the parts, (n,)."""
    points = np.asarray(points_mm, dtype=float).reshape(-1, 3)
    solids = [copy.solid() for copy in assembly(tuple(parts))]
    if len(points) == 0 or not solids:
        raise GeometryError("nothing to compare: give at least one point and one part that has a solid")
    boxes = [_box(solid) for solid in solids]
    away = np.stack([_outside_box(points, *box) for box in boxes])
    gaps = np.full(len(points), np.inf)
    for index, solid in enumerate(solids):
        near = np.flatnonzero((away[index] <= _ON_SURFACE_MM) & (gaps > 0))
        gaps[near[_inside(points[near], solid)]] = 0.0
    for i in np.flatnonzero(gaps > 0):
        gaps[i] = _nearest(points[i], solids, away[:, i])
    return gaps


def _box(solid: cadquery.Shape) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """A box that holds the solid; not the smallest one, which takes the kernel a hundred times as long."""
    from OCP.Bnd import Bnd_Box
    from OCP.BRepBndLib import BRepBndLib

    box = Bnd_Box()
    BRepBndLib.Add_s(solid.wrapped, box, False)
    low, high = box.CornerMin(), box.CornerMax()
    return np.array([low.X(), low.Y(), low.Z()]), np.array([high.X(), high.Y(), high.Z()])


def _outside_box(
    points: NDArray[np.float64], low: NDArray[np.float64], high: NDArray[np.float64]
) -> NDArray[np.float64]:
    beyond = np.maximum(np.maximum(low - points, points - high), 0.0)
    return np.asarray(np.linalg.norm(beyond, axis=1), dtype=np.float64)


def _inside(points: NDArray[np.float64], solid: cadquery.Shape) -> NDArray[np.bool_]:
    from OCP.BRepClass3d import BRepClass3d_SolidClassifier
    from OCP.gp import gp_Pnt
    from OCP.TopAbs import TopAbs_State

    classifier = BRepClass3d_SolidClassifier(solid.wrapped)
    found = []
    for x, y, z in points:
        classifier.Perform(gp_Pnt(x, y, z), _ON_SURFACE_MM)
        found.append(classifier.State() in (TopAbs_State.TopAbs_IN, TopAbs_State.TopAbs_ON))
    return np.array(found, dtype=bool)


def _nearest(point: NDArray[np.float64], solids: Sequence[cadquery.Shape], away: NDArray[np.float64]) -> float:
    """Distance to the nearest solid; solids whose box is farther than the best so far are left out."""
    from OCP.BRepBuilderAPI import BRepBuilderAPI_MakeVertex
    from OCP.gp import gp_Pnt

    vertex = BRepBuilderAPI_MakeVertex(gp_Pnt(*(float(c) for c in point))).Vertex()
    best = np.inf
    for index in np.argsort(away):
        if away[index] >= best:
            break
        best = min(best, _distance(vertex, solids[index]))
    return float(best)


def _distance(vertex: Any, solid: cadquery.Shape) -> float:
    from OCP.BRepExtrema import BRepExtrema_DistShapeShape

    measure = BRepExtrema_DistShapeShape(vertex, solid.wrapped)
    if not measure.IsDone():
        raise GeometryError("the CAD kernel could not measure a distance to a solid; report the job that shows it")
    return float(measure.Value())
