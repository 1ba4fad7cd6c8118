"""What every metal part says of itself: material by its designation, temper, colour, mass, tolerance, finish.

Depends on: stock, parts.records, sizing.records.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from fabgen.parts.records import FlatPattern, Part, Place, Process, WirePath
from fabgen.sizing.records import Feed
from fabgen.stock import tables

if TYPE_CHECKING:
    import cadquery


def metal_part(
    key: str,
    name: str,
    process: tuple[Process, ...],
    stock: tuple[str, str | None],
    feed: Feed,
    *,
    volume_mm3: float,
    sizes: tuple[tuple[str, float], ...],
    quantity: int = 1,
    flat: FlatPattern | None = None,
    wire: WirePath | None = None,
    thickness_mm: float | None = None,
    solid: Callable[[], cadquery.Shape] | None = None,
    print_solid: Callable[[], cadquery.Shape] | None = None,
    places: tuple[Place, ...] = (Place(),),
    notes: tuple[str, ...] = (),
    finish: str = "deburred on both sides, edges not sharp",
) -> Part:
    """A part of a metal from the stock table. ``stock``: metal and temper (None: the table's first row)."""
    metal = tables.metal(stock[0])
    temper = tables.temper(metal, stock[1])
    return Part(
        key=key,
        name=name,
        process=process,
        material=metal.key,
        material_name=metal.designation,
        temper=temper.key,
        colour=metal.colour,
        quantity=quantity,
        sizes=sizes,
        tolerance=f"ISO 2768-{feed.job.limits.tolerance_class}",
        finish=finish,
        flat=flat,
        wire=wire,
        thickness_mm=thickness_mm,
        solid=solid,
        print_solid=print_solid,
        places=places,
        mass_kg=volume_mm3 * 1e-9 * metal.density_kg_per_m3,
        notes=notes,
    )
