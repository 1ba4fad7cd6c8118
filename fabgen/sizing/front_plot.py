"""The selectivity front as a vector plot: efficiency against rejection, each point with its loop.

Depends on: sizing.front.
"""

from __future__ import annotations

import io
from typing import Any

from fabgen.sizing.front import Front

INK, SECOND = "#1f3b57", "#8a5a00"
MARKS = ("o", "s", "^", "D", "v", "P")


def front_svg(front: Front) -> str:
    """SVG text of the front; the same front gives the same bytes."""
    import matplotlib as mpl
    from matplotlib.figure import Figure

    with mpl.rc_context({"svg.hashsalt": "front", "svg.fonttype": "none", "font.size": 9}):
        figure = Figure(figsize=(6.4, 4.2), layout="constrained")
        axes = figure.add_subplot()
        efficiency = [100 * p.aperture_efficiency for p in front.points]
        for index, frequency in enumerate(front.points[0].neighbour_mhz):
            rejection = [-p.rejection_db[index] for p in front.points]
            axes.plot(
                rejection, efficiency, marker=MARKS[index % len(MARKS)], color=SECOND if index % 2 else INK,
                linewidth=1.2, linestyle="-" if index % 2 == 0 else "--", label=f"at {frequency:g} MHz",
            )  # fmt: skip
            _label_ends(axes, rejection, efficiency)
        axes.set_xlabel("rejection relative to the target (dB)")
        axes.set_ylabel("aperture efficiency (%)")
        axes.grid(visible=True, linewidth=0.4, alpha=0.6)
        axes.margins(0.08, 0.15)
        axes.legend(loc="best", frameon=False)
        text = io.StringIO()
        figure.savefig(text, format="svg", metadata={"Date": None, "Creator": None})
    return text.getvalue()


def _label_ends(axes: Any, rejection: list[float], efficiency: list[float]) -> None:
    for at, word in ((0, "sharp"), (-1, "broad")):
        place = (rejection[at], efficiency[at])
        axes.annotate(word, place, xytext=(0, -13), textcoords="offset points", ha="center")
