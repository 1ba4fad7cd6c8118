"""Drawing items, fonts, clipping, paper and plots against other libraries and the standards."""

from __future__ import annotations

import math

import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st
from PIL import ImageFont

from fabgen.drawing import plot
from fabgen.drawing.clip import clipped
from fabgen.drawing.fonts import (
    CAPITAL,
    fit,
    font_path,
    require_printable,
    text_width_mm,
    unprintable,
    wrap,
)
from fabgen.drawing.model import PENS, SCALES, Arc, Box, Line, Text, number, scale_text, tidy_text
from fabgen.drawing.paper import PAPERS, frame_items, projection_symbol
from fabgen.errors import JobError

small = st.floats(-80, 80, allow_nan=False)


@pytest.mark.parametrize("text", ["General arrangement", "⌀221.6 ±0.3", "6 × ⌀4.5 auf ⌀235", "Облучатель 21 см"])
@pytest.mark.parametrize("bold", [False, True])
def test_widths_agree_with_a_font_library(text: str, bold: bool) -> None:
    # Pillow's FreeType at 2048 pixels an em, without hinting kerning: the font's own advance widths.
    font = ImageFont.truetype(str(font_path(bold)), 2048, layout_engine=ImageFont.Layout.BASIC)
    advance = sum(font.getlength(c) for c in text) / 2048
    assert text_width_mm(text, 2.5, bold) == pytest.approx(advance * 2.5 / CAPITAL, rel=2e-3)


def test_capital_height_is_the_text_height() -> None:
    font = ImageFont.truetype(str(font_path()), 2048)
    box = font.getbbox("H", anchor="ls")
    assert -box[1] / 2048 == pytest.approx(CAPITAL, abs=1e-3)


@given(st.text(st.characters(min_codepoint=32, max_codepoint=0x250), max_size=80), st.floats(12, 90))
def test_wrapped_lines_fit_and_lose_no_letter(text: str, width: float) -> None:
    lines = wrap(text, width, 2.5)
    assert all(text_width_mm(line, 2.5) <= width + 1e-9 for line in lines)
    assert "".join("".join(lines).split()) == "".join(text.split())


def test_fit_makes_smaller_then_cuts() -> None:
    assert fit("short", 50, 2.5) == ("short", 2.5)
    text, height = fit("a rather long text for this cell", 45, 2.5)
    assert text == "a rather long text for this cell"
    assert 1.8 <= height < 2.5
    assert fit("a rather long text for this cell", 20, 2.5)[0].endswith("…")


def test_scripts_that_the_font_cannot_set_are_refused() -> None:
    assert unprintable("Ελλάδα Łódź Москва") == ""
    with pytest.raises(JobError, match=r"target\.name .*U\+5587.*Latin, Greek and Cyrillic"):
        require_printable("喇", "target.name")
    with pytest.raises(JobError):
        require_printable("מוקד", "target.name")


@given(small, small, small, small)
def test_clipped_lines_agree_with_a_geometry_library(x0: float, y0: float, x1: float, y1: float) -> None:
    window = Box(-30, -20, 40, 25)
    wanted = shapely.LineString([(x0, y0), (x1, y1)]).intersection(shapely.box(-30, -20, 40, 25)).length
    got = sum(
        math.hypot(p.x1 - p.x0, p.y1 - p.y0) for p in clipped([Line(x0, y0, x1, y1)], window) if isinstance(p, Line)
    )
    assert got == pytest.approx(wanted, abs=1e-6)


@given(small, small, st.floats(1, 90), st.floats(0, 360), st.floats(5, 360))
def test_clipped_arcs_agree_with_a_geometry_library(cx: float, cy: float, r: float, start: float, sweep: float) -> None:
    arc = Arc(cx, cy, r, r, start, sweep)
    window = shapely.box(-30, -20, 40, 25)
    wanted = shapely.LineString(arc.points(0.25)).intersection(window).length
    got = sum(
        p.rx * math.radians(abs(p.sweep_deg)) for p in clipped([arc], Box(-30, -20, 40, 25)) if isinstance(p, Arc)
    )
    assert got == pytest.approx(wanted, abs=2e-3 * r + 0.02)


@given(small, small, st.floats(1, 60), st.floats(1, 60), st.floats(0, 360), st.floats(-360, 360), st.floats(0, 180))
def test_bounds_of_arcs(cx: float, cy: float, rx: float, ry: float, start: float, sweep: float, turn: float) -> None:
    arc = Arc(cx, cy, rx, ry, start, sweep, turn)
    points = arc.points(0.5)
    box = arc.box()
    assert box.x0 == pytest.approx(min(p[0] for p in points), abs=0.01)
    assert box.y1 == pytest.approx(max(p[1] for p in points), abs=0.01)
    assert box.grown(1e-6).contains(Box(*points[-1], *points[-1]))


def test_beziers_follow_the_circle() -> None:
    # Error of a 45 degree cubic: radius times about 4e-6 (from memory, usual spline texts).
    for a, b, c, d in Arc(0, 0, 100, 100, 0, 300).beziers():
        for t in (0.25, 0.5, 0.75):
            s = 1 - t
            x, y = (s**3 * a[i] + 3 * s * s * t * b[i] + 3 * s * t * t * c[i] + t**3 * d[i] for i in (0, 1))
            assert math.hypot(x, y) == pytest.approx(100, abs=5e-4)


def test_scales_and_numbers() -> None:
    # ISO 5455: 1, 2, 5 times powers of ten (common knowledge of the trade).
    assert [scale_text(s) for s in SCALES[3:8]] == ["5:1", "2:1", "1:1", "1:2", "1:5"]
    assert [number(v) for v in (66.9, 100.0, 0.304, -0.001)] == ["66.9", "100", "0.3", "0"]
    assert tidy_text("bore +-0.2 mm, M3x12") == "bore ±0.2 mm, M3×12"


def test_line_group_is_two_to_one() -> None:
    # ISO 128-2:2020 line group 0.5: wide 0.5, narrow 0.25 (TO-25; partly read, rest from memory).
    assert PENS["outline"].width_mm == 2 * PENS["thin"].width_mm == 0.5
    assert PENS["frame"].width_mm == 0.7
    assert PENS["hidden"].dash_mm
    assert not PENS["outline"].dash_mm


@pytest.mark.parametrize(("name", "width", "height"), [("A4", 180, 277), ("A3", 390, 277)])
def test_drawing_space(name: str, width: float, height: float) -> None:
    # ISO 5457:1999: A4 180 x 277, A3 277 x 390 (TO-22, from memory).
    frame = PAPERS[name].frame
    assert (frame.width, frame.height) == pytest.approx((width, height))


def test_grid_letters_leave_out_i_and_o() -> None:
    # ISO 5457: no I and no O (TO-24).
    for paper in PAPERS.values():
        letters = {t.text for t in frame_items(paper) if isinstance(t, Text) and t.text.isalpha()}
        assert letters
        assert not letters & {"I", "O"}


def test_projection_symbol_shows_its_method() -> None:
    # ISO 5456-2: first angle sets the view from the left on the right; the small end looks left.
    def centre(method: str) -> float:
        return max(i.cx for i in projection_symbol(0, 0, method) if isinstance(i, Arc))

    def frustum(method: str) -> list[Line]:
        upright = [
            i for i in projection_symbol(0, 0, method) if isinstance(i, Line) and i.x0 == i.x1 and i.role == "thin"
        ]
        return sorted(upright, key=lambda i: i.x0)

    for method, side in (("first", 1), ("third", -1)):
        small_end, large_end = frustum(method)
        assert abs(small_end.y1 - small_end.y0) < abs(large_end.y1 - large_end.y0)
        assert (centre(method) - large_end.x0) * side > 0


def test_smith_chart_circles_pass_their_points() -> None:
    # z = r + jx lies at (z - 1) / (z + 1): the definition of the chart.
    items = [i for i in plot.smith_chart(100.0) if isinstance(i, Arc)]
    for r, x in ((0.2, 0.5), (1.0, 2.0), (5.0, 0.2)):
        gamma = 100 * ((complex(r, x) - 1) / (complex(r, x) + 1))
        near = sorted(abs(math.hypot(gamma.real - c.cx, gamma.imag - c.cy) - c.rx) for c in items)
        assert near[1] < 1e-6  # one circle of resistance and one of reactance


@given(st.floats(-1000, 1000), st.floats(0.01, 2000), st.integers(2, 12))
def test_ticks_are_round_and_inside(low: float, span: float, most: int) -> None:
    found = plot.ticks(low, low + span, most)
    assert len(found) <= most + 1
    assert all(low - 1e-6 * span <= t <= low + span * (1 + 1e-6) for t in found)
    step = plot.nice_step(span, most)
    assert round(step / 10 ** math.floor(math.log10(step) + 1e-9), 6) in {1, 2, 5}


def test_curves_are_cut_at_the_frame() -> None:
    axes = plot.Axes(100, 50, (0, 10), (-40, 0))
    pieces = plot.curve(axes, [0, 2, 4, 6, 8, 12], [-10, 10, -10, -60, -20, -5])
    for piece in pieces:
        box = piece.box()
        assert Box(0, 0, 100, 50).contains(box, 1e-6)
    assert len(pieces) == 3
