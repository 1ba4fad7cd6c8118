"""Bore and depth of the can (and the choke) from the dish.

A table of cans that were best for a row of half angles starts the search; a parabola through three bores, then
through three depths, computed with the job's own loop, finds the best one nearby.

Depends on: errors, job, stock, theory, sizing.can_start, sizing.evaluate, sizing.rounding, sizing.solver,
sizing.trial.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

from fabgen.errors import JobError, NoSolutionError
from fabgen.job import Choke, Job
from fabgen.progress import Progress
from fabgen.sizing.can_start import CHOKE, CanRatio, least_efficiency, start_can
from fabgen.sizing.dish import half_angle_rad
from fabgen.sizing.evaluate import in_dish
from fabgen.sizing.layout import LoopStock
from fabgen.sizing.match import SolveSizes, tap_in_range_mm
from fabgen.sizing.records import CanTrial, ChokeSizes
from fabgen.sizing.rounding import round_to
from fabgen.sizing.trial import FLOOR_MM, WALL_MM, CanShape, FrontPlace, Setting, first_sizes
from fabgen.stock.joints import nearest_choke_floor_mm
from fabgen.theory.waveguide import cutoff_bore_mm

BORE_STEP = 0.028
DEPTH_STEP = 0.048
"""Steps that a mesh follows by moving: what differs is then the can and not the mesh."""
CHOKE_BORE_STEP, CHOKE_DEPTH_STEP = 0.045, 0.09
SET_BACK_STEP_WAVELENGTHS = 0.025
LEAST_GAP_WAVELENGTHS = 0.1
"""Least difference between the choke's bore and the can's outside. Common practice, no source."""
CUTOFF_MARGIN = 1.12
RIM_WAVELENGTHS = 0.02
"""The rim stands at least this far above the loop. Common practice, no source."""
LARGEST_WAVELENGTHS = 1.7
BED_SHARE = 0.85
"""A bed that takes this share of the wished bore limits it; a smaller one does not, the body then comes in pieces."""
PRINT_FLANGE_MM = 2 * 14.0
SEAM_MM = 15.0


@dataclass(frozen=True)
class CanFound:
    """The can chosen, and every can that was computed on the way."""

    can: CanShape
    trials: tuple[CanTrial, ...]
    remarks: tuple[str, ...]


@dataclass(frozen=True)
class BoreRange:
    """Smallest and largest bore, and what sets the upper limit."""

    low_mm: float
    high_mm: float
    reason: str


def _wanted(job: Job) -> CanRatio:
    """The can that the starting table gives for the dish."""
    angle = math.degrees(half_angle_rad(job.dish.focal_ratio))
    return start_can(angle, job.wishes.goal, choke=bool(job.can.choke))


def _cutoff_bore_mm(job: Job) -> float:
    return cutoff_bore_mm("TE11", job.target.frequency_mhz)


def bore_range(job: Job) -> BoreRange:
    """Bore from the TE11 cut-off with a margin, up to what the stock, the printer's bed or a given choke allows."""
    low = CUTOFF_MARGIN * _cutoff_bore_mm(job)
    high, reason = min(_upper_limits(job))
    if high < low:
        raise NoSolutionError(
            f"{reason} allows a bore of {high:.0f} mm, but TE11 is cut off below {_cutoff_bore_mm(job):.0f} mm at "
            f"{job.target.frequency_mhz:g} MHz, and {low:.0f} mm is the least with a margin; use a larger one, or "
            "another make of can"
        )
    return BoreRange(low, high, reason)


def _upper_limits(job: Job) -> Iterator[tuple[float, str]]:
    """Largest bores with what sets each."""
    wall = job.can.wall_mm or WALL_MM[job.can.make]
    yield LARGEST_WAVELENGTHS * job.wavelength_mm, f"{LARGEST_WAVELENGTHS:g} wavelengths"
    if job.can.make == "printed":
        flange = 0.0 if job.can.flange.pattern == "none" else PRINT_FLANGE_MM
        bed = job.limits.bed_mm
        room = min(bed[:2]) - 2 * wall - flange
        if room >= BED_SHARE * _wanted(job).bore * job.wavelength_mm:
            yield room, f"the printer's bed of {bed[0]:g} x {bed[1]:g} mm"
    if job.can.make in ("rolled", "folded"):
        sheet = max(job.limits.sheet_mm)
        yield (sheet - SEAM_MM) / math.pi - wall, f"sheet of {sheet:g} mm length for the wall"
    choke = job.can.choke
    if isinstance(choke, Choke) and choke.bore_mm is not None:
        room = choke.bore_mm - 2 * wall - LEAST_GAP_WAVELENGTHS * job.wavelength_mm
        yield room, f"can.choke.bore_mm of {choke.bore_mm:g} mm"


def find_can(
    job: Job, stock: LoopStock, place: FrontPlace, solve: SolveSizes, progress: Progress
) -> CanFound:
    """The can for the job. Sizes that the job fixes are kept exactly; what is left is searched."""
    search = _Search(job, stock, place, solve, progress)
    can = search.start()
    if job.fixed.can_bore_mm is None:
        can = search.along(can, "bore_mm", BORE_STEP * can.bore_mm)
    if job.fixed.can_depth_mm is None:
        can = search.along(can, "depth_mm", DEPTH_STEP * can.depth_mm)
    if can.choke is not None:
        given = job.can.choke if isinstance(job.can.choke, Choke) else Choke()
        if given.bore_mm is None:
            can = search.along(can, "choke.bore_mm", CHOKE_BORE_STEP * can.choke.bore_mm)
        if given.depth_mm is None and can.choke is not None:
            can = search.along(can, "choke.depth_mm", CHOKE_DEPTH_STEP * can.choke.depth_mm)
        if given.floor_z_mm is None:
            # With the depth kept, the floor's height is the set-back of the rim.
            can = search.along(can, "choke.floor_z_mm", SET_BACK_STEP_WAVELENGTHS * job.wavelength_mm)
    return CanFound(can, tuple(search.trials), tuple(search.remarks))


class _Search:
    """Coordinate search that remembers what it has computed."""

    def __init__(
        self,
        job: Job,
        stock: LoopStock,
        place: FrontPlace,
        solve: SolveSizes,
        progress: Progress,
    ) -> None:
        self.job, self.stock, self.place = job, stock, place
        self.solve, self.progress, self.step = solve, progress, job.limits.resolution_mm
        self.half_angle = math.degrees(half_angle_rad(job.dish.focal_ratio))
        height = job.fixed.loop_height_mm or place.height * job.wavelength_mm
        self.least_depth = height + RIM_WAVELENGTHS * job.wavelength_mm
        self.trials: list[CanTrial] = []
        self.known: dict[CanShape, float] = {}
        self.remarks: list[str] = []
        fixed = job.fixed.can_bore_mm
        self.range = BoreRange(fixed, fixed, "the job") if fixed else bore_range(job)
        if fixed and fixed <= _cutoff_bore_mm(job):
            raise NoSolutionError(
                f"fixed.can_bore_mm is {fixed:g} mm: TE11 is cut off below "
                f"{_cutoff_bore_mm(job):.1f} mm at {job.target.frequency_mhz:g} MHz; "
                f"use a bore of at least {CUTOFF_MARGIN * _cutoff_bore_mm(job):.1f} mm"
            )

    def start(self) -> CanShape:
        job, wavelength, step = self.job, self.job.wavelength_mm, self.job.limits.resolution_mm
        ratio = _wanted(job)
        wanted = ratio.bore * wavelength
        bore = job.fixed.can_bore_mm or self.clip(round_to(wanted, step))
        if job.fixed.can_bore_mm is None and wanted > self.range.high_mm:
            self.remarks.append(
                f"The dish asks for a bore of about {wanted:.0f} mm; {self.range.reason} limits it to {bore:.0f} mm."
            )
        depth = job.fixed.can_depth_mm or round_to(max(ratio.depth * wavelength, self.least_depth), step)
        return self.with_choke(CanShape(bore, depth))

    def clip(self, bore_mm: float) -> float:
        step = self.job.limits.resolution_mm
        low, high = math.ceil(self.range.low_mm / step) * step, math.floor(self.range.high_mm / step) * step
        return round_to(min(max(bore_mm, low), high), step) if low < high else bore_mm

    def with_choke(self, can: CanShape) -> CanShape:
        """The same can with the choke that goes with its sizes; sizes given in the job are kept."""
        asked = self.job.can.choke
        if not asked:
            return replace(can, choke=None)
        given = asked if isinstance(asked, Choke) else Choke()
        return replace(can, choke=choke_for(self.job, given, can))

    def along(self, can: CanShape, name: str, step: float) -> CanShape:
        """The best of three values of one size and of the top of the parabola through them."""
        size = _size_of(can, name)
        cans = [self.moved(can, name, x) for x in (size, size - step, size + step)]
        points = [(_size_of(c, name), self.merit(c)) for c in cans]
        best = parabola_top(points)
        found = self.moved(can, name, best)
        value = _size_of(found, name)
        if all(abs(value - x) > 0.25 * step for x, _ in points):
            points.append((value, self.merit(found)))
            return self.moved(can, name, max(points, key=lambda p: p[1])[0])
        return found

    def moved(self, can: CanShape, name: str, value: float) -> CanShape:
        rounded = round_to(value, self.job.limits.resolution_mm)
        if name.startswith("choke."):
            return self.with_moved_choke(can, name.removeprefix("choke."), rounded)
        if name == "bore_mm":
            return self.with_choke(replace(can, bore_mm=self.clip(rounded)))
        return self.with_choke(replace(can, depth_mm=max(rounded, round_to(self.least_depth, self.step))))

    def with_moved_choke(self, can: CanShape, name: str, value: float) -> CanShape:
        """Another choke bore, clear of the can's wall; another depth, with the rim where it was; or another height of
        the floor, the rim no higher than the can's."""
        if can.choke is None:
            return can
        wall = self.job.can.wall_mm or WALL_MM[self.job.can.make]
        if name == "bore_mm":
            least = can.bore_mm + 2 * wall + LEAST_GAP_WAVELENGTHS * self.job.wavelength_mm
            return replace(can, choke=replace(can.choke, bore_mm=max(value, round_to(least, self.step))))
        if name == "floor_z_mm":
            highest = max(can.choke.floor_z_mm, round_to(can.depth_mm - can.choke.depth_mm, self.step))
            floor = buildable_choke_floor_mm(self.job, can, min(max(value, 0.0), highest), highest)
            return replace(can, choke=replace(can.choke, floor_z_mm=floor))
        rim = can.choke.floor_z_mm + can.choke.depth_mm
        fixed = isinstance(self.job.can.choke, Choke) and self.job.can.choke.floor_z_mm is not None
        floor = can.choke.floor_z_mm if fixed else max(0.0, round_to(rim - value, self.step))
        if not fixed:
            floor = buildable_choke_floor_mm(self.job, can, floor, can.depth_mm - value)
        return replace(can, choke=replace(can.choke, depth_mm=value, floor_z_mm=floor))

    def merit(self, can: CanShape) -> float:
        if can in self.known:
            return self.known[can]
        ring = "" if can.choke is None else f", choke {can.choke.bore_mm:.1f} mm, {can.choke.depth_mm:.1f} mm deep"
        self.progress.step(f"searching the can: bore {can.bore_mm:.1f} mm, depth {can.depth_mm:.1f} mm{ring}")
        # The pattern hardly depends on the tap, so any tap that the bars take will do here.
        sizes = first_sizes(Setting(self.job, self.stock, can), self.place)
        solution = self.solve(replace(sizes, tap_height_mm=tap_in_range_mm(sizes)))
        figures = in_dish(self.job, solution)
        merit = figures.merit(self.job.wishes.goal, least_efficiency(self.half_angle))
        self.known[can] = merit
        self.trials.append(
            CanTrial(
                can.bore_mm, can.depth_mm, figures.dish.aperture_efficiency, figures.noise.g_over_t_db_per_k, merit,
                can.choke,
            )
        )
        return merit


def _size_of(can: CanShape, name: str) -> float:
    """A size of the can, or of its choke for names that start with ``choke.``."""
    owner = can.choke if name.startswith("choke.") else can
    size: float = getattr(owner, name.removeprefix("choke."))
    return size


def parabola_top(points: list[tuple[float, float]]) -> float:
    """Abscissa of the top of the parabola through three points, kept inside their span widened by half; the best
    of the points where it opens upwards."""
    (x0, y0), (x1, y1), (x2, y2) = points
    best = max(points, key=lambda p: p[1])[0]
    if len({x0, x1, x2}) < 3:
        return best
    d1, d2 = (y1 - y0) / (x1 - x0), (y2 - y0) / (x2 - x0)
    curvature = (d2 - d1) / (x2 - x1)
    if curvature >= 0:
        return best
    top = x0 - (d1 - curvature * (x1 - x0)) / (2 * curvature)
    low, high = min(x0, x1, x2), max(x0, x1, x2)
    margin = 0.5 * (high - low)
    return min(max(top, low - margin), high + margin)


def buildable_choke_floor_mm(job: Job, can: CanShape, wanted_mm: float, highest_mm: float) -> float:
    """The height of the choke's floor nearest to the one wanted that its make allows, 0 where that is too high."""
    make = job.can.make
    floor = nearest_choke_floor_mm(
        wanted_mm, make, can.bore_mm, job.can.wall_mm or WALL_MM[make], job.can.floor_mm or FLOOR_MM[make]
    )
    return floor if floor <= max(highest_mm, wanted_mm) else 0.0


def choke_for(job: Job, given: Choke, can: CanShape) -> ChokeSizes:
    """The choke's sizes: what the job gives, the rest from the starting table."""
    step, wavelength = job.limits.resolution_mm, job.wavelength_mm
    wall = job.can.wall_mm or WALL_MM[job.can.make]
    bore = given.bore_mm or round_to(can.bore_mm + 2 * (wall + CHOKE.gap * wavelength), step)
    room = can.depth_mm - CHOKE.set_back * wavelength
    depth = given.depth_mm or round_to(min(CHOKE.depth * wavelength, room), step)
    floor = given.floor_z_mm
    if floor is None:
        floor = buildable_choke_floor_mm(job, can, max(0.0, round_to(room - depth, step)), room)
    if bore <= can.bore_mm + 2 * wall:
        raise JobError(
            f"can.choke.bore_mm is {bore:g} mm; it must clear the can's outside of {can.bore_mm + 2 * wall:g} mm"
        )
    return ChokeSizes(bore_mm=bore, depth_mm=depth, floor_z_mm=floor)
