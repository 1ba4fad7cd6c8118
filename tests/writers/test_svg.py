"""SVG read back as XML: size, texts, same drawing as the model."""

from __future__ import annotations

import re
import xml.etree.ElementTree as ET
from pathlib import Path

import pytest

from fabgen.drawing.model import Arc, Line, Polyline, Text
from fabgen.drawing.pages.sheets import pictures
from fabgen.errors import OutputError
from fabgen.writers.svg import svg_text, write_svg
from tests.drawing.books import book_of, feed_of, parts_of
from tests.examples import ROOT
from tests.template_feeds import DRAWN, STALE, views

NS = "{http://www.w3.org/2000/svg}"


def test_a_sheet_as_svg(tmp_path: Path) -> None:
    sheet = book_of("wire-tube-choke")[0]
    path = tmp_path / "sheet.svg"
    write_svg(sheet, path)
    root = ET.parse(path).getroot()
    assert root.get("width") == "210mm"
    assert root.get("viewBox") == "0 0 210 297"
    texts = [t.text for t in root.iter(f"{NS}text")]
    assert texts == [t.text for t in sheet.texts]
    assert svg_text(sheet) == path.read_text(encoding="utf-8")


def test_items_are_cropped_to_their_bounds() -> None:
    items = (
        Line(10, 10, 60, 10),
        Arc(35, 30, 10, 10),
        Polyline(((10, 10), (60, 40)), "thin"),
        Text(20, 20, "a < b & c"),
    )
    root = ET.fromstring(svg_text(items, margin_mm=3.0))
    assert root.get("viewBox") == "0 0 56 36"
    assert next(root.iter(f"{NS}text")).text == "a < b & c"
    line = next(root.iter(f"{NS}path")).get("d")
    assert line == "M3 33L53 33"


@pytest.mark.parametrize("name", DRAWN)
def test_kept_views_are_those_of_the_kept_feeds(name: str) -> None:
    for file, text in views(name).items():
        kept = (ROOT / "docs" / file).read_text("utf-8")
        assert re.sub(r"[-\d.]+", "0", kept) == re.sub(r"[-\d.]+", "0", text), STALE.format(name=name)
        numbers = [[float(n) for n in re.findall(r"-?\d+(?:\.\d+)?", t)] for t in (kept, text)]
        assert numbers[0] == pytest.approx(numbers[1], abs=0.01)


def test_folder_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="could not be written"):
        write_svg((Line(0, 0, 1, 1),), tmp_path / "none" / "a.svg")


def test_main_views_for_other_pages() -> None:
    made = pictures(feed_of("wire-tube-choke"), parts_of("wire-tube-choke"))
    assert list(made) == ["isometric", "section", "aperture", "loop"]
    for items in made.values():
        root = ET.fromstring(svg_text(items))
        assert len(list(root.iter(f"{NS}path"))) > 10
