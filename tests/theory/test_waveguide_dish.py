"""Waveguide modes and the paraboloid against the reference table and scipy."""

from __future__ import annotations

import math

import pytest
from scipy import integrate, special

from fabgen.errors import JobError
from fabgen.theory import dish, waveguide


def test_roots_are_the_zeros_of_the_bessel_functions() -> None:
    # EM-01: Marcuvitz; Abramowitz and Stegun tables 9.5, against scipy's own zeros.
    assert waveguide.ROOTS["TE11"] == pytest.approx(special.jnp_zeros(1, 1)[0], abs=1e-12)
    assert waveguide.ROOTS["TM01"] == pytest.approx(special.jn_zeros(0, 1)[0], abs=1e-12)
    assert waveguide.ROOTS["TE21"] == pytest.approx(special.jnp_zeros(2, 1)[0], abs=1e-12)
    assert waveguide.ROOTS["TE01"] == pytest.approx(special.jnp_zeros(0, 1)[0], abs=1e-12)
    assert waveguide.ROOTS["TM11"] == pytest.approx(special.jn_zeros(1, 1)[0], abs=1e-12)
    assert waveguide.ROOTS["TE31"] == pytest.approx(special.jnp_zeros(3, 1)[0], abs=1e-12)


# EM-02, EM-03, EM-04; computed with an independent script.
@pytest.mark.parametrize(
    ("mode", "wavelength_over_bore", "ghz_mm", "mhz_at_150"),
    [("TE11", 1.70629, 175.699, 1171.32), ("TM01", 1.30637, 229.485, 1529.90), ("TE21", 1.02860, 291.456, 1943.04)],
)
def test_cutoffs(mode: str, wavelength_over_bore: float, ghz_mm: float, mhz_at_150: float) -> None:
    cutoff = waveguide.cutoff_mhz(mode, 100)
    assert 299_792.458 / cutoff / 100 == pytest.approx(wavelength_over_bore, abs=1e-5)
    assert cutoff / 1e3 * 100 == pytest.approx(ghz_mm, abs=6e-4)
    assert waveguide.cutoff_mhz(mode, 150) == pytest.approx(mhz_at_150, abs=0.01)
    assert waveguide.cutoff_bore_mm(mode, cutoff) == pytest.approx(100)


def test_below_and_above_cutoff() -> None:
    # Far below cut-off the decay is p/a, 16.0 dB per radius for TE11 (8.686 * 1.8412).
    assert waveguide.decay_db_per_mm("TE11", 100, 1) * 50 == pytest.approx(8.6859 * 1.84118, rel=1e-5)
    assert waveguide.decay_per_mm("TE11", 150, 1420) == 0
    guide = waveguide.guide_wavelength_mm("TE11", 150, 1420.406)
    # 1/lambda^2 = 1/lambda_c^2 + 1/lambda_g^2, textbook identity.
    assert 1 / guide**2 + (1171.32 / 299_792.458) ** 2 == pytest.approx((1420.406 / 299_792.458) ** 2, rel=1e-5)
    with pytest.raises(JobError, match="does not run"):
        waveguide.guide_wavelength_mm("TE21", 150, 1420)
    with pytest.raises(JobError, match="allowed: TE11"):
        waveguide.cutoff_mhz("TE99", 150)


# EM-36 angles, EM-37 rim loss; formula of EM-35 (Balanis ch. 15), computed with an independent script.
@pytest.mark.parametrize(
    ("ratio", "angle", "rim_db"),
    [(0.25, 90.00, -6.021), (0.3, 79.61, -4.581), (0.35, 71.08, -3.581), (0.38, 66.68, -3.124),
     (0.4, 64.01, -2.864), (0.45, 58.11, -2.336), (0.5, 53.13, -1.938), (0.6, 45.24, -1.390),
     (0.7, 39.31, -1.043), (0.8, 34.71, -0.809)],
)  # fmt: skip
def test_half_angle_and_space_attenuation(ratio: float, angle: float, rim_db: float) -> None:
    assert dish.half_angle_deg(ratio) == pytest.approx(angle, abs=0.006)
    assert dish.focal_ratio(angle) == pytest.approx(ratio, abs=1e-4)
    assert dish.space_attenuation_db(dish.half_angle_deg(ratio)) == pytest.approx(rim_db, abs=6e-4)


# EM-39, EM-40, EM-42: Balanis fig. 15.19/15.20; computed with an independent script.
@pytest.mark.parametrize(
    ("n", "angle", "efficiency", "spillover", "edge_db"),
    [(2, 65.989, 0.82899, 0.9326, -10.87), (4, 53.307, 0.81962, 0.9238, -10.90), (8, 40.990, 0.81609, 0.9205, -10.91)],
)
def test_optimum_of_cosine_feeds(n: int, angle: float, efficiency: float, spillover: float, edge_db: float) -> None:
    best = dish.optimum_half_angle_deg(n)
    assert best == pytest.approx(angle, abs=0.002)
    assert dish.aperture_efficiency(n, best) == pytest.approx(efficiency, abs=1e-5)
    assert dish.spillover_efficiency(n, best) == pytest.approx(spillover, abs=1e-4)
    edge = 10 * n * math.log10(math.cos(math.radians(best))) + dish.space_attenuation_db(best)
    assert edge == pytest.approx(edge_db, abs=0.01)


def test_spot_efficiencies() -> None:
    # EM-45: n = 4 at 30 / 60 / 80 degrees; computed with an independent script.
    for angle, efficiency in ((30, 0.5075), (60, 0.7940), (80, 0.5214)):
        assert dish.aperture_efficiency(4, angle) == pytest.approx(efficiency, abs=6e-5)


@pytest.mark.parametrize("n", [0, 2, 6, 12])
def test_closed_form_against_quadrature(n: int) -> None:
    # EM-38, Silver; integral by scipy.
    limit = math.radians(50)
    integral, _ = integrate.quad(lambda t: math.cos(t) ** (n / 2) * math.tan(t / 2), 0, limit)
    expected = 2 * (n + 1) * integral**2 / math.tan(limit / 2) ** 2
    assert dish.aperture_efficiency(n, 50) == pytest.approx(expected, rel=1e-10)


def test_gain_and_refusals() -> None:
    # (pi D/lambda)^2 by hand: D = 2.4 m at 1420.406 MHz is 35.72 wavelengths' circumference.
    assert dish.dish_gain_dbi(2.4, 1420.406, 0.74) == pytest.approx(20 * math.log10(35.723) + 10 * math.log10(0.74), abs=1e-3)  # noqa: E501
    with pytest.raises(JobError, match="even exponents"):
        dish.aperture_efficiency(3, 60)
    with pytest.raises(JobError, match="half_angle_deg"):
        dish.aperture_efficiency(2, 95)
    with pytest.raises(JobError, match="focal_ratio"):
        dish.half_angle_deg(0)
