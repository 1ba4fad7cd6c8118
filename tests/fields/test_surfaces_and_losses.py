"""Parts of the field computation on their own: junctions, overlap integrals, the choke's surface, memory."""

from __future__ import annotations

import math
import os
from dataclasses import replace

import numpy as np
import pytest

from fabgen.errors import GeometryError, NumericalError
from fabgen.fields.factors import SymmetricFactors
from fabgen.fields.functions import edge_functions
from fabgen.fields.geometry import SPEED_OF_LIGHT, CanGeometry, ChokeGeometry, FeedGeometry
from fabgen.fields.mesh import CHOKE, WALL, single
from fabgen.fields.model import FeedSolver, FieldSolution, SurfaceImpedance, solve_mesh
from fabgen.fields.plan import plan_mesh
from fabgen.fields.quadrature import triangle_rule
from fabgen.fields.strips import crowding, lone_strip_width_m
from fabgen.fields.surface_can import wall_heights
from fabgen.fields.surfaces import feed_mesh
from fabgen.fields.system import add_overlap
from tests.fields.structures import ring_loop
from tests.fields.test_feed_solver import TARGET_HZ, WAVE, a_feed, a_loop


def _three_sheets() -> tuple[np.ndarray, np.ndarray]:
    points = np.array([[0, 0, 0], [1, 0, 0], [0.3, 0.9, 0], [0.4, -1.1, 0.1], [0.6, 0.2, 0.8]], dtype=float)
    return points, np.array([[0, 1, 2], [0, 1, 3], [0, 1, 4]])


def test_edge_of_three_sheets_carries_two_functions_and_no_net_charge() -> None:
    points, triangles = _three_sheets()
    functions = edge_functions(single(points, triangles))
    assert functions.count == 2
    # each function flows out of one sheet and into another (Kirchhoff at the edge)
    for unknown in range(2):
        assert (functions.sign * (functions.dof == unknown)).sum() == 0.0


def test_overlap_against_the_definition_of_the_functions() -> None:
    # f = +- l/(2A) (r - v) (Rao, Wilton, Glisson 1982); a rule of degree 6 is exact for the product of two
    points, triangles = _three_sheets()
    mesh = single(points, triangles)
    f = edge_functions(mesh)
    sheet = np.array([0.2, 0.5, 1.5])
    bary, weight = triangle_rule(12)
    expected = np.zeros((f.count, f.count))
    for t, area in enumerate(mesh.areas_m2()):
        r = bary @ mesh.corners_m[t]
        values = np.zeros((f.count, len(r), 3))
        for corner in range(3):
            for slot in range(2):
                if f.dof[t, corner, slot] >= 0:
                    scale = f.sign[t, corner, slot] * f.length_m[t, corner] / (2 * area)
                    values[f.dof[t, corner, slot]] += scale * (r - mesh.corners_m[t, corner])
        expected += sheet[t] * area * np.einsum("i,mix,nix->mn", weight, values, values)
    np.testing.assert_allclose(add_overlap(np.zeros((f.count, f.count)), mesh, f, sheet), expected, rtol=1e-12)


@pytest.mark.parametrize("floor", [0.0, 0.1])
def test_choke_has_the_surface_of_ring_and_wall(floor: float) -> None:
    # half of pi (R^2 - r^2) + 2 pi R d; the round plan is a polygon of the circle's area
    outer, depth = 0.78 * WAVE, 0.2 * WAVE
    feed = a_feed("wire", choke=ChokeGeometry(outer, floor * WAVE, depth))
    mesh, _ = feed_mesh(feed, plan_mesh(feed, WAVE, 12))
    measured = mesh.areas_m2()[mesh.label == CHOKE].sum()
    expected = math.pi / 2 * (outer**2 - feed.can.radius_m**2) + math.pi * outer * depth
    assert measured == pytest.approx(expected, rel=2e-3)
    height = mesh.corners_m[mesh.label == CHOKE][..., 2]
    assert height.min() == pytest.approx(floor * WAVE)
    assert height.max() == pytest.approx(floor * WAVE + depth)


def test_solver_refuses_more_unknowns_than_memory(monkeypatch: pytest.MonkeyPatch) -> None:
    feed = a_feed()
    monkeypatch.setattr(os, "sysconf", lambda _: 1)
    with pytest.raises(GeometryError, match="GiB"):
        FeedSolver(plan_mesh(feed, WAVE, 12)).solve(feed, TARGET_HZ)


@pytest.mark.parametrize("form", ["wire", "sheet"])
@pytest.mark.parametrize("flats", [0, 8])
def test_no_edge_is_too_long_for_the_top_of_the_sweep(form: str, flats: int) -> None:
    for share in (0.40, 0.44, 0.48, 0.52, 0.56, 0.60, 0.66, 0.8):
        feed = FeedGeometry(CanGeometry(share * WAVE, 0.28 * WAVE, flats), a_loop(form))
        plan = plan_mesh(feed, WAVE)
        moved = replace(feed, can=replace(feed.can, radius_m=1.03 * feed.can.radius_m, depth_m=1.05 * feed.can.depth_m))
        for geometry in (feed, moved):
            assert feed_mesh(geometry, plan)[0].longest_edge_m() * 2.2 < 0.2 * WAVE


def test_a_wall_lower_than_an_edge_still_rises() -> None:
    for depth in (0.015, 0.3):
        choke = ChokeGeometry(0.78 * WAVE, 0.295 * WAVE if depth > 0.1 else 0.0, 0.01 * WAVE)
        feed = FeedGeometry(CanGeometry(0.52 * WAVE, depth * WAVE, 0, choke), a_loop())
        plan = plan_mesh(feed, WAVE)
        heights = wall_heights(feed.can, plan)
        assert np.all(np.diff(heights) > 0)
        mesh = feed_mesh(feed, plan)[0]
        wall = mesh.areas_m2()[mesh.label == WALL].sum()
        assert wall == pytest.approx(math.pi * 0.52 * WAVE * depth * WAVE, rel=0.01)


def test_bars_too_near_the_wall_are_refused() -> None:
    loop = replace(a_loop("wire"), radius_m=0.19 * WAVE, leg_pitch_m=0.16 * WAVE)
    with pytest.raises(GeometryError, match=r"a bore of .* mm would do"):
        plan_mesh(FeedGeometry(CanGeometry(0.22 * WAVE, 0.3 * WAVE), loop), WAVE)


@pytest.mark.parametrize("cells", [3, 5, 9])
def test_a_wire_loses_what_its_perimeter_says(cells: int) -> None:
    # current of a lone wire: Rs / (2 pi a) per metre (Pozar; Ramo, Whinnery, Van Duzer; SK-02 from memory)
    radius, wire = 1.0 / (2 * math.pi), 0.002
    width = lone_strip_width_m(wire, cells)
    share = width / (2 * math.pi * wire) / crowding(cells)
    resistance = 0.01
    mesh = ring_loop(radius, width / 4, 0.0, 40, cells)
    solution = solve_mesh(mesh, SPEED_OF_LIGHT, SurfaceImpedance(0.0, resistance * share))
    step = math.pi / 40
    current = [_ring_current(solution, (i + 0.5) * step, step) for i in range(40)]
    length = 2 * radius * step * sum(abs(i) ** 2 for i in current)
    assert solution.ohmic_power_w == pytest.approx(0.5 * resistance / (2 * math.pi * wire) * length, rel=0.04)


def _ring_current(solution: FieldSolution, phi: float, step: float) -> complex:
    """Current along phi, from the elements of one cell of the half ring: moment over the cell's length."""
    place, moment = solution.elements.position_m, solution.elements.moment_am
    angle = np.arctan2(place[:, 1], place[:, 0])
    cell = np.abs(angle - phi) < step / 2
    along = -moment[cell, 0] * np.sin(angle[cell]) + moment[cell, 1] * np.cos(angle[cell])
    return complex(along.sum() / (step * np.linalg.norm(place[cell][:, :2], axis=1).mean()))


@pytest.mark.parametrize("bend_mm", [2.0, 4.0, 4.3, 6.0])
def test_a_bend_too_wide_for_the_meshed_tab_is_drawn_tighter(bend_mm: float) -> None:
    feed = a_feed("sheet")
    feed = replace(feed, loop=replace(feed.loop, bend_radius_m=bend_mm / 1e3))
    mesh, _ = feed_mesh(feed, plan_mesh(feed, WAVE, 10))
    areas = mesh.areas_m2()
    assert areas.min() > 1e-3 * areas.mean()


def test_a_tab_shorter_than_nothing_is_refused() -> None:
    feed = a_feed("sheet")
    short = replace(feed, loop=replace(feed.loop, leg_x_m=feed.loop.radius_m - feed.loop.band_m / 2))
    with pytest.raises(GeometryError, match="too short to be computed; make the ring's strip narrower"):
        feed_mesh(short, plan_mesh(feed, WAVE, 10))


def test_bars_past_the_inner_edge_of_the_meshed_ring_are_refused() -> None:
    feed = a_feed("sheet")
    loop = feed.loop
    reach = loop.leg_pitch_m / 2 + loop.leg_band_m / 2
    wide = replace(feed, loop=replace(loop, band_m=2.2 * (loop.radius_m - reach)))
    with pytest.raises(GeometryError, match="past the ring's inner edge at"):
        feed_mesh(wide, plan_mesh(feed, WAVE, 10))


@pytest.mark.parametrize("frequency_hz", [math.nan, math.inf, -1e9])
def test_frequency_that_is_no_positive_number_is_refused(frequency_hz: float) -> None:
    feed = a_feed()
    with pytest.raises(GeometryError, match="a finite number above zero is needed"):
        FeedSolver(plan_mesh(feed, WAVE, 8)).solve(feed, frequency_hz)


def test_factors_that_are_no_good_stop_a_sweep(monkeypatch: pytest.MonkeyPatch) -> None:
    class Spoilt(SymmetricFactors):
        def solve(self, right: np.ndarray) -> np.ndarray:
            return np.ones_like(super().solve(right))

    monkeypatch.setattr("fabgen.fields.model.SymmetricFactors", Spoilt)
    feed = a_feed()
    with pytest.raises(NumericalError, match="has a residual of"):
        FeedSolver(plan_mesh(feed, WAVE, 8)).solve_pair(feed, TARGET_HZ, 0.005)
