"""The feed in its can: elimination, scale, losses, convergence, decay below cut-off, bad input."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from fabgen.errors import GeometryError
from fabgen.fields.geometry import SPEED_OF_LIGHT, CanGeometry, ChokeGeometry, FeedGeometry, LoopGeometry
from fabgen.fields.mesh import Mesh, check_mesh, merged, single
from fabgen.fields.model import FeedSolver, SurfaceImpedance, solve_mesh
from fabgen.fields.plan import plan_mesh
from fabgen.fields.surface_can import rim_nodes
from fabgen.fields.surfaces import feed_mesh
from fabgen.fields.sweep import adaptive_sweep, fit_rational
from fabgen.fields.system import QuadratureSettings, check_memory
from tests.fields.structures import ring_loop

WAVE = 0.2110611
TARGET_HZ = SPEED_OF_LIGHT / WAVE


def a_loop(form: str = "sheet") -> LoopGeometry:
    band = 0.036 * WAVE
    radius = WAVE / (2 * math.pi)
    return LoopGeometry(
        form,
        radius,
        0.15 * WAVE,
        band,
        band,
        band + 0.008,
        radius - band / 2 - 0.004,
        0.003 if form == "sheet" else 0.006,
        0.06 * WAVE,
        0.004,
    )


def a_feed(form: str = "sheet", **can: object) -> FeedGeometry:
    return FeedGeometry(replace(CanGeometry(0.52 * WAVE, 0.3 * WAVE), **can), a_loop(form))  # type: ignore[arg-type]


FORMS = pytest.mark.parametrize("form", ["wire", "sheet"])
FLATS = {"flats": 8}
CHOKE = {"choke": ChokeGeometry(0.78 * WAVE, 0.1 * WAVE, 0.2 * WAVE)}
CANS = pytest.mark.parametrize("can", [{}, FLATS, CHOKE], ids=["round", "flats", "choke"])


@FORMS
@CANS
def test_lossless_power_balance(form: str, can: dict[str, object]) -> None:
    feed = a_feed(form, **can)
    solution = FeedSolver(plan_mesh(feed, WAVE, 12)).solve(feed, TARGET_HZ)
    assert abs(solution.power_balance) < 0.005
    assert solution.residual < 1e-10
    assert solution.impedance_ohm.real > 0


@pytest.mark.parametrize(
    "surface_ohm",
    # copper and brass at 1420 MHz (SK-23, SK-29: 9.833 and 18.58 milliohm; computed with an independent script) and
    # a lining of 0.2 ohm per square
    [0.009833 * (1 + 1j), 0.01858 * (1 + 1j), 0.2],
)
def test_loss_is_what_is_missing_from_the_far_field(surface_ohm: complex) -> None:
    feed = a_feed("wire")
    surface = SurfaceImpedance(surface_ohm, surface_ohm)
    solution = FeedSolver(plan_mesh(feed, WAVE, 12)).solve(feed, TARGET_HZ, surface)
    missing = solution.input_power_w - solution.radiated_power_w
    assert missing == pytest.approx(solution.ohmic_power_w, rel=0.01)


@FORMS
@CANS
def test_block_elimination_equals_full_solve(form: str, can: dict[str, object]) -> None:
    feed = a_feed(form, **can)
    plan = plan_mesh(feed, WAVE, 7)
    kept = FeedSolver(plan).solve(feed, TARGET_HZ)
    full = solve_mesh(feed_mesh(feed, plan)[0], TARGET_HZ)
    assert kept.impedance_ohm == pytest.approx(full.impedance_ohm, rel=1e-8)


@pytest.mark.parametrize("ratio", [0.3, 1.0, 1.6])
def test_a_pair_equals_two_solves(ratio: float) -> None:
    feed = a_feed()
    solver = FeedSolver(plan_mesh(feed, WAVE, 12))
    pair = solver.solve_pair(feed, ratio * TARGET_HZ, 0.004)
    for found in pair:
        alone = solver.solve(feed, found.frequency_hz).impedance_ohm
        assert found.impedance_ohm == pytest.approx(alone, rel=1e-7)
        assert found.residual < 1e-9


def test_changed_loop_with_kept_can_equals_fresh_solve() -> None:
    feed = a_feed("wire")
    plan = plan_mesh(feed, WAVE, 12)
    solver = FeedSolver(plan)
    solver.solve(feed, TARGET_HZ)
    other = replace(feed, loop=replace(feed.loop, tap_height_m=0.07 * WAVE, height_m=0.16 * WAVE))
    assert solver.solve(other, TARGET_HZ).impedance_ohm == pytest.approx(
        FeedSolver(plan).solve(other, TARGET_HZ).impedance_ohm, rel=1e-9
    )


def test_scale_invariance() -> None:
    feed = a_feed()
    double = FeedGeometry(
        CanGeometry(2 * feed.can.radius_m, 2 * feed.can.depth_m),
        replace(feed.loop, **{n: 2 * getattr(feed.loop, n) for n in vars(feed.loop) if n.endswith("_m")}),
    )
    first = FeedSolver(plan_mesh(feed, WAVE, 12)).solve(feed, TARGET_HZ)
    second = FeedSolver(plan_mesh(double, 2 * WAVE, 12)).solve(double, TARGET_HZ / 2)
    assert second.impedance_ohm == pytest.approx(first.impedance_ohm, rel=1e-9)


@FORMS
def test_impedance_is_smooth_in_the_tap_height(form: str) -> None:
    feed = a_feed(form)
    solver = FeedSolver(plan_mesh(feed, WAVE, 12))
    taps = np.linspace(0.05, 0.07, 5) * WAVE
    r = [
        solver.solve(replace(feed, loop=replace(feed.loop, tap_height_m=float(t))), TARGET_HZ).impedance_ohm.real
        for t in taps
    ]
    assert np.all(np.diff(r) > 0)
    # a straight line through the ends leaves only curvature, no noise of remeshing
    fit = np.polynomial.Polynomial.fit(taps, r, 3)(taps)
    assert np.abs(fit - r).max() < 0.02


@FORMS
@pytest.mark.parametrize(
    "can",
    [{}, pytest.param(FLATS, marks=pytest.mark.thorough), pytest.param(CHOKE, marks=pytest.mark.thorough)],
    ids=["round", "flats", "choke"],
)
def test_quadrature_is_fine_enough(form: str, can: dict[str, object]) -> None:
    feed = a_feed(form, **can)
    plan = plan_mesh(feed, WAVE, 12)
    usual = FeedSolver(plan).solve(feed, TARGET_HZ).impedance_ohm
    finer = FeedSolver(plan, QuadratureSettings(6, 12, 12, 3.0)).solve(feed, TARGET_HZ).impedance_ohm
    assert abs(finer - usual) < 0.005 * abs(usual)


@pytest.mark.slow
@pytest.mark.thorough
@FORMS
def test_half_edge_length_changes_little(form: str) -> None:
    feed = a_feed(form)
    values = [FeedSolver(plan_mesh(feed, WAVE, d)).solve(feed, TARGET_HZ).impedance_ohm for d in (16, 32)]
    offset = 1j * values[0].imag
    gamma = [(z - offset - 50) / (z - offset + 50) for z in values]
    # strips here keep one width on both meshes, so this bounds the mesh's own error
    assert abs(gamma[0] - gamma[1]) < 0.03


def test_field_in_a_deep_can_below_cut_off_decays_as_the_mode() -> None:
    # TE11: k_c = 1.841184/a (EM-01, Marcuvitz; computed with an independent script), alpha = sqrt(k_c^2 - k^2)
    radius, depth = 0.24 * WAVE, 1.5 * WAVE
    feed = FeedGeometry(
        CanGeometry(radius, depth),
        replace(
            a_loop("wire"),
            radius_m=0.1 * WAVE,
            height_m=0.1 * WAVE,
            band_m=0.02 * WAVE,
            leg_band_m=0.015 * WAVE,
            leg_pitch_m=0.05 * WAVE,
            bend_radius_m=0.015 * WAVE,
            tap_height_m=0.04 * WAVE,
        ),
    )
    solution = FeedSolver(plan_mesh(feed, WAVE, 14)).solve(feed, TARGET_HZ)
    # far from the loop, whose other modes die out sooner, and from the open end
    heights = np.array([0.8, 1.1]) * WAVE
    field = [_axial_field(solution.elements.position_m, solution.elements.moment_am, z) for z in heights]
    k = 2 * math.pi / WAVE
    alpha = math.sqrt((1.841184 / radius) ** 2 - k**2)
    measured = math.log(abs(field[0]) / abs(field[1])) / (heights[1] - heights[0])
    assert measured == pytest.approx(alpha, rel=0.03)


def _axial_field(position: np.ndarray, moment: np.ndarray, z: float) -> complex:
    """E_y on the axis by the field of short current elements (far enough from every surface)."""
    k = 2 * math.pi / WAVE
    r = np.array([0.0, 0.0, z]) - position
    distance = np.linalg.norm(r, axis=1)
    unit = r / distance[:, None]
    kr = k * distance
    green = np.exp(-1j * kr) / (4 * math.pi * distance)
    across = 1 - 1j / kr - 1 / kr**2
    along = -1 + 3j / kr + 3 / kr**2
    radial = np.einsum("nx,nx->n", unit, moment)
    return complex((-1j * k * 376.730313 * green * (across * moment[:, 1] + along * radial * unit[:, 1])).sum())


@pytest.mark.slow
@pytest.mark.thorough
def test_sweep_against_direct_solves() -> None:
    feed = a_feed("wire")
    solver = FeedSolver(plan_mesh(feed, WAVE, 16))
    capacitor = 1.2e-12

    def sample(x: float) -> tuple[np.ndarray, np.ndarray]:
        pair = solver.solve_pair(feed, x * TARGET_HZ, 0.005 if x < 1.2 else -0.005)
        return np.array([p.frequency_hz / TARGET_HZ for p in pair]), np.array([[p.impedance_ohm] for p in pair])

    def reflection(x: np.ndarray, values: np.ndarray) -> np.ndarray:
        z = values[:, 0] + 1 / (2j * np.pi * x * TARGET_HZ * capacitor)
        return (z - 50) / (z + 50)

    sweep = adaptive_sweep(sample, 0.3, 2.2, reflection, 1.0)
    assert sweep.solves <= 15
    points = np.linspace(0.31, 2.19, 40)
    direct = np.array([[solver.solve(feed, x * TARGET_HZ).impedance_ohm] for x in points])
    assert np.abs(reflection(points, direct) - reflection(points, sweep.fit(points))).max() < 0.005


def test_rational_fit_recovers_a_resonant_circuit() -> None:
    # series R L C with a lossy coil: a rational function of j f, so the fit is exact
    f = np.linspace(0.3, 2.0, 7)
    exact = lambda x: (2 + 6j * x + 1 / (0.3 + 0.4j * x))[:, None]  # noqa: E731
    fit = fit_rational(f, exact(f))
    dense = np.linspace(0.3, 2.0, 57)
    np.testing.assert_allclose(fit(dense), exact(dense), rtol=1e-8)


def test_area_of_round_rim_and_corners_of_flats() -> None:
    for flats in (0, 6, 8, 12):
        plan = rim_nodes(CanGeometry(1.0, 1.0, flats), 12)
        x, y = plan[:, 0], plan[:, 1]
        area = abs(np.sum(x[:-1] * y[1:] - x[1:] * y[:-1]))
        expected = math.pi if flats == 0 else flats * math.tan(math.pi / flats)
        assert area == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"radius_m": 0.53 * WAVE}, "make the loop smaller or the bore larger"),
        ({"tap_height_m": 0.149 * WAVE}, "does not fit on the straight bar"),
        ({"leg_pitch_m": 0.03 * WAVE}, "make the pitch larger"),
        ({"height_m": math.nan}, "a finite number is needed"),
        ({"band_m": -0.001}, "must be above zero"),
    ],
)
def test_clashing_sizes_are_refused_with_a_cure(change: dict[str, float], message: str) -> None:
    feed = a_feed()
    plan = plan_mesh(feed, WAVE, 12)
    with pytest.raises(GeometryError, match=message):
        feed_mesh(replace(feed, loop=replace(feed.loop, **change)), plan)


def test_bad_meshes_are_refused() -> None:
    good = feed_mesh(a_feed(), plan_mesh(a_feed(), WAVE, 12))[0]
    with pytest.raises(GeometryError, match=r"0\.2 is allowed"):
        check_mesh(good, WAVE / 3)
    apart = merged([good, single(np.eye(3) + 5.0, np.array([[0, 1, 2]]))], 1e-9)
    with pytest.raises(GeometryError, match="2 pieces that do not touch"):
        check_mesh(apart, 100.0)
    broken = Mesh(
        np.where(np.arange(len(good.vertices_m))[:, None] == 3, np.nan, good.vertices_m), good.triangles, good.label
    )
    with pytest.raises(GeometryError, match="not finite"):
        check_mesh(broken, WAVE)
    with pytest.raises(GeometryError, match="port is not on an edge"):
        solve_mesh(replace(good, label=np.where(good.label == 5, 4, good.label)), TARGET_HZ)
    with pytest.raises(GeometryError, match="GiB"):
        check_memory(100_000, 2.0**30)


def test_surfaces_that_cut_each_other_are_found() -> None:
    from fabgen.fields.intersect import check_no_crossings

    ring = ring_loop(0.1, 0.004, 0.05, 12)
    sheet = single(np.array([[0.05, -0.1, 0.05], [0.2, 0.3, 0.05], [0.0, 0.3, 0.0501]]), np.array([[0, 1, 2]]))
    with pytest.raises(GeometryError, match="two surfaces cut each other near"):
        check_no_crossings(merged([ring, sheet], 1e-9))
    check_no_crossings(ring)
