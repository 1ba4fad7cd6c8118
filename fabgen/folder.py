"""A folder that appears whole or not at all, and never harms what lay there before.

The new content is made in a temporary sibling and renamed into place. An older pack of our own is exchanged in one
step (where the system can) and removed only afterwards; anything else in the place is refused.

Depends on: errors.
"""

from __future__ import annotations

import contextlib
import ctypes
import errno
import hashlib
import json
import os
import secrets
import shutil
import socket
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

from fabgen.errors import FabgenError, OutputError

RECORD_NAME = "record.json"
CHECKSUM_KEY = "record_sha256"
"""Where a record carries its own checksum."""
_PREFIX = ".fabgen-"
_AT_FDCWD = -100
_RENAME_EXCHANGE = 2
_TRIES = 100
_READ_CHUNK = 1 << 20


def record_checksum(record: Mapping[str, Any]) -> str:
    """SHA-256 over all of a record but its own checksum, in one form whatever order and spaces a file has: keys
    sorted, no spaces, UTF-8."""
    rest = {key: value for key, value in record.items() if key != CHECKSUM_KEY}
    text = json.dumps(rest, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
    return hashlib.sha256(text.encode("utf-8")).hexdigest()


def sha256_of(path: Path) -> str:
    """SHA-256 of a file's bytes, hexadecimal."""
    digest = hashlib.sha256()
    with path.open("rb") as stream:
        while chunk := stream.read(_READ_CHUNK):
            digest.update(chunk)
    return digest.hexdigest()


def files_in(folder: Path) -> list[str]:
    """Every file below the folder as a sorted relative path with slashes; links count as files."""
    names: list[str] = []
    for base, folders, files in os.walk(folder):
        links = [name for name in folders if (Path(base) / name).is_symlink()]
        names += [(Path(base) / name).relative_to(folder).as_posix() for name in (*files, *links)]
    return sorted(names)


def why_not_replaceable(folder: Path) -> str | None:
    """None when the folder is gone, empty or an untouched pack of ours; else the reason, in words.

    Another run may exchange the folder while it is read; what was read then belongs to neither and is read again.
    """
    for _ in range(_TRIES):
        try:
            # Held open, so that its number cannot pass to the folder that takes its place.
            handle = os.open(folder, os.O_RDONLY)
        except FileNotFoundError:
            return None
        try:
            reason = _why_not_ours(folder)
            if _still_there(handle, folder):
                return reason
        except FileNotFoundError:
            if _still_there(handle, folder):
                raise
        finally:
            os.close(handle)
    return "another run keeps writing it"


def _still_there(handle: int, folder: Path) -> bool:
    """Whether the open folder still stands in its place."""
    try:
        return os.path.samestat(os.fstat(handle), folder.stat())
    except FileNotFoundError:
        return False


def _why_not_ours(folder: Path) -> str | None:
    """What makes the folder something else than an untouched pack; None for nothing."""
    present = files_in(folder)
    if not any(folder.iterdir()):
        return None
    try:
        record = json.loads((folder / RECORD_NAME).read_text(encoding="utf-8"))
        listed: dict[str, str] = dict(record["files"])
        _ = record["fabgen_version"]
    except (OSError, ValueError, KeyError, TypeError):
        return "it is not empty and not a fabgen pack"
    foreign = next((name for name in present if name not in listed and name != RECORD_NAME), None)
    if foreign is not None:
        return f"it holds {foreign}, which is not part of the pack"
    for name in present:
        if name != RECORD_NAME and sha256_of(folder / name) != listed[name]:
            return f"{name} in it was changed since the pack was written"
    return None


def resolve_target(target: Path) -> Path:
    """The real path of the folder to write; OutputError when it cannot become or be replaced by a pack."""
    real = Path(os.path.realpath(target))
    here = Path.cwd()
    if real == here or real in here.parents:
        raise OutputError(f"the output folder {target} is the folder you are in or above it; name a new folder")
    if not real.parent.is_dir():
        raise OutputError(f"the folder {real.parent} that should hold the pack does not exist; make it first")
    if real.exists() and not real.is_dir():
        raise OutputError(f"the output folder {target} is a file; name a new folder")
    if real.is_dir():
        try:
            reason = why_not_replaceable(real)
        except OSError as error:
            raise as_output_error(error, real) from None
        if reason is not None:
            raise OutputError(
                f"the output folder {target} is not touched: {reason}; name a new folder, or empty this one yourself"
            )
    return real


def as_output_error(error: OSError, place: Path) -> OutputError:
    """An operating system error as a message for people."""
    texts = {
        errno.ENOSPC: "the disk is full; free some space (a pack needs about 10 MB) or choose another disk",
        errno.EDQUOT: "your disk quota is used up; free some space or choose another disk",
        errno.EFBIG: "a file would be larger than allowed here; raise the limit (ulimit -f) or choose another place",
        errno.EACCES: "no permission to write there; choose a folder of your own",
        errno.EPERM: "writing there is not permitted; choose a folder of your own",
        errno.EROFS: "that disk is read-only; choose another",
        errno.ENAMETOOLONG: "that name is too long; choose a shorter one",
        errno.EMFILE: "too many files are open; raise the limit (ulimit -n)",
    }
    reason = texts.get(error.errno or 0, f"{error.strerror or error}; choose another folder")
    return OutputError(f"cannot write into {place}: {reason}")


@contextlib.contextmanager
def new_folder(target: Path) -> Iterator[Path]:
    """A temporary sibling of ``target``; on a clean exit it takes the target's place, else it is removed.

    Raises OutputError for anything the disk refuses; the older pack then still stands.
    """
    real = resolve_target(target)
    _sweep(real.parent)
    temporary = real.parent / f"{_PREFIX}{_host()}-{os.getpid()}-{secrets.token_hex(4)}"
    try:
        temporary.mkdir()
    except OSError as error:
        raise as_output_error(error, real.parent) from None
    try:
        yield temporary
        _put_in_place(temporary, real)
    except OSError as error:
        if isinstance(error, FabgenError):
            raise
        raise as_output_error(error, real) from error
    finally:
        shutil.rmtree(temporary, ignore_errors=True)


def _put_in_place(temporary: Path, real: Path) -> None:
    """Renames; another run may write the same place meanwhile, so look again and retry."""
    for _ in range(_TRIES):
        try:
            temporary.rename(real)
        except OSError as error:
            if error.errno not in {errno.ENOTEMPTY, errno.EEXIST}:
                raise
        else:
            return
        resolve_target(real)
        if _exchange(temporary, real):
            return
    raise OutputError(f"another run keeps writing {real}; wait for it to end, or name another folder")


def _exchange(temporary: Path, real: Path) -> bool:
    """Swaps the two folders in one step where the system can, else in two with the old one kept beside."""
    libc = ctypes.CDLL(None, use_errno=True)
    if hasattr(libc, "renameat2"):
        done = libc.renameat2(
            _AT_FDCWD, os.fsencode(temporary), _AT_FDCWD, os.fsencode(real), ctypes.c_uint(_RENAME_EXCHANGE)
        )
        if done == 0:
            return True
        if ctypes.get_errno() == errno.ENOENT:
            return False
    return _swap_in_two_steps(temporary, real)


def _swap_in_two_steps(temporary: Path, real: Path) -> bool:
    """The older pack waits as NAME.previous; it is put back when the second rename fails."""
    aside = real.with_name(real.name + ".previous")
    if aside.exists():
        raise OutputError(f"{aside} is left from an interrupted run; look at it, then remove or rename it")
    try:
        real.rename(aside)
    except FileNotFoundError:
        return False
    try:
        temporary.rename(real)
    except BaseException:
        aside.rename(real)
        raise
    shutil.rmtree(aside, ignore_errors=True)
    return True


def _host() -> str:
    return "".join(c if c.isascii() and c.isalnum() else "_" for c in socket.gethostname())[:20] or "host"


def _sweep(parent: Path) -> None:
    """Removes temporary folders of runs on this machine that were killed."""
    start = f"{_PREFIX}{_host()}-"
    with contextlib.suppress(OSError):
        for path in parent.iterdir():
            number = path.name.removeprefix(start).partition("-")[0]
            if path.name.startswith(start) and number.isdigit() and not _alive(int(number)):
                shutil.rmtree(path, ignore_errors=True)


def _alive(process: int) -> bool:
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    except (OSError, OverflowError):
        return True
    return True
