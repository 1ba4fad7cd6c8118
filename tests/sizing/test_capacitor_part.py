"""The series capacitor as a part, against the coaxial line of the reference table and an electrostatic solution."""

from __future__ import annotations

import math

import pytest

from fabgen.errors import NoSolutionError
from fabgen.sizing.capacitor_part import capacitor_part, peak_voltage_v, plates_pf, sleeve_pf
from fabgen.stock import tables
from fabgen.theory.lines import coax_ohm


def test_sleeve_grows_like_a_coaxial_line() -> None:
    # C' = sqrt(er) / (c Z0); Pozar, Microwave Engineering, table 2.1.
    per_mm = sleeve_pf(11.0, 0.92, 1.6, 2.05) - sleeve_pf(10.0, 0.92, 1.6, 2.05)
    line = math.sqrt(2.05) / (299.792458e9 * coax_ohm(1.6, 0.92, 2.05)) * 1e12
    assert per_mm == pytest.approx(line, rel=1e-4)


def test_end_correction_against_finite_differences() -> None:
    # Axisymmetric Laplace equation on three grids, step extrapolated to zero, d/D = 0.4: 1.162 e0 er D;
    # computed with an independent script.
    end = sleeve_pf(0.0, 0.4 * 3.0, 3.0, 1.0)
    assert end == pytest.approx(1.162 * 8.8541878128e-3 * 3.0, rel=1e-6)


def test_wide_plates_are_the_plain_formula() -> None:
    plain = 8.8541878128e-3 * 2.05 * 200 * 200 / 0.1
    assert plates_pf(200, 200, 0.1, 2.05) == pytest.approx(plain, rel=0.005)
    assert plates_pf(200, 200, 0.1, 2.05) > plain


def test_narrow_plates_hold_more_than_the_plain_formula() -> None:
    # Palmer's factor for w = l = 10 t: (1 + (1 + ln(20 pi)) / (10 pi))^2 = 1.354, arithmetic.
    plain = 8.8541878128e-3 * 1.0 * 10 * 10 / 1.0
    assert plates_pf(10, 10, 1.0, 1.0) / plain == pytest.approx(1.3541, abs=1e-3)


def test_voltage() -> None:
    # 100 W in 50 ohm is 2 A peak; 1 pF at 1420 MHz is 112.08 ohm: arithmetic.
    assert peak_voltage_v(1.0, 1420.0, 100.0) == pytest.approx(224.2, abs=0.1)
    assert peak_voltage_v(1.0, 1420.0, 0.0) == 0.0


@pytest.mark.parametrize(("form", "coax"), [("sleeve", "rg402"), ("sleeve", "rg405"), ("plates", "rg402")])
@pytest.mark.parametrize("capacitance", [0.25, 0.6, 1.06, 2.4, 5.0])
def test_part_gives_its_capacitance_and_trims_both_ways(form: str, coax: str, capacitance: float) -> None:
    part = capacitor_part(
        form, capacitance, 1420.0, coax=tables.coax(coax), plate_width_mm=3.8, transmit_w=0.0
    )
    value = (
        sleeve_pf(part.overlap_mm, part.inner_mm, part.outer_mm, part.relative_permittivity)
        if form == "sleeve"
        else plates_pf(part.overlap_mm, part.plate_width_mm, part.film_mm, part.relative_permittivity)
    )
    assert value == pytest.approx(capacitance, abs=0.06 * part.pf_per_mm)
    assert part.minimum_pf < 0.9 * capacitance
    assert part.maximum_pf > 1.4 * capacitance
    assert part.overlap_mm < part.overlap_max_mm


def test_coax_too_thick_for_every_tube() -> None:
    from dataclasses import replace

    thick = replace(tables.coax("rg402"), inner_mm=4.0)
    with pytest.raises(NoSolutionError, match="thinner coax"):
        capacitor_part("sleeve", 1.0, 1420.0, coax=thick, plate_width_mm=3.0, transmit_w=0.0)
