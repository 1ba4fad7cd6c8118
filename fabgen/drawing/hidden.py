"""Hidden-line views and sections of solids, cleaned to lines, arcs and ellipse arcs in view coordinates (mm).

The kernel's exact hidden-line algorithm gives curves that overlap and circles seen edge-on as splines; here they
become plain lines, collinear pieces are joined, and hidden lines lose what visible ones cover already.

Depends on: drawing.model.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from fabgen.drawing.model import Arc, Item, Line, Polyline

Vector = tuple[float, float, float]
Curve = Line | Arc | Polyline
JOIN_MM = 0.005  # ends nearer than this are one point
MANY_FACES = 300
TILT = 1e-4
COARSE_MM = 0.05


@dataclass(frozen=True)
class Direction:
    """A view: ``towards_eye`` points from the object to the eye, ``right`` along the paper's x."""

    name: str
    towards_eye: Vector
    right: Vector

    @property
    def up(self) -> Vector:
        """The paper's y in space."""
        n, r = self.towards_eye, self.right
        return (n[1] * r[2] - n[2] * r[1], n[2] * r[0] - n[0] * r[2], n[0] * r[1] - n[1] * r[0])

    def flat(self, point: Vector) -> tuple[float, float]:
        """View coordinates of a point in space."""
        r, u = self.right, self.up
        return (sum(a * b for a, b in zip(point, r, strict=True)), sum(a * b for a, b in zip(point, u, strict=True)))


def _unit(v: Vector) -> Vector:
    length = math.sqrt(sum(c * c for c in v))
    return (v[0] / length, v[1] / length, v[2] / length)


# Side: looked at from -x, so that the gap and the bars (+x) lie behind the plane of the section x = 0.
SIDE = Direction("side", (-1.0, 0.0, 0.0), (0.0, -1.0, 0.0))
APERTURE = Direction("aperture", (0.0, 0.0, 1.0), (0.0, -1.0, 0.0))
GAP = Direction("gap", (0.0, -1.0, 0.0), (1.0, 0.0, 0.0))
FROM_GAP = Direction("from the gap", (1.0, 0.0, 0.0), (0.0, 1.0, 0.0))
GAP_PLAN = Direction("above, gap below", (0.0, 0.0, 1.0), (0.0, 1.0, 0.0))
ABOVE = Direction("above", (0.0, 0.0, 1.0), (1.0, 0.0, 0.0))
BELOW = Direction("below", (0.0, 0.0, -1.0), (0.0, -1.0, 0.0))
_EYE = _unit((-1.0, -0.9, 0.9))
ISOMETRIC = Direction("isometric", _EYE, _unit((0.9, -1.0, 0.0)))


@dataclass(frozen=True)
class Seen:
    """What one solid shows in a view."""

    visible: tuple[Curve, ...]
    hidden: tuple[Curve, ...]


def look(shapes: Sequence[Any], direction: Direction, with_hidden: bool = False) -> tuple[Seen, ...]:
    """Edges of each shape in one common hidden-line view, in the order given.

    Solids of many faces looked at along an axis have most of their faces edge-on, which the algorithm is slow at:
    then faces turned away are left out and the eye is tilted by 1e-4, less than 0.01 mm over any drawn height.
    """
    many = sum(len(shape.Faces()) for shape in shapes) > MANY_FACES
    square = max(abs(c) for c in direction.towards_eye) > 1 - 1e-9
    if many and square and not with_hidden:
        seen = _look([_facing(shape, direction) for shape in shapes], _tilted(direction), False, COARSE_MM)
        largest = max(range(len(shapes)), key=lambda i: len(shapes[i].Faces()))
        if seen[largest].visible:
            return seen
    return _look([getattr(shape, "wrapped", shape) for shape in shapes], direction, with_hidden, 0.0)


def _look(wrapped: Sequence[Any], direction: Direction, with_hidden: bool, coarse_mm: float) -> tuple[Seen, ...]:
    from OCP.gp import gp_Ax2, gp_Dir, gp_Pnt
    from OCP.HLRAlgo import HLRAlgo_Projector
    from OCP.HLRBRep import HLRBRep_Algo, HLRBRep_HLRToShape

    algorithm = HLRBRep_Algo()
    for shape in wrapped:
        algorithm.Add(shape, 0)
    axes = gp_Ax2(gp_Pnt(0, 0, 0), gp_Dir(*direction.towards_eye), gp_Dir(*direction.right))
    algorithm.Projector(HLRAlgo_Projector(axes))
    algorithm.Update()
    algorithm.Hide()
    result = HLRBRep_HLRToShape(algorithm)
    seen = []
    for shape in wrapped:
        visible = _tidy(_curves((result.VCompound(shape), result.OutLineVCompound(shape))))
        if coarse_mm:
            visible = _distinct(visible, coarse_mm)
        hidden: tuple[Curve, ...] = ()
        if with_hidden:
            hidden = _tidy(_curves((result.HCompound(shape), result.OutLineHCompound(shape))))
            hidden = _without(hidden, visible)
        seen.append(Seen(visible, hidden))
    return tuple(seen)


def _tilted(direction: Direction) -> Direction:
    """The direction turned by TILT to its right and by 0.7 TILT upward, so that nothing stays edge-on."""
    n, r, u = direction.towards_eye, direction.right, direction.up
    eye = _unit(_mixed((n, 1.0), (r, TILT), (u, 0.7 * TILT)))
    right = _unit(_mixed((r, 1.0), (n, -TILT)))
    along = sum(a * b for a, b in zip(eye, right, strict=True))
    return Direction(direction.name, eye, _unit(_mixed((right, 1.0), (eye, -along))))


def _mixed(*terms: tuple[Vector, float]) -> Vector:
    x, y, z = (sum(v[i] * k for v, k in terms) for i in range(3))
    return (x, y, z)


def _facing(shape: Any, direction: Direction) -> Any:
    """The faces that the eye can see: plane ones turned away and those edge-on are left out."""
    from OCP.BRep import BRep_Builder
    from OCP.BRepAdaptor import BRepAdaptor_Surface
    from OCP.TopAbs import TopAbs_REVERSED
    from OCP.TopoDS import TopoDS_Compound

    builder, kept = BRep_Builder(), TopoDS_Compound()
    builder.MakeCompound(kept)
    eye = direction.towards_eye
    for face in shape.Faces():
        kind, surface = face.geomType(), BRepAdaptor_Surface(face.wrapped)
        if kind == "PLANE":
            position = surface.Plane().Position()
            way = position.Direction()
            dot = way.X() * eye[0] + way.Y() * eye[1] + way.Z() * eye[2]
            flipped = (face.wrapped.Orientation() == TopAbs_REVERSED) == position.Direct()
            if (-dot if flipped else dot) < 1e-9:
                continue
        elif kind == "CYLINDER":
            way = surface.Cylinder().Axis().Direction()
            if abs(way.X() * eye[0] + way.Y() * eye[1] + way.Z() * eye[2]) > 1 - 1e-9:
                continue
        builder.Add(kept, face.wrapped)
    return kept


def _distinct(curves: Sequence[Curve], grid_mm: float) -> tuple[Curve, ...]:
    """One of each group of curves that agree within the grid."""
    found: dict[tuple[object, ...], Curve] = {}
    for curve in curves:
        key: tuple[object, ...] = (id(curve),)
        if isinstance(curve, Line):
            key = (0, *(round(v / grid_mm) for v in (curve.x0, curve.y0, curve.x1, curve.y1)))
        elif isinstance(curve, Arc):
            ends = (*curve.at(curve.start_deg), *curve.at(curve.start_deg + curve.sweep_deg))
            key = (1, *(round(v / grid_mm) for v in (curve.cx, curve.cy, curve.rx, *ends)))
        found.setdefault(key, curve)
    return tuple(found.values())


def dressed(curves: Iterable[Curve], role: str) -> tuple[Item, ...]:
    """The curves as drawing items of one role."""
    items: list[Item] = []
    for c in curves:
        match c:
            case Line():
                items.append(Line(c.x0, c.y0, c.x1, c.y1, role))
            case Arc():
                items.append(Arc(c.cx, c.cy, c.rx, c.ry, c.start_deg, c.sweep_deg, c.turn_deg, role))
            case Polyline():
                items.append(Polyline(c.points, role, c.closed))
    return tuple(items)


def _curves(compounds: Iterable[Any]) -> list[Curve]:
    from OCP.BRepAdaptor import BRepAdaptor_Curve
    from OCP.BRepLib import BRepLib
    from OCP.TopAbs import TopAbs_EDGE
    from OCP.TopExp import TopExp_Explorer
    from OCP.TopoDS import TopoDS

    curves: list[Curve] = []
    for compound in compounds:
        if compound is None or compound.IsNull():
            continue
        BRepLib.BuildCurves3d_s(compound)
        explorer = TopExp_Explorer(compound, TopAbs_EDGE)
        while explorer.More():
            curves += _curve(BRepAdaptor_Curve(TopoDS.Edge_s(explorer.Current())))
            explorer.Next()
    return curves


def _curve(adaptor: Any) -> list[Curve]:
    from OCP.GeomAbs import GeomAbs_Circle, GeomAbs_Ellipse, GeomAbs_Line

    first, last, kind = adaptor.FirstParameter(), adaptor.LastParameter(), adaptor.GetType()
    if kind == GeomAbs_Line:
        return [_line(_at(adaptor, first), _at(adaptor, last))]
    if kind in (GeomAbs_Circle, GeomAbs_Ellipse):
        conic = adaptor.Circle() if kind == GeomAbs_Circle else adaptor.Ellipse()
        rx = conic.Radius() if kind == GeomAbs_Circle else conic.MajorRadius()
        ry = conic.Radius() if kind == GeomAbs_Circle else conic.MinorRadius()
        if ry < JOIN_MM:
            return [_line(_at(adaptor, first), _at(adaptor, last))]
        position = conic.Position()
        sign = 1.0 if position.Direction().Z() > 0 else -1.0
        turn = math.degrees(math.atan2(position.XDirection().Y(), position.XDirection().X()))
        start, sweep = math.degrees(first) * sign, math.degrees(last - first) * sign
        centre = conic.Location()
        if rx - ry < JOIN_MM:
            return [_arc(centre.X(), centre.Y(), rx, start + turn, sweep)]
        return [Arc(centre.X(), centre.Y(), rx, ry, start, sweep, turn)]
    return _sampled(adaptor, first, last)


def _at(adaptor: Any, parameter: float) -> tuple[float, float]:
    point = adaptor.Value(parameter)
    return (point.X(), point.Y())


def _line(a: tuple[float, float], b: tuple[float, float]) -> Line:
    if (b[0], b[1]) < (a[0], a[1]):
        a, b = b, a
    return Line(a[0], a[1], b[0], b[1])


def _arc(cx: float, cy: float, r: float, start: float, sweep: float) -> Arc:
    if sweep < 0:
        start, sweep = start + sweep, -sweep
    return Arc(cx, cy, r, r, start % 360.0, min(sweep, 360.0))


def _sampled(adaptor: Any, first: float, last: float) -> list[Curve]:
    """A spline as one line when it is straight, else as arcs through its points."""
    n = 24
    points = [_at(adaptor, first + (last - first) * i / n) for i in range(n + 1)]
    (dx, dy), (px, py) = _main_direction(points), points[0]
    if max(abs((x - px) * dy - (y - py) * dx) for x, y in points) < JOIN_MM:
        along = [(x - px) * dx + (y - py) * dy for x, y in points]
        low, high = min(along), max(along)
        return [_line((px + low * dx, py + low * dy), (px + high * dx, py + high * dy))]
    return _arcs_through(points)


def _main_direction(points: Sequence[tuple[float, float]]) -> tuple[float, float]:
    x0, y0 = points[0]
    far = max(points, key=lambda p: (p[0] - x0) ** 2 + (p[1] - y0) ** 2)
    length = math.hypot(far[0] - x0, far[1] - y0)
    return ((far[0] - x0) / length, (far[1] - y0) / length) if length > 1e-9 else (1.0, 0.0)


def _arcs_through(points: Sequence[tuple[float, float]]) -> list[Curve]:
    """Arcs through the points, halved until each is within 0.01 mm; two points left make a line."""
    if len(points) < 3:
        return [_line(points[0], points[-1])]
    a, b, c = points[0], points[len(points) // 2], points[-1]
    circle = _circle(a, b, c)
    if circle is not None:
        cx, cy, r = circle
        if all(abs(math.hypot(x - cx, y - cy) - r) < 0.01 for x, y in points):
            t0, t1 = math.atan2(a[1] - cy, a[0] - cx), math.atan2(c[1] - cy, c[0] - cx)
            middle = math.atan2(b[1] - cy, b[0] - cx)
            sweep = (t1 - t0) % (2 * math.pi)
            if (middle - t0) % (2 * math.pi) > sweep:
                sweep -= 2 * math.pi
            return [_arc(cx, cy, r, math.degrees(t0), math.degrees(sweep))]
    half = len(points) // 2
    return [*_arcs_through(points[: half + 1]), *_arcs_through(points[half:])]


def _circle(
    a: tuple[float, float], b: tuple[float, float], c: tuple[float, float]
) -> tuple[float, float, float] | None:
    d = 2 * (a[0] * (b[1] - c[1]) + b[0] * (c[1] - a[1]) + c[0] * (a[1] - b[1]))
    if abs(d) < 1e-6:
        return None
    sa, sb, sc = (p[0] ** 2 + p[1] ** 2 for p in (a, b, c))
    cx = (sa * (b[1] - c[1]) + sb * (c[1] - a[1]) + sc * (a[1] - b[1])) / d
    cy = (sa * (c[0] - b[0]) + sb * (a[0] - c[0]) + sc * (b[0] - a[0])) / d
    return cx, cy, math.hypot(a[0] - cx, a[1] - cy)


def _tidy(curves: Sequence[Curve]) -> tuple[Curve, ...]:
    """Collinear lines and arcs of one circle joined, doubles dropped, sorted so that the order never varies."""
    lines = [c for c in curves if isinstance(c, Line) and math.hypot(c.x1 - c.x0, c.y1 - c.y0) > JOIN_MM]
    arcs = [c for c in curves if isinstance(c, Arc) and c.rx == c.ry]
    ellipses = {
        tuple(round(v, 3) for v in (c.cx, c.cy, c.rx, c.ry, c.start_deg, c.sweep_deg, c.turn_deg)): c
        for c in curves
        if isinstance(c, Arc) and c.rx != c.ry
    }
    done: list[Curve] = [*_joined_lines(lines), *_joined_arcs(arcs), *ellipses.values()]
    return tuple(sorted(done, key=_order))


def _order(curve: Curve) -> tuple[object, ...]:
    if isinstance(curve, Line):
        return (0, *(round(v, 4) for v in (curve.x0, curve.y0, curve.x1, curve.y1)))
    if isinstance(curve, Arc):
        return (1, *(round(v, 4) for v in (curve.cx, curve.cy, curve.rx, curve.ry, curve.start_deg, curve.sweep_deg)))
    return (2, curve.points)


def _angle(line: Line) -> float:
    """Angle of the carrier from 0 up to pi; upright and level ones exact."""
    angle = math.atan2(line.y1 - line.y0, line.x1 - line.x0) % math.pi
    for exact in (0.0, math.pi / 2, math.pi):
        if abs(angle - exact) < 5e-5:
            return exact % math.pi
    return angle


def _key(line: Line) -> tuple[float, float]:
    """Angle and offset of the line's carrier, rounded."""
    angle = _angle(line)
    return (round(angle, 4), round(line.x0 * math.sin(angle) - line.y0 * math.cos(angle), 2))


def _groups(lines: Iterable[Line]) -> dict[tuple[float, float], list[Line]]:
    groups: dict[tuple[float, float], list[Line]] = {}
    for line in lines:
        groups.setdefault(_key(line), []).append(line)
    return groups


def _span(line: Line, angle: float) -> tuple[float, float]:
    c, s = math.cos(angle), math.sin(angle)
    a, b = line.x0 * c + line.y0 * s, line.x1 * c + line.y1 * s
    return (min(a, b), max(a, b))


def _union(spans: Iterable[tuple[float, float]], join: float) -> list[tuple[float, float]]:
    out: list[tuple[float, float]] = []
    for low, high in sorted(spans):
        if out and low <= out[-1][1] + join:
            out[-1] = (out[-1][0], max(out[-1][1], high))
        else:
            out.append((low, high))
    return out


def _from_spans(like: Line, angle: float, spans: Iterable[tuple[float, float]]) -> list[Line]:
    c, s = math.cos(angle), math.sin(angle)
    offset = like.x0 * s - like.y0 * c
    return [
        Line(low * c + offset * s, low * s - offset * c, high * c + offset * s, high * s - offset * c)
        for low, high in spans
        if high - low > 2 * JOIN_MM
    ]


def _joined_lines(lines: Sequence[Line]) -> list[Line]:
    out: list[Line] = []
    for group in _groups(lines).values():
        longest = max(group, key=lambda g: (math.hypot(g.x1 - g.x0, g.y1 - g.y0), g.x0, g.y0))
        angle = _angle(longest)
        out += _from_spans(longest, angle, _union((_span(line, angle) for line in group), JOIN_MM))
    return out


def _joined_arcs(arcs: Sequence[Arc]) -> list[Arc]:
    groups: dict[tuple[float, float, float], list[Arc]] = {}
    for arc in arcs:
        groups.setdefault((round(arc.cx, 2), round(arc.cy, 2), round(arc.rx, 2)), []).append(arc)
    out: list[Arc] = []
    for group in groups.values():
        first = group[0]
        spans: list[tuple[float, float]] = []
        for arc in group:
            end = arc.start_deg + arc.sweep_deg
            spans += [(arc.start_deg, min(end, 360.0))] + ([(0.0, end - 360.0)] if end > 360.0 else [])
        merged = _union(spans, 0.02)
        if len(merged) > 1 and merged[0][0] < 0.02 and merged[-1][1] > 359.98:
            merged = [*merged[1:-1], (merged[-1][0], merged[0][1] + 360.0)]
        out += [Arc(first.cx, first.cy, first.rx, first.rx, low, min(high - low, 360.0)) for low, high in merged]
    return out


def _without(hidden: Sequence[Curve], visible: Sequence[Curve]) -> tuple[Curve, ...]:
    """Hidden curves less what a visible one covers."""
    cover = _groups(c for c in visible if isinstance(c, Line))
    circles = {_circle_key(c) for c in visible if isinstance(c, Arc)}
    out: list[Curve] = []
    for curve in hidden:
        if isinstance(curve, Line):
            key = _key(curve)
            angle = _angle(curve)
            spans = [_span(curve, angle)]
            for other in cover.get(key, ()):
                spans = _minus(spans, _span(other, angle))
            out += _from_spans(curve, angle, spans)
        elif not (isinstance(curve, Arc) and _circle_key(curve) in circles):
            out.append(curve)
    return tuple(out)


def _circle_key(arc: Arc) -> tuple[float, ...]:
    return tuple(round(v, 2) for v in (arc.cx, arc.cy, arc.rx, arc.ry, arc.start_deg, arc.sweep_deg))


def _minus(spans: list[tuple[float, float]], cut: tuple[float, float]) -> list[tuple[float, float]]:
    out = []
    for low, high in spans:
        out += [(a, b) for a, b in ((low, min(high, cut[0])), (max(low, cut[1]), high)) if b - a > JOIN_MM]
    return out
