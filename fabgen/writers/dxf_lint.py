"""Reads a cutting file back and names every fault that a shop would send it back for.

Rules: closed contours only; lines, arcs and circles only; known layers and nothing else on them; no doubled or
vanishing segments; no crossing; one outer contour with all others inside; fold lines end on a contour; flat in
z = 0; millimetres; arcs of at most 90 degrees; areas and extents those of the model.

Depends on: errors, parts.contour, parts.kerf, parts.records.
"""

from __future__ import annotations

import io
import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from fabgen.errors import GeometryError
from fabgen.parts.contour import (
    Circle,
    Contour,
    Outline,
    Point,
    Vertex,
    area_mm2,
    bounds_mm,
    length_mm,
    pairs,
    sampled,
    segment_length_mm,
)
from fabgen.parts.kerf import compensated
from fabgen.parts.records import FlatPattern

CUT_LAYERS = ("OUTLINE", "HOLES")
FOLD_LAYER = "FOLD"
SHORTEST_MM = 0.05
"""Shorter segments make a machine stutter and are drawing errors. Shops' guides."""
FOLD_END_MM = 0.01
LARGEST_BULGE = 0.4143
MODEL_TOLERANCE = 1e-6
SAGITTA_MM = 0.002


@dataclass(frozen=True)
class Fault:
    """One fault: a stable word for the rule, and a sentence with the place."""

    rule: str
    message: str


@dataclass(frozen=True)
class _Loop:
    layer: str
    outline: Outline


def refuse_faults(text: str, name: str, flat: FlatPattern | None = None, kerf_mm: float = 0.0) -> None:
    """Raise GeometryError that lists the faults of a file; silent when there are none."""
    faults = lint_dxf(text, flat, kerf_mm)
    if faults:
        listed = "; ".join(f"{fault.rule}: {fault.message}" for fault in faults[:6])
        more = f"; and {len(faults) - 6} more" if len(faults) > 6 else ""
        raise GeometryError(f"the cutting file of '{name}' is not fit to be cut ({listed}{more})")


def lint_dxf(text: str, flat: FlatPattern | None = None, kerf_mm: float = 0.0) -> tuple[Fault, ...]:
    """All faults of a DXF text. With ``flat`` areas, lengths and extents are held against the model."""
    import ezdxf

    try:
        document = ezdxf.read(io.StringIO(text))
    except (ezdxf.DXFError, OSError) as error:
        return (Fault("unreadable", f"the file cannot be read back ({error})"),)
    faults = [*_structure(document), *_header(document), *_entities(document)]
    loops = list(_loops(document.modelspace()))
    faults += _segments(loops)
    faults += _shapes(document, loops)
    if flat is not None and not faults:
        faults += _model(document, loops, flat, kerf_mm)
    return tuple(faults)


def _structure(document: Any) -> Iterator[Fault]:
    audit = document.audit()
    for problem in (*audit.errors, *audit.fixes):
        yield Fault("structure", str(problem.message))
    for layout in document.layouts:
        if layout.name != "Model" and len(layout):
            yield Fault("paper space", f"layout '{layout.name}' holds {len(layout)} entities; it has to be empty")


def _header(document: Any) -> Iterator[Fault]:
    if document.dxfversion <= "AC1009":
        return
    units = document.header.get("$INSUNITS", 0)
    if units != 4:
        yield Fault("units", f"$INSUNITS is {units}; millimetres are 4")
    if document.header.get("$MEASUREMENT", 0) != 1:
        yield Fault("units", "$MEASUREMENT is not 1 (metric)")


def _entities(document: Any) -> Iterator[Fault]:
    space = document.modelspace()
    allowed = {"LWPOLYLINE", "POLYLINE", "CIRCLE"}
    for entity in space:
        kind, layer = entity.dxftype(), entity.dxf.layer
        if layer == FOLD_LAYER and kind == "LINE":
            yield from _flatness(entity, kind, (entity.dxf.start, entity.dxf.end))
            continue
        if layer not in CUT_LAYERS:
            yield Fault("layer", f"{kind} on layer '{layer}'; known layers are OUTLINE, HOLES and FOLD (lines)")
        elif kind in ("LINE", "ARC"):
            yield Fault("open contour", f"a loose {kind} on cut layer {layer}")
        elif kind not in allowed:
            yield Fault("entity", f"{kind} on layer {layer}; only closed polylines and circles are cut")
        elif kind == "CIRCLE":
            yield from _flatness(entity, kind, (entity.dxf.center,))
        else:
            yield from _polyline(entity, kind, layer)


def _polyline(entity: Any, kind: str, layer: str) -> Iterator[Fault]:
    if kind == "POLYLINE" and not entity.is_2d_polyline:
        yield Fault("entity", f"a polyline on layer {layer} is not plane")
        return
    closed = entity.closed if kind == "LWPOLYLINE" else entity.is_closed
    if not closed:
        yield Fault("open contour", f"a polyline on layer {layer} is not closed")
    if kind == "LWPOLYLINE":
        yield from _flatness(entity, kind, ((0, 0, entity.dxf.elevation),))
        widths = any(p[0] or p[1] for p in entity.get_points("se")) or bool(entity.dxf.get("const_width", 0.0))
    else:
        yield from _flatness(entity, kind, [v.dxf.location for v in entity.vertices])
        widths = False
    if widths:
        yield Fault("width", f"a polyline on layer {layer} has a line width; a cut has none")


def _flatness(entity: Any, kind: str, points: Any) -> Iterator[Fault]:
    if any(abs(tuple(p)[2]) > 1e-9 for p in points):
        yield Fault("flat", f"{kind} is not in z = 0")
    if tuple(entity.dxf.extrusion) != (0.0, 0.0, 1.0) or entity.dxf.get("thickness", 0.0):
        yield Fault("flat", f"{kind} has an extrusion; it would be mirrored or lost")


def _loops(space: Any) -> Iterator[_Loop]:
    for entity in space:
        kind, layer = entity.dxftype(), entity.dxf.layer
        if layer not in CUT_LAYERS:
            continue
        if kind == "CIRCLE":
            centre = entity.dxf.center
            yield _Loop(layer, Circle(centre.x, centre.y, 2 * entity.dxf.radius))
        elif kind == "LWPOLYLINE":
            yield _Loop(layer, Contour(tuple(Vertex(x, y, b) for x, y, b in entity.get_points("xyb"))))
        elif kind == "POLYLINE":
            places = [(v.dxf.location.x, v.dxf.location.y, v.dxf.bulge) for v in entity.vertices]
            yield _Loop(layer, Contour(tuple(Vertex(*p) for p in places)))


def _segments(loops: list[_Loop]) -> Iterator[Fault]:
    seen: dict[tuple[Any, ...], str] = {}
    for loop in loops:
        if isinstance(loop.outline, Circle):
            c = loop.outline
            yield from _once(seen, ("circle", *_grid(c.x_mm, c.y_mm), round(c.diameter_mm, 3)), "circle")
            if c.diameter_mm < SHORTEST_MM:
                yield Fault("short segment", f"a circle of {c.diameter_mm:.3f} mm at ({c.x_mm:.2f}, {c.y_mm:.2f})")
            continue
        for a, b in pairs(loop.outline):
            if segment_length_mm(a, b) < SHORTEST_MM:
                yield Fault("short segment", f"under {SHORTEST_MM} mm at ({a.x_mm:.2f}, {a.y_mm:.2f})")
                continue
            if abs(a.bulge) > LARGEST_BULGE:
                yield Fault("bulge", f"an arc over 90 degrees at ({a.x_mm:.2f}, {a.y_mm:.2f})")
            # The same segment whichever way it runs: the bulge's sign turns with it, so that a lens of two arcs passes.
            ends, bulge = [_grid(a.x_mm, a.y_mm), _grid(b.x_mm, b.y_mm)], round(a.bulge, 4)
            low, high = sorted(ends)
            yield from _once(seen, (low, high, (bulge if ends[0] == low else -bulge) + 0.0), "segment")


def _grid(x: float, y: float) -> Point:
    return round(float(x), 3) + 0.0, round(float(y), 3) + 0.0


def _once(seen: dict[tuple[Any, ...], str], key: tuple[Any, ...], what: str) -> Iterator[Fault]:
    if key in seen:
        yield Fault("doubled", f"a {what} is there twice, near {key[1] if what == 'circle' else key[0]}")
    seen[key] = what


def _shapes(document: Any, loops: list[_Loop]) -> Iterator[Fault]:
    """Validity and nesting of the contours, and the fold lines' ends, on a fine polygon of each."""
    import shapely

    rings = []
    for loop in loops:
        points = sampled(loop.outline, SAGITTA_MM)
        if len(points) < 3:
            yield Fault("open contour", f"a contour on {loop.layer} has fewer than three corners")
            return
        ring = shapely.Polygon(points)
        if not ring.is_valid or ring.area < SHORTEST_MM**2:
            yield Fault("self-crossing", f"a contour on {loop.layer} crosses itself or has no area")
            return
        rings.append(ring)
    outer = [ring for loop, ring in zip(loops, rings, strict=True) if loop.layer == "OUTLINE"]
    if len(outer) != 1:
        yield Fault("outline", f"{len(outer)} contours on layer OUTLINE; one part has exactly one")
        return
    holes = [ring for loop, ring in zip(loops, rings, strict=True) if loop.layer == "HOLES"]
    yield from _nested(outer[0], holes)
    edges = shapely.union_all([outer[0].exterior, *(hole.exterior for hole in holes)])
    yield from _folds(document, shapely.Polygon(outer[0].exterior), edges)


def _nested(outer: Any, holes: list[Any]) -> Iterator[Fault]:
    import shapely

    for hole in holes:
        if not outer.contains_properly(hole):
            x, y = hole.centroid.x, hole.centroid.y
            yield Fault("hole outside", f"the hole at ({x:.2f}, {y:.2f}) is not inside the outline")
    if not holes:
        return
    tree = shapely.STRtree(holes)
    for i, j in tree.query(holes, predicate="intersects").T.tolist():
        if i < j:
            yield Fault("crossing", f"two holes meet near ({holes[i].centroid.x:.2f}, {holes[i].centroid.y:.2f})")


def _folds(document: Any, outer: Any, edges: Any) -> Iterator[Fault]:
    import shapely

    for line in document.modelspace().query(f'LINE[layer=="{FOLD_LAYER}"]'):
        ends = [(p.x, p.y) for p in (line.dxf.start, line.dxf.end)]
        if math.dist(*ends) < SHORTEST_MM:
            yield Fault("short segment", "a fold line has no length")
            continue
        for end in ends:
            if edges.distance(shapely.Point(end)) > FOLD_END_MM + SAGITTA_MM:
                where = f"({end[0]:.2f}, {end[1]:.2f})"
                yield Fault("fold line", f"a fold line ends at {where}, not on an edge of the part")
        if not outer.buffer(FOLD_END_MM + SAGITTA_MM).contains(shapely.LineString(ends)):
            yield Fault("fold line", "a fold line runs past the edge of the part")


def _model(document: Any, loops: list[_Loop], flat: FlatPattern, kerf_mm: float) -> Iterator[Fault]:
    wanted = [compensated(flat.outline, kerf_mm / 2), *(compensated(h, -kerf_mm / 2) for h in flat.holes)]
    if len(wanted) != len(loops):
        yield Fault("model", f"{len(loops)} contours in the file, {len(wanted)} in the part")
        return
    for loop, model in zip(loops, wanted, strict=True):
        for what, measure in (("area", area_mm2), ("length", length_mm)):
            have, want = measure(loop.outline), measure(model)
            if abs(have - want) > MODEL_TOLERANCE * max(1.0, want):
                yield Fault("model", f"{what} of a contour is {have:.6f}, the part's is {want:.6f}")
    low_high = bounds_mm(wanted[0])
    low, high = document.header.get("$EXTMIN"), document.header.get("$EXTMAX")
    if max(abs(a - b) for a, b in zip((*low[:2], *high[:2]), low_high, strict=True)) > 1e-3:
        yield Fault("extents", "the extents in the header are not those of the part")
