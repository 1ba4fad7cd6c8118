"""The measures of printability find what they are for, on bodies whose answer is plain."""

from __future__ import annotations

import math

import pytest

from fabgen.parts import kernel
from tests.parts.printing import overhangs_mm, trimesh_of, wall_thicknesses_mm


def test_a_thin_plate_is_measured_through_its_thickness() -> None:
    plate = kernel.box((0, 0, 0), (30, 30, 0.9))
    assert wall_thicknesses_mm(plate).min() == pytest.approx(0.9, abs=1e-6)


def test_a_table_has_an_overhang_as_wide_as_its_top_beyond_the_leg() -> None:
    table = kernel.fused(kernel.box((0, 0, 0), (5, 20, 10)), kernel.box((0, 0, 10), (17, 20, 12)), what="table")
    assert overhangs_mm(table) == pytest.approx([12.0], abs=0.1)


@pytest.mark.parametrize(("angle_deg", "count"), [(40.0, 1), (50.0, 0)])
def test_a_cone_prints_from_45_degrees_on(angle_deg: float, count: int) -> None:
    rise = 10 * math.tan(math.radians(angle_deg))
    cone = kernel.revolved(((0, 0), (10, 0), (20, rise), (20, rise + 2), (0, rise + 2)))
    assert len(overhangs_mm(cone)) == count


def test_a_level_teardrop_hole_needs_no_support() -> None:
    body = kernel.box((-10, -10, 0), (10, 10, 20))
    hole = kernel.cut(body, kernel.teardrop((0, -11, 10), (0, 11, 10), 6.0))
    assert max(overhangs_mm(hole), default=0.0) < 2.0
    assert trimesh_of(hole).euler_number == 0
    round_hole = kernel.cut(body, kernel.rod((0, -11, 10), (0, 11, 10), 6.0))
    assert max(overhangs_mm(round_hole)) > 4.0
