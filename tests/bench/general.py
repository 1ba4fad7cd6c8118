"""Child of ``tests.bench.fields``: the same matrix by bempp-cl, run by an interpreter that has it.

Arguments: a .npz file with vertices (V, 3) and triangles (T, 3), the wave number, the number of timed runs after the
first one, which compiles. Prints one JSON line per run: seconds of fill, seconds of fill and solve, unknowns.
Imports nothing of this project.
"""

from __future__ import annotations

import json
import sys
import time

import numpy as np


def main() -> None:
    """Fill and solve once to compile, then as often as asked."""
    import bempp_cl.api as bempp
    from scipy.linalg import lu_factor, lu_solve

    data = np.load(sys.argv[1])
    wave_number, runs = float(sys.argv[2]), int(sys.argv[3])
    grid = bempp.Grid(np.ascontiguousarray(data["vertices"].T), np.ascontiguousarray(data["triangles"].T, "uint32"))
    for _ in range(runs + 1):
        start = time.perf_counter()
        edges = bempp.function_space(grid, "RWG", 0)
        rotated = bempp.function_space(grid, "SNC", 0)
        operator = bempp.operators.boundary.maxwell.electric_field(
            edges, edges, rotated, wave_number, assembler="dense", device_interface="numba"
        )
        matrix = operator.weak_form().to_dense()
        filled = time.perf_counter() - start
        lu_solve(lu_factor(matrix), np.ones(len(matrix)))
        total = time.perf_counter() - start
        print(json.dumps({"fill_s": filled, "total_s": total, "unknowns": len(matrix)}), flush=True)


if __name__ == "__main__":
    main()
