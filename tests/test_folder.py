"""The output folder: whole or not at all, and nothing of the user's is harmed."""

from __future__ import annotations

import errno
import json
import os
import shutil
import subprocess
import threading
from pathlib import Path

import pytest

from fabgen import folder as folder_module
from fabgen.errors import OutputError
from fabgen.folder import RECORD_NAME, as_output_error, files_in, new_folder, resolve_target, sha256_of


def fill(folder: Path, text: str) -> None:
    """A small pack of ours."""
    (folder / "cut").mkdir()
    (folder / "cut" / "floor.dxf").write_text(text, encoding="utf-8")
    (folder / "parts.csv").write_text(text, encoding="utf-8")
    files = {name: sha256_of(folder / name) for name in files_in(folder)}
    (folder / RECORD_NAME).write_text(json.dumps({"fabgen_version": "0", "files": files}), encoding="utf-8")


def make(target: Path, text: str) -> None:
    with new_folder(target) as temporary:
        fill(temporary, text)


def siblings(target: Path) -> list[str]:
    return sorted(path.name for path in target.parent.iterdir())


@pytest.mark.parametrize("name", ["pack", "a pack with spaces", "Päckchen für Ø 70", "x" * 200])
def test_new_folder(tmp_path: Path, name: str) -> None:
    make(tmp_path / name, "one")
    assert (tmp_path / name / "cut" / "floor.dxf").read_text() == "one"
    assert siblings(tmp_path / name) == [name]


def test_an_empty_folder_is_taken(tmp_path: Path) -> None:
    (tmp_path / "pack").mkdir()
    make(tmp_path / "pack", "one")
    assert files_in(tmp_path / "pack") == ["cut/floor.dxf", "parts.csv", RECORD_NAME]


@pytest.mark.parametrize("exchange", [True, False])
def test_an_older_pack_of_ours_is_replaced(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, exchange: bool) -> None:
    if not exchange:
        monkeypatch.setattr(folder_module, "_exchange", folder_module._swap_in_two_steps)
    make(tmp_path / "pack", "one")
    make(tmp_path / "pack", "two")
    assert (tmp_path / "pack" / "parts.csv").read_text() == "two"
    assert siblings(tmp_path / "pack") == ["pack"]


def test_the_older_pack_stands_until_the_new_one_is_whole(tmp_path: Path) -> None:
    make(tmp_path / "pack", "one")
    with new_folder(tmp_path / "pack") as temporary:
        fill(temporary, "two")
        assert (tmp_path / "pack" / "parts.csv").read_text() == "one"


@pytest.mark.parametrize("error", [KeyboardInterrupt, ValueError, OSError(errno.ENOSPC, "full"), MemoryError])
def test_a_failure_leaves_the_older_pack(tmp_path: Path, error: BaseException | type[BaseException]) -> None:
    make(tmp_path / "pack", "one")
    with pytest.raises((KeyboardInterrupt, ValueError, OutputError, MemoryError)), new_folder(tmp_path / "pack") as new:
        fill(new, "two")
        raise error
    assert (tmp_path / "pack" / "parts.csv").read_text() == "one"
    assert siblings(tmp_path / "pack") == ["pack"]


def refusal(target: Path) -> str:
    before = [(path, path.lstat().st_mtime_ns) for path in sorted(target.parent.rglob("*"))]
    with pytest.raises(OutputError) as caught, new_folder(target) as temporary:
        fill(temporary, "new")
    assert [(path, path.lstat().st_mtime_ns) for path in sorted(target.parent.rglob("*"))] == before
    return str(caught.value)


def test_a_folder_with_something_else_is_refused(tmp_path: Path) -> None:
    target = tmp_path / "holiday"
    target.mkdir()
    (target / "photo.jpg").write_bytes(b"x")
    assert "it is not empty and not a fabgen pack; name a new folder" in refusal(target)


def test_a_pack_with_a_file_of_the_user_is_refused(tmp_path: Path) -> None:
    make(tmp_path / "pack", "one")
    (tmp_path / "pack" / "my notes.txt").write_text("keep me", encoding="utf-8")
    assert "it holds my notes.txt, which is not part of the pack" in refusal(tmp_path / "pack")


def test_a_pack_that_the_user_changed_is_refused(tmp_path: Path) -> None:
    make(tmp_path / "pack", "one")
    (tmp_path / "pack" / "parts.csv").write_text("prices added", encoding="utf-8")
    assert "parts.csv in it was changed since the pack was written" in refusal(tmp_path / "pack")


@pytest.mark.parametrize("text", ["", "{", "[]", '{"files": 3, "fabgen_version": ""}', '{"files": {}}'])
def test_a_record_that_is_not_ours_does_not_make_it_a_pack(tmp_path: Path, text: str) -> None:
    target = tmp_path / "pack"
    target.mkdir()
    (target / RECORD_NAME).write_text(text, encoding="utf-8")
    assert "not a fabgen pack" in refusal(target)


def test_a_file_in_the_place(tmp_path: Path) -> None:
    (tmp_path / "pack").write_text("x", encoding="utf-8")
    assert "is a file; name a new folder" in refusal(tmp_path / "pack")


def test_no_parent(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="that should hold the pack does not exist; make it first"):
        resolve_target(tmp_path / "none" / "pack")


def test_the_present_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    for name in (".", "..", "/"):
        with pytest.raises(OutputError, match="the folder you are in or above it"):
            resolve_target(Path(name))


def test_a_link_to_a_folder_stays_a_link(tmp_path: Path) -> None:
    (tmp_path / "real").mkdir()
    (tmp_path / "link").symlink_to(tmp_path / "real")
    make(tmp_path / "link", "one")
    assert (tmp_path / "link").is_symlink()
    assert (tmp_path / "real" / "parts.csv").read_text() == "one"


def test_what_a_killed_run_left_is_swept(tmp_path: Path) -> None:
    ended = subprocess.Popen(["true"])
    ended.wait()
    left = tmp_path / f".fabgen-{folder_module._host()}-{ended.pid}-0123abcd"
    left.mkdir()
    (left / "half.dxf").write_text("x", encoding="utf-8")
    running = tmp_path / f".fabgen-{folder_module._host()}-{os.getpid()}-0123abcd"
    running.mkdir()
    other_machine = tmp_path / ".fabgen-elsewhere-1-0123abcd"
    other_machine.mkdir()
    make(tmp_path / "pack", "one")
    assert siblings(tmp_path / "pack") == sorted([running.name, other_machine.name, "pack"])


def test_many_at_once_leave_one_whole_pack(tmp_path: Path) -> None:
    faults: list[BaseException] = []

    def work(letter: str) -> None:
        for _ in range(8):
            try:
                make(tmp_path / "pack", letter * 10)
            except OutputError as error:
                faults.append(error)

    threads = [threading.Thread(target=work, args=(letter,)) for letter in "abcd"]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    texts = {(tmp_path / "pack" / name).read_text() for name in ("parts.csv", "cut/floor.dxf")}
    assert len(texts) == 1
    assert siblings(tmp_path / "pack") == ["pack"]
    assert not faults


def test_a_pack_exchanged_while_it_is_read_is_read_again(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Each of the first reads meets another run's exchange, so that what is read belongs to two packs."""
    make(tmp_path / "pack", "one")
    exchanges = iter(["two", "three", "four"])

    def exchange_then_hash(path: Path) -> str:
        text = next(exchanges, None)
        if text is not None:
            shutil.rmtree(tmp_path / "pack")
            (tmp_path / "pack").mkdir()
            fill(tmp_path / "pack", text)
        return sha256_of(path)

    monkeypatch.setattr(folder_module, "sha256_of", exchange_then_hash)
    assert folder_module.why_not_replaceable(tmp_path / "pack") is None
    assert next(exchanges, None) is None


def test_a_listed_file_that_leads_nowhere(tmp_path: Path) -> None:
    make(tmp_path / "pack", "one")
    (tmp_path / "pack" / "parts.csv").unlink()
    (tmp_path / "pack" / "parts.csv").symlink_to(tmp_path / "none")
    assert "choose another folder" in refusal(tmp_path / "pack")


@pytest.mark.parametrize(
    ("number", "words"),
    [
        (errno.ENOSPC, "disk is full"),
        (errno.EROFS, "read-only"),
        (errno.EACCES, "no permission"),
        (errno.EIO, "choose"),
    ],
)
def test_messages(number: int, words: str) -> None:
    error = as_output_error(OSError(number, os.strerror(number)), Path("pack"))
    assert words in str(error)
    assert error.exit_status == 5
