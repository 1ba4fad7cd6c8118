"""Stiffness of a ring that two posts hold at its gap: sag, own resonance, stress.

        z  ^   ring, radius R, weight w per length        far side
           |   ========================================== sags by delta
           |   ||
           |   || post, length L, clamped at the floor
        ---+---++-----------------------> x

Each half of the ring is a curved beam clamped at its post. By symmetry the far section carries a bending moment
M0 but neither shear nor torsion, and does not turn about x. Castigliano's theorem gives

    M0    = w R^2 (1/EI - 1/GJ) / (1/EI + 1/GJ)
    delta = w R^4 (2/EI + (pi^2/2 + 2 m0)/GJ) + 2 pi w R^3 L / EI_post,  m0 = M0/(w R^2)

R. J. Roark, Formulas for Stress and Strain, has the curved cantilever without M0. Small deflection, elastic.

Depends on: errors, theory.limits.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from fabgen.theory.limits import require_positive

GRAVITY_M_PER_S2 = 9.80665
POISSON = 0.34
"""Poisson's ratio of copper, brass and aluminium, 0.33 to 0.35; handbook, from memory."""
ICE_KG_PER_M3 = 917.0


@dataclass(frozen=True)
class Section:
    """A conductor's cross-section in mm: area, perimeter; for bending out of the ring's plane second moment and
    section modulus; for torsion constant and modulus."""

    area_mm2: float
    perimeter_mm: float
    bending_mm4: float
    bending_modulus_mm3: float
    torsion_mm4: float
    torsion_modulus_mm3: float


def round_section(diameter_mm: float) -> Section:
    """A round wire."""
    require_positive(diameter_mm=diameter_mm)
    d = diameter_mm
    return Section(
        math.pi * d**2 / 4, math.pi * d, math.pi * d**4 / 64, math.pi * d**3 / 32, math.pi * d**4 / 32,
        math.pi * d**3 / 16,
    )  # fmt: skip


def strip_section(width_mm: float, thickness_mm: float) -> Section:
    """A strip that bends over its thickness. Torsion b t^3/3 (1 - 0.63 t/b), Roark; for b of t and more."""
    require_positive(width_mm=width_mm, thickness_mm=thickness_mm)
    b, t = width_mm, thickness_mm
    torsion = b * t**3 / 3 * (1 - 0.63 * t / max(b, t))
    return Section(b * t, 2 * (b + t), b * t**3 / 12, b * t**2 / 6, torsion, torsion / t)


@dataclass(frozen=True)
class RingLoad:
    """What a ring on posts does under a load of ``w`` per length across its plane, mm and MPa."""

    sag_mm: float
    stress_mpa: float


def ring_load(
    radius_mm: float, post_mm: float, ring: Section, post: Section, youngs_gpa: float, newton_per_mm: float
) -> RingLoad:
    """Sag of the far side and the largest stress, under a weight per length of the ring across its plane.

    Stress: at the ring's clamped ends sqrt(sigma^2 + 3 tau^2) of M = w R^2 (2 - m0) and T = pi w R^2; at the
    posts' feet the ring's weight at the arm R, shared by two."""
    require_positive(radius_mm=radius_mm, post_mm=post_mm, youngs_gpa=youngs_gpa)
    youngs, w, r = youngs_gpa * 1e3, newton_per_mm, radius_mm
    bend = youngs * ring.bending_mm4
    twist = youngs / (2 * (1 + POISSON)) * ring.torsion_mm4
    m0 = (1 / bend - 1 / twist) / (1 / bend + 1 / twist)
    curved = w * r**4 * (2 / bend + (math.pi**2 / 2 + 2 * m0) / twist)
    posts = 2 * math.pi * w * r**3 * post_mm / (youngs * post.bending_mm4)
    sigma = w * r**2 * (2 - m0) / ring.bending_modulus_mm3
    tau = math.pi * w * r**2 / ring.torsion_modulus_mm3
    foot = math.pi * w * r**2 / post.bending_modulus_mm3
    return RingLoad(curved + posts, max(math.sqrt(sigma**2 + 3 * tau**2), foot))


def weight_newton_per_mm(section: Section, density_kg_per_m3: float, ice_mm: float = 0.0) -> float:
    """Weight per length at one g, with a coat of ice of that thickness."""
    metal = section.area_mm2 * density_kg_per_m3
    ice = (section.perimeter_mm * ice_mm + math.pi * ice_mm**2) * ICE_KG_PER_M3
    return (metal + ice) * 1e-9 * GRAVITY_M_PER_S2


def own_resonance_hz(sag_mm: float) -> float:
    """Lowest own resonance from the sag under one g: sqrt(1.3 g / sag) / (2 pi), Hz.

    1.3 lies between a mass on a spring (1.0) and a uniform cantilever (1.545, by its first mode); within 15 %."""
    require_positive(sag_mm=sag_mm)
    return math.sqrt(1.3 * GRAVITY_M_PER_S2 * 1e3 / sag_mm) / (2 * math.pi)
