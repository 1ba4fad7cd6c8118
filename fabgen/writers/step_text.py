"""STEP text (ISO 10303-21) put into one order, so that the same solids give the same bytes.

The kernel numbers entities in the order of memory addresses and counts occurrences through the life of the
process. Each entity is identified instead by a hash of its text with its references replaced by their own
hashes; roots are sorted by that hash and everything is renumbered from them. Where two edges meet the kernel keeps
the corner of either, and they differ by rounding: numbers below 1e-11 are written as zero.

Depends on: errors.
"""

from __future__ import annotations

import hashlib
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

from fabgen.errors import OutputError

_ENTITY = re.compile(r"#(\d+)\s*=\s*(.*?);\s*(?=#\d+\s*=|ENDSEC)", re.DOTALL)
_TOKEN = re.compile(r"('(?:[^']|'')*')|#(\d+)")
_OCCURRENCE = re.compile(r"NEXT_ASSEMBLY_USAGE_OCCURRENCE\('[^']*'")
_BREAK = re.compile(r"\s*\n\s*")
_NUMBER = re.compile(r"#(\d+)")
_NOISE = re.compile(r"-?\d\.\d*E-(?:1[2-9]|[2-9]\d|\d{3})(?=[,)])|-0\.(?=[,)])")


@dataclass(frozen=True)
class _Entity:
    """An entity's text cut at its references: ``texts`` is one longer than ``references``."""

    texts: tuple[str, ...]
    references: tuple[int, ...]

    def written(self, names: Mapping[int, str]) -> str:
        pieces = [self.texts[0]]
        for reference, text in zip(self.references, self.texts[1:], strict=True):
            pieces += (names[reference], text)
        return "".join(pieces)


def canonical_step(text: str) -> str:
    """The same exchange file with its entities in canonical order and numbered from 1.

    Strings keep their blanks: the kernel breaks lines only between tokens. Raises OutputError when the text
    has no data section.
    """
    head, mark, data = text.partition("DATA;\n")
    if not mark:
        raise OutputError("the CAD kernel wrote no STEP data; check that the disk is not full and try again")
    entities = {int(n): _entity(body) for n, body in _ENTITY.findall(data)}
    hashes = _hashes(entities)
    used = {c for entity in entities.values() for c in entity.references}
    roots = sorted((n for n in entities if n not in used), key=lambda n: hashes[n])
    order = _post_order(roots, entities)
    names = {old: f"#{new}" for new, old in enumerate(order, start=1)}
    lines = (f"{names[old]}={_numbered(entities[old].written(names), names[old])};\n" for old in order)
    return f"{head}DATA;\n{''.join(lines)}ENDSEC;\nEND-ISO-10303-21;\n"


def _entity(body: str) -> _Entity:
    if "\n" in body:
        body = _BREAK.sub("", body)
    if body.startswith("NEXT_"):
        body = _OCCURRENCE.sub("NEXT_ASSEMBLY_USAGE_OCCURRENCE(''", body)
    if "E-" in body or "-0." in body:
        body = _NOISE.sub("0.", body)
    if "'" in body.replace("''", ""):
        return _entity_with_text(body)
    pieces = _NUMBER.split(body)
    return _Entity(tuple(pieces[::2]), tuple(int(n) for n in pieces[1::2]))


def _entity_with_text(body: str) -> _Entity:
    """The same for a body with a string that is not empty: what looks like a reference in it is none."""
    texts, references, start = [], [], 0
    for match in _TOKEN.finditer(body):
        if match.group(2):
            texts.append(body[start : match.start()])
            references.append(int(match.group(2)))
            start = match.end()
    return _Entity((*texts, body[start:]), tuple(references))


def _numbered(body: str, name: str) -> str:
    if not body.startswith("NEXT_"):
        return body
    return body.replace("NEXT_ASSEMBLY_USAGE_OCCURRENCE(''", f"NEXT_ASSEMBLY_USAGE_OCCURRENCE('{name[1:]}'", 1)


def _post_order(roots: Iterable[int], entities: Mapping[int, _Entity]) -> list[int]:
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
                children = entities[node].references
                if not children:
                    order.append(node)
                    continue
                stack.append((node, True))
                stack.extend((c, False) for c in reversed(children) if c not in seen)
    return order


def _hashes(entities: dict[int, _Entity]) -> dict[int, str]:
    """Each entity's hash; puts the faces of shells, a set without order (ISO 10303-42), in the order of theirs."""
    hashes: dict[int, str] = {}
    for node in _post_order(entities, entities):
        if entities[node].texts[0].startswith("CLOSED_SHELL("):
            faces = sorted(entities[node].references, key=lambda n: hashes[n])
            entities[node] = replace(entities[node], references=tuple(faces))
        text = entities[node].written(hashes)
        hashes[node] = hashlib.blake2b(text.encode(), digest_size=16).hexdigest()
    return hashes
