"""What mutation testing found no test to hold in the checks."""

from __future__ import annotations

import pytest

from fabgen.checks.flat_shapes import relieved, size_mm
from fabgen.parts.contour import FoldLine
from fabgen.parts.records import FlatPattern
from tests.checks.cases import rectangle


@pytest.mark.parametrize("turned", [False, True])
def test_a_fold_inside_the_sheet_tears_unless_it_is_relieved(turned: bool) -> None:
    """A fold from 40 to 60 in the middle of a plate; slots of 1.4 mm begin 0.1 mm beside its ends."""

    def across(x: float, y: float) -> tuple[float, float]:
        return (y, x) if turned else (x, y)

    def slot(x0: float, x1: float) -> tuple[float, float, float, float]:
        (a, b), (c, d) = across(x0, 20.0), across(x1, 30.0)
        return min(a, c), min(b, d), max(a, c), max(b, d)

    plate = rectangle(0, 0, 50, 100) if turned else rectangle(0, 0, 100, 50)
    fold = FoldLine(1, across(40, 25), across(60, 25), 90.0, 1.5, 0.4, 3.0, 2.0, 1)
    left, right = rectangle(*slot(38.5, 39.9)), rectangle(*slot(60.1, 61.5))
    assert not relieved(FlatPattern(plate, (), (fold,)), fold, 1.0)
    assert not relieved(FlatPattern(plate, (left,), (fold,)), fold, 1.0)
    assert not relieved(FlatPattern(plate, (right,), (fold,)), fold, 1.0)
    assert relieved(FlatPattern(plate, (left, right), (fold,)), fold, 1.0)


def test_the_box_of_a_part_that_lies_off_the_origin() -> None:
    assert size_mm(FlatPattern(rectangle(10, 20, 40, 30))) == (30, 10)
    assert size_mm(FlatPattern(rectangle(-5, -20, 5, 30))) == (50, 10)
