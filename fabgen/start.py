"""Starting job files: the templates, and the five questions that matter.

Depends on: errors, units, stock, job_units.
"""

from __future__ import annotations

import difflib
import json
import math
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from importlib import resources
from pathlib import Path
from typing import TypeVar

from fabgen.errors import JobError, OutputError
from fabgen.units import parse_frequency_mhz, parse_length_mm, show_both_mm, wavelength_mm

DEFAULT_TEMPLATE = "hydrogen-wire"
_SHEET_TEMPLATE = "hydrogen-brass"
_SHEET_METAL = "cuzn37"


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


def refuse_existing(path: Path) -> None:
    """OutputError when something has that name already."""
    if path.exists():
        raise OutputError(f"{path} exists already and is not overwritten; give another name with -o")


def write_job_file(text: str, path: Path) -> None:
    """Writes a new job file; an existing one is never overwritten."""
    refuse_existing(path)
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
    the value in brackets; an answer that cannot be used is explained and asked again. A size in another unit goes
    into the job file as it was written.
    """
    frequency = _until(ask, say, "Frequency [1420.406 MHz]: ", lambda text: _frequency(text or "1420.406 MHz"))
    wl = wavelength_mm(frequency.value)
    say(_about_frequency(frequency.value, wl))
    diameter, ratio = _until(
        ask, say, "Dish: diameter and focal ratio [2.4 m, 0.40]: ", lambda t: _dish(t or "2.4 m, 0.40")
    )
    say(_about_dish(diameter.value, ratio.value, wl))
    form, size = _until(ask, say, "Loop stock [wire 4 mm]: ", lambda text: _stock(text or "wire 4 mm", wl))
    say(f"  {show_both_mm(size.value)}: {_FORMS[form]}")
    make = _until(ask, say, "Can: rolled, folded, printed, tube or turned [rolled]: ", lambda t: _make(t or "rolled"))
    say(f"  {_MAKES[make]}")
    bore = _ask_bore(ask, say, wl) if make == "tube" else None
    connector = _until(ask, say, "Connector [sma-4]: ", lambda text: _connector(text or "sma-4"))
    say(f"  {_about_connector(connector)}")
    values = [
        ("target", "frequency_mhz", frequency.toml),
        ("target", "name", f'"feed for {frequency.value:.10g} MHz"'),
        ("dish", "diameter_m", diameter.toml),
        ("dish", "focal_ratio", ratio.toml),
        ("loop", f"{form}_mm", size.toml),
        ("can", "make", f'"{make}"'),
        ("cable", "connector", f'"{connector}"'),
        *([] if bore is None else [("fixed", "can_bore_mm", bore.toml)]),
    ]
    return _with_answers(frequency.value, form, values)


def _with_answers(frequency_mhz: float, form: str, values: Sequence[tuple[str, str, str]]) -> str:
    text = template(DEFAULT_TEMPLATE if form == "wire" else _SHEET_TEMPLATE).text
    for section, key, value in values:
        text = with_value(text, section, key, value)
    rest = text.partition("\n")[2]
    return f"# Job for {frequency_mhz:.10g} MHz, from the answers given to fabgen start.\n{rest}"


_FORMS = {
    "wire": "one bent wire, made on a jig",
    "sheet": "one flat part for the laser, two folds and feet",
}
_MAKES = {
    "rolled": "floor disc and wall strip as cutting files; a rolled seam in the plane of the electric field",
    "folded": "a prism of flat faces as a cutting file with fold lines",
    "printed": "STL and 3MF for the printer, foil patterns for the conductive lining",
    "tube": "only floor and flange are made; the tube's bore is kept exactly",
    "turned": "one solid for the lathe as STEP, with a dimensioned sheet",
}


def _ask_bore(ask: Ask, say: Say, wl: float) -> _Given:
    bore = _until(ask, say, "Inner diameter of the tube or tin: ", lambda text: _bore(text, wl))
    say(f"  {show_both_mm(bore.value)}, kept exactly; depth, loop and tap are found for it")
    return bore


def _about_frequency(frequency_mhz: float, wl: float) -> str:
    return (
        f"  {frequency_mhz:.10g} MHz, wavelength {wl:.1f} mm: a can about {1.05 * wl:.0f} mm wide, a loop about "
        f"{wl / math.pi:.0f} mm across; wire up to {wl / 10:.1f} mm"
    )


def _about_dish(diameter_m: float, ratio: float, wl: float) -> str:
    """What the dish asks of the feed; beam width 70 lambda / D, the usual rule for a tapered dish."""
    edge = 2 * math.degrees(math.atan(1 / (4 * ratio)))
    beam = 70 * wl / 1000 / diameter_m
    return (
        f"  {diameter_m:.3f} m ({diameter_m / 0.3048:.2f} ft): its edge is {edge:.0f} degrees off the feed's axis; "
        f"the dish's beam is about {beam:.1f} degrees wide"
    )


def _about_connector(key: str) -> str:
    from fabgen.stock import tables

    row = tables.connector(key)
    return (
        f"{row.name}: a hole of {show_both_mm(row.panel_bore_mm)} in the floor, "
        f"and {row.hole_count} screws {row.screw} at its flange"
    )


def _until(ask: Ask, say: Say, question: str, read: Callable[[str], Answer]) -> Answer:
    while True:
        try:
            return read(ask(question).strip())
        except JobError as error:
            say(f"  {error}")


@dataclass(frozen=True)
class _Given:
    """An answer: its value in the key's unit, and how the job file says it."""

    value: float
    toml: str


def _given(text: str, unit: str, read: Callable[[str], float]) -> _Given:
    """A bare number, or one in the key's own unit, is written as a number; else the text stays as it was given."""
    number = text.removesuffix(unit).strip()
    try:
        value = float(number)
    except ValueError:
        return _Given(read(text), json.dumps(text, ensure_ascii=False))
    short = f"{value:.10g}"
    return _Given(value, short if float(short) == value else repr(value))


def _frequency(text: str) -> _Given:
    given = _given(text, "MHz", parse_frequency_mhz)
    if not 300 <= given.value <= 12_000:
        raise JobError(
            f"{text} is {given.value:g} MHz; allowed: 300 to 12000 MHz. Write it with its unit, like 1.42 GHz"
        )
    return given


def _dish(text: str) -> tuple[_Given, _Given]:
    diameter, _, ratio = text.replace("f/D", "").rpartition(",")
    try:
        focal_ratio = float(ratio)
    except ValueError:
        raise JobError(f"{text!r}: write the diameter with its unit, a comma, the focal ratio: 10 ft, 0.38") from None
    size = _given(diameter.strip(), "m", lambda length: parse_length_mm(length) / 1000)
    if not (0.1 < size.value <= 100 and 0.25 <= focal_ratio <= 1.2):
        raise JobError(f"{text!r}: allowed: diameter 0.1 to 100 m, focal ratio (focal length / diameter) 0.25 to 1.2")
    return size, _Given(focal_ratio, f"{focal_ratio:g}")


def _stock(text: str, wl: float) -> tuple[str, _Given]:
    from fabgen.job_units import stock_length_mm

    form, _, size = text.partition(" ")
    if form not in _FORMS or not size.strip():
        raise JobError(f"{text!r}: write wire or sheet and its size: wire 4 mm, wire 12 AWG, sheet 1.5 mm")
    # a gauge of sheet is of the metal that the template names, and depends on it
    metal = _SHEET_METAL if form == "sheet" else None
    given = _given(size.strip(), "mm", lambda length: stock_length_mm(length, metal))
    most = wl / 10 if form == "wire" else wl / 20
    if not 0 < given.value <= most:
        share = "tenth" if form == "wire" else "twentieth"
        raise JobError(
            f"{size.strip()} is {given.value:g} mm; allowed: more than 0 and at most a {share} of the wavelength, "
            f"{most:.1f} mm"
        )
    return form, given


def _bore(text: str, wl: float) -> _Given:
    given = _given(text, "mm", parse_length_mm)
    least, most = 1.8412 / math.pi * wl, 3 * wl  # TE11 cut-off; as the job file has it
    if not least < given.value < most:
        raise JobError(
            f"{text!r}: allowed: more than {least:.1f} mm (below it the can passes no wave) and less than {most:.1f} mm"
        )
    return given


def _make(text: str) -> str:
    if text not in _MAKES:
        raise JobError(f"{text!r} is not a make of can; allowed: {', '.join(_MAKES)}")
    return text


def _connector(text: str) -> str:
    from fabgen.stock import tables

    return str(tables.connector(text).key)
