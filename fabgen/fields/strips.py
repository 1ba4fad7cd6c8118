"""The width of a meshed strip that stands for a wire, or for a sheet, exactly as far as its line constants go.

A strip cut into few cells across is a little less capacitive than a continuous one. The width is therefore found
with the same cells in the plane across the conductor (charge constant on each cell, tested by its mean), so that

    one strip      has the equivalent radius of the wire (continuous limit: width = 4 a),
    a pair         has the impedance of the two wires, (eta/pi) acosh(D/d), or that of two coplanar strips.

The correction is tested on the full solver with a shorted line.

Depends on: fields.surface_loop, theory.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import lru_cache

import numpy as np
from scipy.optimize import brentq

from fabgen.fields.mesh import FloatArray
from fabgen.fields.surface_loop import across_positions
from fabgen.theory.constants import FREE_SPACE_OHM


def _mean_log(a0: FloatArray, a1: FloatArray, b0: FloatArray, b1: FloatArray) -> FloatArray:
    """Mean of ln|x - x'| over the intervals a and b."""

    def second(u: FloatArray) -> FloatArray:
        size = np.abs(u)
        return np.asarray(np.where(size > 0, 0.5 * u * u * np.log(np.where(size > 0, size, 1.0)), 0.0) - 0.75 * u * u)

    total = second(a1 - b0) - second(a1 - b1) - second(a0 - b0) + second(a0 - b1)
    return np.asarray(total / ((a1 - a0) * (b1 - b0)))


def _edges(width: float, centre: float, cells: int) -> FloatArray:
    return np.asarray(centre + across_positions(cells) * width / 2)


def equivalent_radius_m(width_m: float, cells: int) -> float:
    """Radius of the round wire with the same potential as a lone strip of so many cells (continuous: width / 4)."""
    x = _edges(width_m, 0.0, cells)
    a0, a1 = x[:-1, None], x[1:, None]
    charge = np.linalg.solve(-_mean_log(a0, a1, a0.T, a1.T), np.ones(cells))
    return math.exp(-1.0 / float(charge.sum()))


def crowding(cells: int) -> float:
    """Loss of a lone meshed strip over that of the same current spread evenly: W sum(q^2 / w) / (sum q)^2, above 1.

    The current crowds at the edges as the charge does; a round wire's does not, so the strip's surface impedance
    is divided by this.
    """
    x = _edges(1.0, 0.0, cells)
    a0, a1 = x[:-1, None], x[1:, None]
    charge = np.linalg.solve(-_mean_log(a0, a1, a0.T, a1.T), np.ones(cells))
    return float((charge**2 / np.diff(x)).sum() / charge.sum() ** 2)


def pair_impedance_ohm(width_m: float, pitch_m: float, cells: int) -> float:
    """Impedance of two coplanar strips of so many cells, centres a pitch apart, in air."""
    x = _edges(width_m, pitch_m / 2, cells)
    a0, a1 = x[:-1, None], x[1:, None]
    potential = -_mean_log(a0, a1, a0.T, a1.T) + _mean_log(a0, a1, -a1.T, -a0.T)
    charge = np.linalg.solve(potential, np.ones(cells))
    return FREE_SPACE_OHM / math.pi / float(charge.sum())


def _solve(function: Callable[[float], float], low: float, high: float) -> float:
    return float(brentq(function, low, high, xtol=1e-15, rtol=1e-12))


@lru_cache(maxsize=256)
def lone_strip_width_m(radius_m: float, cells: int) -> float:
    """Width of the meshed strip that stands for a lone wire of the radius."""
    return _solve(lambda w: equivalent_radius_m(w * radius_m, cells) / radius_m - 1.0, 3.0, 8.0) * radius_m


@lru_cache(maxsize=256)
def paired_strip_width_m(impedance_ohm: float, pitch_m: float, cells: int) -> float:
    """Width of each of two meshed coplanar strips, centres a pitch apart, whose impedance is the one asked for."""
    return _solve(lambda w: pair_impedance_ohm(w, 1.0, cells) - impedance_ohm, 1e-3, 0.9999) * pitch_m
