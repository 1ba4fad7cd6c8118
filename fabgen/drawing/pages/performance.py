"""Expected reflection, Smith chart, patterns with the dish's edge, and what each tolerance does.

Depends on: drawing.plot, sizing.records.
"""

from __future__ import annotations

import math
from bisect import bisect_left, bisect_right

from fabgen.drawing import plot
from fabgen.drawing.flow import COLUMN_WIDTH_MM, Block, beside, gap
from fabgen.drawing.model import WHITE, Arc, Item, Line, Point, Polyline, Text, number
from fabgen.drawing.plot import Axes
from fabgen.drawing.texts import say, size_name
from fabgen.sizing.records import Feed, PatternCut

FLOOR_DB = -40.0


def spread_mhz(feed: Feed) -> float:
    """Half width of the band in which the dip is expected before trimming: root sum of squares of what the
    tolerances and the computation's own uncertainty do to the resonance."""
    effects = [s.effect_mhz for s in feed.sensitivities]
    return math.sqrt(sum(e * e for e in effects) + feed.settings.resonance_uncertainty_mhz**2)


def reflection_db(feed: Feed) -> tuple[list[float], list[float]]:
    """Frequencies and reflection in dB, from -60 up."""
    response = feed.predicted.response
    values = [max(-60.0, 20 * math.log10(max(abs(r), 1e-6))) for r in response.reflection]
    return list(response.frequency_mhz), values


def reflection_plot(feed: Feed, width: float = 86.0, height: float = 62.0) -> Block:
    """Reflection over frequency, expected curve and the band that tolerances open."""
    f0, shift = feed.job.target.frequency_mhz, spread_mhz(feed)
    fs, db = reflection_db(feed)
    half = max(0.06 * f0, 3 * shift, 1.5 * feed.predicted.bandwidth_mhz)
    axes = Axes(width, height, (f0 - half, f0 + half), (FLOOR_DB, 0.0))
    grid = [f0 - half + 2 * half * i / 240 for i in range(241)]
    lower = [min(_within(fs, db, f, shift)) for f in grid]
    upper = [max(_within(fs, db, f, shift)) for f in grid]
    items = [
        *plot.band(axes, grid, lower, upper),
        *plot.frame(axes, say("plot.frequency"), say("plot.reflection")),
        *plot.curve(axes, grid, upper, "curve3"),
        *plot.curve(axes, grid, lower, "curve3"),
        *plot.curve(axes, grid, [_at(fs, db, f) for f in grid], "curve"),
        *plot.level(axes, -feed.job.wishes.return_loss_db, "hidden"),
        *plot.upright(axes, f0, "centre", f"{number(f0, 3)} MHz"),
        *plot.legend(
            (("curve", say("plot.expected")), ("curve3", say("plot.band", shift=number(shift, 1))),
             ("hidden", say("plot.wished", level=number(feed.job.wishes.return_loss_db)))),
            2, -13.5,
        ),
    ]  # fmt: skip
    return plot.as_block(items, say("plot.reflection_title"))


def _within(fs: list[float], values: list[float], f: float, half: float) -> list[float]:
    """Values from f - half to f + half: both ends and every node between, so that no dip falls between two of them."""
    nodes = values[bisect_left(fs, f - half) : bisect_right(fs, f + half)]
    return [_at(fs, values, f - half), *nodes, _at(fs, values, f + half)]


def _at(fs: list[float], values: list[float], f: float) -> float:
    """Linear interpolation, held at the ends."""
    if f <= fs[0]:
        return values[0]
    if f >= fs[-1]:
        return values[-1]
    low, high = 0, len(fs) - 1
    while high - low > 1:
        middle = (low + high) // 2
        if fs[middle] <= f:
            low = middle
        else:
            high = middle
    t = (f - fs[low]) / (fs[high] - fs[low])
    return values[low] + t * (values[high] - values[low])


def smith_plot(feed: Feed, radius: float = 33.0) -> Block:
    """Reflection within 6 percent of the target on the Smith chart, the target marked."""
    f0 = feed.job.target.frequency_mhz
    response = feed.predicted.response
    near = [r for f, r in zip(response.frequency_mhz, response.reflection, strict=True) if abs(f / f0 - 1) <= 0.06]
    items: list[Item] = list(plot.smith_chart(radius))
    if len(near) > 1:
        points = tuple((radius * r.real, radius * r.imag) for r in near)
        items += [Polyline(points, "curve")]
        items += [*_end_of_trace(points[0], say("plot.low")), *_end_of_trace(points[-1], say("plot.high"))]
    pairs = zip(response.frequency_mhz, response.reflection, strict=True)
    _, target = min(((abs(f - f0), r) for f, r in pairs), key=lambda p: p[0])
    items.append(Arc(radius * target.real, radius * target.imag, 1.3, 1.3, role="outline"))
    wish = 10 ** (-feed.job.wishes.return_loss_db / 20)
    items.append(Arc(0, 0, radius * wish, radius * wish, role="hidden"))
    return plot.as_block(items, say("plot.smith_title"))


def _end_of_trace(end: Point, name: str) -> tuple[Item, ...]:
    """A name on a leader that ends clear of the trace and the marks in the middle, to the left where it is empty."""
    x, y = -16.0, math.copysign(max(abs(end[1]) + 5.0, 9.0), end[1])
    return (
        Line(*end, x, y, "fine"),
        Polyline(((x - 9.0, y - 1.3), (x, y - 1.3), (x, y + 2.2), (x - 9.0, y + 2.2)), None, True, WHITE),
        Text(x - 0.5, y - 0.4, name, 1.8, "end"),
    )


def edge_deg(feed: Feed) -> float:
    """Angle off the axis at which the dish's rim is seen from the focus: 2 atan(1 / (4 f/D))."""
    return math.degrees(2 * math.atan(1 / (4 * feed.job.dish.focal_ratio)))


def pattern_plot(feed: Feed, width: float = 150.0, height: float = 62.0) -> Block:
    """Directivity in both planes, co- and cross-polar, with the dish's edge."""
    cuts = feed.predicted.patterns
    top = max((max(c.co_dbi) for c in cuts), default=10.0)
    high = 5 * math.ceil((top + 0.5) / 5)
    axes = Axes(width, height, (-180.0, 180.0), (high - 45.0, high))
    items: list[Item] = list(plot.frame(axes, say("plot.angle"), say("plot.directivity"), x_step=30.0))
    entries: list[tuple[str, str]] = []
    for c in cuts:
        name, role = _plane(c)
        items += plot.curve(axes, c.theta_deg, c.co_dbi, role)
        entries.append((role, say("plot.co", plane=name)))
    # The feed is its own mirror image in the H-plane, so no cross-polar field is seen there.
    crossed = [c for c in cuts if c.phi_deg != 0.0]
    for c, role in zip(crossed, ("curve3", "centre"), strict=False):
        items += plot.curve(axes, c.theta_deg, c.cross_dbi, role)
        entries.append((role, say("plot.cross", plane=_plane(c)[0])))
    edge = edge_deg(feed)
    items += plot.upright(axes, -edge, "phantom", say("plot.edge"))
    items += plot.upright(axes, edge, "phantom", say("plot.edge"))
    half = (len(entries) + 1) // 2
    items += plot.legend(entries[:half], 10, -13.5)
    items += plot.legend(entries[half:], width / 2 + 5, -13.5)
    return plot.as_block(items, say("plot.pattern_title"), COLUMN_WIDTH_MM)


def _plane(c: PatternCut) -> tuple[str, str]:
    """Name and line of a cut: phi = 90 degrees is the E-plane (yz)."""
    phi = c.phi_deg % 180
    if abs(phi - 90) < 1:
        return "E", "curve"
    if phi < 1 or phi > 179:
        return "H", "curve2"
    return f"φ = {number(c.phi_deg)}°", "thin"


def sensitivity_plot(feed: Feed) -> Block:
    """What each tolerance does to the resonance, largest first."""
    ordered = sorted(feed.sensitivities, key=lambda s: (-abs(s.effect_mhz), s.size))
    names = [size_name(s.size) for s in ordered]
    values = [math.copysign(s.effect_mhz, s.resonance_mhz_per_mm) for s in ordered]
    texts = [
        say("plot.effect", effect=number(s.effect_mhz, 2), tolerance=number(s.tolerance_mm, 3),
            unit="pF" if s.size.endswith("_pf") else "mm")
        for s in ordered
    ]  # fmt: skip
    items = plot.bars(names, values, texts, COLUMN_WIDTH_MM - 8, 62.0)
    items = (*items, Text(62.0, -6.0 * len(names) - 4.0, say("plot.sensitivity_key"), 1.8))
    return plot.as_block(items, say("plot.sensitivity_title"), COLUMN_WIDTH_MM)


def reflection_and_smith(feed: Feed) -> Block:
    """Both reflection pictures side by side."""
    return beside((reflection_plot(feed), smith_plot(feed)), (0.0, 98.0))


def blocks(feed: Feed) -> list[Block]:
    """Reflection and sensitivities, with space between."""
    out: list[Block] = []
    if feed.predicted.response.frequency_mhz:
        out += [reflection_and_smith(feed), gap(4)]
    if feed.sensitivities:
        out += [sensitivity_plot(feed), gap(4)]
    return out


def pattern_blocks(feed: Feed) -> list[Block]:
    """The pattern plot, where patterns were computed."""
    return [pattern_plot(feed), gap(4)] if feed.predicted.patterns else []
