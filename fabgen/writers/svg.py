"""Drawing items as SVG, in millimetres, for pages on the web and the read-me.

Depends on: drawing.
"""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from xml.sax.saxutils import escape

from fabgen.drawing.fonts import font_size_mm
from fabgen.drawing.model import PENS, Arc, Box, Colour, Item, Line, Polyline, Sheet, Text, bounds
from fabgen.errors import OutputError


def write_svg(view: Sheet | Iterable[Item], path: Path, margin_mm: float = 3.0) -> None:
    """Write a sheet, or items cropped to their bounds with a margin. Raises OutputError."""
    try:
        path.write_text(svg_text(view, margin_mm), encoding="utf-8", newline="\n")
    except OSError as error:
        raise OutputError(
            f"{path.name} could not be written: {error.strerror or error}. Give a folder that can be written."
        ) from error


def svg_text(view: Sheet | Iterable[Item], margin_mm: float = 3.0) -> str:
    """The SVG document as text."""
    if isinstance(view, Sheet):
        items, box = view.items, Box(0, 0, view.width_mm, view.height_mm)
    else:
        items = tuple(view)
        box = bounds(items).grown(margin_mm)
    body = "\n".join(_element(item, box) for item in items)
    w, h = _n(box.width), _n(box.height)
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{w}mm" height="{h}mm" viewBox="0 0 {w} {h}">\n'
        f'<rect width="{w}" height="{h}" fill="#ffffff"/>\n{body}\n</svg>\n'
    )


def _n(value: float) -> str:
    text = f"{value:.3f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def _colour(colour: Colour) -> str:
    return "#" + "".join(f"{round(255 * c):02x}" for c in colour)


def _stroke(role: str | None) -> str:
    if role is None:
        return 'stroke="none"'
    pen = PENS[role]
    dash = f' stroke-dasharray="{" ".join(_n(d) for d in pen.dash_mm)}"' if pen.dash_mm else ""
    return f'stroke="{_colour(pen.colour)}" stroke-width="{_n(pen.width_mm)}" stroke-linecap="round"{dash}'


def _element(item: Item, box: Box) -> str:
    def at(point: tuple[float, float]) -> str:
        return f"{_n(point[0] - box.x0)} {_n(box.y1 - point[1])}"

    match item:
        case Line():
            return f'<path d="M{at((item.x0, item.y0))}L{at((item.x1, item.y1))}" {_stroke(item.role)}/>'
        case Arc():
            pieces = item.beziers()
            curve = "".join(f"C{at(b)} {at(c)} {at(d)}" for _, b, c, d in pieces)
            return f'<path d="M{at(pieces[0][0])}{curve}" fill="none" {_stroke(item.role)}/>'
        case Polyline():
            fill = _colour(item.fill) if item.fill is not None else "none"
            line = "L".join(at(p) for p in item.points) + ("Z" if item.closed else "")
            return f'<path d="M{line}" fill="{fill}" {_stroke(item.role)}/>'
        case Text():
            return _text_element(item, box)


def _text_element(item: Text, box: Box) -> str:
    x, y = _n(item.x - box.x0), _n(box.y1 - item.y)
    turn = f' transform="rotate({_n(-item.turn_deg)} {x} {y})"' if item.turn_deg else ""
    weight = ' font-weight="bold"' if item.bold else ""
    return (
        f'<text x="{x}" y="{y}" font-family="DejaVu Sans, sans-serif" font-size="{_n(font_size_mm(item.height_mm))}" '
        f'text-anchor="{item.anchor}" fill="{_colour(item.colour)}"{weight}{turn}>{escape(item.text)}</text>'
    )
