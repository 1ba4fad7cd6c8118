"""The conducting surfaces that the feed's current flows on, with their surface impedance.

Depends on: checks.registry, stock, theory.skin.
"""

from __future__ import annotations

from dataclasses import dataclass

from fabgen.checks.registry import Context
from fabgen.stock import tables
from fabgen.theory import skin


@dataclass(frozen=True)
class Surface:
    """One conducting surface: what it is made of, how thick, and in skin depths. ``film``: a lining whose loss is
    what its sheet resistance says, not its depth."""

    part: str
    name: str
    thickness_mm: float
    depth_mm: float
    resistance_ohm: float
    film: bool

    @property
    def skin_depths(self) -> float:
        return self.thickness_mm / self.depth_mm


def loop_surface(context: Context) -> Surface:
    """The loop and its bars."""
    metal = tables.metal(context.job.loop.metal)
    thickness = float(context.sizes.sheet_mm or context.sizes.wire_mm or 0.0)
    return _metal("loop", metal.key, thickness, context)


def can_surface(context: Context) -> Surface:
    """The inner face of the can: its wall, or the lining of a printed one."""
    if not context.printed:
        return _metal("can", context.job.can.metal, min(context.sizes.wall_mm, context.sizes.floor_mm), context)
    lining = tables.lining(context.job.can.lining)
    measured = context.job.can.lining_sheet_resistance_ohm
    conductivity = skin.lining_conductivity_s_per_m(lining, measured)
    return Surface(
        part="can",
        name=lining.name,
        thickness_mm=lining.thickness_mm,
        depth_mm=skin.skin_depth_mm(context.frequency_mhz, conductivity),
        resistance_ohm=skin.lining_impedance_ohm(lining, context.frequency_mhz, measured).real,
        film=lining.kind == "paint",
    )


def _metal(part: str, key: str, thickness_mm: float, context: Context) -> Surface:
    metal = tables.metal(key)
    return Surface(
        part=part,
        name=metal.name,
        thickness_mm=thickness_mm,
        depth_mm=skin.skin_depth_mm(context.frequency_mhz, metal.conductivity_s_per_m, metal.relative_permeability),
        resistance_ohm=skin.metal_impedance_ohm(metal, context.frequency_mhz, thickness_mm).real,
        film=False,
    )
