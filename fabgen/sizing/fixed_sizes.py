"""Fixed sizes of a job that contradict each other, found before anything is solved.

Depends on: errors, job, stock, sizing.layout.
"""

from __future__ import annotations

from fabgen.errors import JobError
from fabgen.job import Choke, Job

Named = tuple[str, float | None]


def check_fixed(job: Job) -> None:
    """Raise ``JobError`` naming the two sizes that cannot both hold."""
    fixed = job.fixed
    thick = job.loop.wire_mm or job.loop.strip_width_mm or 0.0
    diameter = ("fixed.loop_diameter_mm", fixed.loop_diameter_mm)
    height = ("fixed.loop_height_mm", fixed.loop_height_mm)
    bore = ("fixed.can_bore_mm", fixed.can_bore_mm)
    depth = ("fixed.can_depth_mm", fixed.can_depth_mm)
    tap = ("fixed.tap_height_mm", fixed.tap_height_mm)
    pitch = ("fixed.leg_pitch_mm", fixed.leg_pitch_mm)
    _inside(diameter, bore, thick + 2.0, "make the loop smaller or the bore larger")
    _inside(height, depth, 0.0, "the loop must sit below the rim")
    _inside(tap, height, thick, "the tap sits on the bars, below the loop")
    _inside(pitch, diameter, 2 * thick, "the bars must fit inside the loop")
    if isinstance(job.can.choke, Choke):
        choke = ("can.choke.bore_mm", job.can.choke.bore_mm)
        _inside(bore, choke, 2 * (job.can.wall_mm or 0.0), "the choke stands around the can")


def _inside(small: Named, large: Named, room: float, cure: str) -> None:
    (inner_key, inner), (outer_key, outer) = small, large
    if inner is None or outer is None or inner + room < outer:
        return
    raise JobError(
        f"{inner_key} is {inner:g} mm and {outer_key} is {outer:g} mm: allowed is less than {outer - room:g} mm; {cure}"
    )
