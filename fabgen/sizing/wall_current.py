"""The record of the currents at a can's seams and joints, from a field solution.

Depends on: fields, sizing.field_model, sizing.records.
"""

from __future__ import annotations

from fabgen.fields.model import FieldSolution
from fabgen.fields.wall_current import can_current
from fabgen.sizing.field_model import feed_geometry
from fabgen.sizing.records import JointCurrent, SeamCurrent, Sizes, WallCurrent


def wall_current(solution: FieldSolution, sizes: Sizes) -> WallCurrent:
    """Currents at the seams and joints of the can of ``sizes``, which ``solution`` solved, for 1 W accepted."""
    found = can_current(solution.elements, feed_geometry(sizes).can, solution.input_power_w)
    return WallCurrent(
        seams=tuple(
            SeamCurrent(name, line.peak_a_per_m, line.angle_deg, line.crossing_a_per_m)
            for name, line in found.upright.items()
        ),
        joints=tuple(
            JointCurrent(name, line.peak_a_per_m, line.crossing_a_per_m, line.crossing_square_a2_per_m)
            for name, line in found.level.items()
        ),
    )
