"""Child of ``tests.bench.fields``: peak memory of one computation in matrices of its size.

Argument: ``sphere``, ``feed`` or ``pair``. Prints one JSON line: unknowns, peak above the base in bytes, in matrices.
"""

from __future__ import annotations

import json
import resource
import sys
from collections.abc import Callable

from fabgen.fields.model import FeedSolver
from fabgen.fields.plan import plan_mesh
from tests.bench.bodies import TARGET_HZ, WAVELENGTH_M, feed, fill_and_solve, sphere

FEED_DENSITY = 23.0
"""Gives the feed about 3,000 unknowns."""


def peak_bytes() -> int:
    """Largest resident memory of this process so far (kibibytes on Linux)."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024


def of_sphere(parts: int) -> int:
    """Fill and solve a sphere; its unknowns."""
    fill_and_solve(sphere(parts))()
    return 30 * parts**2


def of_feed(density: float, pair: bool) -> int:
    """Solve a feed at one frequency, or at two near ones; its unknowns."""
    solver = FeedSolver(plan_mesh(feed(), WAVELENGTH_M, density))
    if pair:
        return solver.solve_pair(feed(), TARGET_HZ, 0.005)[0].unknowns
    return solver.solve(feed(), TARGET_HZ).unknowns


def main() -> None:
    """Run a small case for code and buffers, then the large one."""
    kinds: dict[str, tuple[Callable[[], int], Callable[[], int]]] = {
        "sphere": (lambda: of_sphere(4), lambda: of_sphere(10)),
        "feed": (lambda: of_feed(10, False), lambda: of_feed(FEED_DENSITY, False)),
        "pair": (lambda: of_feed(10, True), lambda: of_feed(FEED_DENSITY, True)),
    }
    small, large = kinds[sys.argv[1]]
    small()
    base = peak_bytes()
    unknowns = large()
    extra = peak_bytes() - base
    print(json.dumps({"unknowns": unknowns, "bytes": extra, "matrices": extra / (16 * unknowns**2)}))


if __name__ == "__main__":
    main()
