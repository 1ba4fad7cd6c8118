"""How sheets are held together and to the floor, as far as it bounds the feed's sizes.

Depends on: stock.tables.
"""

from __future__ import annotations

import math

from fabgen.stock import tables
from fabgen.stock.records import Screw

FOOT_SCREWS = ("M4", "M3", "M2.5", "M2")
"""Screws for the feet of a sheet loop, the largest that the bar's width takes."""
NUT_WAVELENGTHS = 1 / 12
"""A nut wider than this would be a part of the antenna. Common practice, no source."""


def foot_pad_mm(screw: Screw, thickness_mm: float) -> float:
    """Width of a foot about its screw: 1.5 t, and at least 1 mm, of sheet on each side of the hole."""
    return screw.clearance_medium_mm + 2 * max(1.0, 1.5 * thickness_mm)


def foot_screw_suits(screw: Screw, wavelength_mm: float) -> bool:
    """Whether the screw's nut is small enough to lie in the feed."""
    return screw.nut_across_flats_mm <= NUT_WAVELENGTHS * wavelength_mm


def foot_screw(width_mm: float, pitch_mm: float, thickness_mm: float, wavelength_mm: float) -> Screw | None:
    """The screw for the feet of bars of this width and pitch: the largest that the width takes, for narrower bars M2
    in a foot wider than its bar; None where the feet would meet or the nut is too large: such feet are soldered."""
    suited = [screw for screw in map(tables.screw, FOOT_SCREWS) if foot_screw_suits(screw, wavelength_mm)]
    for screw in suited:
        if foot_pad_mm(screw, thickness_mm) <= width_mm:
            return screw
    room = pitch_mm - max(1.0, thickness_mm)
    return suited[-1] if suited and foot_pad_mm(suited[-1], thickness_mm) <= room else None


def joint_screw(bore_mm: float) -> Screw:
    """Screw of seam and tabs by the can's size; a blind rivet of the same hole does as well."""
    return tables.screw("M3" if bore_mm >= 120 else "M2.5" if bore_mm >= 70 else "M2")


def least_choke_floor_mm(make: str, can_bore_mm: float, wall_mm: float, floor_mm: float) -> float:
    """Least height of a choke's own floor over the can's, in millimetres, rounded up to 0.1; 0 is always allowed.

    At 0 both walls stand on one floor. A printed or turned can has its choke in one piece and takes any height:
    0 mm. The floor of a tube's choke lies on the can's: ``floor_mm``. The ring of a rolled or folded can stands
    above the tabs of the wall and their screws' heads: floor + wall + head height.
    """
    if make in {"printed", "turned"}:
        return 0.0
    least = floor_mm
    if make != "tube":
        least += wall_mm + joint_screw(can_bore_mm).head_height_mm
    return math.ceil(10 * least - 1e-9) / 10


def nearest_choke_floor_mm(
    wanted_mm: float, make: str, can_bore_mm: float, wall_mm: float, floor_mm: float
) -> float:
    """The height nearest to ``wanted_mm`` (0 or more) that the make of can allows: 0, or the least and more."""
    least = least_choke_floor_mm(make, can_bore_mm, wall_mm, floor_mm)
    if wanted_mm >= least:
        return wanted_mm
    return least if wanted_mm > least / 2 else 0.0
