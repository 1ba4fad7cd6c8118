"""STEP text (ISO 10303-21) put into one order, so that the same solids give the same bytes.

The kernel numbers entities in the order of memory addresses and counts occurrences through the life of the
process. Each entity is identified instead by a hash of its text with its references replaced by their own
hashes; roots are sorted by that hash and everything is renumbered from them.

Depends on: errors.
"""

from __future__ import annotations

import hashlib
import re
from collections.abc import Mapping

from fabgen.errors import OutputError

_ENTITY = re.compile(r"#(\d+)\s*=\s*(.*?);\s*(?=#\d+\s*=|ENDSEC)", re.DOTALL)
_REFERENCE = re.compile(r"'(?:[^']|'')*'|#(\d+)")
"""A text, which is passed over, or a reference."""
_OCCURRENCE = re.compile(r"NEXT_ASSEMBLY_USAGE_OCCURRENCE\('[^']*'")
_BREAK = re.compile(r"\s*\n\s*")


def canonical_step(text: str) -> str:
    """The same exchange file with its entities in canonical order and numbered from 1.

    Strings keep their blanks: the kernel breaks lines only between tokens. Raises OutputError when the text
    has no data section.
    """
    head, mark, data = text.partition("DATA;\n")
    if not mark:
        raise OutputError("the CAD kernel wrote no STEP data; check that the disk is not full and try again")
    bodies = {int(n): _BREAK.sub("", _OCCURRENCE.sub(_reset, body)) for n, body in _ENTITY.findall(data)}
    children = {n: tuple(int(c) for c in _REFERENCE.findall(body) if c) for n, body in bodies.items()}
    hashes = _hashes(bodies, children)
    used = {c for cs in children.values() for c in cs}
    roots = sorted((n for n in bodies if n not in used), key=lambda n: hashes[n])
    numbers = {old: new for new, old in enumerate(_post_order(roots, children), start=1)}
    lines = []
    for old, new in numbers.items():
        body = _replaced(bodies[old], numbers)
        lines.append(f"#{new}={_numbered(body, new)};\n")
    return f"{head}DATA;\n{''.join(lines)}ENDSEC;\nEND-ISO-10303-21;\n"


def _reset(_: re.Match[str]) -> str:
    return "NEXT_ASSEMBLY_USAGE_OCCURRENCE(''"


def _numbered(body: str, number: int) -> str:
    return body.replace("NEXT_ASSEMBLY_USAGE_OCCURRENCE(''", f"NEXT_ASSEMBLY_USAGE_OCCURRENCE('{number}'", 1)


def _post_order(roots: list[int], children: dict[int, tuple[int, ...]]) -> list[int]:
    """Children before parents, each once; iterative, since chains of entities run deep."""
    order: list[int] = []
    seen: set[int] = set()
    for root in roots:
        stack = [(root, False)]
        while stack:
            node, done = stack.pop()
            if done:
                order.append(node)
            elif node not in seen:
                seen.add(node)
                stack.append((node, True))
                stack.extend((c, False) for c in reversed(children[node]) if c not in seen)
    return order


def _hashes(bodies: dict[int, str], children: dict[int, tuple[int, ...]]) -> dict[int, str]:
    hashes: dict[int, str] = {}
    for node in _post_order(list(bodies), children):
        hashes[node] = hashlib.sha256(_replaced(bodies[node], hashes).encode()).hexdigest()
    return hashes


def _replaced(body: str, names: Mapping[int, object]) -> str:
    return _REFERENCE.sub(lambda m: f"#{names[int(m.group(1))]}" if m.group(1) else m.group(0), body)
