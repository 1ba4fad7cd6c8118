"""The paraboloid: half angle, space attenuation, and the closed forms of cos^n feeds.

The feed's gain is G = 2 (n + 1) cos^n(theta) up to 90 degrees and nothing behind.

Depends on: errors.
"""

from __future__ import annotations

import math

from fabgen.errors import JobError
from fabgen.theory.limits import require_between, require_positive


def half_angle_deg(focal_ratio: float) -> float:
    """Angle between axis and rim seen from the focus, 2 atan(1 / (4 f/D)), degrees. ``focal_ratio`` above 0."""
    require_positive(focal_ratio=focal_ratio)
    return math.degrees(2 * math.atan(1 / (4 * focal_ratio)))


def focal_ratio(half_angle_in_deg: float) -> float:
    """f/D = 1 / (4 tan(theta0/2)), the inverse of ``half_angle_deg``; 0 to 180 degrees."""
    require_positive(half_angle_deg=half_angle_in_deg)
    require_between(0, 179.9, half_angle_deg=half_angle_in_deg)
    return 1 / (4 * math.tan(math.radians(half_angle_in_deg) / 2))


def space_attenuation_db(theta_deg: float) -> float:
    """Loss of the longer way to the rim, 40 log10 cos(theta/2), dB (at or below 0)."""
    require_between(0, 179.9, theta_deg=theta_deg)
    return 40 * math.log10(math.cos(math.radians(theta_deg) / 2))


def spillover_efficiency(exponent: int, half_angle_in_deg: float) -> float:
    """Share of a cos^n feed's power that meets the dish, 1 - cos^(n+1)(theta0). Silver; Balanis ch. 15."""
    require_between(0, 90, half_angle_deg=half_angle_in_deg)
    return float(1 - math.cos(math.radians(half_angle_in_deg)) ** (exponent + 1))


def aperture_efficiency(exponent: int, half_angle_in_deg: float) -> float:
    """Aperture efficiency of a cos^n feed, n even, up to 90 degrees.

    eta = cot^2(theta0/2) |int sqrt(G) tan(t/2) dt|^2. With u = cos t the integral is that of u^m/(1 + u), m = n/2,
    which polynomial division solves: sum of (-1)^(m-1-k) (1 - u0^(k+1))/(k+1) over k < m, plus
    (-1)^m ln(2/(1 + u0)). Silver, Microwave Antenna Theory and Design; Balanis eq. 15-55."""
    if exponent < 0 or exponent % 2:
        raise JobError(f"exponent is {exponent}: the closed form holds for even exponents 0, 2, 4, ...")
    require_between(1e-3, 90, half_angle_deg=half_angle_in_deg)
    u0 = math.cos(math.radians(half_angle_in_deg))
    m = exponent // 2
    integral = (-1) ** m * math.log(2 / (1 + u0))
    integral += sum((-1) ** (m - 1 - k) * (1 - u0 ** (k + 1)) / (k + 1) for k in range(m))
    cotangent_squared = (1 + u0) / (1 - u0)
    return float(cotangent_squared * 2 * (exponent + 1) * integral**2)


def optimum_half_angle_deg(exponent: int) -> float:
    """Half angle of the dish that a cos^n feed fills with the best aperture efficiency, degrees.

    By golden-section search; the efficiency has one maximum between 1 and 90 degrees for n of 2 and more."""
    low, high = 1.0, 90.0
    ratio = (math.sqrt(5) - 1) / 2
    while high - low > 1e-6:
        left, right = high - ratio * (high - low), low + ratio * (high - low)
        if aperture_efficiency(exponent, left) > aperture_efficiency(exponent, right):
            high = right
        else:
            low = left
    return 0.5 * (low + high)


def dish_gain_dbi(diameter_m: float, frequency_mhz: float, efficiency: float) -> float:
    """Gain of a dish, eta (pi D / lambda)^2, dBi."""
    require_positive(diameter_m=diameter_m, frequency_mhz=frequency_mhz, efficiency=efficiency)
    return 10 * math.log10(efficiency * (math.pi * diameter_m * frequency_mhz / 299.792458) ** 2)
