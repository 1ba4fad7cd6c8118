"""Run every check on a feed and its parts.

Depends on: checks, parts.records, sizing.records, stock.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import replace

from fabgen.checks import (
    assembly,
    consistency,
    electrical,
    joints,
    materials,
    outdoors,
    overrides,
    printed,
    sheet,
    wire,
)
from fabgen.checks.records import Finding
from fabgen.checks.registry import GROUPS, SEVERITIES, Context, all_checks, findings_of
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from fabgen.stock import tables

MODULES = (electrical, joints, materials, sheet, wire, printed, assembly, outdoors, consistency, overrides)
"""The modules whose import registers their checks."""


def run_checks(feed: Feed, parts: Sequence[Part]) -> tuple[Finding, ...]:
    """All findings of a feed and its parts: stop first, then caution, then note; by code, part and feature.

    Solves nothing and builds no solid. Raises JobError when an override names a limit that does not exist."""
    tables.check_overrides(feed.job.overrides)
    context = Context(feed, tuple(parts))
    found = [finding for entry in all_checks() for finding in gathered(findings_of(entry, context))]
    return tuple(sorted(found, key=_order))


def gathered(findings: Iterable[Finding]) -> Iterator[Finding]:
    """Findings of one check with those of one part and one value told once: thirty equal tabs are one finding."""
    groups: dict[tuple[str, ...], list[Finding]] = {}
    for finding in findings:
        groups.setdefault((finding.part, finding.severity, finding.value, finding.limit), []).append(finding)
    for group in groups.values():
        first, more = group[0], len(group) - 1
        yield replace(first, feature=f"{first.feature} and {more} more alike") if more else first


def _order(finding: Finding) -> tuple[int, int, str, str, str]:
    group = list(GROUPS).index(finding.code.split("-")[0])
    return SEVERITIES.index(finding.severity), group, finding.code, finding.part, finding.feature
