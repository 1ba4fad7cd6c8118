"""The selectivity front: rejection of the neighbours against efficiency, each point matched.

Depends on: job, fields, the other modules of sizing.
"""

from __future__ import annotations

from dataclasses import dataclass

from fabgen.errors import GeometryError, NoSolutionError
from fabgen.fields.plan import DEFAULT_DENSITY
from fabgen.job import Job
from fabgen.progress import Progress, Silent
from fabgen.sizing.can_search import find_can
from fabgen.sizing.counting import CountingSolver
from fabgen.sizing.evaluate import in_dish
from fabgen.sizing.field_solver import FieldSolver
from fabgen.sizing.layout import loop_stock
from fabgen.sizing.loop_search import NAMED, Matched, match_at
from fabgen.sizing.match import return_loss_db
from fabgen.sizing.records import Sizes
from fabgen.sizing.response import in_sweep
from fabgen.sizing.size_feed import COARSE, MakeSolver
from fabgen.sizing.solver import Solution
from fabgen.sizing.trial import Setting, front_place
from fabgen.sizing.wishes import relative_gain_db

POINTS = 9
LEAST_POINTS = 8
MOST_HALVINGS = 4
DEFAULT_NEIGHBOURS = (0.634, 0.915)
"""Ratios to the target where a job names no neighbour: 900 and 1300 MHz for the hydrogen line."""


@dataclass(frozen=True)
class FrontPoint:
    """One matched loop of the front. ``rejection_db``: gain at each neighbour relative to the target, dB."""

    share: float
    sizes: Sizes
    neighbour_mhz: tuple[float, ...]
    rejection_db: tuple[float, ...]
    aperture_efficiency: float
    g_over_t_db_per_k: float
    return_loss_db: float


@dataclass(frozen=True)
class Front:
    """The points that could be matched, sharp first, and what stood against the others."""

    points: tuple[FrontPoint, ...]
    refused: tuple[str, ...]


def selectivity_front(
    job: Job, progress: Progress | None = None, make_solver: MakeSolver = FieldSolver, points: int = POINTS
) -> Front:
    """Walk from sharp to broad in ``points`` places, with the can found for the job's own wish kept. Where some of them
    cannot be built, the steps between those that can are halved until there are at least eight.

    ``make_solver`` like for ``size_feed``. The coarse mesh of the can search serves here too, since a front compares.
    Raises ``NoSolutionError`` when no place can be matched.
    """
    tell = progress or Silent()
    counting, target = CountingSolver(make_solver(job, COARSE * DEFAULT_DENSITY)), job.target.frequency_mhz

    def solve(sizes: Sizes) -> Solution:
        return counting.solve(sizes, target)

    stock = loop_stock(job)
    can = find_can(job, stock, front_place(NAMED[job.wishes.selectivity]), solve, tell).can
    setting = Setting(job, stock, can)
    found: list[FrontPoint] = []
    refused: list[str] = []

    def visit(places: list[float]) -> None:
        for i, share in enumerate(places):
            place = front_place(share)
            tell.step(f"front: circumference {place.circumference:.3f}, height {place.height:.3f} wavelengths")
            tell.share(i, len(places))
            try:
                matched = match_at(setting, place, solve, found[-1].sizes.tap_height_mm if found else None)
            except (NoSolutionError, GeometryError) as error:
                refused.append(f"place {place.share:.2f}: {error}")
                continue
            found.append(_point(job, counting, matched))

    visit([i / (points - 1) for i in range(points)])
    if not found:
        raise NoSolutionError(f"no point of the front can be matched; first: {refused[0]}")
    step = 1 / (points - 1)
    for _ in range(MOST_HALVINGS):
        if len(found) >= min(points, LEAST_POINTS):
            break
        step /= 2
        visit(between([point.share for point in found], step))
    return Front(tuple(sorted(found, key=lambda point: point.share)), tuple(refused))


def between(shares: list[float], step: float) -> list[float]:
    """Odd multiples of ``step`` next to a place of ``shares``, from 0 to 1."""
    near = {round(share / step) + side for share in shares for side in (-1, 1)}
    return [i * step for i in sorted(near) if i % 2 and 0 <= i * step <= 1]


def _point(job: Job, solver: CountingSolver, matched: Matched) -> FrontPoint:
    neighbours, target = _neighbours(job), job.target.frequency_mhz
    figures = in_dish(job, matched.solution)
    return FrontPoint(
        share=matched.place.share,
        sizes=matched.sizes,
        neighbour_mhz=neighbours,
        rejection_db=tuple(relative_gain_db(solver, matched, target, f) for f in neighbours),
        aperture_efficiency=figures.dish.aperture_efficiency,
        g_over_t_db_per_k=figures.noise.g_over_t_db_per_k,
        return_loss_db=return_loss_db(matched.reflection(target)),
    )


def _neighbours(job: Job) -> tuple[float, ...]:
    named = tuple(n.frequency_mhz for n in job.wishes.neighbours if in_sweep(n.frequency_mhz, job.target.frequency_mhz))
    return named or tuple(round(r * job.target.frequency_mhz, 1) for r in DEFAULT_NEIGHBOURS)
