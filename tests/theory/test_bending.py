"""Bending and spring-back against DIN 6935, Machinery's Handbook, Gardiner and integration over the section."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import integrate

from fabgen.errors import JobError
from fabgen.stock import tables
from fabgen.theory import bending, springback


# SB-05: DIN 6935 formula (SB-01), computed with an independent script.
@pytest.mark.parametrize(
    ("ratio", "k", "engineering"),
    [(0.5, 0.4995, 0.2497), (1, 0.650, 0.325), (1.3, 0.7070, 0.3535), (2, 0.8005, 0.4003), (3, 0.8886, 0.4443),
     (5, 0.9995, 0.4997)],
)  # fmt: skip
def test_din_k(ratio: float, k: float, engineering: float) -> None:
    assert bending.din_k(1.5 * ratio, 1.5) == pytest.approx(k, abs=6e-5)
    assert bending.din_k_factor(1.5 * ratio, 1.5) == pytest.approx(engineering, abs=6e-5)


def test_din_k_ends_at_one() -> None:
    assert bending.din_k(6, 1) == 1.0
    assert bending.din_k(0.061, 1) > 0
    with pytest.raises(JobError, match=r"0\.06 t or more"):
        bending.din_k(0.05, 1)


def test_din_allowances_and_compensation() -> None:
    # SB-06, SB-08: DIN 6935 formula, computed with an independent script.
    k = bending.din_k_factor(1, 1)
    assert bending.bend_allowance(90, 1, k, 1) == pytest.approx(2.0813, abs=6e-5)
    assert bending.din_compensation_mm(1, 1, 90) == pytest.approx(-1.9187, abs=6e-5)
    assert 50 + 50 + bending.din_compensation_mm(1, 1, 90) == pytest.approx(98.0813, abs=6e-5)
    for r, s, allowance in ((1.3, 1, 2.5973), (2, 1, 3.7703), (3, 1.5, 5.6555)):
        assert bending.bend_allowance(90, r, bending.din_k_factor(r, s), s) == pytest.approx(allowance, abs=6e-5)


def test_din_compensation_by_opening_angle() -> None:
    # SB-02, SB-03, SB-04: legs to the outer tangent up to 90, to the virtual corner to 165, nothing above.
    at_90 = bending.din_compensation_mm(2, 1.5, 90)
    assert bending.din_compensation_mm(2, 1.5, 90.0001) == pytest.approx(at_90, abs=1e-4)
    k = bending.din_k_factor(2, 1.5)
    assert bending.din_compensation_mm(2, 1.5, 135) == pytest.approx(-bending.bend_deduction(45, 2, k, 1.5))
    assert bending.din_compensation_mm(2, 1.5, 60) == pytest.approx(bending.bend_allowance(120, 2, k, 1.5) - 7)
    assert bending.din_compensation_mm(2, 1.5, 90.9) == pytest.approx(-bending.bend_deduction(89.1, 2, k, 1.5))
    assert bending.din_compensation_mm(2, 1.5, 165.1) == 0


# SB-11..13, SB-15: Machinery's Handbook 28th ed., T = 1, R = 2, 1.57 as printed; read in a secondary page.
@pytest.mark.parametrize(("k", "length"), [(0.35, 3.69), (0.41, 3.78), (0.45, 3.85)])
def test_handbook_lengths(k: float, length: float) -> None:
    assert bending.handbook_length_mm(2, 1, k) == pytest.approx(length, abs=1e-9)
    # K = 2 Y / pi: the same rule with the neutral line, to the printed rounding of Y.
    assert bending.bend_allowance(90, 2, k, 1) == pytest.approx(length, abs=0.006)


def test_every_temper_has_a_handbook_k() -> None:
    for metal in tables.all_rows("metal"):
        for temper in metal.tempers:
            assert bending.handbook_length_mm(2, 1, temper.handbook_k) > 3
    with pytest.raises(JobError, match="handbook has"):
        bending.handbook_length_mm(2, 1, 0.33)


def test_identities() -> None:
    # SB-09: BA = beta (r + K t); OSSB = (r + t) tan(beta/2); BD = 2 OSSB - BA.
    assert bending.outside_setback(90, 2, 1) == pytest.approx(3)
    assert bending.bend_deduction(90, 2, 0.4, 1) == pytest.approx(6 - math.pi / 2 * 2.4)
    assert bending.bend_allowance(0, 2, 0.4, 1) == 0
    with pytest.raises(JobError, match="k_factor"):
        bending.bend_allowance(90, 2, 1.4, 1)
    with pytest.raises(JobError, match=r"angle_deg is 180\.5: allowed 0 to 180"):
        bending.bend_allowance(180.5, 2, 0.4, 1)
    with pytest.raises(JobError, match="allowed 0 to 179"):
        bending.outside_setback(179.5, 2, 1)


@given(st.floats(0.2, 0.5), st.floats(0.3, 6), st.floats(0.3, 3))
def test_test_bend_gives_its_k_back(k: float, radius: float, thickness: float) -> None:
    legs = 40.0, 30.0
    flat = sum(legs) - bending.bend_deduction(90, radius, k, thickness)
    assert bending.k_from_test_bend(flat, *legs, radius, thickness) == pytest.approx(k, abs=1e-9)


def test_test_bend_with_a_measuring_fault() -> None:
    with pytest.raises(JobError, match="measure again"):
        bending.k_from_test_bend(80, 40, 30, 2, 1.5)


def test_least_inside_radius() -> None:
    # SB-25: EN AW-5754 H22 at 1.5 mm needs 1.0 t, SB-24: O/H111 0.5 t; EN 485-2, read in a secondary page.
    h22, soft = tables.temper("en-aw-5754", "H22"), tables.temper("en-aw-5754", "O")
    assert bending.min_inside_radius_mm(h22, 1.5) == 1.5
    assert bending.min_inside_radius_mm(soft, 1.5) == 0.75
    assert bending.min_inside_radius_mm(h22, 1.51) == pytest.approx(1.5 * 1.51)
    assert bending.min_inside_radius_mm(h22, 1.5, parallel=True) == pytest.approx(2.25)
    with pytest.raises(JobError, match=r"ends at 12\.5 mm"):
        bending.min_inside_radius_mm(h22, 13)


def test_wire_strain_and_arc() -> None:
    # WB-03: 2 mm wire on 33.6 mm radius is 2.98 %; WB-01, WB-02: neutral axis in the middle for R/d of 2 and
    # more, Hill's bound sqrt(Ri Ro) for tight bends (from memory).
    assert bending.outer_fibre_strain(2, 33.6) == pytest.approx(0.0298, abs=5e-5)
    assert bending.wire_arc_mm(90, 8, 4) == pytest.approx(math.pi / 2 * 8)
    assert bending.wire_arc_mm(90, 4, 4) == pytest.approx(math.pi / 2 * math.sqrt(2 * 6))
    assert bending.wire_arc_mm(90, 6, 4) == pytest.approx(math.pi / 2 * (6 + math.sqrt(4 * 8)) / 2)
    with pytest.raises(JobError, match="under half"):
        bending.wire_arc_mm(90, 1, 4)


def test_gardiner() -> None:
    # SB-48, SB-50: F. J. Gardiner, Trans. ASME 79 (1957) 1; results computed.
    assert springback.sheet_ratio(50, 2, 300, 210) == pytest.approx(0.89304, abs=6e-6)
    assert springback.sheet_released_mm(50, 2, 300, 210) == pytest.approx(55.989, abs=6e-4)
    assert springback.released_angle_deg(90, 0.89304) == pytest.approx(80.37, abs=0.01)
    assert springback.sheet_ratio(34, 1, 180, 120) == pytest.approx(0.84753, abs=6e-6)
    assert springback.sheet_released_mm(34, 1, 180, 120) == pytest.approx(40.117, abs=6e-4)
    assert springback.sheet_ratio(500, 1, 300, 120) == 0
    assert springback.sheet_released_mm(500, 1, 300, 120) == math.inf


# WB-08: soft copper Y 70, E 120 GPa, R 33.6; computed with an independent script.
@pytest.mark.parametrize(("diameter", "released", "ratio"), [(2, 34.756, 0.96673), (3, 34.362, 0.97782)])
def test_wire(diameter: float, released: float, ratio: float) -> None:
    assert springback.wire_ratio(33.6, diameter, 70, 120) == pytest.approx(ratio, abs=6e-6)
    assert springback.wire_released_mm(33.6, diameter, 70, 120) == pytest.approx(released, abs=1e-3)


@pytest.mark.parametrize("n", [0.05, 0.3, 0.7, 0.95])
def test_wire_moment_against_integration(n: float) -> None:
    # WB-07: stress clipped at yield, integrated over the circle by scipy.
    radius, youngs, yield_mpa = 2.0, 120e3, 70.0
    axis = n * youngs * radius / yield_mpa

    def strip(y: float) -> float:
        return min(youngs * y / axis, yield_mpa) * y * 2 * math.sqrt(radius**2 - y**2)

    moment, _ = integrate.quad(strip, 0, radius, points=[n * radius], epsabs=1e-10)
    expected = 1 - 2 * moment * axis / (youngs * math.pi * radius**4 / 4)
    assert springback.wire_ratio(axis, 2 * radius, yield_mpa, youngs / 1e3) == pytest.approx(expected, abs=1e-8)


def test_wire_small_n_series_and_elastic_end() -> None:
    # WB-07: 1 - 3.395 Y R/(E d) for small n.
    assert springback.wire_ratio(10, 4, 70, 120) == pytest.approx(1 - 3.395 * 70 * 10 / (120e3 * 4), abs=1e-5)
    assert springback.wire_ratio(1e5, 4, 70, 120) == 0
    assert springback.wire_released_mm(1e5, 4, 70, 120) == math.inf


@given(st.floats(3, 120), st.floats(0.5, 6), st.floats(40, 350))
def test_tool_radius_is_the_inverse(wished: float, size: float, yield_mpa: float) -> None:
    sheet = springback.sheet_tool_radius_mm(wished, size, yield_mpa, 110)
    assert springback.sheet_released_mm(sheet, size, yield_mpa, 110) == pytest.approx(wished, rel=1e-6)
    wire = springback.wire_tool_radius_mm(wished, size, yield_mpa, 110)
    assert springback.wire_released_mm(wire, size, yield_mpa, 110) == pytest.approx(wished, rel=1e-6)
    assert wire < wished


def test_mandrel() -> None:
    # Inverse of WB-08: axis radius 34.756 in 2 mm wire is wound on 2 * 33.6 - 2 = 65.2 mm.
    assert springback.wire_mandrel_mm(34.7562563, 2, 70, 120) == pytest.approx(65.2, abs=1e-4)
    with pytest.raises(JobError, match="leaves no mandrel"):
        springback.wire_mandrel_mm(2, 4.1, 70, 120)
