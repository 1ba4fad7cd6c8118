"""The frequency sweep of each template's feed against direct solves between its samples."""

from __future__ import annotations

import numpy as np
import pytest

from fabgen.fields.plan import DEFAULT_DENSITY
from fabgen.job_reader import parse_job
from fabgen.sizing.field_solver import FieldSolver
from fabgen.sizing.match import reflection
from fabgen.sizing.response import START, STOP
from fabgen.sizing.size_feed import find_matched
from fabgen.start import template, templates


@pytest.mark.slow
@pytest.mark.thorough
@pytest.mark.parametrize("name", [item.name for item in templates()])
def test_sweep_against_direct_solves(name: str) -> None:
    # limits of the project: 15 full solves, reflection within 0.005 at 40 points that are not samples
    job = parse_job(template(name).text, name)
    target = job.target.frequency_mhz
    found = find_matched(job)
    sizes = found.matched.sizes
    sweep = found.final.sweep(sizes, START * target, STOP * target, target)
    assert sweep.solves <= 15
    solver = FieldSolver(job, DEFAULT_DENSITY)
    frequency = np.linspace(START * 1.013, STOP * 0.993, 40) * target
    fitted = sweep.impedance_ohm(frequency)
    error = []
    for f, z in zip(frequency.tolist(), fitted, strict=True):
        direct = solver.solve(sizes, f).impedance_ohm
        error.append(abs(reflection(direct, sizes.series_capacitor_pf, f)
                         - reflection(complex(z), sizes.series_capacitor_pf, f)))  # fmt: skip
    print(name, sweep.solves, f"estimated {sweep.error_estimate:.4f}, true {max(error):.4f}")
    assert max(error) < 0.005
