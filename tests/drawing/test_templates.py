"""What must hold on the sheets of all eight templates: kept feeds are current, every printed size is right, every part
has its page, no tail of a table has a sheet of its own, and the PDF is true to scale with text that can be found."""

from __future__ import annotations

import csv
import io
import json
import re
import shutil
import subprocess
import time
from functools import cache
from pathlib import Path

import numpy
import pytest
from PIL import Image
from pypdf import PdfReader

from fabgen.drawing.flow import columns
from fabgen.drawing.model import Dimension, Sheet, tidy_text
from fabgen.drawing.pages.sheets import sheets
from fabgen.drawing.paper import PAPERS
from fabgen.job_reader import read_job
from fabgen.parts.floor_plan import MARK_MM
from fabgen.writers.csv import parts_csv
from fabgen.writers.pdf import Metadata, write_pdf
from tests.drawing.books import FINDINGS, book_of, feed_of, parts_of
from tests.examples import EXAMPLES, ROOT, differences
from tests.template_feeds import KEPT, STALE, TEMPLATES, solved, template_feed, text_of

every_template = pytest.mark.parametrize("name", KEPT)
needs_poppler = pytest.mark.skipif(shutil.which("pdftoppm") is None, reason="needs poppler-utils")
DRAWN = {"general", "part"}


def test_every_template_has_its_kept_feed() -> None:
    assert KEPT == TEMPLATES, [STALE.format(name=name) for name in TEMPLATES if name not in KEPT]


@every_template
def test_kept_feed_is_that_of_the_template(name: str) -> None:
    assert template_feed(name).job == read_job(ROOT / "templates" / f"{name}.toml")


@pytest.mark.parametrize("name", EXAMPLES)
def test_kept_feed_has_the_sizes_of_the_kept_pack(name: str) -> None:
    # The kept packs are compared with new runs of the command line (tests/test_readme.py).
    record = json.loads((ROOT / "out_examples" / name / "record.json").read_text("utf-8"))
    sizes = template_feed(name).sizes
    for key, value in record["sizes"].items():
        if isinstance(value, float | int):
            assert getattr(sizes, key) == pytest.approx(value, abs=1e-6), STALE.format(name=name)


@pytest.mark.slow
@pytest.mark.thorough
@every_template
def test_kept_feed_is_what_the_solver_gives(name: str, tmp_path: Path) -> None:
    kept, new = tmp_path / "kept.json", tmp_path / "new.json"
    kept.write_text(text_of(template_feed(name)), "utf-8")
    new.write_text(text_of(solved(name)), "utf-8")
    assert differences(kept, new) == [], STALE.format(name=name)


def _printed(text: str) -> float:
    """The value in a dimension's text, without sign, count and tolerance."""
    return float(re.search(r"(?<![×x] )\d+(?:\.\d+)?", re.sub(r"^\d+ × ", "", text)).group())  # type: ignore[union-attr]


def _linear(sheet: Sheet) -> list[Dimension]:
    return [d for d in sheet.dimensions if d.kind in {"x", "y"} and len(d.points_mm) == 2]


@every_template
def test_dimensions_say_the_distance_that_they_span(name: str) -> None:
    spans = 0
    for sheet in book_of(name):
        if sheet.kind not in DRAWN:
            continue
        for d in _linear(sheet):
            axis = 0 if d.kind == "x" else 1
            assert abs(d.points_mm[1][axis] - d.points_mm[0][axis]) == pytest.approx(d.value, abs=1e-6)
            assert _printed(d.text) == pytest.approx(d.value, abs=0.0501 if d.name == "overall" else 0.00501), d
            spans += 1
    assert spans > 20


@every_template
def test_sizes_of_the_record_are_drawn_with_their_tolerances(name: str) -> None:
    feed = feed_of(name)
    drawn = {d.name: d.text for s in book_of(name) if s.kind == "general" for d in s.dimensions}
    wanted = {"can_bore_mm", "can_depth_mm", "loop_diameter_mm", "loop_height_mm", "leg_pitch_mm", "tap_height_mm"}
    wanted |= {"choke.bore_mm", "choke.depth_mm"} if feed.sizes.choke is not None else set()
    own = {s.size: s.tolerance_mm for s in feed.sensitivities}
    for key in wanted:
        value = getattr(feed.sizes.choke if "." in key else feed.sizes, key.removeprefix("choke."))
        assert _printed(drawn[key]) == pytest.approx(value, abs=0.00501), key
        assert float(drawn[key].split("±")[1]) == pytest.approx(own[key], abs=0.00501), key
    assert _printed(drawn["phase_centre_mm"]) == pytest.approx(feed.predicted.phase_centre_mm, abs=0.0501)


@every_template
def test_one_size_has_one_tolerance_on_all_sheets(name: str) -> None:
    own = {s.size: s.tolerance_mm for s in feed_of(name).sensitivities}
    printed = [p for p in parts_of(name) if "print" in p.process and "can_bore_mm" in dict(p.sizes)]
    for part in printed:
        assert re.findall(r"\+-([\d.]+)", part.tolerance) == [f"{own['can_bore_mm']:g}"]
        assert own["can_depth_mm"] == own["can_bore_mm"]


@every_template
def test_each_row_of_the_parts_list_has_its_page(name: str) -> None:
    book = book_of(name)
    rows = list(csv.DictReader(io.StringIO(parts_csv(parts_of(name)))))
    bought = [t.text for s in book if s.kind == "bought" for t in s.texts]
    listed = [r for s in book for t in s.tables if t.name == "parts" for r in t.rows]
    for row in rows:
        if row["process"] == "buy":
            assert any(t.startswith(tidy_text(row["name"])) for t in bought), row["part"]
        else:
            (first, *_) = [s for s in book if s.kind == "part" and s.part_key == row["part"]]
            assert first.title == row["name"]
            assert first.views
        assert any(r[1] == tidy_text(row["name"]) and r[2] == row["quantity"] for r in listed), row["part"]


@every_template
def test_no_tail_of_a_table_has_a_sheet_of_its_own(name: str) -> None:
    for sheet in book_of(name):
        if sheet.kind in {"true", "findings"}:
            continue
        column = columns(PAPERS["A4"])[0]
        inside = [i.box() for i in sheet.items if sheet.frame.contains(i.box()) and i.box().y0 >= column.bottom - 1]
        assert column.top - min(box.y0 for box in inside) > 45, (sheet.number, sheet.title)


@pytest.mark.parametrize("name", ["c-band-5760", "s-band-3400"])
def test_notch_of_solid_flanges_has_its_size(name: str) -> None:
    texts = [d.text for s in book_of(name) if s.part_key == "can" for d in s.dimensions if d.name == "notch"]
    assert texts == [f"notch 90°, {MARK_MM:g} deep"]


@cache
def _pdf(name: str, folder: Path) -> Path:
    path = folder / f"{name}.pdf"
    write_pdf(book_of(name), path, Metadata(name, "someone", "Assembly sheets"))
    return path


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("sheets")


def _run(*words: str) -> str:
    return subprocess.run(words, capture_output=True, text=True, check=True).stdout


@needs_poppler
@every_template
def test_fonts_are_embedded_and_every_word_is_found(name: str, folder: Path) -> None:
    path = _pdf(name, folder)
    assert path.stat().st_size < 3_000_000
    fonts = _run("pdffonts", str(path)).splitlines()[2:]
    assert fonts
    assert all("DejaVuSans" in line and line.split()[-5] == "yes" for line in fonts)
    pages = _run("pdftotext", str(path), "-").split("\f")
    for sheet, page in zip(book_of(name), pages, strict=False):
        # Word spaces are the reader's guess; letters and their order are not.
        together = "".join(page.split())
        for text in sheet.texts:
            assert all(word in together for word in text.text.split()), (sheet.number, text.text)


@every_template
def test_bookmarks_and_print_settings(name: str, folder: Path) -> None:
    reader = PdfReader(_pdf(name, folder))
    assert reader.trailer["/Root"]["/ViewerPreferences"]["/PrintScaling"] == "/None"
    titles = [item.title for item in _flat(reader.outline)]
    assert titles == [s.bookmark for s in book_of(name) if s.bookmark]
    assert {p.name for p in parts_of(name) if p.process != ("buy",)} <= set(titles)


def _flat(outline: list) -> list:  # type: ignore[type-arg]
    return [x for item in outline for x in (_flat(item) if isinstance(item, list) else [item])]


@needs_poppler
@pytest.mark.slow
@pytest.mark.thorough
@every_template
def test_frame_measures_true(name: str, folder: Path) -> None:
    # ISO 5457 A4: 180 x 277 mm; at 600 dpi a pixel is 0.042 mm. 0.1 mm over 250 mm is what is promised.
    command = ["pdftoppm", "-r", "600", "-f", "1", "-l", "1", "-gray", str(_pdf(name, folder))]
    raw = subprocess.run(command, capture_output=True, check=True).stdout
    dark = numpy.asarray(Image.open(io.BytesIO(raw))) < 128
    for axis, other, size in ((1, 0, 277.0), (0, 1, 180.0)):
        profile = dark.sum(axis=axis)
        lines = numpy.flatnonzero(profile >= 0.85 * dark.shape[axis])
        groups = numpy.split(lines, numpy.flatnonzero(numpy.diff(lines) > 1) + 1)
        middles = [float(g.mean()) for g in groups]
        assert (middles[-1] - middles[0]) * 25.4 / 600 == pytest.approx(size, abs=0.1 * size / 250), other


@pytest.mark.slow
@pytest.mark.thorough
@every_template
def test_processor_time_and_same_bytes(name: str, tmp_path: Path) -> None:
    made, took = [], []
    for path in (tmp_path / "a.pdf", tmp_path / "b.pdf"):
        start = time.process_time()
        write_pdf(sheets(feed_of(name), parts_of(name), FINDINGS), path, Metadata(name, "", ""))
        took.append(time.process_time() - start)
        made.append(path.read_bytes())
    assert made[0] == made[1]
    assert min(took) < 4.0
