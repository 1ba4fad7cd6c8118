"""STEP files (AP214, millimetres): one solid per part with name and colour, and the assembly with its places.

Depends on: errors, parts.records, writers.step_text.
"""

from __future__ import annotations

import math
import tempfile
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from fabgen.errors import GeometryError, OutputError
from fabgen.parts.records import Part, Place
from fabgen.writers.step_text import canonical_step

if TYPE_CHECKING:
    import cadquery

STAMP = "2000-01-01T00:00:00"
"""A fixed date: the file says what was made, not when."""


def write_step(part: Part, path: Path) -> None:
    """The part's one solid in the feed's frame. Raises GeometryError when the part has none."""
    document, tool, colours = _document()
    label = _add_shape(tool, colours, part)
    _name(label, part.name)
    _write(document, part.name, path)


def write_step_assembly(parts: Sequence[Part], path: Path, name: str = "feed") -> None:
    """All parts that have a solid, each once as a product and as often as it has places."""
    document, tool, colours = _document()
    top = tool.NewShape()
    for part in parts:
        if part.solid is None:
            continue
        label = _add_shape(tool, colours, part)
        _name(label, part.name)
        for number, place in enumerate(part.places, start=1):
            component = tool.AddComponent(top, label, _location(place))
            _name(component, part.name if len(part.places) == 1 else f"{part.name} {number}")
    _name(top, name)
    tool.UpdateAssemblies()
    _write(document, name, path)


def _document() -> tuple[Any, Any, Any]:
    from OCP.TCollection import TCollection_ExtendedString
    from OCP.TDocStd import TDocStd_Document
    from OCP.XCAFDoc import XCAFDoc_DocumentTool

    document = TDocStd_Document(TCollection_ExtendedString("XmlOcaf"))
    tool = XCAFDoc_DocumentTool.ShapeTool_s(document.Main())
    return document, tool, XCAFDoc_DocumentTool.ColorTool_s(document.Main())


def _add_shape(tool: Any, colours: Any, part: Part) -> Any:
    from OCP.Quantity import Quantity_Color, Quantity_TypeOfColor
    from OCP.XCAFDoc import XCAFDoc_ColorType

    if part.solid is None:
        raise GeometryError(f"{part.name} has no solid; write its flat pattern instead")
    label = tool.AddShape(_in_place(_single(part.solid(), part.name).wrapped), False)
    colour = Quantity_Color(*part.colour, Quantity_TypeOfColor.Quantity_TOC_sRGB)
    colours.SetColor(label, colour, XCAFDoc_ColorType.XCAFDoc_ColorGen)
    return label


def _single(shape: cadquery.Shape, name: str) -> cadquery.Shape:
    solids = shape.Solids()
    if len(solids) != 1:
        raise GeometryError(f"{name} consists of {len(solids)} bodies; a part is one body, make them two parts")
    return solids[0]


def _in_place(shape: Any) -> Any:
    """The shape with its shift in its own coordinates; one that is kept beside it would become a second product."""
    from OCP.BRepBuilderAPI import BRepBuilderAPI_Transform
    from OCP.TopLoc import TopLoc_Location

    shift = shape.Location()
    if shift.IsIdentity():
        return shape
    return BRepBuilderAPI_Transform(shape.Located(TopLoc_Location()), shift.Transformation(), True).Shape()


def _name(label: Any, name: str) -> None:
    from OCP.TCollection import TCollection_ExtendedString
    from OCP.TDataStd import TDataStd_Name

    TDataStd_Name.Set_s(label, TCollection_ExtendedString(ascii_text(name)))


def ascii_text(text: str) -> str:
    """Plain letters only, since STEP readers disagree about all others; what is not ASCII goes out as '?'."""
    return text.encode("ascii", "replace").decode()


def _location(place: Place) -> Any:
    from OCP.gp import gp_Ax1, gp_Dir, gp_Pnt, gp_Trsf, gp_Vec
    from OCP.TopLoc import TopLoc_Location

    turn, shift = gp_Trsf(), gp_Trsf()
    turn.SetRotation(gp_Ax1(gp_Pnt(0, 0, 0), gp_Dir(0, 0, 1)), math.radians(place.turn_deg))
    shift.SetTranslation(gp_Vec(place.x_mm, place.y_mm, place.z_mm))
    return TopLoc_Location(shift.Multiplied(turn))


def _write(document: Any, name: str, path: Path) -> None:
    from OCP.APIHeaderSection import APIHeaderSection_MakeHeader
    from OCP.IFSelect import IFSelect_ReturnStatus
    from OCP.Interface import Interface_Static
    from OCP.STEPCAFControl import STEPCAFControl_Writer
    from OCP.STEPControl import STEPControl_StepModelType
    from OCP.TCollection import TCollection_HAsciiString

    writer = STEPCAFControl_Writer()
    for key, value in (("write.step.schema", "AP214IS"), ("write.step.unit", "MM")):
        Interface_Static.SetCVal_s(key, value)
    # Without the curves in each face's own parameters: readers compute them, and files are a third as large.
    Interface_Static.SetIVal_s("write.surfacecurve.mode", 0)
    writer.SetNameMode(True)
    writer.SetColorMode(True)
    writer.Transfer(document, STEPControl_StepModelType.STEPControl_AsIs)
    header = APIHeaderSection_MakeHeader(writer.ChangeWriter().Model())

    def ascii_string(text: str) -> Any:
        return TCollection_HAsciiString(ascii_text(text))

    header.SetName(ascii_string(name))
    header.SetDescriptionValue(1, ascii_string(name))
    header.SetTimeStamp(ascii_string(STAMP))
    header.SetPreprocessorVersion(ascii_string("fabgen"))
    header.SetOriginatingSystem(ascii_string("fabgen"))
    header.SetAuthorisation(ascii_string(""))
    header.SetAuthorValue(1, ascii_string(""))
    header.SetOrganizationValue(1, ascii_string(""))
    with tempfile.TemporaryDirectory() as folder:
        raw = Path(folder) / "raw.step"
        if writer.Write(str(raw)) != IFSelect_ReturnStatus.IFSelect_RetDone:
            raise OutputError(f"the CAD kernel could not write {path.name}; check that the disk is not full")
        text = canonical_step(raw.read_text(encoding="ascii"))
    path.write_bytes(text.encode("ascii"))

