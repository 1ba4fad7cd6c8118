"""Screws, nuts and heat-set inserts as bought parts: plain heads, no thread drawn.

Depends on: errors, stock, parts.contour, parts.records, parts.kernel, sizing.records.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import TYPE_CHECKING

from fabgen.errors import GeometryError
from fabgen.parts import kernel
from fabgen.parts.contour import Circle, Point, polygon
from fabgen.parts.records import Part, Place
from fabgen.stock import tables

if TYPE_CHECKING:
    import cadquery

LENGTHS_MM = (4, 5, 6, 8, 10, 12, 16, 20, 25, 30, 35, 40, 45, 50)
"""Usual lengths of socket head cap screws, ISO 4762; from memory."""
PROUD_MM = 0.5
"""A screw ends at least this far beyond its nut. Common practice, no source."""
STEEL_DENSITY = 7900.0
STEEL_COLOUR = (0.62, 0.63, 0.65)
BRASS_COLOUR = (0.80, 0.66, 0.36)


def screw_length_mm(grip_mm: float) -> int:
    """The shortest usual length of at least ``grip_mm``. Raises GeometryError beyond the longest."""
    for length in LENGTHS_MM:
        if length >= grip_mm:
            return length
    raise GeometryError(f"no usual screw is {grip_mm:.1f} mm long; the longest listed is {LENGTHS_MM[-1]} mm")


def screws(
    key: str, name: str, size: str, at: tuple[Point, ...], *, length_mm: float, head_z_mm: float, up: bool
) -> Part:
    """Screws with the head's seat at ``head_z_mm`` and the head above (``up``) or below it."""
    row = tables.screw(size)
    volume = math.pi / 4 * (row.head_mm**2 * row.head_height_mm + row.diameter_mm**2 * length_mm)
    return Part(
        key=key,
        name=f"{name} {size}x{length_mm:g}",
        process=("buy",),
        material="a2",
        material_name="stainless steel A2",
        temper="",
        colour=STEEL_COLOUR,
        quantity=len(at),
        sizes=(("diameter_mm", row.diameter_mm), ("length_mm", length_mm)),
        tolerance="ISO 4762",
        finish="as bought",
        solid=kernel.once(lambda: _screw_solid(size, length_mm, up)),
        places=tuple(Place(x, y, head_z_mm) for x, y in at),
        mass_kg=volume * 1e-9 * STEEL_DENSITY,
    )


def nuts(key: str, name: str, size: str, at: tuple[Point, ...], z_mm: float) -> Part:
    """Hexagon nuts whose lower face is at ``z_mm``."""
    row = tables.screw(size)
    area = math.sqrt(3) / 2 * row.nut_across_flats_mm**2 - math.pi / 4 * row.diameter_mm**2
    return Part(
        key=key,
        name=f"{name} {size}",
        process=("buy",),
        material="a2",
        material_name="stainless steel A2",
        temper="",
        colour=STEEL_COLOUR,
        quantity=len(at),
        sizes=(("across_flats_mm", row.nut_across_flats_mm), ("height_mm", row.nut_height_mm)),
        tolerance="ISO 4032",
        finish="as bought",
        solid=kernel.once(lambda: _nut_solid(size)),
        places=tuple(Place(x, y, z_mm) for x, y in at),
        mass_kg=area * row.nut_height_mm * 1e-9 * STEEL_DENSITY,
    )


def side_screws(
    key: str, name: str, size: str, places: tuple[Place, ...], *, seat_y_mm: float, length_mm: float
) -> Part:
    """Level screws along +y before they are placed; the head's seat is ``seat_y_mm`` from the place."""
    flat = screws(key, name, size, (), length_mm=length_mm, head_z_mm=0.0, up=True)
    return replace(
        flat,
        quantity=len(places),
        solid=kernel.once(lambda: _level(_screw_solid(size, length_mm, True), seat_y_mm)),
        places=places,
    )


def side_nuts(key: str, name: str, size: str, places: tuple[Place, ...], *, seat_y_mm: float) -> Part:
    """Nuts of level screws; their near face is ``seat_y_mm`` along +y from the place."""
    row = tables.screw(size)
    flat = nuts(key, name, size, (), 0.0)
    return replace(
        flat,
        quantity=len(places),
        solid=kernel.once(lambda: _level(_nut_solid(size), seat_y_mm + row.nut_height_mm)),
        places=places,
    )


def _level(shape: cadquery.Shape, y_mm: float) -> cadquery.Shape:
    """+z turned onto -y, then shifted along y."""
    return kernel.moved(kernel.turned(shape, 90.0, (1, 0, 0)), 0.0, y_mm, 0.0)


def inserts(key: str, size: str, at: tuple[Point, ...], top_z_mm: float) -> Part:
    """Heat-set inserts flush with the face at ``top_z_mm``."""
    row = tables.screw(size)
    area = math.pi / 4 * (row.insert_hole_mm**2 - row.diameter_mm**2)
    length = row.insert_length_mm
    return Part(
        key=key,
        name=f"heat-set insert {size}",
        process=("buy",),
        material="cuzn39pb3",
        material_name="brass insert for heat setting",
        temper="",
        colour=BRASS_COLOUR,
        quantity=len(at),
        sizes=(("hole_mm", row.insert_hole_mm), ("length_mm", length)),
        tolerance="as bought",
        finish="set flush with a soldering iron",
        solid=kernel.once(
            lambda: kernel.tube((0, 0, -length), (0, 0, 0), row.insert_hole_mm, row.diameter_mm)
        ),
        places=tuple(Place(x, y, top_z_mm) for x, y in at),
        mass_kg=area * length * 1e-9 * 8400.0,
    )


def _screw_solid(size: str, length_mm: float, up: bool) -> cadquery.Shape:
    row = tables.screw(size)
    shank, head, way = row.diameter_mm / 2, row.head_mm / 2, 1.0 if up else -1.0
    top = way * row.head_height_mm
    return kernel.revolved(
        ((0, top), (head, top), (head, 0), (shank, 0), (shank, -way * length_mm), (0, -way * length_mm))
    )


def _nut_solid(size: str) -> cadquery.Shape:
    row = tables.screw(size)
    corners = kernel.circle_points(6, row.nut_across_flats_mm / math.sqrt(3), 0.0)
    return kernel.prism(polygon(corners), (Circle(0, 0, row.diameter_mm),), 0.0, row.nut_height_mm)
