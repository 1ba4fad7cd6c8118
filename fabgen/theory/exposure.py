"""People in the field of a transmitting feed: reference levels and the distance at which they are met.

Depends on: errors.
"""

from __future__ import annotations

import math

from fabgen.errors import JobError
from fabgen.theory.limits import require_positive


def public_whole_body_w_per_m2(frequency_mhz: float) -> float:
    """General-public reference level, whole body, averaged over 30 min: 2 (30 to 400 MHz), f/200 (400 to
    2000 MHz), 10 (2 to 300 GHz) W/m2. ICNIRP 2020 table 5, Health Phys. 118:483; same as ICNIRP 1998 table 7."""
    if not 30 <= frequency_mhz <= 300_000:
        raise JobError(f"{frequency_mhz:g} MHz: the reference levels cover 30 MHz to 300 GHz")
    return min(10.0, max(2.0, frequency_mhz / 200))


def public_local_w_per_m2(frequency_mhz: float) -> float:
    """General-public reference level, local, averaged over 6 min: 0.058 f^0.86 (400 to 2000 MHz), 40 (2 to 6 GHz)
    W/m2. ICNIRP 2020 table 6."""
    if not 400 <= frequency_mhz <= 6000:
        raise JobError(f"{frequency_mhz:g} MHz: the local levels here cover 400 MHz to 6 GHz")
    return 0.058 * float(frequency_mhz) ** 0.86 if frequency_mhz <= 2000 else 40.0


def power_density_w_per_m2(power_w: float, gain_dbi: float, distance_m: float) -> float:
    """Far-field power density P G / (4 pi r^2), W/m2."""
    require_positive(distance_m=distance_m)
    return power_w * float(10 ** (gain_dbi / 10)) / (4 * math.pi * distance_m**2)


def safe_distance_m(power_w: float, gain_dbi: float, frequency_mhz: float) -> float:
    """Distance at which the far field falls to the public whole-body level, sqrt(P G / (4 pi S)), m.

    On the axis of the given gain; far field, so an upper bound close to a dish."""
    level = public_whole_body_w_per_m2(frequency_mhz)
    return math.sqrt(power_w * 10 ** (gain_dbi / 10) / (4 * math.pi * level))


def field_strength_v_per_m(power_density: float) -> float:
    """Electric field of a plane wave of that density (W/m2), sqrt(377 S), V/m."""
    return math.sqrt(376.730313 * power_density)
