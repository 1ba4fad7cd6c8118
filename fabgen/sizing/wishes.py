"""Numeric wishes: rejection at neighbouring frequencies and bandwidth choose the place on the selectivity front.

Depends on: job, sizing.counting, sizing.loop_search, sizing.response, sizing.trial.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from fabgen.errors import GeometryError, NoSolutionError
from fabgen.job import Job
from fabgen.progress import Progress
from fabgen.sizing.counting import CountingSolver
from fabgen.sizing.loop_search import NAMED, Matched, match_at, match_nearby
from fabgen.sizing.match import reflection, return_loss_db
from fabgen.sizing.records import Sizes
from fabgen.sizing.response import gain_at
from fabgen.sizing.solver import Solution
from fabgen.sizing.trial import Setting, front_place

SEARCH_STEP = 0.25


@dataclass(frozen=True)
class Merits:
    """How a matched loop meets the numeric wishes, in dB; 0 or more is met."""

    rejection_margin_db: float | None
    band_margin_db: float | None

    @property
    def met(self) -> bool:
        return all(m is None or m >= 0 for m in (self.rejection_margin_db, self.band_margin_db))


def relative_gain_db(solver: CountingSolver, matched: Matched, target_mhz: float, frequency_mhz: float) -> float:
    """Realised axial gain at a frequency relative to the target, dB, by a full solve."""
    pf = matched.sizes.series_capacitor_pf
    reference = gain_at(matched.solution, pf, target_mhz)
    return gain_at(solver.solve(matched.sizes, frequency_mhz), pf, frequency_mhz) - reference


def merits(solver: CountingSolver, job: Job, matched: Matched) -> Merits:
    """Margins of a matched loop against the job's numeric wishes."""
    target, pf = job.target.frequency_mhz, matched.sizes.series_capacitor_pf
    rejections = [
        -relative_gain_db(solver, matched, target, n.frequency_mhz) - n.rejection_db
        for n in job.wishes.neighbours
        if n.rejection_db is not None
    ]
    band = None
    if job.wishes.bandwidth_mhz is not None:
        edges = (target - job.wishes.bandwidth_mhz / 2, target + job.wishes.bandwidth_mhz / 2)
        losses = [
            return_loss_db(reflection(solver.solve(matched.sizes, f).impedance_ohm, pf, f)) for f in edges
        ]
        band = min(losses) - job.wishes.return_loss_db
    return Merits(min(rejections, default=None), band)


def choose_loop(setting: Setting, solver: CountingSolver, progress: Progress) -> Matched:
    """The matched loop for the job's wishes: the named place when it meets the numeric ones, else the nearest place
    that does, else the best found with a remark that gives the shortfall."""
    job = setting.job
    target = job.target.frequency_mhz

    def solve(sizes: Sizes) -> Solution:
        return solver.solve(sizes, target)

    share = NAMED[job.wishes.selectivity]
    best = match_nearby(setting, share, solve)
    if all(n.rejection_db is None for n in job.wishes.neighbours) and job.wishes.bandwidth_mhz is None:
        return best
    found = merits(solver, job, best)
    worst = _worst(found)
    # More rejection lies towards sharp, more band towards broad.
    sharper = found.rejection_margin_db is not None and found.rejection_margin_db < 0
    step = -SEARCH_STEP if sharper else SEARCH_STEP
    place = share + step
    while not found.met and 0 <= place <= 1:
        progress.step(f"moving along the selectivity front to {place:.2f}")
        try:
            trial = match_at(setting, front_place(place), solve, best.sizes.tap_height_mm)
        except (NoSolutionError, GeometryError):
            place += step
            continue
        found = merits(solver, job, trial)
        if found.met or _worst(found) > worst:
            best, worst = trial, _worst(found)
        place += step
    if worst < 0:
        shortfall = f"The numeric wishes are missed by {-worst:.1f} dB at best on the whole front."
        return replace(best, remarks=(*best.remarks, shortfall))
    return best


def _worst(found: Merits) -> float:
    return min(m for m in (found.rejection_margin_db, found.band_margin_db) if m is not None)
