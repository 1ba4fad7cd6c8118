"""Feeds with plausible sizes for tests of geometry, files and pages. Sizes scale with the wavelength from the
published prototype ratios; the predictions are placeholders for layout only and no test reads them as results."""

from __future__ import annotations

import math
from typing import Any

from fabgen.job import Job
from fabgen.sizing.capacitor_part import capacitor_part
from fabgen.sizing.layout import crossing_width_mm
from fabgen.sizing.modes import bore_modes
from fabgen.sizing.records import (
    CapacitorPart,
    ChokeSizes,
    Feed,
    GainPoint,
    JointCurrent,
    PatternCut,
    Predicted,
    Response,
    SeamCurrent,
    SelfCheck,
    Sensitivity,
    Settings,
    Sizes,
    WallCurrent,
    Yield,
)
from fabgen.sizing.tolerances import deviations
from fabgen.stock import tables


def sample_job(
    form: str = "wire", make: str = "rolled", frequency_mhz: float = 1420.406, choke: bool = False, **can: Any
) -> Job:
    """A job as the job file would give it."""
    loop: dict[str, Any] = (
        {"form": "wire", "wire_mm": 4.0, "metal": "cu-etp"}
        if form == "wire"
        else {"form": "sheet", "sheet_mm": 1.5, "metal": "cuzn37"}
    )
    return Job.model_validate(
        {
            "target": {"frequency_mhz": frequency_mhz, "name": "sample feed"},
            "dish": {"diameter_m": 2.4, "focal_ratio": 0.4},
            "loop": loop,
            "can": {"make": make, "choke": choke, **can},
            # A job for a can of stock tube must give the bore.
            "fixed": {"can_bore_mm": round(1.05 * 299_792.458 / frequency_mhz, 1)} if make == "tube" else {},
        }
    )


def sample_sizes(job: Job) -> Sizes:
    """Sizes by ratio to the wavelength."""
    wl = job.wavelength_mm

    def mm(x: float) -> float:
        return round(x, 1)

    wire = job.loop.form == "wire"
    width = mm(0.034 * wl)
    diameter = mm(wl / math.pi)
    thickness = job.loop.sheet_mm or 0.0
    printed = job.can.make == "printed"
    wall = job.can.wall_mm or (2.4 if printed else 1.0)
    floor = job.can.floor_mm or (3.2 if printed else 1.5)
    choke = ChokeSizes(mm(1.55 * wl), mm(0.2 * wl), mm(0.08 * wl)) if job.can.choke else None
    pitch = mm(14.0 if wire else width + 8.0)
    bend = mm(6.0 if wire else 1.5)
    radius = diameter / 2
    if wire:
        phi = math.asin((pitch / 2) / math.hypot(radius, bend)) + math.atan2(bend, radius)
        leg_x = radius * math.cos(phi) + bend * math.sin(phi)
    else:
        leg_x = radius - width / 2 - 2.0 - bend - thickness / 2
    return Sizes(
        can_bore_mm=mm(1.05 * wl),
        can_depth_mm=mm(0.32 * wl),
        wall_mm=wall,
        floor_mm=floor,
        choke=choke,
        can_flats=job.can.flats if job.can.make == "folded" else 0,
        loop_diameter_mm=diameter,
        loop_height_mm=mm(0.15 * wl),
        conductor="wire" if wire else "strip",
        wire_mm=job.loop.wire_mm,
        strip_width_mm=None if wire else width,
        sheet_mm=job.loop.sheet_mm,
        # A wire's bars follow from its bend, to every digit.
        leg_x_mm=leg_x if wire else mm(leg_x),
        leg_pitch_mm=pitch,
        leg_width_mm=job.loop.wire_mm or width,
        leg_bend_radius_mm=bend,
        tap_height_mm=mm(0.061 * wl),
        crossing_width_mm=crossing_width_mm(job),
        series_capacitor_pf=1.06,
        tabs=None if wire else "inward",
    )


def sample_predicted(job: Job) -> Predicted:
    """Numbers that fill the pages; not results."""
    f0 = job.target.frequency_mhz
    freqs = tuple(f0 * (0.3 + 0.02 * i) for i in range(96))
    refl = tuple(1.0 - 0.95 / (1 + 1j * 40 * (f / f0 - f0 / f)) for f in freqs)
    gain = tuple(9.0 - 40 * (f / f0 - 1) ** 2 for f in freqs)
    theta = tuple(float(t) for t in range(-180, 181, 3))
    cut = tuple(9.0 - 12 * (t / 60) ** 2 if abs(t) < 90 else -18.0 for t in theta)
    cross = tuple(-25.0 for _ in theta)
    aperture, radiated = 0.87 * 0.99 * 0.985 * (1 - 0.12), 10**-0.003
    gain_of_dish = aperture * radiated * (math.pi * 1e3 * job.dish.diameter_m / job.wavelength_mm) ** 2
    return Predicted(
        impedance_ohm=50.3 + 105.7j, return_loss_db=32.0, bandwidth_mhz=42.0,
        bandwidth_return_loss_db=job.wishes.return_loss_db,
        aperture_efficiency=aperture, illumination_efficiency=0.87, phase_efficiency=0.99,
        polarisation_efficiency=0.985, spillover=0.12, edge_taper_db=-11.5, half_power_beamwidth_e_deg=60.0,
        half_power_beamwidth_h_deg=60.0, directivity_dbi=9.0, front_to_back_db=19.0, phase_centre_mm=40.0,
        ohmic_loss_db=0.03, radiation_efficiency=radiated, spillover_noise_k=12.0, feed_noise_k=290 * (1 - radiated),
        system_noise_k=55.0, g_over_t_db_per_k=10 * math.log10(gain_of_dish / 55.0),
        wall_current=sample_wall_current(job),
        gain=(GainPoint(900.0, -20.0, -29.0, -0.2), GainPoint(f0, 9.0, 0.0, -32.0)),
        patterns=(PatternCut(90.0, theta, cut, cross), PatternCut(0.0, theta, cut, cross)),
        response=Response(freqs, refl, gain),
    )


def sample_wall_current(job: Job) -> WallCurrent:
    """Currents by the angle as in the dominant mode alone."""
    angles = tuple(5.0 * i for i in range(37))
    crossing = tuple(0.4 * abs(math.cos(math.radians(a))) for a in angles)
    names = ("wall", "choke wall") if job.can.choke else ("wall",)
    joints = ["wall on floor", *(["choke floor on wall", "choke wall on its floor"] if job.can.choke else [])]
    return WallCurrent(
        tuple(SeamCurrent(name, 0.4, angles, crossing) for name in names),
        tuple(JointCurrent(name, 0.35, 0.3, 0.03) for name in joints),
    )


def sample_capacitor(job: Job, sizes: Sizes) -> CapacitorPart:
    """A sleeve for the sample's capacitance, whatever the loop is made of."""
    return capacitor_part(
        "sleeve", sizes.series_capacitor_pf, job.target.frequency_mhz, coax=tables.coax(job.cable.coax),
        plate_width_mm=sizes.crossing_width_mm, transmit_w=job.wishes.transmit_w,
    )  # fmt: skip


def sample_feed(
    form: str = "wire", make: str = "rolled", frequency_mhz: float = 1420.406, choke: bool = False, **can: Any
) -> Feed:
    """A whole feed record."""
    job = sample_job(form, make, frequency_mhz, choke, **can)
    sizes = sample_sizes(job)
    names = ("loop_diameter_mm", "loop_height_mm", "tap_height_mm", "can_bore_mm", "can_depth_mm", "leg_pitch_mm")
    tolerances = {row.size: row.tolerance_mm for row in deviations(job, sizes)}
    slopes = {name: 12.0 / (i + 1) for i, name in enumerate(names)}
    sens = tuple(Sensitivity(n, tolerances[n], -slopes[n], -1.0, tolerances[n] * slopes[n]) for n in names)
    return Feed(
        job=job, sizes=sizes, predicted=sample_predicted(job), capacitor=sample_capacitor(job, sizes),
        sensitivities=sens,
        yields=Yield(2000, 20, 0.01, 0.82, 0.99, names[:3], 1.0, -1.2, 28.0, 27.0),
        modes=bore_modes(sizes.can_bore_mm, job.target.frequency_mhz),
        self_checks=(SelfCheck("power balance", 0.001, 0.005, True, "radiated against input power"),),
        settings=Settings(12.0, 900, 700, 9, 2.0, 1.0, 0.09, "sample"),
        remarks=(),
    )
