"""The register of checks of a written pack: files against files. All are of severity stop.

Depends on: checks (registry, read_files).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator

from fabgen.checks.read_files import Pack
from fabgen.checks.registry import Fault

PackCheck = Callable[[Pack], Iterator[Fault]]
PACK_CODES: dict[str, tuple[str, PackCheck]] = {}
SOURCE = "the pack's own files"
SHEETS_CODE = "CONS-213"
SHEETS_TITLE = "Every text of the sheets against the sheets drawn anew from the record (`check PACK`)."
TABLES_CODE = "CONS-214"
TABLES_TITLE = (
    "Every cell of parts.csv, findings.csv and the bend tables and every line of the order notes against those written "
    "anew from the record (`check PACK`)."
)
SOLID_CODES = frozenset({"CONS-208"})
"""Checks that read solids with the CAD kernel (seconds)."""


def pack_check(code: str) -> Callable[[PackCheck], PackCheck]:
    """Register a check of a written pack."""

    def register(function: PackCheck) -> PackCheck:
        PACK_CODES[code] = (" ".join((function.__doc__ or "").split()), function)
        return function

    return register


def differs(part: str, feature: str, value: str, limit: str, message: str) -> Fault:
    """A file that says something else than another."""
    cure = f"write the pack anew; do not use {part} as it is: {value} is wrong"
    return Fault(part, feature, value, limit, message, cure)
