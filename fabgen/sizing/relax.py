"""When nothing fits: the nearest job that does, found by really matching it.

Depends on: errors, job, progress, stock.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from typing import Any

from fabgen.errors import FabgenError
from fabgen.job import Job, typical_sheet_mm, typical_wire_mm
from fabgen.progress import Progress
from fabgen.stock import tables

MOST_TRIALS = 6
MOST_HALVINGS = 3


def nearest_that_works(job: Job, tell: Progress, find: Callable[[Job, Progress], object]) -> str:
    """A sentence that names the smallest change after which the job can be matched, or says that none was found.

    ``find`` matches a job or raises.
    """
    for count, (change, other) in enumerate(relaxed_jobs(job)):
        if count == MOST_TRIALS:
            break
        tell.step(f"looking for the nearest job that works: {change}")
        if _matches(other, tell, find):
            return f"The nearest job that works: {_nearer(job, change, other, tell, find)}"
    return "No nearby job that works was found; start again from a template"


def _nearer(job: Job, change: str, other: Job, tell: Progress, find: Callable[[Job, Progress], object]) -> str:
    """The same change; where it is one of wire or sheet, with the stock nearest to the job's own that matches, by
    halving the range between in steps of 0.1 mm."""
    form, key = job.loop.form, f"{job.loop.form}_mm"
    bad, good = getattr(job.loop, key), getattr(other.loop, key)
    if other.loop.form != form or bad == good:
        return change
    first = f"{form} of {good:g} mm"
    for _ in range(MOST_HALVINGS):
        middle = round(math.sqrt(bad * good), 1)
        if not min(bad, good) < middle < max(bad, good):
            break
        tell.step(f"looking for the nearest job that works: {form} of {middle:g} mm")
        if _matches(_with(other, "loop", {key: middle}), tell, find):
            good = middle
        else:
            bad = middle
    return change.replace(first, f"{form} of {good:g} mm")


def relaxed_jobs(job: Job) -> Iterator[tuple[str, Job]]:
    """Jobs with one wish or size less, the smallest loss first; those that the job's own rules refuse are left out."""
    for change, section, values in _relaxations(job):
        try:
            yield change, _with(job, section, values)
        except ValueError:
            continue


def _relaxations(job: Job) -> Iterator[tuple[str, str, dict[str, Any]]]:
    for key, value in job.fixed.model_dump().items():
        if value is not None:
            yield f"leave fixed.{key} out", "fixed", {key: None}
    if job.can.choke:
        yield "set can.choke = false", "can", {"choke": False}
    if job.loop.bend_radius_mm is not None:
        yield "leave loop.bend_radius_mm out", "loop", {"bend_radius_mm": None}
    wavelength = job.wavelength_mm
    if job.loop.form == "wire":
        wire = typical_wire_mm(wavelength)
        yield f"use wire of {wire:g} mm", "loop", {"wire_mm": wire, "bend_radius_mm": None}
    else:
        sheet = typical_sheet_mm(wavelength)
        plain = {"sheet_mm": sheet, "strip_width_mm": None, "bend_radius_mm": None}
        if not tables.metal(job.loop.metal).solderable:
            yield 'set loop.metal = "cuzn37"', "loop", {"metal": "cuzn37", "temper": None}
        yield f"use sheet of {sheet:g} mm and leave the strip's width out", "loop", plain
    if job.loop.form == "sheet":
        wire = typical_wire_mm(wavelength)
        change = {"form": "wire", "wire_mm": wire, "sheet_mm": None, "strip_width_mm": None, "metal": "cu-etp"}
        yield f"use a loop of {wire:g} mm wire", "loop", {**change, "temper": None, "bend_radius_mm": None}
    fixed = job.fixed.model_dump()
    if sum(value is not None for value in fixed.values()) > 1:
        yield "fix no size at all", "fixed", dict.fromkeys(fixed)
    if job.can.make != "turned":
        yield 'use can.make = "turned"', "can", {"make": "turned"}


def _with(job: Job, section: str, changes: dict[str, Any]) -> Job:
    data = job.model_dump()
    data[section].update(changes)
    return Job.model_validate(data)


def _matches(job: Job, tell: Progress, find: Callable[[Job, Progress], object]) -> bool:
    try:
        find(job, tell)
    except FabgenError:
        return False
    return True
