"""Noise of the dish and its feed, and G/T.

All temperatures are referred to the feed's output, so that T_sys = eta T_antenna + (1 - eta) T_0 + T_receiver with
the feed's radiation efficiency eta.

Depends on: sizing.dish, sizing.solver.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fabgen.sizing.dish import DishSample, ring_power
from fabgen.sizing.solver import Real

GROUND_K = 290.0
PHYSICAL_K = 290.0


@dataclass(frozen=True)
class NoiseFigures:
    """Temperatures in kelvin and G/T in dB(1/K)."""

    ground_share: float
    spillover_noise_k: float
    sky_noise_k: float
    feed_noise_k: float
    system_noise_k: float
    g_over_t_db_per_k: float


def sky_k(frequency_mhz: float, elevation_deg: float) -> float:
    """Sky brightness: 2.73 K background, 20 K (408 MHz / f)^2.75 galactic away from the plane, and a dry
    atmosphere of 2 K at the zenith over sin(elevation).

    Common practice for 0.3 to 12 GHz, no source; known from memory.
    """
    atmosphere = 2.0 / math.sin(math.radians(max(elevation_deg, 5.0)))
    galaxy = 20.0 * math.pow(408.0 / frequency_mhz, 2.75)
    return 2.73 + galaxy + atmosphere


def ground_fraction(theta_rad: Real, elevation_deg: float) -> Real:
    """Part of the ring at ``theta`` off the feed's axis that looks at the ground, 0 to 1.

    The feed looks along -p, with p the dish's pointing at the elevation e. A direction at (theta, phi) has the
    height sin(theta) sin(phi) cos(e) - cos(theta) sin(e); below 0 it meets flat ground. The ring is averaged over
    phi, since the user may mount the feed at any polarisation angle: 1/2 + asin(cot(theta) tan(e)) / pi.
    """
    elevation = math.radians(elevation_deg)
    rise = np.cos(theta_rad) * math.sin(elevation)
    reach = np.maximum(np.sin(theta_rad) * math.cos(elevation), 1e-12)
    fraction: Real = 0.5 + np.arcsin(np.clip(rise / reach, -1.0, 1.0)) / math.pi
    return fraction


def noise_figures(
    sample: DishSample,
    *,
    elevation_deg: float,
    frequency_mhz: float,
    radiation_efficiency: float,
    receiver_noise_k: float,
    aperture_efficiency: float,
    dish_diameter_m: float,
) -> NoiseFigures:
    """Noise of a dish that looks at ``elevation_deg`` over flat ground of 290 K.

    Power beyond the dish's edge sees ground or sky by its direction; all power on the dish sees the sky. The
    dish is tight (no leakage through a mesh) and the edge does not diffract.
    """
    _, inside = ring_power(sample.inside)
    theta, outside = ring_power(sample.outside)
    total = float(np.sum(inside) + np.sum(outside))
    ground = float(np.sum(outside * ground_fraction(theta, elevation_deg))) / total
    sky = sky_k(frequency_mhz, elevation_deg) * (1 - ground)
    spill = GROUND_K * ground
    loss = PHYSICAL_K * (1 - radiation_efficiency)
    system = radiation_efficiency * (spill + sky) + loss + receiver_noise_k
    wavelength_m = 299.792458 / frequency_mhz
    gain = aperture_efficiency * radiation_efficiency * (math.pi * dish_diameter_m / wavelength_m) ** 2
    return NoiseFigures(
        ground_share=ground,
        spillover_noise_k=spill,
        sky_noise_k=sky,
        feed_noise_k=loss,
        system_noise_k=system,
        g_over_t_db_per_k=10 * math.log10(gain / system),
    )
