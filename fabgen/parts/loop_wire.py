"""The loop of round wire, in one piece: foot, bar, bend, loop, bend, bar, foot.

Seen from the aperture, and from +x::

          .-------.                        loop_diameter            loop_height
        /           \\                    .----------------------.  wire axis
       |             )  bend at phi1       \\                    /   leg_bend_radius (axis)
       |       o     ) }  leg_pitch         |  bar              |
        \\           /                      |                   |
          '-------'                   ------+-------------------+------  floor, z = 0
                 |<->|                      |  foot             |        z = -floor
              leg_x of the bars             |<---- leg_pitch -->|

Each bar bends by 90 degrees in the vertical plane that touches the loop's circle at phi1:
R sin(phi1) - r cos(phi1) = leg_pitch / 2 with R = loop_diameter / 2 and r = leg_bend_radius. The loop's arc runs
from phi1 over 180 degrees to -phi1.

Depends on: errors, stock, theory (bending, springback), parts (records, kernel, making, floor_plan, screws),
sizing.records.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING

from fabgen.errors import GeometryError
from fabgen.parts.floor_plan import floor_bottom_mm
from fabgen.parts.kernel import once
from fabgen.parts.making import metal_part
from fabgen.parts.records import Part, WireBend, WirePath
from fabgen.parts.screws import PROUD_MM
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from fabgen.theory.bending import wire_arc_mm, wire_neutral_shift_mm
from fabgen.theory.springback import wire_mandrel_mm, wire_tool_radius_mm

if TYPE_CHECKING:
    import cadquery

Vector = tuple[float, float, float]


@dataclass(frozen=True)
class Piece:
    """One stretch of the wire's axis: a line from ``start`` to ``end``, or an arc through ``middle``."""

    name: str
    start: Vector
    middle: Vector
    end: Vector
    radius_mm: float
    angle_deg: float
    length_mm: float


def touch_angle_deg(feed: Feed) -> float:
    """phi1, where bar bend and loop meet, from R sin(phi1) - r cos(phi1) = leg_pitch / 2.

    Raises GeometryError when the bars are too far apart for the loop.
    """
    s = feed.sizes
    reach = math.hypot(s.loop_diameter_mm / 2, s.leg_bend_radius_mm)
    if s.leg_pitch_mm / 2 >= 0.95 * reach:
        raise GeometryError(
            f"bars {s.leg_pitch_mm:g} mm apart do not meet a loop of {s.loop_diameter_mm:g} mm; "
            f"use a pitch under {1.9 * reach:.1f} mm"
        )
    lean = math.atan2(s.leg_bend_radius_mm, s.loop_diameter_mm / 2)
    return math.degrees(math.asin(s.leg_pitch_mm / 2 / reach) + lean)


def wire_pieces(feed: Feed) -> tuple[Piece, ...]:
    """The wire's axis in the feed's frame, from the foot at +y to the foot at -y: bar, bend, loop, bend, bar.

    A bar includes its foot. Raises GeometryError when the bends need more height than the loop has.
    """
    s = feed.sizes
    if s.wire_mm is None:
        raise GeometryError("this feed has a sheet loop; a wire loop needs loop.form = 'wire'")
    radius, bend, top = s.loop_diameter_mm / 2, s.leg_bend_radius_mm, s.loop_height_mm
    if bend < s.wire_mm / 2 or bend > top - s.wire_mm / 2:
        raise GeometryError(
            f"bars of a loop {top:g} mm above the floor bent over an axis radius of {bend:g} mm in "
            f"{s.wire_mm:g} mm wire; use a radius of {s.wire_mm / 2:g} to {top - s.wire_mm / 2:g} mm"
        )
    phi_deg = touch_angle_deg(feed)
    phi = math.radians(phi_deg)
    c, sn = math.cos(phi), math.sin(phi)
    leg = (radius * c + bend * sn, s.leg_pitch_mm / 2)
    low, shoulder = floor_bottom_mm(feed), top - bend
    # The middle of the bend: its centre plus r at 45 degrees, back along the tangent and up.
    part, rise = bend * (1 - math.sqrt(0.5)), bend * math.sqrt(0.5)
    mid = (leg[0] - part * sn, leg[1] + part * c, shoulder + rise)
    touch = (radius * c, radius * sn, top)
    sweep = 360.0 - 2 * phi_deg

    def bar(y: float, z0: float, z1: float, name: str) -> Piece:
        middle = (leg[0], y, (z0 + z1) / 2)
        return Piece(name, (leg[0], y, z0), middle, (leg[0], y, z1), 0.0, 0.0, abs(z1 - z0))

    def other(p: Vector) -> Vector:
        return p[0], -p[1], p[2]

    bent = wire_arc_mm(90.0, bend, s.wire_mm)
    ring = wire_arc_mm(sweep, radius, s.wire_mm)
    foot_top = (leg[0], leg[1], shoulder)
    return (
        bar(leg[1], low, shoulder, "foot and bar +y"),
        Piece("bend +y", foot_top, mid, touch, bend, 90.0, bent),
        Piece("loop", touch, (-radius, 0.0, top), other(touch), radius, sweep, ring),
        Piece("bend -y", other(touch), other(mid), other(foot_top), bend, 90.0, bent),
        bar(-leg[1], shoulder, low, "bar and foot -y"),
    )


def wire_path(feed: Feed) -> WirePath:
    """Cut length, and for every bend the marks on the straight wire, mandrel, plane and order.

    The cut length is the arc length of the neutral line, which in bends under R/d = 2 lies inside the axis by the
    bend's ``neutral_shift_mm``. The two bars are bent first, in one plane and to the same side, then the loop is
    wound in the plane across.
    """
    s = feed.sizes
    pieces = wire_pieces(feed)
    diameter = s.wire_mm or 0.0
    metal = tables.metal(feed.job.loop.metal)
    temper = tables.temper(metal, feed.job.loop.temper)
    bends: list[WireBend] = []
    at = 0.0
    for piece in pieces:
        if piece.radius_mm:
            number = len(bends) + 1
            mandrel = wire_mandrel_mm(piece.radius_mm, diameter, temper.yield_mpa, metal.youngs_gpa)
            bends.append(
                WireBend(
                    number, at, at + piece.length_mm, piece.angle_deg, piece.radius_mm, mandrel,
                    (0.0, 90.0, -90.0)[number - 1], (1, 3, 2)[number - 1], piece.name,
                    wire_neutral_shift_mm(piece.radius_mm, diameter),
                )
            )
        at += piece.length_mm
    return WirePath(diameter, at, tuple(bends), *end_preparation(feed, at))


def end_preparation(feed: Feed, length_mm: float) -> tuple[str, float]:
    """What is done to the ends of a wire of this length for their joint with the floor; wire beyond each end in mm.

    A floor that takes soft solder has the feet soldered in. On another they get threads and nuts where the wire is as
    thick as a metric thread, and a plate of brass to solder to where it is not.
    """
    can, diameter, floor = feed.job.can, feed.sizes.wire_mm or 0.0, -floor_bottom_mm(feed)
    copper = can.lining.startswith("copper-foil")
    takes = copper if can.make == "printed" else tables.metal(can.metal).solderable
    tinned = f"cut square, deburr, tin the last {floor + 2:.0f} mm"
    if takes:
        return tinned, 0.0
    for screw in tables.all_rows("screw"):
        if abs(screw.diameter_mm - diameter) < 1e-9:
            beyond = math.ceil(screw.nut_height_mm + PROUD_MM)
            thread = math.ceil(beyond + floor + screw.nut_height_mm + PROUD_MM)
            return (
                f"cut {length_mm + 2 * beyond:.1f} mm, {beyond} mm more beyond both ends of the schedule; thread the "
                f"last {thread} mm {screw.key}: nuts with toothed washers on both faces of the floor, which takes no "
                "soft solder"
            ), float(beyond)
    plate = "the feet are soldered to a brass plate of 0.5 mm screwed onto the floor, which takes no solder"
    return f"{tinned}: {plate}", 0.0


def bend_to_deg(feed: Feed, bend: WireBend) -> float:
    """Angle to bend to on the mandrel so that the released bend has its angle: angle * R_released / R_tool."""
    metal = tables.metal(feed.job.loop.metal)
    temper = tables.temper(metal, feed.job.loop.temper)
    tool = wire_tool_radius_mm(bend.radius_mm, feed.sizes.wire_mm or 0.0, temper.yield_mpa, metal.youngs_gpa)
    return bend.angle_deg * bend.radius_mm / tool


def loop_wire(feed: Feed) -> Part:
    """The wire loop as a part in the feed's frame."""
    s = feed.sizes
    path = wire_path(feed)
    sizes = (
        ("wire_mm", path.diameter_mm),
        ("cut_length_mm", path.cut_length_mm),
        ("loop_diameter_mm", s.loop_diameter_mm),
        ("loop_height_mm", s.loop_height_mm),
        ("leg_x_mm", s.leg_x_mm),
        ("leg_pitch_mm", s.leg_pitch_mm),
        ("leg_bend_radius_mm", s.leg_bend_radius_mm),
        ("foot_mm", -floor_bottom_mm(feed)),
    )
    axis = math.fsum(axis_length_mm(piece) for piece in wire_pieces(feed))
    return metal_part(
        "loop",
        "loop with bars",
        ("wire",),
        (feed.job.loop.metal, feed.job.loop.temper),
        feed,
        volume_mm3=math.pi / 4 * path.diameter_mm**2 * axis,
        sizes=sizes,
        wire=path,
        solid=once(partial(_solid, wire_pieces(feed), path.diameter_mm)),
        notes=(path.end_preparation, *_shorter(path, axis)),
        finish="clean and bright, no nicks at the bends",
    )


def _shorter(path: WirePath, axis_mm: float) -> tuple[str, ...]:
    """Why the wire is cut shorter than its axis is drawn."""
    shift = max(bend.neutral_shift_mm for bend in path.bends)
    if shift < 0.005:
        return ()
    return (
        f"schedule {axis_mm - path.cut_length_mm:.2f} mm shorter than the drawn axis: in bends tighter than two "
        f"diameters the neutral line lies {shift:.2f} mm inside it, and the wire stretches by that",
    )


def axis_length_mm(piece: Piece) -> float:
    """Length of the piece's axis as it is drawn."""
    return math.radians(piece.angle_deg) * piece.radius_mm if piece.radius_mm else piece.length_mm


def axis_points(feed: Feed, sagitta_mm: float = 0.05) -> tuple[Vector, ...]:
    """The wire's axis as points, for drawing."""
    points: list[Vector] = []
    for piece in wire_pieces(feed):
        if not piece.radius_mm:
            points.append(piece.start)
            continue
        widest = 2 * math.acos(1 - min(0.5, sagitta_mm / piece.radius_mm))
        count = max(2, math.ceil(math.radians(piece.angle_deg) / widest))
        points += [_on_arc(piece, i / count) for i in range(count)]
    return (*points, wire_pieces(feed)[-1].end)


def _on_arc(piece: Piece, share: float) -> Vector:
    """Point on the arc through start, middle and end at a share of its angle."""
    half = math.radians(piece.angle_deg) / 2
    # Basis: from the centre to the middle, and along the chord.
    chord = tuple(e - s for s, e in zip(piece.start, piece.end, strict=True))
    length = math.hypot(*chord)
    foot = tuple((s + e) / 2 for s, e in zip(piece.start, piece.end, strict=True))
    height = piece.radius_mm * (1 - math.cos(half))
    up = tuple((m - f) / height for m, f in zip(piece.middle, foot, strict=True))
    turn = half * (2 * share - 1)
    along, rise = piece.radius_mm * math.sin(turn), piece.radius_mm * (math.cos(turn) - math.cos(half))
    x, y, z = (f + along * c / length + rise * u for f, c, u in zip(foot, chord, up, strict=True))
    return x, y, z


def _solid(pieces: tuple[Piece, ...], diameter_mm: float) -> cadquery.Shape:
    import cadquery as cq

    edges = []
    for piece in pieces:
        start, end = cq.Vector(*piece.start), cq.Vector(*piece.end)
        if piece.radius_mm:
            edges.append(cq.Edge.makeThreePointArc(start, cq.Vector(*piece.middle), end))
        else:
            edges.append(cq.Edge.makeLine(start, end))
    ring = cq.Wire.makeCircle(diameter_mm / 2, cq.Vector(*pieces[0].start), cq.Vector(0, 0, 1))
    return cq.Solid.sweep(ring, [], cq.Wire.assembleEdges(edges))
