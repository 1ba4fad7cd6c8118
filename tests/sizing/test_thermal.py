"""Drift with temperature: expansion of loop and can, and a capacitor whose metal grows and whose PTFE gets thinner."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from fabgen.job import Job
from fabgen.progress import Silent
from fabgen.sizing import thermal
from fabgen.sizing.capacitor_part import capacitor_part
from fabgen.sizing.field_solver import FieldSolver
from fabgen.sizing.layout import loop_stock
from fabgen.sizing.match import reflection
from fabgen.sizing.records import CapacitorPart, Sizes
from fabgen.sizing.thermal import capacitance_ratio, drift
from fabgen.sizing.tolerances import fit_model
from fabgen.sizing.trial import CanShape, Setting
from fabgen.stock import tables
from tests.samples import sample_job, sample_sizes
from tests.sizing.fitted import BENCH, JOB, MODEL, SIZES, TARGET

SLEEVE, PLATES = (
    capacitor_part(form, 1.0, TARGET, coax=tables.coax("rg402"), plate_width_mm=3.8, transmit_w=0.0)
    for form in ("sleeve", "plates")
)


def drift_at(temperature_deg_c: float, job: Job = JOB, part: CapacitorPart = SLEEVE) -> tuple[float, float]:
    return drift(job, MODEL, SIZES, part=part, bench=BENCH, temperature_deg_c=temperature_deg_c)


def steady(part: CapacitorPart, rise_k: float) -> float:
    return 1.0


def test_drift_follows_expansion_of_loop_and_can(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(thermal, "capacitance_ratio", steady)
    shift, loss = drift_at(-20.0)
    copper = tables.metal(JOB.loop.metal).expansion_per_k
    can = tables.metal(JOB.can.metal).expansion_per_k
    ohm = -40 * (SIZES.tap_height_mm * copper / 0.2 * 1.0 + SIZES.can_bore_mm * can / 0.5 * 0.5)
    assert shift == pytest.approx(-ohm / 2.0, rel=1e-9)
    assert loss > 40


def test_printed_can_drifts_with_its_plastic(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(thermal, "capacitance_ratio", steady)
    printed, turned = (drift_at(50.0, sample_job("wire", make))[0] for make in ("printed", "turned"))
    assert abs(printed) > 1.5 * abs(turned)


def test_sleeve_by_hand() -> None:
    # All lengths of a coaxial capacitor grow with the brass (20.5 parts per million per kelvin, handbook value of
    # CuZn37, from memory), so C grows by as much; PTFE's permittivity falls by 400: (1 + 20.5e-6 dT)(1 - 400e-6 dT).
    assert capacitance_ratio(SLEEVE, 30.0) == pytest.approx((1 + 30 * 20.5e-6) * (1 - 30 * 400e-6), abs=5e-5)
    assert capacitance_ratio(SLEEVE, -40.0) == pytest.approx((1 - 40 * 20.5e-6) * (1 + 40 * 400e-6), abs=7e-5)
    assert capacitance_ratio(SLEEVE, 0.0) == 1.0


def test_plates_by_hand() -> None:
    # Plain plates: e w l / t, with w and l of brass and t of PTFE: -400 + 2 x 20.5 - 180 parts per million per kelvin.
    # The fields at the edges soften the part of the lengths.
    wide = replace(PLATES, plate_width_mm=400.0, overlap_mm=400.0, film_mm=0.05)
    assert capacitance_ratio(wide, 10.0) - 1 == pytest.approx(10 * (-400 + 41 - 180) * 1e-6, rel=0.01)
    assert capacitance_ratio(PLATES, 10.0) - 1 == pytest.approx(10 * (-400 + 41 - 180) * 1e-6, rel=0.2)


def test_ptfe_row_agrees_with_the_clausius_mossotti_relation() -> None:
    # (e - 1) / (e + 2) goes with the density: de/dT = -(e - 1)(e + 2) a for a linear expansion a. Von Hippel,
    # Dielectrics and Waves, known from memory; the row's two figures come from different sources.
    row = tables.dielectric("ptfe")
    e = row.relative_permittivity
    assert row.permittivity_per_k == pytest.approx(-(e - 1) * (e + 2) / e * row.expansion_per_k, rel=0.1)


def test_warm_capacitor_raises_the_resonance() -> None:
    # 1 pF at 1420.406 MHz is 112.05 ohm. At +50 degC it holds (1 + 30 x 20.5e-6)(1 - 30 x 400e-6) = 0.98861 of that:
    # 1.291 ohm more, at 2 ohm per MHz 0.646 MHz upwards; |reflection| = 1.291 / |100 + 1.291j|. Arithmetic.
    stiff = replace(MODEL, linear=np.zeros(2, complex))
    shift, loss = drift(JOB, stiff, SIZES, part=SLEEVE, bench=BENCH, temperature_deg_c=50.0)
    assert shift == pytest.approx(0.646, abs=0.01)
    assert loss == pytest.approx(-20 * math.log10(0.01291), abs=0.1)


def copper_feed() -> tuple[Job, Sizes]:
    data = JOB.model_dump()
    data["can"]["metal"] = "cu-etp"
    return Job.model_validate(data), sample_sizes(JOB)


@pytest.mark.slow
@pytest.mark.thorough
def test_feed_of_one_metal_drifts_like_a_body_of_it(monkeypatch: pytest.MonkeyPatch) -> None:
    # A body that grows by a share in every direction resonates lower by that share (PR-18: df/f = -alpha dT); its
    # capacitor then grows by the same share. Real solves; the model leaves out the crossing's width.
    job, sizes = copper_feed()
    alpha = tables.metal("cu-etp").expansion_per_k
    monkeypatch.setattr(thermal, "capacitance_ratio", lambda part, rise_k: 1 + alpha * rise_k)
    solver = FieldSolver(job, 10.0)
    setting = Setting(job, loop_stock(job), CanShape(sizes.can_bore_mm, sizes.can_depth_mm))
    model = fit_model(setting, sizes, lambda s: solver.solve(s, TARGET), Silent())
    pf = 1e6 / (2 * math.pi * TARGET * model.impedance_ohm.imag)
    sizes = replace(sizes, series_capacitor_pf=pf)
    pair = TARGET * np.array([0.999, 1.001])
    total = [solver.solve(sizes, f).impedance_ohm.imag - 1e6 / (2 * math.pi * f * pf) for f in pair]
    bench = replace(BENCH, slope_ohm_per_mhz=(total[1] - total[0]) / (pair[1] - pair[0]))
    shift, _ = drift(job, model, sizes, part=SLEEVE, bench=bench, temperature_deg_c=50.0)
    assert abs(reflection(model.impedance_ohm, pf, TARGET)) < 0.5
    assert shift == pytest.approx(-30 * alpha * TARGET, rel=0.1)
