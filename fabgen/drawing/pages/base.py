"""What every page gets and gives.

Depends on: drawing.flow, drawing.paper, drawing.picture, parts.records, checks.records, sizing.records.
"""

from __future__ import annotations

from dataclasses import dataclass

from fabgen.checks.records import Finding
from fabgen.drawing.flow import Block, Page, flow
from fabgen.drawing.hidden import Curve, Seen
from fabgen.drawing.model import number
from fabgen.drawing.pages.steps import StepView, made_parts
from fabgen.drawing.paper import Paper
from fabgen.drawing.picture import Body
from fabgen.drawing.texts import say
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed


@dataclass(frozen=True)
class Context:
    """Everything that pages are made from."""

    feed: Feed
    parts: tuple[Part, ...]
    findings: tuple[Finding, ...]
    bodies: tuple[Body, ...]
    isometric: tuple[Seen, ...]
    steps: tuple[StepView, ...]
    paper: Paper

    def shown(self, part: Part) -> tuple[Curve, ...] | None:
        """What a part of many faces shows in its own step; None for other parts."""
        return made_parts(self.steps).get(part.key)


@dataclass(frozen=True)
class Draft:
    """One or more sheets of a kind, before numbers, frame and title block."""

    kind: str
    title: str
    pages: tuple[Page, ...]
    part_key: str = ""
    scale: str = ""
    material: str = ""
    finish: str = ""
    tolerance: str = ""
    group: str = ""


def draft(context: Context, kind: str, title: str, blocks: list[Block], **fields: str) -> Draft:
    """Blocks set on as many sheets as they need."""
    return Draft(kind, title, tuple(flow(context.paper, blocks)), **fields)


def tolerance_of(feed: Feed, size: str) -> float | None:
    """Tolerance of a size that the sensitivities name, mm."""
    return next((s.tolerance_mm for s in feed.sensitivities if s.size == size), None)


def toleranced(feed: Feed, size: str, value: float, prefix: str = "") -> str:
    """The size as written, with its own tolerance where it has one."""
    tolerance = tolerance_of(feed, size)
    text = prefix + number(value)
    return f"{text} ±{number(tolerance)}" if tolerance else text


def grams(mass_kg: float) -> str:
    """Grams as written in a list; nothing weighs nothing."""
    if 0 < mass_kg < 5e-5:
        return say("words.under", value="0.1")
    return number(1000 * mass_kg, 1 if mass_kg < 0.1 else 0)


def quantity(key: str, value: object) -> str:
    """A record's value with the unit that its key ends in; small lengths, picofarads and bare numbers to 0.001."""
    units = {"_mm": "mm", "_mhz": "MHz", "_deg": "°", "_ohm": "Ω", "_db": "dB", "_dbi": "dBi", "_pf": "pF", "_k": "K"}
    if not isinstance(value, float | int) or isinstance(value, bool):
        return str(value)
    unit = next((u for tail, u in units.items() if key.endswith(tail)), "")
    text = number(float(value), 3 if unit in {"pF", ""} or abs(value) < 0.1 else 2)
    return f"{text}{unit}" if unit == "°" else f"{text} {unit}".strip()


def tolerance_text(part: Part) -> str:
    """The part's tolerance in words; a bare class is one of ISO 2768-1."""
    return f"ISO 2768-{part.tolerance}" if part.tolerance in {"f", "m", "c", "v"} else part.tolerance
