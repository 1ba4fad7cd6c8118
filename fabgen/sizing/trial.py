"""Put sizes together for one trial of the search: can, loop on the selectivity front, bars, tap.

Depends on: errors, job, sizing.layout, sizing.records, sizing.rounding.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from fabgen.errors import JobError
from fabgen.job import Job
from fabgen.sizing.layout import LoopStock, leg_place
from fabgen.sizing.records import ChokeSizes, Sizes
from fabgen.sizing.rounding import round_to

WALL_MM = {"rolled": 1.0, "folded": 1.0, "printed": 2.4, "tube": 1.0, "turned": 3.0}
FLOOR_MM = {"rolled": 1.5, "folded": 1.5, "printed": 3.2, "tube": 2.0, "turned": 5.0}
"""Wall and floor where the job names none. Common practice, no source."""
FIRST_TAP_WAVELENGTHS = 0.06


@dataclass(frozen=True)
class CanShape:
    """The can's inside and its choke."""

    bore_mm: float
    depth_mm: float
    choke: ChokeSizes | None = None


@dataclass(frozen=True)
class FrontPlace:
    """A place on the selectivity front: circumference and height over the wavelength."""

    share: float
    circumference: float
    height: float


@dataclass(frozen=True)
class Setting:
    """What stays while the loop is searched: the job, the loop's stock and the can."""

    job: Job
    stock: LoopStock
    can: CanShape


def front_place(share: float) -> FrontPlace:
    """The front between sharp (0) and broad (1): circumference 0.90 to 1.05, height 0.12 to 0.20 wavelengths.

    Parabolas through three computed loops: 0.90 / 0.12, 1.00 / 0.15 and 1.05 / 0.20.
    """
    if not 0 <= share <= 1:
        raise JobError(f"place {share:g} on the selectivity front: give 0 (sharp) to 1 (broad)")
    return FrontPlace(
        share=share,
        circumference=0.90 + 0.25 * share - 0.10 * share**2,
        height=0.12 + 0.04 * share + 0.04 * share**2,
    )


def place_loop(job: Job, stock: LoopStock, sizes: Sizes, diameter_mm: float, height_mm: float) -> Sizes:
    """The same feed with another loop: rounded, fixed sizes kept, bars moved with it."""
    step = job.limits.resolution_mm
    diameter = job.fixed.loop_diameter_mm or round_to(diameter_mm, step)
    height = job.fixed.loop_height_mm or round_to(height_mm, step)
    legs = leg_place(stock, diameter, height)
    return replace(
        sizes,
        loop_diameter_mm=diameter,
        loop_height_mm=height,
        leg_x_mm=legs.leg_x_mm,
        leg_pitch_mm=stock.leg_pitch_mm,
        tabs=legs.tabs,
    )


def first_sizes(setting: Setting, place: FrontPlace) -> Sizes:
    """Sizes at a place of the front with a first guess of the tap; the capacitor is left at 1 pF for the match."""
    job, stock, can = setting.job, setting.stock, setting.can
    wavelength = job.wavelength_mm
    blank = Sizes(
        can_bore_mm=can.bore_mm,
        can_depth_mm=can.depth_mm,
        wall_mm=job.can.wall_mm or WALL_MM[job.can.make],
        floor_mm=job.can.floor_mm or FLOOR_MM[job.can.make],
        choke=can.choke,
        can_flats=job.can.flats if job.can.make == "folded" else 0,
        loop_diameter_mm=0.0,
        loop_height_mm=0.0,
        conductor="wire" if stock.wire_mm is not None else "strip",
        wire_mm=stock.wire_mm,
        strip_width_mm=stock.strip_width_mm,
        sheet_mm=stock.sheet_mm,
        leg_x_mm=0.0,
        leg_pitch_mm=stock.leg_pitch_mm,
        leg_width_mm=stock.leg_width_mm,
        leg_bend_radius_mm=stock.leg_bend_radius_mm,
        tap_height_mm=job.fixed.tap_height_mm or FIRST_TAP_WAVELENGTHS * wavelength,
        crossing_width_mm=stock.crossing_width_mm,
        series_capacitor_pf=1.0,
        tabs=None,
    )
    diameter = place.circumference * wavelength / math.pi
    return place_loop(job, stock, blank, diameter, place.height * wavelength)
