"""Cutting files read back with ezdxf, a reader that is not ours: contours, units, sameness of bytes."""

from __future__ import annotations

import io
import os
import re
import subprocess
import sys
from functools import cache
from pathlib import Path
from typing import Any

import ezdxf
import pytest
import shapely

from fabgen.errors import GeometryError, OutputError
from fabgen.parts.build import build_parts
from fabgen.parts.contour import Circle, Contour, Vertex, area_mm2, bounds_mm, length_mm, sampled
from fabgen.parts.kerf import compensated
from fabgen.parts.records import Part
from fabgen.writers.dxf import Version, dxf_text, file_name, write_dxf
from fabgen.writers.dxf_lint import lint_dxf
from tests.samples import sample_feed

FEEDS: dict[str, tuple[str, str, dict[str, Any]]] = {
    "sheet rolled": ("sheet", "rolled", {"choke": True}),
    "wire folded": ("wire", "folded", {"flats": 6, "choke": True}),
    "wire printed": ("wire", "printed", {}),
    "sheet tube": ("sheet", "tube", {"flange": {"pattern": "square", "count": 4}}),
}


@cache
def flat_parts() -> dict[str, Part]:
    found = {}
    for name, (form, make, can) in FEEDS.items():
        feed = sample_feed(form, make, **can)
        for part in build_parts(feed):
            if part.flat is not None:
                found[f"{name}: {part.key}"] = part
    return found


NAMES = sorted(flat_parts())


def loops(document: Any) -> dict[str, list[Any]]:
    """Every contour on the cut layers, read from the document's entities."""
    out: dict[str, list[Any]] = {"OUTLINE": [], "HOLES": []}
    for entity in document.modelspace():
        kind = entity.dxftype()
        if kind == "CIRCLE":
            c = entity.dxf.center
            out[entity.dxf.layer].append(Circle(c.x, c.y, 2 * entity.dxf.radius))
        elif kind == "LWPOLYLINE":
            assert entity.closed
            out[entity.dxf.layer].append(Contour(tuple(Vertex(*p) for p in entity.get_points("xyb"))))
        elif kind == "POLYLINE":
            assert entity.is_closed
            ring = [(v.dxf.location.x, v.dxf.location.y, v.dxf.bulge) for v in entity.vertices]
            out[entity.dxf.layer].append(Contour(tuple(Vertex(*p) for p in ring)))
        else:
            assert (kind, entity.dxf.layer) == ("LINE", "FOLD")
    return out


@pytest.mark.parametrize("version", ["R2010", "R12"])
@pytest.mark.parametrize("name", NAMES)
def test_file_holds_the_part_and_nothing_else(name: str, version: Version) -> None:
    flat = flat_parts()[name].flat
    assert flat is not None
    document = ezdxf.read(io.StringIO(dxf_text(flat, version)))
    audit = document.audit()
    assert not audit.errors
    assert not audit.fixes
    found = loops(document)
    assert len(found["OUTLINE"]) == 1
    assert len(found["HOLES"]) == len(flat.holes)
    for have, want in zip([*found["OUTLINE"], *found["HOLES"]], [flat.outline, *flat.holes], strict=True):
        assert area_mm2(have) == pytest.approx(area_mm2(want), rel=1e-6)
        assert length_mm(have) == pytest.approx(length_mm(want), rel=1e-6)
        if isinstance(have, Contour):
            assert max(abs(v.bulge) for v in have.vertices) <= 0.4143
    outer = shapely.Polygon(sampled(found["OUTLINE"][0], 0.001))
    assert all(outer.contains(shapely.Polygon(sampled(hole, 0.001))) for hole in found["HOLES"])
    low, high = document.header["$EXTMIN"], document.header["$EXTMAX"]
    assert (low[0], low[1], high[0], high[1]) == pytest.approx(bounds_mm(flat.outline), abs=1e-3)
    if version == "R2010":
        assert document.header["$INSUNITS"] == 4
        assert document.header["$MEASUREMENT"] == 1


@pytest.mark.parametrize("name", [n for n in NAMES if flat_parts()[n].flat.folds])  # type: ignore[union-attr]
def test_fold_copy_has_one_line_for_each_fold_on_its_own_layer(name: str) -> None:
    flat = flat_parts()[name].flat
    assert flat is not None
    document = ezdxf.read(io.StringIO(dxf_text(flat, folds=True)))
    lines = [e for e in document.modelspace() if e.dxf.layer == "FOLD"]
    assert len(lines) == len(flat.folds)
    outer = shapely.Polygon(sampled(flat.outline, 0.001))
    edges = shapely.union_all([outer.exterior, *(shapely.Polygon(sampled(h, 0.001)).exterior for h in flat.holes)])
    for line in lines:
        for end in (line.dxf.start, line.dxf.end):
            assert edges.distance(shapely.Point(end.x, end.y)) < 0.01
    assert "FOLD" not in dxf_text(flat)


def test_kerf_is_off_by_default_and_moves_contours_into_the_waste() -> None:
    part = flat_parts()["sheet rolled: loop"]
    assert part.flat is not None
    nominal = loops(ezdxf.read(io.StringIO(dxf_text(part.flat))))
    wide = loops(ezdxf.read(io.StringIO(dxf_text(part.flat, kerf_mm=0.2))))
    assert area_mm2(nominal["OUTLINE"][0]) == pytest.approx(area_mm2(part.flat.outline), rel=1e-9)
    grown = area_mm2(compensated(part.flat.outline, 0.1))
    assert area_mm2(wide["OUTLINE"][0]) == pytest.approx(grown, rel=1e-9)
    assert grown > area_mm2(part.flat.outline)
    assert wide["HOLES"][0].diameter_mm == pytest.approx(nominal["HOLES"][0].diameter_mm - 0.2)


@pytest.mark.parametrize("name", NAMES)
def test_kerf_compensated_files_are_sound_and_offset_by_half_the_kerf(name: str) -> None:
    """Every part with a kerf of 0.2 mm: linted, and its material against shapely's round offset of the nominal part."""
    flat = flat_parts()[name].flat
    assert flat is not None
    text = dxf_text(flat, kerf_mm=0.2)
    assert lint_dxf(text, flat, 0.2) == ()
    found = loops(ezdxf.read(io.StringIO(text)))
    outer = shapely.Polygon(sampled(flat.outline, 0.0005)).buffer(0.1, quad_segs=64)
    assert area_mm2(found["OUTLINE"][0]) == pytest.approx(outer.area, rel=5e-5)
    for have, want in zip(found["HOLES"], flat.holes, strict=True):
        inner = shapely.Polygon(sampled(want, 0.0005)).buffer(-0.1, join_style="mitre")
        assert area_mm2(have) == pytest.approx(inner.area, rel=1e-3)


def test_a_fold_copy_with_kerf_is_refused() -> None:
    flat = flat_parts()["sheet rolled: loop"].flat
    assert flat is not None
    with pytest.raises(GeometryError, match="without kerf"):
        dxf_text(flat, folds=True, kerf_mm=0.2)


def test_file_name_says_part_grade_thickness_quantity_and_revision() -> None:
    part = flat_parts()["sheet rolled: loop"]
    assert file_name(part, "B") == "loop_cuzn37_r350_1.5mm_qty1_revb.dxf"
    assert re.fullmatch(r"[a-z0-9._-]+_r12\.dxf", file_name(part, "B", "r12"))


def test_write_gives_the_path_and_refuses_what_it_cannot_write(tmp_path: Path) -> None:
    part = flat_parts()["sheet rolled: loop"]
    assert write_dxf(part, tmp_path / "loop.dxf").read_bytes().endswith(b"EOF\n")
    with pytest.raises(OutputError, match="cannot write"):
        write_dxf(part, tmp_path / "missing" / "loop.dxf")
    with pytest.raises(GeometryError, match="no flat pattern"):
        write_dxf(next(p for p in build_parts(sample_feed()) if p.flat is None), tmp_path / "x.dxf")


def test_same_bytes_with_another_hash_seed() -> None:
    script = (
        "import hashlib;from tests.samples import sample_feed;from fabgen.parts.loop_sheet import loop_sheet;"
        "from fabgen.writers.dxf import dxf_text;f=loop_sheet(sample_feed('sheet')).flat;"
        "print(hashlib.sha256(''.join(dxf_text(f,v,b) for v in ('R2010','R12') for b in (0,1)).encode()).hexdigest())"
    )
    prints = set()
    for seed in ("0", "77"):
        run = subprocess.run(
            [sys.executable, "-c", script], capture_output=True, text=True, check=True,
            env={**os.environ, "PYTHONHASHSEED": seed, "PYTHONPATH": os.pathsep.join(sys.path)},
        )  # fmt: skip
        prints.add(run.stdout)
    assert len(prints) == 1
