"""Volumes of what is cut out of, and folded from, a round wall: elliptic integrals, by Gauss' rule to rounding.

A tool with parallel sides goes straight through a wall between two radii about z. At the distance y beside the tool's
middle the wall is as thick as w(y) = sqrt(Ro^2 - y^2) - sqrt(Ri^2 - y^2), so that

    volume = integral of (height of the cut at y) w(y) dy

Depends on: nothing.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

NODES = 32
Function = Callable[[NDArray[np.float64]], NDArray[np.float64]]


def integral(function: Function, low: float, high: float) -> float:
    """Integral of a smooth function by Gauss' rule of 32 nodes."""
    nodes, weights = np.polynomial.legendre.leggauss(NODES)
    half = (high - low) / 2
    return float(half * np.sum(weights * function(low + half * (nodes + 1))))


def _thickness_mm(inner_mm: float, outer_mm: float, y_mm: NDArray[np.float64]) -> NDArray[np.float64]:
    return np.sqrt(outer_mm**2 - y_mm**2) - np.sqrt(inner_mm**2 - y_mm**2)


def drilled_shell_mm3(inner_mm: float, outer_mm: float, diameter_mm: float) -> float:
    """A radial hole through a wall between two radii; y = a sin(phi), height 2 a cos(phi)."""
    a = diameter_mm / 2

    def share(phi: NDArray[np.float64]) -> NDArray[np.float64]:
        return 2 * a**2 * np.cos(phi) ** 2 * _thickness_mm(inner_mm, outer_mm, a * np.sin(phi))

    return integral(share, -math.pi / 2, math.pi / 2)


def slotted_shell_mm3(inner_mm: float, outer_mm: float, low_mm: float, high_mm: float) -> float:
    """A straight slot from y = low to y = high through such a wall, for each millimetre of its height."""
    return integral(lambda y: _thickness_mm(inner_mm, outer_mm, y), low_mm, high_mm)


def rounded_corner_mm3(inner_mm: float, outer_mm: float, corner_y_mm: float, radius_mm: float) -> float:
    """What a rounding adds in a slot's corner, sharp at ``corner_y_mm``, towards +y (radius above 0) or -y (below).

    y = corner + r (1 - cos(phi)), height |r| (1 - sin(phi)).
    """

    def share(phi: NDArray[np.float64]) -> NDArray[np.float64]:
        y = corner_y_mm + radius_mm * (1 - np.cos(phi))
        return radius_mm**2 * (1 - np.sin(phi)) * np.sin(phi) * _thickness_mm(inner_mm, outer_mm, y)

    return integral(share, 0.0, math.pi / 2)


def parallel_width_mm(radius_mm: NDArray[np.float64], width_mm: float) -> NDArray[np.float64]:
    """Length of the arc of that radius about z between two planes ``width_mm`` apart beside the axis."""
    return 2 * radius_mm * np.arcsin(width_mm / 2 / radius_mm)


def round_end_corner_mm2(end_mm: float, half_width_mm: float, rounding_mm: float) -> float:
    """Area that a rounding takes off the corner between the arc of radius ``end_mm`` and a plane at that distance."""
    if rounding_mm <= 0:
        return 0.0
    y = half_width_mm - rounding_mm
    x = math.sqrt((end_mm - rounding_mm) ** 2 - y**2)
    corner = (math.sqrt(end_mm**2 - half_width_mm**2), half_width_mm)
    side, scale = (x, half_width_mm), end_mm / (end_mm - rounding_mm)
    on_end = (x * scale, y * scale)
    triangle = abs((corner[0] - side[0]) * (on_end[1] - side[1]) - (on_end[0] - side[0]) * (corner[1] - side[1])) / 2
    return triangle + _segment_mm2(end_mm, corner, on_end) - _segment_mm2(rounding_mm, side, on_end)


def _segment_mm2(radius_mm: float, start: tuple[float, float], end: tuple[float, float]) -> float:
    angle = 2 * math.asin(math.dist(start, end) / 2 / radius_mm)
    return radius_mm**2 / 2 * (angle - math.sin(angle))
