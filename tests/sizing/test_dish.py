"""Dish integrals against the published behaviour of cos^n feeds and against geometry."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fabgen.errors import JobError, NumericalError
from fabgen.sizing.dish import (
    DishFigures,
    beam,
    co_cross,
    dish_figures,
    edge_taper_db,
    half_angle_rad,
    half_power_width_deg,
    plane_cut,
    sample_pattern,
)
from fabgen.sizing.solver import Complex, Pattern, Real

WAVELENGTH_MM = 211.0


def cos_feed(n: float, shift_mm: float = 0.0, cross: float = 0.0) -> Pattern:
    """Pure co-polar feed with G = 2 (n + 1) cos^n in the front half, source at z = shift."""

    def pattern(theta: Real, phi: Real) -> tuple[Complex, Complex]:
        cosine = np.maximum(np.cos(theta), 0.0)
        field = cosine ** (n / 2) * np.exp(2j * np.pi * shift_mm / WAVELENGTH_MM * np.cos(theta))
        e_theta = field * (np.sin(phi) + cross * np.cos(phi))
        e_phi = field * (np.cos(phi) - cross * np.sin(phi))
        return e_theta, e_phi

    return pattern


def figures_of(pattern: Pattern, half_angle: float) -> DishFigures:
    return dish_figures(sample_pattern(pattern, half_angle), WAVELENGTH_MM)


def efficiency(n: float, half_angle_deg: float) -> float:
    return figures_of(cos_feed(n), math.radians(half_angle_deg)).aperture_efficiency


# EM-39, EM-40, EM-42: optimum of cos^n feeds; Balanis fig. 15.19/15.20 (curves, 0.82..0.83);
# computed with an independent script.
OPTIMA = [
    (2, 65.989, 0.82899, 0.9326, 0.8889),
    (4, 53.307, 0.81962, 0.9238, 0.8872),
    (8, 40.990, 0.81609, 0.9205, 0.8866),
]


@pytest.mark.parametrize(("n", "angle", "eta", "caught", "taper"), OPTIMA)
def test_optimum_of_cos_feeds(n: int, angle: float, eta: float, caught: float, taper: float) -> None:
    angles = np.arange(angle - 3, angle + 3.01, 0.05)
    values = [efficiency(n, a) for a in angles]
    assert angles[int(np.argmax(values))] == pytest.approx(angle, abs=0.1)
    assert max(values) == pytest.approx(eta, abs=0.002)
    figures = figures_of(cos_feed(n), math.radians(angle))
    assert 1 - figures.spillover == pytest.approx(caught, abs=5e-4)
    assert figures.illumination_efficiency == pytest.approx(taper, abs=5e-4)
    assert figures.phase_efficiency == pytest.approx(1.0, abs=1e-9)
    assert figures.polarisation_efficiency == pytest.approx(1.0, abs=1e-9)


# EM-45, computed with an independent script.
@pytest.mark.parametrize(("angle", "eta"), [(30, 0.5075), (60, 0.7940), (80, 0.5214)])
def test_spot_values_n4(angle: float, eta: float) -> None:
    assert efficiency(4, angle) == pytest.approx(eta, abs=2e-4)


# EM-43: closed form 1 - cos^(n+1), computed with an independent script.
@pytest.mark.parametrize("n", [2, 4, 8])
def test_spillover_closed_form(n: int) -> None:
    angle = math.radians(55)
    figures = figures_of(cos_feed(n), angle)
    assert figures.spillover == pytest.approx(math.cos(angle) ** (n + 1), abs=2e-4)


# EM-39: feed/space/total -7.81/-3.06/-10.87 dB at the optimum of n = 2.
def test_edge_taper() -> None:
    assert edge_taper_db(cos_feed(2), math.radians(65.989)) == pytest.approx(-10.87, abs=0.01)


# EM-36, formula of Balanis ch. 15, computed with an independent script.
@pytest.mark.parametrize(
    ("ratio", "angle"), [(0.25, 90.0), (0.3, 79.61), (0.35, 71.08), (0.4, 64.01), (0.5, 53.13), (0.8, 34.71)]
)
def test_half_angle(ratio: float, angle: float) -> None:
    assert math.degrees(half_angle_rad(ratio)) == pytest.approx(angle, abs=0.006)


def test_half_angle_refuses_zero() -> None:
    with pytest.raises(JobError, match="above zero"):
        half_angle_rad(0.0)


@pytest.mark.parametrize("shift", [-120.0, -13.0, 0.0, 40.0, 300.0])
def test_phase_centre_of_a_shifted_source(shift: float) -> None:
    figures = figures_of(cos_feed(4, shift), math.radians(60))
    assert figures.phase_centre_mm == pytest.approx(shift, abs=1e-6)
    assert figures.aperture_efficiency == pytest.approx(efficiency(4, 60), abs=1e-9)


def test_cross_polar_loss_is_power_share() -> None:
    figures = figures_of(cos_feed(4, cross=0.2), math.radians(60))
    assert figures.polarisation_efficiency == pytest.approx(1 / 1.04, abs=1e-9)


def test_factors_multiply_to_the_whole() -> None:
    figures = figures_of(cos_feed(3, 25.0, 0.1), math.radians(62))
    product = (
        (1 - figures.spillover)
        * figures.polarisation_efficiency
        * figures.illumination_efficiency
        * figures.phase_efficiency
    )
    assert product == pytest.approx(figures.aperture_efficiency, rel=1e-9)


def test_co_and_cross_keep_the_power() -> None:
    rng = np.random.default_rng(1)
    theta, phi = rng.normal(size=9) + 1j * rng.normal(size=9), rng.normal(size=9) + 0j
    co, cross = co_cross(theta, phi, rng.uniform(0, 6, 9))
    assert np.abs(co) ** 2 + np.abs(cross) ** 2 == pytest.approx(np.abs(theta) ** 2 + np.abs(phi) ** 2)


def test_beam_of_cos_feed() -> None:
    # cos^n falls to half at acos(2^(-1/n)); directivity 2 (n + 1): arithmetic.
    figures = figures_of(cos_feed(4), math.radians(60))
    shape = beam(cos_feed(4), figures.power)
    width = 2 * math.degrees(math.acos(2 ** (-1 / 4)))
    assert shape.half_power_e_deg == pytest.approx(width, abs=0.02)
    assert shape.half_power_h_deg == pytest.approx(width, abs=0.02)
    assert shape.directivity_dbi == pytest.approx(10 * math.log10(10), abs=0.002)


def test_short_dipole_over_nothing() -> None:
    # Short dipole along y: directivity 1.5 (Balanis 4.2); E-plane 90 degrees between half powers, H-plane round.
    def dipole(theta: Real, phi: Real) -> tuple[Complex, Complex]:
        return np.cos(theta) * np.sin(phi) + 0j, np.cos(phi) + 0j * theta

    figures = figures_of(dipole, math.radians(60))
    shape = beam(dipole, figures.power)
    assert shape.directivity_dbi == pytest.approx(10 * math.log10(1.5), abs=1e-6)
    assert shape.half_power_e_deg == pytest.approx(90.0, abs=0.02)
    assert shape.half_power_h_deg == 360.0
    assert shape.front_to_back_db == pytest.approx(0.0, abs=1e-9)


def test_width_needs_a_fall_to_half() -> None:
    angle, power, _ = plane_cut(cos_feed(4), 90.0)
    assert half_power_width_deg(angle, np.maximum(power, 0.6 * power.max())) == 360.0


def test_patterns_without_power_or_not_finite_are_refused() -> None:
    def nothing(theta: Real, phi: Real) -> tuple[Complex, Complex]:
        return 0j * theta, 0j * phi

    def broken(theta: Real, phi: Real) -> tuple[Complex, Complex]:
        return np.full(theta.shape, np.nan) + 0j, 0j * phi

    with pytest.raises(NumericalError, match="no power"):
        figures_of(nothing, 1.0)
    with pytest.raises(NumericalError, match="not finite"):
        figures_of(broken, 1.0)
