"""Factors of complex symmetric matrices against LAPACK's general ones and against numpy's norms."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.linalg import lu_factor, lu_solve

from fabgen.errors import NumericalError
from fabgen.fields.factors import BLOCK, SymmetricFactors, less_product


def symmetric(size: int, seed: int) -> NDArray[np.complex128]:
    """Random entries that grow towards the diagonal, as those of an impedance matrix do."""
    rng = np.random.default_rng(seed)
    matrix = rng.normal(size=(size, size)) + 1j * rng.normal(size=(size, size))
    distance = np.abs(np.arange(size)[:, None] - np.arange(size)[None, :])
    matrix /= 1 + distance
    return np.asarray(matrix + matrix.T + 4 * np.eye(size))


@pytest.mark.parametrize("size", [1, 7, BLOCK - 1, BLOCK, BLOCK + 1, 3 * BLOCK + 11])
def test_solution_against_lapack(size: int) -> None:
    matrix = symmetric(size, size)
    right = np.random.default_rng(1).normal(size=size)
    expected = lu_solve(lu_factor(matrix), right)
    found = SymmetricFactors(matrix - np.triu(matrix, BLOCK)).solve(right)  # above the blocks nothing is read
    np.testing.assert_allclose(found, expected, rtol=0, atol=1e-10 * np.abs(expected).max())


def test_block_elimination_against_the_plain_product() -> None:
    inner, border = symmetric(2 * BLOCK + 5, 2), np.random.default_rng(3).normal(size=(2 * BLOCK + 5, 90)) + 0j
    outer = symmetric(90, 4)
    expected = outer - border.T @ np.linalg.solve(inner, border)
    found = less_product(outer.copy(), *SymmetricFactors(inner.copy()).halfway(border))
    np.testing.assert_allclose(found, expected, rtol=0, atol=1e-10 * np.abs(expected).max())
    np.testing.assert_allclose(found, found.T, rtol=0, atol=1e-12 * np.abs(expected).max())


def test_single_precision_is_enough_to_start_from() -> None:
    matrix, right = symmetric(2 * BLOCK + 3, 6), np.ones(2 * BLOCK + 3)
    factors = SymmetricFactors(matrix.astype(np.complex64))
    x = factors.solve(right)
    assert x.dtype == np.complex64
    x = x.astype(np.complex128)
    for _ in range(10):
        x = x + factors.solve(right - matrix @ x)
    np.testing.assert_allclose(x, np.linalg.solve(matrix, right), rtol=0, atol=1e-10 * np.abs(x).max())


def test_norm_of_the_inverse_is_found_within_a_factor_of_three() -> None:
    """Hager's estimate is a lower bound, seldom under a third of the true norm (Hager 1984)."""
    for seed in range(8):
        matrix = symmetric(200, seed)
        true = np.linalg.norm(np.linalg.inv(matrix), 1)
        found = SymmetricFactors(matrix.copy()).inverse_norm()
        assert true / 3 < found < true * (1 + 1e-9)


def test_results_do_not_depend_on_the_run() -> None:
    matrix, right = symmetric(500, 9), np.ones(500)
    first, second = (SymmetricFactors(matrix.copy()).solve(right) for _ in range(2))
    assert first.tobytes() == second.tobytes()


def test_singular_matrix_is_refused() -> None:
    with pytest.raises(NumericalError, match="singular"):
        SymmetricFactors(np.zeros((5, 5), dtype=complex))
