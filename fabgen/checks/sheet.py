"""Sheet checks: bends, flanges, holes, webs, reliefs, stock.

Depends on: checks (registry, texts, flat_shapes), errors, parts, stock, theory.bending.
"""

from __future__ import annotations

from collections.abc import Iterator

from fabgen.checks import flat_shapes
from fabgen.checks.registry import Context, Fault, check, source_text
from fabgen.checks.texts import mm, up
from fabgen.errors import JobError
from fabgen.parts.contour import FoldLine
from fabgen.parts.records import FlatPattern, Part
from fabgen.stock import tables
from fabgen.stock.records import Die, Metal, Temper
from fabgen.theory.bending import min_inside_radius_mm

METALS = {"laser", "fold", "roll"}


def flats(context: Context) -> Iterator[tuple[Part, FlatPattern]]:
    """The sheet-metal parts with their flat patterns (foil is cut by hand, a test strip may fail)."""
    for part in context.parts:
        if part.flat is not None and METALS & set(part.process) and not part.key.startswith("bend-strip"):
            yield part, part.flat


def folds(context: Context) -> Iterator[tuple[Part, FlatPattern, FoldLine]]:
    """Every fold of every sheet-metal part."""
    for part, flat in flats(context):
        for fold in flat.folds:
            yield part, flat, fold


def _stock_of(part: Part) -> tuple[Metal, Temper]:
    metal = tables.metal(part.material)
    return metal, tables.temper(metal, part.temper or None)


def _softer(metal: Metal, thickness_mm: float, radius_mm: float) -> str:
    """Tempers of the metal that the radius suits, as words for a cure."""
    fit = []
    for temper in metal.tempers:
        try:
            fits = min_inside_radius_mm(temper, thickness_mm) <= radius_mm + 1e-9
        except JobError:
            continue
        if fits:
            fit.append(temper.name.split("/")[0] if len(temper.name) < 3 else temper.key)
    return f" or temper {'/'.join(fit)}" if fit else ""


@check("SHEET-101", "stop", source="bend table of the metal and temper")
def bend_radius_by_alloy(context: Context) -> Iterator[Fault]:
    """Inside radius of each fold against the least one of alloy, temper and thickness, across the rolling."""
    for part, flat, fold in folds(context):
        metal, temper = _stock_of(part)
        t, radius = flat.thickness_mm, fold.inside_radius_mm
        try:
            least = min_inside_radius_mm(temper, t)
        except JobError:
            continue
        if radius >= least - 1e-6:
            continue
        yield Fault(
            part=part.key,
            feature=f"fold {fold.number}",
            value=mm(radius),
            limit=mm(least),
            message=f"inside radius {mm(radius)}; {metal.designation.split(',')[0]} {temper.key} at {mm(t)} needs "
            f"{mm(least)}",
            cure=f"use {up(least):g} mm{_softer(metal, t, radius)}",
            source=source_text(temper.source),
        )


@check("SHEET-102", "note", source="bend table of the metal and temper")
def bend_along_the_rolling(context: Context) -> Iterator[Fault]:
    """Folds that hold across the direction of rolling but not along it."""
    for part, flat, fold in folds(context):
        _, temper = _stock_of(part)
        try:
            across = min_inside_radius_mm(temper, flat.thickness_mm)
            along = min_inside_radius_mm(temper, flat.thickness_mm, parallel=True)
        except JobError:
            continue
        if not across - 1e-6 <= fold.inside_radius_mm < along - 1e-6:
            continue
        yield Fault(
            part=part.key,
            feature=f"fold {fold.number}",
            value=mm(fold.inside_radius_mm),
            limit=mm(along),
            message=f"a fold line along the rolling direction needs {mm(along)} inside radius",
            cure=f"lay the part so that fold {fold.number} runs across the rolling direction, or use {up(along):g} mm",
            source=source_text(temper.source),
        )


@check("SHEET-103", "note", "inside_radius_min_thicknesses")
def bend_radius_any_shop(context: Context) -> Iterator[Fault]:
    """Inside radius under what any shop bends without a special tool, though the metal allows it."""
    ratio = context.limit("inside_radius_min_thicknesses")
    for part, flat, fold in folds(context):
        least = ratio * flat.thickness_mm
        if fold.inside_radius_mm < least - 1e-6:
            yield Fault(
                part=part.key,
                feature=f"fold {fold.number}",
                value=mm(fold.inside_radius_mm),
                limit=mm(least),
                message=f"inside radius {mm(fold.inside_radius_mm)} is under {ratio:g} thickness",
                cure=f"ask the shop, or use {up(least):g} mm (loop.bend_radius_mm)",
            )


@check("SHEET-104", "caution", source="bend table of the metal and temper")
def bend_table_covers(context: Context) -> Iterator[Fault]:
    """Sheet thicker than the bend table of its temper covers."""
    for part, flat in flats(context):
        if not flat.folds:
            continue
        metal, temper = _stock_of(part)
        end = temper.bend_ratio[-1][0]
        if flat.thickness_mm > end + 1e-9:
            yield Fault(
                part=part.key,
                feature="thickness",
                value=mm(flat.thickness_mm),
                limit=mm(end),
                message=f"the bend table of {metal.name} {temper.key} ends at {mm(end)}",
                cure=f"use {end:g} mm or thinner, or make a test bend first",
                source=source_text(temper.source),
            )


@check("SHEET-105", "caution", "bend_angle_max_deg")
def bend_angle(context: Context) -> Iterator[Fault]:
    """Bend angles beyond ordinary tooling."""
    most = context.limit("bend_angle_max_deg")
    for part, _, fold in folds(context):
        if abs(fold.angle_deg) > most:
            yield Fault(
                part=part.key,
                feature=f"fold {fold.number}",
                value=f"{abs(fold.angle_deg):g} deg",
                limit=f"{most:g} deg",
                message=f"fold {fold.number} turns by {abs(fold.angle_deg):g} degrees",
                cure=f"split it into two folds of {abs(fold.angle_deg) / 2:g} degrees, or {most:g} degrees or less",
            )


@check("SHEET-106", "note")
def one_radius_per_part(context: Context) -> Iterator[Fault]:
    """Different inside radii in one part: the tool is changed between folds."""
    for part, flat in flats(context):
        radii = sorted({round(fold.inside_radius_mm, 3) for fold in flat.folds})
        if len(radii) > 1:
            yield Fault(
                part=part.key,
                feature="folds",
                value=", ".join(mm(r) for r in radii),
                limit="one radius",
                message=f"the part has {len(radii)} inside radii: {', '.join(mm(r) for r in radii)}",
                cure=f"use {radii[-1]:g} mm for all folds",
                source="one shop's guide; read in a secondary page that quotes the source",
            )


def _least_leg(context: Context, thickness_mm: float) -> tuple[float, str]:
    """Least outside leg and the rule, by the job's die or by thickness."""
    opening = context.job.limits.die_opening_mm
    if opening is None:
        ratio = context.limit("flange_min_thicknesses")
        return ratio * thickness_mm, f"{ratio:g} thicknesses"
    rows: tuple[Die, ...] = tables.all_rows("die")
    for row in rows:
        if row.opening_mm == opening:
            return row.min_flange_mm, f"V {opening:g} mm"
    share = context.limit("flange_min_die_openings")
    return share * opening + thickness_mm / 2, f"{share:g} V + t/2, V {opening:g} mm"


@check("SHEET-201", "caution", "flange_min_thicknesses", "flange_min_die_openings",
       source="press-brake maker's air-bending chart; read in a secondary page that quotes the source")  # fmt: skip
def flange_length(context: Context) -> Iterator[Fault]:
    """Shortest leg of each fold against the die: stop where the job names the die, else caution."""
    named = context.job.limits.die_opening_mm is not None
    for part, flat in flats(context):
        least, rule = _least_leg(context, flat.thickness_mm)
        steps = flat_shapes.step_folds(flat, least)
        for index, fold in enumerate(flat.folds):
            leg = flat_shapes.leg_mm(flat, index)
            if leg >= least - 0.01 or fold.number in steps:
                continue
            other = "use a narrower die" if named else "fold it by hand; name your die in limits.die_opening_mm"
            yield Fault(
                part=part.key,
                feature=f"fold {fold.number}",
                value=mm(leg),
                limit=mm(least),
                message=f"the short leg of fold {fold.number} is {mm(leg)} outside; {rule} needs {mm(least)}",
                cure=f"make the leg {up(least - leg):g} mm longer, or {other}",
                severity="stop" if named else "caution",
            )


@check("SHEET-203", "note", "flange_min_thicknesses", "flange_min_die_openings")
def step_at_the_seam(context: Context) -> Iterator[Fault]:
    """Two folds so close, one up and one down, that they are made as one step (a joggle)."""
    for part, flat in flats(context):
        least, rule = _least_leg(context, flat.thickness_mm)
        step = [fold for fold in flat.folds if fold.number in flat_shapes.step_folds(flat, least)]
        if step:
            names = "folds " + " and ".join(str(fold.number) for fold in step)
            yield Fault(
                part=part.key,
                feature=names,
                value=" and ".join(f"{abs(fold.angle_deg):.0f} deg" for fold in step),
                limit=mm(least),
                message=f"{names} make a step of one thickness; a brake needs {mm(least)} between folds ({rule})",
                cure=f"press it with a joggling tool, or in a vice between two bars of {mm(flat.thickness_mm)} sheet",
            )


@check("SHEET-202", "note", source="workshop rules: air bending leaves 16 % of V in steel, 15 % in aluminium, 21 % "
       "in stainless; read in a secondary page that quotes the source")  # fmt: skip
def die_makes_the_radius(context: Context) -> Iterator[Fault]:
    """Inside radius that the named die makes in air bending, against the drawn one."""
    opening = context.job.limits.die_opening_mm
    if opening is None:
        return
    for part, _, fold in folds(context):
        metal, _ = _stock_of(part)
        share = 0.21 if metal.key.startswith("1.") else 0.15 if "aluminium" in metal.name else 0.16
        made = share * opening
        if abs(made - fold.inside_radius_mm) <= 0.25 * fold.inside_radius_mm:
            continue
        yield Fault(
            part=part.key,
            feature=f"fold {fold.number}",
            value=mm(fold.inside_radius_mm),
            limit=mm(made),
            message=f"a V of {opening:g} mm makes about {mm(made)} inside radius, the drawing has "
            f"{mm(fold.inside_radius_mm)}",
            cure=f"set loop.bend_radius_mm = {made:.1f}, or use a V of {fold.inside_radius_mm / share:.0f} mm",
        )


@check("SHEET-301", "caution", "hole_to_fold_thicknesses")
def hole_to_fold(context: Context) -> Iterator[Fault]:
    """Edge of each hole to the fold lines: 2 t + r."""
    ratio = context.limit("hole_to_fold_thicknesses")
    for part, flat in flats(context):
        shapes = flat_shapes.shapes_of(flat)
        for fold, distances, hangs in zip(flat.folds, shapes.to_fold_mm, shapes.hangs, strict=True):
            least = ratio * flat.thickness_mm + fold.inside_radius_mm
            for hole, value, on in zip(shapes.holes, distances, hangs, strict=True):
                distance = float(value)
                if distance >= least - 0.01 or on:
                    continue
                yield Fault(
                    part=part.key,
                    feature=f"hole {hole.number}, fold {fold.number}",
                    value=mm(distance),
                    limit=mm(least),
                    message=f"hole {hole.number} is {mm(distance)} from fold {fold.number}; it will turn oval",
                    cure=f"move it {up(least - distance):g} mm away, or drill it after folding",
                )


@check("SHEET-302", "caution", "hole_to_edge_thicknesses")
def hole_to_edge(context: Context) -> Iterator[Fault]:
    """Edge of each hole to the part's edge: 1.5 t."""
    ratio = context.limit("hole_to_edge_thicknesses")
    for part, flat in flats(context):
        least = ratio * flat.thickness_mm
        for number, distance in enumerate(flat_shapes.holes_to_edge_mm(flat), start=1):
            if distance < least - 0.02:
                yield Fault(
                    part=part.key,
                    feature=f"hole {number}",
                    value=mm(distance),
                    limit=mm(least),
                    message=f"hole {number} leaves {mm(distance)} to the edge",
                    cure=f"move it {up(least - distance):g} mm inwards",
                )


@check("SHEET-303", "caution", "hole_min_thicknesses", "hole_min_mm")
def hole_size(context: Context) -> Iterator[Fault]:
    """Holes and slots narrower than a laser cuts cleanly."""
    for part, flat in flats(context):
        least = max(context.limit("hole_min_thicknesses") * flat.thickness_mm, context.limit("hole_min_mm"))
        for hole in flat_shapes.shapes_of(flat).holes:
            if hole.width_mm < least - 1e-6:
                yield Fault(
                    part=part.key,
                    feature=f"hole {hole.number}",
                    value=mm(hole.width_mm),
                    limit=mm(least),
                    message=f"hole {hole.number} is {mm(hole.width_mm)} wide in {mm(flat.thickness_mm)} sheet",
                    cure=f"make it {up(least):g} mm, or have it centre-marked and drill it",
                )


@check("SHEET-304", "caution", "web_min_thicknesses")
def web_between_holes(context: Context) -> Iterator[Fault]:
    """Web between two holes."""
    for part, flat in flats(context):
        least = context.limit("web_min_thicknesses") * flat.thickness_mm
        closest = flat_shapes.closest_holes(flat)
        if closest is not None and closest[0] < least - 0.02:
            distance, first, second = closest
            yield Fault(
                part=part.key,
                feature=f"holes {first} and {second}",
                value=mm(distance),
                limit=mm(least),
                message=f"holes {first} and {second} leave a web of {mm(distance)}",
                cure=f"move them {up(least - distance):g} mm apart or make them one slot",
            )


@check("SHEET-305", "caution", "web_min_thicknesses")
def web_of_the_part(context: Context) -> Iterator[Fault]:
    """Places of the part that are narrower than a web should be."""
    for part, flat in flats(context):
        least = max(context.limit("web_min_thicknesses") * flat.thickness_mm, 0.5)
        if flat_shapes.has_web_under(flat, least):
            yield Fault(
                part=part.key,
                feature="narrowest place",
                value=f"under {mm(least)}",
                limit=mm(least),
                message=f"the part is somewhere narrower than {mm(least)} and warps or burns there",
                cure=f"widen it to {up(least):g} mm",
            )


@check("SHEET-306", "caution", "hole_min_mm", "hole_min_thicknesses")
def narrow_gaps(context: Context) -> Iterator[Fault]:
    """Gaps and reliefs in the outer edge narrower than a laser cuts cleanly."""
    for part, flat in flats(context):
        least = min(context.limit("hole_min_mm"), context.limit("hole_min_thicknesses") * flat.thickness_mm)
        if flat_shapes.slot_area_under_mm2(flat, least) > 0:
            yield Fault(
                part=part.key,
                feature="gap in the edge",
                value=f"under {mm(least)}",
                limit=mm(least),
                message=f"a gap in the outer edge is narrower than {mm(least)}",
                cure=f"widen it to {up(least):g} mm",
            )


@check("SHEET-307", "caution", "relief_min_mm")
def bend_relief(context: Context) -> Iterator[Fault]:
    """Relief beside a fold that ends inside the sheet."""
    for part, flat, fold in folds(context):
        width = max(context.limit("relief_min_mm"), flat.thickness_mm)
        if not flat_shapes.relieved(flat, fold, width):
            yield Fault(
                part=part.key,
                feature=f"fold {fold.number}",
                value="no relief",
                limit=mm(width),
                message=f"fold {fold.number} ends against uncut sheet and tears there",
                cure=f"cut a relief {width:g} mm wide and {up(fold.inside_radius_mm + flat.thickness_mm):g} mm deep",
            )


@check("SHEET-308", "stop", "hole_min_mm")
def tabs_that_overlap(context: Context) -> Iterator[Fault]:
    """Tabs side by side that overlap, or leave less between them than a laser cuts: stop where they overlap."""
    least = context.limit("hole_min_mm")
    for part, flat in flats(context):
        for first, second, gap in flat_shapes.tab_gaps(flat):
            if gap < least - 1e-6:
                state = f"overlap by {mm(-gap)}" if gap < 0 else f"are {mm(gap)} apart"
                yield Fault(
                    part=part.key,
                    feature=f"folds {first} and {second}",
                    value=mm(gap),
                    limit=mm(least),
                    message=f"the tabs of folds {first} and {second} {state}; between them a laser needs {mm(least)}",
                    cure=f"move them {up(least - gap):g} mm apart, or make each {up((least - gap) / 2):g} mm narrower",
                    severity="stop" if gap < 0 else "caution",
                )


@check("SHEET-401", "caution", "laser_min_sheet_mm")
def thin_sheet_under_the_laser(context: Context) -> Iterator[Fault]:
    """Sheet thinner than laser cutting is specified for."""
    least = context.limit("laser_min_sheet_mm")
    for part, flat in flats(context):
        if "laser" in part.process and flat.thickness_mm < least:
            yield Fault(
                part=part.key,
                feature="thickness",
                value=mm(flat.thickness_mm),
                limit=mm(least),
                message=f"{mm(flat.thickness_mm)} sheet warps and burns under a laser",
                cure=f"cut it with a knife over the true-scale page, have it etched, or use {least:g} mm",
            )


@check("SHEET-402", "stop", source="the job's own sheet size")
def fits_the_sheet(context: Context) -> Iterator[Fault]:
    """Flat pattern against the stock sheet."""
    long, short = sorted(context.job.limits.sheet_mm, reverse=True)
    for part, flat in flats(context):
        length, width = flat_shapes.size_mm(flat)
        if length > long or width > short:
            yield Fault(
                part=part.key,
                feature="flat pattern",
                value=f"{length:.0f} x {width:.0f} mm",
                limit=f"{long:g} x {short:g} mm",
                message=f"the flat pattern of {length:.0f} x {width:.0f} mm does not fit the stock sheet",
                cure=f"use a sheet of {up(length, 10):g} x {up(width, 10):g} mm (limits.sheet_mm), or another can.make",
            )


@check("SHEET-403", "caution", "part_mass_max_kg")
def part_mass(context: Context) -> Iterator[Fault]:
    """Mass of each part against what one person lifts onto a machine."""
    most = context.limit("part_mass_max_kg")
    for part in context.parts:
        if part.mass_kg > most:
            yield Fault(
                part=part.key,
                feature="mass",
                value=f"{part.mass_kg:.1f} kg",
                limit=f"{most:g} kg",
                message=f"{part.name} weighs {part.mass_kg:.1f} kg",
                cure=f"use walls {most / part.mass_kg:.2f} times as thick, or plan for two people",
            )
