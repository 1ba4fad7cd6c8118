"""The sheets alone are enough: flat parts are rebuilt from the printed tables and held against the cutting contour."""

from __future__ import annotations

import math
import re

import pytest
import shapely

from fabgen.drawing import flat, solid
from fabgen.drawing.model import Sheet, Table, number
from fabgen.drawing.pages.base import quantity, tolerance_of
from fabgen.drawing.texts import say, size_name
from fabgen.parts import contour as c
from fabgen.parts.records import FlatPattern
from tests.drawing.books import KINDS, book_of, feed_of, parts_of

PRINTED_MM = 0.005  # tables are printed to 0.01 mm


def _tables(pages: list[Sheet]) -> list[Table]:
    return [t for p in pages for t in p.tables]


def _part_pages(kind: str, key: str) -> list[Sheet]:
    return [s for s in book_of(kind) if s.kind == "part" and s.part_key == key]


def _unfolded(pages: list[Sheet], table: Table) -> tuple[tuple[str, ...], ...]:
    """All corners in order: those of the table, and those that the repeat table leaves to the first set."""
    letter = table.name.removeprefix("corners:")
    repeat = next((t for t in _tables(pages) if t.name == f"repeat:{letter}"), None)
    if repeat is None:
        return table.rows
    said = [re.search(rf"Corners {letter}(\d+) to {letter}(\d+) come again", t.text) for p in pages for t in p.texts]
    ((first, last),) = {(int(m[1]), int(m[2])) for m in said if m}
    count, after = last - first + 1, last
    by_number = {_number_of(r[0]): r for r in table.rows}
    for left_out, sets, pitch_x, pitch_y in repeat.rows:
        low, high = (_number_of(w) for w in left_out.split("–"))
        assert low == after + 1
        assert high - low + 1 == int(sets.split()[0]) * count
        for corner in range(low, high + 1):
            like = by_number[corner - count]
            assert corner not in by_number
            x, y = float(like[1]) + float(pitch_x), float(like[2]) + float(pitch_y)
            by_number[corner] = (f"{letter}{corner}", repr(x), repr(y), like[3])
        after = high
    assert sorted(by_number) == list(range(1, len(by_number) + 1))
    return tuple(by_number[n] for n in sorted(by_number))


def _number_of(label: str) -> int:
    return int(re.sub(r"\D", "", label))


def _rebuilt(rows: tuple[tuple[str, ...], ...]) -> c.Contour:
    points = [(float(r[1]), float(r[2])) for r in rows]
    vertices = []
    for i, row in enumerate(rows):
        (x, y), (x1, y1) = points[i], points[(i + 1) % len(rows)]
        found = re.fullmatch(r"R([\d.]+) (left|right)", row[3])
        bulge = 0.0
        if found:
            half = math.hypot(x1 - x, y1 - y) / 2
            sweep = 2 * math.asin(min(1.0, half / float(found.group(1))))
            bulge = math.tan(sweep / 4) * (1 if found.group(2) == "left" else -1)
        else:
            assert row[3] == say("flat.line")
        vertices.append(c.Vertex(x, y, bulge))
    return c.Contour(tuple(vertices))


def _same(a: c.Outline, b: c.Outline) -> float:
    """Largest distance between two outlines, mm."""
    first, second = (shapely.LinearRing(c.sampled(o, 0.002)) for o in (a, b))
    return float(first.hausdorff_distance(second))


def _outlines_from(pages: list[Sheet], pattern: FlatPattern) -> list[c.Outline]:
    out: list[c.Outline] = []
    for table in _tables(pages):
        if table.name.startswith("corners:"):
            out.append(_rebuilt(_unfolded(pages, table)))
        elif table.name == "holes":
            out += [c.Circle(float(r[1]), float(r[2]), float(r[3].lstrip("⌀"))) for r in table.rows]
    if isinstance(pattern.outline, c.Circle):
        texts = [d for p in pages for d in p.dimensions if d.name == "outline"]
        assert len(texts) == 1
        diameter = float(texts[0].text.lstrip("⌀"))
        out.append(c.Circle(0.0, 0.0, diameter))
    return out


@pytest.mark.parametrize("kind", KINDS)
def test_flat_parts_can_be_rebuilt_from_their_sheets(kind: str) -> None:
    flats = [(p.key, p.flat) for p in parts_of(kind) if p.flat is not None]
    for key, pattern in flats:
        found = _outlines_from(_part_pages(kind, key), pattern)
        wanted = [pattern.outline, *pattern.holes]
        assert len(found) == len(wanted), key
        for outline in wanted:
            # An arc nearly as wide as its radius amplifies the printed rounding: five times it is allowed.
            assert min(_same(outline, other) for other in found if type(other) is type(outline)) < 10 * PRINTED_MM, key


@pytest.mark.parametrize("kind", KINDS)
def test_fold_lines_and_bends_are_listed(kind: str) -> None:
    for part in parts_of(kind):
        if part.flat is None or not part.flat.folds:
            continue
        tables = {t.name: t for t in _tables(_part_pages(kind, part.key))}
        lines = tables["fold lines"].rows
        assert len(lines) == len(part.flat.folds)
        for row, fold in zip(lines, part.flat.folds, strict=True):
            got = [float(v) for v in row[1:]]
            assert got == pytest.approx([*fold.start, *fold.end], abs=0.0051)
        assert sum(_count(r[0]) for r in tables["bends"].rows) == len(part.flat.folds)


def _count(runs: str) -> int:
    return len(_numbers(runs))


def _numbers(runs: str) -> list[int]:
    found: list[int] = []
    for run in runs.split(", "):
        first, _, last = run.partition("–")
        found += range(int(first), int(last or first) + 1)
    return found


@pytest.mark.parametrize("kind", KINDS)
def test_fold_lines_have_their_distance_from_both_edges(kind: str) -> None:
    # Measured by a geometry library on the cutting contour: the first edge met square to the line from its middle.
    for part in parts_of(kind):
        if part.flat is None or not part.flat.folds:
            continue
        (table,) = [t for t in _tables(_part_pages(kind, part.key)) if t.name == "bends"]
        assert table.head[-2:] == (say("fold.left"), say("fold.right"))
        printed = {n: (float(r[-2]), float(r[-1])) for r in table.rows for n in _numbers(r[0])}
        slots = [h for h in part.flat.holes if isinstance(h, c.Contour)]
        edges = shapely.union_all([shapely.LinearRing(c.sampled(o, 0.001)) for o in (part.flat.outline, *slots)])
        for fold in part.flat.folds:
            (x0, y0), (x1, y1) = fold.start, fold.end
            length = math.dist(fold.start, fold.end)
            left = (-(y1 - y0) / length, (x1 - x0) / length)
            middle = ((x0 + x1) / 2, (y0 + y1) / 2)
            for value, sign in zip(printed[fold.number], (1, -1), strict=True):
                far = (middle[0] + sign * 5000 * left[0], middle[1] + sign * 5000 * left[1])
                met = edges.intersection(shapely.LineString([middle, far]))
                assert value == pytest.approx(shapely.Point(middle).distance(met), abs=0.0075), (part.key, fold.number)


def test_notched_discs_are_dimensioned_by_their_diameter() -> None:
    page = next(s for s in book_of("hydrogen-wire") if s.kind == "part" and s.part_key == "floor")
    (diameter,) = [d for d in page.dimensions if d.name == "diameter"]
    width = dict(next(p for p in parts_of("hydrogen-wire") if p.key == "floor").sizes)["flange_width_mm"]
    assert diameter.text == f"⌀{number(width)}"
    assert not [d for d in page.dimensions if d.name in {"width", "height"}]


def test_a_tube_askew_is_drawn_straight_with_both_diameters() -> None:
    from fabgen.parts import kernel

    tube = kernel.tube((1, 2, 3), (1, 32, 4), 4.0, 3.1)
    straight = solid.squared(tube)
    box = straight.BoundingBox(1e-4)
    assert (box.xlen, box.ylen, box.zlen) == pytest.approx((4.0, math.hypot(30, 1), 4.0), abs=1e-3)
    m = solid.measured(straight)
    assert {a.text for a in solid.front_asks(m)} == {"⌀4", "⌀3.1"}
    assert solid.cross_rows(m) == ()


def test_a_repeating_edge_is_told_once() -> None:
    edge = [c.Vertex(0, 0)]
    for i in range(20):
        edge += [c.Vertex(10 * i + 2, 0), c.Vertex(10 * i + 4, 3, 0.2), c.Vertex(10 * i + 6, 0)]
    contour = c.Contour((*edge, c.Vertex(200, 0), c.Vertex(200, 30), c.Vertex(0, 30)))
    repeat = flat.repeat_of(contour)
    assert repeat is not None
    assert (repeat.first, repeat.count, len(repeat.pitches_mm)) == (1, 3, 19)
    assert [r[0] for r in flat.corner_rows("A", contour)] == ["A1", "A2", "A3", "A4", "A62", "A63", "A64"]
    wider = [c.Vertex(v.x_mm + (5 if i > 31 else 0), v.y_mm, v.bulge) for i, v in enumerate(contour.vertices)]
    assert len(flat.repeat_rows("A", flat.repeat_of(c.Contour(tuple(wider))))) == 3  # type: ignore[arg-type]


def test_slots_and_corner_radii_of_solids_are_listed() -> None:
    import cadquery

    plate = cadquery.Workplane().box(60, 40, 4).edges("|Z").fillet(5)
    plate = plate.faces(">Z").workplane().center(7, 2.975).slot2D(10, 3).cutThruAll()
    m = solid.measured(plate.val())
    assert solid.slot_rows(m) == (("S1", "3.50", "2.98", "10.50", "2.98", "3.00", "-2.00", "2.00"),)
    assert [a.text for a in solid.corner_asks(m)] == ["4 × R5"]


def test_toleranced_sizes_carry_their_tolerance_on_the_part_page() -> None:
    feed, book = feed_of("wire-rolled"), book_of("wire-rolled")
    rows = {r[0]: r[1] for s in book for t in s.tables if t.name == "sizes:loop" for r in t.rows}
    tolerance = tolerance_of(feed, "loop_diameter_mm")
    assert tolerance is not None
    assert rows[size_name("loop_diameter_mm")].endswith(f"mm ±{number(tolerance)}")


def _number(shown: str) -> float:
    return float(re.match(r"-?[\d.]+", shown).group())  # type: ignore[union-attr]


@pytest.mark.parametrize("kind", KINDS)
def test_every_part_has_its_page_and_its_sizes(kind: str) -> None:
    book = book_of(kind)
    tables = {t.name: t for s in book for t in s.tables}
    texts = [t.text for s in book for t in s.texts]
    for part in parts_of(kind):
        assert any(s.part_key == part.key for s in book) or part.process == ("buy",), part.key
        if not part.sizes:
            continue
        rows = dict(tables[f"sizes:{part.key}"].rows)
        for key, value in part.sizes:
            shown = rows[size_name(key)]
            assert _number(shown) == pytest.approx(value, abs=0.0051), (part.key, key)
            assert shown in texts


@pytest.mark.parametrize("kind", KINDS)
def test_sizes_of_the_record_are_on_the_general_arrangement(kind: str) -> None:
    feed = feed_of(kind)
    pages = [s for s in book_of(kind) if s.kind == "general"]
    rows = {r[0]: r[1] for t in _tables(pages) if t.name == "sizes" for r in t.rows}
    for key, value in vars(feed.sizes).items():
        if isinstance(value, float):
            assert _number(rows[size_name(key)]) == pytest.approx(value, abs=0.0051), key


def test_tolerances_carry_the_unit_of_their_size() -> None:
    assert quantity("series_capacitor_pf", 0.041) == "0.041 pF"
    assert quantity("loop_height_mm", 0.3) == "0.3 mm"
    assert quantity("bend_to_deg", 90.27) == "90.27°"
    assert quantity("foil_mm", 0.035) == "0.035 mm"


@pytest.mark.parametrize("kind", ["wire-rolled"])
def test_wire_marks_are_drawn_in_place(kind: str) -> None:
    (part,) = [p for p in parts_of(kind) if p.wire is not None]
    assert part.wire is not None
    (page,) = [s for s in book_of(kind) if s.kind == "wire"]
    marks = [d for d in page.dimensions if d.view == "wire"]
    view = next(v for v in page.views if v.name == "wire")
    wanted = [0.0, *(v for b in part.wire.bends for v in (b.start_mm, b.end_mm)), part.wire.cut_length_mm]
    assert [d.value for d in marks] == pytest.approx(wanted)
    for d in marks:
        assert d.lines[0].x0 == pytest.approx(view.origin[0] + view.scale * d.value, abs=1e-6)
        assert float(d.text) == pytest.approx(d.value, abs=0.051)
