"""The sweep goes on past its usual number of solves where resonances are sharp, and solves nothing twice."""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

from fabgen.sizing import field_model
from fabgen.sizing.field_model import MOST_SWEEP_SOLVES, SWEEP_ERROR, FieldModel
from tests.samples import sample_job, sample_sizes


@pytest.mark.parametrize(("settles_at", "solves"), [(9, 15), (18, 18), (99, MOST_SWEEP_SOLVES)])
def test_sweep_goes_on_until_it_settles(monkeypatch: pytest.MonkeyPatch, settles_at: int, solves: int) -> None:
    solved: list[float] = []

    class Solver:
        def solve_pair(self, *values: Any) -> tuple[Any, Any]:
            solved.append(values[1])
            return (SimpleNamespace(frequency_hz=values[1]),) * 2

    def sweep(sample: Any, start: float, stop: float, *_: Any, most: int = 15) -> Any:
        for x in np.linspace(start, stop, MOST_SWEEP_SOLVES)[:most]:
            sample(float(x))
        error = SWEEP_ERROR / 2 if most >= settles_at else 2 * SWEEP_ERROR
        return SimpleNamespace(error_estimate=error, solves=most)

    monkeypatch.setattr(field_model, "adaptive_sweep", sweep)
    monkeypatch.setattr(FieldModel, "_solver", lambda self, geometry: Solver())
    monkeypatch.setattr(FieldModel, "_quantities", lambda self, solution: [50 + 0j, 1 + 0j])
    monkeypatch.setattr(field_model, "_with_full_crossing", lambda solution, sizes, geometry: solution)
    model = FieldModel(1420.406)
    found = model.sweep(sample_sizes(sample_job()), 426.0, 3125.0, 1.06)
    assert found.solves == solves
    assert len(solved) == len(set(solved)) == model.solves == solves
