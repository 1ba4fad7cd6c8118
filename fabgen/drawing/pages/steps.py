"""The steps of the assembly and what is seen in each.

Depends on: drawing.hidden, drawing.picture, parts.records.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from fabgen.drawing.hidden import MANY_FACES, Curve, Direction, Seen, look
from fabgen.drawing.picture import Body
from fabgen.parts.records import Part

# From the gap's side and above, so that bars and loop lie open; from below for what sits under the floor.
_HIGH = 0.83  # sine of the eye's height over the floor plane: 56 degrees
ABOVE_EYE = Direction("above", (-0.394, -0.394, _HIGH), (0.7071067811865476, -0.7071067811865476, 0.0))
BELOW_EYE = Direction("below", (-0.5, -0.5, -0.7071067811865476), (0.7071067811865476, -0.7071067811865476, 0.0))

# The step that a part joins in, by the beginning of its key; the first that fits counts.
JOINS: tuple[tuple[str, str], ...] = (
    ("bend-strip", "tool"),
    ("jig", "tool"),
    ("can-tube", "wall"),
    ("can-wall", "wall"),
    ("wall", "wall"),
    ("seam1", "choke"),  # the seam of the second wall
    ("seam", "wall"),
    ("choke", "choke"),
    ("ring", "choke"),
    ("foil", "lining"),
    ("loop", "loop"),
    ("foot", "loop"),
    ("connector", "connector"),
    ("spacer", "connector"),
    ("coax", "coax"),
    ("capacitor", "capacitor"),
    ("radome", "radome"),
    ("can", "body"),
    ("floor", "body"),
    ("flange", "body"),
)
ORDER = ("tool", "body", "wall", "lining", "choke", "loop", "connector", "coax", "capacitor", "radome", "other")
CLOSE_UPS = {"loop", "connector", "coax", "capacitor"}
LEFT_OUT = {"wall", "choke", "lining"}  # the wall would only hide what the step is about
# Coax and capacitor sit on the gap's side of the bars: eye at azimuth -20 degrees, 42 degrees high.
GAP_EYE = Direction("gap", (0.698332, -0.254172, 0.669131), (0.342020, 0.939693, 0.0))
SEEN_FROM_THE_GAP = {"coax", "capacitor"}
SEEN_FROM_BELOW = {"connector"}
FASTENERS = {"screw", "nut", "rivet", "insert", "washer"}


@dataclass(frozen=True)
class Step:
    """One step: its kind and the parts that join in it."""

    kind: str
    parts: tuple[Part, ...]


def steps(parts: tuple[Part, ...], coated: bool = False) -> tuple[Step, ...]:
    """The steps that bring in all parts, each part once; ``coated``: the lining is no part but paint or plating."""
    groups: dict[str, list[Part]] = {"lining": []} if coated else {}
    ring = any(_kind_of(part.key) == "choke" for part in parts)
    for part in parts:
        # The foil of a choke that is a ring of its own goes in with the ring.
        kind = "choke" if ring and part.key.startswith("foil-choke") else _kind_of(part.key)
        groups.setdefault(kind, []).append(part)
    return tuple(Step(kind, tuple(groups[kind])) for kind in ORDER if kind in groups)


def _kind_of(key: str) -> str:
    place = _place_of(key)
    return next((kind for start, kind in JOINS if place.startswith(start)), "other")


def _place_of(key: str) -> str:
    """What a part belongs to: a screw, nut, rivet or insert to the part named after the dash."""
    head, _, rest = key.partition("-")
    return rest if rest and head in FASTENERS else key


@dataclass(frozen=True)
class StepView:
    """A step with the bodies that are there, those that join, and what each shows (old ones first)."""

    step: Step
    old: tuple[Body, ...]
    new: tuple[Body, ...]
    seen: tuple[Seen, ...]


def step_views(parts: tuple[Part, ...], bodies: Sequence[Body], coated: bool = False) -> tuple[StepView, ...]:
    """Every step with its hidden-line view; close-ups leave the wall out."""
    out: list[StepView] = []
    there: list[Body] = []
    for step in steps(parts, coated):
        keys = {p.key for p in step.parts}
        new = tuple(b for b in bodies if b.part.key in keys)
        old = tuple(b for b in there if step.kind not in CLOSE_UPS or _kind_of(b.part.key) not in LEFT_OUT)
        seen = look([b.shape for b in (*old, *new)], _eye(step.kind)) if new else ()
        if step.kind == "lining" and not new and out and out[-1].new:
            old, seen = (*out[-1].old, *out[-1].new), out[-1].seen  # a lining has no body: the can as just seen
        out.append(StepView(step, old, new, seen))
        there += new
    return tuple(out)


def _eye(kind: str) -> Direction:
    """From where a step is best seen."""
    if kind in SEEN_FROM_BELOW:
        return BELOW_EYE
    return GAP_EYE if kind in SEEN_FROM_THE_GAP else ABOVE_EYE


def made_parts(views: Sequence[StepView]) -> dict[str, tuple[Curve, ...]]:
    """What parts of many faces show in the step that they join in: a second look at them would cost a second."""
    found: dict[str, tuple[Curve, ...]] = {}
    for view in views:
        for body, seen in zip(view.new, view.seen[len(view.old) :], strict=True):
            if len(body.shape.Faces()) > MANY_FACES and body.part.key not in found:
                found[body.part.key] = seen.visible
    return found
