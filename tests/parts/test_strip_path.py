"""The way of a strip: places, lengths, the step of a lap seam."""

from __future__ import annotations

import math

import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from fabgen.errors import GeometryError
from fabgen.parts.contour import area_mm2, sampled
from fabgen.parts.strip_path import StripPath, joggle, profile
from fabgen.theory.springback import sheet_released_mm
from tests.samples import sample_feed


@given(st.floats(0.3, 3.0), st.floats(0.5, 3.0), st.floats(15.0, 60.0), st.floats(0.2, 0.5))
def test_a_square_of_four_bends_closes(t: float, ratio: float, side: float, k: float) -> None:
    path = StripPath(t, (0.0, 0.0), 0.0)
    for _ in range(4):
        path = path.straight(side).bend(ratio * t, 90.0, k)
    (x, y), heading = path.end
    assert math.hypot(x, y) < 1e-9
    assert heading == pytest.approx(360.0)
    quarter = math.pi / 2
    assert path.flat_mm == pytest.approx(4 * (side + quarter * (ratio * t + k * t)))
    assert path.middle_mm == pytest.approx(4 * (side + quarter * (ratio * t + t / 2)))


@given(st.floats(0.3, 3.0), st.floats(1.0, 3.0), st.floats(20.0, 400.0))
def test_the_step_lifts_a_round_strip_by_its_height_and_ends_along_the_circle(
    t: float, ratio: float, radius: float
) -> None:
    step = joggle(ratio * t, t, t + 0.05, radius)
    path = StripPath(t, (0.0, radius), 180.0).roll(radius, 200.0)
    path = path.bend(ratio * t, -step.out_deg, 0.4).bend(ratio * t, step.back_deg, 0.4)
    (x, y), heading = path.end
    assert math.hypot(x, y) == pytest.approx(radius + t + 0.05)
    assert math.degrees(math.atan2(y, x)) % 360 == pytest.approx((heading - 90.0) % 360)


def test_the_step_of_a_flat_is_as_high_as_asked() -> None:
    step = joggle(1.0, 1.0, 1.05, None)
    path = StripPath(1.0, (0.0, 0.0), 0.0).straight(5.0)
    path = path.bend(1.0, -step.out_deg, 0.4).bend(1.0, step.back_deg, 0.4)
    assert path.end[0][1] == pytest.approx(-1.05)
    assert path.end[1] == pytest.approx(0.0)


def test_profile_is_sound_and_has_the_area_of_the_middle_times_t() -> None:
    path = StripPath(1.5, (0.0, 0.0), 0.0).straight(20.0).bend(2.0, 60.0, 0.4).roll(40.0, 100.0)
    section = profile(path)
    assert area_mm2(section) == pytest.approx(1.5 * path.middle_mm)
    assert shapely.Polygon(sampled(section)).is_valid


def test_places_off_the_strip_and_negative_flats_are_refused() -> None:
    path = StripPath(1.0, (0.0, 0.0), 0.0).straight(10.0)
    with pytest.raises(GeometryError, match="lies off"):
        path.at(11.0)
    with pytest.raises(GeometryError, match="smaller bend radius"):
        path.straight(-1.0)
    with pytest.raises(GeometryError, match="too narrow"):
        joggle(10.0, 1.0, 1.0, 5.0)


def test_the_rolling_note_names_the_diameter_that_springs_back_to_the_bore() -> None:
    """Gardiner's formula the other way round (SB-47)."""
    from fabgen.parts.can_sheet import sheet_can

    feed = sample_feed("wire", "rolled")
    wall = next(part for part in sheet_can(feed) if part.key == "wall")
    note = next(n for n in wall.notes if n.startswith("roll to about"))
    tool = float(note.split()[3]) / 2
    released = sheet_released_mm(tool, 1.0, 80.0, 70.0)
    assert released == pytest.approx(feed.sizes.can_bore_mm / 2, rel=0.02)
