"""The command line: results to standard output, messages to standard error, an exit status for each kind of end.

Depends on: everything below.
"""

from __future__ import annotations

import argparse
import contextlib
import os
import re
import signal
import sys
from collections.abc import Sequence
from pathlib import Path
from types import FrameType
from typing import TypeAlias

from fabgen import __version__
from fabgen.errors import FabgenError
from fabgen.resources import one_linear_algebra_thread

EXIT_STATUSES = """exit status:
  0  done                         5  the output cannot be written
  1  a fault in fabgen itself     6  a self-check of the computation failed
  2  the command or job is wrong  7  valid, but not built by this version
  3  no buildable feed found      8  the time limit has passed
  4  a finding stops the pack     9  not enough memory
  130  stopped by Ctrl-C          143  ended by another program
"""
_GROUPS = ("tables", "bend", "cut", "model", "print", "order", "sheets")
_LIBRARY_PACKAGES = {
    "libGL.so.1": "libgl1",
    "libGLU.so.1": "libglu1-mesa",
    "libX11.so.6": "libx11-6",
    "libXext.so.6": "libxext6",
    "libXrender.so.1": "libxrender1",
    "libXft.so.2": "libxft2",
    "libfontconfig.so.1": "libfontconfig1",
    "libfreetype.so.6": "libfreetype6",
    "libgomp.so.1": "libgomp1",
    "libSM.so.6": "libsm6",
    "libICE.so.6": "libice6",
    "libexpat.so.1": "libexpat1",
    "libgcc_s.so.1": "libgcc-s1",
    "libstdc++.so.6": "libstdc++6",
}


def build_parser() -> argparse.ArgumentParser:
    """The parser of all commands."""
    parser = argparse.ArgumentParser(
        prog="fabgen",
        description="Sizes a loop feed for a small dish by field computation and writes the workshop pack to build it.",
        epilog=EXIT_STATUSES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"fabgen {__version__}")
    parser.add_argument("--completion", choices=("bash", "zsh", "fish"), help="print a shell completion script")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND")
    common = _common_options()
    _add_start(commands, common)
    _add_size(commands, common)
    _add_check(commands, common)
    _add_pack(commands, common)
    _add_stock(commands, common)
    return parser


_Commands: TypeAlias = "argparse._SubParsersAction[argparse.ArgumentParser]"


def _common_options() -> argparse.ArgumentParser:
    common = argparse.ArgumentParser(add_help=False, allow_abbrev=False)
    group = common.add_argument_group("for every command")
    group.add_argument("--quiet", action="store_true", help="no progress")
    group.add_argument("--plain", action="store_true", help="progress as plain lines, no colour")
    group.add_argument("--debug", action="store_true", help="show the trace of a fault in fabgen itself")
    group.add_argument("--stock", metavar="FILE", type=Path, help="your own stock rows (TOML), on top of the tables")
    return common


def _add(commands: _Commands, common: argparse.ArgumentParser, name: str, text: str) -> argparse.ArgumentParser:
    return commands.add_parser(name, help=text, description=text, parents=[common], allow_abbrev=False)


def _add_run_options(parser: argparse.ArgumentParser, job: str = "the job file (TOML)") -> None:
    parser.add_argument("job", metavar="JOB", type=Path, help=job)
    parser.add_argument("--no-cache", action="store_true", help="size anew, neither reading nor writing the cache")
    parser.add_argument("--time-limit", metavar="SECONDS", type=float, help="give up after so long")


def _add_start(commands: _Commands, common: argparse.ArgumentParser) -> None:
    parser = _add(commands, common, "start", "Write a commented job file from a template.")
    parser.add_argument("template", metavar="TEMPLATE", nargs="?", help="name of a template; --list shows them")
    parser.add_argument("-o", "--output", metavar="FILE", type=Path, help="the job file to write (TEMPLATE.toml)")
    parser.add_argument("--list", action="store_true", help="list the templates, one line each")
    parser.add_argument("--keys", action="store_true", help="print the page of every key of the job file")


def _add_size(commands: _Commands, common: argparse.ArgumentParser) -> None:
    parser = _add(commands, common, "size", "Find every size and say what the feed will do.")
    _add_run_options(parser)
    parser.add_argument("--json", action="store_true", help="the record's text instead of a table")
    parser.add_argument("--front", action="store_true", help="rejection of the neighbours against efficiency")
    parser.add_argument("--plots", metavar="DIR", type=Path, help="write plots as SVG into this folder")


def _add_check(commands: _Commands, common: argparse.ArgumentParser) -> None:
    parser = _add(commands, common, "check", "List all findings; exit status 4 when one stops the pack.")
    _add_run_options(parser, "the job file (TOML), or the folder of a written pack to read it back")
    parser.add_argument("--json", action="store_true", help="findings as JSON")
    parser.add_argument("--strict", action="store_true", help="exit status 4 for a caution too")
    parser.add_argument("--solid", action="store_true", help="solve the drawn solids too and compare")


def _add_pack(commands: _Commands, common: argparse.ArgumentParser) -> None:
    parser = _add(commands, common, "pack", "Write the whole workshop pack.")
    _add_run_options(parser)
    parser.add_argument("-o", "--output", metavar="DIR", type=Path, required=True, help="the folder to write")
    parser.add_argument(
        "--only", metavar="GROUP", action="append", default=[], help=f"only this group of files: {', '.join(_GROUPS)}"
    )
    parser.add_argument(
        "--despite", metavar="CODE", action="append", default=[], help="write the pack although this finding stops it"
    )


def _add_stock(commands: _Commands, common: argparse.ArgumentParser) -> None:
    parser = _add(commands, common, "stock", "List the stock tables with their sources.")
    parser.add_argument("words", metavar="WORD", nargs="*", help="a kind of stock, or words that a row must hold")
    parser.add_argument("--json", action="store_true", help="rows as JSON")


def _completion(shell: str, parser: argparse.ArgumentParser) -> int:
    from fabgen.completion import completion_script
    from fabgen.start import templates
    from fabgen.stock.tables import KINDS

    words = {"--only": _GROUPS, "start": [item.name for item in templates()], "stock": list(KINDS)}
    sys.stdout.write(completion_script(shell, parser, words))
    return 0


def _run(arguments: argparse.Namespace, parser: argparse.ArgumentParser) -> int:
    if arguments.completion:
        return _completion(arguments.completion, parser)
    if arguments.command is None:
        parser.print_help(sys.stderr)
        return 2
    if arguments.stock is not None:
        from fabgen.stock.tables import load_user_rows

        load_user_rows(arguments.stock)
    from fabgen import commands

    status = commands.COMMANDS[arguments.command](arguments)
    sys.stdout.flush()
    return status


class _EndedError(BaseException):
    """Another program asked this one to end."""


def _end(_number: int, _frame: FrameType | None) -> None:
    raise _EndedError


def main(argv: Sequence[str] | None = None) -> int:
    """Runs a command and returns its exit status; no exception leaves it."""
    for stream in (sys.stdout, sys.stderr):
        with contextlib.suppress(AttributeError, ValueError):
            stream.reconfigure(errors="backslashreplace")  # type: ignore[union-attr]
    one_linear_algebra_thread()
    parser = build_parser()
    debug = False
    try:
        with contextlib.suppress(ValueError):
            signal.signal(signal.SIGTERM, _end)
        arguments = parser.parse_args(argv)
        debug = getattr(arguments, "debug", False)
        return _run(arguments, parser)
    except SystemExit as end:
        return end.code if isinstance(end.code, int) else 2
    except KeyboardInterrupt:
        return _say("stopped; nothing was written", 130)
    except _EndedError:
        return _say("ended from outside; nothing was written", 143)
    except BrokenPipeError:
        _close_output()
        return 0
    except Exception as error:
        if debug:
            raise
        return _explain(error)


def _say(text: str, status: int) -> int:
    with contextlib.suppress(OSError, ValueError):
        sys.stderr.write(f"fabgen: {text}\n")
        sys.stderr.flush()
    return status


def _close_output() -> None:
    """Keeps the interpreter from complaining about a reader that went away."""
    with contextlib.suppress(OSError, ValueError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def _explain(error: Exception) -> int:
    """A message for every exception: our own as they are, others by what they mean to a person."""
    if isinstance(error, FabgenError):
        return _say(str(error), error.exit_status)
    if isinstance(error, MemoryError):
        return _say("there is not enough memory; close other programs or use a machine with more", 9)
    if isinstance(error, ImportError):
        return _say(_missing_library(error), 1)
    if isinstance(error, OSError):
        _close_output()
        return _say(f"the system refused: {error.strerror or error}; look at the disk and its permissions", 5)
    place = error.__traceback__
    while place is not None and place.tb_next is not None:
        place = place.tb_next
    where = f" in {Path(place.tb_frame.f_code.co_filename).name}, line {place.tb_lineno}" if place else ""
    text = " ".join(str(error).split())[:200]
    return _say(
        f"a fault in fabgen itself: {type(error).__name__}{where}: {text}. "
        "Run again with --debug and report the job file",
        1,
    )


def _missing_library(error: ImportError) -> str:
    match = re.search(r"(lib[\w+.-]+\.so[.\d]*)", str(error))
    if match is None:
        return f"a Python library is missing or broken: {error}. Install fabgen again in a new environment"
    package = _LIBRARY_PACKAGES.get(match[1])
    how = f"install it: apt-get install {package}" if package else "install the system package that holds it"
    return f"the system library {match[1]} is missing; {how}"


if __name__ == "__main__":
    sys.exit(main())
