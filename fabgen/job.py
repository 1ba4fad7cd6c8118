"""The job file: what the user has and wants. Strict schema, bounds, one message per fault.

Millimetres and megahertz; every key that has a unit says it in its name. ``read_job`` reads the TOML text,
the models refuse unknown keys. The frozen models serve as the resolved job everywhere above.

Depends on: errors, units, stock.
"""

from __future__ import annotations

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

    @model_validator(mode="after")
    def _stock_of_one_form(self) -> Job:
        if self.loop.form == "wire" and self.loop.wire_mm is None:
            raise ValueError("loop.form is 'wire': give loop.wire_mm, the wire's diameter")
        if self.loop.form == "sheet" and self.loop.sheet_mm is None:
            raise ValueError("loop.form is 'sheet': give loop.sheet_mm, the sheet's thickness")
        return self

    @property
    def wavelength_mm(self) -> float:
        """Free-space wavelength at the target."""
        return 299_792.458 / self.target.frequency_mhz
