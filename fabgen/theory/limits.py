"""Refusing what a formula does not cover, in one wording.

Depends on: errors.
"""

from __future__ import annotations

import math

from fabgen.errors import JobError


def require_positive(**values: float) -> None:
    """Raise JobError unless every value is finite and above zero. Keyword names are shown to the reader."""
    for name, value in values.items():
        if not (math.isfinite(value) and value > 0):
            raise JobError(f"{name} is {value}: it must be a finite number above zero")


def require_between(low: float, high: float, **values: float) -> None:
    """Raise JobError unless every value lies in [low, high]."""
    for name, value in values.items():
        if not low <= value <= high:
            raise JobError(f"{name} is {value}: allowed {low:g} to {high:g}")
