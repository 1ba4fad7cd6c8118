"""Sheets of the drawing model as one PDF: true scale, embedded font, searchable text, same bytes each time.

Depends on: drawing.
"""

from __future__ import annotations

import contextlib
import os
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from fabgen.drawing.fonts import FONT_NAMES, font_path, font_size_mm
from fabgen.drawing.model import PENS, Arc, Colour, Item, Line, Pen, Polyline, Sheet, Text
from fabgen.errors import OutputError

POINTS_PER_MM = 72 / 25.4


@dataclass(frozen=True)
class Metadata:
    """What the file says of itself."""

    title: str
    author: str
    subject: str
    keywords: tuple[str, ...] = ()
    creator: str = "fabgen"


def write_pdf(sheets: tuple[Sheet, ...], path: Path, metadata: Metadata) -> None:
    """Write the sheets, one page each at its own size. Raises OutputError when the file cannot be written."""
    from reportlab.pdfgen.canvas import Canvas

    _register_fonts()
    first = sheets[0]
    try:
        with _fixed_date():
            canvas = Canvas(
                str(path),
                pagesize=(first.width_mm * POINTS_PER_MM, first.height_mm * POINTS_PER_MM),
                invariant=1,
                pageCompression=1,
                initialFontName=FONT_NAMES[False],
                lang="en",
            )
        _describe(canvas, metadata)
        for sheet in sheets:
            _page(canvas, sheet)
        canvas.save()
    except OSError as error:
        raise OutputError(
            f"The sheets could not be written to {path.name}: {error.strerror or error}. "
            "Give a folder that can be written and has 3 MB free."
        ) from error


@contextlib.contextmanager
def _fixed_date() -> Iterator[None]:
    """The library takes its fixed date from SOURCE_DATE_EPOCH where that is set; a pack is the same everywhere."""
    kept = os.environ.pop("SOURCE_DATE_EPOCH", None)
    try:
        yield
    finally:
        if kept is not None:
            os.environ["SOURCE_DATE_EPOCH"] = kept


def _register_fonts() -> None:
    from reportlab.pdfbase import pdfmetrics
    from reportlab.pdfbase.ttfonts import TTFont

    for bold, name in FONT_NAMES.items():
        if name not in pdfmetrics.getRegisteredFontNames():
            pdfmetrics.registerFont(TTFont(name, str(font_path(bold))))


def _describe(canvas: Any, metadata: Metadata) -> None:
    canvas.setTitle(metadata.title)
    canvas.setAuthor(metadata.author)
    canvas.setSubject(metadata.subject)
    canvas.setKeywords(list(metadata.keywords))
    canvas.setCreator(metadata.creator)
    canvas.setProducer(metadata.creator)
    canvas.setViewerPreference("PrintScaling", "None")
    canvas.showOutline()


def _page(canvas: Any, sheet: Sheet) -> None:
    canvas.setPageSize((sheet.width_mm * POINTS_PER_MM, sheet.height_mm * POINTS_PER_MM))
    if sheet.bookmark:
        key = f"sheet-{sheet.number}"
        canvas.bookmarkPage(key)
        canvas.addOutlineEntry(sheet.bookmark, key, level=sheet.level, closed=sheet.level > 0)
    canvas.scale(POINTS_PER_MM, POINTS_PER_MM)
    canvas.setLineCap(1)
    canvas.setLineJoin(1)
    state: dict[str, object] = {}
    for item in sheet.items:
        _draw(canvas, item, state)
    canvas.showPage()


def _draw(canvas: Any, item: Item, state: dict[str, object]) -> None:
    match item:
        case Text():
            _text(canvas, item, state)
        case Line():
            _pen(canvas, PENS[item.role], state)
            canvas.line(item.x0, item.y0, item.x1, item.y1)
        case Arc():
            _pen(canvas, PENS[item.role], state)
            canvas.drawPath(_arc_path(canvas, item), stroke=1, fill=0)
        case Polyline():
            _path(canvas, item, state)


def _arc_path(canvas: Any, arc: Arc) -> Any:
    path = canvas.beginPath()
    pieces = arc.beziers()
    path.moveTo(*pieces[0][0])
    for _, b, c, d in pieces:
        path.curveTo(*b, *c, *d)
    if abs(abs(arc.sweep_deg) - 360) < 1e-9:
        path.close()
    return path


def _path(canvas: Any, item: Polyline, state: dict[str, object]) -> None:
    if item.role is not None:
        _pen(canvas, PENS[item.role], state)
    if item.fill is not None:
        _fill(canvas, item.fill, state)
    path = canvas.beginPath()
    path.moveTo(*item.points[0])
    for point in item.points[1:]:
        path.lineTo(*point)
    if item.closed:
        path.close()
    canvas.drawPath(path, stroke=int(item.role is not None), fill=int(item.fill is not None))


def _text(canvas: Any, item: Text, state: dict[str, object]) -> None:
    if not item.text:
        return
    _fill(canvas, item.colour, state)
    size = font_size_mm(item.height_mm)
    canvas.setFont(FONT_NAMES[item.bold], size)
    left = {"start": 0.0, "middle": 0.5, "end": 1.0}[item.anchor]
    shift = -left * item.box().width if not item.turn_deg else -left * item.box().height
    if item.turn_deg:
        canvas.saveState()
        canvas.translate(item.x, item.y)
        canvas.rotate(item.turn_deg)
        canvas.drawString(shift, 0, item.text)
        canvas.restoreState()
        state.clear()
    else:
        canvas.drawString(item.x + shift, item.y, item.text)


def _pen(canvas: Any, pen: Pen, state: dict[str, object]) -> None:
    if state.get("pen") == pen:
        return
    state["pen"] = pen
    canvas.setLineWidth(pen.width_mm)
    canvas.setDash(list(pen.dash_mm), 0)
    canvas.setStrokeColorRGB(*pen.colour)


def _fill(canvas: Any, colour: Colour, state: dict[str, object]) -> None:
    if state.get("fill") == colour:
        return
    state["fill"] = colour
    canvas.setFillColorRGB(*colour)
