"""Where loop, bars and crossing lie, from the stock and the loop's diameter: the one place that derives them.

        bar of the wire loop, seen along the tangent plane          sheet loop, seen along y
                                                             ring      r  tab
        ---- loop arc ----.  r_b                          ==========.___,
                           )                                         |  leg_x = edge -+ relief -+ r -+ t/2
                           |  bar at leg_x                           |

Depends on: errors, job, stock, sizing.capacitor_part, sizing.rounding.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from fabgen.errors import JobError, NoSolutionError
from fabgen.job import Job
from fabgen.sizing.capacitor_part import sleeve_tube_mm
from fabgen.sizing.rounding import round_to
from fabgen.stock import joints, tables
from fabgen.stock.records import Coax, Metal
from fabgen.theory.bending import min_inside_radius_mm

STRIP_WIDTH_WAVELENGTHS = 0.034
BAR_GAP_WAVELENGTHS = 0.045
CROSSING_LIMIT_WAVELENGTHS = 0.03
WIRE_AXIS_RADIUS_RATIO = 1.5
FOLD_RELIEF_MM = 1.0
FOOT_MM = 13.0
"""Room for a folded foot with its screw beside the connector's flange. Common practice, no source."""
BEND_ROOM_MM = 1.5
PLATE_WAVELENGTHS = 0.018
LEAST_PLATE_MM = 1.0
LEAST_RADIUS_SHARE = 0.5
FIT_SHARE = 0.8
"""Outer edges of the bars over the ring's inner radius: beyond this the tabs leave no ring beside them."""
SHARP_CIRCUMFERENCE = 0.9
"""Circumference over the wavelength of the smallest ring of the selectivity front."""
LEAST_STRIP_THICKNESSES = 1.5
"""Narrowest strip that a laser cuts and a hand folds without twisting it. Common practice, no source."""


@dataclass(frozen=True)
class LoopStock:
    """What the loop is made of, in sizes that do not change during the search."""

    wire_mm: float | None
    sheet_mm: float | None
    strip_width_mm: float | None
    leg_width_mm: float
    leg_pitch_mm: float
    leg_bend_radius_mm: float
    crossing_width_mm: float


@dataclass(frozen=True)
class LegPlace:
    """Where the bars stand, and for a sheet loop on which side of the ring's band."""

    leg_x_mm: float
    tabs: str | None


def inside_bend_radius_mm(metal: Metal, temper: str | None, thickness_mm: float) -> float:
    """Smallest inside bend radius of the temper's table row for this thickness, mm."""
    return min_inside_radius_mm(tables.temper(metal, temper), thickness_mm)


def loop_stock(job: Job) -> LoopStock:
    """Widths, pitch and bend radius from the job and the stock tables, rounded to the shop's resolution.

    ``loop.bend_radius_mm`` of the job is the inside radius; a wire's own default puts the axis on 1.5 diameters.
    """
    wavelength, step = job.wavelength_mm, job.limits.resolution_mm
    metal, coax = tables.metal(job.loop.metal), tables.coax(job.cable.coax)
    gap = max(BAR_GAP_WAVELENGTHS * wavelength, coax.dielectric_mm + BEND_ROOM_MM)
    if job.loop.form == "wire":
        wire = job.loop.wire_mm or 0.0
        _refuse_thick(wire, wavelength, "loop.wire_mm")
        inside = job.loop.bend_radius_mm
        axis = WIRE_AXIS_RADIUS_RATIO * wire if inside is None else inside + wire / 2
        pitch = job.fixed.leg_pitch_mm or round_to(wire + gap, step)
        _refuse_touching(pitch, wire)
        return LoopStock(wire, None, None, wire, pitch, axis, crossing_width_mm(job))
    sheet = job.loop.sheet_mm or 0.0
    _refuse_thick(sheet, wavelength, "loop.sheet_mm")
    width = job.loop.strip_width_mm or round_to(_strip_width_mm(sheet, wavelength, gap), step)
    _refuse_thick(width, wavelength, "loop.strip_width_mm")
    inside = job.loop.bend_radius_mm
    if inside is None:
        inside = _round_up(_inside_radius_mm(job, metal, sheet), step)
    pitch = job.fixed.leg_pitch_mm or round_to(width + gap, step)
    _refuse_touching(pitch, width)
    stock = LoopStock(None, sheet, width, width, pitch, inside, crossing_width_mm(job))
    _refuse_unsoldered_feet(stock, metal, wavelength)
    return stock


def crossing_width_mm(job: Job) -> float:
    """Width of the flat strip that stands for the crossing, in the shop's resolution: of coax and sleeve behind a wire
    loop, of the capacitor's plates behind a sheet one."""
    wavelength, step = job.wavelength_mm, job.limits.resolution_mm
    if job.loop.form == "wire":
        width = min(sleeve_crossing_mm(tables.coax(job.cable.coax)), CROSSING_LIMIT_WAVELENGTHS * wavelength)
    else:
        width = max(PLATE_WAVELENGTHS * wavelength, LEAST_PLATE_MM)
    return max(round_to(width, step), step)


def _inside_radius_mm(job: Job, metal: Metal, sheet_mm: float) -> float:
    """What the temper's table asks for, but no less than any shop bends without a special tool (a limit that the job
    may override), and never under half a thickness, where bend formulas end."""
    usual = tables.limit("inside_radius_min_thicknesses", job.overrides).value
    return max(inside_bend_radius_mm(metal, job.loop.temper, sheet_mm), max(usual, LEAST_RADIUS_SHARE) * sheet_mm)


def _round_up(value: float, step: float) -> float:
    """The multiple of ``step`` at or above ``value``: a least radius must not be rounded down."""
    return round_to(math.ceil(value / step - 1e-9) * step, step)


def _strip_width_mm(sheet_mm: float, wavelength: float, gap_mm: float) -> float:
    """Width of ring and bars: 0.034 wavelengths, or what a foot with the smallest screw needs where nut and bars of
    that width suit the ring; else the feet are soldered."""
    wanted = max(STRIP_WIDTH_WAVELENGTHS * wavelength, LEAST_STRIP_THICKNESSES * sheet_mm)
    screw = tables.screw(joints.FOOT_SCREWS[-1])
    pad = joints.foot_pad_mm(screw, sheet_mm)
    inner = SHARP_CIRCUMFERENCE * wavelength / (2 * math.pi) - pad / 2
    if joints.foot_screw_suits(screw, wavelength) and pad + gap_mm / 2 < FIT_SHARE * inner:
        return max(wanted, pad)
    return wanted


def _refuse_unsoldered_feet(stock: LoopStock, metal: Metal, wavelength: float) -> None:
    sheet = stock.sheet_mm or 0.0
    if metal.solderable or joints.foot_screw(stock.leg_width_mm, stock.leg_pitch_mm, sheet, wavelength) is not None:
        return
    raise NoSolutionError(
        f"bars {stock.leg_width_mm:g} mm wide, {stock.leg_pitch_mm:g} mm apart, take no foot screw at a wavelength of "
        f"{wavelength:.0f} mm; their feet are soldered, but {metal.name} takes no soft solder; use brass or copper"
    )


def sleeve_crossing_mm(coax: Coax) -> float:
    """Width of the flat strip that stands for a crossing with a sleeve capacitor in the field computation.

    Part of the crossing is the coax's centre conductor, part the capacitor's tube; inductance goes with the
    logarithm of the diameter, so their geometric mean counts, and a round wire is a strip of twice its diameter
    (Balanis, Antenna Theory, table 9.3).
    """
    return 2 * math.sqrt(coax.inner_mm * sleeve_tube_mm(coax)[0])


def leg_place(stock: LoopStock, loop_diameter_mm: float, loop_height_mm: float) -> LegPlace:
    """Bars' place for this loop. Raises ``NoSolutionError`` where the bars do not fit."""
    radius, half_pitch = loop_diameter_mm / 2, stock.leg_pitch_mm / 2
    if stock.wire_mm is not None:
        return LegPlace(_wire_leg_x(radius, half_pitch, stock.leg_bend_radius_mm, loop_height_mm), None)
    thickness, width, r = stock.sheet_mm or 0.0, stock.strip_width_mm or 0.0, stock.leg_bend_radius_mm
    relief = max(FOLD_RELIEF_MM, thickness)
    far, near = half_pitch + stock.leg_width_mm / 2, half_pitch - stock.leg_width_mm / 2
    inner, outer = radius - width / 2, radius + width / 2
    if far >= FIT_SHARE * inner:
        raise NoSolutionError(
            f"bars at a pitch of {stock.leg_pitch_mm:g} mm with {stock.leg_width_mm:g} mm width do not fit a ring "
            f"of {loop_diameter_mm:.1f} mm; use a narrower strip or a smaller leg pitch"
        )
    if r + thickness >= 0.8 * loop_height_mm:
        raise NoSolutionError(_bend_too_large(r + thickness, loop_height_mm))
    start = math.sqrt(inner**2 - far**2) - relief
    # The flat tab reaches across the ring's inside: bar, foot and a relief must end before the far side.
    tab = loop_height_mm + FOOT_MM + relief
    if start - tab > -math.sqrt(inner**2 - far**2) + relief and start - r - thickness / 2 > 0:
        return LegPlace(start - r - thickness / 2, "inward")
    start = math.sqrt(outer**2 - near**2) + relief
    return LegPlace(start + r + thickness / 2, "outward")


def _wire_leg_x(radius: float, half_pitch: float, bend: float, height: float) -> float:
    """leg_x = R cos(p) + r sin(p) with R sin(p) - r cos(p) = pitch / 2."""
    if half_pitch >= 0.9 * radius:
        raise NoSolutionError(
            f"a leg pitch of {2 * half_pitch:g} mm leaves no loop of {2 * radius:.1f} mm; reduce the pitch"
        )
    if bend >= 0.8 * height:
        raise NoSolutionError(_bend_too_large(bend, height))
    angle = math.asin(half_pitch / math.hypot(radius, bend)) + math.atan2(bend, radius)
    return radius * math.cos(angle) + bend * math.sin(angle)


def _bend_too_large(bend: float, height: float) -> str:
    return (
        f"a bend of {bend:g} mm needs more than the loop's height of {height:.1f} mm; "
        "use thinner stock or a smaller bend radius"
    )


def _refuse_thick(size: float, wavelength: float, key: str) -> None:
    if size > wavelength / 10:
        raise JobError(
            f"{key} is {size:g} mm, more than a tenth of the wavelength ({wavelength:.1f} mm); "
            f"use stock of at most {wavelength / 10:.1f} mm"
        )


def _refuse_touching(pitch: float, width: float) -> None:
    if pitch <= 1.1 * width:
        raise JobError(
            f"fixed.leg_pitch_mm is {pitch:g} mm but the bars are {width:g} mm wide and would touch; "
            f"give at least {1.5 * width:.1f} mm"
        )
