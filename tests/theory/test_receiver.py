"""Noise, intermodulation, exposure and expansion against the reference table."""

from __future__ import annotations

import pytest

from fabgen.errors import JobError
from fabgen.theory import expansion, exposure, intermodulation, noise


# RX-02, RX-03; formula RX-01 (Pozar 10.1), computed with an independent script.
@pytest.mark.parametrize(
    ("loss", "physical", "kelvin"),
    [(0.1, 290, 6.755), (0.2, 290, 13.667), (0.5, 290, 35.385), (1, 290, 75.088), (3, 290, 288.626), (0.5, 77, 9.395)],
)
def test_attenuator(loss: float, physical: float, kelvin: float) -> None:
    assert noise.attenuator_noise_k(loss, physical) == pytest.approx(kelvin, abs=6e-4)


def test_noise_figure() -> None:
    # RX-04: T = 290 (F - 1), Federal Standard 1037C, read in a secondary page. F = 2 is 290 K.
    assert noise.noise_figure_to_k(3.0103) == pytest.approx(290, abs=0.01)
    assert noise.k_to_noise_figure_db(290) == pytest.approx(3.0103, abs=1e-4)


def test_friis_example() -> None:
    # RX-07: NF 2 dB gain 10; loss 1; NF 4 loss 3 (Pozar-type example); computed with an independent script.
    stages = [
        noise.Stage(10, noise.noise_figure_to_k(2)),
        noise.Stage(-1, noise.attenuator_noise_k(1)),
        noise.Stage(-3, noise.noise_figure_to_k(4)),
    ]
    total = noise.chain(stages)
    assert total.noise_k == pytest.approx(232.33, abs=0.01)
    assert total.gain_db == pytest.approx(6)
    assert noise.k_to_noise_figure_db(total.noise_k) == pytest.approx(2.55543, abs=1e-4)


def test_thermal_noise() -> None:
    # RX-08: -173.975 dBm/Hz; k exact in the SI.
    assert noise.thermal_noise_dbm_per_hz() == pytest.approx(-173.975, abs=6e-4)


def test_noise_refusals() -> None:
    with pytest.raises(JobError, match="loss is"):
        noise.attenuator_noise_k(-1)
    with pytest.raises(JobError, match="noise temperature"):
        noise.k_to_noise_figure_db(-1)
    with pytest.raises(JobError, match="one stage"):
        noise.chain([])


def test_intermodulation() -> None:
    # RX-09 (Pozar 10.3), RX-10, RX-11 computed; RX-12 Hausman, read in a secondary page.
    assert intermodulation.third_order_input_dbm(-30, 10) == -110
    assert intermodulation.third_order_below_tones_db(-30, 10) == 80
    assert intermodulation.third_order_output_dbm(-10, 30) == -90
    assert intermodulation.third_order_frequencies_mhz(1420.0, 1420.1) == pytest.approx((1419.9, 1420.2))
    assert intermodulation.triple_beat_input_dbm(-30, 10) == -104


def test_exposure_levels() -> None:
    # SA-07..SA-09, SA-11: ICNIRP 2020 tables 5 and 6, read in a secondary page; values computed.
    assert exposure.public_whole_body_w_per_m2(1420.4) == pytest.approx(7.102)
    assert exposure.public_whole_body_w_per_m2(2000) == 10
    assert exposure.public_whole_body_w_per_m2(5800) == 10
    # ICNIRP 1998 table 7, 10 to 400 MHz: 2 W/m2; from memory.
    assert exposure.public_whole_body_w_per_m2(300) == 2
    assert exposure.public_local_w_per_m2(1420.4) == pytest.approx(29.82, abs=0.01)
    assert exposure.public_local_w_per_m2(2400) == 40
    assert exposure.field_strength_v_per_m(7.102) == pytest.approx(51.8, abs=0.1)
    with pytest.raises(JobError, match="30 MHz"):
        exposure.public_whole_body_w_per_m2(10)
    with pytest.raises(JobError, match="400 MHz"):
        exposure.public_local_w_per_m2(300)


def test_distance_meets_the_level() -> None:
    # Isotropic source: S = P/(4 pi r^2); at r from the function S is the level.
    distance = exposure.safe_distance_m(50, 9, 1420.4)
    assert exposure.power_density_w_per_m2(50, 9, distance) == pytest.approx(7.102)
    assert exposure.safe_distance_m(4 * 3.141592653589793 * 7.102, 0, 1420.4) == pytest.approx(1)


def test_expansion() -> None:
    # PR-18: aluminium 23.4e-6 x 50 K = -0.117 %, -1.66 MHz at 1420 MHz; arithmetic.
    assert expansion.drift_mhz(1420, 23.4e-6, 50) == pytest.approx(-1.66, abs=0.005)
    assert expansion.length_change_mm(200, 68e-6, 70) == pytest.approx(0.952)
