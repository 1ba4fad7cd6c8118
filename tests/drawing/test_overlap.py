"""No text on another, none off the page, no dimension line through a text."""

from __future__ import annotations

import pytest
import shapely
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from fabgen.drawing.dimension import along_x, along_y, leader, place
from fabgen.drawing.model import Box, Line, Sheet, Text
from fabgen.drawing.overlap import clashes, crosses
from tests.drawing.books import KINDS, book_of

numbers = st.floats(-50, 50, allow_nan=False).map(lambda v: round(v, 1))


@pytest.mark.parametrize("kind", KINDS)
def test_every_sheet_is_legible(kind: str) -> None:
    assert [(s.number, c) for s in book_of(kind) for c in clashes(s)] == []


@pytest.mark.parametrize("kind", ["wire-tube-choke", "s-band-3400"])
@pytest.mark.parametrize("paper", ["A3", "letter", "tabloid"])
def test_every_paper_is_legible(paper: str, kind: str) -> None:
    assert [(s.number, c) for s in book_of(kind, paper) for c in clashes(s)] == []


@given(numbers, numbers, numbers, numbers, numbers, numbers, st.floats(1, 30), st.floats(1, 30))
def test_crossing_agrees_with_a_geometry_library(
    x0: float, y0: float, x1: float, y1: float, bx: float, by: float, w: float, h: float
) -> None:
    assume((x0, y0) != (x1, y1))  # a line without length crosses nothing for the one, and lies inside for the other
    box = Box(bx, by, bx + w, by + h)
    inside = shapely.box(bx, by, bx + w, by + h).intersection(shapely.LineString([(x0, y0), (x1, y1)]))
    through = inside.length > 1e-6 and not shapely.box(bx, by, bx + w, by + h).boundary.covers(inside)
    if inside.length > 1e-6 or inside.is_empty:
        assert crosses(box, Line(x0, y0, x1, y1)) == through


def _sheet(items: tuple[Text, ...]) -> Sheet:
    return Sheet(1, 1, "part", "t", "", 210, 297, Box(20, 10, 200, 287), items)


def test_faults_that_were_set_are_found() -> None:
    twice = _sheet((Text(50, 50, "120.5"), Text(52, 51, "33")))
    off = _sheet((Text(1, 50, "far left"),))
    assert [c.kind for c in clashes(twice)] == ["text-text"]
    assert [c.kind for c in clashes(off)] == ["text-page"]


@settings(max_examples=40, deadline=None)
@given(st.lists(st.tuples(st.integers(-60, 60), st.integers(1, 90), st.integers(0, 3)), min_size=1, max_size=14))
def test_placed_dimensions_never_clash(spans: list[tuple[int, int, int]]) -> None:
    body = (Line(-60, -20, 150, -20), Line(150, -20, 150, 40), Line(150, 40, -60, 40), Line(-60, 40, -60, -20))
    asks = []
    for start, length, side in spans:
        if side == 0:
            asks.append(along_x("a", start, start + length, -20, "bottom"))
        elif side == 1:
            asks.append(along_x("b", start, start + length, 40, "top"))
        elif side == 2:
            asks.append(along_y("c", start / 3, (start + length) / 3, -60, "left"))
        else:
            asks.append(leader("d", length, f"⌀{length}", (start, 10), 30.0))
    placed = place("view", body, asks, 1.0)
    sheet = Sheet(
        1, 1, "part", "t", "", 2000, 2000, Box(0, 0, 2000, 2000),
        tuple(i.moved(1000, 1000) for i in placed.items), tuple(d.moved(1000, 1000) for d in placed.dimensions),
    )  # fmt: skip
    assert clashes(sheet) == ()
    assert len(placed.dimensions) + len(placed.left_over) == len(asks)


def test_short_dimensions_stand_nearer_than_long_ones() -> None:
    # ISO 129-1: shorter dimensions nearer to the outline, so that extension lines do not cross dimension lines.
    body = (Line(0, 0, 100, 0),)
    placed = place("v", body, [along_x("long", 0, 100, 0), along_x("short", 0, 40, 0)], 1.0)
    depth = {d.name: d.lines[0].y0 for d in placed.dimensions}
    assert depth["long"] < depth["short"] < 0
