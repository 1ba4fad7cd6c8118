"""All sheets of a pack: drafts of every page kind, numbered, framed and given their title block.

Depends on: drawing.pages, drawing.paper, drawing.model.
"""

from __future__ import annotations

import hashlib

from fabgen.checks.records import Finding
from fabgen.drawing.fonts import require_printable
from fabgen.drawing.hidden import ISOMETRIC, look
from fabgen.drawing.model import Item, Sheet
from fabgen.drawing.pages import assembly, bench, closing, general, part, stock, truescale, wire
from fabgen.drawing.pages.base import Context, Draft
from fabgen.drawing.pages.lining import is_coated
from fabgen.drawing.pages.steps import step_views
from fabgen.drawing.paper import PAPERS, TitleFields, frame_items, title_block
from fabgen.drawing.picture import bodies
from fabgen.drawing.texts import say
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed


def sheets(feed: Feed, parts: tuple[Part, ...], findings: tuple[Finding, ...]) -> tuple[Sheet, ...]:
    """Every sheet of the pack in order. Raises JobError for a name that the font cannot set."""
    target = feed.job.target
    require_printable(target.name, "target.name")
    require_printable(target.owner, "target.owner")
    things = bodies(parts)
    seen = look([b.shape for b in things], ISOMETRIC) if things else ()
    views = step_views(parts, things, is_coated(feed))
    context = Context(feed, parts, findings, things, seen, views, PAPERS[feed.job.limits.paper])
    drafts = [
        *general.drafts(context),
        *stock.drafts(context),
        *part.drafts(context),
        *wire.drafts(context),
        *truescale.drafts(context),
        *assembly.drafts(context),
        *bench.drafts(context),
        *closing.drafts(context),
    ]
    count = sum(len(d.pages) for d in drafts)
    out: list[Sheet] = []
    for d in drafts:
        out += _numbered(context, d, len(out) + 1, count)
    return tuple(out)


def pictures(feed: Feed, parts: tuple[Part, ...]) -> dict[str, tuple[Item, ...]]:
    """The main views as items in paper mm, for SVG: "isometric", "section", "aperture" and "loop"."""
    things = bodies(parts)
    if not things:
        return {}
    seen = look([b.shape for b in things], ISOMETRIC)
    context = Context(feed, parts, (), things, seen, (), PAPERS[feed.job.limits.paper])
    return general.pictures(context)


def identification(feed: Feed) -> str:
    """The drawing's number: band and a check sum of the sizes, the same for the same feed (ISO 7200: 16 characters)."""
    digest = hashlib.sha256(repr(feed.sizes).encode()).hexdigest()[:6].upper()
    return f"LF{feed.job.target.frequency_mhz:.0f}-{digest}"


def _numbered(context: Context, d: Draft, first: int, count: int) -> list[Sheet]:
    feed, paper = context.feed, context.paper
    out = []
    for i, page in enumerate(d.pages):
        fields = TitleFields(
            owner=feed.job.target.owner or say("title.no_owner"),
            title=d.title,
            supplement=feed.job.target.name,
            identification=identification(feed),
            revision=feed.job.target.revision,
            document_type=say(f"document.{d.kind}"),
            creator="fabgen",
            tolerance=d.tolerance or say("title.tolerance_value", grade=feed.job.limits.tolerance_class),
            material=d.material,
            finish=d.finish,
            scale=d.scale,
            projection=feed.job.limits.projection,
            number=first + i,
            count=count,
        )
        items = (*page.items, *frame_items(paper), *title_block(paper.frame, fields))
        out.append(
            Sheet(
                first + i,
                count,
                d.kind,
                d.title,
                d.part_key,
                paper.width_mm,
                paper.height_mm,
                paper.frame,
                items,
                tuple(page.dimensions),
                tuple(page.views),
                tuple(page.tables),
                d.title if i == 0 else "",
                int(bool(d.group)),
            )
        )
    return out
