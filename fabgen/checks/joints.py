"""Electrical checks of seams and joints of the can against the current that was computed for them.

Depends on: checks (registry, texts), parts, sizing.records, stock.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import pairwise

from fabgen.checks.registry import Context, Fault, check
from fabgen.checks.texts import mm
from fabgen.parts.can_sheet import can_wall, choke_wall
from fabgen.parts.wall_strip import Wall
from fabgen.sizing.records import JointCurrent, SeamCurrent
from fabgen.stock import tables

ROOM_K = 290.0
SEAM_PARTS = {"wall": "wall", "choke wall": "choke-wall"}
"""Part of the can by the name of the wall whose current was computed."""


@check("ELEC-303", "caution", "seam_screw_pitch_max_wavelengths", "soldered_pitch_factor")
def joint_to_the_floor(context: Context) -> Iterator[Fault]:
    """Pitch of the tabs that join wall and floor: that joint carries the wall's current all round.

    A soldered joint may have its tabs farther apart, since the solder carries the current."""
    most = context.limit("seam_screw_pitch_max_wavelengths") * context.wavelength_mm
    if tables.metal(context.job.can.metal).solderable:
        most *= context.limit("soldered_pitch_factor")
    for part in context.parts:
        sizes = dict(part.sizes)
        if "tab_count" not in sizes:
            continue
        # A wall in two halves has its tabs on half the way round.
        around = _once_round_mm(context, part.key) / part.quantity
        length = min(sizes.get("flat_length_mm", around), around)
        pitch = length / max(sizes["tab_count"], 1.0)
        if pitch > most:
            yield Fault(
                part=part.key,
                feature="joint to the wall" if part.key == "choke-ring" else "joint to the floor",
                value=mm(pitch),
                limit=mm(most),
                message=f"{sizes['tab_count']:g} tabs hold the joint at {mm(pitch)} pitch; between them it opens and "
                "radiates",
                cure=f"use {math.ceil(length / most)} tabs, or solder the joint all round",
            )


def _once_round_mm(context: Context, key: str) -> float:
    """Once round the middle of the wall that the part's tabs lie on, without the lap of its seam; the choke's ring
    stands on the wall of the can."""
    s = context.sizes
    bore = s.choke.bore_mm if s.choke is not None and key == "choke-wall" else s.can_bore_mm
    turn = 2 * s.can_flats * math.tan(math.pi / s.can_flats) if s.can_flats else 2 * math.pi
    return turn * (bore + s.wall_mm) / 2


def crossing_at(seam: SeamCurrent, angle_deg: float) -> float:
    """Computed current across an upright line at an angle from +x, A/m for 1 W, linear between the angles told."""
    folded = abs((angle_deg + 180.0) % 360.0 - 180.0)
    points = list(zip(seam.angle_deg, seam.crossing_a_per_m, strict=True))
    for (low, first), (high, second) in pairwise(points):
        if low <= folded <= high:
            return first + (second - first) * (folded - low) / (high - low)
    return points[-1][1]


def seam_angle_deg(wall: Wall) -> float:
    """Where the screws of a wall's seam press its two ends together: angle from +x."""
    (x, y), _ = wall.path.at(wall.seam.inner_row_mm)
    return math.degrees(math.atan2(y, x))


@check("ELEC-304", "caution", "seam_current_max", source="currents of the walls from the field computation")
def seam_in_the_current(context: Context) -> Iterator[Fault]:
    """Longitudinal seams against the computed wall current: away from the E-plane, current has to cross them."""
    if context.job.can.make not in {"rolled", "folded"}:
        return
    most = context.limit("seam_current_max")
    walls = {"wall": can_wall(context.feed), "choke wall": choke_wall(context.feed)}
    seams = context.feed.predicted.wall_current.seams
    peak = max((seam.peak_a_per_m for seam in seams), default=0.0)
    for seam in seams:
        wall = walls.get(seam.name)
        if wall is None or peak <= 0:
            continue
        angle = seam_angle_deg(wall)
        crossing = crossing_at(seam, angle)
        share = crossing / peak
        if share <= most:
            continue
        best = min(seam.crossing_a_per_m) / peak
        yield Fault(
            part=SEAM_PARTS[seam.name],
            feature="seam",
            value=f"{share:.0%} of the largest current",
            limit=f"{most:.0%}",
            message=f"the seam lies at {angle:.0f} degrees from the gap's side, where {crossing:.2f} A/m cross it for "
            f"1 W at the port, {share:.0%} of the largest wall current of {peak:.2f} A/m",
            cure="solder the seam over its whole length"
            + (f", or use 8 or 12 flats, whose seam lies where {best:.0%} cross" if context.sizes.can_flats else "")
            + f"; with screws alone hold it at {mm(context.wavelength_mm / 20)} pitch",
        )


@check("ELEC-305", "note", "added_noise_max_k", source="currents at the joints from the field computation; 290 K")
def dry_joints(context: Context) -> Iterator[Fault]:
    """Level joints that are not soldered: what crosses them by the field computation, and how good they must be.

    A contact resistance of r ohm metres loses r/2 of the integral of the crossing current's square for each watt."""
    make, metal = context.job.can.make, tables.metal(context.job.can.metal)
    if make not in {"rolled", "folded", "tube"} or metal.solderable:
        return
    most = context.limit("added_noise_max_k")
    for joint in context.feed.predicted.wall_current.joints:
        if joint.crossing_square_a2_per_m <= 0:
            continue
        allowed = allowed_joint_ohm_m(joint, most)
        around = _joint_length_m(context, joint.name)
        yield Fault(
            part="choke" if "choke" in joint.name else "wall",
            feature=f"joint: {joint.name}",
            value=f"{joint.crossing_a_per_m:.2f} A/m across for 1 W",
            limit=f"{most:g} K",
            message=f"{metal.name} is not soldered; {joint.crossing_a_per_m:.2f} A/m for 1 W at the port cross this "
            f"joint by the field computation, and a contact of 10 milliohm metres in it adds "
            f"{most * 1e-2 / allowed:.2g} K",
            cure="clean both faces to bare metal before joining them and measure from part to part with four wires: "
            f"{1e3 * allowed / around:.0f} milliohm would add {most:g} K, a sound joint has a thousandth of that",
        )


def allowed_joint_ohm_m(joint: JointCurrent, most_k: float) -> float:
    """Contact resistance, ohm metres, at which a joint at room temperature adds that much noise."""
    return 2 * most_k / (ROOM_K * joint.crossing_square_a2_per_m)


def _joint_length_m(context: Context, name: str) -> float:
    key = "choke-wall" if name == "choke wall on its floor" else "wall"
    return _once_round_mm(context, key) / 1e3
