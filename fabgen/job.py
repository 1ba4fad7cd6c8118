"""The job file: what the user has and wants. Strict schema, bounds, one message per fault.

Millimetres and megahertz; every key that has a unit says it in its name. The models refuse unknown keys;
``fabgen.job_reader`` reads the TOML text into them. The frozen models serve as the resolved job everywhere above.

Depends on: errors, units, stock.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import BaseModel, ConfigDict, Field, model_validator

Millimetres = Annotated[float, Field(gt=0, lt=10_000, allow_inf_nan=False)]


class Section(BaseModel):
    """A table of the job file."""

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False)


class Target(Section):
    """What the feed is for."""

    frequency_mhz: float = Field(ge=300, le=12_000)
    name: str = Field(default="loop feed", min_length=1, max_length=60)
    revision: str = Field(default="A", pattern=r"^[A-Z0-9]{1,2}$")
    owner: str = Field(default="", max_length=40)


class Dish(Section):
    """The reflector at whose focus the feed sits."""

    diameter_m: float = Field(gt=0.1, le=100)
    focal_ratio: float = Field(ge=0.25, le=1.2)
    elevation_deg: float = Field(default=45.0, ge=5, le=90)


class Loop(Section):
    """The loop's stock: round wire or flat sheet, never both."""

    form: Literal["wire", "sheet"]
    wire_mm: float | None = Field(default=None, gt=0, le=12)
    sheet_mm: float | None = Field(default=None, gt=0, le=6)
    strip_width_mm: float | None = Field(default=None, gt=0, le=100)
    metal: str = "cu-etp"
    temper: str | None = None
    bend_radius_mm: float | None = Field(default=None, gt=0, le=50)


class Flange(Section):
    """The mounting flange at the floor."""

    pattern: Literal["circle", "square", "none"] = "circle"
    count: int = Field(default=6, ge=3, le=16)
    screw: str = "M4"
    bolt_circle_mm: Millimetres | None = None
    thickness_mm: float | None = Field(default=None, gt=0, le=20)


class Choke(Section):
    """A larger coaxial can around the rim. Sizes left out are searched."""

    bore_mm: Millimetres | None = None
    depth_mm: Millimetres | None = None
    floor_z_mm: float | None = None


class Can(Section):
    """The can: how it is made and of what."""

    make: Literal["rolled", "folded", "printed", "tube", "turned"] = "rolled"
    metal: str = "en-aw-5754"
    temper: str | None = None
    wall_mm: float | None = Field(default=None, gt=0, le=20)
    floor_mm: float | None = Field(default=None, gt=0, le=20)
    flats: Literal[6, 8, 12] = 8
    plastic: str = "petg"
    lining: str = "copper-foil-35"
    lining_sheet_resistance_ohm: float | None = Field(default=None, gt=0, le=10)
    choke: bool | Choke = False
    drain_holes: bool = True
    radome: bool = False
    flange: Flange = Flange()


class Cable(Section):
    """The coaxial cable up the bar and the connector in the floor."""

    coax: str = "rg402"
    connector: str = "sma-4"


class Limits(Section):
    """What the shop's machines can do."""

    resolution_mm: float = Field(default=0.1, gt=0, le=1)
    kerf_mm: float = Field(default=0.0, ge=0, le=5)
    bed_mm: tuple[Millimetres, Millimetres, Millimetres] = (220.0, 220.0, 250.0)
    line_width_mm: float = Field(default=0.4, ge=0.1, le=1.5)
    sheet_mm: tuple[Millimetres, Millimetres] = (1000.0, 2000.0)
    die_opening_mm: float | None = Field(default=None, gt=0, le=100)
    tolerance_class: Literal["f", "m", "c"] = "m"
    bend_rule: Literal["din6935", "handbook", "test-bend"] = "din6935"
    test_bend_k: float | None = Field(default=None, ge=0, le=1)
    can_test_bend_k: float | None = Field(default=None, ge=0, le=1)
    corner_radius_mm: float = Field(default=0.5, ge=0, le=5)
    environment: Literal["outdoor", "sheltered", "indoor"] = "outdoor"
    paper: Literal["A4", "A3", "letter", "tabloid"] = "A4"
    projection: Literal["first", "third"] = "first"


class Neighbour(Section):
    """A neighbouring frequency and, where wished, its rejection relative to the target."""

    frequency_mhz: float = Field(gt=0, le=60_000)
    rejection_db: float | None = Field(default=None, ge=0, le=120)


class Wishes(Section):
    """What the user wants of the feed."""

    return_loss_db: float = Field(default=20.0, ge=10, le=40)
    bandwidth_mhz: float | None = Field(default=None, gt=0)
    selectivity: Literal["sharp", "balanced", "broad"] = "balanced"
    neighbours: tuple[Neighbour, ...] = ()
    goal: Literal["efficiency", "g_over_t"] = "g_over_t"
    receiver_noise_k: float = Field(default=35.0, ge=0, le=5000)
    transmit_w: float = Field(default=0.0, ge=0, le=1500)


class Fixed(Section):
    """Sizes the user has already; each is honoured exactly and the rest is found around them."""

    can_bore_mm: Millimetres | None = None
    can_depth_mm: Millimetres | None = None
    loop_diameter_mm: Millimetres | None = None
    loop_height_mm: Millimetres | None = None
    leg_pitch_mm: Millimetres | None = None
    tap_height_mm: Millimetres | None = None


class Rates(Section):
    """The user's own cost rates, for the order notes."""

    currency: str = "EUR"
    cut_per_m: float | None = None
    pierce: float | None = None
    bend: float | None = None
    print_per_h: float | None = None
    material_per_kg: float | None = None


class AsWritten(Section):
    """A value that the job file gave with its own unit; filled in by the reader, never by the user."""

    key: str
    text: str
    value: float


class Job(Section):
    """A whole job file, defaults filled in."""

    target: Target
    dish: Dish
    loop: Loop
    can: Can = Can()
    cable: Cable = Cable()
    limits: Limits = Limits()
    wishes: Wishes = Wishes()
    fixed: Fixed = Fixed()
    rates: Rates = Rates()
    overrides: dict[str, float] = Field(default_factory=dict)
    as_written: tuple[AsWritten, ...] = ()

    @model_validator(mode="after")
    def _agrees_with_itself(self) -> Job:
        fault = next(contradictions(self), None)
        if fault is not None:
            raise ValueError(fault)
        return self

    @property
    def wavelength_mm(self) -> float:
        """Free-space wavelength at the target."""
        return 299_792.458 / self.target.frequency_mhz


def typical_wire_mm(wavelength_mm: float) -> float:
    """Wire that matches well in nearly every can: 4 mm at 1420 MHz, in ratio to the wavelength, 1 mm at least."""
    return max(1.0, round(0.019 * wavelength_mm, 1))


def typical_sheet_mm(wavelength_mm: float) -> float:
    """Sheet that matches well in nearly every can: 1.5 mm at 1420 MHz, in ratio to the wavelength, 0.3 mm at least."""
    return max(0.3, round(0.007 * wavelength_mm, 1))


def contradictions(job: Job) -> Iterator[str]:
    """What in the job cannot go together: each text says what was given, what is allowed and what to do."""
    yield from _loop_stock(job)
    yield from _loop_against_wavelength(job)
    yield from _fixed_sizes(job)
    yield from _can(job)
    yield from _bend_rule(job.limits)


def _bend_rule(limits: Limits) -> Iterator[str]:
    if limits.bend_rule == "test-bend":
        if limits.test_bend_k is None:
            yield (
                "limits.bend_rule is 'test-bend' but limits.test_bend_k is not given; bend the test strip of the pack "
                "and enter its K, or use bend_rule = \"din6935\""
            )
    else:
        for name in ("test_bend_k", "can_test_bend_k"):
            if getattr(limits, name) is not None:
                yield (
                    f"limits.{name} is given but limits.bend_rule is '{limits.bend_rule}', which does not use it; "
                    f'write bend_rule = "test-bend", or take {name} out'
                )


def _loop_stock(job: Job) -> Iterator[str]:
    loop = job.loop
    if loop.form == "wire":
        if loop.wire_mm is None:
            yield "loop.form is 'wire': give loop.wire_mm, the wire's diameter"
        for name in ("sheet_mm", "strip_width_mm"):
            if getattr(loop, name) is not None:
                yield f"loop.form is 'wire' but loop.{name} is given; take it out, or write form = \"sheet\""
    else:
        if loop.sheet_mm is None:
            yield "loop.form is 'sheet': give loop.sheet_mm, the sheet's thickness"
        if loop.wire_mm is not None:
            yield "loop.form is 'sheet' but loop.wire_mm is given; take it out, or write form = \"wire\""


def _loop_against_wavelength(job: Job) -> Iterator[str]:
    tenth = job.wavelength_mm / 10
    at = f"at {job.target.frequency_mhz:g} MHz (a tenth of the wavelength is {tenth:.2f} mm)"
    wire, sheet, strip = job.loop.wire_mm, job.loop.sheet_mm, job.loop.strip_width_mm
    if wire is not None and wire > tenth:
        good = typical_wire_mm(job.wavelength_mm)
        yield (
            f"loop.wire_mm = {wire:g} is thicker than allowed {at}; use wire of {tenth:.2f} mm or less, best about "
            f"{good:g} mm"
        )
    if sheet is not None and sheet > tenth / 2:
        good = typical_sheet_mm(job.wavelength_mm)
        yield (
            f"loop.sheet_mm = {sheet:g} is thicker than allowed {at}; use sheet of {tenth / 2:.2f} mm or less, best "
            f"about {good:g} mm"
        )
    if strip is not None and strip > tenth:
        yield f"loop.strip_width_mm = {strip:g} is wider than allowed {at}; use {tenth:.2f} mm or less"


# Each row: smaller key, larger key, why.
_ORDER = (
    ("loop_diameter_mm", "can_bore_mm", "the loop lies inside the can"),
    ("loop_height_mm", "can_depth_mm", "the loop lies below the rim"),
    ("tap_height_mm", "loop_height_mm", "the tap is on the bars, below the loop"),
    ("tap_height_mm", "can_depth_mm", "the tap is inside the can"),
    ("leg_pitch_mm", "loop_diameter_mm", "both bars stand at the gap of the loop"),
    ("leg_pitch_mm", "can_bore_mm", "both bars stand inside the can"),
)


def _fixed_sizes(job: Job) -> Iterator[str]:
    for small, large, why in _ORDER:
        low, high = getattr(job.fixed, small), getattr(job.fixed, large)
        if low is not None and high is not None and low >= high:
            yield (
                f"fixed.{small} = {low:g} and fixed.{large} = {high:g} contradict each other: {why}, so "
                f"{small} must be less than {large}; change one, or leave one out to have it found"
            )
    wire, pitch = job.loop.wire_mm, job.fixed.leg_pitch_mm
    if wire is not None and pitch is not None and pitch <= wire:
        yield (
            f"fixed.leg_pitch_mm = {pitch:g} lets the bars of {wire:g} mm wire touch; allowed: more than "
            f"{wire:g} (centre to centre); give a larger pitch or leave it out"
        )
    yield from _fixed_can(job)


def _fixed_can(job: Job) -> Iterator[str]:
    wl, bore, loop = job.wavelength_mm, job.fixed.can_bore_mm, job.fixed.loop_diameter_mm
    cutoff = 1.8412 / math.pi * wl  # TE11 of a round guide: bore = 1.8412 wavelength / pi (Pozar, table 3.5)
    if bore is not None and not cutoff < bore < 3 * wl:
        yield (
            f"fixed.can_bore_mm = {bore:g} does not suit {job.target.frequency_mhz:g} MHz; allowed: more than "
            f"{cutoff:.1f} (below it the can passes no wave) and less than {3 * wl:.1f} (three wavelengths)"
        )
    if loop is not None and not 0.15 * wl < loop < 0.6 * wl:
        yield (
            f"fixed.loop_diameter_mm = {loop:g} is no one-wavelength-class loop at {job.target.frequency_mhz:g} "
            f"MHz; allowed {0.15 * wl:.1f} to {0.6 * wl:.1f} (round one wavelength of circumference)"
        )


def _can(job: Job) -> Iterator[str]:
    can = job.can
    if can.make == "tube" and job.fixed.can_bore_mm is None:
        yield (
            "can.make is 'tube' but its bore is not given: write the inner diameter of the tube or tin as "
            "can_bore_mm under [fixed]"
        )
    if not isinstance(can.choke, Choke) or can.choke.bore_mm is None or job.fixed.can_bore_mm is None:
        return
    least = job.fixed.can_bore_mm + 2 * (can.wall_mm or 0.0)
    if can.choke.bore_mm <= least:
        yield (
            f"can.choke.bore_mm = {can.choke.bore_mm:g} does not clear the can; allowed: more than {least:g} "
            "(fixed.can_bore_mm and twice the wall)"
        )
