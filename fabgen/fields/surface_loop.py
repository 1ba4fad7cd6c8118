"""Loop, bars and crossing as structured strips: the half y >= 0, with nodes that move smoothly with the sizes.

A mesh that is moved, not made anew, keeps the impedance a smooth function of every size, which root finding and
sensitivities need.

    wire                               sheet (tab inward)
         ______ band                        ring  =========
        /   bend                                    tab  /__ bend
       |  leg                                           |  leg
       |=== crossing -> y = 0                           |=== crossing -> y = 0
     __|__ foot on the floor                          __|__

Depends on: errors, fields.geometry, fields.mesh, fields.plan.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from fabgen.errors import GeometryError
from fabgen.fields.geometry import LoopGeometry
from fabgen.fields.mesh import CROSSING, LOOP, FloatArray, Mesh, grid
from fabgen.fields.plan import LoopCounts, tangent_angle


@dataclass(frozen=True)
class LoopSurface:
    """Strips of the half y >= 0. ``foot_m`` (across + 1, 3): nodes on the floor, from the plane y = 0 outwards."""

    meshes: tuple[Mesh, ...]
    foot_m: FloatArray


EDGE_CELL = 0.12
BEND_SHARE = 0.85
"""Share of the distance between bar and ring that the meshed bend of a sheet loop may take."""


def across_positions(cells: int) -> FloatArray:
    """Node positions across a strip in -1..1: a narrow cell at each edge, where the current crowds, cosine
    spacing between. Two cells: equal."""
    if cells == 2:
        return np.array([-1.0, 0.0, 1.0])
    inner = (1 - EDGE_CELL) * -np.cos(np.pi * np.arange(cells - 1) / (cells - 2))
    if cells == 3:
        inner = 0.7 * inner / abs(inner[0])
    return np.concatenate([[-1.0], inner, [1.0]])


def leg_stations(loop: LoopGeometry, counts: LoopCounts) -> tuple[FloatArray, int, int]:
    """Heights of the rows of the straight bar from the floor up, and the rows that the crossing spans."""
    top = loop.height_m - loop.bend_radius_m
    half = loop.crossing_band_m / 2
    low, high = loop.tap_height_m - half, loop.tap_height_m + half
    below, above = counts.below, counts.above
    rows = np.concatenate(
        [
            np.linspace(0.0, low, below + 1),
            loop.tap_height_m + half * across_positions(counts.crossing_across)[1:],
            np.linspace(high, top, above + 1)[1:],
        ]
    )
    return rows, below, below + counts.crossing_across


def loop_surface(loop: LoopGeometry, counts: LoopCounts) -> LoopSurface:
    """Strips of loop, bars and crossing for either form."""
    return _wire_surface(loop, counts) if loop.form == "wire" else _sheet_surface(loop, counts)


def _crossing(column: FloatArray, counts: LoopCounts) -> Mesh:
    """Strip from the bar's inner edge nodes (n, 3) straight to the plane y = 0."""
    fractions = np.linspace(1.0, 0.0, counts.crossing_along + 1)
    nodes = np.repeat(column[:, None, :], len(fractions), axis=1)
    nodes[:, :, 1] = column[:, None, 1] * fractions[None, :]
    return grid(nodes, CROSSING)


def _wire_surface(loop: LoopGeometry, counts: LoopCounts) -> LoopSurface:
    rows, low, high = leg_stations(loop, counts)
    phi = tangent_angle(loop)
    r, b, h = loop.radius_m, loop.bend_radius_m, loop.height_m
    tangent = np.array([-math.sin(phi), math.cos(phi), 0.0])
    up = np.array([0.0, 0.0, 1.0])
    meet = np.array([r * math.cos(phi), r * math.sin(phi), 0.0])
    across = across_positions(counts.across)
    leg_half = across * loop.leg_band_m / 2
    foot = meet - b * tangent
    leg = foot + rows[:, None, None] * up + leg_half[None, :, None] * tangent
    alpha = np.linspace(0.0, math.pi / 2, counts.bend + 1)[1:]
    share = (alpha / (math.pi / 2))[:, None]
    half = leg_half[None, :] * (1 - share) + across[None, :] * loop.band_m / 2 * share
    along = b * (1 - np.cos(alpha))[:, None] + half * np.cos(alpha)[:, None]
    height = h - b + b * np.sin(alpha)[:, None] - half * np.sin(alpha)[:, None]
    bend = foot + along[..., None] * tangent + height[..., None] * up
    cells = counts.ring
    step = (math.pi - phi) / cells
    angles = phi + step * np.arange(1, cells + 1)
    rr = r * (step / 2) / math.sin(step / 2)
    radial = np.stack([rr * np.cos(angles), rr * np.sin(angles), np.zeros(cells)], -1)
    radial[-1, 1] = 0.0
    ring = radial[:, None, :] + (h - across[None, :, None] * loop.band_m / 2) * up
    strip = np.concatenate([leg, bend, ring])
    # column 0 is the side towards y = 0: the bar's inner edge
    return LoopSurface((grid(strip, LOOP), _crossing(leg[low : high + 1, 0], counts)), leg[0])


def _sheet_surface(loop: LoopGeometry, counts: LoopCounts) -> LoopSurface:
    across = across_positions(counts.across)
    y = loop.leg_pitch_m / 2 + across * loop.leg_band_m / 2
    side = 1.0 if loop.inward else -1.0
    ring = _ring_nodes(loop, counts, y)
    edge = ring[0, : counts.across + 1] if loop.inward else ring[-1, : counts.across + 1]
    loop = replace(loop, bend_radius_m=min(loop.bend_radius_m, BEND_SHARE * _room(loop, edge)))
    rows, low, high = leg_stations(loop, counts)
    b, h = loop.bend_radius_m, loop.height_m
    alpha = np.linspace(math.pi / 2, 0.0, counts.bend + 1)
    arc = np.zeros((counts.bend + 1, len(y), 3))
    arc[..., 0] = loop.leg_x_m + side * b * (1 - np.sin(alpha))[:, None]
    arc[..., 1] = y
    arc[..., 2] = (h - b + b * np.cos(alpha))[:, None]
    leg = np.zeros((len(rows), len(y), 3))
    leg[..., 0], leg[..., 1], leg[..., 2] = loop.leg_x_m, y, rows[:, None]
    t = np.linspace(0.0, 1.0, counts.tab + 1)[1:, None, None]
    tab = arc[-1] * (1 - t) + edge * t
    strip = np.concatenate([leg, arc[1:], tab])
    meshes = (grid(ring, LOOP), grid(strip, LOOP), _crossing(leg[low : high + 1, 0], counts))
    return LoopSurface(meshes, leg[0])


def _room(loop: LoopGeometry, edge: FloatArray) -> float:
    """Distance between bar and ring; the meshed ring is wider than the sheet's, so a short tab gets shorter still."""
    room = float(np.min(edge[:, 0]) - loop.leg_x_m if loop.inward else loop.leg_x_m - np.max(edge[:, 0]))
    if room <= 0:
        raise GeometryError(
            f"the tab between ring and bar is {-1e3 * room:.2f} mm too short to be computed; make the ring's strip "
            "narrower or the tab longer"
        )
    return room


def _ring_nodes(loop: LoopGeometry, counts: LoopCounts, y: FloatArray) -> FloatArray:
    """Nodes (across + 1, columns, 3) of the half ring; the first columns run parallel to the gap, at the tab."""
    phi_out = math.asin(y[-1] / loop.radius_m)
    cells = counts.ring
    step = (math.pi - phi_out) / cells
    stretch = (step / 2) / math.sin(step / 2)
    rho = (loop.radius_m + across_positions(counts.across) * loop.band_m / 2) * stretch
    # The meshed strips are wider than the sheet's, so bars that fit the drawn ring need not fit this one.
    if y[-1] >= rho[0]:
        raise GeometryError(
            f"the bars reach {1e3 * y[-1]:.2f} mm from the middle, past the ring's inner edge at {1e3 * rho[0]:.2f} mm "
            "as computed; make the strip narrower or the leg pitch smaller"
        )
    nodes = np.zeros((len(rho), len(y) + cells, 3))
    nodes[..., 2] = loop.height_m
    nodes[:, : len(y), 0] = np.sqrt(rho[:, None] ** 2 - y[None, :] ** 2)
    nodes[:, : len(y), 1] = y
    start = np.arcsin(y[-1] / rho)
    s = np.arange(1, cells + 1) / cells
    angle = start[:, None] * (1 - s) + math.pi * s
    nodes[:, len(y) :, 0] = rho[:, None] * np.cos(angle)
    nodes[:, len(y) :, 1] = rho[:, None] * np.sin(angle)
    nodes[:, -1, 1] = 0.0
    return nodes
