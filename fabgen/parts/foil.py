"""Foil for a printed can: a disc for the floor and a strip for the wall, as they are cut flat; for a choke a ring
for its floor, with the holes of the screws below it, and strips for its wall and for the can's wall inside it.

Strip, seen from the side that shows in the can::

         |<------ pi * can_bore ------>|<- OVERLAP ->|
         .-----------------------------+-------------.  --- turned over the rim, RIM
         |                             :             |
         |                             :             |   can_depth
         |                             :             |
         '-\\  /-\\  /-\\  /-\\  /-\\  /-\\  /-\\  /-\\  /-\\ /'  --- turned in on the floor, LAP, notched

The strip's beginning lies on the E-plane (phi = 90 degrees). The disc goes on the notched lap and is soldered or
burnished to it all round. The can's outer strip turns its lap out instead: slit in place of notched, since it opens.

Depends on: errors, stock, parts (can_printed, contour, floor_holes, records), sizing.records.
"""

from __future__ import annotations

import math

from fabgen.parts.can_printed import CHOKE_SCREW, body_of, choke_screw_points
from fabgen.parts.contour import Circle, Contour, Outline, Vertex, area_mm2, tidied
from fabgen.parts.floor_holes import floor_holes
from fabgen.parts.records import FlatPattern, Part, Process
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from fabgen.stock.records import Lining

OVERLAP_MM = 10.0
LAP_MM = 10.0
RIM_MM = 3.0
NOTCH_PITCH_MM = 20.0
SLIT_MM = 0.5
"""Overlaps, notches and slits that a hand can lay without folds. Common practice, no source."""


def foil_patterns(feed: Feed) -> tuple[Part, ...]:
    """Discs and strips of a printed can lined with foil; nothing for other makes and linings."""
    lining = tables.lining(feed.job.can.lining)
    if feed.job.can.make != "printed" or lining.kind != "foil":
        return ()
    sizes, choke = feed.sizes, feed.sizes.choke
    parts = [_disc(feed, lining), _strip(feed, lining, "foil-wall", sizes.can_bore_mm, sizes.can_depth_mm)]
    if choke is not None:
        parts += [
            _ring(feed, lining, choke.bore_mm),
            _strip(feed, lining, "foil-choke-wall", choke.bore_mm, choke.depth_mm),
            _strip(feed, lining, "foil-choke-can", _can_outer_mm(feed), sizes.can_depth_mm - choke.floor_z_mm),
        ]
    return tuple(parts)


def _can_outer_mm(feed: Feed) -> float:
    return 2 * body_of(feed).outer_radius_mm


def _foil(feed: Feed, lining: Lining, key: str, name: str, flat: FlatPattern, sizes: tuple[tuple[str, float], ...],
          note: str) -> Part:
    area = area_mm2(flat.outline) - math.fsum(area_mm2(h) for h in flat.holes)
    process: tuple[Process, ...] = ("foil",)
    # Foil is copper in the table's shipped rows; its density is that of Cu-ETP.
    density = tables.metal("cu-etp").density_kg_per_m3
    return Part(
        key=key,
        name=name,
        process=process,
        material=lining.key,
        material_name=lining.name,
        temper="",
        colour=tables.metal("cu-etp").colour,
        quantity=1,
        sizes=sizes,
        tolerance="+-0.5 mm",
        finish="smooth, no creases",
        flat=flat,
        thickness_mm=lining.thickness_mm,
        mass_kg=area * lining.thickness_mm * 1e-9 * density,
        notes=(note,),
    )  # fmt: skip


def _disc(feed: Feed, lining: Lining) -> Part:
    bore = feed.sizes.can_bore_mm
    holes: tuple[Outline, ...] = tuple(h.outline for h in floor_holes(feed))
    flat = FlatPattern(Circle(0.0, 0.0, bore), holes, (), lining.thickness_mm, "inside")
    return _foil(
        feed, lining, "foil-floor", "foil for the floor", flat, (("can_bore_mm", bore),),
        "lay on the strip's lap and solder or burnish all round",
    )  # fmt: skip


def _ring(feed: Feed, lining: Lining, bore_mm: float) -> Part:
    """The choke's floor between the can and the choke's wall, its screws' holes in it."""
    inner, clear = _can_outer_mm(feed), tables.screw(CHOKE_SCREW).clearance_medium_mm
    at = choke_screw_points(feed, body_of(feed))
    holes: tuple[Outline, ...] = (Circle(0.0, 0.0, inner), *(Circle(x, y, clear) for x, y in at))
    flat = FlatPattern(Circle(0.0, 0.0, bore_mm), holes, (), lining.thickness_mm, "inside")
    return _foil(
        feed, lining, "foil-choke-floor", "foil for the choke's floor", flat,
        (("choke_bore_mm", bore_mm), ("inner_mm", inner)),
        "slide over the can onto the laps of both strips and solder or burnish all round, inside and outside",
    )  # fmt: skip


STRIPS = {
    "foil-wall": ("foil for the wall", "begin at +y (E-plane); turn the lap in on the floor and the rest over the rim"),
    "foil-choke-wall": (
        "foil for the choke's wall",
        "begin at +y (E-plane); turn the lap in on the floor and the rest over the rim",
    ),
    "foil-choke-can": (
        "foil for the can inside the choke",
        "round the outside of the can, begin at +y (E-plane); turn the lap out on the choke's floor and the rest over "
        "the rim, onto the foil of the bore",
    ),
}


def _strip(feed: Feed, lining: Lining, key: str, bore_mm: float, depth_mm: float) -> Part:
    length = math.pi * bore_mm + OVERLAP_MM
    count = max(6, round(length / NOTCH_PITCH_MM))
    pitch = length / count
    # The turned-in lap is shorter inside by 2 pi LAP: each notch takes its share, and a little more. A lap that is
    # turned out grows longer: slits open.
    half = SLIT_MM / 2 if key == "foil-choke-can" else math.pi * LAP_MM / count + 0.5
    edge = [Vertex(0.0, -LAP_MM)]
    for i in range(count):
        x = pitch * (i + 0.5)
        edge += [Vertex(x - half, -LAP_MM), Vertex(x, 0.0), Vertex(x + half, -LAP_MM)]
    edge += [Vertex(length, -LAP_MM), Vertex(length, depth_mm + RIM_MM), Vertex(0.0, depth_mm + RIM_MM)]
    flat = FlatPattern(tidied(Contour(tuple(edge))), (), (), lining.thickness_mm, "inside")
    sizes = (("length_mm", length), ("height_mm", depth_mm + RIM_MM + LAP_MM), ("overlap_mm", OVERLAP_MM))
    name, note = STRIPS[key]
    return _foil(feed, lining, key, name, flat, sizes, note)
