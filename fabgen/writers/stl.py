"""Binary STL. The format has no unit; the coordinates are millimetres and the header says so.

Depends on: parts.records, writers.mesh.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from fabgen.writers.mesh import CHORD_MM, mesh_of, print_shape

if TYPE_CHECKING:
    from fabgen.parts.records import Part

_FACET = np.dtype([("normal", "<f4", 3), ("corners", "<f4", (3, 3)), ("attribute", "<u2")])


def write_stl(part: Part, path: Path, chord_mm: float = CHORD_MM) -> None:
    """The part's skin in print position with at most ``chord_mm`` between facet and surface."""
    mesh = mesh_of(print_shape(part), chord_mm)
    corners = mesh.vertices_mm[mesh.triangles]
    normals = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
    lengths = np.linalg.norm(normals, axis=1, keepdims=True)
    facets = np.zeros(len(corners), dtype=_FACET)
    facets["normal"] = normals / np.where(lengths > 0, lengths, 1.0)
    facets["corners"] = corners
    # Must not begin with "solid": readers would take the file for the text form.
    header = f"fabgen {part.key} unit mm chord {chord_mm:g} mm".encode("ascii")[:80].ljust(80)
    path.write_bytes(header + np.array([len(facets)], dtype="<u4").tobytes() + facets.tobytes())
