"""Units at the border. Sources beside each value."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fabgen.errors import JobError
from fabgen.stock.gauges import awg_mm
from fabgen.units import parse_frequency_mhz, parse_length_mm, show_both_mm, wavelength_mm


@pytest.mark.parametrize(
    ("text", "millimetres"),
    [
        # 1 in = 25.4 mm exactly, 1 ft = 12 in (agreement of 1959, ISO 80000-3; from memory)
        ("1 in", 25.4),
        ("10 ft", 3048.0),
        ("1/4 in", 6.35),
        ("1 1/2 inch", 38.1),
        ('0.064"', 1.6256),
        ("8'", 2438.4),
        ("40 thou", 1.016),
        ("1.5 mm", 1.5),
        ("1.5mm", 1.5),
        ("2.4 m", 2400.0),
        ("35 um", 0.035),
        ("35 µm", 0.035),
        ("22 cm", 220.0),
        ("1e2 mm", 100.0),
        ("-3 mm", -3.0),
    ],
)
def test_lengths_are_converted_exactly(text: str, millimetres: float) -> None:
    assert parse_length_mm(text) == millimetres


@pytest.mark.parametrize(
    ("text", "megahertz"),
    [("1.420406 GHz", 1420.406), ("1420406 kHz", 1420.406), ("1420406000 Hz", 1420.406), ("408 MHz", 408.0)],
)
def test_frequencies_are_converted_exactly(text: str, megahertz: float) -> None:
    assert parse_frequency_mhz(text) == megahertz


@pytest.mark.parametrize(
    ("gauge", "inch"),
    # ASTM B258-02, table 1, diameters in inches as printed (4 digits); from memory
    [("4/0", 0.4600), (10, 0.1019), (12, 0.0808), (18, 0.0403), (24, 0.0201), (36, 0.0050), (40, 0.0031)],
)
def test_awg_meets_the_printed_table(gauge: int | str, inch: float) -> None:
    assert awg_mm(gauge) / 25.4 == pytest.approx(inch, abs=0.5e-4)


def test_six_awg_sizes_double_the_diameter_within_half_a_percent() -> None:
    # handbook rule: 92**(6/39) = 2.005
    assert awg_mm(12) / awg_mm(18) == pytest.approx(92 ** (6 / 39), rel=1e-12)


@pytest.mark.parametrize("text", ["", "12", "mm", "12 parsec", "1/0 in", "1e999 mm", "nan mm", "x" * 5000])
def test_a_length_without_meaning_names_the_allowed_units(text: str) -> None:
    with pytest.raises(JobError) as caught:
        parse_length_mm(text)
    assert len(str(caught.value)) < 300
    assert "unit" in str(caught.value) or "zero" in str(caught.value)


def test_a_frequency_with_a_length_unit_is_refused() -> None:
    with pytest.raises(JobError, match="not a unit of frequency; allowed: Hz, kHz, MHz, GHz"):
        parse_frequency_mhz("3 mm")


@given(st.floats(0.001, 1e6), st.sampled_from(["mm", "cm", "m", "in", "ft", "um", "mil"]))
def test_length_text_goes_there_and_back(value: float, unit: str) -> None:
    one = parse_length_mm(f"1 {unit}")
    assert parse_length_mm(f"{value!r} {unit}") == pytest.approx(value * one, rel=1e-12)


@given(st.text(max_size=50))
def test_any_text_is_a_finite_length_or_a_clear_refusal(text: str) -> None:
    try:
        assert math.isfinite(parse_length_mm(text))
    except JobError as error:
        assert str(error)


def test_wavelength_of_the_hydrogen_line() -> None:
    # 21.106 cm, the wavelength astronomers name; c / 1420.405752 MHz (CODATA c; from memory)
    assert wavelength_mm(1420.405752) == pytest.approx(211.0611, abs=5e-4)


def test_both_systems_are_shown() -> None:
    assert show_both_mm(25.4) == "25.40 mm (1.000 in)"


@pytest.mark.parametrize("text", ["1,42 GHz", "1,420 MHz", "4,5 mm"])
def test_a_comma_in_a_number_is_told_as_such(text: str) -> None:
    read = parse_length_mm if text.endswith("mm") else parse_frequency_mhz
    with pytest.raises(JobError, match="has a comma; write the decimals after a point"):
        read(text)
