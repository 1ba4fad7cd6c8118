"""The cache of results: content-addressed, bounded, damage noticed, two runs at once."""

from __future__ import annotations

import os
import sys
import threading
from dataclasses import replace
from pathlib import Path

import pytest

from fabgen import cache as cache_module
from fabgen import sized
from fabgen.cache import Cache, default_folder, key_of
from fabgen.progress import Silent
from fabgen.sized import feed_from_text, feed_key, feed_to_text
from tests.samples import sample_feed, sample_job


def test_there_and_back(tmp_path: Path) -> None:
    cache = Cache(tmp_path / "new" / "cache")
    key = key_of("a", "b")
    assert cache.get(key) is None
    cache.put(key, "text with ø and\nlines")
    assert cache.get(key) == "text with ø and\nlines"
    cache.drop(key)
    assert cache.get(key) is None


def test_pieces_of_a_key_do_not_run_together() -> None:
    assert key_of("ab", "c") != key_of("a", "bc")


def test_a_damaged_entry_is_dropped(tmp_path: Path) -> None:
    cache = Cache(tmp_path)
    cache.put("k", "value" * 100)
    path = next(tmp_path.iterdir())
    data = bytearray(path.read_bytes())
    data[-1] ^= 1
    path.write_bytes(data)
    assert cache.get("k") is None
    assert not list(tmp_path.iterdir())


@pytest.mark.parametrize("data", [b"", b"\n", b"\xff\xfe\n\xff", b"0" * 64 + b"\nx"])
def test_an_entry_of_rubbish_is_no_entry(tmp_path: Path, data: bytes) -> None:
    (tmp_path / "k.entry").write_bytes(data)
    assert Cache(tmp_path).get("k") is None


def test_it_stays_within_its_size_and_keeps_what_was_used_last(tmp_path: Path) -> None:
    cache = Cache(tmp_path, max_bytes=5000)
    for number in range(10):
        cache.put(f"k{number}", "x" * 1000)
        os.utime(tmp_path / f"k{number}.entry", (number, number))
    cache.put("last", "x" * 1000)
    assert sum(path.stat().st_size for path in tmp_path.iterdir()) <= 5000
    assert cache.get("last") is not None
    assert cache.get("k9") is not None
    assert cache.get("k0") is None


def test_an_entry_larger_than_the_cache_is_not_kept(tmp_path: Path) -> None:
    cache = Cache(tmp_path, max_bytes=100)
    cache.put("k", "x" * 1000)
    assert cache.get("k") is None


def test_without_a_folder_nothing_is_kept() -> None:
    cache = Cache(None)
    cache.put("k", "x")
    assert cache.get("k") is None


def test_a_disk_that_refuses_is_no_error(tmp_path: Path) -> None:
    blocked = tmp_path / "file"
    blocked.write_text("in the way")
    cache = Cache(blocked / "cache")
    cache.put("k", "x")
    assert cache.get("k") is None


def test_many_writers_at_once_leave_whole_entries(tmp_path: Path) -> None:
    cache = Cache(tmp_path, max_bytes=20_000)
    seen: list[str] = []

    def work(letter: str) -> None:
        for _ in range(50):
            cache.put("same", letter * 3000)
            text = cache.get("same")
            if text is not None:
                seen.append(text)

    threads = [threading.Thread(target=work, args=(letter,)) for letter in "abcd"]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert seen
    assert all(len(set(text)) == 1 and len(text) == 3000 for text in seen)
    assert [path.name for path in tmp_path.iterdir()] == ["same.entry"]


def test_where_it_lies(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    for name in ("FABGEN_CACHE", "XDG_CACHE_HOME", "HOME", "LOCALAPPDATA"):
        monkeypatch.delenv(name, raising=False)
    assert default_folder() is None
    monkeypatch.setenv("HOME", str(tmp_path))
    assert default_folder() == tmp_path / ".cache" / "fabgen"
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path / "xdg"))
    assert default_folder() == tmp_path / "xdg" / "fabgen"
    monkeypatch.setenv("FABGEN_CACHE", str(tmp_path / "own"))
    assert default_folder() == tmp_path / "own"
    monkeypatch.setenv("FABGEN_CACHE", "")
    assert default_folder() is None


@pytest.mark.parametrize("kept", [True, False])
def test_compiled_code_of_a_read_only_installation_has_a_place(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, kept: bool
) -> None:
    writable = os.access

    def access(path: object, mode: int) -> bool:
        return path != Path(cache_module.__file__).parent and writable(str(path), mode)

    monkeypatch.setattr(os, "access", access)
    monkeypatch.delenv("NUMBA_CACHE_DIR", raising=False)
    cache_module.place_compiled_code(tmp_path / "cache" if kept else None)
    place = Path(os.environ.pop("NUMBA_CACHE_DIR"))
    assert place.is_dir()
    assert (place == tmp_path / "cache" / "compiled") == kept


def test_compiled_code_stays_beside_a_writable_installation(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("NUMBA_CACHE_DIR", raising=False)
    cache_module.place_compiled_code(None)
    assert ("NUMBA_CACHE_DIR" in os.environ) != os.access(Path(cache_module.__file__).parent, os.W_OK)
    os.environ.pop("NUMBA_CACHE_DIR", None)


@pytest.mark.parametrize("form", ["wire", "sheet"])
def test_a_feed_survives_to_the_last_bit(form: str) -> None:
    feed = sample_feed(form, choke=form == "wire")
    feed = replace(feed, predicted=replace(feed.predicted, return_loss_db=float("inf"), spillover=0.1 + 1e-17))
    assert feed_from_text(feed_to_text(feed), feed.job) == feed


def test_titles_and_paper_do_not_ask_for_a_new_computation() -> None:
    feed = sample_feed()
    target = feed.job.target.model_copy(update={"name": "another name", "revision": "B"})
    other = feed.job.model_copy(update={"target": target})
    assert feed_key(other) == feed_key(feed.job)
    stored = feed_from_text(feed_to_text(feed), other)
    assert stored is not None
    assert stored.job.target.name == "another name"


def test_numbers_do() -> None:
    assert feed_key(sample_job()) != feed_key(sample_job(frequency_mhz=1420.5))
    assert feed_key(sample_job()) != feed_key(sample_job(choke=True))
    assert feed_from_text(feed_to_text(sample_feed()), sample_job(frequency_mhz=1420.5)) is None


def test_the_second_run_takes_the_stored_feed(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    calls: list[object] = []
    monkeypatch.setitem(sys.modules, "fabgen.sizing.size_feed", _Sizing(calls))
    cache = Cache(tmp_path)
    job = sample_job()
    first = sized.sized_feed(job, Silent(), cache)
    assert sized.sized_feed(job, Silent(), cache) == first
    assert len(calls) == 1
    entry = next(tmp_path.glob("*.entry"))
    cache.put(entry.stem, '{"sound": "but no feed"}')
    assert sized.sized_feed(job, Silent(), cache) == first
    assert len(calls) == 2


class _Sizing:
    """Stands in for the sizing module: gives the sample feed and counts."""

    def __init__(self, calls: list[object]) -> None:
        self._calls = calls

    def size_feed(self, job: object, _progress: object) -> object:
        self._calls.append(job)
        return sample_feed()
