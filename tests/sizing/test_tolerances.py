"""Fitted model, yields, trimming, drift and bandwidth against arithmetic on small made-up models."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from fabgen.job import Job
from fabgen.progress import Silent
from fabgen.sizing.capacitor_part import capacitor_part
from fabgen.sizing.layout import loop_stock
from fabgen.sizing.records import Response
from fabgen.sizing.response import band_of, realised_gain_dbi, sweep_frequencies
from fabgen.sizing.tolerances import (
    deviations,
    fit_model,
    sensitivities,
    size_of,
    with_size,
)
from fabgen.sizing.trial import CanShape, Setting
from fabgen.sizing.yields import model_error, trimmed_return_loss, worst_return_loss
from fabgen.stock import tables
from tests.samples import sample_job, sample_sizes
from tests.sizing.fitted import BENCH, JOB, MODEL, REACTANCE, SIZES, TARGET
from tests.sizing.toy_solver import ToySolver

PART = capacitor_part("sleeve", 1.0, TARGET, coax=tables.coax("rg402"), plate_width_mm=3.0, transmit_w=0.0)


def setting(job: Job = JOB) -> Setting:
    return Setting(job, loop_stock(job), CanShape(SIZES.can_bore_mm, SIZES.can_depth_mm))


def test_tolerances_follow_the_process() -> None:
    # ISO 2768-1 table 1 (TO-01, TO-02; read in a secondary page): 120 to 400 mm +-0.5 m, +-0.2 f; 30 to 120 +-0.3 m.
    turned = {d.size: d.tolerance_mm for d in deviations(JOB, SIZES)}
    rolled = {d.size: d.tolerance_mm for d in deviations(sample_job("wire", "rolled"), SIZES)}
    assert (turned["can_bore_mm"], rolled["can_bore_mm"], rolled["loop_diameter_mm"]) == (0.2, 0.5, 0.3)
    sheet_job = sample_job("sheet", "printed")
    sheet = {d.size: d.tolerance_mm for d in deviations(sheet_job, sample_sizes(sheet_job))}
    # ISO 9013 class 1, over 1 mm, 35 to 125 mm: +-0.25 (TO-09); printer +-0.2 to +-0.5 (PR-03).
    assert (sheet["loop_diameter_mm"], sheet["can_bore_mm"]) == (0.25, 0.3)
    assert "leg_x_mm" in sheet


def test_sizes_of_a_choke_and_of_the_conductor_are_reckoned_with() -> None:
    job = sample_job("wire", "turned", choke=True)
    sizes = sample_sizes(job)
    names = {d.size for d in deviations(job, sizes)}
    assert {"choke.bore_mm", "choke.depth_mm", "wire_mm", "leg_bend_radius_mm"} <= names
    assert sizes.choke is not None
    assert size_of(sizes, "choke.depth_mm") == sizes.choke.depth_mm
    moved = with_size(setting(job), sizes, "choke.depth_mm", 50.0)
    assert moved.choke is not None
    assert replace(moved, choke=sizes.choke) == sizes
    assert moved.choke.depth_mm == 50.0
    thick = with_size(setting(job), sizes, "wire_mm", 4.2)
    assert (thick.wire_mm, thick.leg_width_mm) == (4.2, 4.2)
    level = replace(sizes, choke=replace(sizes.choke, floor_z_mm=0.0))
    assert "choke.floor_z_mm" not in {d.size for d in deviations(job, level)}


def test_fit_reproduces_its_own_solves_and_is_checked_against_others() -> None:
    solver = ToySolver(JOB)
    model = fit_model(setting(), SIZES, lambda s: solver.solve(s, TARGET), Silent())
    index = [d.size for d in model.deviations].index("tap_height_mm")
    row = model.deviations[index]
    off = np.zeros((1, len(model.deviations)))
    off[0, index] = row.step_mm / row.tolerance_mm
    moved = replace(SIZES, tap_height_mm=SIZES.tap_height_mm + row.step_mm)
    assert complex(model.impedance(off)[0]) == pytest.approx(solver.solve(moved, TARGET).impedance_ohm, rel=1e-12)
    error = model_error(setting(), SIZES, model, lambda s: solver.solve(s, TARGET))
    assert 0 < error < 0.01


def test_model_that_is_wrong_is_found_out() -> None:
    solver = ToySolver(JOB)
    model = fit_model(setting(), SIZES, lambda s: solver.solve(s, TARGET), Silent())
    wrong = replace(model, linear=-model.linear)
    assert model_error(setting(), SIZES, wrong, lambda s: solver.solve(s, TARGET)) > 0.01


def test_resonance_moves_against_the_slope() -> None:
    rows = {r.size: r for r in sensitivities(MODEL, SIZES, PART, TARGET, 2.0)}
    assert rows["tap_height_mm"].resonance_mhz_per_mm == pytest.approx(-1 / 0.2 / 2.0)
    assert rows["can_bore_mm"].effect_mhz == pytest.approx(0.25)
    assert rows["series_capacitor_pf"].resonance_mhz_per_mm == pytest.approx(-REACTANCE / 2.0)
    # At the worse end of the tap's tolerance R + jX is 2 + 1j ohm off 50: |reflection| = |d| / |100 + d|.
    off = abs(2 + 1j) / abs(100 - 2 - 1j)
    expected = (-20 * math.log10(off) - 40) / 0.2
    assert rows["tap_height_mm"].return_loss_db_per_mm == pytest.approx(expected, rel=1e-6)


def test_worst_return_loss_is_that_of_the_worse_frequency() -> None:
    pair = np.array([TARGET, TARGET * 1.01])
    bench = replace(BENCH, frequency_mhz=pair, impedance_ohm=np.array([complex(50, REACTANCE), complex(75, REACTANCE)]))
    loss = worst_return_loss(np.zeros(1, complex), np.ones(1), bench)
    total = complex(75, REACTANCE - REACTANCE / 1.01)
    assert loss[0] == pytest.approx(-20 * math.log10(abs((total - 50) / (total + 50))))


def test_trimming_takes_out_resistance_by_the_tap_and_reactance_by_the_capacitor() -> None:
    shift = np.array([6 + 10j])
    before = worst_return_loss(shift, np.ones(1), BENCH)
    after = trimmed_return_loss(MODEL, shift, SIZES, part=PART, bench=BENCH)
    assert before[0] < 20
    assert after[0] > 40


def test_trimming_ends_where_the_capacitor_ends() -> None:
    stiff = replace(PART, minimum_pf=0.999, maximum_pf=1.001)
    after = trimmed_return_loss(MODEL, np.array([0 + 40j]), SIZES, part=stiff, bench=BENCH)
    assert after[0] < 20


def test_band_edges_are_interpolated() -> None:
    frequency = tuple(np.linspace(1400, 1440, 41))
    # Return loss falls by 1 dB per MHz from 30 dB at 1420: 20 dB is reached 10 MHz away, and 24.5 dB 5.5 MHz away.
    reflected = tuple(complex(10 ** (-(30 - abs(f - 1420)) / 20)) for f in frequency)
    response = Response(frequency, reflected, tuple(0.0 for _ in frequency))
    assert band_of(response, 1420, 20).width_mhz == pytest.approx(20.0)
    assert band_of(response, 1420, 24.5).width_mhz == pytest.approx(11.0)
    assert band_of(response, 1420, 31).width_mhz == 0.0


def test_gain_of_a_matched_lossless_source() -> None:
    # 50 ohm, 1 A peak: 25 W radiated evenly, so |E|^2 = 2 eta0 25 / (4 pi): 0 dBi. Half the power lost by a mismatch
    # of |reflection|^2 = 1/2 is 3.01 dB. Arithmetic.
    field = math.sqrt(2 * 376.730313412 * 25 / (4 * math.pi))
    frequency = np.array([TARGET])
    series = 1j * 1e6 / (2 * math.pi * TARGET * 1.0)
    matched = realised_gain_dbi(np.array([field + 0j]), np.array([50 + series]), 1.0, frequency)
    assert matched[0] == pytest.approx(0.0, abs=1e-9)
    mismatched = realised_gain_dbi(np.array([field + 0j]), np.array([50 + 100j + series]), 1.0, frequency)
    assert mismatched[0] == pytest.approx(10 * math.log10(0.5), abs=1e-9)


def test_sweep_holds_the_target_itself() -> None:
    assert TARGET in sweep_frequencies(TARGET)
