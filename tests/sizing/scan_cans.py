"""Compute the starting table of ``fabgen.sizing.can_start`` anew: ``python -m tests.sizing.scan_cans`` (some minutes).

Prints, for each half angle, the can of best efficiency, and the can of best G/T among those within 0.02 of it.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

from fabgen.errors import FabgenError
from fabgen.job import Job
from fabgen.sizing.can_start import EFFICIENCY_GIVEN, PLAIN
from fabgen.sizing.evaluate import in_dish
from fabgen.sizing.field_solver import FieldSolver
from fabgen.sizing.layout import loop_stock
from fabgen.sizing.trial import CanShape, Setting, first_sizes, front_place
from tests.samples import sample_job

BORES = (0.68, 0.74, 0.80, 0.88, 0.94, 1.0, 1.06, 1.12, 1.18, 1.205, 1.26, 1.34, 1.42, 1.5, 1.6, 1.75)
DEPTHS = (0.18, 0.20, 0.24, 0.28, 0.32, 0.36, 0.42, 0.5, 0.6, 0.7)
DENSITY = 10.0


@dataclass(frozen=True)
class Scanned:
    """One can in one dish."""

    half_angle_deg: float
    bore: float
    depth: float
    efficiency: float
    g_over_t: float


def dish_job(half_angle_deg: float) -> Job:
    data = sample_job("wire", "turned").model_dump()
    data["dish"]["focal_ratio"] = 1 / (4 * math.tan(math.radians(half_angle_deg) / 2))
    return Job.model_validate(data)


def scan() -> Iterator[Scanned]:
    jobs = {row.half_angle_deg: dish_job(row.half_angle_deg) for row in PLAIN}
    job = jobs[60]
    setting = Setting(job, loop_stock(job), CanShape(0.0, 0.0))
    for bore in BORES:
        for depth in DEPTHS:
            can = CanShape(bore * job.wavelength_mm, depth * job.wavelength_mm)
            sizes = first_sizes(replace(setting, can=can), front_place(0.5))
            try:
                solution = FieldSolver(job, DENSITY).solve(sizes, job.target.frequency_mhz)
            except FabgenError as error:
                print(f"bore {bore}, depth {depth}: {error}")
                continue
            for angle, other in jobs.items():
                found = in_dish(other, solution)
                yield Scanned(angle, bore, depth, found.dish.aperture_efficiency, found.noise.g_over_t_db_per_k)


def main() -> None:
    cans = list(scan())
    for row in PLAIN:
        here = [c for c in cans if c.half_angle_deg == row.half_angle_deg]
        best = max(here, key=lambda c: c.efficiency)
        quiet = max((c for c in here if c.efficiency > best.efficiency - EFFICIENCY_GIVEN), key=lambda c: c.g_over_t)
        print(f"{row.half_angle_deg:g}: efficiency {best}, G/T {quiet}")


if __name__ == "__main__":
    main()
