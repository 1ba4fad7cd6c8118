"""What of a record follows from the rest of it: the capacitor, the modes, efficiencies, noise, gain, effects.

Each figure is worked out again from what it follows from; a changed one is found even where the record's own
checksum was made to fit.

Depends on: checks (pack_register, read_files), sizing, stock, theory.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from fabgen.checks.pack_register import differs, pack_check
from fabgen.checks.read_files import Pack
from fabgen.checks.registry import Fault
from fabgen.errors import FabgenError
from fabgen.sizing.capacitor_part import capacitor_part
from fabgen.sizing.layout import crossing_width_mm
from fabgen.sizing.modes import bore_modes
from fabgen.sizing.noise import PHYSICAL_K
from fabgen.sizing.records import CapacitorPart, Predicted
from fabgen.sizing.tolerances import deviations
from fabgen.stock import tables

ROUNDED = 2e-5
"""Six significant digits in two or three factors."""
CUT_DB = 0.02
"""A cut's directivity against the record: three decimals in the table, and a grid of angles."""
WIDTH_DEG = 0.2
Row = tuple[str, float, float, float]
"""Name, value in the record, value that follows, greatest difference."""


@pack_check("CONS-212")
def record_adds_up(pack: Pack) -> Iterator[Fault]:
    """Capacitor, crossing, modes, efficiencies, losses, noise, gain, beam, currents and effects of the record, worked
    out again from what they follow from."""
    try:
        rows = [*_capacitor(pack), *_sizes(pack), *_modes(pack)]
    except FabgenError as error:
        yield differs("record.json", "sizes", "no part", "possible", f"the record's job and sizes fail: {error}")
        rows = []
    rows += [*_predicted(pack.feed.predicted, pack), *_gain(pack), *_beam(pack), *_rest(pack)]
    for name, value, wanted, most in rows:
        if not abs(value - wanted) <= most:
            message = f"{name} is {value:.6g} in the record; the rest of it gives {wanted:.6g}"
            yield differs("record.json", name, f"{value:.6g}", f"{wanted:.6g}", message)


def _relative(name: str, value: float, wanted: float, least: float = 1e-9) -> Row:
    return name, value, wanted, ROUNDED * abs(wanted) + least


def _capacitor(pack: Pack) -> Iterator[Row]:
    feed, part = pack.feed, pack.feed.capacitor
    if "CONS-109" not in pack.record["despite"]:
        yield _relative("capacitor.capacitance_pf", part.capacitance_pf, feed.sizes.series_capacitor_pf)
    anew = capacitor_part(
        part.form, part.capacitance_pf, feed.job.target.frequency_mhz,
        coax=tables.coax(feed.job.cable.coax), plate_width_mm=feed.sizes.crossing_width_mm,
        transmit_w=feed.job.wishes.transmit_w,
    )  # fmt: skip
    for name in CapacitorPart.__dataclass_fields__:
        value, wanted = getattr(part, name), getattr(anew, name)
        if isinstance(wanted, float):
            yield _relative(f"capacitor.{name}", value, wanted)


def _sizes(pack: Pack) -> Iterator[Row]:
    s = pack.feed.sizes
    yield "sizes.crossing_width_mm", s.crossing_width_mm, crossing_width_mm(pack.feed.job), 1e-6
    if s.wire_mm is not None:
        # R cos p + r sin p, where R sin p - r cos p is half the pitch
        square = (s.loop_diameter_mm / 2) ** 2 + s.leg_bend_radius_mm**2 - (s.leg_pitch_mm / 2) ** 2
        step = pack.feed.job.limits.resolution_mm
        yield "sizes.leg_x_mm", s.leg_x_mm, math.sqrt(max(square, 0.0)), max(step, 0.01)


def _modes(pack: Pack) -> Iterator[Row]:
    anew = bore_modes(pack.feed.sizes.can_bore_mm, pack.feed.job.target.frequency_mhz)
    yield "number of modes", len(pack.feed.modes), len(anew), 0.0
    for mode, wanted in zip(pack.feed.modes, anew, strict=False):
        yield _relative(f"cut-off of {wanted.name}", mode.cutoff_mhz, wanted.cutoff_mhz)
        yield f"{wanted.name} runs", float(mode.propagates), float(wanted.propagates), 0.0


def _predicted(p: Predicted, pack: Pack) -> Iterator[Row]:
    job = pack.feed.job
    aperture = p.illumination_efficiency * p.phase_efficiency * p.polarisation_efficiency * (1 - p.spillover)
    yield _relative("aperture_efficiency", p.aperture_efficiency, aperture)
    # A small loss is a difference of two nearly equal numbers, of which the record holds six digits.
    loss = -10 * math.log10(p.radiation_efficiency)
    yield _relative("ohmic_loss_db", p.ohmic_loss_db, loss, 5e-6)
    yield _relative("feed_noise_k", p.feed_noise_k, PHYSICAL_K * (1 - p.radiation_efficiency), 3e-4)
    wavelength_m = job.wavelength_mm / 1e3
    gain = p.aperture_efficiency * p.radiation_efficiency * (math.pi * job.dish.diameter_m / wavelength_m) ** 2
    yield _relative("g_over_t_db_per_k", p.g_over_t_db_per_k, 10 * math.log10(gain / p.system_noise_k), 1e-4)
    yield _relative("bandwidth_return_loss_db", p.bandwidth_return_loss_db, job.wishes.return_loss_db)


def _gain(pack: Pack) -> Iterator[Row]:
    target = pack.feed.job.target.frequency_mhz
    points = pack.feed.predicted.gain
    at_target = [point for point in points if abs(point.frequency_mhz / target - 1) < 1e-5]
    yield "gain at the target", len(at_target), 1, 0.0
    for point in at_target[:1]:
        for other in points:
            relative = other.gain_dbi - point.gain_dbi
            yield _relative(f"relative gain at {other.frequency_mhz:g} MHz", other.relative_db, relative, 1e-3)
        reflected = 10 ** (point.reflection_db / 20) - 10 ** (-pack.feed.predicted.return_loss_db / 20)
        # The sweep's own error at the target.
        yield "reflection at the target", reflected, 0.0, 0.03


def _beam(pack: Pack) -> Iterator[Row]:
    """Directivity and widths against the table of the pattern."""
    import numpy as np

    from fabgen.sizing.dish import half_power_width_deg

    p = pack.feed.predicted
    widths = {90.0: ("e", p.half_power_beamwidth_e_deg), 0.0: ("h", p.half_power_beamwidth_h_deg)}
    for cut in p.patterns:
        if cut.phi_deg not in widths:
            continue
        plane, width = widths[cut.phi_deg]
        angle, level = np.array(cut.theta_deg), np.array(cut.co_dbi)
        axis = float(level[int(np.argmin(np.abs(angle)))])
        yield f"directivity_dbi of the {plane.upper()}-plane", p.directivity_dbi, axis, CUT_DB
        drawn = half_power_width_deg(angle, 10 ** (level / 10))
        yield f"half_power_beamwidth_{plane}_deg", width, drawn, WIDTH_DEG


def _rest(pack: Pack) -> Iterator[Row]:
    tolerances = {row.size: row.tolerance_mm for row in deviations(pack.feed.job, pack.feed.sizes)}
    for row in pack.feed.sensitivities:
        yield _relative(f"tolerance of {row.size}", row.tolerance_mm, tolerances.get(row.size, row.tolerance_mm))
        yield _relative(f"effect of {row.size}", row.effect_mhz, abs(row.resonance_mhz_per_mm) * row.tolerance_mm, 1e-5)
    for check in pack.feed.self_checks:
        yield f"self-check {check.name}", float(check.passed), 1.0, 0.0
        yield f"self-check {check.name} within its limit", float(check.value <= check.limit), 1.0, 0.0
    wall = pack.feed.predicted.wall_current
    for seam in wall.seams:
        most = max(seam.crossing_a_per_m, default=0.0)
        yield f"current across a seam of the {seam.name}", max(most, seam.peak_a_per_m), seam.peak_a_per_m, ROUNDED
    for joint in wall.joints:
        most = max(joint.crossing_a_per_m, joint.peak_a_per_m)
        yield f"current across the joint {joint.name}", most, joint.peak_a_per_m, ROUNDED
