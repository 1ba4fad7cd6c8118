"""Sized feeds of every template for tests of the sheets, kept as small JSON files in ``tests/sized``.

The real solver makes them: ``python -m tests.template_feeds`` (``python -m tests.regenerate`` runs it too). Patterns
and sweep are thinned and numbers rounded to six digits, sizes kept as they are. They cannot go stale unnoticed: a job
that differs from its template's, a record with other fields and sizes that differ from a kept pack's are told by the
tests of the sheets; ``-m thorough`` solves all of them again.
"""

from __future__ import annotations

import json
import sys
from dataclasses import replace
from functools import cache
from typing import Any

from fabgen.job_reader import read_job
from fabgen.progress import Silent
from fabgen.sized import feed_from_text, feed_to_text
from fabgen.sizing.records import Feed
from tests.examples import ROOT

FOLDER = ROOT / "tests" / "sized"
TEMPLATES = tuple(sorted(path.stem for path in (ROOT / "templates").glob("*.toml")))
KEPT = tuple(name for name in TEMPLATES if (FOLDER / f"{name}.json").is_file())
"""All of them; a test of the sheets tells when one is missing."""
PATTERN_STEP = 5
SWEEP_STEP = 4
DRAWN = ("hydrogen-wire", "hydrogen-brass")
VIEWS = ("section", "isometric")
STALE = "{name}: tests/sized is stale; run: python -m tests.template_feeds {name}"


@cache
def template_feed(name: str) -> Feed:
    """The kept feed of a template; AssertionError when it is not of the template's job or of today's records."""
    job = read_job(ROOT / "templates" / f"{name}.toml")
    feed = feed_from_text((FOLDER / f"{name}.json").read_text("utf-8"), job)
    assert feed is not None, STALE.format(name=name)
    return feed


def solved(name: str) -> Feed:
    """The template's feed as the real solver gives it now, thinned."""
    from fabgen.sizing.size_feed import size_feed

    return thinned(size_feed(read_job(ROOT / "templates" / f"{name}.toml"), Silent()))


def thinned(feed: Feed) -> Feed:
    """The feed without its trials and with every fifth angle and every fourth frequency of its curves."""
    p = feed.predicted
    patterns = tuple(
        replace(c, theta_deg=c.theta_deg[::PATTERN_STEP], co_dbi=c.co_dbi[::PATTERN_STEP],
                cross_dbi=c.cross_dbi[::PATTERN_STEP])
        for c in p.patterns
    )  # fmt: skip
    r = p.response
    response = replace(
        r, frequency_mhz=r.frequency_mhz[::SWEEP_STEP], reflection=r.reflection[::SWEEP_STEP],
        gain_dbi=r.gain_dbi[::SWEEP_STEP],
    )  # fmt: skip
    return replace(feed, predicted=replace(p, patterns=patterns, response=response), can_trials=())


def text_of(feed: Feed) -> str:
    """The feed as JSON, one line for each of its parts, computed numbers to six digits."""
    data = json.loads(feed_to_text(feed))
    rounded = {key: value if key in {"job", "sizes", "capacitor"} else _six(value) for key, value in data.items()}
    lines = (f"{json.dumps(key)}: {json.dumps(value, separators=(',', ':'))}" for key, value in rounded.items())
    return "{" + ",\n".join(lines) + "}\n"


def _six(value: Any) -> Any:
    """Numbers to six digits; a complex number is a text with its unit j at the end."""
    match value:
        case float():
            return float(f"{value:.6g}")
        case list():
            return [_six(v) for v in value]
        case dict():
            return {k: _six(v) for k, v in value.items()}
        case str() if value.endswith("j") and value[:1] in "-0123456789":
            z = complex(value)
            return f"{z.real:.6g}{z.imag:+.6g}j"
    return value


def views(name: str) -> dict[str, str]:
    """Section and isometric view of a template's feed as SVG, by file name, for the read-me and other pages."""
    from fabgen.drawing.pages.sheets import pictures
    from fabgen.parts.build import build_parts
    from fabgen.writers.svg import svg_text

    feed = template_feed(name)
    made = pictures(feed, build_parts(feed))
    return {f"{name}-{view}.svg": svg_text(made[view]) for view in VIEWS}


def main(names: tuple[str, ...]) -> None:
    """Sizes the templates with the real solver, keeps their feeds and draws the views for the pages in ``docs``."""
    FOLDER.mkdir(exist_ok=True)
    for name in names or TEMPLATES:
        (FOLDER / f"{name}.json").write_text(text_of(solved(name)), encoding="utf-8")
    template_feed.cache_clear()
    for name in DRAWN:
        for file, text in views(name).items():
            (ROOT / "docs" / file).write_text(text, encoding="utf-8")


if __name__ == "__main__":
    main(tuple(sys.argv[1:]))
