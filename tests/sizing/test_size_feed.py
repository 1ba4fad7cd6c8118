"""The whole chain with a closed-form solver: order of steps, rounding, fixed sizes, wishes, refusals, records."""

from __future__ import annotations

import dataclasses
import json
import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fabgen.cli import main
from fabgen.errors import FabgenError, JobError, NoSolutionError, NumericalError
from fabgen.job import Job
from fabgen.progress import Progress
from fabgen.sizing.front import selectivity_front
from fabgen.sizing.records import Feed, Sizes
from fabgen.sizing.response import reflections
from fabgen.sizing.size_feed import size_feed
from tests.examples import ROOT
from tests.samples import sample_job
from tests.sizing.toy_solver import ToySolution, ToySolver, ToySweep


def job_with(form: str = "wire", make: str = "turned", frequency_mhz: float = 1420.406, **sections: Any) -> Job:
    data = sample_job(form, make, frequency_mhz).model_dump()
    for section, values in sections.items():
        data[section].update(values)
    return Job.model_validate(data)


def sized(job: Job) -> Feed:
    return size_feed(job, make_solver=ToySolver)


def is_multiple(value: float, step: float) -> bool:
    return abs(value / step - round(value / step)) < 1e-6


@pytest.fixture(scope="module")
def feed() -> Feed:
    return sized(job_with())


def test_match_and_rounding(feed: Feed) -> None:
    s = feed.sizes
    for name in ("can_bore_mm", "can_depth_mm", "loop_diameter_mm", "loop_height_mm", "tap_height_mm", "leg_pitch_mm"):
        assert is_multiple(getattr(s, name), 0.1), name
    assert is_multiple(s.series_capacitor_pf, 0.01)
    assert feed.predicted.return_loss_db > 25
    assert feed.predicted.impedance_ohm.real == pytest.approx(50, rel=0.05)


def test_predictions_are_those_of_the_rounded_sizes(feed: Feed) -> None:
    solution = ToySolver(feed.job).solve(feed.sizes, feed.job.target.frequency_mhz)
    assert feed.predicted.impedance_ohm == solution.impedance_ohm
    total = solution.impedance_ohm - 1j * 1e6 / (
        2 * math.pi * feed.job.target.frequency_mhz * feed.sizes.series_capacitor_pf
    )
    loss = -20 * math.log10(abs((total - 50) / (total + 50)))
    assert feed.predicted.return_loss_db == pytest.approx(loss, abs=1e-9)


def test_response_spans_the_sweep_and_agrees_at_the_target(feed: Feed) -> None:
    response, target = feed.predicted.response, feed.job.target.frequency_mhz
    assert response.frequency_mhz[0] == pytest.approx(0.3 * target)
    assert response.frequency_mhz[-1] == pytest.approx(2.2 * target)
    at = response.frequency_mhz.index(target)
    assert -20 * math.log10(abs(response.reflection[at])) == pytest.approx(feed.predicted.return_loss_db, abs=1e-6)
    reference = next(g for g in feed.predicted.gain if g.frequency_mhz == target)
    assert reference.relative_db == 0.0
    # Realised gain at the match is the directivity less the ohmic loss, to within the mismatch.
    lossless = feed.predicted.directivity_dbi - feed.predicted.ohmic_loss_db
    assert reference.gain_dbi == pytest.approx(lossless, abs=0.03)


def test_gain_is_never_more_than_directivity_at_low_frequency(feed: Feed) -> None:
    assert feed.predicted.response.gain_dbi[0] < feed.predicted.directivity_dbi - 20


def test_bandwidth_is_read_off_the_reflection(feed: Feed) -> None:
    response, target = feed.predicted.response, feed.job.target.frequency_mhz
    half = feed.predicted.bandwidth_mhz / 2
    assert half > 1
    inside = [
        abs(r)
        for f, r in zip(response.frequency_mhz, response.reflection, strict=True)
        if abs(f - target) < 0.2 * half
    ]
    assert max(inside) <= 10 ** (-feed.predicted.bandwidth_return_loss_db / 20)


def test_sensitivities_against_the_closed_form(feed: Feed) -> None:
    by_name = {s.size: s for s in feed.sensitivities}
    assert set(by_name) == {
        "loop_diameter_mm", "loop_height_mm", "leg_pitch_mm", "tap_height_mm", "can_bore_mm", "can_depth_mm",
        "series_capacitor_pf", "wire_mm", "leg_bend_radius_mm",
    }  # fmt: skip
    # The toy's bore acts as 5 ohm per wavelength on the reactance only.
    slope = (
        (5 / feed.job.wavelength_mm)
        / by_name["can_bore_mm"].resonance_mhz_per_mm
        * (1 + 0.002 * (1 / 0.625 - 1))
    )
    pf = feed.sizes.series_capacitor_pf
    per_pf = 1e6 / (2 * math.pi * feed.job.target.frequency_mhz * pf**2)
    assert by_name["series_capacitor_pf"].resonance_mhz_per_mm == pytest.approx(per_pf / slope, rel=0.01)
    effects = [s.effect_mhz for s in feed.sensitivities]
    assert effects == sorted(effects, reverse=True)
    assert feed.yields.dominant == tuple(s.size for s in feed.sensitivities[:3])


def test_yield_is_better_after_trimming_and_the_model_is_checked(feed: Feed) -> None:
    y = feed.yields
    assert y.samples >= 2000
    assert y.model_check_samples >= 20
    assert y.model_error < 0.01
    assert 0 <= y.before_trimming <= y.after_trimming <= 1
    strict = sized(job_with(wishes={"return_loss_db": 35}))
    assert strict.yields.before_trimming < 0.85
    assert strict.yields.after_trimming > 0.95


def test_cold_lowers_the_resonance_since_the_capacitor_rules(feed: Feed, monkeypatch: pytest.MonkeyPatch) -> None:
    # PTFE's permittivity moves twenty times as fast as brass grows; with a steady capacitor cold metal resonates
    # higher (PR-18: df/f = -alpha dT).
    assert feed.yields.drift_mhz_cold < 0 < feed.yields.drift_mhz_hot
    monkeypatch.setattr("fabgen.sizing.thermal.capacitance_ratio", lambda part, rise_k: 1.0)
    plain = sized(job_with()).yields
    assert plain.drift_mhz_cold > 0 > plain.drift_mhz_hot


@pytest.mark.parametrize(
    "fixed",
    [
        {"can_bore_mm": 175.55},
        {"can_depth_mm": 71.37},
        {"loop_diameter_mm": 66.66},
        {"loop_height_mm": 30.03},
        {"leg_pitch_mm": 14.44},
        {"tap_height_mm": 12.34},
        {"can_bore_mm": 210.01, "can_depth_mm": 60.02, "loop_diameter_mm": 67.03, "leg_pitch_mm": 13.04},
        {"tap_height_mm": 13.84, "loop_height_mm": 32.03},
    ],
)
def test_fixed_sizes_are_kept_exactly(fixed: dict[str, float]) -> None:
    feed = sized(job_with(fixed=fixed))
    for name, value in fixed.items():
        assert getattr(feed.sizes, name) == value
    assert feed.predicted.return_loss_db >= 20


@pytest.mark.parametrize(("form", "make"), [("sheet", "rolled"), ("wire", "folded"), ("sheet", "turned")])
def test_other_stock_and_makes(form: str, make: str) -> None:
    feed = sized(job_with(form, make))
    assert feed.sizes.can_flats == (8 if make == "folded" else 0)
    assert (feed.sizes.tabs is None) == (form == "wire")
    assert feed.capacitor.form == ("sleeve" if form == "wire" else "plates")


def test_choke_is_searched_around_what_the_job_gives() -> None:
    given = sized(job_with(can={"choke": {"bore_mm": 290.25, "floor_z_mm": 3.5}})).sizes.choke
    assert given is not None
    assert (given.bore_mm, given.floor_z_mm) == (290.25, 3.5)
    assert given.depth_mm > 0
    free = sized(job_with(can={"choke": True}))
    assert free.sizes.choke is not None
    assert free.sizes.choke.bore_mm > free.sizes.can_bore_mm + 2 * free.sizes.wall_mm
    assert free.sizes.choke.floor_z_mm + free.sizes.choke.depth_mm <= free.sizes.can_depth_mm + 1e-9
    shallow = sized(job_with(can={"choke": {"depth_mm": 15.0}}))
    assert "choke.floor_z_mm" in {s.size for s in shallow.sensitivities}
    assert len({t.choke.floor_z_mm for t in shallow.can_trials if t.choke is not None}) >= 3
    small = sized(job_with(can={"choke": {"bore_mm": 220.0}}))
    assert small.sizes.can_bore_mm + 2 * small.sizes.wall_mm < 220.0
    with pytest.raises(NoSolutionError, match=r"can\.choke\.bore_mm"):
        sized(job_with(can={"choke": {"bore_mm": 140.0}}))


def test_selectivity_moves_the_loop() -> None:
    sharp, broad = (sized(job_with(wishes={"selectivity": s})) for s in ("sharp", "broad"))
    assert sharp.sizes.loop_diameter_mm < broad.sizes.loop_diameter_mm
    assert sharp.sizes.loop_height_mm < broad.sizes.loop_height_mm


def test_no_reflection_is_above_one() -> None:
    frequency = np.array([900.0, 1000.0])
    found = reflections(np.array([-0.002 - 300j, 50 + 40j]), 1.0, frequency)
    assert np.abs(found[0]) <= 1.0
    total = 50 + 40j - 1j * 1e6 / (2 * np.pi * 1000.0)
    assert found[1] == pytest.approx((total - 50) / (total + 50))


def test_band_that_cannot_be_covered_is_said() -> None:
    feed = sized(job_with(wishes={"bandwidth_mhz": 600.0}))
    assert any("band" in r for r in feed.remarks)


def test_neighbour_outside_the_sweep_is_said_and_not_computed() -> None:
    neighbours = [{"frequency_mhz": 5800.0, "rejection_db": 20.0}, {"frequency_mhz": 200.0}]
    feed = sized(job_with(wishes={"neighbours": neighbours}))
    assert sum("its rejection was not computed" in r for r in feed.remarks) == 2
    assert not {5800.0, 200.0} & {g.frequency_mhz for g in feed.predicted.gain}


def test_uncertainty_of_the_return_loss_is_that_of_the_reflection(feed: Feed) -> None:
    # The reflection may lie anywhere within the change between the meshes: the least loss is that of both added.
    loss, unsure = feed.predicted.return_loss_db, feed.settings.return_loss_uncertainty_db
    moved = next(c.value for c in feed.self_checks if c.name == "second mesh")
    assert loss - unsure == pytest.approx(-20 * math.log10(10 ** (-loss / 20) + moved), abs=0.3)
    assert unsure > 0.5


def test_missed_rejection_is_said() -> None:
    feed = sized(job_with(wishes={"neighbours": [{"frequency_mhz": 1430.0, "rejection_db": 60.0}]}))
    assert any("60 dB wished at 1430 MHz" in r for r in feed.remarks)
    assert any(g.frequency_mhz == 1430.0 for g in feed.predicted.gain)


def test_same_job_same_feed() -> None:
    first, second = (json.dumps(dataclasses.asdict(dataclasses.replace(sized(job_with()), job=None)), default=str)  # type: ignore[arg-type]
                     for _ in range(2))  # fmt: skip
    assert first == second


class NeverMatched(ToySolver):
    """A loop whose tap always sees 5 ohm."""

    def solve(self, sizes: Any, frequency_mhz: float) -> ToySolution:
        return dataclasses.replace(super().solve(sizes, frequency_mhz), impedance_ohm=5 + 75j)


def test_nothing_fits_names_the_limit_and_no_false_hope() -> None:
    with pytest.raises(NoSolutionError, match=r"less than the 50 ohm wanted.*No nearby job"):
        size_feed(job_with(), make_solver=NeverMatched)


def test_nearest_job_that_works_is_named() -> None:
    job = job_with(fixed={"tap_height_mm": 5.0, "loop_height_mm": 32.0, "loop_diameter_mm": 60.0, "leg_pitch_mm": 13.0})
    with pytest.raises(NoSolutionError, match=r"The nearest job that works: leave fixed"):
        sized(job)


def test_printer_bed_limits_the_bore() -> None:
    feed = sized(job_with(make="printed", limits={"bed_mm": (230.0, 230.0, 200.0)}))
    assert feed.sizes.can_bore_mm <= 230 - 2 * 2.4 - 28
    assert any("bed" in r for r in feed.remarks)
    # A bed that is far too small is no limit: the body comes in pieces.
    assert sized(job_with(make="printed", frequency_mhz=408.0)).sizes.can_bore_mm > 500


def test_sheet_limits_the_bore() -> None:
    with pytest.raises(NoSolutionError, match=r"sheet of 1000 mm length.*The nearest job that works"):
        sized(job_with(make="rolled", frequency_mhz=408.0, limits={"sheet_mm": (500.0, 1000.0)}))


class Unbalanced(ToySolver):
    """A solver whose power does not add up."""

    def solve(self, sizes: Any, frequency_mhz: float) -> ToySolution:
        return dataclasses.replace(super().solve(sizes, frequency_mhz), power_balance=0.2)


def test_failed_self_check_stops_with_its_number() -> None:
    with pytest.raises(NumericalError, match=r"power balance 0\.2"):
        size_feed(job_with(), make_solver=Unbalanced)


@pytest.mark.parametrize(
    ("fault", "words"),
    [
        ({"power_balance": 0.02}, "power balance 0.02 (limit 0.01)"),
        ({"power_balance": -0.02}, "power balance 0.02 (limit 0.01)"),
        ({"residual": 1e-3}, "residual 0.001 (limit 1e-06)"),
        ({"residual": math.nan}, "residual nan (limit 1e-06)"),
        ({"condition": math.inf}, "condition inf (limit 1e+09)"),
        ({"largest_edge_wavelengths": 0.21}, "largest edge 0.21 (limit 0.2)"),
        (None, "sweep error 0.5"),
    ],
    ids=["radiates too little", "radiates too much", "residual", "no residual", "condition", "edge", "sweep"],
)
def test_a_bad_solver_stops_the_pack(
    fault: dict[str, Any] | None, words: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    class Bad(ToySolver):
        def solve(self, sizes: Sizes, frequency_mhz: float) -> ToySolution:
            return dataclasses.replace(super().solve(sizes, frequency_mhz), **(fault or {}))

        def sweep(self, sizes: Sizes, start_mhz: float, stop_mhz: float, target_mhz: float) -> ToySweep:
            right = super().sweep(sizes, start_mhz, stop_mhz, target_mhz)
            return right if fault else dataclasses.replace(right, error_estimate=0.5)

    def with_bad_solver(job: Job, progress: Progress) -> Feed:
        return size_feed(job, progress, Bad)

    monkeypatch.setattr("fabgen.sizing.size_feed.size_feed", with_bad_solver)
    job = str(ROOT / "templates" / "hydrogen-wire.toml")
    assert main(["pack", job, "-o", str(tmp_path / "pack"), "--quiet", "--no-cache"]) == 6
    assert words in capsys.readouterr().err
    assert not list(tmp_path.iterdir())


def test_front_has_eight_points_that_trade_rejection() -> None:
    job = job_with()
    front = selectivity_front(job, make_solver=ToySolver)
    assert len(front.points) >= 8
    assert all(p.return_loss_db > 20 for p in front.points)
    assert [p.share for p in front.points] == sorted(p.share for p in front.points)


class HalfBuildable(ToySolver):
    """Loops higher than 0.145 wavelengths cannot be matched."""

    def solve(self, sizes: Any, frequency_mhz: float) -> ToySolution:
        found = super().solve(sizes, frequency_mhz)
        if sizes.loop_height_mm > 0.145 * 299_792.458 / self.target_mhz:
            return dataclasses.replace(found, impedance_ohm=5 + 75j)
        return found


def test_front_is_filled_up_where_half_of_it_cannot_be_built() -> None:
    front = selectivity_front(job_with(wishes={"selectivity": "sharp"}), make_solver=HalfBuildable)
    assert len(front.points) >= 8
    assert front.refused
    shares = [p.share for p in front.points]
    assert shares == sorted(set(shares))


@settings(deadline=None, max_examples=12, suppress_health_check=[HealthCheck.too_slow], derandomize=True)
@given(data=st.data())
def test_random_jobs_are_matched_or_refused_with_advice(data: st.DataObject) -> None:
    frequency = data.draw(st.floats(300, 12_000))
    form = data.draw(st.sampled_from(["wire", "sheet"]))
    stock: dict[str, Any] = (
        {"wire_mm": data.draw(st.floats(1, 8))} if form == "wire" else {"sheet_mm": data.draw(st.floats(0.3, 3))}
    )
    try:
        job = job_with(
            form, data.draw(st.sampled_from(["folded", "rolled", "turned"])), frequency, loop=stock,
            dish={"focal_ratio": data.draw(st.floats(0.25, 1.2))},
            cable={"coax": data.draw(st.sampled_from(["rg402", "rg405"]))},
        )  # fmt: skip
    except ValueError:
        return
    try:
        feed = sized(job)
    except (NoSolutionError, JobError) as error:
        assert any(c.isdigit() for c in str(error))
        return
    except FabgenError as error:
        pytest.fail(f"unexpected family: {error!r}")
    assert feed.predicted.return_loss_db >= 15
