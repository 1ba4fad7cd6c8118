"""Bend allowances of sheet and developed lengths of wire.

K-factor here is the engineering one: the neutral line lies at inside radius + K times thickness. DIN 6935 writes a
factor k that multiplies half the thickness, so K = k/2.

        |<- a ->|            beta: bend angle (0 = flat); opening angle = 180 - beta
        |_______             allowance: arc length of the neutral line
        .       \\  r        setback: tangent point to the virtual outer corner
        .  t     |           deduction = 2 setback - allowance
                 | b

Depends on: errors, stock records.
"""

from __future__ import annotations

import math

from fabgen.errors import JobError
from fabgen.stock.records import Temper
from fabgen.theory.limits import require_between, require_positive

HANDBOOK_Y = {0.35: 0.55, 0.41: 0.64, 0.45: 0.71}
"""K by temper -> factor Y of L = Y T + 1.57 R at 90 degrees. Machinery's Handbook 28th ed., Bending Sheet Metal."""


def din_k(inside_radius_mm: float, thickness_mm: float) -> float:
    """Correction k of DIN 6935: 0.65 + 0.5 log10(r/s) up to r/s = 5, then 1. It multiplies s/2.

    Raises JobError under r/s = 0.06, where the formula would put the neutral line outside the sheet."""
    require_positive(inside_radius_mm=inside_radius_mm, thickness_mm=thickness_mm)
    ratio = inside_radius_mm / thickness_mm
    if ratio < 0.06:
        raise JobError(f"inside radius {inside_radius_mm:g} mm in {thickness_mm:g} mm sheet: give 0.06 t or more")
    return 1.0 if ratio > 5 else 0.65 + 0.5 * math.log10(ratio)


def din_k_factor(inside_radius_mm: float, thickness_mm: float) -> float:
    """Engineering K of DIN 6935, k/2: the neutral line lies at inside radius + K t."""
    return din_k(inside_radius_mm, thickness_mm) / 2


def din_compensation_mm(inside_radius_mm: float, thickness_mm: float, opening_deg: float) -> float:
    """Compensation value v of DIN 6935: flat length = a + b + v, legs to the outer corner or tangent, mm.

    Opening angle up to 90 degrees: legs to the outer tangent, v = arc - 2 (r + s). 90 to 165: legs to the virtual
    outer corner, v = arc - 2 (r + s) tan((180 - opening)/2). Above 165: 0."""
    require_between(0, 180, opening_deg=opening_deg)
    if opening_deg > 165:
        return 0.0
    beta = math.radians(180 - opening_deg)
    arc = beta * (inside_radius_mm + din_k(inside_radius_mm, thickness_mm) * thickness_mm / 2)
    share = 1.0 if opening_deg <= 90 else math.tan(beta / 2)
    return arc - 2 * (inside_radius_mm + thickness_mm) * share


def bend_allowance(angle_deg: float, inside_radius_mm: float, k_factor: float, thickness_mm: float) -> float:
    """Arc length of the neutral line, beta (r + K t), mm. Angle 0 to 180 degrees, K 0 to 1."""
    require_between(0, 180, angle_deg=angle_deg)
    require_between(0, 1, k_factor=k_factor)
    require_positive(thickness_mm=thickness_mm)
    return math.radians(angle_deg) * (inside_radius_mm + k_factor * thickness_mm)


def outside_setback(angle_deg: float, inside_radius_mm: float, thickness_mm: float) -> float:
    """Outside setback, tangent point to virtual outer corner: (r + t) tan(beta/2), mm. Angle under 180."""
    require_between(0, 179, angle_deg=angle_deg)
    return (inside_radius_mm + thickness_mm) * math.tan(math.radians(angle_deg) / 2)


def bend_deduction(angle_deg: float, inside_radius_mm: float, k_factor: float, thickness_mm: float) -> float:
    """Bend deduction, 2 setback - allowance, mm: outside legs less this give the flat length."""
    double = 2 * outside_setback(angle_deg, inside_radius_mm, thickness_mm)
    return double - bend_allowance(angle_deg, inside_radius_mm, k_factor, thickness_mm)


def handbook_length_mm(inside_radius_mm: float, thickness_mm: float, handbook_k: float) -> float:
    """Length of a 90 degree bend zone as the handbook prints it: Y T + 1.57 R, mm.

    ``handbook_k`` 0.35, 0.41 or 0.45 by temper. Machinery's Handbook 28th ed."""
    if handbook_k not in HANDBOOK_Y:
        raise JobError(f"handbook K is {handbook_k}: the handbook has {', '.join(map(str, HANDBOOK_Y))}")
    return HANDBOOK_Y[handbook_k] * thickness_mm + 1.57 * inside_radius_mm


def k_from_test_bend(
    flat_mm: float, first_leg_mm: float, second_leg_mm: float, inside_radius_mm: float, thickness_mm: float
) -> float:
    """The shop's own K from a strip bent by 90 degrees.

    Flat length L, outside legs a and b: BD = a + b - L, allowance = 2 (r + t) - BD, K = (2 allowance/pi - r)/t.
    Raises JobError when the figures give a K outside 0 to 1 (a measuring fault)."""
    require_positive(
        flat_mm=flat_mm, first_leg_mm=first_leg_mm, second_leg_mm=second_leg_mm,
        inside_radius_mm=inside_radius_mm, thickness_mm=thickness_mm,
    )  # fmt: skip
    arc = 2 * (inside_radius_mm + thickness_mm) - (first_leg_mm + second_leg_mm - flat_mm)
    k = (2 * arc / math.pi - inside_radius_mm) / thickness_mm
    if not 0 <= k <= 1:
        raise JobError(
            f"the test bend gives K = {k:.3f}, outside 0 to 1: flat {flat_mm:g} mm, legs {first_leg_mm:g} and "
            f"{second_leg_mm:g} mm to the outside, inside radius {inside_radius_mm:g} mm; measure again"
        )
    return k


def min_inside_radius_mm(temper: Temper, thickness_mm: float, parallel: bool = False) -> float:
    """Least inside radius of a 90 degree bend by the temper's table, mm; ``parallel``: fold along the rolling.

    Raises JobError for a sheet thicker than the table covers."""
    require_positive(thickness_mm=thickness_mm)
    rows = temper.bend_ratio_parallel if parallel else temper.bend_ratio
    for up_to, ratio in rows:
        if thickness_mm <= up_to + 1e-9:
            return ratio * thickness_mm
    raise JobError(
        f"sheet {thickness_mm:g} mm: the bend table of temper {temper.key} ends at {rows[-1][0]:g} mm; "
        "use thinner sheet or another temper"
    )


def outer_fibre_strain(diameter_mm: float, axis_radius_mm: float) -> float:
    """Strain of the outermost fibre of a round wire, d / (2 R)."""
    require_positive(diameter_mm=diameter_mm, axis_radius_mm=axis_radius_mm)
    return diameter_mm / (2 * axis_radius_mm)


def wire_neutral_shift_mm(axis_radius_mm: float, diameter_mm: float) -> float:
    """How far the neutral line of a bent wire lies inside its axis, mm.

    Nothing for R/d of 2 and more; below, the neutral line moves inwards to sqrt(Ri Ro), Hill's fully plastic bound
    (R. Hill, The Mathematical Theory of Plasticity, 1950; from memory), blended linearly from the axis at R/d = 2 to
    the bound at R/d = 1."""
    require_positive(axis_radius_mm=axis_radius_mm, diameter_mm=diameter_mm)
    inside = axis_radius_mm - diameter_mm / 2
    if inside < 0:
        raise JobError(f"axis radius {axis_radius_mm:g} mm is under half the wire's {diameter_mm:g} mm")
    bound = math.sqrt(inside * (inside + diameter_mm))
    share = min(1.0, max(0.0, 2 - axis_radius_mm / diameter_mm))
    return share * (axis_radius_mm - bound)


def wire_arc_mm(angle_deg: float, axis_radius_mm: float, diameter_mm: float) -> float:
    """Length that a bend takes of a straight wire, mm: the arc of its neutral line (wire_neutral_shift_mm)."""
    return math.radians(angle_deg) * (axis_radius_mm - wire_neutral_shift_mm(axis_radius_mm, diameter_mm))
