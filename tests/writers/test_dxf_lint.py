"""The linter finds each seeded fault and has nothing to say about sound files."""

from __future__ import annotations

import io
from collections.abc import Callable
from typing import Any

import ezdxf
import pytest

from fabgen.errors import GeometryError
from fabgen.parts.contour import Circle, Contour, FoldLine, Vertex, rectangle
from fabgen.parts.records import FlatPattern
from fabgen.writers.dxf import dxf_text
from fabgen.writers.dxf_lint import lint_dxf, refuse_faults

PLATE = FlatPattern(
    rectangle((0, 0), (60, 40), 3.0),
    (Circle(15, 15, 4.0), rectangle((30, 10), (40, 20), 1.0)),
    (FoldLine(1, (50, 0), (50, 40), 90.0, 1.0, 0.33, 2.0, 2.0, 1),),
    1.0,
)


def document(version: str = "R2010") -> Any:
    return ezdxf.read(io.StringIO(dxf_text(PLATE, version, folds=True)))  # type: ignore[arg-type]


def text(doc: Any) -> str:
    stream = io.StringIO()
    doc.write(stream)
    return stream.getvalue()


def outline(doc: Any) -> Any:
    return next(e for e in doc.modelspace() if e.dxf.layer == "OUTLINE")


def open_contour(doc: Any) -> None:
    outline(doc).closed = False


def loose_line(doc: Any) -> None:
    doc.modelspace().add_line((5, 5), (9, 9), dxfattribs={"layer": "HOLES"})


def doubled_edge(doc: Any) -> None:
    doc.modelspace().add_entity(outline(doc).copy())


def doubled_circle(doc: Any) -> None:
    doc.modelspace().add_circle((15, 15), 2.0, dxfattribs={"layer": "HOLES"})


def spline(doc: Any) -> None:
    doc.modelspace().add_spline([(5, 5), (7, 9), (9, 5)], dxfattribs={"layer": "HOLES"})


def ellipse(doc: Any) -> None:
    doc.modelspace().add_ellipse((20, 30), (3, 0), 0.5, dxfattribs={"layer": "HOLES"})


def zero_length(doc: Any) -> None:
    points = list(outline(doc).get_points("xyb"))
    outline(doc).set_points([(*points[0][:2], 0.0), *points], format="xyb")


def text_on_cut_layer(doc: Any) -> None:
    doc.modelspace().add_text("LOOP", dxfattribs={"layer": "OUTLINE"})


def text_on_layer_0(doc: Any) -> None:
    doc.modelspace().add_text("LOOP")


def wrong_units(doc: Any) -> None:
    doc.header["$INSUNITS"] = 1


def self_crossing(doc: Any) -> None:
    doc.modelspace().add_lwpolyline([(20, 30), (26, 36), (26, 30), (20, 36)], close=True, dxfattribs={"layer": "HOLES"})


def hole_outside(doc: Any) -> None:
    doc.modelspace().add_circle((80, 10), 2.0, dxfattribs={"layer": "HOLES"})


def hole_over_the_edge(doc: Any) -> None:
    doc.modelspace().add_circle((59, 20), 2.0, dxfattribs={"layer": "HOLES"})


def holes_that_meet(doc: Any) -> None:
    doc.modelspace().add_circle((18, 15), 2.0, dxfattribs={"layer": "HOLES"})


def hole_in_hole(doc: Any) -> None:
    doc.modelspace().add_circle((15, 15), 1.0, dxfattribs={"layer": "HOLES"})


def fold_past_the_edge(doc: Any) -> None:
    doc.modelspace().query("LINE")[0].dxf.end = (50, 45)


def fold_short_of_the_edge(doc: Any) -> None:
    doc.modelspace().query("LINE")[0].dxf.end = (50, 39)


def fold_on_cut_layer(doc: Any) -> None:
    doc.modelspace().query("LINE")[0].dxf.layer = "OUTLINE"


def two_parts(doc: Any) -> None:
    doc.modelspace().add_circle((100, 10), 5.0, dxfattribs={"layer": "OUTLINE"})


def big_arc(doc: Any) -> None:
    points = [(20, 30, 1.0), (26, 30, 1.0)]
    doc.modelspace().add_lwpolyline(points, format="xyb", close=True, dxfattribs={"layer": "HOLES"})


def lifted(doc: Any) -> None:
    outline(doc).dxf.elevation = 2.0


def mirrored(doc: Any) -> None:
    doc.modelspace().query("CIRCLE")[0].dxf.extrusion = (0, 0, -1)


def border_in_paper_space(doc: Any) -> None:
    doc.layout("Layout1").add_line((0, 0), (10, 0))


def block(doc: Any) -> None:
    doc.blocks.new("B").add_circle((0, 0), 1)
    doc.modelspace().add_blockref("B", (5, 5), dxfattribs={"layer": "HOLES"})


def line_width(doc: Any) -> None:
    outline(doc).dxf.const_width = 0.5


def moved_contour(doc: Any) -> None:
    doc.modelspace().query("CIRCLE")[0].dxf.radius = 2.01


FAULTS: list[tuple[Callable[[Any], None], str]] = [
    (open_contour, "open contour"), (loose_line, "open contour"), (doubled_edge, "doubled"),
    (doubled_circle, "doubled"), (spline, "entity"), (ellipse, "entity"), (zero_length, "short segment"),
    (text_on_cut_layer, "entity"), (text_on_layer_0, "layer"), (wrong_units, "units"),
    (self_crossing, "self-crossing"), (hole_outside, "hole outside"), (hole_over_the_edge, "hole outside"),
    (holes_that_meet, "crossing"), (hole_in_hole, "crossing"), (fold_past_the_edge, "fold line"),
    (fold_short_of_the_edge, "fold line"), (fold_on_cut_layer, "open contour"), (two_parts, "outline"),
    (big_arc, "bulge"), (lifted, "flat"), (mirrored, "flat"), (border_in_paper_space, "paper space"),
    (block, "entity"), (line_width, "width"), (moved_contour, "model"),
]  # fmt: skip


@pytest.mark.parametrize(("spoil", "rule"), FAULTS, ids=[f.__name__ for f, _ in FAULTS])
def test_each_seeded_fault_is_found(spoil: Callable[[Any], None], rule: str) -> None:
    doc = document()
    spoil(doc)
    assert rule in {fault.rule for fault in lint_dxf(text(doc), PLATE)}
    with pytest.raises(GeometryError, match="not fit to be cut"):
        refuse_faults(text(doc), "plate", PLATE)


def open_in_r12(doc: Any) -> None:
    outline(doc).close(False)


def doubled_arc(doc: Any) -> None:
    """The same lens twice, the second run the other way round and from the other end."""
    space = doc.modelspace()
    space.add_lwpolyline([(20, 30, 0.3), (26, 30, 0.3)], format="xyb", close=True, dxfattribs={"layer": "HOLES"})
    space.add_lwpolyline([(26, 30, -0.3), (20, 30, -0.3)], format="xyb", close=True, dxfattribs={"layer": "HOLES"})


def shared_edge(doc: Any) -> None:
    """A second hole that shares half an edge with the first."""
    doc.modelspace().add_lwpolyline([(40, 12), (44, 12), (44, 16), (40, 16)], close=True, dxfattribs={"layer": "HOLES"})


def slit(doc: Any) -> None:
    """An outline that runs out and back over the same line."""
    points = list(outline(doc).get_points("xyb"))
    outline(doc).set_points([*points, (20.0, 20.0, 0.0), (*points[-1][:2], 0.0)], format="xyb")


@pytest.mark.parametrize(
    ("spoil", "rules"),
    [(doubled_arc, {"doubled"}), (shared_edge, {"crossing"}), (slit, {"self-crossing", "doubled"})],
)
def test_edges_that_are_cut_twice_are_found_in_every_guise(spoil: Callable[[Any], None], rules: set[str]) -> None:
    doc = document()
    spoil(doc)
    assert rules & {fault.rule for fault in lint_dxf(text(doc))}


def test_a_lens_of_two_equal_arcs_is_no_doubled_edge() -> None:
    lens = Contour((Vertex(20, 30, 0.3), Vertex(26, 30, 0.3)))
    flat = FlatPattern(PLATE.outline, (lens,), (), 1.0)
    assert lint_dxf(dxf_text(flat), flat) == ()


@pytest.mark.parametrize(
    ("spoil", "rule"),
    [(open_in_r12, "open contour"), (loose_line, "open contour"), (doubled_edge, "doubled"),
     (doubled_circle, "doubled"), (text_on_cut_layer, "entity"), (hole_outside, "hole outside"),
     (hole_over_the_edge, "hole outside"),
     (holes_that_meet, "crossing"), (fold_past_the_edge, "fold line"), (fold_short_of_the_edge, "fold line"),
     (two_parts, "outline"), (mirrored, "flat"), (moved_contour, "model")],
)  # fmt: skip
def test_faults_are_found_in_r12_files_too(spoil: Callable[[Any], None], rule: str) -> None:
    doc = document("R12")
    spoil(doc)
    assert rule in {fault.rule for fault in lint_dxf(text(doc), PLATE)}


@pytest.mark.parametrize("version", ["R2010", "R12"])
@pytest.mark.parametrize("folds", [False, True])
def test_sound_files_pass(version: str, folds: bool) -> None:
    assert lint_dxf(dxf_text(PLATE, version, folds), PLATE) == ()  # type: ignore[arg-type]


def test_wrong_extents_and_garbage_are_found() -> None:
    doc = document()
    doc.modelspace().reset_extents((1, 1, 0), (2, 2, 0))
    assert {f.rule for f in lint_dxf(text(doc), PLATE)} == {"extents"}
    assert lint_dxf("not a drawing")[0].rule == "unreadable"


def test_many_faults_are_counted_in_one_message() -> None:
    doc = document()
    for i in range(9):
        doc.modelspace().add_line((i, 1), (i, 2), dxfattribs={"layer": "HOLES"})
    with pytest.raises(GeometryError, match="and 3 more"):
        refuse_faults(text(doc), "plate")
