"""Skin effect against tables and handbook values; each row with its id, source and how it is known."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fabgen.errors import JobError
from fabgen.stock import tables
from fabgen.theory import skin

FREQUENCIES_MHZ = (1.0, 1000.0, 1420.406, 10_000.0)

# id, conductivity, depth in um at the four frequencies, resistance in milliohm; formula of Pozar sec. 1.7,
# computed with an independent script.
ROWS = [
    ("SK-22/23 copper IACS", 5.8e7, (66.09, 2.090, 1.753, 0.6609), (0.2609, 8.250, 9.833, 26.09)),
    ("SK-24/25 copper Pozar", 5.813e7, (66.01, 2.087, 1.752, 0.6601), (0.2606, 8.241, 9.822, 26.06)),
    ("SK-26/27 pure copper", 5.96e7, (65.19, 2.062, 1.730, 0.6519), (0.2574, 8.139, 9.700, 25.74)),
    ("SK-28/29 CuZn30", 1.624e7, (124.9, 3.949, 3.314, 1.249), (0.4930, 15.59, 18.58, 49.30)),
    ("SK-32/33 1050-O", 3.555e7, (84.41, 2.669, 2.240, 0.8441), (0.3332, 10.54, 12.56, 33.32)),
    ("SK-34/35 5754", 1.914e7, (115.0, 3.638, 3.052, 1.150), (0.4542, 14.36, 17.12, 45.42)),
    ("SK-36/37 6061-T6", 2.494e7, (100.8, 3.187, 2.674, 1.008), (0.3979, 12.58, 14.99, 39.79)),
    ("SK-38/39 1.4301", 1.37e6, (430.0, 13.60, 11.41, 4.300), (1.698, 53.68, 63.98, 169.8)),
    ("SK-40/41 tin", 9.17e6, (166.2, 5.256, 4.410, 1.662), (0.6561, 20.75, 24.73, 65.61)),
    ("SK-44/45 silver", 6.173e7, (64.06, 2.026, 1.700, 0.6406), (0.2529, 7.997, 9.531, 25.29)),
]


@pytest.mark.parametrize(("row", "sigma", "depths", "resistances"), ROWS, ids=[r[0] for r in ROWS])
def test_depth_and_resistance(
    row: str, sigma: float, depths: tuple[float, ...], resistances: tuple[float, ...]
) -> None:
    for f, depth_um, milliohm in zip(FREQUENCIES_MHZ, depths, resistances, strict=True):
        # Four printed digits: half a unit in the last place is 5e-4 at worst.
        assert skin.skin_depth_mm(f, sigma) * 1e3 == pytest.approx(depth_um, rel=5e-4)
        assert skin.surface_resistance_ohm(f, sigma) * 1e3 == pytest.approx(milliohm, rel=5e-4)


def test_tabulated_depths() -> None:
    # SK-46 univ. lecture notes; SK-47 Pozar example 1.2; both read in a secondary page that quotes the source.
    for f, depth_um in ((1, 66), (10, 21), (100, 6.6), (1000, 2.1), (10_000, 0.66)):
        assert skin.skin_depth_mm(f, 5.8e7) * 1e3 == pytest.approx(depth_um, rel=0.01)
    for sigma, depth_um in ((5.813e7, 0.660), (3.816e7, 0.814), (6.173e7, 0.640)):
        assert skin.skin_depth_mm(10_000, sigma) * 1e3 == pytest.approx(depth_um, abs=0.001)


def test_rule_of_thumb_for_copper() -> None:
    # SK-48: W. C. Johnson, 6.64/sqrt(f) cm with rho about 1.74e-8; read in a secondary page.
    assert skin.skin_depth_mm(1.0, 1 / 1.74e-8) == pytest.approx(10 * 6.64 / 1000, rel=1e-3)


def test_permeability_and_resistance_go_together() -> None:
    # Rs = 1/(sigma delta), SK-02 (Pozar), with delta falling by sqrt(mu).
    assert skin.skin_depth_mm(1000, 1e7, 4) == pytest.approx(skin.skin_depth_mm(1000, 1e7) / 2)
    assert skin.surface_resistance_ohm(1000, 1e7, 4) == pytest.approx(2 * skin.surface_resistance_ohm(1000, 1e7))


def test_film_limits() -> None:
    # SK-57: R_RF = R_dc when t << delta; thick layers show (1 + j) Rs. Algebra.
    thin = skin.film_impedance_ohm(1420, 1e-5, 5.8e7)
    assert thin.real == pytest.approx(1 / (5.8e7 * 1e-8), rel=1e-4)
    assert abs(thin.imag / thin.real) < 0.01
    thick = skin.film_impedance_ohm(1420, 1.0, 5.8e7)
    assert thick == pytest.approx((1 + 1j) * skin.surface_resistance_ohm(1420, 5.8e7))


def test_film_on_the_same_metal_is_the_metal() -> None:
    bulk = (1 + 1j) * skin.surface_resistance_ohm(1420, 1.5e7)
    assert skin.film_impedance_ohm(1420, 0.002, 1.5e7, backing_ohm=bulk) == pytest.approx(bulk)


def test_thin_tin_on_steel_shows_the_steel() -> None:
    steel = tables.metal("tinplate")
    backing = skin.metal_impedance_ohm(steel, 1420)
    coated = skin.film_impedance_ohm(1420, 0.0004, 9.17e6, backing_ohm=backing)
    tin = skin.surface_resistance_ohm(1420, 9.17e6)
    assert tin < coated.real < backing.real


@given(st.floats(0.01, 8), st.floats(300, 12_000))
def test_film_is_passive_and_never_better_than_its_best_thickness(ratio: float, frequency: float) -> None:
    # The least resistance of an open-backed film is at t = pi/2 delta, about 8.3 % under the thick metal
    # (Re coth((1+j)x)(1+j) has its minimum tanh(pi/2) = 0.917 there).
    depth = skin.skin_depth_mm(frequency, 1.4e7)
    resistance = skin.surface_resistance_ohm(frequency, 1.4e7)
    value = skin.film_impedance_ohm(frequency, ratio * depth, 1.4e7)
    assert value.real >= math.tanh(math.pi / 2) * resistance * (1 - 1e-9)
    assert value.imag >= 0


def test_paint_by_sheet_resistance() -> None:
    # SK-57: 50 um at 0.1 ohm per square is 2e5 S/m, delta 29.9 um at 1.42 GHz; computed with an independent script.
    paint = tables.lining("silver-copper-paint")
    sigma = skin.lining_conductivity_s_per_m(paint)
    assert sigma == pytest.approx(2e5)
    assert skin.skin_depth_mm(1420, sigma) * 1e3 == pytest.approx(29.9, abs=0.05)
    assert skin.lining_conductivity_s_per_m(paint, 0.2) == pytest.approx(1e5)
    assert skin.lining_impedance_ohm(paint, 300).real == pytest.approx(0.1, rel=0.1)
    foil = tables.lining("copper-foil-35")
    assert skin.lining_impedance_ohm(foil, 1420).real == pytest.approx(9.83e-3, rel=1e-3)
    assert skin.metal_impedance_ohm(tables.metal("cu-etp"), 1420, 1.5).real == pytest.approx(9.83e-3, rel=1e-3)


def test_loss_through_a_layer() -> None:
    # SK-49: 8.686 dB per skin depth; the rest is reflection at both faces, -20 log10(4 Rs sqrt(2)/eta).
    depth = skin.skin_depth_mm(1420, 5.8e7)
    steps = skin.through_loss_db(1420, 12 * depth, 5.8e7) - skin.through_loss_db(1420, 7 * depth, 5.8e7)
    assert steps == pytest.approx(5 * 8.6859, rel=1e-4)
    assert skin.through_loss_db(1420, 1e-9, 5.8e7) < 0.2
    assert skin.through_loss_db(1420, 400 * depth, 5.8e7) == pytest.approx(400 * 8.686)


def test_roughness() -> None:
    # Hammerstad and Jensen 1980, from memory: 1 when smooth, 2 when very rough, 1.605 at R = delta
    # (1 + (2/pi) atan 1.4).
    assert skin.roughness_factor(0, 1.75) == 1
    assert skin.roughness_factor(1.75, 1.75) == pytest.approx(1.6051, abs=1e-4)
    assert skin.roughness_factor(100, 1.75) == pytest.approx(2, abs=1e-3)


@pytest.mark.parametrize("bad", [0.0, -1.0, math.nan, math.inf])
def test_bad_input_is_refused(bad: float) -> None:
    with pytest.raises(JobError, match="frequency_mhz is"):
        skin.skin_depth_mm(bad, 5.8e7)
    with pytest.raises(JobError, match="thickness_mm is"):
        skin.film_impedance_ohm(1420, bad, 5.8e7)
