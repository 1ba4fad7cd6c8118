"""From a job to a sized feed: can, loop, match, rounding, the solve at the rounded sizes, and what it says.

Depends on: errors, job, progress, stock, fields, and the other modules of sizing.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from fabgen.errors import GeometryError, NoSolutionError
from fabgen.fields.plan import DEFAULT_DENSITY
from fabgen.job import Job
from fabgen.progress import Progress, Silent
from fabgen.sizing.can_search import CanFound, find_can
from fabgen.sizing.capacitor_part import capacitor_part
from fabgen.sizing.counting import CountingSolver
from fabgen.sizing.field_solver import FieldSolver
from fabgen.sizing.layout import LoopStock, loop_stock
from fabgen.sizing.loop_search import NAMED, Matched, nearby_places
from fabgen.sizing.match import reflection, return_loss_db
from fabgen.sizing.modes import bore_modes
from fabgen.sizing.predict import predict
from fabgen.sizing.records import Feed, Predicted, Settings, Sizes
from fabgen.sizing.relax import nearest_that_works
from fabgen.sizing.response import START, STOP, in_sweep
from fabgen.sizing.self_checks import require_passed, self_checks
from fabgen.sizing.solver import Solver, Sweep
from fabgen.sizing.thermal import Bench
from fabgen.sizing.tolerances import fit_model, sensitivities
from fabgen.sizing.trial import Setting
from fabgen.sizing.wishes import choose_loop
from fabgen.sizing.yields import model_error, yield_of
from fabgen.stock import tables

MakeSolver = Callable[[Job, float], Solver]
COARSE = 0.625
"""Density of the second mesh over the first: four tenths of the triangles. It serves the can search and the
sensitivities, which ask for differences, and tells how much the discretisation may still move."""
SLOPE_SPAN = 1e-3
POOR_EFFICIENCY = 0.6
METHOD = (
    "electric-field integral equation, edge-based functions on triangles, Galerkin; can eliminated once per "
    "frequency; rational interpolation over frequency"
)


@dataclass(frozen=True)
class _SecondMesh:
    """What another mesh says of the same sizes."""

    resonance_mhz: float
    return_loss_db: float
    reflection_change: float


def size_feed(job: Job, progress: Progress | None = None, make_solver: MakeSolver = FieldSolver) -> Feed:
    """Size the feed of a job.

    ``make_solver``: (job, mesh density) -> solver; the field computation unless a test gives another.
    Raises ``NoSolutionError`` when the job is valid but nothing that can be built matches (the message names the
    limit and the nearest job that works), ``JobError`` for stock that cannot be a loop, ``NumericalError``
    when the field computation fails its own checks.
    """
    tell = progress or Silent()
    try:
        return _size(job, tell, make_solver)
    except (NoSolutionError, GeometryError) as error:
        advice = nearest_that_works(job, tell, lambda other, quiet: find_matched(other, quiet, make_solver))
        raise NoSolutionError(f"{error}. {advice}") from error


@dataclass(frozen=True)
class MatchedFeed:
    """A feed that is matched at its rounded sizes, before its response is swept: can, loop, and the solvers used."""

    setting: Setting
    matched: Matched
    can: CanFound
    search: CountingSolver
    final: CountingSolver


def find_matched(job: Job, progress: Progress | None = None, make_solver: MakeSolver = FieldSolver) -> MatchedFeed:
    """Can, loop, match and rounding for a job: everything but what the feed will do over frequency and tolerance.

    Raises like ``size_feed``, without looking for the nearest job that works.
    """
    tell = progress or Silent()
    search = CountingSolver(make_solver(job, COARSE * DEFAULT_DENSITY))
    stock = loop_stock(job)
    can = _can_for_some_place(job, stock, search, tell)
    setting = Setting(job, stock, can.can)
    tell.step("matching the loop: tap height and series capacitor")
    # A fresh solver plans its mesh on the can that was found, so the result does not depend on the search before.
    final = CountingSolver(make_solver(job, DEFAULT_DENSITY))
    return MatchedFeed(setting, choose_loop(setting, final, tell), can, search, final)


def _can_for_some_place(job: Job, stock: LoopStock, search: CountingSolver, tell: Progress) -> CanFound:
    """The can for the wanted selectivity, or for the nearest place of the front whose loop can be built at all."""
    first: NoSolutionError | GeometryError | None = None
    for place in nearby_places(NAMED[job.wishes.selectivity]):
        try:
            return find_can(job, stock, place, lambda sizes: search.solve(sizes, job.target.frequency_mhz), tell)
        except (NoSolutionError, GeometryError) as error:
            first = first or error
    raise NoSolutionError(str(first)) from first


def _size(job: Job, tell: Progress, make_solver: MakeSolver) -> Feed:
    found = find_matched(job, tell, make_solver)
    setting, matched, final, target = found.setting, found.matched, found.final, job.target.frequency_mhz
    coarse = CountingSolver(make_solver(job, COARSE * DEFAULT_DENSITY))
    sizes = matched.sizes
    tell.step("sweeping the frequency from 0.3 to 2.2 times the target")
    sweep = final.sweep(sizes, START * target, STOP * target, target)
    predicted = predict(job, sizes, matched.solution, sweep)
    part = capacitor_part(
        "sleeve" if sizes.conductor == "wire" else "plates", sizes.series_capacitor_pf, target,
        coax=tables.coax(job.cable.coax), plate_width_mm=sizes.crossing_width_mm, transmit_w=job.wishes.transmit_w,
    )  # fmt: skip
    slope = reactance_slope(sweep, sizes, target)
    model = fit_model(setting, sizes, lambda s: coarse.solve(s, target), tell)
    tell.step("checking the tolerances against true solves")
    error = model_error(setting, sizes, model, lambda s: coarse.solve(s, target))
    # Slopes come from the coarse mesh, the feed that they start from is that of the fine one.
    model = replace(model, impedance_ohm=matched.solution.impedance_ohm)
    rows = sensitivities(model, sizes, part, target, slope)
    bench = _bench(job, sizes, sweep, slope)
    yields = yield_of(job, sizes, model, rows, part=part, bench=bench, error=error)
    second = _second_mesh(job, matched, coarse, slope)
    checks = self_checks(matched.solution, sweep.error_estimate, second.reflection_change)
    require_passed(checks)
    return Feed(
        job=job, sizes=sizes, predicted=predicted, capacitor=part, sensitivities=rows, yields=yields,
        modes=bore_modes(sizes.can_bore_mm, target), self_checks=checks,
        settings=_settings(matched, second, found.search.solves + final.solves + coarse.solves),
        remarks=(
            *found.can.remarks, *matched.remarks, *_band_remark(job, predicted), *_dish_remark(job, predicted),
            *_neighbour_remarks(job),
        ),
        can_trials=found.can.trials,
    )  # fmt: skip


def reactance_slope(sweep: Sweep, sizes: Sizes, target_mhz: float) -> float:
    """d/df of Im Z - 1/(omega C) at the target, ohm per MHz, from the sweep."""
    pair = target_mhz * np.array([1 - SLOPE_SPAN, 1 + SLOPE_SPAN])
    total = sweep.impedance_ohm(pair).imag - 1e6 / (2 * np.pi * pair * sizes.series_capacitor_pf)
    return float((total[1] - total[0]) / (pair[1] - pair[0]))


def _bench(job: Job, sizes: Sizes, sweep: Sweep, slope: float) -> Bench:
    """The target, and the edges of the band where the job asks for one."""
    target, half = job.target.frequency_mhz, (job.wishes.bandwidth_mhz or 0.0) / 2
    frequency = np.array(sorted({target - half, target, target + half}))
    return Bench(frequency, sweep.impedance_ohm(frequency), target, job.wishes.return_loss_db, slope)


def _second_mesh(job: Job, matched: Matched, coarse: Solver, slope: float) -> _SecondMesh:
    """The same sizes on a coarser mesh: what the discretisation may still move.

    The reflection may lie anywhere in a circle round the computed one, as wide as the two meshes differ; its far side
    is the least return loss. A deep minimum is therefore not told as if it were sure.
    """
    target, sizes = job.target.frequency_mhz, matched.sizes
    other = coarse.solve(sizes, target)
    change = other.impedance_ohm - matched.solution.impedance_ohm
    first = matched.reflection(target)
    moved = abs(reflection(other.impedance_ohm, sizes.series_capacitor_pf, target) - first)
    return _SecondMesh(
        # Either part of the change may turn up in the other on the next mesh.
        resonance_mhz=abs(change / slope),
        return_loss_db=return_loss_db(first) - return_loss_db(complex(abs(first) + moved)),
        reflection_change=moved,
    )


def _settings(matched: Matched, second: _SecondMesh, solves: int) -> Settings:
    solution = matched.solution
    return Settings(
        edge_per_wavelength=DEFAULT_DENSITY,
        triangles=solution.triangles,
        unknowns=solution.unknowns,
        solves=solves,
        resonance_uncertainty_mhz=second.resonance_mhz,
        return_loss_uncertainty_db=second.return_loss_db,
        largest_edge_wavelengths=solution.largest_edge_wavelengths,
        method=METHOD,
    )


def _dish_remark(job: Job, predicted: Predicted) -> tuple[str, ...]:
    """Why a very shallow or very deep dish is not used well."""
    efficiency = predicted.aperture_efficiency
    if efficiency >= POOR_EFFICIENCY:
        return ()
    beam = "narrower" if job.dish.focal_ratio > 0.5 else "wider"
    return (
        f"The aperture efficiency is {efficiency:.2f}: a dish of focal ratio {job.dish.focal_ratio:g} asks for a "
        f"{beam} beam than this can gives. A free bore, or a dish between 0.35 and 0.6, is used better.",
    )


def _neighbour_remarks(job: Job) -> tuple[str, ...]:
    """Neighbours of which nothing is said, and why."""
    target = job.target.frequency_mhz
    return tuple(
        f"The neighbour at {n.frequency_mhz:g} MHz lies outside {START * target:.0f} to {STOP * target:.0f} MHz, which "
        "is what is swept; its rejection was not computed."
        for n in job.wishes.neighbours
        if not in_sweep(n.frequency_mhz, target)
    )


def _broader(job: Job) -> str:
    return "" if job.wishes.selectivity == "broad" else " or a broader selectivity"


def _band_remark(job: Job, predicted: Predicted) -> tuple[str, ...]:
    """Why a wished band is not covered."""
    wanted = job.wishes.bandwidth_mhz
    if wanted is None or predicted.bandwidth_mhz >= wanted:
        return ()
    return (
        f"The band wished is {wanted:g} MHz at {job.wishes.return_loss_db:g} dB; this loop covers "
        f"{predicted.bandwidth_mhz:.1f} MHz. One loop with one capacitor has one resonance; a lower return loss"
        f"{_broader(job)} widens the band.",
    )
