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
from fabgen.sizing.response import gain_at, in_sweep
from fabgen.sizing.solver import Solution
from fabgen.sizing.trial import Setting, front_place

SEARCH_STEP = 0.25


@dataclass(frozen=True)
class Margin:
    """One numeric wish: what was wished, what is reached, and by how many dB it is met (negative: missed)."""

    kind: str
    text: str
    margin_db: float


def relative_gain_db(solver: CountingSolver, matched: Matched, target_mhz: float, frequency_mhz: float) -> float:
    """Realised axial gain at a frequency relative to the target, dB, by a full solve."""
    pf = matched.sizes.series_capacitor_pf
    reference = gain_at(matched.solution, pf, target_mhz)
    return gain_at(solver.solve(matched.sizes, frequency_mhz), pf, frequency_mhz) - reference


def margins(solver: CountingSolver, job: Job, matched: Matched) -> tuple[Margin, ...]:
    """Margins of a matched loop against each of the job's numeric wishes."""
    target, pf = job.target.frequency_mhz, matched.sizes.series_capacitor_pf
    found = []
    for neighbour in job.wishes.neighbours:
        if neighbour.rejection_db is None or not in_sweep(neighbour.frequency_mhz, target):
            continue
        f, wished = neighbour.frequency_mhz, neighbour.rejection_db
        reached = -relative_gain_db(solver, matched, target, f)
        text = f"{wished:g} dB wished at {f:g} MHz, {reached:.1f} dB reached"
        found.append(Margin("rejection", text, reached - wished))
    band, loss = job.wishes.bandwidth_mhz, job.wishes.return_loss_db
    if band is not None:
        edges = (target - band / 2, target + band / 2)
        reached = min(return_loss_db(reflection(solver.solve(matched.sizes, f).impedance_ohm, pf, f)) for f in edges)
        text = f"{loss:g} dB return loss wished over {band:g} MHz, {reached:.1f} dB reached at its edges"
        found.append(Margin("band", text, reached - loss))
    return tuple(found)


def choose_loop(setting: Setting, solver: CountingSolver, progress: Progress) -> Matched:
    """The matched loop for the job's wishes: the named place when it meets the numeric ones, else the nearest place
    that does, else the best found with a remark that gives the shortfall."""
    job = setting.job
    target = job.target.frequency_mhz

    def solve(sizes: Sizes) -> Solution:
        return solver.solve(sizes, target)

    share = NAMED[job.wishes.selectivity]
    best = match_nearby(setting, share, solve)
    found = margins(solver, job, best)
    if not found:
        return best
    # More rejection lies towards sharp, more band towards broad.
    sharper = any(m.kind == "rejection" and m.margin_db < 0 for m in found)
    step = -SEARCH_STEP if sharper else SEARCH_STEP
    place = share + step
    while _worst(found) < 0 and 0 <= place <= 1:
        progress.step(f"moving along the selectivity front to {place:.2f}")
        try:
            trial = match_at(setting, front_place(place), solve, best.sizes.tap_height_mm)
        except (NoSolutionError, GeometryError):
            place += step
            continue
        reached = margins(solver, job, trial)
        if _worst(reached) > _worst(found):
            best, found = trial, reached
        place += step
    return replace(best, remarks=(*best.remarks, *_shortfalls(found, "sharp" if sharper else "broad")))


def _shortfalls(found: tuple[Margin, ...], end: str) -> tuple[str, ...]:
    """What is missed. With several wishes one may be met better elsewhere, at the cost of another."""
    if len(found) == 1:
        reason = f"no loop from the wished selectivity to the {end} end does better"
    else:
        reason = f"of all these wishes together, no loop towards the {end} end misses the worst by less"
    return tuple(f"{m.text}; {reason}" for m in found if m.margin_db < 0)


def _worst(found: tuple[Margin, ...]) -> float:
    return min(m.margin_db for m in found)
