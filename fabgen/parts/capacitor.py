"""The coax stub and the series capacitor at its crossing from bar to bar.

Seen along -x, bars cut::

      bar -y      brass tube       centre conductor    bar +y
       | |====================..........----.           | |
       | |  PTFE, open end ->  wire, overlap  \\         | |     z = tap_height
       | |====================..........----.  |        | |
       | |                                  |coax|      | |
     =======================================|====|======|=|==  z = 0

``form`` "sleeve": the coax's bare centre conductor slides in a PTFE tube in a brass tube that lies on the other
bar. ``form`` "plates": a plate on the centre conductor and one on the bar overlap with a film between them.

Depends on: errors, stock, parts.contour, parts.records, parts.kernel, parts.floor_plan, sizing.records.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from fabgen.errors import GeometryError
from fabgen.parts import kernel
from fabgen.parts.contour import rectangle
from fabgen.parts.floor_plan import PLATE_MM, coax_axis, floor_bottom_mm, leg_depth_mm
from fabgen.parts.records import FlatPattern, Part
from fabgen.sizing.records import Feed
from fabgen.stock import tables

if TYPE_CHECKING:
    import cadquery

END_GAP_MM = 1.0
"""From the wire's bend to the open end of the tube: a blade's width to measure the overlap. Common practice."""
BEND_RATIO = 1.5
"""Axis radius of the centre conductor's bend over its diameter: an inside radius of one diameter, soft copper."""
WIDEST_FILLET_MM = 0.3
"""A gap that solder fills by itself. Common practice, no source."""
LEAST_SLANT_DEG = 0.5
"""A slant that is worth telling."""
PTFE_DENSITY = 2200.0
FILM_COLOUR = (0.93, 0.93, 0.90)


@dataclass(frozen=True)
class Crossing:
    """Where the crossing runs: the coax's axis, its bend, and the ends along y.

    ``slant_deg``: turn of the run about the coax's axis, towards the bar at -y, which a sleeve thinner than the coax
    lies against.
    """

    x_mm: float
    coax_y_mm: float
    tap_z_mm: float
    bend_mm: float
    jacket_top_mm: float
    open_end_y_mm: float
    core_end_y_mm: float
    far_end_y_mm: float
    slant_deg: float = 0.0


def crossing_of(feed: Feed) -> Crossing:
    """Lay out the crossing. Raises GeometryError when the bars stand too close for coax and overlap."""
    sizes, coax, capacitor = feed.sizes, tables.coax(feed.job.cable.coax), feed.capacitor
    x, y = coax_axis(feed)
    bend = BEND_RATIO * coax.inner_mm
    if sizes.tap_height_mm - bend <= 0:
        raise GeometryError(
            f"tap_height_mm = {sizes.tap_height_mm:g} leaves no room to bend the centre conductor of {coax.key} "
            f"({coax.inner_mm:g} mm thick); choose a thinner coax"
        )
    bar = -sizes.leg_pitch_mm / 2
    open_end = y - max(bend, coax.outer_mm / 2) - END_GAP_MM
    inner_edge = bar + sizes.leg_width_mm / 2
    if open_end <= inner_edge:
        raise GeometryError(
            f"leg_pitch_mm = {sizes.leg_pitch_mm:g} leaves no room between the bars for {coax.key} and the "
            f"capacitor; choose a thinner coax or fix leg_pitch_mm at {sizes.leg_pitch_mm + bend:.1f} or more"
        )
    far = min(open_end - capacitor.overlap_max_mm - END_GAP_MM, bar - leg_depth_mm(feed) / 2)
    return Crossing(
        x_mm=x,
        coax_y_mm=y,
        tap_z_mm=sizes.tap_height_mm,
        bend_mm=bend,
        jacket_top_mm=sizes.tap_height_mm - bend,
        open_end_y_mm=open_end,
        core_end_y_mm=open_end - capacitor.overlap_mm,
        far_end_y_mm=far,
        slant_deg=_slant_deg(feed, far) if capacitor.form == "sleeve" else 0.0,
    )


def _slant_deg(feed: Feed, far_end_y_mm: float) -> float:
    """Turn of the run that brings the sleeve against its bar: with the bar's point at (dx, dy) from the coax,

    dx cos(turn) - dy sin(turn) = reach, the sleeve's radius and, beside a round bar's axis, the bar's.
    """
    sizes, capacitor = feed.sizes, feed.capacitor
    x, y = coax_axis(feed)
    reach, bar = capacitor.outer_mm / 2 + capacitor.tube_wall_mm, -sizes.leg_pitch_mm / 2
    if sizes.wire_mm is not None:
        reach, across, along = reach + sizes.wire_mm / 2, x - sizes.leg_x_mm, y - bar
    else:
        # Against the far edge of a flat bar, or with the sleeve's end.
        edge = max(bar - sizes.leg_width_mm / 2, far_end_y_mm)
        across, along = x - sizes.leg_x_mm - leg_depth_mm(feed) / 2, y - edge
    turn = math.acos(min(1.0, reach / math.hypot(across, along))) - math.atan2(along, across)
    return max(0.0, math.degrees(turn))


def _slanted(run: Crossing, shape: kernel.Shape) -> kernel.Shape:
    """The shape turned about the coax's axis by the run's slant."""
    if run.slant_deg == 0.0:
        return shape
    return kernel.turned(shape, -run.slant_deg, through=(run.x_mm, run.coax_y_mm, 0.0))


def coax_stub(feed: Feed) -> Part:
    """The piece of coax from the connector up the bar and across, one body: cable, then bare centre conductor."""
    row, metal, run = tables.coax(feed.job.cable.coax), tables.metal("cu-etp"), crossing_of(feed)
    bottom = floor_bottom_mm(feed)
    jacket = run.jacket_top_mm - bottom
    core = math.pi / 2 * run.bend_mm + (run.coax_y_mm - run.bend_mm) - run.core_end_y_mm
    bond = "solder the jacket along the bar at +y"
    if bond_gap_mm(feed) > WIDEST_FILLET_MM:
        bond += ", with the bond strip between them"
    volume = math.pi / 4 * (row.outer_mm**2 * jacket + row.inner_mm**2 * core)
    return Part(
        key="coax-stub",
        name=f"coax stub {row.key}",
        process=("buy", "wire"),
        material=row.key,
        material_name=row.name,
        temper="",
        colour=metal.colour,
        quantity=1,
        sizes=(
            ("outer_mm", row.outer_mm),
            ("jacket_mm", round(jacket, 2)),
            ("bared_mm", round(core, 2)),
            ("cut_length_mm", round(jacket + core, 2)),
            ("overlap_mm", feed.capacitor.overlap_mm),
            ("gap_to_bar_mm", round(bond_gap_mm(feed), 2)),
        ),
        tolerance="bare length +0.5/0 mm, cut after the first measurement",
        finish=bond,
        solid=kernel.once(lambda: _stub_solid(feed)),
        mass_kg=volume * 1e-9 * 5500.0,
        notes=(f"bend the bare centre conductor over {run.bend_mm:.1f} mm radius (of its axis) at the tap height",),
    )


def bond_gap_mm(feed: Feed) -> float:
    """Between the coax's jacket and the bar that it is bonded to."""
    outer = tables.coax(feed.job.cable.coax).outer_mm
    return max(0.0, coax_axis(feed)[0] - feed.sizes.leg_x_mm - (leg_depth_mm(feed) + outer) / 2)


def coax_bond(feed: Feed) -> Part | None:
    """The strip of copper that bonds the jacket to its bar where a connector's screw head keeps them apart.

    None where they touch, or where solder alone fills the gap. In tenths, as sheet is sold; solder fills the rest.
    """
    gap = bond_gap_mm(feed)
    if gap <= WIDEST_FILLET_MM:
        return None
    run, metal, outer = crossing_of(feed), tables.metal("cu-etp"), tables.coax(feed.job.cable.coax).outer_mm
    thick, high = math.floor(10 * gap + 1e-6) / 10, run.jacket_top_mm
    face = run.x_mm - outer / 2
    low_corner = (face - thick, run.coax_y_mm - outer / 2, 0.0)
    return Part(
        key="coax-bond",
        name="bond strip between coax and bar",
        process=("laser",),
        material=metal.key,
        material_name=metal.name,
        temper=metal.default_temper.key,
        colour=metal.colour,
        quantity=1,
        sizes=(("thickness_mm", thick), ("width_mm", outer), ("length_mm", round(high, 2))),
        tolerance="length and width +-0.2 mm",
        finish="bright; solder to bar and jacket over its whole length",
        flat=FlatPattern(rectangle((0.0, 0.0), (outer, round(high, 2))), thickness_mm=thick),
        thickness_mm=thick,
        solid=kernel.once(lambda: kernel.box(low_corner, (face, run.coax_y_mm + outer / 2, high))),
        mass_kg=thick * outer * high * 1e-9 * metal.density_kg_per_m3,
        notes=(f"fills the gap of {gap:.2f} mm: the jacket's current goes to the bar through it",),
    )


def capacitor_parts(feed: Feed) -> tuple[Part, ...]:
    """The parts of the series capacitor other than the coax's core."""
    if feed.capacitor.form == "sleeve":
        return (_liner(feed), _sleeve(feed))
    return _plates(feed)


def _stub_solid(feed: Feed) -> cadquery.Shape:
    import cadquery as cq

    row, run = tables.coax(feed.job.cable.coax), crossing_of(feed)
    start = cq.Vector(run.x_mm, run.coax_y_mm, run.jacket_top_mm)
    centre_y, s = run.coax_y_mm - run.bend_mm, run.bend_mm * math.sqrt(0.5)
    middle = cq.Vector(run.x_mm, centre_y + s, run.jacket_top_mm + s)
    level = cq.Vector(run.x_mm, centre_y, run.tap_z_mm)
    end = cq.Vector(run.x_mm, run.core_end_y_mm, run.tap_z_mm)
    path = cq.Wire.assembleEdges(
        [cq.Edge.makeThreePointArc(start, middle, level), cq.Edge.makeLine(level, end)]
    )
    ring = cq.Wire.makeCircle(row.inner_mm / 2, start, cq.Vector(0, 0, 1))
    core = _slanted(run, cq.Solid.sweep(ring, [], path))
    jacket = kernel.rod(
        (run.x_mm, run.coax_y_mm, floor_bottom_mm(feed)), start.toTuple(), row.outer_mm
    )
    return kernel.fused(jacket, core, what="coax stub")


def _liner(feed: Feed) -> Part:
    """The PTFE tube between wire and brass; it reaches a little out of the brass at the open end."""
    capacitor, run = feed.capacitor, crossing_of(feed)
    length = capacitor.overlap_max_mm + END_GAP_MM
    start = (run.x_mm, run.open_end_y_mm + END_GAP_MM / 2, run.tap_z_mm)
    end = (run.x_mm, start[1] - length, run.tap_z_mm)
    volume = math.pi / 4 * (capacitor.outer_mm**2 - capacitor.inner_mm**2) * length
    return Part(
        key="capacitor-liner",
        name="capacitor PTFE tube",
        process=("buy",),
        material="ptfe",
        material_name="PTFE tube",
        temper="",
        colour=FILM_COLOUR,
        quantity=1,
        sizes=(
            ("bore_mm", capacitor.inner_mm),
            ("outer_mm", capacitor.outer_mm),
            ("length_mm", round(length, 2)),
        ),
        tolerance="length +-0.5 mm; a sliding fit in the brass tube",
        finish="cut square with a blade",
        solid=kernel.once(lambda: _slanted(run, kernel.tube(start, end, capacitor.outer_mm, capacitor.inner_mm))),
        mass_kg=volume * 1e-9 * PTFE_DENSITY,
    )


def _sleeve(feed: Feed) -> Part:
    capacitor, metal, run = feed.capacitor, tables.metal("cuzn37"), crossing_of(feed)
    length = run.open_end_y_mm - run.far_end_y_mm
    outer = capacitor.outer_mm + 2 * capacitor.tube_wall_mm
    start = (run.x_mm, run.open_end_y_mm, run.tap_z_mm)
    end = (run.x_mm, run.far_end_y_mm, run.tap_z_mm)
    volume = math.pi / 4 * (outer**2 - capacitor.outer_mm**2) * length
    lean = run.slant_deg >= LEAST_SLANT_DEG
    return Part(
        key="capacitor-tube",
        name="capacitor tube",
        process=("buy", "wire"),
        material=metal.key,
        material_name=metal.name,
        temper=metal.default_temper.key,
        colour=metal.colour,
        quantity=1,
        sizes=(
            ("bore_mm", capacitor.outer_mm),
            ("outer_mm", outer),
            ("length_mm", round(length, 2)),
            ("overlap_mm", capacitor.overlap_mm),
        ),
        tolerance="length +-0.5 mm; bore a sliding fit on the PTFE tube",
        finish="deburred, soldered along the bar at -y",
        solid=kernel.once(lambda: _slanted(run, kernel.tube(start, end, outer, capacitor.outer_mm))),
        mass_kg=volume * 1e-9 * metal.density_kg_per_m3,
        notes=(
            *((f"lies against the bar: lead the conductor {run.slant_deg:.1f} degrees towards it",) * lean),
            "slide to trim; set with a drop of varnish once the reflection is right",
        ),
    )


def _plates(feed: Feed) -> tuple[Part, ...]:
    """From the bar outwards along x: plate on the bar, film, plate on the centre conductor, conductor."""
    capacitor, run, coax = feed.capacitor, crossing_of(feed), tables.coax(feed.job.cable.coax)
    half, film = capacitor.plate_width_mm / 2, capacitor.film_mm
    low, high = run.tap_z_mm - half, run.tap_z_mm + half
    outer = run.x_mm - coax.inner_mm / 2
    inner = outer - PLATE_MM
    face = feed.sizes.leg_x_mm + leg_depth_mm(feed) / 2
    # In tenths, as sheet is sold; solder fills the rest.
    on_bar = max(PLATE_MM, math.floor(10 * (inner - film - face) + 1e-6) / 10)
    end = min(run.core_end_y_mm + capacitor.overlap_max_mm + END_GAP_MM, run.open_end_y_mm + END_GAP_MM)
    reach = run.open_end_y_mm - run.core_end_y_mm
    boxes = (
        ("capacitor-plate-bar", "capacitor plate on the bar",
         (inner - film - on_bar, run.far_end_y_mm, low), (inner - film, run.open_end_y_mm, high)),
        ("capacitor-film", "capacitor film",
         (inner - film, run.core_end_y_mm - 1.0, low - 1.0), (inner, run.open_end_y_mm + 1.0, high + 1.0)),
        ("capacitor-plate-coax", "capacitor plate on the coax",
         (inner, run.core_end_y_mm, low), (outer, end, high)),
    )
    return tuple(_plate(key, name, a, b, reach) for key, name, a, b in boxes)


def _plate(key: str, name: str, low: kernel.Point3, high: kernel.Point3, overlap_mm: float) -> Part:
    film = key == "capacitor-film"
    metal = tables.metal("cuzn37")
    x, y, z = (b - a for a, b in zip(low, high, strict=True))
    flat = FlatPattern(rectangle((0.0, 0.0), (round(y, 2), round(z, 2))), thickness_mm=round(x, 3))
    return Part(
        key=key,
        name=name,
        process=("buy",) if film else ("laser",),
        material="ptfe" if film else metal.key,
        material_name="PTFE film" if film else metal.name,
        temper="" if film else metal.default_temper.key,
        colour=FILM_COLOUR if film else metal.colour,
        quantity=1,
        sizes=(
            ("thickness_mm", round(x, 3)),
            ("length_mm", round(y, 2)),
            ("width_mm", round(z, 2)),
            ("overlap_mm", round(overlap_mm, 2)),
        ),
        tolerance="length and width +-0.2 mm",
        finish="cut with a knife" if film else "deburred",
        flat=None if film else flat,
        thickness_mm=round(x, 3),
        solid=kernel.once(lambda: kernel.box(low, high)),
        mass_kg=x * y * z * 1e-9 * (PTFE_DENSITY if film else metal.density_kg_per_m3),
    )
