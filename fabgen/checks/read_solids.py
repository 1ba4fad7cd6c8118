"""STEP files of a written pack, read with the CAD kernel, against the record and the solids made anew from it.

Depends on: errors, checks (pack_register, read_files, registry), parts, stock. Imports cadquery when called.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import Any

from fabgen import __version__
from fabgen.checks.pack_register import differs, pack_check
from fabgen.checks.read_files import Pack
from fabgen.checks.registry import Fault
from fabgen.errors import FabgenError
from fabgen.parts.build import assembly, build_parts
from fabgen.parts.records import Part
from fabgen.stock import tables

PLACE_MM = 2e-3
"""Corners and centres of two solids that count as the same."""
SIZE_SHARE = 1e-4
"""Volumes and areas of two solids that count as the same: the kernel integrates one body from its file and from its
making a few parts in 100 000 apart."""


@pack_check("CONS-208")
def solids_agree(pack: Pack) -> Iterator[Fault]:
    """STEP of each part: one valid solid, its mass as in the record, its radii those of the sizes, and its box,
    volume, area, centre and corners those of the part made anew; the assembly as large as its parts."""
    import cadquery as cq

    metals = {row.key: row for row in tables.all_rows("metal")}
    anew = _made_anew(pack)
    for part in pack.parts:
        path = pack.folder / "model" / f"{part.key}.step"
        if not path.is_file():
            continue
        solids = cq.importers.importStep(str(path)).solids().vals()
        if len(solids) != 1 or not solids[0].isValid():
            yield differs(path.name, "solids", f"{len(solids)}", "1 valid solid", "it is not one valid solid")
            continue
        if part.material in metals:
            mass = solids[0].Volume() * 1e-9 * metals[part.material].density_kg_per_m3
            if abs(mass - part.mass_kg) > 0.01 * part.mass_kg + 1e-5:
                yield differs(path.name, "mass", f"{mass:.4f} kg", f"{part.mass_kg:.4f} kg", "solid and record differ")
            # a printed body's bore is wider by its lining
            yield from _radii(pack, part, path, solids[0])
        made = anew.get(part.key)
        if made is not None and made.solid is not None:
            yield from _same_body(path.name, solids[0], made.solid())
    yield from _assembly(pack, anew)


def _made_anew(pack: Pack) -> dict[str, Part]:
    """Parts of the record's job and sizes; none for a pack of another version, whose rules may differ, or for sizes
    that make no parts, which another check tells."""
    if pack.record["fabgen_version"] != __version__:
        return {}
    try:
        return {part.key: part for part in build_parts(pack.feed)}
    except FabgenError:
        return {}


def _same_body(name: str, drawn: Any, wanted: Any) -> Iterator[Fault]:
    a, b = drawn.BoundingBox(), wanted.BoundingBox()
    for axis in ("xmin", "ymin", "zmin", "xmax", "ymax", "zmax"):
        value, right = getattr(a, axis), getattr(b, axis)
        if abs(value - right) > PLACE_MM:
            yield differs(name, axis, f"{value:.3f} mm", f"{right:.3f} mm", f"{name} is not the solid of the record")
    for what, value, right in (("volume", drawn.Volume(), wanted.Volume()), ("area", drawn.Area(), wanted.Area())):
        if abs(value - right) > SIZE_SHARE * abs(right):
            yield differs(name, what, f"{value:.3f}", f"{right:.3f}", f"the {what} of {name} is not that of the record")
    apart = math.dist(drawn.Center().toTuple(), wanted.Center().toTuple())
    if apart > PLACE_MM:
        yield differs(name, "centre", f"{apart:.3f} mm off", "0 mm", f"the body of {name} is not that of the record")
    yield from _same_corners(name, drawn, wanted)


def _same_corners(name: str, drawn: Any, wanted: Any) -> Iterator[Fault]:
    """A corner off its edges, which volume and box do not show: the kernel bridges the gap by a larger tolerance."""
    corners = [corner.toTuple() for corner in wanted.Vertices()]
    for corner in drawn.Vertices():
        apart = min((math.dist(corner.toTuple(), other) for other in corners), default=0.0)
        if apart > PLACE_MM:
            yield differs(name, "corner", f"{apart:.3f} mm off", "0 mm", f"a corner of {name} is not the record's")
            return


def _assembly(pack: Pack, anew: dict[str, Part]) -> Iterator[Fault]:
    """Number, volume and centre of the assembly's solids against the parts made anew, each at its places."""
    import cadquery as cq

    path = pack.folder / "model" / "assembly.step"
    if not path.is_file() or not anew:
        return
    drawn = cq.importers.importStep(str(path)).solids().vals()
    wanted = [placement.solid() for placement in assembly(tuple(anew.values()))]
    if len(drawn) != len(wanted):
        message = "the assembly has not the parts of the record"
        yield differs(path.name, "solids", str(len(drawn)), str(len(wanted)), message)
        return
    (volume, centre), (right, middle) = _moments(drawn), _moments(wanted)
    if abs(volume - right) > SIZE_SHARE * right:
        message = "the assembly is not made of the parts of the record"
        yield differs(path.name, "volume", f"{volume:.2f} mm3", f"{right:.2f} mm3", message)
    if math.dist(centre, middle) > PLACE_MM:
        message = "the parts of the assembly do not stand where the record puts them"
        yield differs(path.name, "centre", f"{math.dist(centre, middle):.3f} mm off", "0 mm", message)


def _moments(solids: Sequence[Any]) -> tuple[float, tuple[float, float, float]]:
    """Volume of all and their common centre."""
    volumes = [solid.Volume() for solid in solids]
    total = math.fsum(volumes)
    centres = [solid.Center().toTuple() for solid in solids]
    x, y, z = (math.fsum(v * c[axis] for v, c in zip(volumes, centres, strict=True)) / total for axis in range(3))
    return total, (x, y, z)


def _radii(pack: Pack, part: Part, path: Path, solid: Any) -> Iterator[Fault]:
    drawn = _radii_mm(solid)
    for name, radius in _wanted_radii_mm(pack, part.key).items():
        nearest = min(drawn, key=lambda r: abs(r - radius), default=0.0)
        if abs(nearest - radius) > 0.01:
            yield differs(path.name, name, f"{nearest:.3f} mm", f"{radius:.3f} mm", f"no face has the {name}")


def _radii_mm(solid: Any) -> list[float]:
    """Radii of cylinders and large radii of tori among the solid's faces."""
    radii = []
    for face in solid.Faces():
        if face.geomType() == "CYLINDER":
            radii.append(face._geomAdaptor().Cylinder().Radius())
        elif face.geomType() == "TORUS":
            radii.append(face._geomAdaptor().Torus().MajorRadius())
    return radii


def _wanted_radii_mm(pack: Pack, key: str) -> dict[str, float]:
    """Radii that a part must show, from the sizes that were simulated."""
    s, choke = pack.feed.sizes, pack.feed.sizes.choke
    if key == "loop" and s.strip_width_mm is not None:
        half, width = s.loop_diameter_mm / 2, s.strip_width_mm / 2
        return {"outer radius of the ring": half + width, "inner radius of the ring": half - width}
    if key == "loop":
        return {"radius of the loop": s.loop_diameter_mm / 2, "radius of the bar bends": s.leg_bend_radius_mm}
    if key in {"can", "can-tube", "wall"} and not s.can_flats:
        return {"radius of the bore": s.can_bore_mm / 2}
    if key in {"choke", "choke-tube", "choke-wall"} and choke is not None and not s.can_flats:
        return {"radius of the choke": choke.bore_mm / 2}
    return {}
