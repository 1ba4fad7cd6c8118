"""Parts of the field computation on their own: junctions, overlap integrals, the choke's surface, memory."""

from __future__ import annotations

import math
import os

import numpy as np
import pytest

from fabgen.errors import GeometryError
from fabgen.fields.functions import edge_functions
from fabgen.fields.geometry import ChokeGeometry
from fabgen.fields.mesh import CHOKE, single
from fabgen.fields.model import FeedSolver
from fabgen.fields.plan import plan_mesh
from fabgen.fields.quadrature import triangle_rule
from fabgen.fields.surfaces import feed_mesh
from fabgen.fields.system import overlap
from tests.fields.test_feed_solver import TARGET_HZ, WAVE, a_feed


def _three_sheets() -> tuple[np.ndarray, np.ndarray]:
    points = np.array([[0, 0, 0], [1, 0, 0], [0.3, 0.9, 0], [0.4, -1.1, 0.1], [0.6, 0.2, 0.8]], dtype=float)
    return points, np.array([[0, 1, 2], [0, 1, 3], [0, 1, 4]])


def test_edge_of_three_sheets_carries_two_functions_and_no_net_charge() -> None:
    points, triangles = _three_sheets()
    functions = edge_functions(single(points, triangles))
    assert functions.count == 2
    # each function flows out of one sheet and into another (Kirchhoff at the edge)
    for unknown in range(2):
        assert (functions.sign * (functions.dof == unknown)).sum() == 0.0


def test_overlap_against_the_definition_of_the_functions() -> None:
    # f = +- l/(2A) (r - v) (Rao, Wilton, Glisson 1982); a rule of degree 6 is exact for the product of two
    points, triangles = _three_sheets()
    mesh = single(points, triangles)
    f = edge_functions(mesh)
    sheet = np.array([0.2, 0.5, 1.5])
    bary, weight = triangle_rule(12)
    expected = np.zeros((f.count, f.count))
    for t, area in enumerate(mesh.areas_m2()):
        r = bary @ mesh.corners_m[t]
        values = np.zeros((f.count, len(r), 3))
        for corner in range(3):
            for slot in range(2):
                if f.dof[t, corner, slot] >= 0:
                    scale = f.sign[t, corner, slot] * f.length_m[t, corner] / (2 * area)
                    values[f.dof[t, corner, slot]] += scale * (r - mesh.corners_m[t, corner])
        expected += sheet[t] * area * np.einsum("i,mix,nix->mn", weight, values, values)
    np.testing.assert_allclose(overlap(mesh, f, sheet), expected, rtol=1e-12)


@pytest.mark.parametrize("floor", [0.0, 0.1])
def test_choke_has_the_surface_of_ring_and_wall(floor: float) -> None:
    # half of pi (R^2 - r^2) + 2 pi R d; the round plan is a polygon of the circle's area
    outer, depth = 0.78 * WAVE, 0.2 * WAVE
    feed = a_feed("wire", choke=ChokeGeometry(outer, floor * WAVE, depth))
    mesh, _ = feed_mesh(feed, plan_mesh(feed, WAVE, 12))
    measured = mesh.areas_m2()[mesh.label == CHOKE].sum()
    expected = math.pi / 2 * (outer**2 - feed.can.radius_m**2) + math.pi * outer * depth
    assert measured == pytest.approx(expected, rel=2e-3)
    height = mesh.corners_m[mesh.label == CHOKE][..., 2]
    assert height.min() == pytest.approx(floor * WAVE)
    assert height.max() == pytest.approx(floor * WAVE + depth)


def test_solver_refuses_more_unknowns_than_memory(monkeypatch: pytest.MonkeyPatch) -> None:
    feed = a_feed()
    monkeypatch.setattr(os, "sysconf", lambda _: 1)
    with pytest.raises(GeometryError, match="GiB"):
        FeedSolver(plan_mesh(feed, WAVE, 12)).solve(feed, TARGET_HZ)
