"""Rounding to the shop's resolution.

Depends on: errors.
"""

from __future__ import annotations

import math
from decimal import ROUND_HALF_UP, Decimal

from fabgen.errors import JobError


def round_to(value: float, step: float) -> float:
    """The multiple of ``step`` nearest to ``value``, halves away from zero, free of binary tails.

    ``step`` is a decimal figure such as 0.1 or 0.05 in the unit of ``value``.
    """
    if not (math.isfinite(value) and math.isfinite(step) and step > 0):
        raise JobError(f"cannot round {value} to steps of {step}: give a finite value and a step above 0")
    unit = Decimal(repr(step))
    count = (Decimal(repr(value)) / unit).quantize(Decimal(1), rounding=ROUND_HALF_UP)
    return float(count * unit)
