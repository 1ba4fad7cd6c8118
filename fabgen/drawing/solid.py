"""What a solid's faces say of its sizes: levels, diameters about its axis, round holes; and the dimensions for them.

Depends on: drawing.model, drawing.dimension, drawing.flat, drawing.texts.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from fabgen.drawing.dimension import DIAMETER, Ask, Mark, along_x, along_y, leader
from fabgen.drawing.flat import HoleRow, hole_asks
from fabgen.drawing.model import Item, Line, number
from fabgen.drawing.texts import say

SAME_MM = 0.01
MOST_LEVELS = 9


@dataclass(frozen=True)
class Round:
    """A cylinder parallel to z: axis, diameter, ends, angle covered, and whether it is a hole."""

    x_mm: float
    y_mm: float
    diameter_mm: float
    z0_mm: float
    z1_mm: float
    angle_deg: float
    hole: bool


@dataclass(frozen=True)
class Cross:
    """A round hole that is not parallel to z: a point on its axis, its direction, its diameter."""

    at: tuple[float, float, float]
    direction: tuple[float, float, float]
    diameter_mm: float


@dataclass(frozen=True)
class Measured:
    """The sizes read from a solid: bounds, levels of flat faces across z, cylinders along z, cross holes, and the
    x of the tip of a right-angled notch on +x."""

    low: tuple[float, float, float]
    high: tuple[float, float, float]
    levels: tuple[float, ...]
    rounds: tuple[Round, ...]
    crosses: tuple[Cross, ...]
    notch_x_mm: float | None = None


def squared(shape: Any) -> Any:
    """The shape turned so that the axis of its largest cylinder lies along the nearest coordinate axis: a tube that
    sits askew in the feed is made and drawn straight."""
    import cadquery

    rounds = [f for f in shape.Faces() if f.geomType() == "CYLINDER"]
    if not rounds:
        return shape
    way = cadquery.Vector(max(rounds, key=lambda f: round(f.Area(), 3))._geomAdaptor().Cylinder().Axis().Direction())
    near = max((cadquery.Vector(*v) for v in ((1, 0, 0), (0, 1, 0), (0, 0, 1))), key=lambda v: abs(v.dot(way)))
    if near.dot(way) < 0:
        way = -way
    turn, angle = way.cross(near), math.degrees(way.getAngle(near))
    if angle < 1e-4:
        return shape
    centre = shape.Center()
    return shape.rotate(centre, centre + turn, angle)


def measured(shape: Any) -> Measured:
    """Read the solid's plane and cylindrical faces."""
    from OCP.BRepAdaptor import BRepAdaptor_Surface

    box = shape.BoundingBox(1e-4)
    levels: set[float] = set()
    pieces: dict[tuple[float, ...], list[tuple[float, float, float]]] = {}
    crosses: dict[tuple[float, ...], float] = {}
    notch: set[float] = set()
    for face in shape.Faces():
        kind = face.geomType()
        if kind == "PLANE":
            plane = BRepAdaptor_Surface(face.wrapped).Plane()
            if abs(abs(plane.Axis().Direction().Z()) - 1) < 1e-9:
                levels.add(round(plane.Location().Z(), 3))
            elif _is_notch(face, plane):
                notch.add(round(face.BoundingBox(1e-4).xmin, 2))
        elif kind == "CYLINDER":
            _note_cylinder(face, pieces, crosses)
    return Measured(
        (box.xmin, box.ymin, box.zmin),
        (box.xmax, box.ymax, box.zmax),
        tuple(sorted(levels)),
        tuple(sorted(_rounds(pieces), key=lambda r: (r.diameter_mm, r.x_mm, r.y_mm, r.z0_mm))),
        tuple(Cross((k[0], k[1], k[2]), (k[3], k[4], k[5]), d) for k, d in sorted(crosses.items())),
        max(notch, default=None),
    )


def _is_notch(face: Any, plane: Any) -> bool:
    """True for an upright face at 45 degrees to x that begins at y = 0 on the side of +x."""
    way, box = plane.Axis().Direction(), face.BoundingBox(1e-4)
    slanted = abs(way.Z()) < 1e-6 and abs(abs(way.X()) - math.sqrt(0.5)) < 1e-4
    return bool(slanted and box.xmin > 0 and min(abs(box.ymin), abs(box.ymax)) < SAME_MM)


def notch_asks(m: Measured) -> list[Ask]:
    """The notch's angle and its depth from the edge, which is round or straight."""
    if m.notch_x_mm is None:
        return []
    edge = max([m.high[0], *(r.diameter_mm / 2 for r in about_axis(m) if not r.hole)])
    depth = edge - m.notch_x_mm
    return [leader("notch", depth, say("solid.notch", depth=number(depth)), (m.notch_x_mm, 0.0), 20.0)]


def _note_cylinder(
    face: Any,
    pieces: dict[tuple[float, ...], list[tuple[float, float, float]]],
    crosses: dict[tuple[float, ...], float],
) -> None:
    from OCP.BRepAdaptor import BRepAdaptor_Surface
    from OCP.TopAbs import TopAbs_REVERSED

    surface = BRepAdaptor_Surface(face.wrapped)
    cylinder = surface.Cylinder()
    way, at = cylinder.Axis().Direction(), cylinder.Axis().Location()
    axis, base = (way.X(), way.Y(), way.Z()), (at.X(), at.Y(), at.Z())
    # The outward normal points to the axis when the face is reversed or its surface left-handed, not both.
    hole = (face.wrapped.Orientation() == TopAbs_REVERSED) == cylinder.Position().Direct()
    angle = math.degrees(abs(surface.LastUParameter() - surface.FirstUParameter()))
    first, last = surface.FirstVParameter(), surface.LastVParameter()
    diameter = round(2 * cylinder.Radius(), 3)
    if abs(abs(axis[2]) - 1) < 1e-6:
        ends = sorted((base[2] + first * axis[2], base[2] + last * axis[2]))
        new = (round(base[0], 2) + 0.0, round(base[1], 2) + 0.0, diameter, float(hole))
        # Quarters of one hole may round to different hundredths.
        key = next((k for k in pieces if k[2:] == new[2:] and math.dist(k[:2], new[:2]) < 0.016), new)
        pieces.setdefault(key, []).append((ends[0], ends[1], angle))
    elif hole and angle > 170:
        sign = 1.0 if tuple(round(a, 6) for a in axis) > (0.0, 0.0, 0.0) else -1.0
        middle = (first + last) / 2
        where = [round(b + middle * a, 2) + 0.0 for b, a in zip(base, axis, strict=True)]
        crosses[(*where, *(round(sign * a, 3) + 0.0 for a in axis))] = diameter


def _rounds(pieces: dict[tuple[float, ...], list[tuple[float, float, float]]]) -> Iterable[Round]:
    for (x, y, diameter, hole), spans in pieces.items():
        merged: list[list[float]] = []
        for z0, z1, angle in sorted(spans):
            if merged and z0 < merged[-1][1] + 0.05 and z0 > merged[-1][0] - 0.05:
                top = merged[-1]
                top[2] = top[2] + angle if abs(z0 - top[0]) < 0.05 else max(top[2], angle)
                top[1] = max(top[1], z1)
            else:
                merged.append([z0, z1, angle])
        for z0, z1, angle in merged:
            yield Round(x, y, diameter, round(z0, 3), round(z1, 3), min(angle, 360.0), bool(hole))


def about_axis(m: Measured) -> tuple[Round, ...]:
    """Cylinders about the feed's axis that are not small holes."""
    return tuple(r for r in m.rounds if math.hypot(r.x_mm, r.y_mm) < SAME_MM and r.diameter_mm > 8)


def holes(m: Measured) -> tuple[Round, ...]:
    """Full round holes parallel to z, off the axis or small."""
    axial = set(about_axis(m))
    return tuple(r for r in m.rounds if r.hole and r.angle_deg > 350 and r not in axial)


def slots(m: Measured) -> tuple[tuple[Round, Round], ...]:
    """Slots parallel to z: two half-round ends of one diameter and depth each, the nearest ones paired."""
    ends = [r for r in m.rounds if r.hole and 170 < r.angle_deg < 190 and r not in set(about_axis(m))]
    found: list[tuple[Round, Round]] = []
    while ends:
        a = ends.pop(0)
        others = [b for b in ends if (b.diameter_mm, b.z0_mm, b.z1_mm) == (a.diameter_mm, a.z0_mm, a.z1_mm)]
        if others:
            b = min(others, key=lambda e: math.hypot(e.x_mm - a.x_mm, e.y_mm - a.y_mm))
            ends.remove(b)
            found.append((a, b))
    return tuple(found)


def slot_rows(m: Measured) -> tuple[tuple[str, ...], ...]:
    """Rows: number, middles of both round ends, width, from z, to z."""
    return tuple(
        (f"S{i}", *(f"{v:.2f}" for v in (a.x_mm, a.y_mm, b.x_mm, b.y_mm, a.diameter_mm, a.z0_mm, a.z1_mm)))
        for i, (a, b) in enumerate(slots(m), start=1)
    )


def corner_asks(m: Measured) -> list[Ask]:
    """A leader for each radius of quarter-round outer corners parallel to z, with their number."""
    groups: dict[float, list[Round]] = {}
    for r in m.rounds:
        if not r.hole and 80 < r.angle_deg < 100 and r not in set(about_axis(m)):
            groups.setdefault(r.diameter_mm / 2, []).append(r)
    asks = []
    for radius, found in sorted(groups.items()):
        r = max(found, key=lambda f: (f.x_mm - f.y_mm, f.x_mm))
        angle = math.degrees(math.atan2(r.y_mm, r.x_mm))
        at = (r.x_mm + radius * math.cos(math.radians(angle)), r.y_mm + radius * math.sin(math.radians(angle)))
        text = (f"{len(found)} × " if len(found) > 1 else "") + f"R{number(radius)}"
        asks.append(leader("radius", radius, text, at, angle))
    return asks


def hole_rows(m: Measured) -> tuple[tuple[str, ...], ...]:
    """Rows: number, x, y, diameter, from z, to z."""
    return tuple(
        (str(i), f"{r.x_mm:.2f}", f"{r.y_mm:.2f}", f"{DIAMETER}{r.diameter_mm:.2f}", f"{r.z0_mm:.2f}", f"{r.z1_mm:.2f}")
        for i, r in enumerate(holes(m), start=1)
    )


def bore_of_tube(m: Measured) -> Cross | None:
    """The bore of a round tube that lies along y: as wide as high, with one hole along its axis."""
    wide, high = m.high[0] - m.low[0], m.high[2] - m.low[2]
    middle = ((m.low[0] + m.high[0]) / 2, (m.low[2] + m.high[2]) / 2)
    if len(m.crosses) != 1 or m.rounds or abs(wide - high) > SAME_MM or m.crosses[0].direction != (0.0, 1.0, 0.0):
        return None
    return m.crosses[0] if math.dist(middle, (m.crosses[0].at[0], m.crosses[0].at[2])) < 2 * SAME_MM else None


def cross_rows(m: Measured) -> tuple[tuple[str, ...], ...]:
    """Rows of holes across: middle of the hole, direction of its axis, diameter."""
    return tuple(
        (
            f"Q{i}",
            *(f"{v:.2f}" for v in c.at),
            "; ".join(number(v, 3) for v in c.direction),
            f"{DIAMETER}{c.diameter_mm:.2f}",
        )
        for i, c in enumerate(() if bore_of_tube(m) else m.crosses, start=1)
    )


def front_asks(m: Measured) -> list[Ask]:
    """Dimensions for the view along +y or the section by y = 0: diameters about the axis, levels, overall width."""
    bore = bore_of_tube(m)
    if bore is not None:
        at = (bore.at[0] + bore.diameter_mm / 2 * math.sqrt(0.5), bore.at[2] + bore.diameter_mm / 2 * math.sqrt(0.5))
        outer = f"{DIAMETER}{number(m.high[0] - m.low[0])}"
        return [
            along_x("diameter", m.low[0], m.high[0], m.low[2], "bottom", text=outer),
            leader("bore", bore.diameter_mm, f"{DIAMETER}{number(bore.diameter_mm)}", at, 45.0),
        ]
    asks: list[Ask] = []
    seen: set[float] = set()
    for r in about_axis(m):
        half = r.diameter_mm / 2
        if r.angle_deg < 350 or r.diameter_mm in seen or m.high[0] < half - 0.1 or m.low[0] > -half + 0.1:
            continue
        seen.add(r.diameter_mm)
        z, side = (r.z1_mm, "top") if r.hole else (r.z0_mm, "bottom")
        text = f"{DIAMETER}{number(r.diameter_mm)}"
        asks.append(along_x("diameter", -half, half, z, "top" if side == "top" else "bottom", text=text))
    width = m.high[0] - m.low[0]
    if round(width, 2) not in {round(s, 2) for s in seen}:
        asks.append(along_x("width", m.low[0], m.high[0], m.low[2], "bottom"))
    levels = [z for z in m.levels if m.low[2] + 0.005 < z <= m.high[2] + 0.005][-MOST_LEVELS:]
    asks += [along_y("level", m.low[2], z, m.low[0], "left") for z in levels]
    if not any(abs(z - m.high[2]) < 0.02 for z in levels):
        asks.append(along_y("height", m.low[2], m.high[2], m.high[0], "right"))
    return asks


def plan_asks(m: Measured) -> list[Ask]:
    """Dimensions for the view from above: overall sizes, radii of parts of a ring, hole groups."""
    width = m.high[1] - m.low[1]
    asks: list[Ask] = []
    if not any(r.angle_deg > 350 and abs(r.diameter_mm - width) < SAME_MM for r in about_axis(m)):
        asks.append(along_y("depth", m.low[1], m.high[1], m.high[0], "right"))
    for r in about_axis(m):
        if r.angle_deg < 350:
            t = math.atan2((m.low[1] + m.high[1]) / 2, (m.low[0] + m.high[0]) / 2)
            at = (r.diameter_mm / 2 * math.cos(t), r.diameter_mm / 2 * math.sin(t))
            turn = math.degrees(t) + (0 if not r.hole else 180)
            asks.append(leader("radius", r.diameter_mm / 2, f"R{number(r.diameter_mm / 2)}", at, turn))
    rows = [HoleRow("", h.x_mm, h.y_mm, h.diameter_mm) for h in holes(m)]
    return [*asks, *notch_asks(m), *corner_asks(m), *hole_asks(rows)]


def labels(m: Measured) -> tuple[Mark, ...]:
    """Numbers of the holes and slots, at their edges."""
    named = [(str(i), h) for i, h in enumerate(holes(m), start=1)]
    named += [(f"S{i}", a) for i, (a, _) in enumerate(slots(m), start=1)]
    return tuple((name, (h.x_mm + h.diameter_mm * 0.36, h.y_mm + h.diameter_mm * 0.36)) for name, h in named)


def centre_lines(m: Measured, scale: float) -> tuple[Item, ...]:
    """Crosses on the holes in the view from above, paper mm."""
    out: list[Item] = []
    for r in holes(m):
        x, y, half = r.x_mm * scale, r.y_mm * scale, r.diameter_mm / 2 * scale + 1.2
        out += [Line(x - half, y, x + half, y, "centre"), Line(x, y - half, x, y + half, "centre")]
    return tuple(out)
