"""Noise of an idealised feed against solid angles, modes against the waveguide roots."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fabgen.sizing.dish import sample_pattern
from fabgen.sizing.modes import bore_modes
from fabgen.sizing.noise import ground_fraction, noise_figures, sky_k
from fabgen.sizing.solver import Complex, Real


def even(theta: Real, phi: Real) -> tuple[Complex, Complex]:
    """Equal intensity everywhere, polarised along y after Ludwig's third definition."""
    ones = np.ones(np.broadcast(theta, phi).shape)
    return ones * np.sin(phi) + 0j, ones * np.cos(phi) + 0j


def figures(elevation: float, half_angle: float = 60.0, efficiency: float = 1.0):  # type: ignore[no-untyped-def]
    sample = sample_pattern(even, math.radians(half_angle))
    return noise_figures(
        sample, elevation_deg=elevation, frequency_mhz=1420.0, radiation_efficiency=efficiency,
        receiver_noise_k=35.0, aperture_efficiency=0.7, dish_diameter_m=3.0,
    )  # fmt: skip


def test_dish_at_the_zenith_spills_onto_ground_up_to_the_horizon() -> None:
    # Feed looks straight down: ground is 60 to 90 degrees, (cos 60 - cos 90) / 2 of the sphere. The step at 90
    # degrees costs the quadrature half a ring.
    assert figures(90.0).ground_share == pytest.approx(0.25, abs=0.015)


def test_dish_at_the_horizon_spills_half_onto_ground() -> None:
    theta = np.radians(np.array([70.0, 90.0, 150.0]))
    assert ground_fraction(theta, 0.0) == pytest.approx([0.5, 0.5, 0.5])


def test_ground_of_the_whole_sphere_is_half_at_any_elevation() -> None:
    # An isotropic feed sees 2 pi of ground; what lies on the dish's cone is taken off by counting it.
    node, weight = np.polynomial.legendre.leggauss(400)
    theta = np.arccos(node)
    for elevation in (10.0, 37.0, 80.0):
        assert np.sum(weight * ground_fraction(theta, elevation)) / 2 == pytest.approx(0.5, abs=1e-3)


def test_loss_adds_its_physical_temperature() -> None:
    # eta T_a + (1 - eta) T_0: RX-01, Pozar 10.1, read in a secondary page that quotes the source.
    whole, lossy = figures(45.0), figures(45.0, efficiency=0.9)
    antenna = whole.system_noise_k - 35.0
    assert lossy.feed_noise_k == pytest.approx(29.0)
    assert lossy.system_noise_k == pytest.approx(0.9 * antenna + 29.0 + 35.0)


def test_g_over_t_is_gain_over_noise() -> None:
    found = figures(45.0)
    gain = 0.7 * (math.pi * 3.0 * 1420e6 / 299_792_458.0) ** 2
    assert found.g_over_t_db_per_k == pytest.approx(10 * math.log10(gain / found.system_noise_k), abs=1e-9)


def test_sky_is_warmer_low_down_and_at_low_frequencies() -> None:
    assert sky_k(408.0, 45.0) > sky_k(1420.0, 45.0) > sky_k(1420.0, 90.0) > 2.73


def test_modes_of_150_mm() -> None:
    # EM-04: 1171.32 / 1529.90 / 1943.04 MHz for TE11 / TM01 / TE21; computed with an independent script.
    modes = {m.name: m for m in bore_modes(150.0, 1420.406)}
    for name, cutoff in (("TE11", 1171.32), ("TM01", 1529.90), ("TE21", 1943.04)):
        assert modes[name].cutoff_mhz == pytest.approx(cutoff, abs=0.01)
    assert modes["TE11"].propagates
    assert not modes["TM01"].propagates
    assert not modes["TM01"].excited
    assert modes["TE21"].excited
