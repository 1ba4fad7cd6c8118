"""Electrical checks of metals, coatings and linings: skin depth, loss, roughness.

Depends on: checks (registry, surfaces, texts), stock, theory.
"""

from __future__ import annotations

from collections.abc import Iterator

from fabgen.checks.registry import Context, Fault, check
from fabgen.checks.surfaces import can_surface, loop_surface
from fabgen.checks.texts import mm, up
from fabgen.stock import tables
from fabgen.theory import skin

GOOD_LINING = "copper-foil-35"


@check("ELEC-101", "caution", "skin_depths_min")
def thick_enough_for_the_current(context: Context) -> Iterator[Fault]:
    """Metal, plating and foil against the skin depth at the target.

    Paint is judged by its loss (ELEC-103), since a film of resistive paint is thinner than its own skin depth."""
    least = context.limit("skin_depths_min")
    for surface in (loop_surface(context), can_surface(context)):
        if surface.film or surface.skin_depths >= least:
            continue
        need = up(least * surface.depth_mm * 1e3, 1.0)
        yield Fault(
            part=surface.part,
            feature="conducting layer",
            value=f"{surface.skin_depths:.1f} skin depths",
            limit=f"{least:g} skin depths",
            message=f"{surface.name} is {mm(surface.thickness_mm)} thick, {surface.skin_depths:.1f} skin depths "
            f"of {surface.depth_mm * 1e3:.2f} um",
            cure=f"use a layer of {need:g} um or more",
        )


@check("ELEC-102", "caution", "coating_skin_depths_min")
def coating_carries_the_current(context: Context) -> Iterator[Fault]:
    """Coatings of sheet (zinc, tin) that are so thin that the current flows in the metal below."""
    least = context.limit("coating_skin_depths_min")
    used = {"loop": context.job.loop.metal}
    if not context.printed:
        used["can"] = context.job.can.metal
    for part, key in used.items():
        metal = tables.metal(key)
        if metal.coating_um is None:
            continue
        depth_um = 1e3 * skin.skin_depth_mm(context.frequency_mhz, COATING_CONDUCTIVITY.get(key, 1e7))
        if metal.coating_um >= least * depth_um:
            continue
        yield Fault(
            part=part,
            feature="coating",
            value=f"{metal.coating_um / depth_um:.2f} skin depths",
            limit=f"{least:g} skin depths",
            message=f"the coating of {metal.name} is {metal.coating_um:g} um, {metal.coating_um / depth_um:.2f} of "
            f"its skin depth of {depth_um:.1f} um: the steel below carries the current and its magnetism adds loss",
            cure=f"line the inside with {tables.lining(GOOD_LINING).name}, soldered, or use copper, brass or aluminium",
        )


# Tin and zinc, S/m: SK-18, SK-19 (resistivity tables at 20 degC; read in a secondary page that quotes the source).
COATING_CONDUCTIVITY = {"tinplate": 9.17e6, "dc01-zinc": 1.69e7}


@check("ELEC-103", "caution", "added_noise_max_k")
def noise_of_the_losses(context: Context) -> Iterator[Fault]:
    """Noise that the losses of metal and lining add, in kelvin, and the surface that is worst."""
    noise, most = context.feed.predicted.feed_noise_k, context.limit("added_noise_max_k")
    if noise <= most:
        return
    worst = max((loop_surface(context), can_surface(context)), key=lambda s: s.resistance_ohm)
    yield Fault(
        part=worst.part,
        feature="ohmic loss",
        value=f"{noise:.1f} K",
        limit=f"{most:g} K",
        message=f"losses of the metal surfaces add {noise:.1f} K; {worst.name} has "
        f"{worst.resistance_ohm * 1e3:.0f} milliohm per square",
        cure=f"use a surface under {worst.resistance_ohm * 1e3 * most / noise:.0f} milliohm per square, "
        f"like {tables.lining(GOOD_LINING).name}, brass or copper",
    )


@check("ELEC-104", "caution", "ohmic_loss_max_db")
def ohmic_loss(context: Context) -> Iterator[Fault]:
    """Ohmic loss of the whole feed."""
    loss, most = context.feed.predicted.ohmic_loss_db, context.limit("ohmic_loss_max_db")
    if loss <= most:
        return
    worst = max((loop_surface(context), can_surface(context)), key=lambda s: s.resistance_ohm)
    yield Fault(
        part=worst.part,
        feature="ohmic loss",
        value=f"{loss:.2f} dB",
        limit=f"{most:g} dB",
        message=f"the feed loses {loss:.2f} dB in its surfaces, most of it in {worst.name}",
        cure="choose the selectivity 'balanced' or 'broad', or a surface with "
        f"{worst.resistance_ohm * 1e3 * most / loss:.0f} milliohm per square or less",
    )


@check("ELEC-105", "note", "roughness_factor_max", "roughness_printed_um", "roughness_turned_um",
       "roughness_rolled_um", source="Hammerstad and Jensen, IEEE MTT-S Digest 1980, p. 407; from memory")  # fmt: skip
def roughness(context: Context) -> Iterator[Fault]:
    """Rise of the can's surface resistance by roughness, and the noise that it adds."""
    can = can_surface(context)
    make = context.job.can.make
    foil = context.printed and tables.lining(context.job.can.lining).kind == "foil"
    kind = "rolled" if foil or make in {"rolled", "folded", "tube"} else "printed" if context.printed else "turned"
    height = context.limit(f"roughness_{kind}_um")
    factor = skin.roughness_factor(height, can.depth_mm * 1e3)
    most = context.limit("roughness_factor_max")
    if factor <= most:
        return
    noise = (factor - 1) * context.feed.predicted.feed_noise_k
    yield Fault(
        part="can",
        feature="inner face",
        value=f"{factor:.2f} x",
        limit=f"{most:g} x",
        message=f"a surface rough by {height:g} um rms raises the loss of {can.name} {factor:.2f} times and adds up "
        f"to {noise:.1f} K that the prediction leaves out",
        cure=f"{_SMOOTH[kind]} to {_height_for(most, can.depth_mm * 1e3):.1f} um rms",
    )


_SMOOTH = {
    "rolled": "take sheet, tube or foil with an inside",
    "turned": "turn the inside with a fine feed, or polish it,",
    "printed": "sand and fill the inside before lining or plating",
}


def _height_for(factor: float, depth_um: float) -> float:
    """Inverse of the roughness formula by bisection, um."""
    low, high = 0.0, 10 * depth_um
    for _ in range(60):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if skin.roughness_factor(middle, depth_um) < factor else (low, middle)
    return low


@check("ELEC-106", "note")
def lining_not_measured(context: Context) -> Iterator[Fault]:
    """Conductive paint whose sheet resistance is a table default, not the user's measurement."""
    if not context.printed or context.job.can.lining_sheet_resistance_ohm is not None:
        return
    lining = tables.lining(context.job.can.lining)
    if lining.sheet_resistance_ohm is None:
        return
    yield Fault(
        part="can",
        feature="lining",
        value=f"{lining.sheet_resistance_ohm:g} ohm per square, not measured",
        limit="own measurement",
        message=f"the sheet resistance of {lining.name} differs by a factor of 10 between makers and coats",
        cure="measure a painted square of 50 mm with 4 points and give can.lining_sheet_resistance_ohm",
        source=f"{lining.source.text}; {lining.source.known_from}",
    )
