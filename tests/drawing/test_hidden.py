"""Hidden-line views against shapes whose pictures are known by geometry."""

from __future__ import annotations

import math

import pytest
import shapely

from fabgen.drawing.hidden import ABOVE, APERTURE, FROM_GAP, GAP, ISOMETRIC, SIDE, Direction, look
from fabgen.drawing.model import Arc, Line, Polyline
from fabgen.drawing.section import cut_faces, hatched, opened
from fabgen.parts import kernel


def _length(line: Line) -> float:
    return math.hypot(line.x1 - line.x0, line.y1 - line.y0)


@pytest.mark.parametrize("direction", [SIDE, APERTURE, GAP, ABOVE, FROM_GAP, ISOMETRIC])
def test_directions_are_right_handed(direction: Direction) -> None:
    r, u, n = direction.right, direction.up, direction.towards_eye
    for v in (r, u, n):
        assert math.sqrt(sum(c * c for c in v)) == pytest.approx(1, abs=1e-9)
    cross = (r[1] * u[2] - r[2] * u[1], r[2] * u[0] - r[0] * u[2], r[0] * u[1] - r[1] * u[0])
    assert cross == pytest.approx(n, abs=1e-9)


def test_cylinder_from_the_side_is_a_rectangle() -> None:
    (seen,) = look([kernel.rod((0, 0, 0), (0, 0, 40), 30)], GAP)
    assert all(isinstance(c, Line) for c in seen.visible)
    lengths = sorted(_length(c) for c in seen.visible if isinstance(c, Line))
    assert lengths == pytest.approx([30, 30, 40, 40], abs=1e-3)


def test_cylinder_from_above_is_one_circle() -> None:
    (seen,) = look([kernel.rod((5, 7, 0), (5, 7, 40), 30)], ABOVE)
    (circle,) = seen.visible
    assert isinstance(circle, Arc)
    assert (circle.cx, circle.cy, circle.rx, circle.ry) == pytest.approx((5, 7, 15, 15), abs=1e-4)
    assert circle.sweep_deg == pytest.approx(360)


def test_tilted_cylinder_shows_an_ellipse_of_the_right_axes() -> None:
    eye = (0.0, -math.sin(math.radians(30)), math.cos(math.radians(30)))
    (seen,) = look([kernel.rod((0, 0, 0), (0, 0, 40), 30)], Direction("t", eye, (1.0, 0.0, 0.0)))
    arcs = [c for c in seen.visible if isinstance(c, Arc)]
    assert {round(c.rx, 3) for c in arcs} == {15.0}
    assert {round(c.ry, 3) for c in arcs} == {round(15 * math.cos(math.radians(30)), 3)}


def test_bore_is_hidden_and_dashed_lines_never_lie_on_visible_ones() -> None:
    tube = kernel.tube((0, 0, 0), (0, 0, 40), 30, 20)
    (seen,) = look([tube], GAP, with_hidden=True)
    hidden = [c for c in seen.hidden if isinstance(c, Line)]
    assert sorted(abs(c.x0) for c in hidden) == pytest.approx([10, 10], abs=1e-3)
    visible = shapely.union_all([shapely.LineString([(c.x0, c.y0), (c.x1, c.y1)]) for c in seen.visible])  # type: ignore[union-attr]
    for line in hidden:
        shared = shapely.LineString([(line.x0, line.y0), (line.x1, line.y1)]).intersection(visible.buffer(1e-3))
        assert shared.length < 0.05


def test_one_body_hides_another() -> None:
    near, far = kernel.box((-20, -10, 0), (20, -5, 40)), kernel.box((-10, 5, 10), (10, 8, 30))
    first, second = look([near, far], GAP)
    assert len(first.visible) == 4
    assert second.visible == ()


def test_views_do_not_depend_on_the_run() -> None:
    shape = kernel.tube((0, 0, 0), (0, 0, 40), 30, 20)
    assert look([shape], ISOMETRIC) == look([shape], ISOMETRIC)


def test_the_fast_way_along_an_axis_agrees_with_the_exact_one(monkeypatch: pytest.MonkeyPatch) -> None:
    from fabgen.drawing import hidden

    posts = [kernel.rod((x, y, 3), (x, y, 12), 4) for x in (-30, 0, 30) for y in (-30, 0, 30)]
    plate = kernel.fused(kernel.box((-50, -50, 0), (50, 50, 3)), *posts)
    exact = look([plate], ABOVE)[0].visible
    monkeypatch.setattr(hidden, "MANY_FACES", 5)
    fast = look([plate], ABOVE)[0].visible

    def drawn(curves: tuple[Line | Arc | Polyline, ...]) -> shapely.Geometry:
        lines = [c.points(5) if isinstance(c, Arc) else ((c.x0, c.y0), (c.x1, c.y1)) for c in curves]  # type: ignore[union-attr]
        return shapely.union_all([shapely.LineString(p) for p in lines])

    assert drawn(exact).hausdorff_distance(drawn(fast)) < 0.05


def test_section_area_is_that_of_the_profile() -> None:
    can = kernel.revolved([(0, 0), (40, 0), (40, 30), (42, 30), (42, -3), (0, -3)])
    half = opened(can, SIDE)
    faces = cut_faces(half, SIDE)
    # Profile: floor 3 x 84 and two walls 2 x 30.
    assert sum(f.area for f in faces) == pytest.approx(3 * 84 + 2 * 2 * 30, rel=1e-6)


def test_hatching_stays_inside_and_thin_faces_are_filled() -> None:
    face = shapely.Polygon([(0, 0), (40, 0), (40, 20), (0, 20)], [[(10, 5), (20, 5), (20, 15), (10, 15)]])
    lines = hatched([face], 1.0, 45.0)
    assert len(lines) > 10
    for line in lines:
        assert isinstance(line, Line)
        assert face.buffer(1e-6).covers(shapely.LineString([(line.x0, line.y0), (line.x1, line.y1)]))
    thin = hatched([shapely.box(0, 0, 40, 1)], 0.5, 45.0)
    assert [type(item) for item in thin] == [Polyline]


def test_part_beyond_the_plane_is_kept_and_before_it_dropped() -> None:
    beyond, before = kernel.box((5, 0, 0), (9, 4, 4)), kernel.box((-9, 0, 0), (-5, 4, 4))
    assert opened(beyond, SIDE) is beyond
    assert opened(before, SIDE) is None
