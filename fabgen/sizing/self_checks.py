"""Numerical self-checks of the final solve, with numbers; one that fails stops the sizing.

Depends on: errors, sizing.field_model, sizing.records.
"""

from __future__ import annotations

import math

from fabgen.errors import NumericalError
from fabgen.sizing.field_model import SWEEP_ERROR
from fabgen.sizing.records import SelfCheck
from fabgen.sizing.solver import Solution


def self_checks(solution: Solution, sweep_error: float, reflection_change: float) -> tuple[SelfCheck, ...]:
    """Power balance, residual, condition, mesh, sweep and second mesh, each against its limit."""
    rows = (
        ("power balance", abs(solution.power_balance), 0.01, "input minus radiated minus ohmic power, over input"),
        ("residual", solution.residual, 1e-6, "largest backward error of a row, |Zx - v| over |Z||x| + |v|"),
        ("condition", solution.condition, 1e9, "of the system that was factorised"),
        ("largest edge", solution.largest_edge_wavelengths, 0.2, "of the mesh, in wavelengths"),
        ("sweep error", sweep_error, SWEEP_ERROR, "estimated change of reflection between the solved frequencies"),
        ("second mesh", reflection_change, 0.2, "change of reflection at the target on a coarser mesh"),
    )
    return tuple(
        SelfCheck(name, _two_digits(value), limit, math.isfinite(value) and value <= limit, meaning)
        for name, value, limit, meaning in rows
    )


def _two_digits(value: float) -> float:
    """Two digits, nothing below 1e-12: what lies beneath is the rounding of the machine and differs between runs."""
    return float(f"{max(value, 1e-12):.2g}")


def require_passed(checks: tuple[SelfCheck, ...]) -> None:
    """Raise ``NumericalError`` naming each failed check with its value and limit."""
    failed = [f"{c.name} {c.value:.3g} (limit {c.limit:g}): {c.meaning}" for c in checks if not c.passed]
    if failed:
        raise NumericalError(
            "the field computation fails its own checks: "
            + "; ".join(failed)
            + ". Nothing was sized; change the sizes that the job fixes, or report this job file"
        )
