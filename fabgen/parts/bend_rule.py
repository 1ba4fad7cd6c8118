"""Which K the job's bends are laid out with: DIN 6935, the handbook's constant, or the user's own test bend.

Everywhere in fabgen K is the share of the thickness at which the neutral fibre lies, counted from the inside:
allowance = angle * (R + K t). DIN 6935 prints k = 2 K.

Depends on: errors, job, stock, theory.bending.
"""

from __future__ import annotations

from fabgen.errors import JobError
from fabgen.job import Limits
from fabgen.stock.records import Temper
from fabgen.theory.bending import din_k_factor

DEFINITION = "K: neutral fibre at R + K t from the bend's centre; DIN 6935 k = 2 K"


def chosen_k(
    limits: Limits, temper: Temper, inside_radius_mm: float, thickness_mm: float, *, can: bool = False
) -> float:
    """K for one bend by the job's ``limits.bend_rule``; ``can``: of the can's sheet, which may have a K of its own."""
    if limits.bend_rule == "test-bend":
        own = limits.can_test_bend_k if can and limits.can_test_bend_k is not None else limits.test_bend_k
        if own is None:
            raise JobError("limits.bend_rule is 'test-bend' but limits.test_bend_k is not given")
        return own
    if limits.bend_rule == "handbook":
        return temper.handbook_k
    return din_k_factor(inside_radius_mm, thickness_mm)


def rule_text(limits: Limits) -> str:
    """The rule with its source and the definition of K, for tables and pages."""
    texts = {
        "din6935": "K from DIN 6935: K = (0.65 + 0.5 log10(R/t)) / 2 up to R/t = 5, then 0.5",
        "handbook": "K from Machinery's Handbook 28th ed., 'Bending Sheet Metal', by hardness",
        "test-bend": "K from the user's own test bend",
    }
    return f"{texts[limits.bend_rule]}; {DEFINITION}"
