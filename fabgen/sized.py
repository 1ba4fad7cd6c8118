"""A job's Feed, from the cache when the same job was sized before by the same code and stock tables.

Depends on: cache, progress, job, stock, sizing.
"""

from __future__ import annotations

import functools
import json
from pathlib import Path
from typing import TYPE_CHECKING

from fabgen import __version__
from fabgen.cache import Cache, key_of, place_compiled_code
from fabgen.job import Job, Rates, Target
from fabgen.progress import Progress
from fabgen.sizing.records import Feed
from fabgen.stock import tables

if TYPE_CHECKING:
    from pydantic import TypeAdapter

    from fabgen.sizing.front import Front

# What a feed's numbers depend on, besides the job: these modules and packages of this program.
_SOURCES = ("units.py", "job.py", "stock", "theory", "fields", "sizing")


def sized_feed(job: Job, progress: Progress, cache: Cache) -> Feed:
    """The feed of a job. Errors of the sizing pass through; an entry that cannot be read is dropped and renewed."""
    key = feed_key(job)
    text = cache.get(key)
    if text is not None:
        stored = feed_from_text(text, job)
        if stored is not None:
            return stored
        cache.drop(key)
    place_compiled_code(cache.folder)
    from fabgen.fields.kernel import is_compiled
    from fabgen.resources import require_memory
    from fabgen.sizing.size_feed import size_feed

    require_memory()
    if not is_compiled():
        progress.step("compiling the field computation, once after installation")
    feed = size_feed(job, progress)
    cache.put(key, feed_to_text(feed))
    return feed


def selectivity_front_of(job: Job, progress: Progress) -> Front:
    """The front between rejection and efficiency for a job, each point matched. Errors of the sizing pass through."""
    place_compiled_code(None)
    from fabgen.resources import require_memory
    from fabgen.sizing.front import selectivity_front

    require_memory()
    return selectivity_front(job, progress)


def feed_key(job: Job) -> str:
    """The key of a job's feed: the job without what only titles and prices need, the code and the stock tables."""
    return key_of(__version__, code_digest(), _stock_digest(), _numeric(job).model_dump_json())


def feed_to_text(feed: Feed) -> str:
    """A feed as JSON text; numbers keep every bit."""
    return json.dumps(_adapter().dump_python(feed, mode="json"))


def feed_from_text(text: str, job: Job) -> Feed | None:
    """The feed of a text, with this job's titles; None when the text is not a feed of these numbers."""
    from dataclasses import replace

    from pydantic import ValidationError

    try:
        feed = _adapter().validate_python(json.loads(text))
    except (ValidationError, ValueError):
        return None
    return replace(feed, job=job) if _numeric(feed.job) == _numeric(job) else None


@functools.cache
def code_digest() -> str:
    """SHA-256 over the source files that the numbers depend on."""
    root = Path(__file__).parent
    files = sorted(
        path
        for name in _SOURCES
        for path in ([root / name] if name.endswith(".py") else (root / name).rglob("*"))
        if path.suffix in {".py", ".toml", ".json"}
    )
    return key_of(*(piece for path in files for piece in (path.relative_to(root).as_posix(), path.read_bytes())))


def _stock_digest() -> str:
    return key_of(*(repr(row) for kind in tables.KINDS for row in tables.all_rows(kind)))


def _numeric(job: Job) -> Job:
    """The job without its titles, prices and paper, which no number depends on."""
    target = Target(frequency_mhz=job.target.frequency_mhz)
    limits = job.limits.model_copy(update={"paper": "A4", "projection": "first"})
    return job.model_copy(update={"target": target, "rates": Rates(), "as_written": (), "limits": limits})


@functools.cache
def _adapter() -> TypeAdapter[Feed]:
    from pydantic import TypeAdapter

    return TypeAdapter(Feed)
