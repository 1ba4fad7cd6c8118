"""Texts of the sheets read back from their PDF, page by page in the order in which they were set.

Reads what ``writers.pdf`` makes: numbered objects, fonts with a table to Unicode, streams packed by Flate and
ASCII85. It is no reader for the PDF files of others.

Depends on: errors.
"""

from __future__ import annotations

import base64
import re
import zlib
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from fabgen.errors import JobError

_OBJECT = re.compile(rb"(\d+) 0 obj\s")
_SHOWN = re.compile(rb"/(F\d+\+\d+) [-\d.]+ Tf|\(((?:[^\\()]|\\.)*)\) Tj", re.DOTALL)
_ESCAPE = re.compile(rb"\\([0-7]{1,3}|.)", re.DOTALL)
_NAMED = {b"n": b"\n", b"r": b"\r", b"t": b"\t", b"b": b"\b", b"f": b"\f"}


@dataclass(frozen=True)
class _Object:
    """Dictionary and unpacked stream of a numbered object."""

    head: bytes
    stream: bytes

    def reference(self, key: str) -> int:
        """The number that a key of the dictionary refers to."""
        found = re.search(rb"/" + key.encode() + rb" (\d+) 0 R", self.head)
        if found is None:
            raise ValueError(f"an object has no {key}")
        return int(found[1])


def page_texts(path: Path) -> tuple[tuple[str, ...], ...]:
    """Texts of each page. Raises JobError for a file that is not whole or was made by another program."""
    try:
        objects = dict(_objects(path.read_bytes()))
        tree = next(o for o in objects.values() if b"/Kids" in o.head and b"/Type /Pages" in o.head)
        kids = re.search(rb"/Kids \[([^\]]*)\]", tree.head)
        pages = [objects[int(n)] for n in re.findall(rb"(\d+) 0 R", kids[1] if kids else b"")]
        fonts = {
            name: _unicode(objects[objects[int(number)].reference("ToUnicode")].stream)
            for o in objects.values()
            for name, number in re.findall(rb"/(F\d+\+\d+) (\d+) 0 R", o.head)
        }
        return tuple(_texts(objects[page.reference("Contents")].stream, fonts) for page in pages)
    except (ValueError, KeyError, IndexError, StopIteration, zlib.error) as error:
        raise JobError(f"{path.name} cannot be read back ({error}); write the pack anew") from None


def _objects(data: bytes) -> Iterator[tuple[int, _Object]]:
    position = 0
    while (found := _OBJECT.search(data, position)) is not None:
        end = data.index(b"endobj", found.end())
        start = data.find(b"stream", found.end(), end)
        if start < 0:
            yield int(found[1]), _Object(data[found.end() : end], b"")
            position = end
            continue
        head = data[found.end() : start]
        length = re.search(rb"/Length (\d+)", head)
        if length is None:
            raise ValueError("a stream has no length")
        begin = start + (8 if data[start + 6 : start + 8] == b"\r\n" else 7)
        position = begin + int(length[1])
        yield int(found[1]), _Object(head, _unpacked(head, data[begin:position]))


def _unpacked(head: bytes, data: bytes) -> bytes:
    filters = re.search(rb"/Filter \[([^\]]*)\]", head)
    for name in (filters[1] if filters else b"").split():
        if name == b"/ASCII85Decode":
            data = base64.a85decode(data.strip().removesuffix(b"~>"))
        elif name == b"/FlateDecode":
            data = zlib.decompress(data)
    return data


def _unicode(table: bytes) -> dict[int, str]:
    """Codes of a font to characters."""
    pairs = re.findall(rb"<([0-9A-Fa-f]{2})> <([0-9A-Fa-f]{4})>", table)
    return {int(code, 16): chr(int(character, 16)) for code, character in pairs}


def _texts(content: bytes, fonts: dict[bytes, dict[int, str]]) -> tuple[str, ...]:
    """Strings by their fonts; a text that changes from one subset to the other comes in one block of text."""
    found = []
    for block in re.findall(rb"\bBT\b(.*?)\bET\b", content, re.DOTALL):
        font: dict[int, str] = {}
        letters: list[str] = []
        for name, shown in _SHOWN.findall(block):
            if name:
                font = fonts[name]
            else:
                letters += [font[code] for code in _ESCAPE.sub(_unescaped, shown)]
        found.append("".join(letters))
    return tuple(text for text in found if text)


def _unescaped(match: re.Match[bytes]) -> bytes:
    code = match[1]
    return bytes([int(code, 8)]) if code.isdigit() else _NAMED.get(code, code)
