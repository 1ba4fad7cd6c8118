"""Whatever stands in a job file, the answer is a job or one clear message, at once."""

from __future__ import annotations

import random
import time

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fabgen.errors import JobError
from fabgen.job import Job
from fabgen.job_reader import job_from_data, parse_job
from fabgen.start import templates

SNIPPETS = [
    "=", "[", "]", "[[", "{", "}", '"', "'", "\n", "#", ".", ",", "-", "nan", "inf", "-inf", "1e308", "-0.0", "0",
    "9" * 400, "true", "false", "[can.choke]", "[fixed]\n", "[loop]\n", "loop_height_mm = 1\n", "tap_height_mm = 1e9\n",
    'wire_mm = "4/0 AWG"\n', '"1e99 mm"', '"12 ga"', '"1/0 in"', '"٣ mm"', "\x00", "\u202e", "\ud7ff", "é",
    "1979-05-27",
    "0x1F", "[1, [2, [3]]]", "{a = {b = 1}}", "choke = {}", "choke = []\n", "bed_mm = 3\n", "neighbours = [1]\n",
    "neighbours = {}\n", "overrides = 3\n", "[overrides]\n'' = 1\n", "as_written = [1]\n", "[target.x.y.z]\n",
    "name = '" + "x" * 100 + "'\n", "flats = 6.0\n", "flats = true\n", "metal = ['cu-etp']\n", "metal = {}\n",
]  # fmt: skip


def mutated(text: str, chance: random.Random) -> str:
    """A few random edits: cut, double, swap, insert, change a number."""
    for _ in range(chance.randint(1, 4)):
        at = chance.randrange(len(text) + 1)
        kind = chance.randrange(6)
        if kind == 0:
            text = text[:at] + text[at + chance.randrange(1, 30) :]
        elif kind == 1:
            text = text[:at] + chance.choice(SNIPPETS) + text[at:]
        elif kind == 2:
            lines = text.splitlines(keepends=True)
            chance.shuffle(lines)
            text = "".join(lines) if chance.random() < 0.3 else text
        elif kind == 3:
            text = text[:at] + chr(chance.randrange(1, 0xD800)) + text[at:]
        elif kind == 4:
            words = text.split(" = ")
            place = chance.randrange(len(words))
            words[place] = chance.choice(SNIPPETS) + words[place]
            text = " = ".join(words)
        else:
            text = text + "\n" + text[at:]
    return text


def answer(text: str) -> None:
    # processor time: a busy machine is no fault of the text
    began = time.process_time()
    try:
        assert isinstance(parse_job(text, "job"), Job)
    except JobError as error:
        message = str(error)
        assert message.startswith("job")
        assert len(message) < 6000
        assert "Traceback" not in message
    assert time.process_time() - began < 1.0


@pytest.mark.slow
@pytest.mark.thorough
def test_twenty_thousand_mutated_jobs() -> None:
    chance = random.Random(1420)
    sources = [item.text for item in templates()]
    for _ in range(20_000):
        answer(mutated(chance.choice(sources), chance))


def test_a_thousand_mutated_jobs() -> None:
    chance = random.Random(406)
    sources = [item.text for item in templates()]
    for _ in range(1000):
        answer(mutated(chance.choice(sources), chance))


VALUES = st.recursive(
    st.none()
    | st.booleans()
    | st.integers()
    | st.floats()
    | st.text(max_size=12)
    | st.sampled_from(["12 AWG", "1 in"]),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3),
    max_leaves=6,
)
KEYS = st.sampled_from(
    ["frequency_mhz", "diameter_m", "focal_ratio", "form", "wire_mm", "sheet_mm", "choke", "bore_mm", "make", "metal"]
) | st.text(max_size=8)
TABLES = st.dictionaries(
    st.sampled_from(["target", "dish", "loop", "can", "limits", "fixed", "wishes", "overrides", "rates", "as_written"]),
    st.dictionaries(KEYS, VALUES, max_size=4) | VALUES,
    max_size=6,
)


@settings(max_examples=400, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(TABLES)
def test_any_tables(raw: dict[str, object]) -> None:
    try:
        job_from_data(raw)
    except JobError as error:
        assert str(error)


@settings(max_examples=300, deadline=None)
@given(st.text(max_size=300))
def test_any_text(text: str) -> None:
    answer(text)
