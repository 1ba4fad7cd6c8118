"""Plots beside ``fabgen size``: the same pictures as on the sheets, as SVG files, and the selectivity front.

Depends on: errors, sizing.records, sizing.front, drawing, writers.
"""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from fabgen.drawing import plot
from fabgen.drawing.flow import Block
from fabgen.drawing.model import Item, Line
from fabgen.drawing.plot import Axes
from fabgen.errors import OutputError
from fabgen.sizing.front import Front
from fabgen.sizing.records import Feed

_ROLES = ("curve", "curve2", "curve3")


def feed_plots(feed: Feed) -> Mapping[str, Block]:
    """Reflection, Smith chart, pattern and sensitivities, by file name."""
    from fabgen.drawing.pages import performance

    return {
        "reflection.svg": performance.reflection_plot(feed),
        "smith.svg": performance.smith_plot(feed),
        "pattern.svg": performance.pattern_plot(feed),
        "sensitivities.svg": performance.sensitivity_plot(feed),
    }


def front_plot(front: Front, width: float = 120.0, height: float = 70.0) -> Block:
    """Aperture efficiency over rejection, one curve for each neighbour, the points marked."""
    rejections = [-value for point in front.points for value in point.rejection_db]
    efficiencies = [point.aperture_efficiency for point in front.points]
    axes = Axes(
        width,
        height,
        (min(0.0, *rejections), max(1.0, *rejections) * 1.05),
        (min(efficiencies) - 0.01, max(efficiencies) + 0.01),
    )
    items: list[Item] = [*plot.frame(axes, "rejection of the neighbour, dB", "aperture efficiency")]
    entries = []
    for i, frequency in enumerate(front.points[0].neighbour_mhz):
        role = _ROLES[i % len(_ROLES)]
        rows = sorted((-point.rejection_db[i], point.aperture_efficiency) for point in front.points)
        items += plot.curve(axes, [x for x, _ in rows], [y for _, y in rows], role)
        items += [tick for x, y in rows for tick in _mark(axes, x, y)]
        entries.append((role, f"{frequency:g} MHz"))
    items += plot.legend(tuple(entries), 2, -13.5)
    return plot.as_block(items)


def _mark(axes: Axes, x: float, y: float) -> tuple[Line, Line]:
    at_x, at_y = axes.at(x, y)
    return (Line(at_x - 0.8, at_y, at_x + 0.8, at_y, "curve"), Line(at_x, at_y - 0.8, at_x, at_y + 0.8, "curve"))


def write_plots(plots: Mapping[str, Block], folder: Path) -> None:
    """Writes each plot into the folder, which is made when it is missing. Raises OutputError."""
    from fabgen.writers.svg import write_svg

    try:
        folder.mkdir(exist_ok=True)
    except OSError as error:
        raise OutputError(f"the folder {folder} cannot be made: {error.strerror}; name another after --plots") from None
    for name, block in plots.items():
        write_svg(block.items, folder / name)
