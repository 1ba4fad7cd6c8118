"""The finding: one thing that a check has to say.

Depends on: nothing.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Severity = Literal["stop", "caution", "note"]


@dataclass(frozen=True)
class Finding:
    """``code`` is stable and our own (like ``SHEET-101``); ``cure`` says what to do, with a number."""

    code: str
    severity: Severity
    part: str
    feature: str
    value: str
    limit: str
    source: str
    message: str
    cure: str
