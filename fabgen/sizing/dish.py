"""What a feed pattern does in a paraboloid: efficiencies, phase centre, taper, widths, directivity.

The pattern is a callable (theta, phi in radians) -> (E_theta, E_phi); theta = 0 looks at the vertex, the wanted
polarisation is along y, and the feed is its own mirror image in y = 0, so half of the sphere is sampled. Blockage
and surface errors are left out.

With t = theta and the half angle T, the field over the aperture is E cos^2(t/2)/f at radius 2 f tan(t/2), so

    eta = |S E_co tan(t/2) dt dphi|^2 / (pi tan^2(T/2) S |E|^2 sin t dt dphi over the sphere)

which for a rotationally symmetric feed is the cot^2 formula of Silver, Microwave Antenna Theory and Design, and
Balanis, Antenna Theory, eq. 15-55. It splits exactly into spillover, polarisation, illumination and phase.

Depends on: errors, sizing.solver, theory.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fabgen.errors import NumericalError
from fabgen.sizing.solver import Complex, Pattern, Real
from fabgen.theory.dish import half_angle_deg

THETA_POINTS = 28
PHI_POINTS = 10
CUT_STEP_DEG = 1.0
Cut = tuple[Real, Real, Real]


@dataclass(frozen=True)
class DishFigures:
    """Efficiencies (0 to 1), the axial phase centre in mm above the origin, and the radiated power integral."""

    aperture_efficiency: float
    illumination_efficiency: float
    phase_efficiency: float
    polarisation_efficiency: float
    spillover: float
    phase_centre_mm: float
    power: float


@dataclass(frozen=True)
class Beam:
    """Shape of the beam: full half-power widths, directivity on the axis, axis against the opposite direction."""

    half_power_e_deg: float
    half_power_h_deg: float
    directivity_dbi: float
    front_to_back_db: float


@dataclass(frozen=True)
class _Grid:
    """Tensor grid: Gauss-Legendre in theta (weights include nothing else), equal steps in phi."""

    theta: Real
    weight: Real
    phi: Real
    e_theta: Complex
    e_phi: Complex

    @property
    def phi_step(self) -> float:
        return 2 * math.pi / PHI_POINTS

    @property
    def intensity(self) -> Real:
        power: Real = np.abs(self.e_theta) ** 2 + np.abs(self.e_phi) ** 2
        return power

    def integral(self, values: Complex | Real) -> complex:
        """Integral over the grid of ``values`` dtheta dphi."""
        return complex(np.sum(values * self.weight) * self.phi_step)


def half_angle_rad(focal_ratio: float) -> float:
    """Half angle of the dish seen from the focus, radians: 2 atan(1 / (4 f/D)). ``focal_ratio`` above 0."""
    return math.radians(half_angle_deg(focal_ratio))


def co_cross(e_theta: Complex, e_phi: Complex, phi_rad: Real) -> tuple[Complex, Complex]:
    """Co- and cross-polar parts after Ludwig's third definition for a feed polarised along y.

    co = E_theta sin(phi) + E_phi cos(phi), cross = E_theta cos(phi) - E_phi sin(phi).
    A. C. Ludwig, IEEE Trans. AP-21 (1973) 116. Known from memory.
    """
    sine, cosine = np.sin(phi_rad), np.cos(phi_rad)
    return e_theta * sine + e_phi * cosine, e_theta * cosine - e_phi * sine


def _azimuths() -> Real:
    """Angles over the half y > 0, half a step off its ends, where single nulls would count double."""
    return math.pi * (np.arange(PHI_POINTS) + 0.5) / PHI_POINTS


def _sample(pattern: Pattern, start_rad: float, stop_rad: float) -> _Grid:
    node, weight = np.polynomial.legendre.leggauss(THETA_POINTS)
    half = (stop_rad - start_rad) / 2
    theta = (start_rad + half * (node + 1))[:, None]
    phi = _azimuths()[None, :]
    grid_theta, grid_phi = np.broadcast_arrays(theta, phi)
    e_theta, e_phi = pattern(np.ascontiguousarray(grid_theta), np.ascontiguousarray(grid_phi))
    if not (np.all(np.isfinite(e_theta)) and np.all(np.isfinite(e_phi))):
        raise NumericalError("the far field holds values that are not finite; the solve behind it failed")
    return _Grid(theta, (weight * half)[:, None], grid_phi, e_theta, e_phi)


@dataclass(frozen=True)
class DishSample:
    """A pattern sampled once: on the dish and past its edge (``half_angle`` in radians)."""

    half_angle: float
    inside: _Grid
    outside: _Grid


def sample_pattern(pattern: Pattern, half_angle: float) -> DishSample:
    """Sample a pattern for a dish of ``half_angle`` (radians, above 0, below pi).

    Raises ``NumericalError`` for values that are not finite.
    """
    return DishSample(half_angle, _sample(pattern, 0.0, half_angle), _sample(pattern, half_angle, math.pi))


def dish_figures(sample: DishSample, wavelength_mm: float) -> DishFigures:
    """Efficiencies of the dish with the feed's phase centre put in the focus.

    Raises ``NumericalError`` for a pattern without power.
    """
    half_angle, inside, outside = sample.half_angle, sample.inside, sample.outside
    power_in = inside.integral(inside.intensity * np.sin(inside.theta)).real
    power = power_in + outside.integral(outside.intensity * np.sin(outside.theta)).real
    if not power > 0:
        raise NumericalError("the pattern radiates no power; the solve behind it failed")
    co, _ = co_cross(inside.e_theta, inside.e_phi, inside.phi)
    centre = _phase_centre(co, inside, wavelength_mm)
    turn = np.exp(-2j * math.pi * centre / wavelength_mm * np.cos(inside.theta))
    tangent = np.tan(inside.theta / 2)
    coherent = abs(inside.integral(co * turn * tangent)) ** 2
    amplitude = inside.integral(np.abs(co) * tangent).real ** 2
    power_co = inside.integral(np.abs(co) ** 2 * np.sin(inside.theta)).real
    return DishFigures(
        aperture_efficiency=coherent / (math.pi * math.tan(half_angle / 2) ** 2 * power),
        illumination_efficiency=amplitude / (math.pi * math.tan(half_angle / 2) ** 2 * power_co),
        phase_efficiency=coherent / amplitude,
        polarisation_efficiency=power_co / power_in,
        spillover=1 - power_in / power,
        phase_centre_mm=centre,
        power=power,
    )


def _phase_centre(co: Complex, grid: _Grid, wavelength_mm: float) -> float:
    """Least squares of phase = a + k z cos(theta) over the dish, weighted by what each ring adds to the axis."""
    weight = np.abs(co) * np.tan(grid.theta / 2) * grid.weight
    reference = np.sum(co[0])
    # Neighbouring rings differ by far less than half a turn, so unwrapping along theta is safe.
    phase = np.unwrap(np.angle(co / reference), axis=0)
    phase -= 2 * math.pi * np.round(phase[0:1] / (2 * math.pi))
    cosine = np.broadcast_to(np.cos(grid.theta), phase.shape)
    mean_c, mean_p = np.average(cosine, weights=weight), np.average(phase, weights=weight)
    spread = np.average((cosine - mean_c) ** 2, weights=weight)
    slope = np.average((cosine - mean_c) * (phase - mean_p), weights=weight) / spread
    return float(slope * wavelength_mm / (2 * math.pi))


def edge_taper_db(pattern: Pattern, half_angle: float) -> float:
    """Illumination of the dish's edge against its vertex in dB (negative): co-polar pattern averaged over the
    edge, with the space attenuation cos^4(T/2)."""
    phi = _azimuths()
    edge, _ = co_cross(*pattern(np.full(phi.shape, half_angle), phi), phi)
    axis, _ = co_cross(*pattern(np.zeros(phi.shape), phi), phi)
    ratio = float(np.mean(np.abs(edge) ** 2) / np.mean(np.abs(axis) ** 2))
    return 10 * math.log10(max(ratio, 1e-30)) + 40 * math.log10(math.cos(half_angle / 2))


def cut_angles(step_deg: float = CUT_STEP_DEG) -> Real:
    """The angles of a plane cut, -180 to 180 degrees."""
    count = round(360 / step_deg) + 1
    return np.linspace(-180.0, 180.0, count)


def plane_cut(pattern: Pattern, phi_deg: float, step_deg: float = CUT_STEP_DEG) -> Cut:
    """A cut through the axis in the plane of ``phi_deg``: (angle in degrees, |co|^2, |cross|^2)."""
    angle = cut_angles(step_deg)
    phi = np.where(angle < 0, math.radians(phi_deg) + math.pi, math.radians(phi_deg))
    co, cross = co_cross(*pattern(np.radians(np.abs(angle)), phi), phi)
    return angle, np.abs(co) ** 2, np.abs(cross) ** 2


def half_power_width_deg(angle_deg: Real, power: Real) -> float:
    """Full width between the half-power points on either side of the axis, by interpolation in dB.

    360 where the cut never falls to half of the axial power.
    """
    level = 10 * np.log10(np.maximum(power, 1e-300))
    middle = int(np.argmin(np.abs(angle_deg)))
    wanted = level[middle] - 10 * math.log10(2)
    width = 0.0
    for side in (1, -1):
        index = middle
        while 0 <= index + side < len(level) and level[index] > wanted:
            index += side
        if level[index] > wanted:
            return 360.0
        before = index - side
        share = (level[before] - wanted) / (level[before] - level[index])
        width += abs(angle_deg[before] + share * (angle_deg[index] - angle_deg[before]))
    return float(width)


def beam(pattern: Pattern, power: float, cuts: tuple[Cut, Cut] | None = None) -> Beam:
    """Widths in both planes, axial directivity 4 pi U / P, and front-to-back ratio. ``power``: the integral of
    |E|^2 over the sphere, as ``dish_figures`` returns it. ``cuts``: E- and H-plane where they are known already."""
    (angle, e_plane, _), (_, h_plane, _) = cuts or (plane_cut(pattern, 90.0), plane_cut(pattern, 0.0))
    middle = len(angle) // 2
    phi = np.zeros(1)
    back_theta, back_phi = pattern(np.full(1, math.pi), phi)
    back = float(np.abs(back_theta[0]) ** 2 + np.abs(back_phi[0]) ** 2)
    front = float(e_plane[middle])
    if not front > 0:
        raise NumericalError("the pattern has no co-polar field on the axis; the feed is not excited along y")
    return Beam(
        half_power_e_deg=half_power_width_deg(angle, e_plane),
        half_power_h_deg=half_power_width_deg(angle, h_plane),
        directivity_dbi=10 * math.log10(4 * math.pi * front / power),
        front_to_back_db=10 * math.log10(front / max(back, 1e-30 * front)),
    )


def ring_power(grid: _Grid) -> tuple[Real, Real]:
    """Angles of the grid's rings and the power in each, weights and sin(theta) included; their sum is the integral
    of |E|^2 over the zone."""
    rings = np.sum(grid.intensity, axis=1) * grid.phi_step * (np.sin(grid.theta) * grid.weight)[:, 0]
    return grid.theta[:, 0], rings
