"""Half structures (y >= 0) for tests of the field computation."""

from __future__ import annotations

import math

import numpy as np

from fabgen.fields.mesh import CROSSING, LOOP, Mesh, grid, merged
from fabgen.fields.surface_loop import across_positions


def strip_dipole(length_m: float, radius_m: float, cells: int, across: int = 2) -> Mesh:
    """Half of a dipole along y: a strip of width 4 a; the cells at y = 0 carry the port."""
    y = np.linspace(0.0, length_m / 2, cells + 1)
    x = across_positions(across) * 2 * radius_m
    nodes = np.zeros((cells + 1, across + 1, 3))
    nodes[..., 0], nodes[..., 1] = x[None, :], y[:, None]
    return merged([grid(nodes[:2], CROSSING), grid(nodes[1:], LOOP)], 1e-9 * length_m)


def ring_loop(
    radius_m: float, wire_radius_m: float, height_m: float, cells: int, across: int = 2, upright: bool = True
) -> Mesh:
    """Half of a loop with its port at phi = 0: a band of width 4 a on the cylinder (or flat)."""
    step = math.pi / cells
    rho = radius_m * (step / 2) / math.sin(step / 2)
    angle = step * np.arange(cells + 1)
    offset = across_positions(across) * 2 * wire_radius_m
    nodes = np.zeros((cells + 1, across + 1, 3))
    r = rho + (np.zeros_like(offset) if upright else offset)
    nodes[..., 0] = r[None, :] * np.cos(angle)[:, None]
    nodes[..., 1] = r[None, :] * np.sin(angle)[:, None]
    nodes[[0, -1], :, 1] = 0.0
    nodes[..., 2] = height_m + (offset[None, :] if upright else 0.0)
    return merged([grid(nodes[:2], CROSSING), grid(nodes[1:], LOOP)], 1e-9 * radius_m)


def strip_line(length_m: float, pitch_m: float, width_m: float, bridge_m: float, cells: int, across: int = 5) -> Mesh:
    """Half of two coplanar strips in the plane x = 0, along z: port at the foot, short at the top."""
    y = pitch_m / 2 + across_positions(across) * width_m / 2
    z = np.concatenate([[0.0], np.linspace(bridge_m, length_m - bridge_m, cells + 1), [length_m]])
    nodes = np.zeros((len(z), across + 1, 3))
    nodes[..., 1], nodes[..., 2] = y[None, :], z[:, None]

    def bridge(rows: np.ndarray, label: int) -> Mesh:
        share = np.linspace(1.0, 0.0, 3)
        across_nodes = np.repeat(rows[:, None, :], 3, axis=1)
        across_nodes[:, :, 1] = rows[:, None, 1] * share
        return grid(across_nodes, label)

    foot, top = bridge(nodes[:2, 0], CROSSING), bridge(nodes[-2:, 0], LOOP)
    return merged([grid(nodes, LOOP), foot, top], 1e-9 * length_m)
