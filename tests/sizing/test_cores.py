"""What is computed does not depend on how many cores the computer has."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
ONE_SOLVE = """
from tests.samples import sample_job, sample_sizes
from fabgen.sizing.field_solver import FieldSolver
job = sample_job()
solver = FieldSolver(job, 12.0)
for frequency in (900.0, 1420.406):
    solution = solver.solve(sample_sizes(job), frequency)
    print(solution.impedance_ohm, solution.ohmic_power_w, solution.far_field(1.0, 0.3))
"""


def output_on(cores: set[int], arguments: list[str], cache: Path) -> bytes:
    """What a fresh process that may use only these cores prints; nothing comes from stored results."""
    run = subprocess.run(
        ["taskset", "-c", ",".join(map(str, sorted(cores))), sys.executable, *arguments],
        check=True, capture_output=True, cwd=ROOT,
        env={**os.environ, "FABGEN_CACHE": str(cache), "PYTHONPATH": str(ROOT)},
    )  # fmt: skip
    return run.stdout


@pytest.fixture
def one_and_two() -> tuple[set[int], set[int]]:
    here = sorted(os.sched_getaffinity(0))
    if len(here) < 2:
        pytest.skip("this computer has one core")
    return {here[0]}, set(here[:2])


@pytest.mark.slow
def test_a_solve_has_the_same_bits_on_one_core_and_on_two(
    one_and_two: tuple[set[int], set[int]], tmp_path: Path
) -> None:
    one, two = (output_on(cores, ["-c", ONE_SOLVE], tmp_path) for cores in one_and_two)
    assert one == two
    assert one.count(b"\n") == 2


@pytest.mark.slow
@pytest.mark.thorough
def test_size_prints_the_same_on_one_core_and_on_two(
    one_and_two: tuple[set[int], set[int]], tmp_path: Path
) -> None:
    job = ROOT / "templates" / "hydrogen-wire.toml"
    arguments = ["-m", "fabgen", "size", str(job), "--json", "--quiet"]
    one, two = (output_on(cores, arguments, tmp_path / str(len(cores))) for cores in one_and_two)
    assert one == two
    assert b"yields" in one
