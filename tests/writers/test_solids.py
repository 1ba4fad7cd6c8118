"""STEP, STL and 3MF files read back: with the kernel's own reader, a mesh library and the strict 3MF reader."""

from __future__ import annotations

import hashlib
import math
import os
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import trimesh

from fabgen.errors import GeometryError
from fabgen.parts.build import build_parts
from fabgen.parts.records import Part, Place
from fabgen.parts.screws import side_screws
from fabgen.writers.mesh import mesh_of
from fabgen.writers.step import write_step, write_step_assembly
from fabgen.writers.step_text import canonical_step
from fabgen.writers.stl import write_stl
from fabgen.writers.threemf import write_3mf
from tests.parts.feeds import with_bed
from tests.parts.volume import volume_mm3
from tests.samples import sample_feed

FEED = with_bed(sample_feed("sheet", "printed", radome=True), (300.0, 300.0, 300.0))
PARTS = build_parts(FEED)
PRODUCT = re.compile(r"PRODUCT\('((?:[^']|'')*)'")
CAN = next(p for p in PARTS if p.key == "can")


def read_step(path: Path) -> list[tuple[Any, str, tuple[float, ...] | None]]:
    """(solid in place, name, colour) of each leaf, by the kernel's own reader."""
    import cadquery as cq
    from OCP.Quantity import Quantity_Color, Quantity_TypeOfColor
    from OCP.STEPCAFControl import STEPCAFControl_Reader
    from OCP.TCollection import TCollection_ExtendedString
    from OCP.TDataStd import TDataStd_Name
    from OCP.TDF import TDF_Label, TDF_LabelSequence
    from OCP.TDocStd import TDocStd_Document
    from OCP.XCAFDoc import XCAFDoc_ColorTool, XCAFDoc_ColorType, XCAFDoc_DocumentTool, XCAFDoc_ShapeTool

    document = TDocStd_Document(TCollection_ExtendedString("XmlOcaf"))
    reader = STEPCAFControl_Reader()
    reader.SetNameMode(True)
    reader.SetColorMode(True)
    reader.ReadFile(str(path))
    reader.Transfer(document)
    shapes = XCAFDoc_DocumentTool.ShapeTool_s(document.Main())

    def name_of(label: Any) -> str:
        name = TDataStd_Name()
        return str(name.Get().ToExtString()) if label.FindAttribute(TDataStd_Name.GetID_s(), name) else ""

    def colour_of(label: Any) -> tuple[float, ...] | None:
        colour = Quantity_Color()
        for kind in (XCAFDoc_ColorType.XCAFDoc_ColorGen, XCAFDoc_ColorType.XCAFDoc_ColorSurf):
            if XCAFDoc_ColorTool.GetColor_s(label, kind, colour):
                return tuple(colour.Values(Quantity_TypeOfColor.Quantity_TOC_sRGB))
        return None

    def leaf(label: Any, place: Any = None) -> tuple[Any, str, tuple[float, ...] | None]:
        solid = cq.Shape.cast(XCAFDoc_ShapeTool.GetShape_s(label))
        return (solid.moved(place) if place else solid, name_of(label), colour_of(label))

    roots, leaves = TDF_LabelSequence(), []
    shapes.GetFreeShapes(roots)
    for i in range(1, roots.Length() + 1):
        parts = TDF_LabelSequence()
        if not XCAFDoc_ShapeTool.GetComponents_s(roots.Value(i), parts):
            leaves.append(leaf(roots.Value(i)))
        for k in range(1, parts.Length() + 1):
            referred = TDF_Label()
            XCAFDoc_ShapeTool.GetReferredShape_s(parts.Value(k), referred)
            leaves.append(leaf(referred, cq.Location(XCAFDoc_ShapeTool.GetLocation_s(parts.Value(k)))))
    return leaves


def hashes_in(process_seed: str, folder: Path) -> list[str]:
    """Hashes of all kinds of file written by another process with another hash seed."""
    code = (
        "import sys; from pathlib import Path; from tests.writers.test_solids import PARTS, CAN\n"
        "from fabgen.writers.step import write_step, write_step_assembly\n"
        "from fabgen.writers.stl import write_stl\nfrom fabgen.writers.threemf import write_3mf\n"
        "d = Path(sys.argv[1])\n"
        "write_step_assembly(PARTS, d / 'a.step'); write_step(CAN, d / 'c.step')\n"
        "write_stl(CAN, d / 'c.stl'); write_3mf(CAN, d / 'c.3mf')\n"
    )
    folder.mkdir()
    subprocess.run(
        [sys.executable, "-c", code, str(folder)], check=True, env={**os.environ, "PYTHONHASHSEED": process_seed}
    )
    return file_hashes(folder)


def file_hashes(folder: Path) -> list[str]:
    return [hashlib.sha256((folder / n).read_bytes()).hexdigest() for n in ("a.step", "c.step", "c.stl", "c.3mf")]


@pytest.mark.slow
def test_same_bytes_in_other_processes_and_twice_in_one(tmp_path: Path) -> None:
    first, second = (hashes_in(seed, tmp_path / seed) for seed in ("1", "77"))
    assert first == second
    for run in ("x", "y"):
        folder = tmp_path / run
        folder.mkdir()
        # Written in another order than above: counters of the kernel must not show.
        write_3mf(CAN, folder / "c.3mf")
        write_stl(CAN, folder / "c.stl")
        write_step(CAN, folder / "c.step")
        write_step_assembly(PARTS, folder / "a.step")
        assert file_hashes(folder) == first


@pytest.mark.parametrize("part", [p for p in PARTS if p.solid is not None], ids=lambda p: p.key)
def test_step_of_a_part_is_one_valid_solid_with_name_and_colour(part: Part, tmp_path: Path) -> None:
    path = tmp_path / "part.step"
    write_step(part, path)
    text = path.read_text(encoding="ascii")
    assert re.findall(r"PRODUCT\('([^']*)'", text) == [part.name]
    assert "SI_UNIT(.MILLI.,.METRE.)" in text
    ((solid, name, colour),) = read_step(path)
    assert name == part.name
    assert colour == pytest.approx(part.colour, abs=1e-3)
    assert len(solid.Solids()) == 1
    assert solid.isValid()
    assert part.solid is not None
    assert solid.Volume() == pytest.approx(part.solid().Volume(), rel=1e-6)


@pytest.mark.slow
@pytest.mark.parametrize("make", ["rolled", "folded"])
def test_shifted_and_turned_parts_are_one_product_in_place(make: str, tmp_path: Path) -> None:
    path = tmp_path / "part.step"
    parts = [p for p in build_parts(sample_feed("sheet", make, choke=True, metal="cuzn37")) if p.solid is not None]
    for part in parts:
        write_step(part, path)
        names = [name.replace("''", "'") for name in PRODUCT.findall(path.read_text(encoding="ascii"))]
        assert names == [part.name]
        ((solid, name, colour),) = read_step(path)
        assert name == part.name
        assert colour == pytest.approx(part.colour, abs=1e-3)
        assert solid.isValid()
        assert part.solid is not None
        assert volume_mm3(solid) == pytest.approx(volume_mm3(part.solid()), rel=1e-6)
        found, drawn = solid.BoundingBox(1e-6), part.solid().BoundingBox(1e-6)
        for side in ("xmin", "xmax", "ymin", "ymax", "zmin", "zmax"):
            assert getattr(found, side) == pytest.approx(getattr(drawn, side), abs=1e-3), part.key
    assert {"choke-wall", "screw-seam", "screw-foot"} <= {p.key for p in parts}


def test_step_of_the_assembly_keeps_names_colours_and_places(tmp_path: Path) -> None:
    path = tmp_path / "assembly.step"
    write_step_assembly(PARTS, path, "sample feed")
    leaves = read_step(path)
    expected = [(part, place) for part in PARTS if part.solid is not None for place in part.places]
    assert len(leaves) == len(expected)
    volume = sum(part.solid().Volume() for part, _ in expected if part.solid)
    assert sum(solid.Volume() for solid, _, _ in leaves) == pytest.approx(volume, rel=1e-6)
    for part, place in expected:
        assert part.solid is not None
        centre = part.solid().Center()
        turn = math.radians(place.turn_deg)
        x = centre.x * math.cos(turn) - centre.y * math.sin(turn) + place.x_mm
        y = centre.x * math.sin(turn) + centre.y * math.cos(turn) + place.y_mm
        near = [
            leaf for leaf in leaves
            if math.dist(leaf[0].Center().toTuple(), (x, y, centre.z + place.z_mm)) < 1e-3
        ]
        assert any(leaf[2] == pytest.approx(part.colour, abs=1e-3) for leaf in near), part.key
    names = set(re.findall(r"PRODUCT\('([^']*)'", path.read_text(encoding="ascii")))
    assert names == {part.name for part in PARTS if part.solid} | {"sample feed"}


def test_turned_copies_of_the_assembly_point_where_their_places_say(tmp_path: Path) -> None:
    places = tuple(
        Place(50 * math.cos(math.radians(a)), 50 * math.sin(math.radians(a)), 7.0, a - 90.0) for a in (0.0, 90.0, 215.0)
    )
    screw = side_screws("screw-x", "level screw", "M3", places, seat_y_mm=-1.0, length_mm=8.0)
    write_step_assembly((screw,), tmp_path / "a.step")
    leaves = read_step(tmp_path / "a.step")
    assert len(leaves) == 3
    for angle in (0.0, 90.0, 215.0):
        x, y = math.cos(math.radians(angle)), math.sin(math.radians(angle))
        solid = max((leaf[0] for leaf in leaves), key=lambda s: s.Center().x * x + s.Center().y * y)
        away = [v.X * x + v.Y * y for v in solid.Vertices()]
        # Head 3 mm high (ISO 4762, from memory) inside its seat at 49 mm, the shank's end 8 mm outside it.
        assert (min(away), max(away)) == pytest.approx((46.0, 57.0), abs=1e-6)
        assert solid.Center().z == pytest.approx(7.0, abs=1e-6)


def test_canonical_order_does_not_depend_on_the_given_order() -> None:
    head = "ISO-10303-21;\nHEADER;\nENDSEC;\nDATA;\n"
    tail = "ENDSEC;\nEND-ISO-10303-21;\n"
    one = f"{head}#1=POINT('a;#2 b',(0.,1.));\n#2=LINE('',#1,#3);\n#3=POINT('c',(2.,\n  3.));\n{tail}"
    two = f"{head}#7=POINT('c',(2.,3.));\n#9=POINT('a;#2 b',(0.,1.));\n#8=LINE('',#9,#7);\n{tail}"
    assert canonical_step(one) == canonical_step(two)
    assert canonical_step(canonical_step(one)) == canonical_step(one)


def test_rounding_and_the_order_of_faces_change_no_byte() -> None:
    head = "ISO-10303-21;\nHEADER;\nENDSEC;\nDATA;\n"
    tail = "ENDSEC;\nEND-ISO-10303-21;\n"
    one = f"{head}#1=POINT('',(6.123E-17,-0.,1.E-07));\n#2=POINT('',(2.,3.,0.));\n#3=CLOSED_SHELL('',(#1,#2));\n{tail}"
    two = f"{head}#1=POINT('',(2.,3.,0.));\n#2=POINT('',(-1.1E-16,0.,1.E-07));\n#3=CLOSED_SHELL('',(#1,#2));\n{tail}"
    assert canonical_step(one) == canonical_step(two)
    assert "(0.,0.,1.E-07)" in canonical_step(one)


def test_stl_is_a_closed_mesh_within_the_chord_error(tmp_path: Path) -> None:
    path = tmp_path / "can.stl"
    write_stl(CAN, path)
    raw = path.read_bytes()
    assert b"mm chord 0.02 mm" in raw[:80]
    assert not raw.startswith(b"solid")
    mesh = trimesh.load_mesh(str(path))
    assert mesh.is_watertight
    assert mesh.is_winding_consistent
    assert mesh.body_count == 1
    assert len(raw) == 84 + 50 * len(mesh.faces)
    assert CAN.print_solid is not None
    assert mesh.volume == pytest.approx(CAN.print_solid().Volume(), rel=2e-3)
    assert mesh.bounds[0][2] == pytest.approx(0.0, abs=1e-5)


@pytest.mark.parametrize("chord_mm", [0.02, 0.005, 0.1])
def test_chord_error_on_the_bore_is_the_stated_one(chord_mm: float) -> None:
    assert CAN.solid is not None
    bore = FEED.sizes.can_bore_mm / 2 + 0.065
    mesh = mesh_of(CAN.solid(), chord_mm)
    radii = np.hypot(mesh.vertices_mm[:, 0], mesh.vertices_mm[:, 1])
    on_bore = (np.abs(radii - bore) < 1e-4) & (mesh.vertices_mm[:, 2] > -0.01)
    edges = np.concatenate([mesh.triangles[:, [i, (i + 1) % 3]] for i in range(3)])
    chords = edges[on_bore[edges].all(axis=1)]
    middle = mesh.vertices_mm[chords].mean(axis=1)
    sagitta = bore - np.hypot(middle[:, 0], middle[:, 1])
    assert 0.2 * chord_mm < sagitta.max() <= chord_mm


def test_coarse_mesh_after_a_fine_one_is_coarse() -> None:
    assert CAN.solid is not None
    fine, coarse = mesh_of(CAN.solid(), 0.005), mesh_of(CAN.solid(), 0.1)
    assert len(coarse.triangles) < len(fine.triangles) / 2


@pytest.mark.parametrize("part", [p for p in PARTS if p.process[0] == "print"], ids=lambda p: p.key)
def test_3mf_passes_the_strict_reader_without_a_warning(part: Part, tmp_path: Path) -> None:
    import lib3mf

    path = tmp_path / "part.3mf"
    write_3mf(part, path)
    model = lib3mf.get_wrapper().CreateModel()
    reader = model.QueryReader("3mf")
    reader.SetStrictModeActive(True)
    reader.ReadFromFile(str(path))
    assert reader.GetWarningCount() == 0
    assert model.GetUnit() == lib3mf.ModelUnit.MilliMeter
    objects = model.GetMeshObjects()
    assert objects.Count() == 1
    objects.MoveNext()
    body = objects.GetCurrentMeshObject()
    assert body.GetName() == part.name
    assert body.GetPartNumber() == part.key
    assert body.IsManifoldAndOriented()
    data = model.GetMetaDataGroup()
    texts = {data.GetMetaData(i).GetName(): data.GetMetaData(i).GetValue() for i in range(data.GetMetaDataCount())}
    assert texts["Title"] == part.name
    assert texts["Application"] == "fabgen"
    assert part.material_name in texts["Description"]


def test_special_letters_are_escaped_or_replaced(tmp_path: Path) -> None:
    import dataclasses

    import lib3mf

    odd = dataclasses.replace(CAN, name='can <1> & "2" Ø', material_name="PETG <x>", notes=("a & b",))
    write_step(odd, tmp_path / "odd.step")
    assert "PRODUCT('can <1> & \"2\" ?'" in (tmp_path / "odd.step").read_text(encoding="ascii")
    write_3mf(odd, tmp_path / "odd.3mf")
    model = lib3mf.get_wrapper().CreateModel()
    reader = model.QueryReader("3mf")
    reader.SetStrictModeActive(True)
    reader.ReadFromFile(str(tmp_path / "odd.3mf"))
    assert reader.GetWarningCount() == 0


def test_parts_without_solids_and_bad_chords_are_refused(tmp_path: Path) -> None:
    import dataclasses

    flat = dataclasses.replace(CAN, solid=None, print_solid=None)
    with pytest.raises(GeometryError, match="has no solid"):
        write_step(flat, tmp_path / "x.step")
    with pytest.raises(GeometryError, match="has no solid"):
        write_stl(flat, tmp_path / "x.stl")
    with pytest.raises(GeometryError, match="give a positive length"):
        write_stl(CAN, tmp_path / "x.stl", chord_mm=0.0)
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    ("groups", "loads"),
    [
        ("tables bend cut", "none"),
        pytest.param("order", "kernel", marks=pytest.mark.slow),
        pytest.param("print", "kernel", marks=pytest.mark.slow),
        pytest.param("model", "kernel", marks=pytest.mark.slow),
    ],
)
def test_the_kernel_is_imported_for_solids_alone(groups: str, loads: str, tmp_path: Path) -> None:
    """What ``pack --only`` leaves out is not loaded either: seen in the modules of a process of its own.

    The order tells the size of a printed piece on the bed, which is its solid's.
    """
    code = (
        "import sys; from pathlib import Path; from fabgen.pack import PackOptions, build_content, write_pack\n"
        "from tests.samples import sample_feed\n"
        "feed = sample_feed('wire', 'printed', choke=True, radome=True)\n"
        "stops = tuple({f.code for f in build_content(feed)[1] if f.severity == 'stop'})\n"
        "write_pack(feed, Path(sys.argv[1]) / 'pack', PackOptions(tuple(sys.argv[2].split()), stops))\n"
        "heavy = {'cadquery', 'OCP', 'vtkmodules', 'netgen'} & set(sys.modules)\n"
        "sys.stdout.write('kernel' if 'OCP' in heavy else ' '.join(heavy) or 'none')\n"
    )
    call = [sys.executable, "-c", code, str(tmp_path), groups]
    done = subprocess.run(call, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    assert done.stdout == loads
