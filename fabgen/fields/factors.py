"""Factors of a complex symmetric matrix at half the work of a general LU.

    A = L D L^T,   D block diagonal,   L unit block lower triangular

Above the diagonal blocks nothing is read. Column blocks are made one after the other from those before
("left-looking"), so nearly all work is products of large blocks. There are no row exchanges between blocks, inside a
block the inverse makes them: enough for impedance matrices, whose heavy entries lie near the diagonal. Whoever
solves looks at the residual.

The shares of the work are fixed, so results do not depend on the number of processors.

Sources: G. H. Golub, C. F. Van Loan, "Matrix Computations", 4th ed., 4.1 and 4.4 (L D L^T, blocks); W. W. Hager,
"Condition estimates", SIAM J. Sci. Stat. Comput. 5 (1984) 311-316.

Depends on: errors.
"""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from fabgen.errors import NumericalError

ComplexArray = NDArray[Any]
"""Of complex numbers, double or single."""
BLOCK = 160
SHARES = 4
HAGER_TURNS = 5


class SymmetricFactors:
    """Factors of ``matrix`` (n, n), made in its memory, which is lost: L below the diagonal, D L^T above.

    Of double or single precision, as the matrix is; so are solutions. Raises NumericalError where a diagonal block is
    singular.
    """

    def __init__(self, matrix: ComplexArray) -> None:
        self._factors = matrix
        self._blocks = _blocks(len(matrix))
        self._inverse: list[ComplexArray] = []
        try:
            with ThreadPoolExecutor(SHARES) as pool:
                for block in self._blocks:
                    self._factor(block, pool)
        except np.linalg.LinAlgError as error:
            raise NumericalError("the field computation's system is singular; change the sizes a little") from error

    def _factor(self, block: slice, pool: ThreadPoolExecutor) -> None:
        """One column block: subtract what the earlier ones give, invert its diagonal block, scale the rest by it."""
        a, before = self._factors, slice(0, block.start)

        def subtract(rows: slice) -> None:
            if block.start:
                a[rows, block] -= a[rows, before] @ a[before, block]

        def below(rows: slice) -> None:
            subtract(rows)
            a[block, rows] = a[rows, block].T
            a[rows, block] = a[rows, block] @ inverse

        subtract(block)
        inverse: ComplexArray = np.asarray(np.linalg.inv(a[block, block]), dtype=a.dtype)
        self._inverse.append(inverse)
        _in_shares(pool, below, block.stop, len(a))

    def solve(self, right: NDArray[Any]) -> ComplexArray:
        """Solution for one right-hand side (n,)."""
        a, x = self._factors, np.array(right, dtype=self._factors.dtype)
        for block in self._blocks:
            x[block] -= a[block, : block.start] @ x[: block.start]
        for block, inverse in zip(reversed(self._blocks), reversed(self._inverse), strict=True):
            x[block] = inverse @ (x[block] - a[block, block.stop :] @ x[block.stop :])
        return x

    def halfway(self, right: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
        """W = L^-1 B and V = D^-1 W for B (n, m): B^T A^-1 B = W^T V at half the work of A^-1 B."""
        w, v, a = np.array(right, order="C"), np.empty_like(right, order="C"), self._factors

        def columns(share: slice) -> None:
            for block, inverse in zip(self._blocks, self._inverse, strict=True):
                w[block, share] -= a[block, : block.start] @ w[: block.start, share]
                v[block, share] = inverse @ w[block, share]

        with ThreadPoolExecutor(SHARES) as pool:
            _in_shares(pool, columns, 0, right.shape[1])
        return w, v

    def inverse_norm(self) -> float:
        """Estimate from below of the one-norm of the inverse (Hager); the conjugate serves as the adjoint."""
        n = len(self._factors)
        x, best = np.full(n, 1 / n, dtype=np.complex128), 0.0
        for _ in range(HAGER_TURNS):
            y = self.solve(x)
            norm = float(np.abs(y).sum())
            if norm <= best:
                break
            best = norm
            direction = y / np.maximum(np.abs(y), 1e-300)
            z = self.solve(direction.conj()).conj()
            j = int(np.argmax(np.abs(z)))
            if np.abs(z[j]) <= float((z.conj() @ x).real):
                break
            x = np.zeros(n, dtype=np.complex128)
            x[j] = 1.0
        return best


def less_product(matrix: ComplexArray, left: ComplexArray, right: ComplexArray) -> ComplexArray:
    """The symmetric D - W^T V in the memory of D, ``matrix`` (m, m); one half is computed, the other mirrored."""

    def rows(block: slice) -> None:
        # no two blocks write to the same place, mirror images included
        matrix[block, : block.stop] -= left[:, block].T @ right[:, : block.stop]
        matrix[: block.start, block] = matrix[block, : block.start].T

    with ThreadPoolExecutor(SHARES) as pool:
        list(pool.map(rows, _blocks(len(matrix))))
    return matrix


def _blocks(count: int) -> list[slice]:
    return [slice(i, min(i + BLOCK, count)) for i in range(0, count, BLOCK)]


def _in_shares(pool: ThreadPoolExecutor, work: Callable[[slice], None], start: int, stop: int) -> None:
    marks = np.linspace(start, stop, SHARES + 1).astype(int).tolist()
    list(pool.map(work, [slice(a, b) for a, b in pairwise(marks) if b > a]))
