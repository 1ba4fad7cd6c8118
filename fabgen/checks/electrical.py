"""Electrical checks: modes, openings, bars, voltages, match, bands, static.

Depends on: checks (registry, texts), stock, theory, parts.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from fabgen.checks.registry import Context, Fault, check, source_text
from fabgen.checks.texts import down, mm, up
from fabgen.parts.contour import Outline, bounds_mm
from fabgen.parts.floor_holes import floor_holes
from fabgen.stock import tables
from fabgen.stock.records import Band
from fabgen.theory import dish, exposure, waveguide

LEAST_WISH_DB = 10.0
"""The least return loss that a job may wish for."""


@check("ELEC-201", "caution", "bore_mode_margin", source="Marcuvitz, Waveguide Handbook")
def bore_above_cutoff(context: Context) -> Iterator[Fault]:
    """Bore against the cut-off of the wanted mode TE11."""
    cutoff = waveguide.cutoff_mhz("TE11", context.sizes.can_bore_mm)
    least = context.limit("bore_mode_margin")
    if context.frequency_mhz >= least * cutoff:
        return
    decay = waveguide.decay_db_per_mm("TE11", context.sizes.can_bore_mm, context.frequency_mhz)
    need = up(waveguide.cutoff_bore_mm("TE11", context.frequency_mhz) * least)
    yield Fault(
        part="can",
        feature="bore",
        value=mm(context.sizes.can_bore_mm),
        limit=mm(need),
        message=f"TE11 runs above {cutoff:.0f} MHz in this bore; at the target the can is "
        + ("below cut-off" if decay else "close to cut-off")
        + f" and the wave loses {decay * context.sizes.can_depth_mm:.1f} dB on the way to the rim",
        cure=f"use a bore of {need:g} mm or more",
    )


@check("ELEC-202", "note", source="Marcuvitz, Waveguide Handbook")
def unwanted_modes(context: Context) -> Iterator[Fault]:
    """Modes other than TE11 that run in the bore and that the structure excites."""
    for mode in context.feed.modes:
        if mode.name == "TE11" or not (mode.propagates and mode.excited):
            continue
        bore = down(waveguide.cutoff_bore_mm(mode.name, context.frequency_mhz))
        yield Fault(
            part="can",
            feature=f"mode {mode.name}",
            value=f"cut-off {mode.cutoff_mhz:.0f} MHz",
            limit=f"above {context.frequency_mhz:.0f} MHz",
            message=f"{mode.name} runs at the target and is excited ({mode.why}); the computed pattern contains it",
            cure=f"a bore of {bore:g} mm or less keeps it out",
        )


def _longest_mm(outline: Outline) -> float:
    x0, y0, x1, y1 = bounds_mm(outline)
    return max(x1 - x0, y1 - y0)


@check("ELEC-301", "caution", "slot_max_wavelengths")
def openings(context: Context) -> Iterator[Fault]:
    """Open holes in floor and wall against leakage. Holes that a screw, the coax or the loop fills are left out; the
    drains in a wall of sheet are as wide as the floor's."""
    most = context.limit("slot_max_wavelengths") * context.wavelength_mm
    open_holes = [_longest_mm(hole.outline) for hole in floor_holes(context.feed) if hole.purpose == "drain"]
    longest = max(open_holes, default=0.0)
    if longest <= most:
        return
    sheet = context.sizes.floor_mm
    if context.job.can.make in {"rolled", "folded"}:
        sheet = min(sheet, context.sizes.wall_mm)
    loss = waveguide.decay_db_per_mm("TE11", longest, context.frequency_mhz) * sheet
    yield Fault(
        part="floor",
        feature="drain holes",
        value=mm(longest),
        limit=mm(most),
        message=f"{len(open_holes)} open holes of {mm(longest)}; {mm(sheet)} of thickness hold back {loss:.0f} dB",
        cure=f"make them {down(most):g} mm or smaller, and more of them",
    )


@check("ELEC-302", "caution", "bar_pitch_max_wavelengths")
def bars_do_not_radiate(context: Context) -> Iterator[Fault]:
    """Pitch of the bars against the wavelength: a wide pair radiates instead of carrying the wave."""
    pitch = context.sizes.leg_pitch_mm
    most = context.limit("bar_pitch_max_wavelengths") * context.wavelength_mm
    if pitch > most:
        yield Fault(
            part="loop",
            feature="bars",
            value=mm(pitch),
            limit=mm(most),
            message=f"the bars stand {pitch / context.wavelength_mm:.3f} wavelengths apart",
            cure=f"use a pitch of {down(most):g} mm or less (fixed.leg_pitch_mm)",
        )


@check("ELEC-401", "stop", "air_breakdown_v_per_mm")
def capacitor_voltage(context: Context) -> Iterator[Fault]:
    """Peak field in the series capacitor at the stated transmit power."""
    part, power = context.feed.capacitor, context.job.wishes.transmit_w
    if power <= 0:
        return
    gap = part.film_mm if part.form == "plates" else (part.outer_mm - part.inner_mm) / 2
    most = context.limit("air_breakdown_v_per_mm")
    field = part.peak_voltage_v / gap
    if field > most:
        yield Fault(
            part="capacitor",
            feature="dielectric",
            value=f"{field:.0f} V/mm",
            limit=f"{most:g} V/mm",
            message=f"{part.peak_voltage_v:.0f} V peak over {mm(gap)} at {power:g} W: air at the edges arcs",
            cure=f"transmit {power * (most / field) ** 2:.0f} W or less, or a larger capacitor gap",
        )


@check("ELEC-402", "stop", "air_breakdown_v_per_mm")
def gap_voltage(context: Context) -> Iterator[Fault]:
    """Peak field between the bars at the tap at the stated transmit power.

    Voltage I |Z| with I = sqrt(2 P / R) and the impedance at the tap; higher up it rises, so twice that counts."""
    power, impedance = context.job.wishes.transmit_w, context.feed.predicted.impedance_ohm
    gap = context.sizes.leg_pitch_mm - context.sizes.leg_width_mm
    if power <= 0 or impedance.real <= 0 or gap <= 0:
        return
    field = 2 * math.sqrt(2 * power / impedance.real) * abs(impedance) / gap
    most = context.limit("air_breakdown_v_per_mm")
    if field > most:
        yield Fault(
            part="loop",
            feature="gap",
            value=f"{field:.0f} V/mm",
            limit=f"{most:g} V/mm",
            message=f"at {power:g} W the field between the bars reaches {field:.0f} V/mm",
            cure=f"transmit {power * (most / field) ** 2:.0f} W or less",
        )


@check("ELEC-403", "caution", source="ICNIRP 2020 table 5, Health Phys. 118:483; read in a secondary page that "
       "quotes the source")  # fmt: skip
def exposure_distance(context: Context) -> Iterator[Fault]:
    """Distance at which a transmitting feed meets the public exposure level."""
    power = context.job.wishes.transmit_w
    if power <= 0:
        return
    f, predicted = context.frequency_mhz, context.feed.predicted
    gain = dish.dish_gain_dbi(context.job.dish.diameter_m, f, max(predicted.aperture_efficiency, 0.01))
    level = exposure.public_whole_body_w_per_m2(f)
    near = exposure.safe_distance_m(power, predicted.directivity_dbi, f)
    far = exposure.safe_distance_m(power, gain, f)
    yield Fault(
        part="feed",
        feature="transmitting",
        value=f"{power:g} W",
        limit=f"{level:.1f} W/m2 for the public",
        message=f"people must stay {near:.1f} m in front of the bare feed and {far:.0f} m in the beam of the dish "
        f"({gain:.1f} dBi)",
        cure=f"fence off {far:.0f} m in the beam, or transmit less: half the distance at {power / 4:g} W",
    )


@check("ELEC-404", "stop")
def transmitting_in_a_passive_band(context: Context) -> Iterator[Fault]:
    """Transmitting where all emissions are prohibited, or where radio astronomy is to be protected."""
    if context.job.wishes.transmit_w <= 0:
        return
    for band in _bands(context.frequency_mhz):
        if band.kind not in {"passive", "protected"}:
            continue
        yield Fault(
            part="feed",
            feature="frequency",
            value=f"{context.frequency_mhz:g} MHz",
            limit=f"outside {band.low_mhz:g} to {band.high_mhz:g} MHz",
            message=f"the job transmits in {band.low_mhz:g} to {band.high_mhz:g} MHz: {band.meaning}",
            cure="set wishes.transmit_w = 0, or move the target frequency",
            severity="stop" if band.kind == "passive" else "caution",
            source=source_text(band.source),
        )


@check("ELEC-405", "note", source="table of bands; the national table of allocations decides")
def band_of_the_target(context: Context) -> Iterator[Fault]:
    """Protected and licence-free bands that the target lies in."""
    for band in _bands(context.frequency_mhz):
        yield Fault(
            part="feed",
            feature="frequency",
            value=f"{context.frequency_mhz:g} MHz",
            limit=f"{band.low_mhz:g} to {band.high_mhz:g} MHz",
            message=f"the target lies in {band.low_mhz:g} to {band.high_mhz:g} MHz: {band.meaning}",
            cure=_band_advice(band),
            source=source_text(band.source),
        )


def _band_advice(band: Band) -> str:
    span = f"{band.low_mhz:g} to {band.high_mhz:g} MHz"
    if band.kind == "passive":
        return f"receiving needs nothing; nobody may transmit on {span}"
    return f"receiving needs nothing; before transmitting on {span} ask the national table of allocations"


@check("ELEC-406", "note", source="table of bands; the national table of allocations decides")
def licence_to_transmit(context: Context) -> Iterator[Fault]:
    """Transmitting outside the licence-free bands."""
    power = context.job.wishes.transmit_w
    if power <= 0 or any(band.kind in {"ism", "srd"} for band in _bands(context.frequency_mhz)):
        return
    yield Fault(
        part="feed",
        feature="frequency",
        value=f"{context.frequency_mhz:g} MHz",
        limit="a licence-free band",
        message=f"transmitting {power:g} W at {context.frequency_mhz:g} MHz needs a licence",
        cure=f"ask the national table of allocations who may use {context.frequency_mhz:g} MHz, and with what power",
    )


def _bands(frequency_mhz: float) -> list[Band]:
    rows: tuple[Band, ...] = tables.all_rows("band")
    return [row for row in rows if row.low_mhz <= frequency_mhz <= row.high_mhz]


@check("ELEC-501", "note", source="the feed's own circuit: bars shorted by the floor, series capacitor at the tap")
def static_charge(context: Context) -> Iterator[Fault]:
    """Direct-current paths that bleed static: loop and bars are grounded, the centre conductor is not."""
    if context.job.limits.environment == "indoor":
        return
    yield Fault(
        part="coax",
        feature="centre conductor",
        value=f"{context.sizes.series_capacitor_pf:.2f} pF in series",
        limit="path to ground",
        message="loop and bars stand on the floor at ground for direct current, but the series capacitor of "
        f"{context.sizes.series_capacitor_pf:.2f} pF leaves the cable's centre conductor floating",
        cure="use a receiver whose input is grounded for direct current, or bridge the connector with 100 kilohm",
    )


@check("ELEC-601", "caution", "return_loss_stop_db")
def match_as_wished(context: Context) -> Iterator[Fault]:
    """Predicted return loss against the wish; stop where the feed is not worth making."""
    loss, wished = context.feed.predicted.return_loss_db, context.job.wishes.return_loss_db
    if loss >= wished:
        return
    least = context.limit("return_loss_stop_db")
    yield Fault(
        part="feed",
        feature="match",
        value=f"{loss:.1f} dB",
        limit=f"{wished:g} dB",
        message=f"the rounded sizes give {loss:.1f} dB return loss at the target; {wished:g} dB are wished",
        cure=f"use a finer limits.resolution_mm than {context.job.limits.resolution_mm:g} mm, free a fixed size, or "
        f"wish for {down(loss, 1.0):g} dB",
        severity="stop" if loss < least else "caution",
    )


@check("ELEC-602", "caution")
def bandwidth_as_wished(context: Context) -> Iterator[Fault]:
    """Predicted bandwidth against the wish."""
    wished, predicted = context.job.wishes.bandwidth_mhz, context.feed.predicted
    if wished is None or predicted.bandwidth_mhz >= wished:
        return
    # The reflection grows with the distance from resonance: a band n times as wide costs 20 log10 n.
    lost = 20 * math.log10(wished / max(predicted.bandwidth_mhz, 1e-3))
    affordable = down(predicted.bandwidth_return_loss_db - lost, 1.0)
    yield Fault(
        part="feed",
        feature="bandwidth",
        value=f"{predicted.bandwidth_mhz:.1f} MHz",
        limit=f"{wished:g} MHz",
        message=f"the band at {predicted.bandwidth_return_loss_db:g} dB return loss is "
        f"{predicted.bandwidth_mhz:.1f} MHz wide; {wished:g} MHz are wished",
        cure=f"choose selectivity = 'broad', or wish for {max(affordable, 1.0):g} dB return loss",
        source="the job's own wish",
    )


@check("ELEC-603", "caution", source="the job's own wish")
def rejection_as_wished(context: Context) -> Iterator[Fault]:
    """Rejection of neighbouring frequencies against the wish."""
    gain = {round(point.frequency_mhz, 3): point.relative_db for point in context.feed.predicted.gain}
    for neighbour in context.job.wishes.neighbours:
        relative = gain.get(round(neighbour.frequency_mhz, 3))
        if neighbour.rejection_db is None or relative is None or -relative >= neighbour.rejection_db:
            continue
        yield Fault(
            part="feed",
            feature=f"rejection at {neighbour.frequency_mhz:g} MHz",
            value=f"{-relative:.1f} dB",
            limit=f"{neighbour.rejection_db:g} dB",
            message=f"{neighbour.frequency_mhz:g} MHz is {-relative:.1f} dB down; {neighbour.rejection_db:g} dB wished",
            cure=f"choose selectivity = 'sharp', or a filter of {up(neighbour.rejection_db + relative, 1.0):g} dB "
            "behind the receiver's first stage",
        )


@check("ELEC-604", "caution", source="difference between two meshes of the field computation")
def sure_enough(context: Context) -> Iterator[Fault]:
    """Uncertainty of the computed resonance against half the matched band."""
    unsure, band = context.feed.settings.resonance_uncertainty_mhz, context.feed.predicted.bandwidth_mhz
    if unsure <= band / 2:
        return
    yield Fault(
        part="feed",
        feature="resonance",
        value=f"+-{unsure:.1f} MHz",
        limit=f"+-{band / 2:.1f} MHz",
        message=f"the computed resonance is sure to {unsure:.1f} MHz, but the matched band is only {band:.1f} MHz wide",
        cure=f"plan to trim tap and capacitor by up to {unsure:.1f} MHz after the first measurement",
    )


@check("ELEC-605", "caution", source="difference between two meshes of the field computation")
def sure_of_the_match(context: Context) -> Iterator[Fault]:
    """Return loss less its uncertainty against the wish."""
    loss, wished = context.feed.predicted.return_loss_db, context.job.wishes.return_loss_db
    least = loss - context.feed.settings.return_loss_uncertainty_db
    if loss < wished or least >= wished:
        return
    yield Fault(
        part="feed",
        feature="match",
        value=f"at least {least:.1f} dB",
        limit=f"{wished:g} dB",
        message=f"the computed return loss of {loss:.1f} dB is sure to {least:.1f} dB only; {wished:g} dB are wished",
        cure=f"plan to trim tap and capacitor on the bench until {wished:g} dB are measured"
        + (f", or wish for {down(least, 1.0):g} dB" if least >= LEAST_WISH_DB else ""),
    )
