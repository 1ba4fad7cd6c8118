"""Spring-back of bent sheet and wire, and the tool radius for a wished radius.

Elastic, ideally plastic material; pure bending; plane sections. R_tool is the radius under load.

Depends on: errors, theory.limits.
"""

from __future__ import annotations

import math
from collections.abc import Callable

from fabgen.errors import JobError
from fabgen.theory.limits import require_positive


def sheet_ratio(inside_radius_mm: float, thickness_mm: float, yield_mpa: float, youngs_gpa: float) -> float:
    """R under load over R after release for sheet: 4 X^3 - 3 X + 1 with X = Y R / (E t).

    Valid for X under 0.5; at 0.5 the sheet springs back flat (ratio 0). F. J. Gardiner, Trans. ASME 79 (1957) 1."""
    require_positive(
        inside_radius_mm=inside_radius_mm, thickness_mm=thickness_mm, yield_mpa=yield_mpa, youngs_gpa=youngs_gpa
    )
    x = yield_mpa * inside_radius_mm / (youngs_gpa * 1e3 * thickness_mm)
    return 4 * x**3 - 3 * x + 1 if x < 0.5 else 0.0


def wire_ratio(axis_radius_mm: float, diameter_mm: float, yield_mpa: float, youngs_gpa: float) -> float:
    """R under load over R after release for round wire: 1 - M R / (E I).

    With r = d/2, n = Y R / (E r) under 1: M = (Mp/8) [(5 - 2 n^2) sqrt(1 - n^2) + 3 asin(n)/n], Mp = (4/3) Y r^3.
    At n = 1 and above the wire is elastic throughout (ratio 0). Derived from the stress over the section."""
    require_positive(
        axis_radius_mm=axis_radius_mm, diameter_mm=diameter_mm, yield_mpa=yield_mpa, youngs_gpa=youngs_gpa
    )
    radius = diameter_mm / 2
    n = yield_mpa * axis_radius_mm / (youngs_gpa * 1e3 * radius)
    if n >= 1:
        return 0.0
    plastic = 4 / 3 * yield_mpa * radius**3
    moment = plastic / 8 * ((5 - 2 * n**2) * math.sqrt(1 - n**2) + 3 * math.asin(n) / n)
    stiffness = youngs_gpa * 1e3 * math.pi * radius**4 / 4
    return max(0.0, 1 - moment * axis_radius_mm / stiffness)


def sheet_released_mm(inside_radius_mm: float, thickness_mm: float, yield_mpa: float, youngs_gpa: float) -> float:
    """Inside radius after release of a sheet bent to ``inside_radius_mm``, mm; infinite when it stays elastic."""
    ratio = sheet_ratio(inside_radius_mm, thickness_mm, yield_mpa, youngs_gpa)
    return inside_radius_mm / ratio if ratio > 0 else math.inf


def wire_released_mm(axis_radius_mm: float, diameter_mm: float, yield_mpa: float, youngs_gpa: float) -> float:
    """Axis radius after release of a wire bent to ``axis_radius_mm``, mm; infinite when it stays elastic."""
    ratio = wire_ratio(axis_radius_mm, diameter_mm, yield_mpa, youngs_gpa)
    return axis_radius_mm / ratio if ratio > 0 else math.inf


def sheet_tool_radius_mm(wished_mm: float, thickness_mm: float, yield_mpa: float, youngs_gpa: float) -> float:
    """Inside radius under load that relaxes to ``wished_mm``, mm. Raises JobError when no radius does."""
    return _tool(lambda r: sheet_ratio(r, thickness_mm, yield_mpa, youngs_gpa), wished_mm)


def wire_tool_radius_mm(wished_mm: float, diameter_mm: float, yield_mpa: float, youngs_gpa: float) -> float:
    """Axis radius under load that relaxes to the axis radius ``wished_mm``, mm."""
    return _tool(lambda r: wire_ratio(r, diameter_mm, yield_mpa, youngs_gpa), wished_mm)


def wire_mandrel_mm(wished_axis_radius_mm: float, diameter_mm: float, yield_mpa: float, youngs_gpa: float) -> float:
    """Diameter of the mandrel that leaves a wire with the wished axis radius after spring-back, mm.

    Raises JobError when the wire is thicker than the bend allows (mandrel at or below zero)."""
    mandrel = 2 * wire_tool_radius_mm(wished_axis_radius_mm, diameter_mm, yield_mpa, youngs_gpa) - diameter_mm
    if mandrel <= 0:
        raise JobError(
            f"axis radius {wished_axis_radius_mm:g} mm in {diameter_mm:g} mm wire leaves no mandrel; "
            f"use {0.6 * diameter_mm:g} mm or more"
        )
    return mandrel


def released_angle_deg(angle_deg: float, ratio: float) -> float:
    """Bend angle after release of a bend made to ``angle_deg``: angle times R_tool / R_released, degrees."""
    return angle_deg * ratio


def _tool(ratio: Callable[[float], float], wished_mm: float) -> float:
    # The released curvature ratio(R)/R falls steadily with R, so bisection finds the one root.
    require_positive(wished_radius_mm=wished_mm)
    low, high = 0.0, wished_mm
    for _ in range(200):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if ratio(middle) * wished_mm > middle else (low, middle)
    return 0.5 * (low + high)
