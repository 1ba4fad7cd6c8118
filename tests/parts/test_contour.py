"""Contours against shapely (a general-purpose geometry library) and closed forms."""

from __future__ import annotations

import math

import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from fabgen.errors import GeometryError
from fabgen.parts import contour as c
from fabgen.parts.kerf import compensated


def _ring() -> c.Contour:
    """A ring with a gap: every arc is followed by the vertex where it ends."""
    end = [math.radians(a) for a in (330.0, 30.0)]
    outer = c.Vertex(3 + 20 * math.cos(end[0]), -2 + 20 * math.sin(end[0]))
    inner = c.Vertex(3 + 15 * math.cos(end[1]), -2 + 15 * math.sin(end[1]))
    out = c.split_arc((3.0, -2.0), 20.0, 30.0, 300.0)
    back = c.split_arc((3.0, -2.0), 15.0, 330.0, -300.0)
    return c.Contour((*out, outer, *back, inner))


def test_gapped_ring_has_the_area_and_length_of_its_sectors() -> None:
    ring = _ring()
    assert c.signed_area_mm2(ring) == pytest.approx(math.pi * (20**2 - 15**2) * 300 / 360, rel=1e-12)
    assert c.length_mm(ring) == pytest.approx(math.radians(300) * 35 + 10, rel=1e-12)
    assert max(abs(v.bulge) for v in ring.vertices) <= 0.4143
    assert c.bounds_mm(ring)[0] == pytest.approx(3 - 20)


def test_sampled_points_keep_the_sagitta_and_the_area() -> None:
    polygon = shapely.Polygon(c.sampled(_ring(), 0.001))
    assert polygon.is_valid
    assert polygon.area == pytest.approx(c.area_mm2(_ring()), rel=2e-4)


@given(
    st.floats(5, 50), st.floats(5, 50), st.floats(0, 2.4), st.floats(-100, 100), st.floats(-100, 100),
    st.floats(-180, 180),
)  # fmt: skip
def test_moving_turning_and_mirroring_keep_area_and_length(
    a: float, b: float, r: float, x: float, y: float, turn: float
) -> None:
    box = c.rectangle((0, 0), (a, b), r)
    assert c.signed_area_mm2(box) == pytest.approx(a * b - (4 - math.pi) * r * r)
    assert c.length_mm(box) == pytest.approx(2 * (a + b) - (8 - 2 * math.pi) * r)
    for other in (c.moved(box, x, y, turn), c.mirrored_y(box)):
        assert c.signed_area_mm2(other) == pytest.approx(c.signed_area_mm2(box))
        assert c.length_mm(other) == pytest.approx(c.length_mm(box))
    assert c.signed_area_mm2(c.reversed_contour(box)) == pytest.approx(-c.signed_area_mm2(box))


def test_hull_of_two_circles_is_the_convex_hull() -> None:
    first, second = c.Circle(0, 0, 4.2), c.Circle(-3.8, 1.0, 3.0)
    hull = c.hull_of_two(first, second)
    discs = [shapely.Point(o.x_mm, o.y_mm).buffer(o.diameter_mm / 2, quad_segs=500) for o in (first, second)]
    assert c.area_mm2(hull) == pytest.approx(shapely.union_all(discs).convex_hull.area, rel=1e-5)
    with pytest.raises(GeometryError, match="inside the other"):
        c.hull_of_two(first, c.Circle(0.1, 0, 1.0))


def test_roundings_that_do_not_fit_are_refused() -> None:
    with pytest.raises(GeometryError, match="smaller corner radius"):
        c.rectangle((0, 0), (10, 3), 2.0)


@pytest.mark.parametrize("offset", [0.05, 0.2, -0.05, -0.2])
def test_kerf_moves_every_contour_like_a_round_offset(offset: float) -> None:
    shapes = (
        _ring(), c.rectangle((0, 0), (30, 20)), c.rectangle((0, 0), (30, 20), 3.0),
        c.polygon([(0, 0), (30, 0), (30, 20), (20, 20), (20, 10), (0, 10)]), c.Circle(1, 2, 8),
    )  # fmt: skip
    for shape in shapes:
        wanted = shapely.Polygon(c.sampled(shape, 0.0005)).buffer(offset, quad_segs=64)
        if offset < 0:
            # A shrunk outer corner stays sharp, as the library's does with mitred corners.
            wanted = shapely.Polygon(c.sampled(shape, 0.0005)).buffer(offset, join_style="mitre")
        moved = compensated(shape, offset)
        if offset > 0:
            assert shapely.Polygon(c.sampled(moved, 0.0005)).symmetric_difference(wanted).area < 0.05
        assert c.area_mm2(moved) == pytest.approx(wanted.area, rel=1e-3)


def test_kerf_of_nothing_changes_nothing_and_a_tiny_hole_is_refused() -> None:
    box = c.rectangle((0, 0), (3, 2))
    assert compensated(box, 0.0) is box
    with pytest.raises(GeometryError, match="smaller than the kerf"):
        compensated(c.Circle(0, 0, 0.3), -0.2)


def test_tidied_drops_points_on_a_line_and_keeps_corners() -> None:
    raw = c.polygon([(0, 0), (5, 0), (10, 0), (10, 0), (10, 5), (0, 5)])
    assert len(c.tidied(raw).vertices) == 4
