"""One DXF per flat part: closed outlines of lines, arcs and circles, and nothing but the part.

Layers: OUTLINE (the one outer contour), HOLES (every inner contour), FOLD (fold lines, only in a fold copy, never
cut). Millimetres, nominal size unless a kerf is given. R2010 is the main file; R12 has neither units nor light
polylines and is a copy for old controllers.

Depends on: errors, parts.
"""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

from fabgen.errors import GeometryError, OutputError
from fabgen.parts.contour import Circle, Outline, bounds_mm
from fabgen.parts.kerf import compensated
from fabgen.parts.records import FlatPattern, Part
from fabgen.writers.dxf_lint import refuse_faults

if TYPE_CHECKING:
    from ezdxf.document import Drawing

Version = Literal["R2010", "R12"]
OUTLINE, HOLES, FOLD = "OUTLINE", "HOLES", "FOLD"


def write_dxf(
    part: Part, path: Path | str, version: Version = "R2010", folds: bool = False, kerf_mm: float = 0.0
) -> Path:
    """Write the part's flat pattern and return the path.

    ``folds`` adds the fold lines on their own layer (the fold copy). ``kerf_mm`` > 0 moves every contour by half
    the kerf into the waste; 0 is nominal size. The file is linted first and not written when a fault is found.
    Raises GeometryError for a part without flat pattern or with a fault, OutputError when the disc refuses.
    """
    if part.flat is None:
        raise GeometryError(f"part '{part.key}' has no flat pattern, so there is no DXF of it")
    text = dxf_text(part.flat, version, folds, kerf_mm)
    refuse_faults(text, part.key, part.flat, kerf_mm)
    target = Path(path)
    try:
        target.write_bytes(text.encode("ascii"))
    except OSError as error:
        raise OutputError(f"cannot write {target}: {error.strerror}") from None
    return target


def dxf_text(flat: FlatPattern, version: Version = "R2010", folds: bool = False, kerf_mm: float = 0.0) -> str:
    """The file's text, the same for the same flat pattern.

    Raises GeometryError for a fold copy with a kerf: fold lines end on the nominal edge.
    """
    import ezdxf

    if folds and kerf_mm:
        raise GeometryError("a fold copy shows nominal edges; write it without kerf, and the cut file with it")

    with _fixed_meta_data(), _quiet():
        document = ezdxf.new(version, units=4)
        _layers(document, folds and bool(flat.folds))
        space = document.modelspace()
        _draw(space, compensated(flat.outline, kerf_mm / 2), OUTLINE)
        for hole in flat.holes:
            _draw(space, compensated(hole, -kerf_mm / 2), HOLES)
        for fold in flat.folds if folds else ():
            space.add_line(fold.start, fold.end, dxfattribs={"layer": FOLD})
        _extents(document, flat, kerf_mm)
        # The library keeps classes in a set; written sorted, the bytes do not depend on the hash seed.
        document.classes.add_required_classes(document.dxfversion)
        document.classes.classes = dict(sorted(document.classes.classes.items()))
        stream = io.StringIO()
        document.write(stream)
    return stream.getvalue()


def file_name(part: Part, revision: str, suffix: str = "") -> str:
    """``part_grade_temper_thickness_quantity_revision``: what a shop asks to see in the name."""
    thickness = part.thickness_mm if part.thickness_mm is not None else 0.0
    words = [part.key, part.material, part.temper, f"{thickness:g}mm", f"qty{part.quantity}", f"rev{revision}"]
    if suffix:
        words.append(suffix)
    return "_".join(word.replace(" ", "-").replace("/", "-").lower() for word in words if word) + ".dxf"


def _layers(document: Drawing, folds: bool) -> None:
    for name, colour in ((OUTLINE, 7), (HOLES, 4), (FOLD, 1)):
        if name != FOLD or folds:
            document.layers.add(name, color=colour)


def _draw(space: Any, outline: Outline, layer: str) -> None:
    if isinstance(outline, Circle):
        space.add_circle((outline.x_mm, outline.y_mm), outline.diameter_mm / 2, dxfattribs={"layer": layer})
        return
    points = [(v.x_mm, v.y_mm, v.bulge) for v in outline.vertices]
    if space.doc.dxfversion <= "AC1009":
        space.add_polyline2d(points, format="xyb", close=True, dxfattribs={"layer": layer})
    else:
        space.add_lwpolyline(points, format="xyb", close=True, dxfattribs={"layer": layer})


def _extents(document: Drawing, flat: FlatPattern, kerf_mm: float) -> None:
    x0, y0, x1, y1 = bounds_mm(compensated(flat.outline, kerf_mm / 2))
    if document.dxfversion > "AC1009":
        document.header["$MEASUREMENT"] = 1
    # Both places: the library takes the layout's for the header unless a corner is the origin.
    document.modelspace().reset_extents((x0, y0, 0.0), (x1, y1, 0.0))
    document.header["$EXTMIN"] = (x0, y0, 0.0)
    document.header["$EXTMAX"] = (x1, y1, 0.0)
    document.set_modelspace_vport(1.1 * max(x1 - x0, y1 - y0), center=((x0 + x1) / 2, (y0 + y1) / 2))


@contextmanager
def _fixed_meta_data() -> Iterator[None]:
    import ezdxf

    kept = ezdxf.options.write_fixed_meta_data_for_testing
    ezdxf.options.write_fixed_meta_data_for_testing = True
    try:
        yield
    finally:
        ezdxf.options.write_fixed_meta_data_for_testing = kept


@contextmanager
def _quiet() -> Iterator[None]:
    """R12 carries no units; the library says so in the log for every file."""
    import logging

    log = logging.getLogger("ezdxf")
    level = log.level
    log.setLevel(logging.ERROR)
    try:
        yield
    finally:
        log.setLevel(level)
