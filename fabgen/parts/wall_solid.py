"""The finished wall of a sheet can as a solid: rolled or folded, with seam, tabs and holes.

A folded wall is cut and joined as a whole. A rolled one is made of equal columns, one for each tab, that are
sewn side by side: the kernel joins tangent bends and cylinders slowly and not always rightly.

Depends on: parts (contour, kernel, strip_path, wall_strip).
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from fabgen.parts.contour import Contour, Point, Vertex, rounded, split_arc
from fabgen.parts.strip_path import outward, profile
from fabgen.parts.wall_strip import SEAM_GAP_MM, Wall, WallHole, corner_round_mm, relief_top_mm

if TYPE_CHECKING:
    import cadquery


def wall_solid(wall: Wall, corner_mm: float) -> cadquery.Shape:
    """The finished wall in the feed's frame. ``corner_mm``: least inner corner radius of the flat strip.

    On a rolled wall the tabs' bends follow the circle; their sides are parallel as on the flat strip.
    """
    from fabgen.parts import kernel

    body = _rolled(wall, corner_mm) if wall.path.stretches[0].rolled else _folded(wall, corner_mm)
    return kernel.moved(body, z_mm=wall.base_z_mm)


def _all_holes(wall: Wall) -> list[WallHole]:
    seam = wall.seam
    rows = (seam.inner_row_mm, seam.outer_row_mm)
    return [*(WallHole(s, z, seam.hole_mm) for s in rows for z in seam.heights_mm), *wall.holes, *wall.drains]


def _drill(wall: Wall, hole: WallHole, reach: float) -> cadquery.Shape:
    """A drill from ``reach`` inside the mid-surface to as much outside it."""
    from fabgen.parts import kernel

    (x, y), heading = wall.path.at(hole.along_mm)
    ox, oy = outward(heading)
    ends = [(x + k * ox, y + k * oy, hole.height_mm) for k in (-reach, reach)]
    return kernel.rod(ends[0], ends[1], hole.diameter_mm)


def _folded(wall: Wall, corner_mm: float) -> cadquery.Shape:
    from fabgen.parts import kernel

    last = len(wall.path.stretches) - 1
    body = kernel.prism(profile(wall.path, 0, last), (), 0.0, wall.depth_mm)
    tail = _tail(wall, corner_mm)
    # Through one layer of the lap only.
    reach = wall.path.thickness_mm / 2 + SEAM_GAP_MM / 2
    tools, tabs = [_drill(wall, hole, reach) for hole in _all_holes(wall)], []
    tab, under = _tab_body(wall), [_under_tab(wall), *_reliefs(wall)]
    for s in wall.tabs_mm:
        place, heading = wall.path.at(s)
        tabs.append(_put(tab, place, heading))
        tools += [_put(tool, place, heading) for tool in under]
    return kernel.fused(body.fuse(tail).cut(*tools), *tabs, what="wall")


def _rolled(wall: Wall, corner_mm: float) -> cadquery.Shape:
    """Columns about each tab, and the step with the tail, sewn at their common upright faces."""
    import cadquery as cq

    from fabgen.parts import kernel

    ring, count = wall.path.stretches[0], len(wall.tabs_mm)
    pitch = wall.seam.step_at_mm / count
    half = math.degrees(pitch / ring.radius_mm) / 2
    kept: dict[tuple[tuple[float, float, float], ...], cadquery.Shape] = {}
    faces: list[cadquery.Face] = []
    for i in range(count):
        middle = pitch * (i + 0.5)
        here = [h for h in _all_holes(wall) if abs(h.along_mm - middle) < pitch / 2]
        key = tuple(sorted((round(h.along_mm - middle, 6), h.height_mm, h.diameter_mm) for h in here))
        if key not in kept:
            kept[key] = _column(wall, half, key)
        column = kept[key]
        joints = [_upright_face(column, side * half) for side in ((1.0,) if i == 0 else (1.0, -1.0))]
        turn = 90.0 + half * (2 * i + 1)
        faces += [_turned(face, turn) for face in column.Faces() if not any(face.isSame(j) for j in joints)]
    end = _end_piece(wall, corner_mm)
    join = _upright_face(end, 90.0 + 2 * half * count)
    faces += [face for face in end.Faces() if not face.isSame(join)]
    return kernel.one_solid(cq.Solid.makeSolid(cq.Shell.makeShell(faces)), "wall")


def _turned(face: cadquery.Face, angle_deg: float) -> cadquery.Face:
    import cadquery as cq

    return face.moved(cq.Location(cq.Vector(0, 0, 0), cq.Vector(0, 0, 1), angle_deg))


def _upright_face(body: cadquery.Shape, angle_deg: float) -> cadquery.Face:
    """The plane face in the half-plane through the axis at that angle."""
    a = math.radians(angle_deg)
    across = (-math.sin(a), math.cos(a))
    along = (math.cos(a), math.sin(a))

    def off(face: cadquery.Face) -> float:
        box = [(v.X * across[0] + v.Y * across[1], v.X * along[0] + v.Y * along[1]) for v in face.Vertices()]
        return max(abs(u) for u, _ in box) if all(w > 0 for _, w in box) else math.inf

    return min(body.Faces(), key=off)


def _column(wall: Wall, half_deg: float, holes: tuple[tuple[float, float, float], ...]) -> cadquery.Shape:
    """One tab with its share of the wall, about the x axis; ``holes``: along from the middle, height, diameter."""
    from fabgen.parts import kernel

    t, radius = wall.path.thickness_mm, wall.path.stretches[0].radius_mm
    outer, inner = radius + t / 2, radius - t / 2
    end, begin = math.radians(half_deg), math.radians(-half_deg)
    sector = Contour(
        (
            *split_arc((0.0, 0.0), outer, -half_deg, 2 * half_deg),
            Vertex(outer * math.cos(end), outer * math.sin(end)),
            *split_arc((0.0, 0.0), inner, half_deg, -2 * half_deg),
            Vertex(inner * math.cos(begin), inner * math.sin(begin)),
        )
    )
    body = kernel.prism(sector, (), 0.0, wall.depth_mm)
    tools = [kernel.moved(tool, x_mm=radius) for tool in (_under_tab(wall), *_reliefs(wall))]
    for along, height, diameter in holes:
        drill = kernel.rod((inner - t, 0.0, height), (outer + t, 0.0, height), diameter)
        tools.append(kernel.turned(drill, math.degrees(along / radius)))
    tab = kernel.moved(_tab_body(wall), x_mm=radius)
    return kernel.fused(body.cut(*tools), tab, what="wall")


def _tail(wall: Wall, corner_mm: float) -> cadquery.Shape:
    """The tail above its lower edge, with the round inner corner where that edge meets the step."""
    import cadquery as cq

    from fabgen.parts import kernel

    path, low, t = wall.path, wall.seam.tail_low_mm, wall.path.thickness_mm
    last = len(path.stretches) - 1
    tail = kernel.prism(profile(path, last), (), low, wall.depth_mm - low)
    if corner_mm <= 0:
        return tail
    place, heading = path.stretches[last].at(0.0)
    corner = Contour((Vertex(0.0, low), *split_arc((corner_mm, low - corner_mm), corner_mm, 180.0, -90.0),
                      Vertex(corner_mm, low)))  # fmt: skip
    plane = cq.Plane(origin=(0, 0, 0), xDir=(0, 1, 0), normal=(1, 0, 0))
    tool = kernel.prism(corner, (), -2 * t, 4 * t).moved(cq.Location(plane))
    below = kernel.prism(profile(path, last), (), low - corner_mm, corner_mm)
    web = kernel.common(below, _put(tool, place, heading), what="corner of the tail")
    return kernel.fused(tail, web, what="tail")


def _end_piece(wall: Wall, corner_mm: float) -> cadquery.Shape:
    from fabgen.parts import kernel

    path, seam = wall.path, wall.seam
    last = len(path.stretches) - 1
    step = kernel.prism(profile(path, 1, last), (), 0.0, wall.depth_mm)
    tail = _tail(wall, corner_mm)
    # Only the tail is drilled here, so the drill may reach well beyond its faces, which curve away from it.
    reach = 2 * path.thickness_mm
    drills = [_drill(wall, hole, reach) for hole in _all_holes(wall) if hole.along_mm > seam.tail_at_mm]
    return kernel.fused(step, kernel.cut(tail, *drills, what="tail"), what="tail of the seam")


def _put(shape: cadquery.Shape, place: Point, heading_deg: float) -> cadquery.Shape:
    """From a frame with x outward, y along the wall, to the wall at a place."""
    from fabgen.parts import kernel

    return kernel.moved(kernel.turned(shape, heading_deg - 90.0), place[0], place[1])


def _swept(wall: Wall, section: Contour) -> cadquery.Shape:
    """A section (outward, up) swept along the wall over a tab's width, centred on y = 0, with parallel sides."""
    import cadquery as cq

    from fabgen.parts import kernel

    plane = cq.Plane(origin=(0, 0, 0), xDir=(1, 0, 0), normal=(0, -1, 0))
    ring = kernel.contour_wire(section).moved(cq.Location(plane))
    width, first = wall.tab.width_mm, wall.path.stretches[0]
    if not first.rolled:
        return kernel.moved(cq.Solid.extrudeLinear(ring, [], cq.Vector(0, width, 0)), y_mm=-width / 2)
    radius = first.radius_mm
    angle = 1.2 * math.degrees(width / radius)
    start, end = cq.Vector(-radius, 0, 0), cq.Vector(-radius, 0, 1)
    turned = cq.Solid.revolve(cq.Face.makeFromWires(ring), angle, start, end).rotate(start, end, -angle / 2)
    box = turned.BoundingBox()
    slab = kernel.box((-radius, -width / 2, box.zmin - 1.0), (radius, width / 2, box.zmax + 1.0))
    return kernel.one_solid(turned.intersect(slab), "tab")


def _under_tab(wall: Wall) -> cadquery.Shape:
    """What is cut from the wall under the start of a tab's bend."""
    t, top = wall.path.thickness_mm, wall.root_mm
    return _swept(wall, Contour((Vertex(-2 * t, -t), Vertex(2 * t, -t), Vertex(2 * t, top), Vertex(-2 * t, top))))


def _reliefs(wall: Wall) -> list[cadquery.Shape]:
    """The slots with round ends at both sides of a tab."""
    import cadquery as cq

    from fabgen.parts import kernel

    t, b, top, half = wall.path.thickness_mm, wall.tab.relief_mm, relief_top_mm(wall), wall.tab.width_mm / 2
    plane = cq.Plane(origin=(0, 0, 0), xDir=(0, 1, 0), normal=(1, 0, 0))
    bodies = []
    for side in (1.0, -1.0):
        low, high = sorted((side * half, side * (half + b)))
        slot = rounded([(low, -t, 0.0), (high, -t, 0.0), (high, top, b / 2), (low, top, b / 2)])
        body = kernel.prism(slot, (), -3 * t, 6 * t).moved(cq.Location(plane))
        bodies.append(body)
    return bodies


def _tab_body(wall: Wall) -> cadquery.Shape:
    """A folded tab in a frame with x outward from the wall's mid-surface, y along it, z up."""
    from fabgen.parts import kernel

    t, tab, mid = wall.path.thickness_mm, wall.tab, wall.bend_mid_mm
    centre = (mid, t / 2 + mid)
    inner, outer = tab.inside_radius_mm, tab.inside_radius_mm + t
    tip = wall.reach_mm
    section = Contour(
        (
            *split_arc(centre, outer, 180.0, 90.0), Vertex(centre[0], 0.0), Vertex(tip, 0.0), Vertex(tip, t),
            *split_arc(centre, inner, 270.0, -90.0), Vertex(t / 2, centre[1]),
        )
    )  # fmt: skip
    body = _swept(wall, section)
    corners = [e for e in body.Edges() if e.Center().x > tip - tab.length_mm / 2 and abs(e.tangentAt(0.5).z) > 0.9]
    at = mid + tab.hole_from_bend_mm
    hole = kernel.rod((at, 0.0, -t), (at, 0.0, 2 * t), tab.hole_mm)
    return kernel.cut(body.fillet(corner_round_mm(tab), corners), hole, what="tab")
