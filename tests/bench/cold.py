"""Child of ``tests.bench.fields``: the first solve of a process, imports included. Prints the impedance."""

from __future__ import annotations

from fabgen.fields.model import FeedSolver
from fabgen.fields.plan import plan_mesh
from tests.bench.bodies import TARGET_HZ, WAVELENGTH_M, feed


def main() -> None:
    """Solve one feed on a coarse mesh."""
    print(FeedSolver(plan_mesh(feed(), WAVELENGTH_M, 10)).solve(feed(), TARGET_HZ).impedance_ohm)


if __name__ == "__main__":
    main()
