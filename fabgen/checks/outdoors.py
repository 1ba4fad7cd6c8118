"""Outdoor checks: water, radome, heat and cold, lightning, the Sun in the focus.

Depends on: checks (registry, texts), parts, stock.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from fabgen.checks.registry import Context, Fault, check, source_text
from fabgen.checks.texts import mm
from fabgen.parts.contour import bounds_mm
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.radome_cap import cover_mm
from fabgen.stock import tables

SOLAR_W_PER_M2 = 1000.0
SUN_DIAMETER_RAD = 0.0093
"""Angular diameter of the Sun, 32 minutes of arc; handbook, from memory."""


@check("OUT-101", "caution", source="common practice, no source")
def drains_and_vents(context: Context) -> Iterator[Fault]:
    """Drain and vent holes of a can that stands outdoors."""
    if not context.outdoors or context.job.can.drain_holes:
        return
    yield Fault(
        part="can",
        feature="drain holes",
        value="none",
        limit="one or more at the lowest place",
        message="water and dew stay in the can"
        + (" and a closed radome lets it sweat" if context.job.can.radome else ""),
        cure="set can.drain_holes = true: four holes of 3 mm beside the wall",
    )


@check("OUT-102", "caution", "drain_min_mm")
def drain_size(context: Context) -> Iterator[Fault]:
    """Drain holes that a film of water closes."""
    least = context.limit("drain_min_mm")
    widths = []
    for hole in floor_holes(context.feed):
        x0, y0, x1, y1 = bounds_mm(hole.outline)
        if hole.purpose == "drain":
            widths.append(min(x1 - x0, y1 - y0))
    if widths and min(widths) < least - 1e-6:
        yield Fault(
            part="floor",
            feature="drain holes",
            value=mm(min(widths)),
            limit=mm(least),
            message=f"drain holes of {mm(min(widths))} stay closed by a film of water",
            cure=f"drill them to {least:g} mm",
        )


def radome_reflection(thickness_mm: float, permittivity: float, wavelength_mm: float) -> float:
    """Reflection of a thin dielectric sheet, normal incidence: pi t (er - 1) / lambda.

    First order in t/lambda; within 10 % for t sqrt(er) under 0.05 wavelengths. Silver, Microwave Antenna Theory
    and Design, radomes; from memory."""
    return math.pi * thickness_mm * (permittivity - 1) / wavelength_mm


@check("OUT-201", "note", "radome_max_wavelengths",
       source="thin-sheet approximation, Silver, Microwave Antenna Theory and Design; from memory")  # fmt: skip
def radome_effect(context: Context) -> Iterator[Fault]:
    """What the radome does to the tuning, by the thin-sheet estimate, and whether the estimate holds."""
    if not context.job.can.radome:
        return
    plastic = tables.plastic(context.job.can.plastic)
    thick, wavelength = cover_mm(context.feed), context.wavelength_mm
    part, most = thick / wavelength, context.limit("radome_max_wavelengths")
    reflection = radome_reflection(thick, plastic.relative_permittivity, wavelength)
    loss = -20 * math.log10(reflection)
    yield Fault(
        part="radome",
        feature="disc",
        value=f"{part:.4f} wavelengths",
        limit=f"{most:g} wavelengths",
        message=f"a disc of {plastic.name} {mm(thick)} thick reflects {loss:.0f} dB down; the prediction is without it"
        + ("" if part <= most else ", and it is too thick for this estimate"),
        cure=f"trim the capacitor with the radome on; it changes the reflection by up to {reflection:.3f}"
        + ("" if part <= most else f"; use a disc of {most * wavelength:.1f} mm or thinner"),
        severity="note" if part <= most else "caution",
    )


@check("OUT-301", "caution", "drift_max_mhz_share")
def thermal_drift(context: Context) -> Iterator[Fault]:
    """Drift of the resonance over the seasons against the matched band."""
    if context.job.limits.environment == "indoor":
        return
    yields, half = context.feed.yields, context.feed.predicted.bandwidth_mhz / 2
    drift = max(abs(yields.drift_mhz_cold), abs(yields.drift_mhz_hot))
    most = context.limit("drift_max_mhz_share") * half
    if drift > most:
        printed = "use a metal can in place of a printed one"
        first = printed if context.printed else "trim at the usual temperature of the site"
        yield Fault(
            part="feed",
            feature="thermal drift",
            value=f"{drift:.1f} MHz",
            limit=f"{most:.1f} MHz",
            message=f"between -20 and +50 degC the resonance moves by {drift:.1f} MHz, half the band is {half:.1f} MHz",
            cure=f"{first}, or wish for a band of {4 * drift:.0f} MHz",
        )


@check("OUT-302", "caution", "return_loss_drift_db")
def match_in_heat_and_cold(context: Context) -> Iterator[Fault]:
    """Return loss at the ends of the temperature range."""
    if context.job.limits.environment == "indoor":
        return
    yields = context.feed.yields
    worst, least = min(yields.return_loss_cold_db, yields.return_loss_hot_db), context.limit("return_loss_drift_db")
    if worst < least:
        when = "cold" if yields.return_loss_cold_db <= yields.return_loss_hot_db else "heat"
        yield Fault(
            part="feed",
            feature=f"match in the {when}",
            value=f"{worst:.1f} dB",
            limit=f"{least:g} dB",
            message=f"in the {when} the return loss falls to {worst:.1f} dB",
            cure=f"trim at the usual temperature of the site, or wish for {least + 6:g} dB and selectivity 'broad'",
        )


@check("OUT-401", "note", source="common practice, no source; IEC 62305 and the national rules decide")
def mast_and_lightning(context: Context) -> Iterator[Fault]:
    """Bonding of dish and mast, and the surge path of the cable."""
    if not context.outdoors:
        return
    yield Fault(
        part="feed",
        feature="mast",
        value="outdoors",
        limit="bonded to earth",
        message="the can is at the mast's potential; a strike nearby puts a surge on the cable",
        cure="bond dish and mast to earth with 16 mm2 copper, put a surge arrester where the cable enters the house, "
        "unplug it in a thunderstorm",
    )


@check("OUT-402", "note", source="geometry of a paraboloid, 1000 W/m2 of sunlight")
def sun_in_the_focus(context: Context) -> Iterator[Fault]:
    """The dish as a burning mirror when it points near the Sun; caution for a printed can."""
    if context.job.limits.environment == "indoor":
        return
    dish = context.job.dish
    power = SOLAR_W_PER_M2 * math.pi / 4 * dish.diameter_m**2
    spot = 1e3 * dish.diameter_m * dish.focal_ratio * SUN_DIAMETER_RAD
    yield Fault(
        part="feed",
        feature="Sun in the focus",
        value=f"{power:.0f} W on {spot:.0f} mm",
        limit="not on the feed",
        message=f"a shiny dish of {dish.diameter_m:g} m that points at the Sun puts {power:.0f} W on a spot of "
        f"{spot:.0f} mm at the feed",
        cure="paint the dish matt, use mesh, and park it 10 degrees or more from the Sun's path"
        + ("; never track the Sun with a shiny dish and a printed feed" if context.printed else ""),
        severity="caution" if context.printed else "note",
    )


@check("OUT-403", "caution", source="maker data sheets")
def ultraviolet(context: Context) -> Iterator[Fault]:
    """Plastic that sunlight makes brittle."""
    if not context.outdoors or not (context.printed or context.job.can.radome):
        return
    plastic = tables.plastic(context.job.can.plastic)
    if plastic.uv_resistant:
        return
    fit = [row.name for row in tables.all_rows("plastic") if row.uv_resistant]
    yield Fault(
        part="can" if context.printed else "radome",
        feature="plastic",
        value=plastic.name,
        limit="resistant to ultraviolet light",
        message=f"{plastic.name} turns brittle in sunlight within 1 to 3 years",
        cure=f"print {' or '.join(fit)}, or paint the outside with 2 coats of a lacquer without metal",
        source=source_text(plastic.source),
    )
