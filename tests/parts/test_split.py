"""Where a printed body is cut: pure rules, no solids."""

from __future__ import annotations

import itertools
import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fabgen.errors import GeometryError
from fabgen.parts.contour import Circle
from fabgen.parts.print_rules import PrintRules
from fabgen.parts.split import Envelope, bed_turn_deg, footprint, free_bed_mm, plan_split


def rules(bed: tuple[float, float, float]) -> PrintRules:
    return PrintRules(0.4, 1.2, 0.2, 0.25, 2.0, 1.6, bed, 0.3)


def envelope(radius: float, height: float, clear: tuple[Circle, ...] = ()) -> Envelope:
    return Envelope("body", radius, radius, 0.0, height, clear)


@given(
    radius=st.floats(20, 300), height=st.floats(10, 400), bed=st.floats(120, 400), tall=st.floats(100, 400),
    angle=st.floats(0, 360), distance=st.floats(0.3, 0.9),
)
def test_every_plan_fits_and_keeps_clear(
    radius: float, height: float, bed: float, tall: float, angle: float, distance: float
) -> None:
    hole = Circle(
        distance * radius * math.cos(math.radians(angle)), distance * radius * math.sin(math.radians(angle)), 8.0
    )
    shape, limits = envelope(radius, height, (hole,)), rules((bed, bed, tall))
    try:
        split = plan_split(shape, limits)
    except GeometryError as error:
        assert "rolled" in str(error)
        assert radius > bed / 3 or height > tall
        return
    assert split.pieces <= 12
    free = free_bed_mm(limits)
    turn = bed_turn_deg(shape, split.sectors, free)
    assert turn is not None
    c, s = math.cos(math.radians(turn)), math.sin(math.radians(turn))
    xs = [c * x - s * y for x, y in footprint(shape, split.sectors)]
    assert max(xs) - min(xs) <= free[0] + 1e-9
    ends = (0.0, *split.levels_mm, height)
    assert all(0 < b - a <= tall for a, b in itertools.pairwise(ends))
    for cut in split.cut_angles_deg():
        off = (cut - angle + 180) % 360 - 180
        if abs(off) < 90:
            assert distance * radius * abs(math.sin(math.radians(off))) > 4.0


def test_a_body_that_fits_is_not_cut() -> None:
    split = plan_split(envelope(100.0, 80.0), rules((220.0, 220.0, 250.0)))
    assert split.pieces == 1
    assert split.cut_angles_deg() == ()


def test_ring_joints_stay_off_the_bands() -> None:
    body = Envelope("body", 50.0, 50.0, 0.0, 200.0, (), bands=((60.0, 120.0),))
    split = plan_split(body, rules((220.0, 220.0, 120.0)))
    assert split.levels_mm
    assert not any(60.0 < level < 120.0 for level in split.levels_mm)


def test_a_bed_too_low_for_a_joint_is_refused() -> None:
    with pytest.raises(GeometryError, match="too low for the joints"):
        plan_split(envelope(50.0, 100.0), rules((220.0, 220.0, 20.0)))


def test_a_connector_over_the_axis_does_not_forbid_all_cuts() -> None:
    wide = Envelope("body", 100.0, 100.0, 0.0, 40.0, (), prefer_clear=(Circle(5.0, 0.0, 36.0),))
    assert plan_split(wide, rules((150.0, 150.0, 150.0))).sectors > 1


def test_the_refusal_says_what_to_do_instead() -> None:
    cap = Envelope("cap", 400.0, 400.0, 0.0, 10.0, (), instead="leave the cap out")
    with pytest.raises(GeometryError, match=r"leave the cap out, or a larger limits\.bed_mm"):
        plan_split(cap, rules((150.0, 150.0, 150.0)))
