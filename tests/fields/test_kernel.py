"""Quadrature and the analytic potentials."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import dblquad

from fabgen.errors import GeometryError
from fabgen.fields import kernel
from fabgen.fields.quadrature import triangle_rule

TRIANGLE = np.array([[0.0, 0.0, 0.0], [1.0, 0.1, 0.0], [0.2, 0.8, 0.0]])


@pytest.mark.parametrize(("points", "degree"), [(1, 1), (3, 2), (6, 4), (12, 6)])
def test_rule_is_exact_to_its_degree(points: int, degree: int) -> None:
    # integral of x^i y^j over the unit triangle: i! j! / (i + j + 2)! (Abramowitz and Stegun, beta function)
    bary, weight = triangle_rule(points)
    for i in range(degree + 1):
        for j in range(degree + 1 - i):
            value = 0.5 * float(weight @ (bary[:, 1] ** i * bary[:, 2] ** j))
            exact = math.factorial(i) * math.factorial(j) / math.factorial(i + j + 2)
            assert value == pytest.approx(exact, abs=1e-13)


def test_rule_of_other_size_is_refused() -> None:
    with pytest.raises(GeometryError, match="allowed are 1, 3, 6 and 12"):
        triangle_rule(5)


@pytest.mark.parametrize("point", [(0.4, 0.3, 0.5), (1.4, 0.9, -0.2), (0.4, 0.3, 0.05), (2.0, 0.2, 0.0)])
def test_potential_integrals_against_adaptive_quadrature(point: tuple[float, float, float]) -> None:
    # reference: scipy's adaptive double integral over the triangle in barycentric coordinates
    a, b, c = TRIANGLE
    area2 = float(np.linalg.norm(np.cross(b - a, c - a)))

    def integrand(v: float, u: float, component: int) -> float:
        r = a + u * (b - a) + v * (c - a)
        distance = float(np.linalg.norm(r - point))
        return area2 * (1.0 if component < 0 else r[component]) / distance

    out = np.zeros(4)
    kernel.potential_integrals(*point, TRIANGLE, out)
    for row, component in enumerate((-1, 0, 1, 2)):
        exact, _ = dblquad(integrand, 0, 1, 0, lambda u: 1 - u, args=(component,), epsabs=1e-9, epsrel=1e-9)
        assert out[row] == pytest.approx(exact, abs=2e-7)


def test_potential_on_the_triangle_itself_is_finite_and_known() -> None:
    # centre of an equilateral triangle of side s: integral of 1/R = s sqrt(3) ln(2 + sqrt(3)) (from memory,
    # three times the wedge formula rho ln((1 + sin a)/(1 - sin a)) with a = 60 degrees)
    side = 2.0
    v = np.array([[0, 0, 0], [side, 0, 0], [side / 2, side * math.sqrt(3) / 2, 0.0]])
    out = np.zeros(4)
    kernel.potential_integrals(*v.mean(0), v, out)
    rho = side / (2 * math.sqrt(3))
    expected = 3 * rho * math.log((1 + math.sin(math.pi / 3)) / (1 - math.sin(math.pi / 3)))
    assert out[0] == pytest.approx(expected, rel=1e-12)


def test_kernel_values_against_numpy() -> None:
    for offset in np.random.default_rng(3).random((64, 3)) * 4:
        r = float(np.linalg.norm(offset))
        exact = 0.7 * np.exp(-1j * 37.0 * r) / (4 * np.pi * r)
        assert abs(complex(*kernel._green(*offset, 0.7, 37.0)) - exact) < 2e-10


@pytest.mark.parametrize("count", [1, 3, 6, 12])
def test_far_moments_against_the_plain_sum(count: int) -> None:
    rng = np.random.default_rng(count)
    bary, weight = triangle_rule(count)
    test = np.ascontiguousarray((bary @ rng.random((3, 3))).T[:, :, None])
    source = bary @ (rng.random((kernel.BLOCK, 3, 3)) + 2)
    buffer = np.zeros(kernel.ROWS * kernel.BLOCK)
    kernel._far_moments(0, 0, 5.0, test, np.ascontiguousarray(source.transpose(2, 1, 0)), weight, buffer)
    found = buffer.reshape(kernel.ROWS, kernel.BLOCK)[:16:2] + 1j * buffer.reshape(kernel.ROWS, kernel.BLOCK)[1:16:2]
    r = test[:, :, 0].T
    distance = np.linalg.norm(r[None, :, None] - source[:, None], axis=-1)
    g = np.exp(-5j * distance) / (4 * np.pi * distance) * weight[:, None] * weight
    expected = [
        g.sum((1, 2)), *np.einsum("tij,ix->xt", g, r), *np.einsum("tij,tjx->xt", g, source),
        np.einsum("tij,ix,tjx->t", g, r, source),
    ]  # fmt: skip
    np.testing.assert_allclose(found, expected, rtol=0, atol=1e-9)


def test_static_moments_do_not_care_which_triangle_comes_first() -> None:
    bary, weight = triangle_rule(6)
    corners = np.random.default_rng(5).random((2, 3, 3))
    corners[1, 0] = corners[0, 1]  # neighbours at a corner
    area = 0.5 * np.linalg.norm(np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]), axis=1)
    found = np.zeros((2, 8))
    pairs = np.array([0, 1]), np.array([1, 0])
    kernel.static_moments(0, 2, *pairs, corners, corners, bary, weight, area, found)
    np.testing.assert_allclose(found[0], found[1][[0, 4, 5, 6, 1, 2, 3, 7]], rtol=1e-13)
