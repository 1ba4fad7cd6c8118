"""3MF (core specification 1.x): one mesh in millimetres with its name, material colour and metadata.

Depends on: parts.records, writers.mesh.
"""

from __future__ import annotations

import zipfile
from pathlib import Path
from typing import TYPE_CHECKING
from xml.sax.saxutils import escape, quoteattr

from fabgen.writers.mesh import CHORD_MM, Mesh, mesh_of, print_shape

if TYPE_CHECKING:
    from fabgen.parts.records import Part

_CORE = "http://schemas.microsoft.com/3dmanufacturing/core/2015/02"
_MODEL_TYPE = "application/vnd.ms-package.3dmanufacturing-3dmodel+xml"
_HEAD = '<?xml version="1.0" encoding="UTF-8"?>\n'
_TYPES = (
    _HEAD + '<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types">'
    '<Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
    f'<Default Extension="model" ContentType="{_MODEL_TYPE}"/></Types>\n'
)
_RELATIONS = (
    _HEAD + '<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships">'
    '<Relationship Target="/3D/3dmodel.model" Id="rel0" '
    'Type="http://schemas.microsoft.com/3dmanufacturing/2013/01/3dmodel"/></Relationships>\n'
)
_DATE = (1980, 1, 1, 0, 0, 0)


def write_3mf(part: Part, path: Path, chord_mm: float = CHORD_MM) -> None:
    """The part's skin in print position with at most ``chord_mm`` between facet and surface."""
    model = model_xml(part, mesh_of(print_shape(part), chord_mm))
    files = (("[Content_Types].xml", _TYPES), ("_rels/.rels", _RELATIONS), ("3D/3dmodel.model", model))
    with zipfile.ZipFile(path, "w") as archive:
        for name, text in files:
            entry = zipfile.ZipInfo(name, _DATE)
            entry.compress_type = zipfile.ZIP_DEFLATED
            entry.create_system = 0
            archive.writestr(entry, text.encode("utf-8"), compresslevel=6)


def model_xml(part: Part, mesh: Mesh) -> str:
    """The model part of the package."""
    notes = "; ".join(part.notes)
    metadata = (
        ("Title", part.name),
        ("Application", "fabgen"),
        ("Description", f"{part.key}, {part.material_name}, quantity {part.quantity}. {notes}".strip()),
    )
    colour = "#" + "".join(f"{round(255 * c):02X}" for c in part.colour)
    vertices = "".join(f'<vertex x="{x:.5f}" y="{y:.5f}" z="{z:.5f}"/>\n' for x, y, z in mesh.vertices_mm)
    triangles = "".join(f'<triangle v1="{a}" v2="{b}" v3="{c}"/>\n' for a, b, c in mesh.triangles)
    about = "".join(f'<metadata name="{name}">{escape(text)}</metadata>\n' for name, text in metadata)
    return (
        f'{_HEAD}<model unit="millimeter" xml:lang="en" xmlns="{_CORE}">\n{about}<resources>\n'
        f"<basematerials id=\"1\"><base name={quoteattr(part.material_name)} "
        f'displaycolor="{colour}"/></basematerials>\n'
        f'<object id="2" type="model" name={quoteattr(part.name)} partnumber={quoteattr(part.key)} '
        f'pid="1" pindex="0"><mesh>\n<vertices>\n{vertices}</vertices>\n'
        f"<triangles>\n{triangles}</triangles>\n</mesh></object>\n</resources>\n"
        f'<build><item objectid="2"/></build>\n</model>\n'
    )
