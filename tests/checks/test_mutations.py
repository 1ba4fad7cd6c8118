"""A number changed anywhere in a pack is found: by the checksums, and by its content where they were made to fit."""

from __future__ import annotations

import copy
import hashlib
import json
import re
import shutil
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from fabgen.checks.read_files import read_pack
from fabgen.checks.readback import check_pack
from fabgen.checks.records import Finding
from fabgen.errors import JobError
from fabgen.folder import CHECKSUM_KEY, record_checksum
from fabgen.pack import PackOptions, write_pack
from fabgen.writers.pdf_text import page_texts
from fabgen.writers.sheets_back import sheets_findings
from fabgen.writers.tables_back import tables_findings
from tests.samples import sample_feed

pytestmark = [pytest.mark.slow, pytest.mark.thorough]


@pytest.fixture(scope="module")
def whole(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A pack with everything but printed parts."""
    folder = tmp_path_factory.mktemp("whole") / "pack"
    groups = ("tables", "bend", "cut", "model", "order", "sheets")
    write_pack(sample_feed("sheet", "turned", choke=True), folder, PackOptions(only=groups))
    return folder


def leaves(value: Any, path: tuple[str | int, ...] = ()) -> Iterator[tuple[str | int, ...]]:
    """Paths of every number of plain data."""
    if isinstance(value, dict):
        for key, inner in value.items():
            yield from leaves(inner, (*path, key))
    elif isinstance(value, list):
        for index, inner in enumerate(value):
            yield from leaves(inner, (*path, index))
    elif isinstance(value, int | float) and not isinstance(value, bool):
        yield path


def changed(data: dict[str, Any], path: tuple[str | int, ...]) -> dict[str, Any]:
    """The data with one number a hundredth, and a twentieth, larger; a whole number by one."""
    new = copy.deepcopy(data)
    place: Any = new
    for key in path[:-1]:
        place = place[key]
    old = place[path[-1]]
    place[path[-1]] = old + 1 if isinstance(old, int) else round(old * 1.01 + 0.05, 6)
    return new


def fitted(folder: Path, data: dict[str, Any] | None = None) -> None:
    """All checksums made to fit what the files say now."""
    data = data or json.loads((folder / "record.json").read_text(encoding="utf-8"))
    data["files"] = {name: hashlib.sha256((folder / name).read_bytes()).hexdigest() for name in data["files"]}
    data[CHECKSUM_KEY] = record_checksum(data)
    (folder / "record.json").write_text(json.dumps(data), encoding="utf-8")


def copied(pack: Path, tmp_path: Path) -> Path:
    folder = tmp_path / "pack"
    shutil.copytree(pack, folder)
    return folder


def test_the_pack_itself_passes(whole: Path) -> None:
    assert check_pack(whole, solids=True) == ()
    assert sheets_findings(read_pack(whole)) == ()
    assert tables_findings(read_pack(whole)) == ()


def test_every_number_of_the_record_is_under_its_checksum(whole: Path, tmp_path: Path) -> None:
    data = json.loads((whole / "record.json").read_text(encoding="utf-8"))
    paths = list(leaves(data))
    assert len(paths) > 300
    assert all(record_checksum(changed(data, path)) != data[CHECKSUM_KEY] for path in paths)
    folder = copied(whole, tmp_path)
    (folder / "record.json").write_text(json.dumps(changed(data, ("predicted", "spillover_noise_k"))), encoding="utf-8")
    assert "CONS-211" in {f.code for f in check_pack(folder)}


DERIVED = (
    *(("sizes", name) for name in (
        "can_bore_mm", "can_depth_mm", "wall_mm", "floor_mm", "can_flats", "loop_diameter_mm", "loop_height_mm",
        "strip_width_mm", "sheet_mm", "leg_x_mm", "leg_pitch_mm", "leg_width_mm", "leg_bend_radius_mm",
        "tap_height_mm", "crossing_width_mm", "series_capacitor_pf",
    )),
    *(("sizes", "choke", name) for name in ("bore_mm", "depth_mm", "floor_z_mm")),
    *(("capacitor", name) for name in (
        "capacitance_pf", "minimum_pf", "maximum_pf", "overlap_mm", "overlap_max_mm", "inner_mm", "outer_mm",
        "tube_wall_mm", "relative_permittivity", "pf_per_mm",
    )),
    *(("predicted", name) for name in (
        "return_loss_db", "bandwidth_return_loss_db", "aperture_efficiency", "illumination_efficiency",
        "phase_efficiency", "polarisation_efficiency", "spillover", "half_power_beamwidth_e_deg",
        "half_power_beamwidth_h_deg", "directivity_dbi", "ohmic_loss_db", "radiation_efficiency", "feed_noise_k",
        "system_noise_k", "g_over_t_db_per_k",
    )),
    ("predicted", "gain_dbi", 0, "gain_dbi"),
    ("predicted", "wall_current", "joints", 0, "crossing_a_per_m"),
    ("sensitivities", 0, "tolerance_mm"),
    ("sensitivities", 0, "effect_mhz"),
    ("modes", 0, "cutoff_mhz"),
    ("parts", 0, "mass_kg"),
    ("parts", 0, "quantity"),
    ("frequency_mhz",),
    ("wavelength_mm",),
)  # fmt: skip


@pytest.mark.parametrize("path", DERIVED, ids=lambda path: ".".join(map(str, path)))
def test_a_number_that_others_follow_from_is_found_by_content(
    whole: Path, tmp_path: Path, path: tuple[str | int, ...]
) -> None:
    folder = copied(whole, tmp_path)
    data = changed(json.loads((folder / "record.json").read_text(encoding="utf-8")), path)
    fitted(folder, data)
    # solids and sheets are the last to tell; most numbers are found without
    found: tuple[Finding, ...] = check_pack(folder)
    assert found or check_pack(folder, solids=True) or sheets_findings(read_pack(folder))


def move_a_vertex(folder: Path) -> None:
    import ezdxf

    (path,) = (folder / "cut").glob("loop*reva.dxf")
    document = ezdxf.readfile(path)
    line = next(e for e in document.modelspace() if e.dxftype() == "LWPOLYLINE")
    points = [tuple(p) for p in line.get_points("xyseb")]
    points[0] = (points[0][0] + 0.05, *points[0][1:])
    line.set_points(points, format="xyseb")
    document.saveas(path)


def move_a_point(folder: Path) -> None:
    """A corner of the turned can in STEP: the first point that a vertex stands on."""
    path = folder / "model" / "can.step"
    text = path.read_text(encoding="ascii")
    number = re.search(r"VERTEX_POINT\('[^']*',#(\d+)\)", text)
    assert number is not None
    point = re.search(rf"#{number[1]} ?= ?CARTESIAN_POINT\('[^']*',\(([^)]*)\)\)", text)
    assert point is not None
    x, y, z = point[1].split(",")
    moved = ",".join((x, y, f"{float(z) + 0.5:.6f}"))
    path.write_text(text.replace(point[0], point[0].replace(point[1], moved), 1), encoding="ascii")


def longer_tube(folder: Path) -> None:
    """Every height of the loop's STEP file a thousandth larger."""
    path = folder / "model" / "loop.step"
    text = path.read_text(encoding="ascii")

    def taller(match: re.Match[str]) -> str:
        x, y, z = match[2].split(",")
        return f"{match[1]}{x},{y},{float(z) * 1.001:.9f})"

    path.write_text(re.sub(r"(CARTESIAN_POINT\('[^']*',\()([^)]*)\)", taller, text), encoding="ascii")


def first_figure(name: str) -> Callable[[Path], None]:
    """The first figure with a decimal point in a table of the pack, by a tenth larger."""

    def change(folder: Path) -> None:
        path = folder / name
        head, _, rest = path.read_text(encoding="utf-8").partition("\n")
        new = re.sub(r"\d+\.\d+", lambda match: f"{float(match[0]) + 0.1:.3f}", rest, count=1)
        assert new != rest
        path.write_text(f"{head}\n{new}", encoding="utf-8")

    return change


CHANGES: dict[str, Callable[[Path], None]] = {
    "a vertex of a DXF": move_a_vertex,
    "a point of a STEP file": move_a_point,
    "heights of a STEP file": longer_tube,
    "parts.csv": first_figure("parts.csv"),
    "bend table": first_figure("bend/bend_table.csv"),
    "order note": first_figure("order/laser.csv"),
}


@pytest.mark.parametrize("name", list(CHANGES))
def test_a_changed_file_is_found_by_checksum_and_by_content(whole: Path, tmp_path: Path, name: str) -> None:
    folder = copied(whole, tmp_path)
    CHANGES[name](folder)
    assert "CONS-201" in {f.code for f in check_pack(folder)}
    fitted(folder)
    found = (*check_pack(folder, solids=True), *tables_findings(read_pack(folder)))
    assert found
    assert not {"CONS-201", "CONS-211"} & {f.code for f in found}


def test_changed_words_and_figures_of_the_sheets_are_found(whole: Path, tmp_path: Path) -> None:
    from fabgen.drawing.pages.sheets import sheets
    from fabgen.parts.build import build_parts
    from fabgen.writers.pdf import Metadata, write_pdf

    folder = copied(whole, tmp_path)
    feed = read_pack(folder).feed
    other = replace(feed, job=feed.job.model_copy(update={"target": feed.job.target.model_copy(
        update={"revision": "B", "name": "another feed"})}), sizes=replace(feed.sizes, tap_height_mm=14.9))  # fmt: skip
    write_pdf(sheets(other, tuple(build_parts(other)), ()), folder / "sheets.pdf", Metadata("a", "b", "c"))
    assert "CONS-201" in {f.code for f in check_pack(folder)}
    fitted(folder)
    assert check_pack(folder) == ()
    found = sheets_findings(read_pack(folder))
    said = {(f.value, f.limit) for f in found}
    assert all(f.code == "CONS-213" and f.severity == "stop" for f in found)
    assert ("another feed", "sample feed") in said
    assert len(found) > 3


def test_texts_of_the_sheets_are_those_that_another_reader_finds(whole: Path) -> None:
    # pdftotext of poppler-utils is the general-purpose reader.
    reader = shutil.which("pdftotext")
    if reader is None:
        pytest.skip("poppler-utils is not installed")
    import subprocess

    ran = subprocess.run([reader, "-raw", str(whole / "sheets.pdf"), "-"], capture_output=True, text=True, check=True)
    theirs = re.sub(r"\s", "", ran.stdout)
    for page in page_texts(whole / "sheets.pdf"):
        for text in page:
            assert re.sub(r"\s", "", text) in theirs or len(text) > 40, text


def test_a_file_that_is_no_sheet_of_ours_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "sheets.pdf"
    path.write_bytes(b"%PDF-1.4\n1 0 obj\n<< /Length 3 >>\nendobj\n")
    with pytest.raises(JobError, match="cannot be read back"):
        page_texts(path)
