"""A printed body as parts: whole where the bed takes it, else its pieces and the screws that join them.

Depends on: stock, parts (kernel, pieces, records, screws, split), sizing.records.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

from fabgen.parts import kernel
from fabgen.parts.pieces import (
    Joint,
    ear_screw_heights_mm,
    ear_screw_radius_mm,
    floor_tongue_mm,
    in_print,
    piece_solid,
    with_joints,
)
from fabgen.parts.records import Part, Place
from fabgen.parts.screws import PROUD_MM, screw_length_mm, side_nuts, side_screws
from fabgen.parts.split import EAR_HALF_MM, EAR_SCREW
from fabgen.stock import tables


@dataclass(frozen=True)
class Printed:
    """A printed body before it is cut: what its parts say, how it is cut, and the builder of the whole.

    ``volume_mm3`` is the whole body's without joints; the pieces share it equally for their masses. ``tied_by``: what
    lies over the joints of sectors that have no room for ears.
    """

    key: str
    name: str
    plastic: str
    sizes: tuple[tuple[str, float], ...]
    tolerance: str
    finish: str
    notes: tuple[str, ...]
    volume_mm3: float
    joint: Joint
    whole: Callable[[], kernel.Shape]
    upside_down: bool = False
    tied_by: str = ""


def printed_parts(printed: Printed) -> tuple[Part, ...]:
    """One part, or one for each piece, numbered from the bottom ring and the first cut."""
    split = printed.joint.split
    if split.pieces == 1:
        return (_part(printed, printed.key, printed.name, kernel.once(printed.whole), 0),)
    jointed = kernel.once(lambda: with_joints(printed.whole(), printed.joint))
    parts = []
    for ring in range(len(split.levels_mm) + 1):
        for sector in range(split.sectors):
            number = ring * split.sectors + sector + 1
            solid = kernel.once(partial(_piece, jointed, printed.joint, ring, sector))
            name = f"{printed.name} piece {number} of {split.pieces}"
            parts.append(_part(printed, f"{printed.key}-{number}", name, solid, sector))
    return tuple(parts)


def ear_fasteners(printed: Printed) -> tuple[Part, ...]:
    """Screws and nuts through the ears of a body in sectors; none for a whole one."""
    joint = printed.joint
    heights = ear_screw_heights_mm(joint)
    angles = joint.split.cut_angles_deg()
    if not heights or not angles:
        return ()
    radius = ear_screw_radius_mm(joint)
    places = tuple(
        Place(radius * math.cos(math.radians(a)), radius * math.sin(math.radians(a)), z, a)
        for a in angles
        for z in heights
    )
    nut = tables.screw(EAR_SCREW).nut_height_mm
    length = screw_length_mm(2 * EAR_HALF_MM + nut + PROUD_MM)
    name = f"{printed.name} joint"
    return (
        side_screws(
            f"screw-{printed.key}", f"{name} screw", EAR_SCREW, places, seat_y_mm=-EAR_HALF_MM, length_mm=length
        ),
        side_nuts(f"nut-{printed.key}", f"{name} nut", EAR_SCREW, places, seat_y_mm=EAR_HALF_MM),
    )


def _piece(jointed: Callable[[], kernel.Shape], joint: Joint, ring: int, sector: int) -> kernel.Shape:
    return piece_solid(jointed(), joint, ring, sector)


def _part(
    printed: Printed, key: str, name: str, solid: Callable[[], kernel.Shape], sector: int
) -> Part:
    plastic = tables.plastic(printed.plastic)
    pieces = printed.joint.split.pieces
    notes = printed.notes
    if pieces > 1:
        notes = (*notes, _joining(printed))
    return Part(
        key=key,
        name=name,
        process=("print",),
        material=plastic.key,
        material_name=plastic.name,
        temper="",
        colour=plastic.colour,
        quantity=1,
        sizes=printed.sizes,
        tolerance=printed.tolerance,
        finish=printed.finish,
        solid=solid,
        print_solid=kernel.once(lambda: _posed(printed, solid(), sector)),
        mass_kg=printed.volume_mm3 / pieces * 1e-9 * plastic.density_kg_per_m3,
        notes=notes,
    )


def _joining(printed: Printed) -> str:
    """How the pieces come together; where the floor is too thin for a tongue, what brings its halves level."""
    joint = printed.joint
    if joint.split.sectors > 1 and not ear_screw_heights_mm(joint):
        return f"bond the pieces with epoxy on a flat plate, with {printed.tied_by} over their joints"
    how = "join with epoxy and the screws through the ears, then line over the joints"
    if joint.split.sectors == 1:
        return "join the rings with epoxy, spigot in bell and key in slot, then line over the joints"
    if floor_tongue_mm(joint) > 0:
        return how
    return f"{how}; the floor has no tongue: join on a flat plate, which brings its faces level"


def _posed(printed: Printed, solid: kernel.Shape, sector: int) -> kernel.Shape:
    posed = in_print(solid, printed.joint, sector)
    if printed.upside_down:
        posed = kernel.on_bed(kernel.turned(posed, 180.0, (1, 0, 0)))
    return posed
