"""The embedded font: files, widths of texts and what it can show.

DejaVu Sans 2.37, shipped with its licence (LICENSE_DEJAVU.txt).

Depends on: errors.
"""

from __future__ import annotations

import unicodedata
from functools import cache
from pathlib import Path
from typing import Any

from fabgen.errors import JobError

FONT_FILES = {False: "DejaVuSans.ttf", True: "DejaVuSans-Bold.ttf"}
FONT_NAMES = {False: "DejaVuSans", True: "DejaVuSans-Bold"}
CAPITAL = 1493 / 2048  # capital height of the font over its em
DESCENT = 0.33  # deepest descender over the capital height (a "g" or "j": 0.24 em)


def font_path(bold: bool = False) -> Path:
    """The font file shipped with the package."""
    return Path(__file__).with_name(FONT_FILES[bold])


@cache
def face(bold: bool) -> Any:
    """The font's own tables, read once."""
    from reportlab.pdfbase.ttfonts import TTFontFile

    return TTFontFile(str(font_path(bold)))


def font_size_mm(height_mm: float) -> float:
    """The em for a capital of ``height_mm``."""
    return height_mm / CAPITAL


@cache
def text_width_mm(text: str, height_mm: float, bold: bool = False) -> float:
    """Advance width of a text whose capitals are ``height_mm`` high."""
    tables = face(bold)
    widths, default = tables.charWidths, tables.defaultWidth
    return float(sum(widths.get(ord(c), default) for c in text)) * font_size_mm(height_mm) / 1000


def unprintable(text: str) -> str:
    """Characters that the font lacks or that need letter joining or right-to-left setting, in order, once each."""
    widths = face(False).charWidths
    bad = [
        c
        for c in text
        if ord(c) not in widths
        or unicodedata.bidirectional(c) in {"R", "AL", "AN"}
        or unicodedata.category(c) in {"Cc", "Cf", "Mn"}
    ]
    return "".join(dict.fromkeys(bad))


def require_printable(text: str, key: str) -> str:
    """The text itself; raises JobError when the sheets cannot show it."""
    bad = unprintable(text)
    if bad:
        listed = ", ".join(f"{c!r} (U+{ord(c):04X})" for c in bad[:5])
        raise JobError(
            f"{key} holds characters that the sheets' font cannot set: {listed}. "
            "Allowed are left-to-right letters of the Latin, Greek and Cyrillic scripts, digits and signs. "
            "Write the text in one of these scripts."
        )
    return text


def fit(text: str, width_mm: float, height_mm: float, bold: bool = False) -> tuple[str, float]:
    """Text and height that fit a width: smaller down to 1.8 mm (ISO 3098), then cut with an ellipsis."""
    height = height_mm
    while height > 1.8 and text_width_mm(text, height, bold) > width_mm:
        height = max(1.8, round(height - 0.1, 2))
    if text_width_mm(text, height, bold) <= width_mm:
        return text, height
    cut = text
    while cut and text_width_mm(cut + "…", height, bold) > width_mm:
        cut = cut[:-1]
    return cut.rstrip() + "…", height


@cache
def wrap(text: str, width_mm: float, height_mm: float, bold: bool = False) -> tuple[str, ...]:
    """Lines of at most ``width_mm``, broken at spaces; a longer word is broken where it must be."""
    lines: list[str] = []
    for paragraph in text.split("\n"):
        line = ""
        for word in paragraph.split():
            for piece in _pieces(word, width_mm, height_mm, bold):
                trial = f"{line} {piece}" if line else piece
                if line and text_width_mm(trial, height_mm, bold) > width_mm:
                    lines.append(line)
                    line = piece
                else:
                    line = trial
        lines.append(line)
    return tuple(lines)


def _pieces(word: str, width_mm: float, height_mm: float, bold: bool) -> list[str]:
    if text_width_mm(word, height_mm, bold) <= width_mm:
        return [word]
    pieces, piece = [], ""
    for c in word:
        if piece and text_width_mm(piece + c, height_mm, bold) > width_mm:
            pieces.append(piece)
            piece = ""
        piece += c
    return [*pieces, piece]
