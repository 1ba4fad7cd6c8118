"""What the pages say: order of kinds, decisions, distances, findings, steps, texts, hard cases."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from pathlib import Path

import pytest

from fabgen.drawing.flow import flow, heading, paragraph, table
from fabgen.drawing.model import RED, Sheet
from fabgen.drawing.overlap import clashes
from fabgen.drawing.pages import bench, performance
from fabgen.drawing.pages.sheets import identification, sheets
from fabgen.drawing.pages.steps import steps
from fabgen.drawing.paper import PAPERS
from fabgen.drawing.texts import say
from fabgen.drawing.texts_english import ENGLISH
from fabgen.errors import FabgenError, JobError
from fabgen.parts.build import build_parts
from fabgen.parts.floor_plan import floor_bottom_mm
from fabgen.parts.records import Part
from fabgen.sizing.records import Feed
from tests.drawing.books import FINDINGS, KINDS, book_of, feed_of, parts_of
from tests.samples import sample_feed

ORDER = (
    "general", "stock", "part", "bought", "wire", "true", "assembly", "bench", "mounting", "findings", "cautions",
    "settings",
)  # fmt: skip


@pytest.mark.parametrize("kind", KINDS)
def test_kinds_of_pages_in_order(kind: str) -> None:
    kinds = list(dict.fromkeys(s.kind for s in book_of(kind)))
    assert kinds == [k for k in ORDER if k != "wire" or feed_of(kind).sizes.conductor == "wire"]
    assert [s.number for s in book_of(kind)] == list(range(1, len(book_of(kind)) + 1))


@pytest.mark.parametrize("kind", KINDS)
def test_no_empty_page(kind: str) -> None:
    # Frame and title block hold about 60 texts; a page must say more than they do.
    for sheet in book_of(kind):
        inside = [
            t for t in sheet.texts if sheet.frame.y1 > t.y > sheet.frame.y0 + 32.5 and sheet.frame.contains(t.box())
        ]
        assert inside, (sheet.number, sheet.title)


def _words(sheets_: list[Sheet]) -> str:
    return " ".join(t.text for s in sheets_ for t in s.texts)


def test_stop_is_said_in_words_and_red() -> None:
    pages = [s for s in book_of("wire-rolled") if s.kind == "findings"]
    red = [t.text for s in pages for t in s.texts if t.colour == RED]
    assert any(t.startswith("STOP") for t in red)
    assert "Use an inside radius of 1.5 mm or more." in _words(pages).replace("  ", " ")


def test_without_findings_the_page_says_so() -> None:
    book = sheets(feed_of("wire-tube-choke"), (), ())
    assert say("findings.none") in _words([s for s in book if s.kind == "findings"])


@pytest.mark.parametrize("kind", KINDS)
def test_each_part_joins_once(kind: str) -> None:
    joined = [p.key for s in steps(parts_of(kind)) for p in s.parts]
    assert sorted(joined) == sorted(p.key for p in parts_of(kind))
    assert "other" not in {s.kind for s in steps(parts_of(kind))}


def test_capacitor_advice_cancels_the_reactance() -> None:
    # X + (-1/(w C')) + 1/(w C) = 0: series reactances add (circuit theory).
    feed = feed_of("wire-rolled")
    w = 2 * math.pi * feed.job.target.frequency_mhz * 1e6
    for x in (-20.0, 5.0, 30.0):
        c0, c1 = feed.sizes.series_capacitor_pf * 1e-12, bench.capacitance_for(feed, x) * 1e-12
        assert x + 1 / (w * c0) - 1 / (w * c1) == pytest.approx(0, abs=1e-9)


def test_decisions_move_the_dip_the_right_way() -> None:
    feed = feed_of("wire-rolled")
    rows = bench.advice(feed)
    shift = bench.step_mhz(feed)
    rate = {s.size: s.resonance_mhz_per_mm for s in feed.sensitivities}
    low = [a for a in rows if "below" in a.seen]
    assert low
    for a in low:
        size = next(k for k in rate if a.do in {ENGLISH.get(f"bench.{k}.more"), ENGLISH.get(f"bench.{k}.less")})
        change = float(a.amount.split()[0]) * (1 if a.do == ENGLISH[f"bench.{size}.more"] else -1)
        assert change * rate[size] == pytest.approx(shift, rel=0.02)


def test_tap_advice_follows_the_square_law() -> None:
    feed = feed_of("wire-rolled")
    assert bench.tap_for(feed, 50.0) == pytest.approx(feed.sizes.tap_height_mm)
    assert bench.tap_for(feed, 12.5) == pytest.approx(2 * feed.sizes.tap_height_mm)


def test_distance_from_flange_to_focus() -> None:
    feed = feed_of("sheet-printed")
    wanted = feed.predicted.phase_centre_mm - floor_bottom_mm(feed)
    assert bench.flange_to_focus_mm(feed) == pytest.approx(wanted)
    pages = [s for s in book_of("sheet-printed") if s.kind == "mounting"]
    rows = {r[0]: r[1] for s in pages for t in s.tables if t.name == "mounting" for r in t.rows}
    assert float(rows[say("mount.flange_to_focus")].split()[0]) == pytest.approx(wanted, abs=0.051)
    focal = 1000 * feed.job.dish.diameter_m * feed.job.dish.focal_ratio
    assert float(rows[say("mount.vertex_to_flange")].split()[0]) == pytest.approx(focal + wanted, abs=0.051)


@pytest.mark.parametrize(("ratio", "angle"), [(0.25, 90.0), (0.433, 60.0)])
def test_edge_angle_of_the_dish(ratio: float, angle: float) -> None:
    # Parabola: tan(theta/2) = 1 / (4 f/D) (antenna handbooks); f/D = 0.25 has its focus in the rim's plane.
    feed = feed_of("wire-rolled")
    dish = feed.job.dish.model_copy(update={"focal_ratio": ratio})
    feed = replace(feed, job=feed.job.model_copy(update={"dish": dish}))
    assert performance.edge_deg(feed) == pytest.approx(angle, abs=0.05)


def test_every_text_key_exists_and_every_text_is_used() -> None:
    root = Path(bench.__file__).parent.parent
    source = "\n".join(p.read_text() for p in root.rglob("*.py") if not p.name.startswith("texts_english"))
    used = set(re.findall(r'"((?:[a-z_]+\.)+[a-z_0-9]+)"', source))
    asked = set(re.findall(r'say\("([^"{}]+)"', source))
    assert asked <= set(ENGLISH)
    built = (
        "size.", "step.", "severity.", "process.", "caution.", "limits.", "form.", "make.", "document.", "mount.step",
        "stock.", "fold.", "wire.", "source.", "settings.", "findings.", "bench.", "assembly.", "flat.",
    )  # fmt: skip
    assert [k for k in ENGLISH if k not in used and not k.startswith(built)] == []
    with pytest.raises(FabgenError, match=r"no .* for 'not\.there'"):
        say("not.there")


def test_head_of_a_table_is_set_again_after_a_break() -> None:
    rows = [(str(i), "value") for i in range(120)]
    pages = flow(PAPERS["A4"], [heading("Long"), *table("long", ("No.", "Word"), rows)])
    assert len(pages) > 1
    for page in pages:
        texts = [i.text for i in page.items if hasattr(i, "text")]
        assert texts.count("No.") == 1
    assert sum(len(p.tables) for p in pages) == 1


def test_heading_never_stands_alone_at_the_foot() -> None:
    lines = paragraph("word " * 1500)
    for extra in range(0, 60, 3):
        pages = flow(PAPERS["A4"], [*lines[:extra], heading("Foot"), *table("t", ("A", "B"), [("1", "2")] * 3)])
        for page in pages:
            texts = [i.text for i in page.items if hasattr(i, "text")]
            assert not texts or texts[-1] != "Foot"


def _named(name: str, owner: str = "") -> Sheet:
    feed = feed_of("wire-tube-choke")
    target = feed.job.target.model_copy(update={"name": name, "owner": owner})
    feed = replace(feed, job=feed.job.model_copy(update={"target": target}))
    return sheets(feed, (), FINDINGS)[0]


@pytest.mark.parametrize("name", ["W" * 60, "Облучатель для 21 см", "ein " * 15, "Ø±µ°"])
def test_long_and_foreign_names_fit_the_title_block(name: str) -> None:
    assert clashes(_named(name.strip(), "M" * 40)) == ()


def test_a_name_that_cannot_be_set_is_refused() -> None:
    with pytest.raises(JobError, match=r"target\.name"):
        _named("喇叭")


@pytest.mark.parametrize(("projection", "above"), [("first", "A–A"), ("third", "View into the aperture")])
def test_order_of_views_follows_the_projection(projection: str, above: str) -> None:
    # First angle sets the view from above under the front view, third angle over it (ISO 5456-2).
    feed = feed_of("wire-tube-choke")
    limits = feed.job.limits.model_copy(update={"projection": projection})
    feed = replace(feed, job=feed.job.model_copy(update={"limits": limits}))
    book = sheets(feed, parts_of("wire-tube-choke"), ())
    views = {v.name: (s.number, -v.origin[1]) for s in book if s.kind == "general" for v in s.views}
    order = sorted(("A–A", "View into the aperture"), key=lambda name: views[name])
    assert order[0] == above


def test_identification_follows_the_sizes() -> None:
    feed = feed_of("wire-rolled")
    other = replace(feed, sizes=replace(feed.sizes, tap_height_mm=feed.sizes.tap_height_mm + 0.1))
    assert identification(feed) != identification(other)
    assert len(identification(feed)) <= 16  # ISO 7200: 16 characters recommended (TO-18)


def test_a_template_of_too_many_tiles_says_what_to_do_instead() -> None:
    from fabgen.drawing.model import Arc, Line
    from fabgen.drawing.pages.base import Context
    from fabgen.drawing.pages.truescale import MOST_TILES, Template, _draft

    context = Context(feed_of("wire-rolled"), (), (), (), (), (), PAPERS["A4"])
    made = _draft(context, Template("large", "x", (Line(0, 0, 3000, 2000),)))
    assert len(made.pages) == 1
    assert MOST_TILES < 200
    assert any("tiles" in i.text for i in made.pages[0].items if hasattr(i, "text"))
    near = _draft(context, Template("large", "x", (Line(0, 0, 3000, 2000), Arc(400, 20, 4, 4)), (400.0, 0.0)))
    (page,) = near.pages
    (view,) = page.views
    hole = next(i for i in page.items if isinstance(i, Arc))
    assert (hole.cx - view.origin[0], hole.cy - view.origin[1]) == pytest.approx((400.0, 20.0))
    assert any("x = 400" in i.text for i in page.items if hasattr(i, "text"))


def test_plates_of_the_capacitor_are_seen_on_their_face() -> None:
    from fabgen.drawing.model import bounds
    from fabgen.drawing.pages.truescale import _small

    feed = feed_of("sheet-printed")
    capacitor = replace(feed.capacitor, form="plates", plate_width_mm=8.0, film_mm=0.5, overlap_mm=5.0)
    made = build_parts(replace(feed, capacitor=capacitor))
    plates = [p for p in made if p.key.startswith("capacitor-") and p.thickness_mm is not None]
    assert len(plates) == 3
    for part in plates:
        sizes, box = dict(part.sizes), bounds(_small(part))
        assert (box.width, box.height) == pytest.approx((sizes["length_mm"], sizes["width_mm"]), abs=0.01)


def test_the_lining_is_drawn_where_the_eye_sees_it() -> None:
    from fabgen.drawing.pages.lining import lined_floor, lined_wall
    from fabgen.drawing.pages.steps import ABOVE_EYE

    n = ABOVE_EYE.towards_eye
    bore, depth = 100.0, 30.0
    wall, floor = lined_wall(bore, depth, ABOVE_EYE), lined_floor(bore, depth, ABOVE_EYE)
    # The far half of the wall shows; its lines are as long as upright edges of that depth look.
    assert 20 <= len(wall) <= 30
    full = depth * math.hypot(n[0], n[1])
    assert max(abs(line.y1 - line.y0) for line in wall) == pytest.approx(full, abs=1e-6)
    # The rim's picture bounds everything: an ellipse raised by the depth.
    for line in (*wall, *floor):
        for x, y in ((line.x0, line.y0), (line.x1, line.y1)):
            assert (x / (bore / 2)) ** 2 + ((y - full) / (bore / 2 * n[2])) ** 2 < 1.0 + 1e-3
    # A can as deep as wide hides the near part of its floor.
    assert len(lined_floor(bore, 100.0, ABOVE_EYE)) < len(floor)


def _lined(lining: str, form: str = "wire", choke: bool = False) -> tuple[Feed, tuple[Part, ...]]:
    feed = sample_feed(form, "printed", choke=choke, lining=lining)
    return feed, build_parts(feed)


@pytest.mark.parametrize(
    ("lining", "words"),
    [
        ("silver-copper-paint", ("fumes of solvent", "Metal dust", "ohm", "masking tape")),
        ("copper-plating", ("bath and its mist", "Primer fumes", "ohm", "plating bath")),
    ],
)
def test_painted_and_plated_cans_have_their_step_of_lining(lining: str, words: tuple[str, ...]) -> None:
    from fabgen.drawing.model import Line

    feed, parts = _lined(lining)
    pages = [s for s in sheets(feed, parts, ()) if s.kind == "assembly"]
    sheet, title = next((s, t) for s in pages for t in s.texts if t.text.endswith("Lining"))
    text = " ".join(t.text for t in sheet.texts)
    for word in (*words, say("assembly.tools"), say("assembly.caution"), say("assembly.join"), say("assembly.measure")):
        assert word in text, word
    hatched = [i for i in sheet.items if isinstance(i, Line) and i.role == "new" and abs(i.y0 - title.y) < 70]
    assert len(hatched) > 20
    order = [s.kind for s in steps(parts, coated=True)]
    assert order.index("body") < order.index("lining") < order.index("loop")
    assert "lining" not in [s.kind for s in steps(parts)]


def test_paint_is_stock_to_have() -> None:
    feed, parts = _lined("silver-paint")
    rows = [r for s in sheets(feed, parts, ()) for t in s.tables if t.name == "stock" for r in t.rows]
    (row,) = [r for r in rows if r[0] == "silver paint"]
    bore, depth = feed.sizes.can_bore_mm, feed.sizes.can_depth_mm
    assert float(row[2].split()[0]) == pytest.approx((math.pi * bore**2 / 4 + math.pi * bore * depth) / 100, abs=0.51)


def test_the_foil_of_a_choke_goes_in_with_its_ring_and_is_hatched() -> None:
    from fabgen.drawing.pages.lining import lined
    from fabgen.drawing.pages.steps import ABOVE_EYE

    feed, parts = _lined("copper-foil-35", choke=True)
    joined = {p.key: s.kind for s in steps(parts) for p in s.parts}
    assert (joined["foil-wall"], joined["foil-choke-wall"]) == ("lining", "choke")
    assert joined["foil-choke-floor"] == joined["foil-choke-can"] == "choke"
    s = feed.sizes
    assert s.choke is not None
    lines = lined("foil-choke-wall", s, s.can_bore_mm + 2 * s.wall_mm, ABOVE_EYE)
    rim = s.choke.floor_z_mm + s.choke.depth_mm
    n, r = ABOVE_EYE.towards_eye, s.choke.bore_mm / 2
    assert len(lines) > 10
    for line in lines:  # the upper end of each is on the picture of the rim
        top = max(line.y0, line.y1)
        raised = rim * math.hypot(n[0], n[1])
        assert (line.x0 / r) ** 2 + ((top - raised) / (r * n[2])) ** 2 == pytest.approx(1.0, abs=1e-6)


def test_the_reading_on_a_lining_is_that_of_probes_on_a_sheet() -> None:
    from fabgen.drawing.pages.lining import spreading_ohm

    # Two equal discs on a wide sheet: R = R_s / pi arccosh(d / 2a), exact (two-wire line; textbooks). One of them on
    # a straight edge takes twice its half.
    for distance in (20.0, 150.0, 600.0):
        both = math.acosh(distance / 2) / math.pi
        assert spreading_ohm(1.0, distance) == pytest.approx(1.5 * both, rel=1e-2)
    assert spreading_ohm(0.3, 150.0) == pytest.approx(0.3 * spreading_ohm(1.0, 150.0))


def test_the_wires_work_turns_it_from_the_bend_just_made_and_cuts_it_with_its_threads() -> None:
    """Both bars are bent to one side of the straight wire; only the loop lies across them."""
    said = " ".join(_words([s for s in book_of("wire-rolled") if s.kind == "wire"]).split())
    path = next(p.wire for p in parts_of("wire-rolled") if p.key == "loop")
    assert path is not None
    bars, loop = said.index("Bend 3: keep the wire in the plane"), said.index("Bend 2: turn the wire by 90")
    assert said.index("Bend 1: bend it round") < bars < loop
    assert f"cut it to {path.cut_length_mm + 2 * path.beyond_mm:.1f}" in said
    assert (path.beyond_mm > 0) == ("inside the cut ends" in said)


def test_advice_for_a_wire_loop_says_nothing_of_a_strip() -> None:
    words = {kind: " ".join(a.do for a in bench.advice(feed_of(kind))) for kind in ("wire-rolled", "sheet-printed")}
    assert "strip" not in words["wire-rolled"]
    assert "strip" in words["sheet-printed"]


def test_cautions_name_every_hazard() -> None:
    heads = [r[0] for s in book_of("wire-rolled") for t in s.tables if t.name == "cautions" for r in t.rows]
    for hazard in ("Sharp sheet", "solder and fumes", "paints, plating and dust", "Masts", "Lightning", "Transmitting",
                   "sun at the focus"):  # fmt: skip
        assert any(hazard in head for head in heads), hazard


def test_a_part_far_larger_than_the_largest_sheet_is_drawn_small_and_whole() -> None:
    from fabgen.drawing.pages.part import flat_block
    from fabgen.parts.contour import Contour, Vertex
    from fabgen.parts.records import FlatPattern

    for wide, high in ((40_000.0, 30_000.0), (90_000.0, 400.0)):
        corners = (Vertex(0, 0), Vertex(wide, 0), Vertex(wide, high), Vertex(0, high))
        block, scale, left_over = flat_block(FlatPattern(Contour(corners)), 150.0)
        assert scale.startswith("1:")
        assert block.height <= 150.0
        assert left_over == ()
        assert {d.value for d in block.dimensions} == {wide, high}


def test_the_step_of_the_lining_shows_the_can_and_both_foils() -> None:
    from fabgen.drawing.model import Line

    pages = [s for s in book_of("sheet-printed") if s.kind == "assembly"]
    assert any(isinstance(i, Line) and i.role == "old" for s in pages for i in s.items)
    title = next((s, t) for s in pages for t in s.texts if t.text.endswith("Lining"))
    level = [i for i in title[0].items if isinstance(i, Line) and i.role == "new" and abs(i.y0 - title[1].y) < 70]
    assert len(level) > 20


def test_neighbouring_tiles_carry_the_same_joining_lines() -> None:
    from fabgen.drawing.model import Line
    from fabgen.drawing.pages.base import Context
    from fabgen.drawing.pages.truescale import OVERLAP_MM, Template, _draft

    context = Context(feed_of("wire-rolled"), (), (), (), (), (), PAPERS["A4"])
    made = _draft(context, Template("large", "x", (Line(0, 0, 400, 600),)))
    across: dict[float, int] = {}
    upright: dict[float, int] = {}
    for page in made.pages:
        (view,) = page.views
        for line in page.items:
            if isinstance(line, Line) and line.role == "fine":
                y, x = round(line.y0 - view.origin[1], 3), round(line.x0 - view.origin[0], 3)
                if line.y0 == line.y1:
                    across[y] = across.get(y, 0) + 1
                    assert min(view.box.y1 - line.y0, line.y0 - view.box.y0) == pytest.approx(OVERLAP_MM / 2)
                else:
                    upright[x] = upright.get(x, 0) + 1
    # 3 x 3 tiles: two joints each way, at one place of the drawing, each on both tiles of three pairs.
    assert len(made.pages) == 9
    assert list(across.values()) == [6, 6]
    assert list(upright.values()) == [6, 6]


def test_a_tube_of_aluminium_is_not_to_be_soldered() -> None:
    pages = [s for s in book_of("satellite-1690") if s.kind == "assembly"]
    words = " ".join(_words(pages).split())
    assert "takes no soft solder: weld" in words
    assert "solder, weld" not in words


def test_the_wire_is_cut_with_what_its_threads_need() -> None:
    book = book_of("s-band-3400")
    (wire,) = [p.wire for p in parts_of("s-band-3400") if p.wire is not None]
    assert wire.beyond_mm > 0  # aluminium: nuts instead of solder
    cells = [c for s in book for t in s.tables if t.name in {"parts", "stock"} for r in t.rows for c in r]
    length = f"{wire.cut_length_mm + 2 * wire.beyond_mm:.1f} long"
    assert sum(c.endswith(length) for c in cells) == 2
    assert sum(f"cut it to {length[:-5]} mm" in _words([s]).replace("  ", " ") for s in book) == 1


def test_crosses_of_joints_keep_off_holes() -> None:
    from fabgen.drawing.model import Arc, Line
    from fabgen.drawing.pages.base import Context
    from fabgen.drawing.pages.truescale import CLEAR_MM, Template, _draft

    context = Context(feed_of("wire-rolled"), (), (), (), (), (), PAPERS["A4"])
    frame = Line(0, 0, 150, 400)
    (first, _) = _draft(context, Template("large", "x", (frame,))).pages
    found = [i for i in first.items if isinstance(i, Arc)]
    (view,) = first.views
    hole = Arc(found[0].cx - view.origin[0] + 3, found[0].cy - view.origin[1] + 1, 1.6, 1.6)
    places = []
    for page in _draft(context, Template("large", "x", (frame, hole))).pages:
        (view,) = page.views
        arcs = [i for i in page.items if isinstance(i, Arc) and i.rx == 2]
        places.append([(round(i.cx - view.origin[0], 3), round(i.cy - view.origin[1], 3)) for i in arcs])
    assert places[0] == places[1]
    assert len(places[0]) == 2
    assert all(math.dist(p, (hole.cx, hole.cy)) > CLEAR_MM for p in places[0])


def test_foil_in_a_choke_has_its_pages_and_lines_in_the_picture() -> None:
    from fabgen.drawing.pages.lining import lined
    from fabgen.drawing.pages.steps import ABOVE_EYE

    feed, parts = _lined("copper-foil-35", choke=True)
    made = sheets(feed, parts, ())
    for key in ("foil-choke-floor", "foil-choke-wall", "foil-choke-can"):
        assert {"part", "true"} <= {s.kind for s in made if s.part_key == key}
    assert not [c for s in made for c in clashes(s)]
    assert "floor over both laps" in " ".join(_words([x for x in made if x.kind == "assembly"]).split())
    s, n = feed.sizes, ABOVE_EYE.towards_eye
    outer = s.can_bore_mm / 2 + s.wall_mm
    lines = lined("foil-choke-can", s, 2 * outer, ABOVE_EYE)
    assert len(lines) > 10
    for line in lines:  # the upper end of each is on the picture of the can's rim, on the side of the eye
        top = max(line.y0, line.y1) - s.can_depth_mm * math.hypot(n[0], n[1])
        assert (line.x0 / outer) ** 2 + (top / (outer * n[2])) ** 2 == pytest.approx(1.0, abs=1e-6)
        assert top < 0
