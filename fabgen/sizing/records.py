"""The records of a sized feed: one set of numbers for simulation, drawing, checks and files.

Frame: origin in the centre of the floor's inner face, +z out of the aperture, gap of the loop on +x,
electric field on the axis along y. Millimetres.

Depends on: job.
"""

from __future__ import annotations

from dataclasses import dataclass

from fabgen.job import Job

BENCH_LIMIT_DB = 40.0
"""Return loss above which a bench cannot tell one from another. Common practice, no source."""


@dataclass(frozen=True)
class ChokeSizes:
    """The choke ring. ``bore_mm``: inner face of its wall; ``floor_z_mm``: inner (upper) face of its floor;
    ``depth_mm``: from that face to its rim."""

    bore_mm: float
    depth_mm: float
    floor_z_mm: float


@dataclass(frozen=True)
class Sizes:
    """Every size of the feed that the field computation knows, rounded to the shop's resolution.

    ``can_bore_mm``      inner diameter of the conducting surface (across flats where ``can_flats`` > 0)
    ``can_depth_mm``     inner face of the floor to the rim
    ``can_flats``        0 = round; else flats, one flat's middle on +x
    ``loop_diameter_mm`` centreline of wire or strip
    ``loop_height_mm``   wire axis or mid-plane of the strip above the floor's inner face
    ``leg_x_mm``         wire axis or mid-plane of the bars; ``leg_pitch_mm`` bar centre to bar centre along y
    ``leg_bend_radius_mm``  wire: of the axis; strip: inside radius
    ``tap_height_mm``    axis of the crossing above the floor
    Wire: ``leg_width_mm`` equals ``wire_mm``, ``strip_width_mm`` and ``sheet_mm`` are None. Strip: ``wire_mm``
    is None, ``strip_width_mm`` is the ring's width, ``leg_width_mm`` the bars'.
    ``tabs``             strip only: side of the ring's band where the bars stand ("inward" or "outward")
    """

    can_bore_mm: float
    can_depth_mm: float
    wall_mm: float
    floor_mm: float
    choke: ChokeSizes | None
    can_flats: int
    loop_diameter_mm: float
    loop_height_mm: float
    conductor: str
    wire_mm: float | None
    strip_width_mm: float | None
    sheet_mm: float | None
    leg_x_mm: float
    leg_pitch_mm: float
    leg_width_mm: float
    leg_bend_radius_mm: float
    tap_height_mm: float
    crossing_width_mm: float
    series_capacitor_pf: float
    tabs: str | None


@dataclass(frozen=True)
class GainPoint:
    """Realised gain on the axis at one frequency, dBi, and relative to the target."""

    frequency_mhz: float
    gain_dbi: float
    relative_db: float
    reflection_db: float


@dataclass(frozen=True)
class PatternCut:
    """Directivity over the angle off the axis in one plane (``phi_deg``), co- and cross-polar, dBi."""

    phi_deg: float
    theta_deg: tuple[float, ...]
    co_dbi: tuple[float, ...]
    cross_dbi: tuple[float, ...]


@dataclass(frozen=True)
class Response:
    """Reflection after the series capacitor over the sweep, one complex number per frequency; widths of the
    pattern (E-plane, H-plane; 360 where it never falls to half) at the frequencies where it was computed."""

    frequency_mhz: tuple[float, ...]
    reflection: tuple[complex, ...]
    gain_dbi: tuple[float, ...]
    width_frequency_mhz: tuple[float, ...] = ()
    half_power_beamwidth_e_deg: tuple[float, ...] = ()
    half_power_beamwidth_h_deg: tuple[float, ...] = ()


@dataclass(frozen=True)
class SeamCurrent:
    """Computed current of a wall at the target, peak amplitude for 1 W accepted: the largest density on the wall, and
    what crosses an upright seam at each angle from +x (0 to 180 degrees; the other half mirrors it). Both without the
    mesh row at the rim, where the edge of a thin sheet has no limit."""

    name: str
    peak_a_per_m: float
    angle_deg: tuple[float, ...]
    crossing_a_per_m: tuple[float, ...]


@dataclass(frozen=True)
class JointCurrent:
    """Computed current at a level joint, peak amplitude for 1 W accepted: the largest density beside the joint, the
    largest that crosses it, and the integral of the crossing density's square along the joint. A contact resistance
    of r ohm metres loses r/2 of that integral, in watts for each watt accepted."""

    name: str
    peak_a_per_m: float
    crossing_a_per_m: float
    crossing_square_a2_per_m: float


@dataclass(frozen=True)
class WallCurrent:
    """Computed currents of the can's walls where sheets are joined."""

    seams: tuple[SeamCurrent, ...]
    joints: tuple[JointCurrent, ...]


@dataclass(frozen=True)
class Predicted:
    """What the field computation says of the rounded sizes. ``impedance_ohm`` at the tap, before the capacitor."""

    impedance_ohm: complex
    return_loss_db: float
    bandwidth_mhz: float
    bandwidth_return_loss_db: float
    aperture_efficiency: float
    illumination_efficiency: float
    phase_efficiency: float
    polarisation_efficiency: float
    spillover: float
    edge_taper_db: float
    half_power_beamwidth_e_deg: float
    half_power_beamwidth_h_deg: float
    directivity_dbi: float
    front_to_back_db: float
    phase_centre_mm: float
    ohmic_loss_db: float
    radiation_efficiency: float
    spillover_noise_k: float
    feed_noise_k: float
    system_noise_k: float
    g_over_t_db_per_k: float
    wall_current: WallCurrent
    gain: tuple[GainPoint, ...]
    patterns: tuple[PatternCut, ...]
    response: Response


@dataclass(frozen=True)
class CapacitorPart:
    """The series capacitor as a part.

    ``form`` "sleeve": a wire ``inner_mm`` in a PTFE tube in a brass tube of bore ``outer_mm``, overlap
    ``overlap_mm``. ``form`` "plates": two plates ``plate_width_mm`` wide overlapping by ``overlap_mm`` with a
    film ``film_mm`` between. Range: what trimming the overlap reaches.
    """

    form: str
    capacitance_pf: float
    minimum_pf: float
    maximum_pf: float
    overlap_mm: float
    overlap_max_mm: float
    inner_mm: float
    outer_mm: float
    tube_wall_mm: float
    plate_width_mm: float
    film_mm: float
    relative_permittivity: float
    pf_per_mm: float
    peak_voltage_v: float
    formula: str
    source: str


@dataclass(frozen=True)
class Sensitivity:
    """What a size does when it is off: shift of resonance and of return loss per millimetre (pF for the capacitor)."""

    size: str
    tolerance_mm: float
    resonance_mhz_per_mm: float
    return_loss_db_per_mm: float
    effect_mhz: float


@dataclass(frozen=True)
class Yield:
    """Monte Carlo of the tolerances: share of feeds at or above the wished return loss."""

    samples: int
    model_check_samples: int
    model_error: float
    before_trimming: float
    after_trimming: float
    dominant: tuple[str, ...]
    drift_mhz_cold: float
    drift_mhz_hot: float
    return_loss_cold_db: float
    return_loss_hot_db: float


@dataclass(frozen=True)
class Mode:
    """A waveguide mode of the bore: cut-off and whether the structure can excite it."""

    name: str
    cutoff_mhz: float
    propagates: bool
    excited: bool
    why: str


@dataclass(frozen=True)
class SelfCheck:
    """One numerical self-check: measured value against its limit."""

    name: str
    value: float
    limit: float
    passed: bool
    meaning: str


@dataclass(frozen=True)
class Settings:
    """How the numbers were made; printed on the sheets and stored in the record."""

    edge_per_wavelength: float
    triangles: int
    unknowns: int
    solves: int
    resonance_uncertainty_mhz: float
    return_loss_uncertainty_db: float
    largest_edge_wavelengths: float
    method: str


@dataclass(frozen=True)
class CanTrial:
    """One can of the search, with its choke, and what it does in the dish; ``merit`` is what the goal raises."""

    bore_mm: float
    depth_mm: float
    aperture_efficiency: float
    g_over_t_db_per_k: float
    merit: float
    choke: ChokeSizes | None = None


@dataclass(frozen=True)
class Feed:
    """A sized feed: the job, every size, what it will do, and how sure that is."""

    job: Job
    sizes: Sizes
    predicted: Predicted
    capacitor: CapacitorPart
    sensitivities: tuple[Sensitivity, ...]
    yields: Yield
    modes: tuple[Mode, ...]
    self_checks: tuple[SelfCheck, ...]
    settings: Settings
    remarks: tuple[str, ...]
    can_trials: tuple[CanTrial, ...] = ()
