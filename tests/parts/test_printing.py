"""The measures of printability find what they are for, on bodies whose answer is plain."""

from __future__ import annotations

import math

import pytest

from fabgen.parts import kernel
from tests.parts.printing import overhangs_mm, trimesh_of, wall_thicknesses_mm


def test_a_thin_plate_is_measured_through_its_thickness() -> None:
    plate = kernel.box((0, 0, 0), (30, 30, 0.9))
    assert wall_thicknesses_mm(plate).min() == pytest.approx(0.9, abs=1e-6)


def test_a_table_on_one_leg_has_a_ledge_and_on_two_a_bridge() -> None:
    top, leg = kernel.box((0, 0, 10), (17, 20, 12)), kernel.box((0, 0, 0), (5, 20, 10))
    (one,) = overhangs_mm(kernel.fused(leg, top, what="table"))
    assert one.bridge_mm == 0.0
    # Points are taken inside the facets, so the last tenth of the way to the free edge is not seen.
    assert 0.85 * 12.0 < one.ledge_mm <= 12.0
    (two,) = overhangs_mm(kernel.fused(leg, top, kernel.box((12, 0, 0), (17, 20, 10)), what="table"))
    assert (two.bridge_mm, two.ledge_mm) == pytest.approx((7.0, 0.0), abs=1e-6)


def test_a_ledge_under_eight_millimetres_is_no_bridge() -> None:
    shelf = kernel.fused(kernel.box((0, 0, 0), (5, 20, 20)), kernel.box((5, 0, 10), (9, 20, 12)), what="shelf")
    (found,) = overhangs_mm(shelf)
    assert found.ledge_mm > 3.0
    assert found.height_mm == pytest.approx(10.0)


def test_a_ceiling_with_a_hole_is_a_ledge_beside_the_hole() -> None:
    room = kernel.cut(kernel.box((0, 0, 0), (20, 20, 12)), kernel.box((5, -1, 0), (12, 21, 10)))
    (bridge,) = overhangs_mm(room)
    assert (bridge.bridge_mm, bridge.ledge_mm) == pytest.approx((7.0, 0.0), abs=1e-6)
    (holed,) = overhangs_mm(kernel.cut(room, kernel.box((7, 2, 9), (10, 18, 13))))
    assert 1.0 < holed.ledge_mm <= 2.0


@pytest.mark.parametrize(("angle_deg", "count"), [(40.0, 1), (50.0, 0)])
def test_a_cone_prints_from_45_degrees_on(angle_deg: float, count: int) -> None:
    rise = 10 * math.tan(math.radians(angle_deg))
    cone = kernel.revolved(((0, 0), (10, 0), (20, rise), (20, rise + 2), (0, rise + 2)))
    assert len(overhangs_mm(cone)) == count


def test_a_level_teardrop_hole_needs_no_support() -> None:
    body = kernel.box((-10, -10, 0), (10, 10, 20))
    hole = kernel.cut(body, kernel.teardrop((0, -11, 10), (0, 11, 10), 6.0))
    (flat,) = overhangs_mm(hole)
    assert flat.bridge_mm < 2.0
    assert flat.ledge_mm == 0.0
    assert trimesh_of(hole).euler_number == 0
    round_hole = kernel.cut(body, kernel.rod((0, -11, 10), (0, 11, 10), 6.0))
    assert max(o.bridge_mm for o in overhangs_mm(round_hole)) > 4.0
