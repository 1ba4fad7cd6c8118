"""Bars and bends: the exact relations of the wire loop, the sides of the sheet loop's tabs, refusals."""

from __future__ import annotations

import math

import pytest

from fabgen.errors import JobError, NoSolutionError
from fabgen.job import Job
from fabgen.sizing.layout import leg_place, loop_stock
from fabgen.sizing.relax import relaxed_jobs
from fabgen.sizing.rounding import round_to
from fabgen.stock.joints import foot_screw
from tests.samples import sample_job


def changed(job: Job, section: str, **values: object) -> Job:
    data = job.model_dump()
    data[section].update(values)
    return Job.model_validate(data)


def thin_sheet_job(frequency_mhz: float, sheet_mm: float) -> Job:
    data = sample_job("sheet").model_dump()
    data["target"]["frequency_mhz"] = frequency_mhz
    data["loop"]["sheet_mm"] = sheet_mm
    return Job.model_validate(data)


@pytest.mark.parametrize("diameter", [50.0, 67.2, 80.0])
def test_wire_bars_touch_the_loop_through_the_bend(diameter: float) -> None:
    stock = loop_stock(sample_job())
    place = leg_place(stock, diameter, 31.7)
    r, b, half = diameter / 2, stock.leg_bend_radius_mm, stock.leg_pitch_mm / 2
    # The bend lies in the plane tangent to the circle at p: going back by b along the tangent gives the bar.
    angle = math.atan2(half, place.leg_x_mm) + math.atan2(b, r)
    assert r * math.sin(angle) - b * math.cos(angle) == pytest.approx(half, abs=1e-9)
    assert math.hypot(place.leg_x_mm, half) == pytest.approx(math.hypot(r, b), abs=1e-9)
    assert place.tabs is None


def test_sheet_tabs_go_inward_where_they_fit_and_outward_else() -> None:
    stock = loop_stock(sample_job("sheet"))
    inner = leg_place(stock, 67.2, 31.7)
    assert inner.tabs == "inward"
    assert inner.leg_x_mm < 67.2 / 2 - 7.2 / 2
    outer = leg_place(stock, 67.2, 45.0)
    assert outer.tabs == "outward"
    assert outer.leg_x_mm > 67.2 / 2 + 7.2 / 2


def test_fixed_pitch_is_kept() -> None:
    assert loop_stock(changed(sample_job(), "fixed", leg_pitch_mm=17.3)).leg_pitch_mm == 17.3


def test_narrow_bars_are_widened_for_their_foot_screw() -> None:
    job = sample_job("sheet", frequency_mhz=3400.0)
    assert loop_stock(changed(job, "loop", sheet_mm=0.5)).leg_width_mm >= 4.4


@pytest.mark.parametrize(("temper", "thickness"), [("R300", 1.5), ("R350", 1.0), ("R350", 2.0)])
def test_bends_have_the_radius_that_any_shop_makes(temper: str, thickness: float) -> None:
    job = changed(sample_job("sheet"), "loop", temper=temper, sheet_mm=thickness)
    assert loop_stock(job).leg_bend_radius_mm >= thickness
    free = Job.model_validate({**job.model_dump(), "overrides": {"inside_radius_min_thicknesses": 0.1}})
    assert loop_stock(free).leg_bend_radius_mm >= 0.5 * thickness


def test_a_given_bend_radius_is_kept() -> None:
    assert loop_stock(changed(sample_job("sheet"), "loop", bend_radius_mm=0.8)).leg_bend_radius_mm == 0.8


def test_bars_that_nearly_touch_are_refused() -> None:
    with pytest.raises(JobError, match="would touch"):
        loop_stock(changed(sample_job(), "fixed", leg_pitch_mm=4.1))


@pytest.mark.parametrize(("frequency_mhz", "sheet_mm"), [(5760.0, 0.5), (8000.0, 1.0), (12_000.0, 0.3)])
def test_bars_keep_their_width_where_a_nut_would_be_part_of_the_antenna(frequency_mhz: float, sheet_mm: float) -> None:
    # M2: 4 mm across flats (ISO 4032), 2.4 mm hole (ISO 273); 0.034 wavelengths of strip are 1.8 mm at 5760 MHz.
    stock = loop_stock(thin_sheet_job(frequency_mhz, sheet_mm))
    wanted = max(0.034 * 299_792.458 / frequency_mhz, 1.5 * sheet_mm)
    assert stock.leg_width_mm == pytest.approx(wanted, abs=0.05)
    assert foot_screw(stock.leg_width_mm, 3.0, sheet_mm, 299_792.458 / frequency_mhz) is None


def test_feet_that_are_soldered_need_a_metal_that_takes_solder() -> None:
    job = changed(thin_sheet_job(12_000.0, 0.3), "cable", coax="semi-rigid-047")
    with pytest.raises(NoSolutionError, match="takes no soft solder; use brass or copper"):
        loop_stock(changed(job, "loop", metal="en-aw-5754"))
    assert 'set loop.metal = "cuzn37"' in dict(relaxed_jobs(changed(job, "loop", metal="en-aw-5754")))


def test_bend_and_pitch_that_leave_no_loop() -> None:
    stock = loop_stock(changed(sample_job(), "loop", bend_radius_mm=30.0))
    with pytest.raises(NoSolutionError, match="thinner stock"):
        leg_place(stock, 67.2, 31.7)
    stock = loop_stock(changed(sample_job(), "fixed", leg_pitch_mm=66.0))
    with pytest.raises(NoSolutionError, match="reduce the pitch"):
        leg_place(stock, 67.2, 31.7)


@pytest.mark.parametrize(
    ("value", "step", "rounded"), [(66.84, 0.1, 66.8), (66.85, 0.1, 66.9), (0.3, 0.1, 0.3), (12.37, 0.05, 12.35)]
)
def test_rounding(value: float, step: float, rounded: float) -> None:
    assert round_to(value, step) == rounded


def test_rounding_refuses_what_is_not_a_number() -> None:
    with pytest.raises(JobError, match="finite"):
        round_to(math.nan, 0.1)
