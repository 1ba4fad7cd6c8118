"""A cache of results on disk: content-addressed, bounded, safe for several runs at once, never needed.

An entry is one file named by the SHA-256 of what it was computed from; its first line is the SHA-256 of the rest, so
that a damaged entry is noticed and dropped. Whatever goes wrong with the disk, the cache is simply empty.

Depends on: nothing.
"""

from __future__ import annotations

import atexit
import contextlib
import hashlib
import os
import shutil
import tempfile
from dataclasses import dataclass
from pathlib import Path

MAX_BYTES = 64 * 1024 * 1024
_SUFFIX = ".entry"
_STALE_SECONDS = 3600


def key_of(*pieces: str | bytes) -> str:
    """The key of an entry: SHA-256 over all pieces, each preceded by its length."""
    digest = hashlib.sha256()
    for piece in pieces:
        data = piece.encode("utf-8") if isinstance(piece, str) else piece
        digest.update(len(data).to_bytes(8, "big"))
        digest.update(data)
    return digest.hexdigest()


def default_folder() -> Path | None:
    """Where entries lie: FABGEN_CACHE, else the user's cache folder, else none (no HOME, or FABGEN_CACHE empty)."""
    own = os.environ.get("FABGEN_CACHE")
    if own is not None:
        return Path(own) if own else None
    base = os.environ.get("XDG_CACHE_HOME")
    if base and Path(base).is_absolute():
        return Path(base) / "fabgen"
    home = os.environ.get("HOME") or os.environ.get("LOCALAPPDATA")
    return Path(home) / ".cache" / "fabgen" if home and Path(home).is_absolute() else None


def place_compiled_code(folder: Path | None) -> None:
    """Says where just-in-time compiled code is kept, when the installation itself cannot be written.

    ``folder`` is the cache's; without one a folder for this run alone is made and removed at the end. A place that
    the user named (NUMBA_CACHE_DIR) is kept. To be called before compiled modules are imported.
    """
    if os.access(Path(__file__).parent, os.W_OK) or "NUMBA_CACHE_DIR" in os.environ:
        return
    place = None if folder is None else folder / "compiled"
    try:
        if place is not None:
            place.mkdir(parents=True, exist_ok=True)
    except OSError:
        place = None
    if place is None or not os.access(place, os.W_OK):
        place = Path(tempfile.mkdtemp(prefix="fabgen-compiled-"))
        atexit.register(shutil.rmtree, place, ignore_errors=True)
    os.environ["NUMBA_CACHE_DIR"] = str(place)


@dataclass(frozen=True)
class Cache:
    """Entries in ``folder`` (None: no cache), together at most ``max_bytes``."""

    folder: Path | None
    max_bytes: int = MAX_BYTES

    def get(self, key: str) -> str | None:
        """The text stored under the key; None when there is none. A damaged entry is removed."""
        if self.folder is None:
            return None
        path = self.folder / f"{key}{_SUFFIX}"
        try:
            data = path.read_bytes()
        except OSError:
            return None
        head, _, body = data.partition(b"\n")
        if head.decode("ascii", "replace") != hashlib.sha256(body).hexdigest():
            self.drop(key)
            return None
        with contextlib.suppress(OSError):
            os.utime(path)
        return body.decode("utf-8")

    def put(self, key: str, text: str) -> None:
        """Stores the text in one step; a disk that refuses leaves the cache as it was."""
        body = text.encode("utf-8")
        if self.folder is None or len(body) > self.max_bytes:
            return
        data = hashlib.sha256(body).hexdigest().encode("ascii") + b"\n" + body
        with contextlib.suppress(OSError):
            self.folder.mkdir(parents=True, exist_ok=True)
            self._write(self.folder / f"{key}{_SUFFIX}", data)
            self._trim()

    def drop(self, key: str) -> None:
        """Forgets an entry."""
        if self.folder is not None:
            with contextlib.suppress(OSError):
                (self.folder / f"{key}{_SUFFIX}").unlink()

    def _write(self, path: Path, data: bytes) -> None:
        handle, name = tempfile.mkstemp(dir=path.parent, suffix=".part")
        try:
            with os.fdopen(handle, "wb") as stream:
                stream.write(data)
            Path(name).replace(path)
        except BaseException:
            with contextlib.suppress(OSError):
                Path(name).unlink()
            raise

    def _trim(self) -> None:
        """Removes the entries unused for longest until the rest fits; also pieces that killed runs left."""
        if self.folder is None:
            return
        found: list[tuple[float, int, Path]] = []
        for path in self.folder.iterdir():
            with contextlib.suppress(OSError):
                status = path.stat()
                if path.suffix in {_SUFFIX, ".part"}:
                    found.append((status.st_mtime, status.st_size, path))
        newest = max((mtime for mtime, _, _ in found), default=0.0)
        total = 0
        for mtime, size, path in sorted(found, reverse=True):
            total += size if path.suffix == _SUFFIX else 0
            left_over = path.suffix == ".part" and newest - mtime > _STALE_SECONDS
            if left_over or (path.suffix == _SUFFIX and total > self.max_bytes):
                with contextlib.suppress(OSError):
                    path.unlink()
