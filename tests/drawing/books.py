"""Books of sheets for tests: made once a session for each kind of feed, samples by words, templates by name."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

from fabgen.checks.records import Finding
from fabgen.drawing.model import Sheet
from fabgen.drawing.pages.sheets import sheets
from fabgen.parts.build import build_parts
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from tests.samples import sample_feed
from tests.template_feeds import KEPT, template_feed

SAMPLES = ("wire-rolled", "sheet-folded-2304", "sheet-printed", "wire-tube-choke")
KINDS = (*SAMPLES, *KEPT)
FINDINGS = (
    Finding(
        "SHEET-101", "stop", "loop", "bend 1", "0.5 mm", "1.5 mm", "EN 1652", "The inside radius is too small.",
        "Use an inside radius of 1.5 mm or more.",
    ),
    Finding(
        "SHEET-102", "caution", "floor", "hole 3", "1.0 mm", "1.5 mm", "common practice",
        "The hole is narrower than the sheet is thick.", "Drill it after cutting.",
    ),
)  # fmt: skip


@cache
def feed_of(kind: str, paper: str = "A4") -> Feed:
    """The kept feed of a template, or a sample feed by the words of its kind."""
    if kind in KEPT:
        feed = template_feed(kind)
    else:
        words = kind.split("-")
        frequency = next((float(w) for w in words if w.isdigit()), 1420.406)
        feed = sample_feed(words[0], words[1], frequency, choke="choke" in words)
    limits = feed.job.limits.model_copy(update={"paper": paper})
    return replace(feed, job=feed.job.model_copy(update={"limits": limits}))


@cache
def parts_of(kind: str) -> tuple[Part, ...]:
    """The feed's parts."""
    return build_parts(feed_of(kind))


@cache
def book_of(kind: str, paper: str = "A4") -> tuple[Sheet, ...]:
    """All sheets."""
    return sheets(feed_of(kind, paper), parts_of(kind), FINDINGS)
