"""Values that mutation testing found no test to hold: each against a handbook or another calculation."""

from __future__ import annotations

import cmath
import math

import pytest

from fabgen.errors import JobError
from fabgen.theory import dish, ring, skin, waveguide


def test_a_dish_that_looks_at_itself_has_no_focal_ratio() -> None:
    # the rim's half angle nears 180 degrees only for f/D of 0
    assert dish.focal_ratio(179.9) == pytest.approx(0.25 / math.tan(math.radians(89.95)))
    for angle in (180.0, 190.0):
        with pytest.raises(JobError, match="half_angle_deg"):
            dish.focal_ratio(angle)
        with pytest.raises(JobError, match="theta_deg"):
            dish.space_attenuation_db(angle)


def test_space_attenuation_near_the_axis() -> None:
    # the way to the vertex is the reference; cos^4(t/2) falls by t^2/2 for small t, in dB 4.343 t^2/2
    assert dish.space_attenuation_db(0) == 0
    assert dish.space_attenuation_db(0.5) == pytest.approx(-4.3429 * math.radians(0.5) ** 2 / 2, rel=1e-4)


def test_a_strip_bends_over_its_thickness() -> None:
    # b t^3/12 and b t^2/6, the second moment and modulus of a rectangle (any handbook)
    section = ring.strip_section(8, 1.5)
    assert section.bending_mm4 == pytest.approx(2.25)
    assert section.bending_modulus_mm3 == pytest.approx(3.0)
    assert (section.area_mm2, section.perimeter_mm) == pytest.approx((12.0, 19.0))
    # a thin strip's torsion modulus, b t^2/3 (Roark)
    assert ring.strip_section(300, 1).torsion_modulus_mm3 == pytest.approx(100, rel=3e-3)


def test_weight_of_a_metre_of_wire() -> None:
    # trade tables: 4 mm copper wire weighs 0.112 kg/m (12.57 mm2 at 8.93 g/cm3)
    assert ring.weight_newton_per_mm(ring.round_section(4), 8930) * 1000 / 9.80665 == pytest.approx(0.1122, abs=1e-4)


def test_stress_at_the_clamped_ends_and_at_the_feet() -> None:
    # Cutting the ring at its clamped ends leaves the moment about the diameter through them and the torque about the
    # tangent: both from statics of the half ring with the moment m0 at the symmetry plane. Here the resultants are
    # summed over 20,000 point loads. Von Mises: sqrt(sigma^2 + 3 tau^2).
    radius, w, youngs = 33.6, 0.01, 120.0
    wire = ring.round_section(4)
    e_i = youngs * wire.bending_mm4
    g_j = youngs / (2 * (1 + ring.POISSON)) * wire.torsion_mm4
    m0 = (1 / e_i - 1 / g_j) / (1 / e_i + 1 / g_j)
    step = math.pi / 20_000
    angles = [(i + 0.5) * step for i in range(20_000)]
    # theta runs from the symmetry plane to the clamp at pi; arms to the clamp's two axes
    bending = sum(w * radius * step * radius * math.sin(math.pi - t) for t in angles)
    twist = sum(w * radius * step * radius * (1 - math.cos(math.pi - t)) for t in angles)
    bending += m0 * w * radius**2 * math.cos(math.pi)
    twist += m0 * w * radius**2 * math.sin(math.pi)
    sigma, tau = bending / wire.bending_modulus_mm3, twist / wire.torsion_modulus_mm3
    stiff = ring.ring_load(radius, 20, wire, ring.round_section(1000), youngs, w)
    assert stiff.stress_mpa == pytest.approx(math.sqrt(sigma**2 + 3 * tau**2), rel=1e-6)
    # thin posts: the whole weight 2 pi R w at the arm R, on two feet
    thin = ring.round_section(0.5)
    foot = 2 * math.pi * radius * w * radius / 2 / thin.bending_modulus_mm3
    assert ring.ring_load(radius, 20, wire, thin, youngs, w).stress_mpa == pytest.approx(foot)


def test_the_own_resonance_lies_in_the_middle() -> None:
    # Rayleigh: between 1.0 (mass on a spring) and 1.545 (uniform cantilever); the stated 1.3 is within 15 % of both
    low = math.sqrt(9.80665e3 / 0.2) / (2 * math.pi)
    assert ring.own_resonance_hz(0.2) / low == pytest.approx(math.sqrt(1.3), rel=1e-4)


@pytest.mark.parametrize("thickness_mm", [1e-5, 1e-4, 1e-3, 5e-3])
def test_loss_through_a_layer_by_its_reflections(thickness_mm: float) -> None:
    # Sum of the partial waves that bounce inside the layer (Airy), with the complex wave number of copper:
    # t = t12 t21 p / (1 - r^2 p^2). Independent of the line-section form; constants CODATA (from memory).
    omega, mu, sigma = 2 * math.pi * 1.42e9, 4e-7 * math.pi, 5.8e7
    wave = cmath.sqrt(1j * omega * mu * sigma)
    inside, outside = 1j * omega * mu / wave, 376.730
    r = (outside - inside) / (outside + inside)
    there, back = 2 * inside / (inside + outside), 2 * outside / (inside + outside)
    p = cmath.exp(-wave * thickness_mm / 1e3)
    passed = there * back * p / (1 - r * r * p * p)
    assert skin.through_loss_db(1420, thickness_mm, sigma) == pytest.approx(-20 * math.log10(abs(passed)), rel=2e-4)


def test_decay_near_cutoff() -> None:
    # kc^2 = k^2 + decay^2 (Pozar, section 3.4), away from the limit of low frequency
    bore, frequency = 100.0, 1500.0
    kc, k = 2 * 1.841184 / bore, 2 * math.pi * frequency / 299_792.458
    assert waveguide.decay_per_mm("TE11", bore, frequency) == pytest.approx(math.sqrt(kc**2 - k**2), rel=1e-5)
