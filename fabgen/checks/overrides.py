"""Limits that the job overrides, said on the sheets.

Depends on: checks.registry, stock.
"""

from __future__ import annotations

from collections.abc import Iterator

from fabgen.checks.registry import Context, Fault, check, source_text
from fabgen.stock import tables


@check("NOTE-101", "note")
def overridden_limits(context: Context) -> Iterator[Fault]:
    """Limits of the trade that the job file overrides."""
    for key, value in sorted(context.job.overrides.items()):
        row = tables.limit(key)
        yield Fault(
            part="all",
            feature=key,
            value=f"{value:g} {row.unit}",
            limit=f"{row.value:g} {row.unit}",
            message=f"the job overrides the limit '{row.meaning}': {value:g} in place of {row.value:g} {row.unit}",
            cure=f"take overrides.{key} out of the job file to check against {row.value:g} {row.unit} again",
            source=source_text(row.source),
        )
