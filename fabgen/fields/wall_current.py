"""Current of the can's walls at the lines where sheets are joined: what crosses a seam or a joint, and what is near.

The solved currents are edge functions, whose density across an edge of the mesh is one number along that edge. The
joints of a can lie on such edges: the foot of the wall, the ring of a choke, and every upright line of the mesh, on
any of which a seam may lie. Densities are those of both faces of the thin sheet together, peak amplitude.

Depends on: errors, fields.far_field, fields.geometry, fields.mesh, fields.quadrature.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fabgen.errors import NumericalError
from fabgen.fields.far_field import CurrentElements
from fabgen.fields.geometry import CanGeometry
from fabgen.fields.mesh import FloatArray
from fabgen.fields.quadrature import triangle_rule

ComplexArray = NDArray[np.complex128]
NEAR = 0.015
"""Share of the radius by which the corners of a polygon may stand off the circle that it is for."""
SAME_PLACE = 1e-6
ANGLES_DEG = tuple(5.0 * step for step in range(37))
"""Angles from +x at which the current across upright lines is told."""


@dataclass(frozen=True)
class LineCurrent:
    """Current at a line of edges: the largest density beside it, the largest across it, and the integral of the
    square of what crosses, along the whole line of both halves (a contact resistance r in ohm metres loses half of
    r times that)."""

    peak_a_per_m: float
    crossing_a_per_m: float
    crossing_square_a2_per_m: float


@dataclass(frozen=True)
class UprightCurrent:
    """Largest density across an upright line of one wall, by its angle from +x (0 to 180 degrees; the other half
    mirrors it), and the largest density anywhere on that wall. The row at the rim is left out of both: at the edge of
    an infinitely thin sheet the current along it grows without limit."""

    peak_a_per_m: float
    angle_deg: tuple[float, ...]
    crossing_a_per_m: tuple[float, ...]


@dataclass(frozen=True)
class CanCurrent:
    """Upright lines and level joints by name, for the power that the solution accepts."""

    upright: dict[str, UprightCurrent]
    level: dict[str, LineCurrent]


@dataclass(frozen=True)
class Sheet:
    """Triangles with their current: corners (T, 3, 3) in metres, density at the corners (T, 3, 3) in A/m."""

    corners_m: FloatArray
    density_a_per_m: ComplexArray

    def where(self, mask: NDArray[np.bool_]) -> Sheet:
        """The triangles of a mask (T,)."""
        return Sheet(self.corners_m[mask], self.density_a_per_m[mask])

    @property
    def largest_a_per_m(self) -> float:
        """Largest density, sampled at the centres of the triangles."""
        centre = self.density_a_per_m.mean(1)
        return float(np.sqrt((np.abs(centre) ** 2).sum(-1)).max(initial=0.0))

    @property
    def upright(self) -> NDArray[np.bool_]:
        """Triangles that stand upright (T,)."""
        normal = _normals(self.corners_m)
        return np.asarray(np.abs(normal[:, 2]) < SAME_PLACE)


def _normals(corners: FloatArray) -> FloatArray:
    cross = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
    return np.asarray(cross / np.linalg.norm(cross, axis=1)[:, None])


def sheet_of(elements: CurrentElements, images: int = 2) -> Sheet:
    """Triangles and densities behind point elements that were made with the rule of three points.

    That rule holds all there is to know of a triangle: its points give the corners, and the density is linear. The
    first of ``images`` equal shares is the structure that was meshed. Raises NumericalError for other elements.
    """
    count = len(elements.position_m) // images
    if count % 3 or count * images != len(elements.position_m):
        raise NumericalError(f"{len(elements.position_m)} current elements are not three for each triangle and image")
    bary, weight = triangle_rule(3)
    back = np.linalg.inv(bary)
    corners = np.einsum("ci,tix->tcx", back, elements.position_m[:count].reshape(-1, 3, 3))
    area = 0.5 * np.linalg.norm(np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]), axis=1)
    density = elements.moment_am[:count].reshape(-1, 3, 3) / (area[:, None] * weight[None, :])[..., None]
    return Sheet(corners, np.einsum("ci,tix->tcx", back, density))


def ohmic_power_w(sheet: Sheet, resistance_ohm: FloatArray) -> float:
    """Half the integral of R |J|^2 over both halves; ``resistance_ohm`` (T,). For tests: the solver's own is exact."""
    bary, weight = triangle_rule(3)
    corners = sheet.corners_m
    area = 0.5 * np.linalg.norm(np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]), axis=1)
    square = (np.abs(np.einsum("ic,tcx->tix", bary, sheet.density_a_per_m)) ** 2).sum(-1) @ weight
    return float((resistance_ohm * area * square).sum())


def can_current(elements: CurrentElements, can: CanGeometry, accepted_w: float, images: int = 2) -> CanCurrent:
    """Currents at the can's upright lines and level joints for 1 W accepted; those of ``elements`` are for
    ``accepted_w``."""
    whole = sheet_of(elements, images)
    sheet = Sheet(whole.corners_m, whole.density_a_per_m / math.sqrt(accepted_w))
    wall = sheet.where(sheet.upright & _on_wall(sheet.corners_m, can.radius_m, can.flats).all(1))
    upright = {"wall": _upright(wall, can.depth_m)}
    level = {"wall on floor": _level(wall, 0.0)}
    choke = can.choke
    if choke is not None:
        outer = sheet.where(sheet.upright & _on_wall(sheet.corners_m, choke.radius_m, can.flats).all(1))
        upright["choke wall"] = _upright(outer, choke.floor_z_m + choke.depth_m)
        level["choke wall on its floor"] = _level(outer, choke.floor_z_m)
        if choke.floor_z_m > 0:
            ring = sheet.where(~sheet.upright & (np.abs(sheet.corners_m[..., 2] - choke.floor_z_m) < 1e-9).all(1))
            inner = _on_wall(ring.corners_m, can.radius_m, can.flats)
            level["choke floor on wall"] = _line(ring, inner)
    return CanCurrent(upright, level)


def _on_wall(corners: FloatArray, radius_m: float, flats: int) -> NDArray[np.bool_]:
    """Which corners (T, 3) lie on a wall, round or with flats."""
    x, y = corners[..., 0], corners[..., 1]
    reach = np.hypot(x, y)
    if flats:
        half = math.pi / flats
        reach = reach * np.cos(np.mod(np.arctan2(y, x) + half, 2 * half) - half)
    return np.asarray(np.abs(reach / radius_m - 1) < NEAR)


def _flow(sheet: Sheet, corner: int) -> tuple[FloatArray, FloatArray]:
    """Density that leaves each triangle through the edge opposite a corner (T,), and the length of that edge."""
    a, b = sheet.corners_m[:, (corner + 1) % 3], sheet.corners_m[:, (corner + 2) % 3]
    density = (sheet.density_a_per_m[:, (corner + 1) % 3] + sheet.density_a_per_m[:, (corner + 2) % 3]) / 2
    length = np.linalg.norm(b - a, axis=1)
    along = (b - a) / length[:, None]
    out = np.cross(along, _normals(sheet.corners_m))
    return np.asarray(np.abs(np.einsum("tx,tx->t", density, out))), np.asarray(length)


def _line(sheet: Sheet, on: NDArray[np.bool_]) -> LineCurrent:
    """The line of the edges whose two corners are marked (T, 3)."""
    peak = crossing = square = 0.0
    for corner in range(3):
        edge = on[:, (corner + 1) % 3] & on[:, (corner + 2) % 3] & ~on[:, corner]
        if not edge.any():
            continue
        flow, length = _flow(sheet.where(edge), corner)
        crossing = max(crossing, float(flow.max()))
        square += 2 * float((flow**2 * length).sum())
        peak = max(peak, sheet.where(edge).largest_a_per_m)
    return LineCurrent(max(peak, crossing), crossing, square)


def _level(wall: Sheet, z_m: float) -> LineCurrent:
    scale = max(float(np.ptp(wall.corners_m[..., 2])), 1e-9)
    return _line(wall, np.abs(wall.corners_m[..., 2] - z_m) < SAME_PLACE * scale)


def _upright(wall: Sheet, rim_m: float) -> UprightCurrent:
    """Crossing currents row by row, with their phase from line to line, so that a zero between two lines is seen."""
    height = wall.corners_m[..., 2]
    at_rim: NDArray[np.bool_] = np.abs(height - rim_m) < SAME_PLACE * rim_m
    body = wall.where(~np.asarray(at_rim.any(1)))
    rows: dict[int, dict[float, complex]] = {}
    for middle, angle, density in upright_crossings(body):
        rows.setdefault(middle, {})[angle] = density
    largest = np.zeros(len(ANGLES_DEG))
    for row in rows.values():
        places = sorted(row)
        values = np.array([row[place] for place in places])
        between = np.interp(ANGLES_DEG, places, values.real) + 1j * np.interp(ANGLES_DEG, places, values.imag)
        largest = np.maximum(largest, np.abs(between))
    return UprightCurrent(max(body.largest_a_per_m, float(largest.max())), ANGLES_DEG, tuple(map(float, largest)))


def upright_crossings(body: Sheet) -> list[tuple[int, float, complex]]:
    """Height of the middle (in micrometres), angle in degrees and density along +phi at each upright edge."""
    found = []
    for corner in range(3):
        first, second = (corner + 1) % 3, (corner + 2) % 3
        a, b = body.corners_m[:, first], body.corners_m[:, second]
        stands = np.hypot(a[:, 0] - b[:, 0], a[:, 1] - b[:, 1]) < SAME_PLACE * np.hypot(a[:, 0], a[:, 1])
        normal = _normals(body.corners_m)
        normal *= np.sign(np.einsum("tx,tx->t", normal[:, :2], a[:, :2]))[:, None]
        density = (body.density_a_per_m[:, first] + body.density_a_per_m[:, second]) / 2
        # along +phi in the plane of the triangle: z x outward normal
        forward = normal[:, 0] * density[:, 1] - normal[:, 1] * density[:, 0]
        rows = np.rint(0.5e6 * (a[:, 2] + b[:, 2]))
        angles = np.round(np.degrees(np.arctan2(a[:, 1], a[:, 0])), 4)
        found += [
            (int(rows[i]), float(angles[i]), complex(forward[i])) for i in np.flatnonzero(stands)
        ]
    return found
