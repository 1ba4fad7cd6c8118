"""The register of checks: one function per code, with the limits it reads and where they come from.

A check is a generator over a ``Context`` that yields ``Fault``s; the register adds code, severity and source. The
catalogue page and ``fabgen check`` are both made from this register.

Depends on: errors, stock, job, sizing.records, parts.records, checks.records.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

from fabgen.checks.records import Finding, Severity
from fabgen.errors import FabgenError
from fabgen.job import Job
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed, Sizes
from fabgen.stock import tables
from fabgen.stock.records import Limit, Source

GROUPS = {
    "ELEC": "Electrical",
    "SHEET": "Sheet metal",
    "WIRE": "Wire",
    "PRINT": "Printed parts",
    "ASSY": "Assembly",
    "OUT": "Outdoors",
    "CONS": "Consistency",
    "NOTE": "Overrides",
}
SEVERITIES: tuple[Severity, ...] = ("stop", "caution", "note")


@dataclass(frozen=True)
class Fault:
    """What a check found. ``severity`` and ``source`` only where they differ from the register's."""

    part: str
    feature: str
    value: str
    limit: str
    message: str
    cure: str
    severity: Severity | None = None
    source: str = ""


@dataclass(frozen=True)
class Context:
    """What a check may look at."""

    feed: Feed
    parts: tuple[Part, ...]

    @property
    def job(self) -> Job:
        return self.feed.job

    @property
    def sizes(self) -> Sizes:
        return self.feed.sizes

    @property
    def frequency_mhz(self) -> float:
        return self.job.target.frequency_mhz

    @property
    def wavelength_mm(self) -> float:
        return self.job.wavelength_mm

    @property
    def printed(self) -> bool:
        return self.job.can.make == "printed"

    @property
    def outdoors(self) -> bool:
        return self.job.limits.environment == "outdoor"

    def limit(self, key: str) -> float:
        """The value of a limit, the job's own where it overrides the table."""
        return tables.limit(key, self.job.overrides).value


CheckFunction = Callable[[Context], Iterator[Fault]]


@dataclass(frozen=True)
class Check:
    """A registered check. ``title`` is the first sentence of the function's docstring."""

    code: str
    severity: Severity
    title: str
    limits: tuple[str, ...]
    source: str
    function: CheckFunction


_REGISTER: dict[str, Check] = {}


def check(
    code: str, severity: Severity, *limits: str, source: str = ""
) -> Callable[[CheckFunction], CheckFunction]:
    """Register a check under its code; ``limits`` are the keys of the limits it reads."""

    def register(function: CheckFunction) -> CheckFunction:
        if code in _REGISTER:
            raise FabgenError(f"check {code} is registered twice")
        title = (function.__doc__ or "").strip().split("\n\n")[0].replace("\n    ", " ")
        _REGISTER[code] = Check(code, severity, title, limits, source, function)
        return function

    return register


def all_checks() -> tuple[Check, ...]:
    """Every registered check, in the order of groups and codes."""
    order = list(GROUPS)
    return tuple(sorted(_REGISTER.values(), key=lambda c: (order.index(c.code.split("-")[0]), c.code)))


def source_text(source: Source) -> str:
    """A source with how it is known, on one line."""
    return source.text if source.text == source.known_from else f"{source.text}; {source.known_from}"


def findings_of(entry: Check, context: Context) -> Iterator[Finding]:
    """Run one check and complete what it yields."""
    rows: Iterable[Limit] = [tables.limit(key, context.job.overrides) for key in entry.limits]
    sources = [row_source(row) for row in rows] + ([entry.source] if entry.source else [])
    known = " | ".join(dict.fromkeys(sources))
    for fault in entry.function(context):
        yield Finding(
            code=entry.code,
            severity=fault.severity or entry.severity,
            part=fault.part,
            feature=fault.feature,
            value=fault.value,
            limit=fault.limit,
            source=fault.source or known,
            message=fault.message,
            cure=fault.cure,
        )


def row_source(row: Limit) -> str:
    """The limit's source, or that the job overrides it."""
    return f"overridden in the job file: {row.key}" if row.overridden else source_text(row.source)
