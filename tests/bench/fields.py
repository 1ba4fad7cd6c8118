"""Speed and memory of the field computation against fixed measures, in one run on one machine.

    python -m tests.bench.fields                      all rows but bempp-cl's
    python -m tests.bench.fields --rows lu memory     some rows
    python -m tests.bench.fields --bempp PYTHON       with bempp-cl, run by that interpreter

bempp-cl, a general-purpose boundary-element library, is no dependency of this project. To add its row:

    python -m venv .bempp-venv && .bempp-venv/bin/pip install bempp-cl plotly meshio
    python -m tests.bench.fields --rows bempp --bempp .bempp-venv/bin/python

Its assembly of this mesh takes a minute or more, and it is run several times. Ratios are of the least wall times of
runs taken in turn; they hold on a busy machine better than seconds do. "cpu" is processor time of all threads:
where the machine is busy, judge seconds by it.
"""

from __future__ import annotations

import argparse
import json
import os
import resource
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
import trimesh
from scipy.linalg import lu_factor

from fabgen.fields.mesh import single
from fabgen.fields.model import FeedSolver
from fabgen.fields.plan import plan_mesh
from tests.bench.bodies import SPHERE_HZ, TARGET_HZ, WAVELENGTH_M, feed, fill_and_solve, sphere
from tests.bench.timing import Timing, in_turn

ROOT = Path(__file__).parents[2]


@dataclass(frozen=True)
class Row:
    """One line of the table: what, how it was measured, the figure, what is wanted."""

    what: str
    measured: str
    figure: str
    wanted: str = ""


def _text(timing: Timing) -> str:
    return f"{timing.best_s:.3f} s (median {timing.median_s:.3f}, cpu {timing.best_cpu_s:.3f})"


def _random_matrix(unknowns: int) -> np.ndarray:
    generator = np.random.default_rng(1)
    shape = (unknowns, unknowns)
    return np.asfortranarray(generator.standard_normal(shape) + 1j * generator.standard_normal(shape))


def _child(module: str, *arguments: str, python: str = sys.executable, **variables: str) -> str:
    command = [python, str(ROOT / "tests" / "bench" / f"{module}.py"), *arguments]
    environment = {**os.environ, "PYTHONPATH": str(ROOT), **variables}
    done = subprocess.run(command, capture_output=True, text=True, check=False, cwd=ROOT, env=environment)
    if done.returncode:
        raise SystemExit(f"{module}.py failed:\n{done.stderr[-2000:]}")
    return done.stdout


def rows_bempp(python: str, repetitions: int) -> Iterator[Row]:
    """Fill and solve of 1,920 edges against bempp-cl: its calls and ours in one run, ours before and after."""
    what = "1,920 edges against bempp-cl"
    if not python:
        yield Row(what, "left out", "-", "see --help for how to add it")
        return
    ball = trimesh.creation.icosphere(3)
    ours = fill_and_solve(single(ball.vertices, ball.faces))
    (timing,) = in_turn([ours], 3 * repetitions)
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "sphere.npz"
        np.savez(path, vertices=ball.vertices, triangles=ball.faces)
        wave_number = 2 * np.pi * SPHERE_HZ / 299_792_458.0
        lines = _child("general", str(path), str(wave_number), str(repetitions), python=python).splitlines()
    for _ in range(3 * repetitions):
        timing.run(ours)
    runs = [json.loads(line) for line in lines if line.startswith("{")]
    later = min(run["total_s"] for run in runs[1:])
    yield Row("bempp-cl, first call", f"{runs[0]['unknowns']} unknowns", f"{runs[0]['total_s']:.1f} s")
    yield Row("bempp-cl, later calls", f"{len(runs) - 1} runs, least", f"{later:.1f} s")
    yield Row("fill and solve here", f"{len(timing.wall_s)} runs", _text(timing))
    yield Row(what, "ratio of least times", f"{later / timing.best_s:.0f} times faster", ">= 40")
    typical = float(np.median([run["total_s"] for run in runs[1:]]))
    yield Row("", "ratio of medians", f"{typical / timing.median_s:.0f} times faster")


def rows_lu(_: str, repetitions: int) -> Iterator[Row]:
    """Fill and solve of 3,000 unknowns against LAPACK's complex LU (zgetrf) of a matrix of that size."""
    matrix = _random_matrix(3000)
    ours, lapack = in_turn([fill_and_solve(sphere(10)), lambda: lu_factor(matrix, check_finite=False)], repetitions)
    yield Row("fill and solve, 3,000 unknowns", f"{repetitions} runs in turn", _text(ours))
    yield Row("complex LU, 3,000 unknowns", f"{repetitions} runs in turn", _text(lapack))
    yield Row("their ratio", "least times", f"{ours.best_s / lapack.best_s:.2f}", "< 4")
    pairs = np.median(np.array(ours.wall_s) / np.array(lapack.wall_s))
    yield Row("", "median of neighbours' ratios", f"{pairs:.2f}")


def rows_memory(_: str, __: int) -> Iterator[Row]:
    """Peak memory at about 3,000 unknowns in complex matrices of that size."""
    for kind, name in (("sphere", "sphere"), ("feed", "feed, one frequency"), ("pair", "feed, two near frequencies")):
        found = json.loads(_child("memory", kind))
        measured = f"{found['unknowns']} unknowns, {found['bytes'] / 2**20:.0f} MiB above base"
        yield Row(f"peak memory, {name}", measured, f"{found['matrices']:.2f} matrices", "< 3.5")


def rows_feed(_: str, repetitions: int) -> Iterator[Row]:
    """One frequency of a feed at default mesh, and another loop in the can that is kept."""
    body = feed()
    solver = FeedSolver(plan_mesh(body, WAVELENGTH_M))
    unknowns = solver.solve(body, TARGET_HZ).unknowns
    steps = iter(np.linspace(0.97, 1.03, 2 * (repetitions + 2)))
    taps = iter(np.linspace(0.055, 0.065, 2 * (repetitions + 2)))

    def other_frequency() -> None:
        solver.solve(body, TARGET_HZ * float(next(steps)))

    def other_loop() -> None:
        loop = replace(body.loop, tap_height_m=float(next(taps)) * WAVELENGTH_M)
        solver.solve(replace(body, loop=loop), TARGET_HZ)

    def fresh() -> None:
        FeedSolver(plan_mesh(body, WAVELENGTH_M)).solve(body, TARGET_HZ)

    first, second, third = in_turn([fresh, other_frequency, other_loop], repetitions)
    yield Row("feed from nothing, one frequency", f"{unknowns} unknowns", _text(first), "< 0.6 s")
    yield Row("feed, next frequency", "", _text(second), "< 0.6 s")
    yield Row("another loop, can kept", "", _text(third), "< 0.15 s")


def _children_cpu_s() -> float:
    used = resource.getrusage(resource.RUSAGE_CHILDREN)
    return used.ru_utime + used.ru_stime


def rows_cold(_: str, repetitions: int) -> Iterator[Row]:
    """The first process ever, which compiles, against the next one."""
    first, second = Timing(), Timing()
    for _n in range(max(1, min(3, repetitions))):
        with tempfile.TemporaryDirectory() as folder:
            for found in (first, second):
                wall, cpu = time.perf_counter(), _children_cpu_s()
                _child("cold", NUMBA_CACHE_DIR=folder)
                found.wall_s.append(time.perf_counter() - wall)
                found.cpu_s.append(_children_cpu_s() - cpu)
    runs = f"{len(first.wall_s)} runs"
    yield Row("first process ever", runs, _text(first))
    yield Row("next process", runs, _text(second))
    extra, extra_cpu = first.best_s - second.best_s, first.best_cpu_s - second.best_cpu_s
    figure = f"{extra:.1f} s (cpu {extra_cpu:.1f})"
    yield Row("cost of compiling, one thread", "differences of least times", figure, "<= 8 s")


def rows_growth(_: str, repetitions: int) -> Iterator[Row]:
    """Cost against unknowns, 480 to 5,880, with the exponent of a straight line through the logarithms."""
    parts = (4, 6, 8, 10, 12, 14)
    timings = in_turn([fill_and_solve(sphere(n)) for n in parts], max(2, repetitions // 2))
    unknowns = np.array([30.0 * n**2 for n in parts])
    for n, timing in zip(unknowns, timings, strict=True):
        yield Row(f"fill and solve, {n:.0f} unknowns", "", _text(timing))
    for name, values in (("wall", [t.best_s for t in timings]), ("cpu", [t.best_cpu_s for t in timings])):
        slope = np.polyfit(np.log(unknowns), np.log(values), 1)[0]
        yield Row(f"exponent of {name} time", "480 to 5,880 unknowns", f"{slope:.2f}")


ROWS: dict[str, Callable[[str, int], Iterator[Row]]] = {
    "lu": rows_lu,
    "memory": rows_memory,
    "feed": rows_feed,
    "cold": rows_cold,
    "growth": rows_growth,
    "bempp": rows_bempp,
}


def main() -> None:
    """Print the table row by row."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--rows", nargs="+", choices=list(ROWS), default=list(ROWS))
    parser.add_argument("--bempp", default="", metavar="PYTHON", help="an interpreter that has bempp-cl")
    parser.add_argument("--repeat", type=int, default=5, help="timed repetitions (bempp-cl: at most 2)")
    given = parser.parse_args()
    print(f"{os.cpu_count()} processors, load {os.getloadavg()[0]:.1f} (seconds are too long where it exceeds them)")
    line = "{:34}  {:38}  {:48}  {}"
    print(line.format("what", "how", "figure", "wanted"))
    for name in given.rows:
        repetitions = min(given.repeat, 2) if name == "bempp" else given.repeat
        for row in ROWS[name](given.bempp, repetitions):
            print(line.format(row.what, row.measured, row.figure, row.wanted), flush=True)


if __name__ == "__main__":
    main()
