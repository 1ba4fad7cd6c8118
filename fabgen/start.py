"""Starting job files: the templates, and the five questions that matter.

Depends on: errors, units, stock, job.
"""

from __future__ import annotations

import difflib
import math
import re
from collections.abc import Callable
from dataclasses import dataclass
from importlib import resources
from pathlib import Path
from typing import TypeVar

from fabgen.errors import JobError, OutputError
from fabgen.units import parse_frequency_mhz, parse_length_mm, wavelength_mm

DEFAULT_TEMPLATE = "hydrogen-wire"


@dataclass(frozen=True)
class Template:
    """A starting job: its name, what it is for (its first line), and its text."""

    name: str
    purpose: str
    text: str


def templates() -> tuple[Template, ...]:
    """All starting jobs by name, from the installed package or, in a working tree, from its templates folder."""
    places = (resources.files("fabgen").joinpath("templates"), Path(__file__).parent.parent / "templates")
    folder = next((place for place in places if place.is_dir()), None)
    if folder is None:
        raise JobError("the templates are missing from this installation; install fabgen again")
    found = []
    for item in sorted(folder.iterdir(), key=lambda entry: entry.name):
        if item.name.endswith(".toml"):
            text = item.read_text(encoding="utf-8")
            found.append(Template(item.name.removesuffix(".toml"), text.splitlines()[0].lstrip("# "), text))
    return tuple(found)


def template(name: str) -> Template:
    """The template of that name; JobError names the nearest."""
    known = {item.name: item for item in templates()}
    if name not in known:
        near = difflib.get_close_matches(name[:60], known, n=1, cutoff=0.4)
        hint = f"; did you mean {near[0]!r}?" if near else ""
        raise JobError(f"there is no template {name!r}{hint} Templates: {', '.join(known)}")
    return known[name]


def write_job_file(text: str, path: Path) -> None:
    """Writes a new job file; an existing one is never overwritten."""
    try:
        with path.open("x", encoding="utf-8", newline="\n") as stream:
            stream.write(text)
    except FileExistsError:
        raise OutputError(f"{path} exists already and is not overwritten; give another name with -o") from None
    except OSError as error:
        raise OutputError(f"{path} cannot be written: {error.strerror}; give another place with -o") from None


def with_value(text: str, section: str, key: str, value: str) -> str:
    """The job text with one key of one table set to a TOML value; a key that was left out is added."""
    pattern = re.compile(
        rf"^(\[{re.escape(section)}\][^\n]*\n(?:(?!\[)[^\n]*\n)*?)({key}\s*=\s*)([^#\n]*?)([ \t]*#|\n)", re.M
    )
    changed, count = pattern.subn(lambda m: f"{m[1]}{m[2]}{value}{m[4]}", text, count=1)
    if count:
        return changed
    head = re.compile(rf"^(\[{re.escape(section)}\][^\n]*\n)", re.M)
    changed, count = head.subn(lambda m: f"{m[1]}{key} = {value}\n", text, count=1)
    return changed if count else f"{text.rstrip()}\n\n[{section}]\n{key} = {value}\n"


Answer = TypeVar("Answer")
Ask = Callable[[str], str]
Say = Callable[[str], None]


def ask_job(ask: Ask, say: Say) -> str:
    """Asks for frequency, dish, loop stock, can and connector; the job text that results.

    ``ask`` shows a question and returns the answer, ``say`` shows what the answer changes. An empty answer takes
    the value in brackets; an answer that cannot be used is explained and asked again.
    """
    frequency = _until(ask, say, "Frequency [1420.406 MHz]: ", lambda text: _frequency(text or "1420.406 MHz"))
    wl = wavelength_mm(frequency)
    say(f"  wavelength {wl:.1f} mm: a can about {1.05 * wl:.0f} mm wide, a loop about {wl / math.pi:.0f} mm across")
    diameter, ratio = _until(
        ask, say, "Dish: diameter and focal ratio [2.4 m, 0.40]: ", lambda t: _dish(t or "2.4 m, 0.40")
    )
    edge = 2 * math.degrees(math.atan(1 / (4 * ratio)))
    beam = 70 * wl / 1000 / diameter
    say(
        f"  the dish's edge is {edge:.0f} degrees off the feed's axis; the dish's beam is about {beam:.1f} degrees wide"
    )
    form, size = _until(ask, say, "Loop stock [wire 4 mm]: ", lambda text: _stock(text or "wire 4 mm", wl))
    say(f"  {'one bent wire, made on a jig' if form == 'wire' else 'one flat part for the laser, two folds and feet'}")
    make = _until(ask, say, "Can: rolled, folded, printed, tube or turned [rolled]: ", lambda t: _make(t or "rolled"))
    say(f"  {_MAKES[make]}")
    bore = _until(ask, say, "Inner diameter of the tube or tin: ", parse_length_mm) if make == "tube" else None
    connector = _until(ask, say, "Connector [sma-4]: ", lambda text: _connector(text or "sma-4"))
    text = template(DEFAULT_TEMPLATE if form == "wire" else "hydrogen-brass").text
    values = [
        ("target", "frequency_mhz", f"{frequency:.10g}"),
        ("target", "name", f'"feed for {frequency:.10g} MHz"'),
        ("dish", "diameter_m", f"{diameter:g}"),
        ("dish", "focal_ratio", f"{ratio:g}"),
        ("loop", "wire_mm" if form == "wire" else "sheet_mm", size),
        ("can", "make", f'"{make}"'),
        ("cable", "connector", f'"{connector}"'),
    ]
    if bore is not None:
        values.append(("fixed", "can_bore_mm", f"{bore:g}"))
    for section, key, value in values:
        text = with_value(text, section, key, value)
    first, _, rest = text.partition("\n")
    return f"# Job for {frequency:.10g} MHz, from the answers given to fabgen start.\n{rest}" if first else text


_MAKES = {
    "rolled": "floor disc and wall strip as cutting files; a rolled seam in the plane of the electric field",
    "folded": "a prism of flat faces as a cutting file with fold lines",
    "printed": "STL and 3MF for the printer, foil patterns for the conductive lining",
    "tube": "only floor and flange are made; the tube's bore is kept exactly",
    "turned": "one solid for the lathe as STEP, with a dimensioned sheet",
}


def _until(ask: Ask, say: Say, question: str, read: Callable[[str], Answer]) -> Answer:
    while True:
        try:
            return read(ask(question).strip())
        except JobError as error:
            say(f"  {error}")


def _frequency(text: str) -> float:
    try:
        value = float(text)
    except ValueError:
        value = parse_frequency_mhz(text)
    if not 300 <= value <= 12_000:
        raise JobError(f"{text} is {value:g} MHz; allowed: 300 to 12000 MHz. Write it with its unit, like 1.42 GHz")
    return value


def _dish(text: str) -> tuple[float, float]:
    diameter, _, ratio = text.replace("f/D", "").rpartition(",")
    try:
        focal_ratio = float(ratio)
    except ValueError:
        raise JobError(f"{text!r}: write the diameter with its unit, a comma, the focal ratio: 10 ft, 0.38") from None
    size = parse_length_mm(diameter) / 1000
    if not (0.1 < size <= 100 and 0.25 <= focal_ratio <= 1.2):
        raise JobError(f"{text!r}: allowed: diameter 0.1 to 100 m, focal ratio (focal length / diameter) 0.25 to 1.2")
    return size, focal_ratio


def _stock(text: str, wl: float) -> tuple[str, str]:
    form, _, size = text.partition(" ")
    if form not in {"wire", "sheet"} or not size.strip():
        raise JobError(f"{text!r}: write wire or sheet and its size: wire 4 mm, wire 12 AWG, sheet 1.5 mm")
    gauge = re.search(r"awg|swg|ga", size, re.IGNORECASE)
    if gauge:
        return form, f'"{size.strip()}"'
    value = parse_length_mm(size)
    if not 0 < value <= wl / 10:
        raise JobError(
            f"{size} is {value:g} mm; allowed: more than 0 and at most a tenth of the wavelength, {wl / 10:.1f} mm"
        )
    return form, f"{value:g}"


def _make(text: str) -> str:
    if text not in _MAKES:
        raise JobError(f"{text!r} is not a make of can; allowed: {', '.join(_MAKES)}")
    return text


def _connector(text: str) -> str:
    from fabgen.stock import tables

    return str(tables.connector(text).key)
