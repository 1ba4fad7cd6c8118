"""The PDF read back with tools of others: true scale, fonts, text, bookmarks, print settings, same bytes."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import time
from io import BytesIO
from pathlib import Path

import numpy
import pytest
from PIL import Image
from pypdf import PdfReader

from fabgen.drawing.pages.sheets import sheets
from fabgen.errors import OutputError
from fabgen.writers.pdf import Metadata, write_pdf
from tests.drawing.books import FINDINGS, SAMPLES, book_of, feed_of, parts_of

METADATA = Metadata("sample feed", "someone", "Assembly sheets", ("feed", "dish"))
POPPLER = shutil.which("pdftoppm") is not None
needs_poppler = pytest.mark.skipif(not POPPLER, reason="needs poppler-utils")


@pytest.fixture(scope="module")
def pdf(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("pdf") / "sheets.pdf"
    write_pdf(book_of("wire-rolled"), path, METADATA)
    return path


def _image(pdf: Path, page: int, dpi: int) -> numpy.ndarray:
    command = ["pdftoppm", "-r", str(dpi), "-f", str(page), "-l", str(page), "-gray", str(pdf)]
    raw = subprocess.run(command, capture_output=True, check=True).stdout
    return numpy.asarray(Image.open(BytesIO(raw)))


def _strokes(dark: numpy.ndarray, least: int) -> list[float]:
    """Centres of runs of dark pixels in a profile that are dark over at least ``least`` pixels across."""
    rows = numpy.flatnonzero(dark >= least)
    runs = numpy.split(rows, numpy.flatnonzero(numpy.diff(rows) > 1) + 1)
    return [float(run.mean()) for run in runs if run.size]


@needs_poppler
def test_frame_is_true_to_scale(pdf: Path) -> None:
    # ISO 5457 A4: drawing space 180 x 277 mm. 600 dpi: one pixel is 0.042 mm.
    image = _image(pdf, 1, 600) < 128
    down = _strokes(image.sum(axis=1), int(0.9 * 180 / 25.4 * 600))
    across = _strokes(image.sum(axis=0), int(0.9 * 277 / 25.4 * 600))
    assert (down[-1] - down[0]) * 25.4 / 600 == pytest.approx(277.0, abs=0.1)
    assert (across[-1] - across[0]) * 25.4 / 600 == pytest.approx(180.0, abs=0.1)


@needs_poppler
def test_bars_of_true_scale_pages_are_100_mm(pdf: Path) -> None:
    page = next(s.number for s in book_of("wire-rolled") if s.kind == "true")
    image = _image(pdf, page, 300) < 128
    px = 300 / 25.4
    sheet = book_of("wire-rolled")[page - 1]
    left, bottom = sheet.frame.x0 + 5, sheet.frame.y0 + 36
    rows = slice(int((297 - bottom - 4.2) * px), int((297 - bottom - 2.0) * px))
    strip = image[rows, int((left + 10) * px) : int((left + 125) * px)]
    line = strip.sum(axis=1).argmax()
    run = numpy.flatnonzero(strip[line])
    assert (run[-1] - run[0]) / px == pytest.approx(100.5, abs=0.3)  # the line's round ends add its width of 0.5


@needs_poppler
def test_all_fonts_are_embedded(pdf: Path) -> None:
    listed = subprocess.run(["pdffonts", str(pdf)], capture_output=True, text=True, check=True).stdout.splitlines()[2:]
    assert listed
    for line in listed:
        assert "DejaVuSans" in line
        assert line.split()[-5] == "yes", line


@needs_poppler
def test_text_can_be_searched(pdf: Path) -> None:
    text = subprocess.run(["pdftotext", str(pdf), "-"], capture_output=True, text=True, check=True).stdout
    for words in ("General arrangement", "±0.3", "⌀", "Bend table", "STOP", "100 mm", "Cautions"):
        assert words in text


def test_print_scaling_bookmarks_and_metadata(pdf: Path) -> None:
    reader = PdfReader(pdf)
    assert reader.trailer["/Root"]["/ViewerPreferences"]["/PrintScaling"] == "/None"
    titles = [o.title for o in _flat(reader.outline)]
    assert titles[0] == "General arrangement"
    assert "Bench test" in titles
    assert reader.metadata is not None
    assert (reader.metadata.title, reader.metadata.author) == ("sample feed", "someone")


def _flat(outline: list) -> list:  # type: ignore[type-arg]
    return [x for item in outline for x in (_flat(item) if isinstance(item, list) else [item])]


@pytest.mark.skipif(shutil.which("qpdf") is None, reason="needs qpdf")
def test_structure_is_sound(pdf: Path) -> None:
    done = subprocess.run(["qpdf", "--check", str(pdf)], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout


def test_same_bytes_twice(pdf: Path, tmp_path: Path) -> None:
    again = tmp_path / "sheets.pdf"
    write_pdf(sheets(feed_of("wire-rolled"), parts_of("wire-rolled"), FINDINGS), again, METADATA)
    assert again.read_bytes() == pdf.read_bytes()


@pytest.mark.slow
def test_same_bytes_in_other_processes(pdf: Path, tmp_path: Path) -> None:
    code = (
        "import sys; from pathlib import Path; from tests.drawing.books import book_of;"
        "from tests.writers.test_pdf import METADATA; from fabgen.writers.pdf import write_pdf;"
        "write_pdf(book_of('wire-rolled'), Path(sys.argv[1]), METADATA)"
    )
    for seed in ("1", "77"):
        path = tmp_path / f"{seed}.pdf"
        subprocess.run(
            [sys.executable, "-W", "ignore", "-c", code, str(path)],
            env={"PYTHONHASHSEED": seed, "PYTHONPATH": ".", "PATH": "/usr/bin:/bin", "HOME": str(tmp_path)},
            check=True,
        )
        assert path.read_bytes() == pdf.read_bytes()


@pytest.mark.slow
@pytest.mark.parametrize("kind", SAMPLES)
def test_size_and_time(kind: str, tmp_path: Path) -> None:
    if os.getloadavg()[0] > 2.0:
        pytest.skip("the machine is busy: times would say nothing")
    parts = parts_of(kind)
    for part in parts:
        if part.solid is not None:
            part.solid()
    took = []
    for _ in range(2):
        start = time.process_time()
        write_pdf(sheets(feed_of(kind), parts, FINDINGS), tmp_path / "s.pdf", METADATA)
        took.append(time.process_time() - start)
    print(f"{kind}: {min(took):.2f} s, {(tmp_path / 's.pdf').stat().st_size / 1000:.0f} kB")
    assert (tmp_path / "s.pdf").stat().st_size < 3_000_000
    assert min(took) < 4.0


def test_folder_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="could not be written"):
        write_pdf(book_of("wire-rolled")[:1], tmp_path / "none" / "s.pdf", METADATA)


@needs_poppler
def test_lines_have_their_widths(pdf: Path) -> None:
    # ISO 5457 frame 0.7 mm: measured across the left frame line, halfway between letters.
    image = _image(pdf, 1, 600) < 128
    profile = image[3000, int(15 / 25.4 * 600) : int(25 / 25.4 * 600)]
    assert profile.sum() * 25.4 / 600 == pytest.approx(0.7, abs=0.09)
