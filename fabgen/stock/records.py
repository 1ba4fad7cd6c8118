"""Typed rows of the stock tables. Every row says where its figures come from.

Depends on: nothing.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Source:
    """Where a row's figures come from and how they are known."""

    text: str
    known_from: str


@dataclass(frozen=True)
class Temper:
    """A temper of a metal.

    ``bend_ratio`` rows: (thickness up to mm, least inside radius / thickness at 90 degrees), fold line across the
    rolling direction; ``mandrel_ratio``: least inside radius / diameter of round wire.
    """

    key: str
    name: str
    yield_mpa: float
    tensile_mpa: float
    bend_ratio: tuple[tuple[float, float], ...]
    bend_ratio_parallel: tuple[tuple[float, float], ...]
    mandrel_ratio: float
    handbook_k: float
    source: Source


@dataclass(frozen=True)
class Metal:
    """A metal by its standard designation. ``coating_um``: thickness of a coating whose conductivity the row
    states (zinc), or that hides a worse metal (tin); None for bare metal."""

    key: str
    name: str
    designation: str
    conductivity_s_per_m: float
    relative_permeability: float
    density_kg_per_m3: float
    expansion_per_k: float
    youngs_gpa: float
    anodic_index_v: float
    colour: tuple[float, float, float]
    solderable: bool
    tempers: tuple[Temper, ...]
    source: Source
    coating_um: float | None = None

    @property
    def default_temper(self) -> Temper:
        """The first row: what a shop has unless asked otherwise."""
        return self.tempers[0]


@dataclass(frozen=True)
class Lining:
    """A conductive lining of a plastic can. One of conductivity or sheet resistance rules."""

    key: str
    name: str
    kind: str
    thickness_mm: float
    adhesive_mm: float
    conductivity_s_per_m: float | None
    sheet_resistance_ohm: float | None
    anodic_index_v: float
    source: Source


@dataclass(frozen=True)
class Plastic:
    """A printing plastic."""

    key: str
    name: str
    density_kg_per_m3: float
    expansion_per_k: float
    softening_deg_c: float
    relative_permittivity: float
    colour: tuple[float, float, float]
    source: Source
    uv_resistant: bool = False
    swelling_percent: float = 0.0


@dataclass(frozen=True)
class Dielectric:
    """What lies between the conductors of a capacitor. ``permittivity_per_k``: relative change of the permittivity
    per kelvin, negative where it falls with warmth; this and the expansion are means from -20 to +50 degC."""

    key: str
    name: str
    relative_permittivity: float
    permittivity_per_k: float
    expansion_per_k: float
    source: Source


@dataclass(frozen=True)
class Connector:
    """A panel connector, from its dimension table: a flange, its holes and the bore in the panel."""

    key: str
    name: str
    flange_width_mm: float
    flange_height_mm: float
    flange_thickness_mm: float
    hole_count: int
    hole_pitch_mm: float
    hole_mm: float
    panel_bore_mm: float
    screw: str
    body_mm: float
    body_length_mm: float
    source: Source


@dataclass(frozen=True)
class Coax:
    """A semi-rigid coaxial cable."""

    key: str
    name: str
    outer_mm: float
    dielectric_mm: float
    inner_mm: float
    relative_permittivity: float
    min_bend_radius_mm: float
    source: Source


@dataclass(frozen=True)
class Screw:
    """A metric screw with its clearance holes after ISO 273 and its head and nut."""

    key: str
    diameter_mm: float
    pitch_mm: float
    clearance_fine_mm: float
    clearance_medium_mm: float
    clearance_coarse_mm: float
    tap_drill_mm: float
    head_mm: float
    head_height_mm: float
    nut_across_flats_mm: float
    nut_height_mm: float
    insert_hole_mm: float
    insert_length_mm: float
    source: Source


@dataclass(frozen=True)
class Wire:
    """A series of round wire that shops keep."""

    key: str
    name: str
    diameters_mm: tuple[float, ...]
    source: Source


@dataclass(frozen=True)
class Sheet:
    """The thicknesses of sheet that shops keep in one metal."""

    key: str
    name: str
    metal: str
    thicknesses_mm: tuple[float, ...]
    source: Source


@dataclass(frozen=True)
class Printer:
    """A class of printer by its bed: x, y and height."""

    key: str
    name: str
    bed_mm: tuple[float, ...]
    source: Source


@dataclass(frozen=True)
class Limit:
    """One limit of the trade that a check holds a size against; a job may override its value."""

    key: str
    value: float
    unit: str
    meaning: str
    source: Source
    overridden: bool = False


@dataclass(frozen=True)
class Die:
    """A V-die of a press brake: opening, shortest outside flange and inside radius in mild steel."""

    key: str
    opening_mm: float
    min_flange_mm: float
    inside_radius_mm: float
    source: Source


@dataclass(frozen=True)
class Band:
    """A frequency band and who it is for; the national table of allocations decides."""

    key: str
    low_mhz: float
    high_mhz: float
    kind: str
    meaning: str
    source: Source


@dataclass(frozen=True)
class Tolerance:
    """Tolerances by size. ``rows``: (size up to and including mm, plus-minus mm)."""

    key: str
    meaning: str
    rows: tuple[tuple[float, float], ...]
    source: Source
