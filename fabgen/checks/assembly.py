"""Assembly checks: access, clearances, soldering, metals that meet, threads, screws, stack-up.

Depends on: checks (registry, texts), parts, sizing (match, yields), stock.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import combinations

from fabgen.checks.registry import Context, Fault, check, row_source, source_text
from fabgen.checks.texts import mm, size_words, up
from fabgen.errors import GeometryError
from fabgen.parts.capacitor import crossing_of
from fabgen.parts.connector import flange_face_mm
from fabgen.parts.contour import sampled
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.floor_plan import coax_axis, flange_plan, floor_bottom_mm, lining_mm
from fabgen.stock import tables

FASTENER_METAL = "1.4301"


def outer_mm(context: Context) -> float:
    """Width of the can's body outside, across the corners of a prism."""
    s = context.sizes
    corner = 1 / math.cos(math.pi / s.can_flats) if s.can_flats else 1.0
    return (s.can_bore_mm + 2 * lining_mm(context.feed) + 2 * s.wall_mm) * corner


@check("ASSY-101", "caution", "tool_clearance_mm")
def tool_access(context: Context) -> Iterator[Fault]:
    """Room between the heads of the flange's screws and the wall."""
    try:
        plan = flange_plan(context.feed, outer_mm(context))
    except GeometryError:
        return
    if plan is None:
        return
    screw, least = tables.screw(plan.screw), context.limit("tool_clearance_mm")
    room = (plan.bolt_circle_mm - outer_mm(context) - screw.head_mm) / 2
    if room < least - 1e-6:
        yield Fault(
            part="flange",
            feature=f"{plan.screw} screws",
            value=mm(room),
            limit=mm(least),
            message=f"{mm(room)} between the screw heads and the wall leave no room for washer and key",
            cure=f"set can.flange.bolt_circle_mm = {up(plan.bolt_circle_mm + 2 * (least - room)):g}",
        )


@check("ASSY-102", "caution", "web_min_thicknesses")
def floor_openings_apart(context: Context) -> Iterator[Fault]:
    """Webs between the floor's openings; stop where two of them run into each other."""
    from shapely import Polygon

    if any(part.flat is not None and part.key == "floor" for part in context.parts):
        return
    least = max(1.0, context.limit("web_min_thicknesses") * min(context.sizes.floor_mm, 1.5))
    shapes = [(hole.purpose, Polygon(sampled(hole.outline))) for hole in floor_holes(context.feed)]
    webs = [(float(a.distance(b)), f"{first} and {second}") for (first, a), (second, b) in combinations(shapes, 2)]
    web, names = min(webs, default=(math.inf, ""))
    if web < least - 0.02:
        yield Fault(
            part="floor",
            feature=names,
            value=mm(web),
            limit=mm(least),
            message=f"the openings for {names} leave a web of {mm(web)}",
            cure=f"choose another connector or a pitch of the bars {up(2 * (least - web)):g} mm wider",
            severity="stop" if web <= 0 else "caution",
        )


@check("ASSY-103", "caution", source="connector's dimension table")
def connector_clearance(context: Context) -> Iterator[Fault]:
    """Connector's flange against the can's wall and the flange's screws."""
    row = tables.connector(context.job.cable.connector)
    x, y = coax_axis(context.feed)
    reach = math.hypot(abs(x) + row.flange_width_mm / 2, abs(y) + row.flange_height_mm / 2)
    room = context.sizes.can_bore_mm / 2
    if reach > room:
        yield Fault(
            part="connector",
            feature="flange",
            value=mm(reach),
            limit=mm(room),
            message=f"the connector's flange reaches {mm(reach)} from the axis, past the can's inner face",
            cure=f"use a smaller connector; {up(2 * (reach - room)):g} mm more bore would take it",
            source=source_text(row.source),
        )


@check("ASSY-104", "caution", "coax_jacket_min_diameters")
def jacket_to_solder(context: Context) -> Iterator[Fault]:
    """Length of the coax's jacket that is soldered along the bar."""
    coax = tables.coax(context.job.cable.coax)
    least = context.limit("coax_jacket_min_diameters") * coax.outer_mm
    for part in context.parts:
        sizes = dict(part.sizes)
        if "jacket_mm" not in sizes:
            continue
        above = sizes["jacket_mm"] + floor_bottom_mm(context.feed)
        if above < least - 1e-6:
            yield Fault(
                part=part.key,
                feature="jacket above the floor",
                value=mm(above),
                limit=mm(least),
                message=f"{mm(above)} of jacket above the floor are too short to solder to the bar",
                cure=f"choose a thinner coax, or fix a tap {up(least - above):g} mm higher (fixed.tap_height_mm)",
            )


@check("ASSY-105", "note", source="maker sheets of semi-rigid cable; from memory")
def cable_bend(context: Context) -> Iterator[Fault]:
    """Bend of the coax's centre conductor at the tap and least bend radius of the whole cable."""
    coax = tables.coax(context.job.cable.coax)
    if not any(part.key == "coax-stub" for part in context.parts):
        return
    bend = crossing_of(context.feed).bend_mm
    if bend >= coax.min_bend_radius_mm:
        return
    yield Fault(
        part="coax-stub",
        feature="bend at the tap",
        value=mm(bend),
        limit=f"{mm(coax.min_bend_radius_mm)} for the whole cable",
        message=f"the bare centre conductor bends by {mm(bend)} radius at the tap; the whole {coax.key} needs "
        f"{mm(coax.min_bend_radius_mm)}",
        cure=f"bare the conductor before bending it, and bend the cable behind the connector by "
        f"{coax.min_bend_radius_mm:g} mm or more",
        source=source_text(coax.source),
    )


@check("ASSY-201", "caution", "solder_to_plastic_min_mm")
def solder_heat(context: Context) -> Iterator[Fault]:
    """Soldered joints close to plastic."""
    least = context.limit("solder_to_plastic_min_mm")
    distance = lining_mm(context.feed)
    if not context.printed or distance >= least:
        return
    plastic = tables.plastic(context.job.can.plastic)
    yield Fault(
        part="can",
        feature="soldered joints on the floor",
        value=mm(distance),
        limit=mm(least),
        message=f"coax and bars are soldered on a lining {mm(distance)} above {plastic.name}, which softens at "
        f"{plastic.softening_deg_c:g} degC; solder melts at 183 to 227 degC",
        cure="solder on a loose copper disc of 0.5 mm first and lay that on the floor, or use tin-bismuth solder "
        "(138 degC), a hot iron and less than 3 s",
    )


@check("ASSY-202", "caution", source="metals table: aluminium and stainless do not take soft solder")
def metal_takes_solder(context: Context) -> Iterator[Fault]:
    """Feet of a loop or a coax that are soldered to a floor that does not take solder."""
    if context.printed:
        return
    metal = tables.metal(context.job.can.metal)
    if metal.solderable:
        return
    wire = context.sizes.wire_mm
    screwed = any(part.key == "screw-foot" for part in context.parts)
    joint = "wire feet and coax" if wire else "the coax" if screwed else "feet and coax"
    feet = f" thread the feet M{wire:g} with nuts on both sides," if wire in {3.0, 4.0, 5.0, 6.0} else ""
    yield Fault(
        part="floor",
        feature=joint,
        value=metal.name,
        limit="a metal that takes soft solder",
        message=f"{joint} cannot be soldered to {metal.name}",
        cure=f"solder to a plate of 0.5 to 1 mm brass or copper bolted to the floor with four M3,{feet} or make "
        "the floor of brass, copper or zinc-coated steel",
    )


@check("ASSY-203", "caution", "anodic_difference_outdoor_v", "anodic_difference_sheltered_v",
       "anodic_difference_indoor_v")  # fmt: skip
def dissimilar_metals(context: Context) -> Iterator[Fault]:
    """Metals that touch, by the difference of their anodic indices, against the environment."""
    key = f"anodic_difference_{context.job.limits.environment}_v"
    most = context.limit(key)
    for part, first, second in _contacts(context):
        difference = abs(first[1] - second[1])
        if difference <= most + 1e-9:
            continue
        yield Fault(
            part=part,
            feature=f"{first[0]} on {second[0]}",
            value=f"{difference:.2f} V",
            limit=f"{most:.2f} V",
            message=f"{first[0]} on {second[0]}: {difference:.2f} V apart, {most:.2f} V allowed "
            f"{_PLACES[context.job.limits.environment]}; the lesser metal corrodes and the joint becomes a diode",
            cure=f"{_barrier(part, first, second, most)}, and seal the joint with varnish or grease",
            source=row_source(tables.limit(key, context.job.overrides)),
        )


TIN_V = 0.65
"""Anodic index of tin plate, MIL-STD-889 style list; read in a secondary page that quotes the source."""
_PLACES = {"outdoor": "outdoors", "sheltered": "under shelter", "indoor": "indoors"}


def _barrier(part: str, first: tuple[str, float], second: tuple[str, float], most: float) -> str:
    """What brings the two metals within reach of each other, by the same list."""
    worst = max(abs(first[1] - TIN_V), abs(second[1] - TIN_V))
    if worst < abs(first[1] - second[1]):
        way = "use tin-plated screws" if part == "screws" else "tin the nobler metal"
        return f"{way} (then {worst:.2f} V against {most:.2f} V)"
    return f"use metals within {most:.2f} V, like the same metal for both"


def _contacts(context: Context) -> Iterator[tuple[str, tuple[str, float], tuple[str, float]]]:
    """Pairs of metals that touch and carry current or hold: part, (name, index), (name, index)."""
    loop = tables.metal(context.job.loop.metal)
    fastener = tables.metal(FASTENER_METAL)
    if context.printed:
        lining = tables.lining(context.job.can.lining)
        floor = (lining.name, lining.anodic_index_v)
    else:
        metal = tables.metal(context.job.can.metal)
        floor = (metal.name, metal.anodic_index_v)
    yield "loop", (loop.name, loop.anodic_index_v), floor
    if any(part.material == "a2" for part in context.parts):
        yield "screws", ("stainless screws", fastener.anodic_index_v), floor
    if context.sizes.conductor == "wire" and not context.printed:
        copper = tables.metal("cu-etp")
        yield "coax", ("copper jacket of the coax", copper.anodic_index_v), floor


@check("ASSY-204", "note", "thread_min_pitches")
def threads_in_thin_sheet(context: Context) -> Iterator[Fault]:
    """Floor too thin to be tapped for the connector's screws."""
    if context.printed:
        return
    screw = tables.screw(tables.connector(context.job.cable.connector).screw)
    least = context.limit("thread_min_pitches") * screw.pitch_mm
    if context.sizes.floor_mm < least:
        yield Fault(
            part="floor",
            feature=f"{screw.key} screws",
            value=mm(context.sizes.floor_mm),
            limit=mm(least),
            message=f"a floor of {mm(context.sizes.floor_mm)} holds {context.sizes.floor_mm / screw.pitch_mm:.1f} "
            f"threads of {screw.key}",
            cure=f"use the nuts of the parts list or press-in nuts, not a thread; tapping needs {up(least):g} mm",
        )


@check("ASSY-205", "stop", "nut_proud_max_mm", source="ISO 4032 nut heights, the feed's own stack")
def screw_lengths(context: Context) -> Iterator[Fault]:
    """Length of the connector's screws against what they have to hold."""
    row = tables.connector(context.job.cable.connector)
    nut = tables.screw(row.screw).nut_height_mm
    stack = -flange_face_mm(context.feed) + row.flange_thickness_mm + nut
    proud = context.limit("nut_proud_max_mm")
    for part in context.parts:
        if part.key != "screw-connector":
            continue
        length = dict(part.sizes)["length_mm"]
        if stack - 1e-6 <= length <= stack + proud:
            continue
        short = length < stack
        yield Fault(
            part=part.key,
            feature="length",
            value=mm(length),
            limit=f"{mm(stack)} to {mm(stack + proud)}",
            message=f"screws of {mm(length)} are too {'short' if short else 'long'} for floor, flange and nut of "
            f"{mm(stack)}",
            cure=f"use {up(stack, 1.0):g} mm",
            severity="stop" if short else "note",
        )


TRIMMED = ("series_capacitor_pf", "tap_height_mm")
"""What the screwdriver sets: their own tolerances are trimmed away with the rest."""


@check("ASSY-301", "caution", source="sensitivities from the field computation")
def trimming_range(context: Context) -> Iterator[Fault]:
    """Stack-up of all tolerances against what the ranges of capacitor and tap can put right."""
    slopes = {row.size: abs(row.resonance_mhz_per_mm) for row in context.feed.sensitivities}
    others = [row for row in context.feed.sensitivities if row.size not in TRIMMED]
    if "series_capacitor_pf" not in slopes or not others:
        return
    stack = math.sqrt(math.fsum(row.effect_mhz**2 for row in others))
    part = context.feed.capacitor
    by_capacitor = slopes["series_capacitor_pf"] * min(
        part.maximum_pf - part.capacitance_pf, part.capacitance_pf - part.minimum_pf
    )
    travel = tap_travel_mm(context)
    by_tap = slopes.get("tap_height_mm", 0.0) * travel
    reach = by_capacitor + by_tap
    if stack <= reach:
        return
    worst = max(others, key=lambda row: row.effect_mhz)
    yield Fault(
        part="capacitor",
        feature="trimming range",
        value=f"+-{stack:.1f} MHz",
        limit=f"+-{reach:.1f} MHz",
        message=f"all tolerances together move the resonance by {stack:.1f} MHz; the capacitor reaches "
        f"{by_capacitor:.1f} MHz and the tap, moved by {travel:.1f} mm, {by_tap:.1f} MHz",
        cure=f"hold {size_words(worst.size)} to {worst.tolerance_mm * reach / stack:.2f} mm",
    )


def tap_travel_mm(context: Context) -> float:
    """How far the tap can be moved either way: on the straight part of the bars, and no farther than the yield after
    trimming reckons with."""
    from fabgen.sizing.match import tap_range_mm
    from fabgen.sizing.yields import TRIM_WAVELENGTHS

    low, high = tap_range_mm(context.sizes)
    height = context.sizes.tap_height_mm
    return max(0.0, min(TRIM_WAVELENGTHS * context.wavelength_mm, height - low, high - height))


@check("ASSY-302", "caution", "yield_after_min")
def yield_after_trimming(context: Context) -> Iterator[Fault]:
    """Share of feeds that meet the wished return loss after trimming."""
    value, least = context.feed.yields.after_trimming, context.limit("yield_after_min")
    if value >= least:
        return
    names = ", ".join(map(size_words, context.feed.yields.dominant[:3]))
    yield Fault(
        part="feed",
        feature="yield",
        value=f"{value:.0%}",
        limit=f"{least:.0%}",
        message=f"{value:.0%} of feeds made to these tolerances reach {context.job.wishes.return_loss_db:g} dB after "
        "trimming",
        cure=f"halve the tolerance of {names}, or wish for {context.job.wishes.return_loss_db - 4:g} dB",
    )


@check("ASSY-303", "note", "yield_before_min")
def yield_before_trimming(context: Context) -> Iterator[Fault]:
    """Share of feeds that need trimming after assembly."""
    value, least = context.feed.yields.before_trimming, context.limit("yield_before_min")
    if value >= least:
        return
    names = ", ".join(map(size_words, context.feed.yields.dominant[:3]))
    yield Fault(
        part="feed",
        feature="trimming",
        value=f"{value:.0%} without trimming",
        limit=f"{least:.0%}",
        message=f"{1 - value:.0%} of feeds need the screwdriver: measure, then trim overlap and tap",
        cure=f"set {names} to 0.1 mm before soldering: they matter most",
    )


@check("ASSY-304", "caution", "feed_mass_max_kg")
def mass_at_the_focus(context: Context) -> Iterator[Fault]:
    """Mass of the whole feed, which the struts of the dish carry."""
    stays = [part for part in context.parts if not part.key.startswith(("jig", "bend-strip"))]
    mass, most = math.fsum(part.mass_kg * part.quantity for part in stays), context.limit("feed_mass_max_kg")
    if mass > most:
        yield Fault(
            part="feed",
            feature="mass",
            value=f"{mass:.2f} kg",
            limit=f"{most:g} kg",
            message=f"the feed weighs {mass:.2f} kg at the focus of a dish of {context.job.dish.diameter_m:g} m",
            cure=f"thin the walls to {most / mass:.0%}, or check the struts for {mass:.1f} kg",
        )
