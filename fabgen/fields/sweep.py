"""Frequency sweep by rational interpolation with few solves.

Impedance and field of a feed are real-rational in j omega to good accuracy, so every sample at +f gives one at -f
(the conjugate), and the impedance of the grounded feed is zero at f = 0. A barycentric rational function in
s = j f is fitted to all samples at once, with one set of poles for all quantities; where the fit with the newest
sample and the fit without it differ most, the next solve is made.

Source of the fit: Y. Nakatsukasa, O. Sete, L. N. Trefethen, "The AAA algorithm for rational approximation",
SIAM J. Sci. Comput. 40 (2018) A1494-A1522.

Depends on: errors.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fabgen.errors import NumericalError

ComplexArray = NDArray[np.complex128]
FloatArray = NDArray[np.float64]


SUPPORT_SHARE = 0.8
"""Share of the samples that may become support points."""


@dataclass(frozen=True)
class RationalFit:
    """Barycentric rational functions with common support points s = j f (n,), weights (n,), values (n, q)."""

    support: ComplexArray
    weights: ComplexArray
    values: ComplexArray

    def __call__(self, frequency: FloatArray) -> ComplexArray:
        """Values (m, q) at frequencies (m,)."""
        s = 1j * np.asarray(frequency, dtype=float)
        difference = s[:, None] - self.support[None, :]
        hit = np.abs(difference) < 1e-12 * np.abs(self.support).max()
        difference[hit] = 1.0
        c = self.weights / difference
        out = np.asarray((c @ self.values) / c.sum(1)[:, None])
        rows, cols = np.nonzero(hit)
        out[rows] = self.values[cols]
        return out


def fit_rational(frequency: FloatArray, values: ComplexArray, tolerance: float = 1e-9) -> RationalFit:
    """Fit samples (m,), (m, q) and their mirror images by one common set of poles.

    Support points are chosen greedily where the fit is worst, until the relative error is below ``tolerance`` or
    there are too few other samples to find the weights from. The more quantities, the more poles can be told.
    """
    s = 1j * np.concatenate([-frequency[::-1], frequency])
    data = np.concatenate([values[::-1].conj(), values])
    zero = frequency == 0
    if zero.any():
        keep = np.concatenate([~zero[::-1], np.ones(len(frequency), dtype=bool)])
        s, data = s[keep], data[keep]
    scale = np.abs(data).max(0)
    data = data / scale
    chosen: list[int] = []
    fit = np.broadcast_to(data.mean(0), data.shape)
    best: RationalFit | None = None
    while len(chosen) <= min(SUPPORT_SHARE * len(s), data.shape[1] * (len(s) - len(chosen) - 2) - 2):
        error = np.abs(data - fit).max(1)
        error[chosen] = -1.0
        worst = int(np.argmax(error))
        if best is not None and error[worst] < tolerance:
            break
        mirror = len(s) - 1 - worst
        chosen += [worst] if mirror == worst else sorted((worst, mirror))
        best, fit = _barycentric(s, data, chosen)
    if best is None:
        raise NumericalError("a sweep needs at least two samples")
    return RationalFit(best.support, best.weights, best.values * scale)


def _barycentric(s: ComplexArray, data: ComplexArray, chosen: list[int]) -> tuple[RationalFit, ComplexArray]:
    rest = np.setdiff1d(np.arange(len(s)), chosen)
    cauchy = 1.0 / (s[rest][:, None] - s[chosen][None, :])
    loewner = np.concatenate(
        [cauchy * (data[rest, q][:, None] - data[chosen, q][None, :]) for q in range(data.shape[1])]
    )
    _, _, right = np.linalg.svd(loewner, full_matrices=False)
    weights = right[-1].conj()
    found = RationalFit(s[chosen], weights, data[chosen])
    fit = data.copy()
    fit[rest] = (cauchy * weights) @ data[chosen] / (cauchy @ weights)[:, None]
    return found, fit


@dataclass(frozen=True)
class SweepResult:
    """Samples (m,), (m, q), the fit through them, the estimated error and the number of solves."""

    frequency: FloatArray
    values: ComplexArray
    fit: RationalFit
    error_estimate: float
    solves: int


def adaptive_sweep(
    sample: Callable[[float], tuple[FloatArray, ComplexArray]],
    start: float,
    stop: float,
    measure: Callable[[FloatArray, ComplexArray], ComplexArray],
    target: float | None = None,
    tolerance: float = 4e-3,
    most: int = 15,
    first: int = 7,
) -> SweepResult:
    """Solve where it is needed until the fit is good.

    ``sample(f)`` makes one full solve and gives frequencies (p,) and quantities (p, q) at and near f, the first of
    which is the impedance, all with the same poles; ``measure`` turns frequencies and quantities into what the
    tolerance is stated for (reflection). The error estimate is the largest change of ``measure`` on a fine grid when
    the newest sample is added; a change below ``tolerance`` ends the sweep, as does the number of solves ``most``.
    """
    centres = list(np.linspace(start, stop, first))
    if target is not None:
        centres[int(np.argmin(np.abs(np.array(centres) - target)))] = target
    samples = [sample(float(f)) for f in centres]
    dense = np.linspace(start, stop, 801)
    previous = measure(dense, _fit(samples[:-1])(dense))
    while True:
        fit = _fit(samples)
        current = measure(dense, fit(dense))
        change = np.abs(current - previous)
        if change.max() < tolerance or len(centres) >= most:
            break
        centres.append(_next_frequency(dense, change, centres))
        samples.append(sample(centres[-1]))
        previous = current
    frequency, values = _sorted(samples)
    return SweepResult(frequency, values, fit, float(change.max()), len(centres))


def _next_frequency(dense: FloatArray, change: FloatArray, centres: list[float]) -> float:
    """Where the fit changed most, held off the known samples; ties go to the widest hole."""
    distance = np.abs(dense[:, None] - np.array(centres)[None, :]).min(1)
    spread = distance / distance.max()
    weight = change * spread
    return float(dense[int(np.argmax(weight / max(weight.max(), 1e-300) + 0.3 * spread))])


def _sorted(samples: list[tuple[FloatArray, ComplexArray]]) -> tuple[FloatArray, ComplexArray]:
    frequency = np.concatenate([f for f, _ in samples])
    values = np.concatenate([v for _, v in samples])
    order = np.argsort(frequency)
    return frequency[order], values[order]


def _fit(samples: list[tuple[FloatArray, ComplexArray]]) -> RationalFit:
    frequency, values = _sorted(samples)
    # the grounded feed is a short at zero frequency
    return fit_rational(
        np.concatenate([[0.0], frequency]), np.concatenate([np.zeros((1, values.shape[1])), values]), 1e-6
    )
