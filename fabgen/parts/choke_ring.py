"""The floor of the choke: a ring of sheet about the can, held to its wall by tabs inside the ring.

Seen from the aperture (top side)::

          .-----------.        outside: round, with the holes of the choke wall's tabs
        /   .-------.   \\
       |   /  |tab|  \\   |     inside: follows the can's wall with CLEARANCE; tabs fold down (away from the
       |  |           |  |     aperture) along the wall, their holes meet the wall's
       |   \\  |tab|  /   |     a recess at the seam lets the wall's lap through
        \\   '-------'   /
          '-----------'

Depends on: errors, stock, parts (contour, folding, wall_strip, wall_plan, kernel, making), sizing.records.
"""

from __future__ import annotations

import math
from functools import partial

from fabgen.errors import GeometryError
from fabgen.parts.bend_rule import rule_text
from fabgen.parts.contour import Circle, Contour, Point, Vertex, reversed_contour, rounded, split_arc, tidied
from fabgen.parts.floor_sheet import BARE_RIM_MM
from fabgen.parts.folding import (
    LEVEL,
    Bend,
    Face,
    FoldedSheet,
    Frame,
    allowance_mm,
    edge_of,
    flat_pattern,
    folded_solid,
    folded_volume_mm3,
)
from fabgen.parts.kernel import once
from fabgen.parts.making import metal_part
from fabgen.parts.records import Part
from fabgen.parts.strip_path import Stretch, offset_side, outward, part_of
from fabgen.parts.wall_plan import SOLDERED_PITCH_FACTOR, Fixings, tab_shape
from fabgen.parts.wall_strip import SEAM_GAP_MM, TabShape, Wall, corner_round_mm, tab_holes, tabs_width_mm
from fabgen.sizing.records import Feed
from fabgen.stock import tables
from fabgen.stock.joints import joint_screw, least_choke_floor_mm

CLEARANCE_MM = 0.15
"""Between the ring and the can's wall, all round. Common practice, no source."""
SHORTEST_MM = 0.1
RECESS_MARGIN_MM = 1.0
"""The recess at the seam is that much longer than the lap at each end."""


def _down(feed: Feed) -> bool:
    """Whether the ring's tabs have room under the ring, above the screws of the can's floor."""
    choke = feed.sizes.choke
    if choke is None:
        return True
    screw = joint_screw(feed.sizes.can_bore_mm)
    shape = tab_shape(feed, screw, feed.sizes.floor_mm)
    tip = choke.floor_z_mm - feed.sizes.floor_mm - shape.inside_radius_mm - shape.length_mm
    return tip >= feed.sizes.wall_mm + screw.head_height_mm + 0.5


def has_ring(feed: Feed) -> bool:
    """Whether the choke has a floor of its own; one at z = 0 is the can's floor, made wider."""
    return feed.sizes.choke is not None and feed.sizes.choke.floor_z_mm > 0


def choke_fixings(feed: Feed) -> Fixings | None:
    """The holes in the can's wall that hold the ring; None without a ring."""
    choke, s = feed.sizes.choke, feed.sizes
    if choke is None or not has_ring(feed):
        return None
    screw = joint_screw(s.can_bore_mm)
    least = least_choke_floor_mm(feed.job.can.make, s.can_bore_mm, s.wall_mm, s.floor_mm)
    if choke.floor_z_mm < least:
        raise GeometryError(
            f"can.choke.floor_z_mm = {choke.floor_z_mm:g} puts the choke's ring into the tabs and screws on the can's "
            f"floor; give 0, so that both walls stand on one floor, or {least:g} or more"
        )
    shape = tab_shape(feed, screw, s.floor_mm)
    along = shape.inside_radius_mm + s.floor_mm / 2 + shape.hole_from_bend_mm
    height = choke.floor_z_mm - s.floor_mm / 2 + (-along if _down(feed) else along)
    if not shape.hole_mm < height < s.can_depth_mm - 2 * shape.hole_mm:
        raise GeometryError(
            f"the choke's ring at z = {choke.floor_z_mm:g} mm puts its screws at {height:.1f} mm on the can's wall; "
            f"they have room from {shape.hole_mm:.1f} to {s.can_depth_mm - 2 * shape.hole_mm:.1f} mm: move "
            "can.choke.floor_z_mm, use thinner sheet, or another make of can"
        )
    pitch = tables.limit("seam_screw_pitch_max_wavelengths", feed.job.overrides).value * feed.job.wavelength_mm
    if tables.metal(feed.job.can.metal).solderable:
        pitch *= SOLDERED_PITCH_FACTOR
    count = max(3, math.ceil(math.pi * s.can_bore_mm / pitch))
    # In the flat the tabs point to the axis and come closer to each other the longer they are.
    bend = Bend(90.0, shape.inside_radius_mm, shape.k_factor)
    long, radius = allowance_mm(bend, s.floor_mm) + shape.length_mm, s.can_bore_mm / 2
    if long > 0.8 * radius:
        raise GeometryError(
            f"tabs of {long:.1f} mm for the choke's ring meet in the middle of a can of {2 * radius:.1f} mm bore; "
            "use thinner sheet or another make of can"
        )
    room = max(shape.width_mm + 2 * shape.relief_mm, shape.width_mm * radius / (radius - long)) + 2.0
    corner = long * math.tan(math.pi / s.can_flats) + shape.width_mm / 2 + 1.0 if s.can_flats else 0.0
    return Fixings(height, count, room, max(corner, room / 2))


def _tab_edge(shape: TabShape, root: float, tip: float, half_mm: float) -> list[Vertex]:
    """Round a tab's reliefs in a frame with x outward from the wall's mid-surface; the ends on the inner edge are
    left to the caller."""
    b, half = shape.relief_mm, half_mm
    c = tip - b / 2
    return [
        *split_arc((c, -half - b / 2), b / 2, -90.0, 180.0), Vertex(c, -half), Vertex(root, -half), Vertex(root, half),
        *split_arc((c, half + b / 2), b / 2, -90.0, 180.0), Vertex(c, half + b),
    ]  # fmt: skip


def _placed(vertices: list[Vertex], place: Point, heading_deg: float) -> list[Vertex]:
    ox, oy = outward(heading_deg)
    return [
        Vertex(place[0] + v.x_mm * ox - v.y_mm * oy, place[1] + v.x_mm * oy + v.y_mm * ox, v.bulge) for v in vertices
    ]


def _recess(feed: Feed, wall: Wall, start: Vertex, end: Vertex) -> list[Vertex]:
    """From the inner edge before the step, out round the lap, to the inner edge behind the tail."""
    (x, y), heading = wall.path.at(0.0)
    ox, oy = outward(heading)

    def local(v: Vertex) -> Point:
        dx, dy = v.x_mm - x, v.y_mm - y
        return dx * ox + dy * oy, -dx * oy + dy * ox

    low, high = local(start)[1], local(end)[1]
    r = max(feed.job.limits.corner_radius_mm, 0.5)
    lap = 1.5 * wall.path.thickness_mm + SEAM_GAP_MM + CLEARANCE_MM
    # Straight sides of the recess are never so short that a cutter would stutter.
    c = max(lap - r, local(start)[0] + SHORTEST_MM, local(end)[0] + SHORTEST_MM)
    out = c + r
    shape = [
        *split_arc((c, low + r), r, -90.0, 90.0), Vertex(out, low + r),
        *split_arc((c, high - r), r, 0.0, 90.0), Vertex(c, high),
    ]  # fmt: skip
    return [start, *_placed(shape, (x, y), heading)]


def _inner_edge(feed: Feed, wall: Wall, shape: TabShape, root: float, tip: float) -> tuple[Contour, list[int]]:
    """The ring's inner contour, clockwise, and the index of each tab's root on it in order along the wall."""
    edge = wall.path.thickness_mm / 2 + CLEARANCE_MM
    outer = shape.width_mm / 2 + shape.relief_mm
    lap = wall.path.stretches[-1].flat_mm + RECESS_MARGIN_MM
    stop = wall.seam.step_at_mm - RECESS_MARGIN_MM
    vertices: list[Vertex] = []
    roots: list[tuple[Point, Point]] = []
    for at, piece in zip(wall.path.starts_mm(), wall.path.stretches, strict=False):
        last = min(1.0, (stop - at) / piece.flat_mm)
        cursor = max(0.0, (lap - at) / piece.flat_mm)
        if cursor >= 1.0 or last <= 0.0:
            continue
        for hole in wall.holes:
            share = (hole.along_mm - at) / piece.flat_mm
            if not cursor < share < last:
                continue
            reach = piece.radius_mm + edge
            span = outer / piece.flat_mm
            if piece.radius_mm:
                span = math.asin(outer / reach) / math.radians(piece.sweep_deg)
            vertices += _edge_piece(piece, cursor, share - span, edge)
            place, heading = piece.at(share)
            tab = _placed(_tab_edge(shape, root, tip, shape.width_mm / 2), place, heading)
            vertices += tab
            ends = _placed([Vertex(root, -shape.width_mm / 2), Vertex(root, shape.width_mm / 2)], place, heading)
            roots.append(((ends[1].x_mm, ends[1].y_mm), (ends[0].x_mm, ends[0].y_mm)))
            cursor = share + span
        vertices += _edge_piece(piece, cursor, last, edge)
    # The wall before this seam is the copy before this one.
    pitch = 360.0 / wall.copies
    closing = _recess(feed, wall, _turned(vertices[-1], -pitch), vertices[0])
    run = [*vertices[:-1], *(_turned(v, pitch) for v in closing)]
    ring = reversed_contour(tidied(Contour(tuple(_turned(v, turn) for turn in wall.turns_deg for v in run))))
    indices = []
    for turn in wall.turns_deg:
        for root_start, root_end in roots:
            first, second = _turned(Vertex(*root_start), turn), _turned(Vertex(*root_end), turn)
            indices.append(edge_of(ring, (first.x_mm, first.y_mm), (second.x_mm, second.y_mm)))
    return ring, indices


def _turned(vertex: Vertex, turn_deg: float) -> Vertex:
    """The vertex turned about the axis; a whole turn leaves it as it is."""
    if turn_deg % 360.0 == 0.0:
        return vertex
    a = math.radians(turn_deg)
    x, y = vertex.x_mm, vertex.y_mm
    return Vertex(x * math.cos(a) - y * math.sin(a), x * math.sin(a) + y * math.cos(a), vertex.bulge)


def _edge_piece(piece: Stretch, first: float, last: float, right_mm: float) -> list[Vertex]:
    """The wall between two shares of a stretch, moved to the right; nothing for a piece too short to cut."""
    if (last - first) * piece.flat_mm < SHORTEST_MM:
        return []
    part = part_of(piece, first, last)
    return [*offset_side(part, right_mm), _end_of(part, right_mm)]


def _end_of(piece: Stretch, right_mm: float) -> Vertex:
    (x, y), heading = piece.at(1.0)
    ox, oy = outward(heading)
    return Vertex(x + right_mm * ox, y + right_mm * oy)


def folded_ring(feed: Feed, wall: Wall, outer: Wall) -> FoldedSheet:
    """Faces and bends of the ring about ``wall`` that carries the wall ``outer``."""
    t = feed.sizes.floor_mm
    shape = tab_shape(feed, joint_screw(feed.sizes.can_bore_mm), t)
    r = shape.inside_radius_mm
    sign = -1.0 if _down(feed) else 1.0
    bend = Bend(sign * 90.0, r, shape.k_factor, 1)
    root = wall.path.thickness_mm / 2 + CLEARANCE_MM + r + t
    zone = allowance_mm(bend, t)
    tip = max(root - zone / 2 + r + t, root + shape.relief_mm / 2)
    inner, roots = _inner_edge(feed, wall, shape, root, tip)
    disc = Contour(split_arc((0.0, 0.0), tabs_width_mm(outer) / 2 + BARE_RIM_MM, 0.0, 360.0))
    width, soft = shape.width_mm, corner_round_mm(shape)
    outline = rounded([(0, 0, 0), (width, 0, 0), (width, shape.length_mm, soft), (0, shape.length_mm, soft)])
    hole = Circle(width / 2, shape.hole_from_bend_mm, shape.hole_mm)
    faces = [Face("ring", disc, (inner, *tab_holes(outer)))]
    for number, index in enumerate(roots, start=1):
        faces.append(Face(f"tab {number}", outline, (hole,), "ring", (1, index), bend))
    return FoldedSheet(tuple(faces), t)


def choke_ring(feed: Feed, wall: Wall, outer: Wall) -> Part:
    """The ring as a part in the feed's frame: its upper face is the choke's floor."""
    choke, t = feed.sizes.choke, feed.sizes.floor_mm
    if choke is None:
        raise GeometryError("this feed has no choke")
    sheet = folded_ring(feed, wall, outer)
    base = Frame((0.0, 0.0, choke.floor_z_mm - t / 2), LEVEL.u, LEVEL.v, LEVEL.n)
    shape = tab_shape(feed, joint_screw(feed.sizes.can_bore_mm), t)
    sizes = (
        ("width_mm", tabs_width_mm(outer) + 2 * BARE_RIM_MM),
        ("floor_mm", t),
        ("tab_width_mm", shape.width_mm),
        ("tab_count", float(len(sheet.faces) - 1)),
        ("tab_hole_mm", shape.hole_mm),
        ("inside_radius_mm", shape.inside_radius_mm),
    )
    return metal_part(
        "choke-ring",
        "floor of the choke",
        ("laser", "fold"),
        (feed.job.can.metal, feed.job.can.temper),
        feed,
        volume_mm3=folded_volume_mm3(sheet),
        sizes=sizes,
        flat=flat_pattern(sheet, "side towards the aperture"),
        thickness_mm=t,
        solid=once(partial(folded_solid, sheet, base, "choke ring")),
        notes=(f"holes fit {shape.screw} screws and rivets", rule_text(feed.job.limits)),
    )
