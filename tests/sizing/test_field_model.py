"""The sweep stops at its number of solves, settled or not, and solves nothing twice."""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

from fabgen.sizing.field_model import SWEEP_ERROR, FieldModel
from tests.samples import sample_job, sample_sizes


@pytest.mark.parametrize("unsettled", [False, True])
def test_sweep_makes_at_most_fifteen_solves(monkeypatch: pytest.MonkeyPatch, unsettled: bool) -> None:
    solved: list[float] = []
    noise = np.random.default_rng(4)

    class Solver:
        def solve_pair(self, *values: Any) -> tuple[Any, Any]:
            solved.append(values[1])
            return tuple(SimpleNamespace(frequency_hz=values[1] * x) for x in (1, 1 + values[2]))  # type: ignore

    def quantities(_: Any, solution: Any) -> list[complex]:
        x = solution.frequency_hz / 1.42e9
        wild = 400 * noise.normal() if unsettled else 0.0
        return [1 / (0.02 + 0.01j * (x - 1 / x)) + wild, 1 + 0.5j * x]

    monkeypatch.setattr(FieldModel, "_solver", lambda self, geometry: Solver())
    monkeypatch.setattr(FieldModel, "_quantities", quantities)
    monkeypatch.setattr("fabgen.sizing.field_model._with_full_crossing", lambda solution, sizes, geometry: solution)
    model = FieldModel(1420.406)
    found = model.sweep(sample_sizes(sample_job()), 426.0, 3125.0, 1.06)
    assert found.solves == len(solved) == len(set(solved)) == model.solves <= 15
    assert (found.error_estimate > SWEEP_ERROR) == unsettled  # the self-check of the same limit stops such a job
