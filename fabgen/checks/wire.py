"""Wire checks: mandrels, straight lengths, grip; and how stiff the loop stands, wire or strip.

Depends on: checks (registry, texts), parts.records, stock, theory (ring).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

from fabgen.checks.registry import Context, Fault, check, source_text
from fabgen.checks.texts import mm, up
from fabgen.parts.records import Part, WirePath
from fabgen.stock import tables
from fabgen.theory import ring


def wires(context: Context) -> Iterator[tuple[Part, WirePath]]:
    """The parts bent of wire."""
    for part in context.parts:
        if part.wire is not None:
            yield part, part.wire


@check("WIRE-101", "caution", "mandrel_min_ratio", source="mandrel row of the metal's temper")
def mandrel_by_temper(context: Context) -> Iterator[Fault]:
    """Inside radius of each bend against the least one of the wire's temper."""
    for part, wire in wires(context):
        temper = tables.temper(part.material, part.temper or None)
        ratio = context.limit("mandrel_min_ratio") or temper.mandrel_ratio
        least = ratio * wire.diameter_mm
        for bend in wire.bends:
            inside = bend.radius_mm - wire.diameter_mm / 2
            if inside < least - 1e-6:
                axis = up(least + wire.diameter_mm / 2)
                yield Fault(
                    part=part.key,
                    feature=bend.name,
                    value=mm(inside),
                    limit=mm(least),
                    message=f"inside radius {mm(inside)} in {mm(wire.diameter_mm)} wire; {part.material} "
                    f"{temper.key} needs {ratio:g} diameters",
                    cure=f"use an axis radius of {axis:g} mm (loop.bend_radius_mm), or anneal the wire first",
                    source=source_text(temper.source),
                )


@check("WIRE-102", "caution", "wire_straight_min_diameters")
def straight_between_bends(context: Context) -> Iterator[Fault]:
    """Straight length between two bends in one plane."""
    ratio = context.limit("wire_straight_min_diameters")
    for part, wire in wires(context):
        least = ratio * wire.diameter_mm
        for first, second in pairwise(wire.bends):
            straight = second.start_mm - first.end_mm
            if second.plane_deg % 180 == 0 and straight < least - 1e-6:
                yield Fault(
                    part=part.key,
                    feature=f"{first.name} to {second.name}",
                    value=mm(straight),
                    limit=mm(least),
                    message=f"{mm(straight)} of straight wire between two bends in one plane",
                    cure=f"leave {up(least):g} mm",
                )


@check("WIRE-103", "caution", "wire_grip_min_diameters")
def length_to_grip(context: Context) -> Iterator[Fault]:
    """Straight ends of a bent wire against what a vice or pliers can grip."""
    ratio = context.limit("wire_grip_min_diameters")
    for part, wire in wires(context):
        if not wire.bends:
            continue
        least = ratio * wire.diameter_mm
        ends = wire.bends[0].start_mm, wire.cut_length_mm - wire.bends[-1].end_mm
        if min(ends) < least - 1e-6:
            yield Fault(
                part=part.key,
                feature="straight ends",
                value=mm(min(ends)),
                limit=mm(least),
                message=f"{mm(min(ends))} of straight end is too short to grip for the last bend",
                cure=f"cut the wire {up(least - min(ends)):g} mm longer at each end and trim it after bending",
            )


@check("WIRE-104", "note", "wire_straight_min_diameters")
def drop_shaped_ends(context: Context) -> Iterator[Fault]:
    """Bends that meet without straight wire between, in two planes: they pull the loop's ends to a drop shape."""
    ratio = context.limit("wire_straight_min_diameters")
    for part, wire in wires(context):
        least = ratio * wire.diameter_mm
        close = [
            second.start_mm - first.end_mm
            for first, second in pairwise(wire.bends)
            if second.plane_deg % 180 != 0 and second.start_mm - first.end_mm < least - 1e-6
        ]
        if close:
            yield Fault(
                part=part.key,
                feature="ends of the loop",
                value=mm(min(close)),
                limit=mm(least),
                message="the bar bends meet the loop's arc without straight wire between; the loop's ends tend to "
                "a drop shape there",
                cure=f"bend the bars first, wind the loop last, dress the last {up(2 * least, 1.0):g} mm at each end "
                "on the mandrel or jig until the true-scale page covers them",
            )


@dataclass(frozen=True)
class Stand:
    """How the loop stands: sections of ring and bar, and its metal."""

    band: ring.Section
    bar: ring.Section
    metal: str
    temper: str | None


def _stand(context: Context) -> Stand:
    s, loop = context.sizes, context.job.loop
    if s.wire_mm is not None:
        section = ring.round_section(s.wire_mm)
        return Stand(section, section, loop.metal, loop.temper)
    thickness = s.sheet_mm or 0.0
    band = ring.strip_section(s.strip_width_mm or s.leg_width_mm, thickness)
    return Stand(band, ring.strip_section(s.leg_width_mm, thickness), loop.metal, loop.temper)


def _load(context: Context, stand: Stand, factor: float, ice_mm: float = 0.0) -> ring.RingLoad:
    metal = tables.metal(stand.metal)
    weight = factor * ring.weight_newton_per_mm(stand.band, metal.density_kg_per_m3, ice_mm)
    s = context.sizes
    return ring.ring_load(s.loop_diameter_mm / 2, s.loop_height_mm, stand.band, stand.bar, metal.youngs_gpa, weight)


BEAM = "curved beam on two posts, Castigliano (Roark, Formulas for Stress and Strain); from memory"


@check("WIRE-201", "caution", "wire_resonance_min_hz", source=BEAM)
def own_resonance(context: Context) -> Iterator[Fault]:
    """Lowest own resonance of the loop on its bars against what wind and a mast excite."""
    stand, least = _stand(context), context.limit("wire_resonance_min_hz")
    frequency = ring.own_resonance_hz(_load(context, stand, 1.0).sag_mm)
    if frequency < least:
        yield Fault(
            part="loop",
            feature="stiffness",
            value=f"{frequency:.0f} Hz",
            limit=f"{least:g} Hz",
            message=f"the loop swings at about {frequency:.0f} Hz; wind and mast shake it there",
            cure=f"use a conductor {least / frequency:.1f} times as thick, or hold the far side with a post of PTFE "
            "or foam",
        )


@check("WIRE-202", "caution", "sag_max_wavelengths", source=BEAM)
def sag(context: Context) -> Iterator[Fault]:
    """Sag of the loop's far side under 1 g."""
    most = context.limit("sag_max_wavelengths") * context.wavelength_mm
    load = _load(context, _stand(context), 1.0)
    if load.sag_mm > most:
        yield Fault(
            part="loop",
            feature="sag under 1 g",
            value=mm(load.sag_mm),
            limit=mm(most),
            message=f"the far side of the loop hangs {mm(load.sag_mm)} low when the dish looks up or down",
            cure=f"use a conductor {(load.sag_mm / most) ** 0.5:.1f} times as thick, or hold the far side with a post "
            "of PTFE or foam",
        )


@check("WIRE-203", "caution", "yield_safety", "shock_g", source=BEAM)
def shock(context: Context) -> Iterator[Fault]:
    """Stress under a shock of 5 g against the yield strength: beyond it the loop stays bent."""
    stand, factor = _stand(context), context.limit("shock_g")
    load = _load(context, stand, factor)
    most = tables.temper(stand.metal, stand.temper).yield_mpa / context.limit("yield_safety")
    if load.stress_mpa > most:
        yield Fault(
            part="loop",
            feature=f"stress under {factor:g} g",
            value=f"{load.stress_mpa:.0f} MPa",
            limit=f"{most:.0f} MPa",
            message=f"a knock of {factor:g} g bends the loop for good ({mm(load.sag_mm)} at its far side)",
            cure=f"use a conductor {load.stress_mpa / most:.1f} times as thick, a harder temper, or hold its far side",
        )


@check("WIRE-204", "caution", "ice_mm", "sag_max_wavelengths", source=BEAM)
def ice(context: Context) -> Iterator[Fault]:
    """Sag under a coat of ice, outdoors without a radome."""
    if not context.outdoors or context.job.can.radome:
        return
    coat = context.limit("ice_mm")
    most = 2 * context.limit("sag_max_wavelengths") * context.wavelength_mm
    load = _load(context, _stand(context), 1.0, coat)
    if load.sag_mm > most:
        yield Fault(
            part="loop",
            feature=f"sag under {coat:g} mm of ice",
            value=mm(load.sag_mm),
            limit=mm(most),
            message=f"{coat:g} mm of ice makes the loop's far side hang {mm(load.sag_mm)} low and detunes it",
            cure="close the can with a radome (can.radome = true), or hold the far side with a post of PTFE "
            f"{context.sizes.loop_height_mm:g} mm long",
        )
