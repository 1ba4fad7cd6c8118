"""Far field of the currents, as fields and radiated power.

    E(r) -> e^{-jkr}/r * F(theta, phi),   F = -j k eta/(4 pi) [N - r^ (r^ . N)],   N = int J e^{j k r^ . r'} dS'

Co- and cross-polar parts, widths and phase centre are taken over the dish's angle in ``fabgen.sizing.dish``.

Depends on: fields.functions, fields.geometry, fields.mesh, fields.quadrature, fields.system.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from fabgen.fields.functions import EdgeFunctions
from fabgen.fields.geometry import FREE_SPACE_IMPEDANCE, SPEED_OF_LIGHT
from fabgen.fields.mesh import FloatArray, Mesh
from fabgen.fields.quadrature import triangle_rule
from fabgen.fields.system import ComplexArray, reflections


@dataclass(frozen=True)
class CurrentElements:
    """Currents as point elements: positions (n, 3) in metres and moments J dS (n, 3) in ampere metres."""

    position_m: FloatArray
    moment_am: ComplexArray

    def far_field(
        self, frequency_hz: float, theta_rad: ArrayLike, phi_rad: ArrayLike
    ) -> tuple[ComplexArray, ComplexArray]:
        """F_theta, F_phi in volts for the directions given (arrays of one shape), phase referred to the origin."""
        theta, phi = np.broadcast_arrays(np.asarray(theta_rad, float), np.asarray(phi_rad, float))
        t, p = theta.ravel(), phi.ravel()
        k = 2 * np.pi * frequency_hz / SPEED_OF_LIGHT
        radial = np.stack([np.sin(t) * np.cos(p), np.sin(t) * np.sin(p), np.cos(t)], -1)
        n = np.empty((len(t), 3), dtype=np.complex128)
        for first in range(0, len(t), 512):
            phase = k * (radial[first : first + 512] @ self.position_m.T)
            n[first : first + 512] = (np.cos(phase) + 1j * np.sin(phase)) @ self.moment_am
        factor = -1j * k * FREE_SPACE_IMPEDANCE / (4 * np.pi)
        along_theta = np.stack([np.cos(t) * np.cos(p), np.cos(t) * np.sin(p), -np.sin(t)], -1)
        along_phi = np.stack([-np.sin(p), np.cos(p), np.zeros_like(p)], -1)
        f_theta = factor * np.einsum("nx,nx->n", n, along_theta)
        f_phi = factor * np.einsum("nx,nx->n", n, along_phi)
        return f_theta.reshape(theta.shape), f_phi.reshape(theta.shape)

    def radiated_power_w(self, frequency_hz: float, polar_points: int = 24, azimuth_points: int = 32) -> float:
        """Power through the far sphere, Gauss-Legendre in cos(theta), trapezoid in phi (exact for the few
        wavelengths of a feed)."""
        x, w = np.polynomial.legendre.leggauss(polar_points)
        phi = 2 * np.pi * np.arange(azimuth_points) / azimuth_points
        a, b = self.far_field(frequency_hz, np.arccos(x)[:, None], phi[None, :])
        density = (np.abs(a) ** 2 + np.abs(b) ** 2) / (2 * FREE_SPACE_IMPEDANCE)
        return float((w[:, None] * density).sum() * 2 * np.pi / azimuth_points)


def current_elements(
    mesh: Mesh, functions: EdgeFunctions, planes: tuple[int, ...], currents: ComplexArray, points: int = 3
) -> CurrentElements:
    """Point elements of the solved currents and of their images."""
    bary, weight = triangle_rule(points)
    corners = mesh.corners_m
    position = np.einsum("ic,tcx->tix", bary, corners)
    padded = np.append(currents, 0.0)
    coefficient = (padded[functions.dof] * functions.sign).sum(-1) * functions.length_m / 2
    moment = np.einsum("tc,tix->tix", coefficient, position) - np.einsum("tc,tcx->tx", coefficient, corners)[:, None]
    moment = moment * weight[None, :, None]
    positions, moments = [], []
    for r in reflections(planes):
        positions.append((position * r.mirror).reshape(-1, 3))
        moments.append((moment * r.mirror * r.factor).reshape(-1, 3))
    return CurrentElements(np.concatenate(positions), np.concatenate(moments))
