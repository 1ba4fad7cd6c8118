"""The match: root finding on the tap, capacitor in closed form, limits that refuse."""

from __future__ import annotations

import math
from dataclasses import replace
from types import SimpleNamespace
from typing import Any

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from fabgen.errors import NoSolutionError
from fabgen.sizing.capacitor_part import series_capacitor_pf
from fabgen.sizing.match import (
    MatchError,
    reflection,
    require_capacitor_in_range,
    return_loss_db,
    tap_for_resistance,
    tap_range_mm,
)
from fabgen.sizing.records import Sizes
from tests.samples import sample_job, sample_sizes

SIZES = sample_sizes(sample_job())


def tapped(exponent: float, at_13_mm: float) -> Any:
    def solve(sizes: Sizes) -> Any:
        return SimpleNamespace(impedance_ohm=complex(at_13_mm * (sizes.tap_height_mm / 13) ** exponent, 80.0))

    return solve


@settings(deadline=None, max_examples=60)
@given(st.floats(0.8, 4.5), st.floats(25.0, 90.0), st.floats(5.0, 20.0))
def test_tap_is_found_with_few_solves(exponent: float, at_13_mm: float, start: float) -> None:
    low, high = tap_range_mm(SIZES)
    root = 13 * (50 / at_13_mm) ** (1 / exponent)
    sizes = replace(SIZES, tap_height_mm=start)
    # Within the search's own tolerance of an end of the bar either answer is right.
    assume(not any(abs(exponent * math.log(root / end)) < 0.02 for end in (low, high)))
    if low < root < high:
        found = tap_for_resistance(tapped(exponent, at_13_mm), sizes)
        assert found.solution.impedance_ohm.real == pytest.approx(50, rel=0.0101)
        assert found.solves <= 5
    else:
        with pytest.raises(MatchError, match="ohm wanted"):
            tap_for_resistance(tapped(exponent, at_13_mm), sizes)


def test_no_room_for_a_tap_is_named() -> None:
    with pytest.raises(MatchError, match="too short for a tap"):
        tap_for_resistance(tapped(2, 50), replace(SIZES, loop_height_mm=9.0))


def test_a_wild_resistance_ends_with_a_message() -> None:
    def solve(sizes: Sizes) -> Any:
        return SimpleNamespace(impedance_ohm=complex(10.0 if round(sizes.tap_height_mm * 1e6) % 2 else 200.0, 1.0))

    with pytest.raises(MatchError, match=r"did not settle|ohm wanted"):
        tap_for_resistance(solve, SIZES)


def test_capacitor_cancels_the_reactance() -> None:
    # Closed form C = 1 / (omega X); 0.3 and 5 pF at 1420 MHz are the reactance limits.
    assert series_capacitor_pf(105.7, 1420.406) == pytest.approx(1e12 / (2 * math.pi * 1420.406e6 * 105.7))
    assert abs(reflection(50 + 105.7j, series_capacitor_pf(105.7, 1420.406), 1420.406)) < 1e-12
    assert series_capacitor_pf(373.5, 1420.406) == pytest.approx(0.3, abs=0.001)
    assert series_capacitor_pf(22.4, 1420.406) == pytest.approx(5.0, abs=0.01)


@pytest.mark.parametrize("reactance", [0.0, -20.0])
def test_capacitive_tap_is_refused(reactance: float) -> None:
    with pytest.raises(NoSolutionError, match="needs an inductive one"):
        series_capacitor_pf(reactance, 1420.0)


@pytest.mark.parametrize(("reactance", "word"), [(10.0, "too large"), (500.0, "stray")])
def test_capacitor_outside_its_range_is_refused(reactance: float, word: str) -> None:
    with pytest.raises(MatchError, match=word):
        require_capacitor_in_range(reactance)


def test_return_loss() -> None:
    assert return_loss_db(0.1 + 0j) == pytest.approx(20.0)
    assert return_loss_db(0j) == 80.0
