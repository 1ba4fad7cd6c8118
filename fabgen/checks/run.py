"""Run every check on a feed and its parts.

Depends on: checks, parts.records, sizing.records, stock.
"""

from __future__ import annotations

from collections.abc import Sequence

from fabgen.checks import assembly, consistency, electrical, materials, outdoors, overrides, printed, sheet, wire
from fabgen.checks.records import Finding
from fabgen.checks.registry import GROUPS, SEVERITIES, Context, all_checks, findings_of
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from fabgen.stock import tables

MODULES = (electrical, materials, sheet, wire, printed, assembly, outdoors, consistency, overrides)
"""The modules whose import registers their checks."""


def run_checks(feed: Feed, parts: Sequence[Part]) -> tuple[Finding, ...]:
    """All findings of a feed and its parts: stop first, then caution, then note; by code, part and feature.

    Solves nothing and builds no solid. Raises JobError when an override names a limit that does not exist."""
    tables.check_overrides(feed.job.overrides)
    context = Context(feed, tuple(parts))
    found = [finding for entry in all_checks() for finding in findings_of(entry, context)]
    return tuple(sorted(found, key=_order))


def _order(finding: Finding) -> tuple[int, int, str, str, str]:
    group = list(GROUPS).index(finding.code.split("-")[0])
    return SEVERITIES.index(finding.severity), group, finding.code, finding.part, finding.feature
