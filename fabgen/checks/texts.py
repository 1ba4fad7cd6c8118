"""Values as the findings print them: short, with their unit.

Depends on: nothing of the project.
"""

from __future__ import annotations

import math


def mm(value: float) -> str:
    """Millimetres with at most two decimals, three for films."""
    digits = 3 if 0 < abs(value) < 0.1 else 2
    return f"{round(value, digits):g} mm"


def up(value: float, step: float = 0.1) -> float:
    """The next multiple of ``step`` at or above the value, so that a cure is never short by rounding."""
    return round(math.ceil(value / step - 1e-9) * step, 6)


def down(value: float, step: float = 0.1) -> float:
    """The next multiple of ``step`` at or below the value."""
    return round(math.floor(value / step + 1e-9) * step, 6)


def size_words(name: str) -> str:
    """A size of the feed in words, without its unit: ``loop_diameter_mm`` is "loop diameter"."""
    if name == "series_capacitor_pf":
        return "overlap of the capacitor"
    return name.removeprefix("choke.").removesuffix("_mm").replace("leg", "bar").replace("_", " ") + (
        " of the choke" if name.startswith("choke.") else ""
    )
