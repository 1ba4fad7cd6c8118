"""How the sheets of a can are held together, as far as it bounds the can's sizes.

Depends on: stock.tables.
"""

from __future__ import annotations

import math

from fabgen.stock import tables
from fabgen.stock.records import Screw


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
