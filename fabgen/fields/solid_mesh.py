"""Surfaces of the drawn loop instead of thin strips: the half y >= 0 of its solid, in the can's conducting faces.

The loop's solid is read from STEP in the feed's frame, in millimetres, cut at the plane of symmetry and at the
floor, and meshed by netgen together with the can (solid_can) and the crossing, which stays a strip with the port at
y = 0: it is what both models must share for their impedances to be compared.

Depends on: errors, fields.mesh, fields.solid_can.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from fabgen.errors import GeometryError
from fabgen.fields.mesh import CHOKE, CROSSING, FLOOR, LOOP, WALL, Mesh
from fabgen.fields.solid_can import SMALL_MM, DrawnCan, can_faces, can_name


@dataclass(frozen=True)
class SolidLoop:
    """Where the drawn loop stands: its STEP file, its can, and the sizes that place the crossing, millimetres.

    ``cell_mm``: edge length on the loop; ``edge_mm``: on the can. ``bar_reach_mm``: y beyond the bar.
    """

    step_file: Path
    can: DrawnCan
    leg_x_mm: float
    bar_reach_mm: float
    bar_top_mm: float
    gap_mm: float
    tap_height_mm: float
    crossing_mm: float
    cell_mm: float
    edge_mm: float


def solid_mesh(drawn: SolidLoop) -> Mesh:
    """Mesh of the half feed with the loop's true surface, in metres.

    Raises GeometryError where the solid cannot be cut or meshed.
    """
    import OCP.gp  # noqa: F401 - first: loaded after netgen, the CAD kernel runs on netgen's older copy of itself
    from netgen.occ import Box, Glue, OCCGeometry, Pnt

    shape = OCCGeometry(str(drawn.step_file)).shape
    reach = 2 * drawn.can.bore_mm + 10 * drawn.can.depth_mm
    quarter = Box(Pnt(-reach, 0, 0), Pnt(reach, reach, reach))
    half = shape * quarter
    surface = [f for f in half.faces if f.bounding_box[1].y > SMALL_MM and f.bounding_box[1].z > SMALL_MM]
    if not surface:
        raise GeometryError(f"{drawn.step_file.name} has no surface above the floor; its loop cannot be compared")
    tools = [_sheet(drawn, low, high) for low, high in _bar_pieces(drawn)]
    glued = Glue([*surface, *tools, *can_faces(drawn.can, quarter, half)])
    faces = [f for f in glued.faces if _name(f, drawn)]
    for face in faces:
        face.name = _name(face, drawn)
        if face.name == "loop":
            face.maxh = drawn.cell_mm
        if face.name == "crossing":
            face.maxh = drawn.gap_mm / 4
    return _meshed(Glue(faces), drawn)


def _bar_pieces(drawn: SolidLoop) -> list[tuple[float, float]]:
    half = drawn.crossing_mm / 2
    low, high = drawn.tap_height_mm - half, drawn.tap_height_mm + half
    return [(0.0, low), (low, high), (high, drawn.bar_top_mm)]


def _sheet(drawn: SolidLoop, low: float, high: float) -> Any:
    """Rectangle in the plane of the bars; it splits the bar's surface where the crossing meets it."""
    import OCP.gp  # noqa: F401 - first: loaded after netgen, the CAD kernel runs on netgen's older copy of itself
    from netgen.occ import Face, Pnt, Segment, Wire

    x, y = drawn.leg_x_mm, drawn.bar_reach_mm
    corners = [Pnt(x, 0, low), Pnt(x, y, low), Pnt(x, y, high), Pnt(x, 0, high)]
    return Face(Wire([Segment(corners[i], corners[(i + 1) % 4]) for i in range(4)]))


def _name(face: Any, drawn: SolidLoop) -> str:
    """What a face of the glued surfaces is; empty for what only served to split."""
    low, high = face.bounding_box
    if high.x - low.x < SMALL_MM and abs(low.x - drawn.leg_x_mm) < SMALL_MM and high.y - low.y > SMALL_MM:
        half = drawn.crossing_mm / 2 + SMALL_MM
        at_tap = low.z > drawn.tap_height_mm - half and high.z < drawn.tap_height_mm + half
        return "crossing" if at_tap and low.y < SMALL_MM else ""
    return can_name(face, drawn.can) or "loop"


def _meshed(shape: Any, drawn: SolidLoop) -> Mesh:
    import OCP.gp  # noqa: F401 - first: loaded after netgen, the CAD kernel runs on netgen's older copy of itself
    from netgen.meshing import MeshingStep
    from netgen.occ import OCCGeometry

    geometry = OCCGeometry(shape)
    names = [face.name for face in geometry.shape.faces]
    mesh = geometry.GenerateMesh(
        maxh=drawn.edge_mm, perfstepsend=MeshingStep.MESHSURFACE, grading=0.4, curvaturesafety=0.8
    )
    points = np.array([[*p.p] for p in mesh.Points()])
    points[np.abs(points[:, 1]) < SMALL_MM, 1] = 0.0
    elements = mesh.Elements2D()
    triangles = np.array([[v.nr - 1 for v in e.vertices] for e in elements], dtype=np.int64)
    label_of = {"floor": FLOOR, "wall": WALL, "choke": CHOKE, "loop": LOOP, "crossing": CROSSING}
    label = np.array([label_of[names[e.index - 1]] for e in elements], dtype=np.int64)
    # what lies in the plane of symmetry is a cut, not metal
    inside = ~(np.abs(points[triangles][:, :, 1]) < SMALL_MM).all(1)
    return Mesh(points / 1e3, triangles[inside], label[inside])
