"""The ring on two posts against integration of the curved beam and beam limits."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fabgen.errors import JobError
from fabgen.theory import ring


def test_sections() -> None:
    # Handbook second moments: pi d^4/64, b t^3/12; torsion of a thin strip b t^3/3, of a square 0.1406 b^4 (Roark).
    assert ring.round_section(2).bending_mm4 == pytest.approx(math.pi / 4)
    assert ring.strip_section(100, 1).torsion_mm4 == pytest.approx(100 / 3, rel=0.01)
    assert ring.strip_section(3, 3).torsion_mm4 == pytest.approx(0.1406 * 81, rel=0.13)
    with pytest.raises(JobError, match="diameter_mm"):
        ring.round_section(0)


def test_ring_against_a_frame_of_many_straight_beams() -> None:
    # Independent: the half ring as 400 short beams, out-of-plane stiffness by the unit-load method on the
    # discretised arc, with the symmetry moment found from the zero rotation numerically.
    radius, d, youngs, w = 33.6, 4.0, 120.0, 1e-3
    section = ring.round_section(d)
    theta = (np.arange(20_000) + 0.5) * math.pi / 20_000
    step = math.pi / 20_000
    e_i = youngs * 1e3 * section.bending_mm4
    g_j = youngs * 1e3 / (2 * (1 + ring.POISSON)) * section.torsion_mm4
    # Loads between 0 and theta summed as point loads, not by the closed integrals of the module.
    arm_bend = np.concatenate([[0.0], np.cumsum(np.sin(theta))[:-1]]) * step
    arm_twist = np.concatenate([[0.0], np.cumsum(1 - np.cos(theta))[:-1]]) * step
    bend_w, twist_w = w * radius**2 * arm_bend, w * radius**2 * arm_twist
    flexibility = np.sum(np.cos(theta) ** 2 / e_i + np.sin(theta) ** 2 / g_j)
    m0 = -np.sum(bend_w * np.cos(theta) / e_i + twist_w * np.sin(theta) / g_j) / flexibility
    bend, twist = bend_w + m0 * np.cos(theta), twist_w + m0 * np.sin(theta)
    sag = radius**2 * step * np.sum(bend * np.sin(theta) / e_i + twist * (1 - np.cos(theta)) / g_j)
    stiff_post = ring.round_section(1000)
    assert ring.ring_load(radius, 20, section, stiff_post, youngs, w).sag_mm == pytest.approx(float(sag), rel=1e-3)


def test_posts_add_their_turn() -> None:
    # Two posts share the moment W R: each turns by M L/(E I) = (2 pi R w R / 2) L / (E I), far side at 2 R.
    section = ring.round_section(4)
    stiff = ring.ring_load(30, 20, section, ring.round_section(1000), 120, 1e-3).sag_mm
    soft = ring.ring_load(30, 20, section, section, 120, 1e-3).sag_mm
    turn = math.pi * 30 * 1e-3 * 30 * 20 / (120e3 * section.bending_mm4)
    assert soft - stiff == pytest.approx(turn * 60, rel=1e-6)


def test_scaling_and_weight() -> None:
    # Sag goes with w R^4 / d^4: a wire twice as thick under its own weight sags a quarter.
    thin, thick = ring.round_section(2), ring.round_section(4)
    sags = [
        ring.ring_load(30, 20, s, s, 120, ring.weight_newton_per_mm(s, 8930)).sag_mm for s in (thin, thick)
    ]
    assert sags[0] / sags[1] == pytest.approx(4)
    # 1 mm of ice on 2 mm wire: area pi (2^2 - 1^2) mm2 at 917 kg/m3.
    ice = ring.weight_newton_per_mm(thin, 8930, 1.0) - ring.weight_newton_per_mm(thin, 8930)
    assert ice == pytest.approx(math.pi * 3 * 917e-9 * 9.80665)


def test_resonance_lies_between_mass_and_cantilever() -> None:
    # Mass on a spring: sqrt(g/sag)/2 pi; uniform cantilever: sqrt(1.545 g/sag)/2 pi (first mode 3.516, handbook).
    low = math.sqrt(9806.65 / 0.1) / (2 * math.pi)
    assert low < ring.own_resonance_hz(0.1) < low * math.sqrt(1.545)
