"""The guides: every command in them runs, every link leads somewhere, kept packs and pictures are current."""

from __future__ import annotations

import os
import re
import shlex
import shutil
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from fabgen.cli import EXIT_STATUSES, build_parser, main
from fabgen.completion import commands_of as subparsers
from fabgen.completion import options_of
from fabgen.folder import RECORD_NAME, files_in, sha256_of
from fabgen.job_page import MEANINGS, job_page
from fabgen.job_reader import parse_job
from fabgen.writers.record import record_data
from tests.examples import EXAMPLES, PICTURES, differences, render
from tests.samples import sample_feed

ROOT = Path(__file__).parent.parent
PAGES = sorted([*ROOT.glob("*.md"), *(ROOT / "docs").glob("*.md")])
# Run by .ci/run itself, from nothing.
TOOLS = {"pytest", "ruff", "mypy"}


def commands_of(page: Path) -> list[list[str]]:
    blocks = re.findall(r"^```sh\n(.*?)^```", page.read_text(encoding="utf-8"), re.MULTILINE | re.DOTALL)
    lines = [line for block in blocks for line in block.splitlines()]
    return [words for words in (shlex.split(line, comments=True) for line in lines) if words]


@pytest.mark.slow
@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.name)
def test_every_command_runs(
    page: Path, tmp_path: Path, real_environment: dict[str, str], real_pack: Callable[[str], Path]
) -> None:
    for name in ("hydrogen-wire", "hydrogen-brass"):
        if name in page.read_text(encoding="utf-8"):
            real_pack(name)
    shutil.copytree(ROOT / "templates", tmp_path / "templates")
    for words in commands_of(page):
        assert (ROOT / words[1] if words[0] == "sh" else ROOT / words[0]).exists(), words
        inner = words[2:] if words[0] == "sh" else []
        if not inner or inner[0] in TOOLS or inner[:2] == ["python", "-m"]:
            continue
        assert inner[0] == "fabgen"
        result = subprocess.run(
            [sys.executable, "-m", *inner],
            cwd=tmp_path,
            env=real_environment,
            capture_output=True,
            text=True,
            check=False,
        )
        assert result.returncode == 0, f"{words}: {result.stderr}"


def commands_in_words() -> list[tuple[str, str]]:
    """Commands of fabgen within sentences, tables and the comments of templates, each with where it stands."""
    found = [(page.name, text) for page in PAGES for text in re.findall(r"`(fabgen [^`]+)`", page.read_text("utf-8"))]
    for path in sorted((ROOT / "templates").glob("*.toml")):
        found += [(path.name, text) for text in re.findall(r"# (fabgen stock \w+)", path.read_text("utf-8"))]
    return sorted(set(found))


@pytest.mark.parametrize(("where", "text"), commands_in_words(), ids=lambda item: item)
def test_every_command_in_a_sentence_is_one(
    where: str, text: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    own = tmp_path / "own.toml"
    own.write_text("", encoding="utf-8")
    places = {"JOB": str(ROOT / "templates" / "hydrogen-wire.toml"), "DIR": "pack", "FILE": str(own), "...": "stock"}
    words = [places.get(word, word) for word in shlex.split(text)[1:]]
    if words[0] in {"size", "check", "pack"}:
        # these run in the commands of their own lines; here they must be understood
        assert build_parser().parse_args(words).command == words[0]
    else:
        assert main(words) == 0, where
        assert capsys.readouterr().out


def test_every_option_named_is_one() -> None:
    parser = build_parser()
    known = {option for _, sub in [("", parser), *subparsers(parser)] for option in options_of(sub)}
    # the developers' page has options of other programs
    for page in (page for page in PAGES if page.name != "DEVELOPERS.md"):
        text = re.sub(r"```.*?```", "", page.read_text(encoding="utf-8"), flags=re.DOTALL)
        for option in re.findall(r"`(--[a-z-]+)", text):
            assert option in known, f"{page.name}: {option}"


@pytest.mark.slow
def test_every_module_that_the_pages_run_can_be_run() -> None:
    """The long ones are not run here: that they load and have a main is what can fall behind."""
    names = {
        name for page in PAGES for name in re.findall(r"python -m ((?:tests|fabgen)[\w.]*)", page.read_text("utf-8"))
    }
    assert {"tests.regenerate", "tests.mutation", "tests.bench.fields"} <= names
    for name in names:
        path = ROOT / (name.replace(".", "/") + ".py")
        assert '__name__ == "__main__"' in path.read_text(encoding="utf-8"), name
        subprocess.run(
            [sys.executable, "-c", f"import {name}"], check=True, cwd=ROOT, env={**os.environ, "PYTHONPATH": str(ROOT)}
        )


@pytest.mark.slow
def test_mutants_are_noticed_or_listed() -> None:
    words = ["theory", "--modules", "lines", "waveguide", "--tests", "tests/theory/test_lines.py", "--sample", "6"]
    result = subprocess.run(
        [sys.executable, "-m", "tests.mutation", *words],
        capture_output=True, text=True, check=True, cwd=ROOT, env={**os.environ, "PYTHONPATH": str(ROOT)},
    )  # fmt: skip
    assert re.search(r"theory: [1-5] of 6 noticed", result.stdout), result.stdout
    assert re.search(r"fabgen/theory/waveguide.py:\d+: .*survived", result.stdout)


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.name)
def test_every_link_leads_somewhere(page: Path) -> None:
    text = page.read_text(encoding="utf-8")
    for target in re.findall(r"\]\(([^)#\s]+)\)", text):
        assert (page.parent / target).exists(), target


def test_readme_opens_with_the_job_and_has_both_commands() -> None:
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    assert text.index("You build a receiver") < text.index("## Two commands") < text.index("![")
    assert "@" not in re.sub(r"`[^`]*`", "", text)


def test_readme_names_every_exit_status() -> None:
    text = " ".join((ROOT / "README.md").read_text(encoding="utf-8").split())
    for number, meaning in re.findall(r"(\d+)  (\S.*?)(?:  |$)", EXIT_STATUSES, re.MULTILINE):
        if number != "143":
            assert f"{number} {meaning.strip()}" in text


def test_the_page_of_keys_is_current_and_complete() -> None:
    assert (ROOT / "docs" / "job-file.md").read_text(encoding="utf-8") == job_page()
    assert all(f"`{name.split('.')[-1]}`" in job_page() for name in MEANINGS)


def test_the_page_of_the_record_names_every_key() -> None:
    text = (ROOT / "docs" / "record.md").read_text(encoding="utf-8")
    record = record_data(sample_feed(choke=True))
    for name in (*record, *record["sizes"], *record["sizes"]["choke"], *record["predicted"]):
        assert f"`{name}`" in text, name


def test_toml_in_the_guides_is_valid() -> None:
    for page in PAGES:
        for block in re.findall(r"^```toml\n(.*?)^```", page.read_text(encoding="utf-8"), re.MULTILINE | re.DOTALL):
            parse_job(block, page.name)


@pytest.mark.slow
@pytest.mark.parametrize("name", EXAMPLES)
def test_kept_packs_are_current(name: str, real_pack: Callable[[str], Path]) -> None:
    kept, new = ROOT / "out_examples" / name, real_pack(name)
    assert files_in(kept) == files_in(new)
    stale = [text for file in files_in(kept) for text in differences(kept / file, new / file)]
    assert not stale, "run: sh setup.sh python -m tests.regenerate"


@pytest.mark.parametrize("name", EXAMPLES)
def test_kept_packs_are_whole(name: str) -> None:
    import json

    kept = ROOT / "out_examples" / name
    listed = json.loads((kept / RECORD_NAME).read_text(encoding="utf-8"))["files"]
    assert {file: sha256_of(kept / file) for file in files_in(kept) if file != RECORD_NAME} == listed
    assert sum((kept / file).stat().st_size for file in files_in(kept)) < 6_000_000


@pytest.mark.slow
@pytest.mark.parametrize("picture", PICTURES)
def test_pictures_are_current(picture: str, real_pack: Callable[[str], Path], tmp_path: Path) -> None:
    if shutil.which("pdftoppm") is None:
        pytest.skip("pdftoppm (poppler-utils) is not installed")
    from PIL import Image, ImageChops, ImageStat

    name, page = PICTURES[picture]
    render(real_pack(name) / "sheets.pdf", page, tmp_path / "new.png")
    with Image.open(ROOT / picture) as kept, Image.open(tmp_path / "new.png") as new:
        assert kept.size == new.size
        # Versions of poppler smooth edges differently; a changed drawing differs by far more.
        assert max(ImageStat.Stat(ImageChops.difference(kept.convert("L"), new.convert("L"))).mean) < 0.5


def test_setup_explains_itself() -> None:
    for words, message in ((["setup.sh"], "give a command to run"), (["setup.sh", "true"], "is not installed")):
        result = subprocess.run(
            ["sh", str(ROOT / words[0]), *words[1:]],
            capture_output=True, text=True, check=False, env={**os.environ, "PYTHON": "python-of-nowhere"},
        )  # fmt: skip
        assert result.returncode == 2
        assert message in result.stderr
