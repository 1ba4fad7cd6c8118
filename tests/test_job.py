"""The job file: every fault has one message that says what was given, what is allowed and what to do."""

from __future__ import annotations

from pathlib import Path

import pytest

from fabgen.errors import JobError
from fabgen.job import Job
from fabgen.job_reader import MAX_BYTES, parse_job, read_job
from fabgen.start import templates

GOOD = """
[target]
frequency_mhz = 1420.406
[dish]
diameter_m = 2.4
focal_ratio = 0.4
[loop]
form = "wire"
wire_mm = 4.0
"""
SHEET = GOOD.replace('"wire"', '"sheet"').replace("wire_mm = 4.0", "sheet_mm = 1.5")


def message_of(text: str) -> str:
    with pytest.raises(JobError) as caught:
        parse_job(text, "job.toml")
    return str(caught.value)


def test_only_frequency_dish_and_loop_stock_are_needed() -> None:
    job = parse_job(GOOD)
    assert isinstance(job, Job)
    assert job.limits.kerf_mm == 0.0
    assert job.can.make == "rolled"
    assert parse_job(SHEET).loop.sheet_mm == 1.5


FAULTS = {
    "not TOML": ("[target]\nfrequency_mhz = 1,5\n", ["job.toml is not valid TOML", "line 2"]),
    "empty": ("", ["target is missing", "dish is missing", "loop is missing"]),
    "unknown key": (
        GOOD.replace("wire_mm", "wire_diameter"),
        ["unknown key 'wire_diameter'", "did you mean 'wire_mm'"],
    ),
    "key of another table": (GOOD + "can_bore_mm = 200\n", ["unknown key 'can_bore_mm'", "belongs in [fixed]"]),
    "unknown table": (GOOD + "[cann]\nwall_mm = 1\n", ["unknown key 'cann'", "did you mean 'can'"]),
    "frequency in Hz": (
        GOOD.replace("1420.406", "1420406000"),
        ["1420406000", "at least 300 MHz and at most 12000 MHz", "looks like hertz", "frequency_mhz = 1420.406"],
    ),
    "frequency in kHz": (GOOD.replace("1420.406", "1420406"), ["looks like kilohertz", "frequency_mhz = 1420.406"]),
    "frequency in GHz": (GOOD.replace("1420.406", "1.42"), ["looks like gigahertz", "frequency_mhz = 1420"]),
    "frequency as text": (GOOD.replace("1420.406", '"hydrogen"'), ["target.frequency_mhz", "'hydrogen'", "GHz"]),
    "negative thickness": (SHEET.replace("1.5", "-1.5"), ["loop.sheet_mm = -1.5", "more than 0 mm"]),
    "wire over lambda/10": (
        GOOD.replace("1420.406", "10000"),
        ["loop.wire_mm = 4", "tenth of the wavelength is 3.00 mm", "use wire of 3.00 mm or less"],
    ),
    "f/D of 4": (
        GOOD.replace("0.4\n", "4\n"),
        ["dish.focal_ratio = 4", "at least 0.25 and at most 1.2", "Focal length"],
    ),
    "unknown metal": (GOOD + 'metal = "cu-ept"\n', ["loop.metal = 'cu-ept'", "nearest: cu-etp", "fabgen stock metal"]),
    "unknown temper": (GOOD + 'temper = "R222"\n', ["loop.temper", "R222", "R220"]),
    "unknown connector": (GOOD + '[cable]\nconnector = "sma4"\n', ["cable.connector", "nearest: sma-4"]),
    "unknown limit": (GOOD + "[overrides]\nflange_min = 3.0\n", ["overrides.flange_min", "fabgen stock limit"]),
    "loop outside can": (
        GOOD + "[fixed]\ncan_bore_mm = 140\nloop_diameter_mm = 160\n",
        ["fixed.loop_diameter_mm = 160 and fixed.can_bore_mm = 140 contradict each other", "the loop lies inside"],
    ),
    "no loop of a wavelength": (
        GOOD + "[fixed]\nloop_diameter_mm = 160\n",
        ["fixed.loop_diameter_mm = 160", "is no one-wavelength-class loop", "allowed 31.7 to 126.6"],
    ),
    "loop over rim": (
        GOOD + "[fixed]\nloop_height_mm = 80\ncan_depth_mm = 60\n",
        ["fixed.loop_height_mm = 80 and fixed.can_depth_mm = 60 contradict each other", "change one, or leave one out"],
    ),
    "tap over loop": (GOOD + "[fixed]\ntap_height_mm = 40\nloop_height_mm = 30\n", ["contradict", "below the loop"]),
    "bars touch": (GOOD + "[fixed]\nleg_pitch_mm = 4\n", ["bars of 4 mm wire touch", "more than 4"]),
    "can below cut-off": (GOOD + "[fixed]\ncan_bore_mm = 100\n", ["can_bore_mm = 100", "more than 123.7"]),
    "tube without bore": (GOOD + '[can]\nmake = "tube"\n', ["its bore is not given", "can_bore_mm under [fixed]"]),
    "choke inside can": (
        GOOD + "[fixed]\ncan_bore_mm = 220\n[can.choke]\nbore_mm = 210\n",
        ["can.choke.bore_mm = 210 does not clear the can", "more than 220"],
    ),
    "both stocks": (GOOD + "sheet_mm = 1.0\n", ["loop.form is 'wire' but loop.sheet_mm is given", "take it out"]),
    "no stock": (GOOD.replace("wire_mm = 4.0", ""), ["give loop.wire_mm"]),
    "wrong word": (GOOD + '[can]\nmake = "roled"\n', ["can.make = 'roled'", "'printed'", "nearest: rolled"]),
    "wrong choice": (GOOD + "[can]\nflats = 7\n", ["can.flats = 7", "6, 8 or 12"]),
    "true for a number": (GOOD.replace("4.0", "true"), ["loop.wire_mm = true", "a number"]),
    "not finite": (GOOD.replace("4.0", "nan"), ["loop.wire_mm = nan", "finite"]),
    "text for a flag": (GOOD + '[can]\ndrain_holes = "yes"\n', ["can.drain_holes = 'yes'", "true or false"]),
    "choke as number": (GOOD + "[can]\nchoke = 3\n", ["can.choke = 3", "true or false"]),
    "key in choke": (
        GOOD + "[can.choke]\nbor_mm = 3\n",
        ["'bor_mm' in the table [can.choke]", "did you mean 'bore_mm'"],
    ),
    "two of three": (GOOD + "[limits]\nbed_mm = [1, 2]\n", ["limits.bed_mm.3 is missing"]),
    "revision": (
        GOOD.replace("[target]", '[target]\nrevision = "draft"'),
        ["target.revision = 'draft'", "like A or B2"],
    ),
    "bare gauge of wire": (GOOD.replace("4.0", '"12 ga"'), ["which gauge", "12 AWG", "12 SWG"]),
    "as_written by hand": (GOOD.replace("[target]", "as_written = []\n[target]"), ["unknown key 'as_written'"]),
    "deep": ("a = " + "[" * 5000, ["TOML"]),
    "long number": (GOOD.replace("1420.406", "9" * 5000), ["TOML"]),
}


@pytest.mark.parametrize("name", FAULTS)
def test_each_fault_is_named(name: str) -> None:
    text, words = FAULTS[name]
    message = message_of(text)
    for word in words:
        assert word in message
    assert message.startswith("job.toml")
    assert "pydantic" not in message
    assert all(len(line) < 400 for line in message.splitlines())


def test_several_faults_are_listed_together() -> None:
    message = message_of(GOOD.replace("4.0", "-4.0").replace("0.4\n", "4\n"))
    assert message.startswith("job.toml: 2 faults\n  - ")


def test_values_with_their_unit_are_kept_both_ways() -> None:
    text = GOOD.replace("1420.406", '"1.420406 GHz"').replace("2.4\n", '"10 ft"\n').replace("4.0", '"6 AWG"')
    job = parse_job(text)
    assert job.target.frequency_mhz == 1420.406
    assert job.dish.diameter_m == 3.048
    # ASTM B258: 6 AWG is 4.115 mm (4 digits; from memory)
    assert job.loop.wire_mm == pytest.approx(4.115, abs=5e-4)
    assert [(w.key, w.text) for w in job.as_written] == [
        ("target.frequency_mhz", "1.420406 GHz"),
        ("dish.diameter_m", "10 ft"),
        ("loop.wire_mm", "6 AWG"),
    ]


def test_gauge_of_sheet_follows_the_metal() -> None:
    text = SHEET.replace("1.5", '"16 gauge"') + 'metal = "cuzn37"\n[can]\nmetal = "dc01-zinc"\nwall_mm = "20 ga"\n'
    job = parse_job(text)
    # brass: 16 B&S = 0.0508 in; galvanised 20 ga = 0.0396 in (handbook tables, from memory)
    assert job.loop.sheet_mm == pytest.approx(0.0508 * 25.4, abs=0.002)
    assert job.can.wall_mm == pytest.approx(0.0396 * 25.4, abs=0.002)


def test_units_inside_lists_and_tables() -> None:
    job = parse_job(
        GOOD + '[limits]\nbed_mm = ["10 in", 200, 200]\n[wishes]\nneighbours = [{frequency_mhz = "0.9 GHz"}]\n'
    )
    assert job.limits.bed_mm == (254.0, 200.0, 200.0)
    assert job.wishes.neighbours[0].frequency_mhz == 900.0


def test_choke_as_flag_and_as_table() -> None:
    assert parse_job(GOOD + "[can]\nchoke = true\n").can.choke is True
    choke = parse_job(GOOD + "[can.choke]\nbore_mm = 330\n").can.choke
    assert not isinstance(choke, bool)
    assert choke.bore_mm == 330


def test_no_file(tmp_path: Path) -> None:
    with pytest.raises(JobError, match=r"there is no job file .*write one with: fabgen start"):
        read_job(tmp_path / "none.toml")


def test_a_folder(tmp_path: Path) -> None:
    with pytest.raises(JobError, match="is a folder"):
        read_job(tmp_path)


def test_not_text(tmp_path: Path) -> None:
    path = tmp_path / "job.toml"
    path.write_bytes(b"\xff\xfe\x00")
    with pytest.raises(JobError, match="not UTF-8 text"):
        read_job(path)


def test_much_too_long(tmp_path: Path) -> None:
    path = tmp_path / "job.toml"
    path.write_bytes(b"#" * (MAX_BYTES + 1))
    with pytest.raises(JobError, match="larger than 256 KiB"):
        read_job(path)


def test_name_that_the_system_cannot_open() -> None:
    with pytest.raises(JobError, match="cannot be read"):
        read_job(Path("job\0.toml"))


def test_byte_order_mark_is_accepted(tmp_path: Path) -> None:
    path = tmp_path / "job.toml"
    path.write_bytes(b"\xef\xbb\xbf" + GOOD.encode())
    assert read_job(path).loop.wire_mm == 4.0


@pytest.mark.parametrize("item", templates(), ids=lambda item: item.name)
def test_each_template_is_a_valid_job(item: object) -> None:
    text = item.text  # type: ignore[attr-defined]
    assert isinstance(parse_job(text), Job)
    assert text.isascii()


def test_templates_cover_what_is_promised() -> None:
    jobs = {item.name: parse_job(item.text) for item in templates()}
    assert len(jobs) == 8
    assert {job.can.make for job in jobs.values()} == {"rolled", "folded", "printed", "tube", "turned"}
    assert {job.loop.form for job in jobs.values()} == {"wire", "sheet"}
    frequencies = [job.target.frequency_mhz for job in jobs.values()]
    assert min(frequencies) == 408.0
    assert 5700 < max(frequencies) <= 5800
    assert any(job.can.choke for job in jobs.values())
    hydrogen = [job for job in jobs.values() if job.target.frequency_mhz == 1420.406]
    assert {(job.loop.wire_mm, job.loop.sheet_mm) for job in hydrogen} == {(4.0, None), (None, 1.5)}
    # rest frequencies of the hydroxyl main lines, MHz (line lists; from memory)
    assert any(1665.402 < f < 1667.359 for f in frequencies)
