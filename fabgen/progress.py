"""Progress: what a long step tells the person who waits. The library only calls; the command line shows.

Depends on: nothing (rich is imported when a display is opened).
"""

from __future__ import annotations

import sys
import time
from types import TracebackType
from typing import TYPE_CHECKING, Protocol, TextIO

if TYPE_CHECKING:
    from rich.progress import Progress as RichProgress
    from rich.progress import TaskID


class Progress(Protocol):
    """What computing code may call. Both calls are cheap and may come often."""

    def step(self, text: str) -> None:
        """A new step begins; ``text`` says what it does ("searching the can: bore 1.05 wavelengths")."""

    def share(self, done: int, total: int) -> None:
        """``done`` of ``total`` pieces of the present step are finished."""


class Silent:
    """Shows nothing; the default of the library and of ``--quiet``."""

    def step(self, text: str) -> None:
        """Ignored."""

    def share(self, done: int, total: int) -> None:
        """Ignored."""

    def __enter__(self) -> Silent:
        return self

    def __exit__(self, *_: object) -> None:
        return None


class Lines:
    """One plain line per step with the seconds since the start, for logs and ``--plain``."""

    def __init__(self, stream: TextIO) -> None:
        self._stream = stream
        self._began = time.monotonic()
        self._last = ""

    def step(self, text: str) -> None:
        """Writes the step once."""
        if text != self._last:
            self._last = text
            self._stream.write(f"[{time.monotonic() - self._began:5.1f} s] {text}\n")
            self._stream.flush()

    def share(self, done: int, total: int) -> None:
        """Ignored: a log needs no bar."""

    def __enter__(self) -> Lines:
        return self

    def __exit__(self, *_: object) -> None:
        return None


class Bar:
    """A live line on a terminal: what is done, how far, for how long."""

    def __init__(self, stream: TextIO, colour: bool) -> None:
        self._stream = stream
        self._colour = colour
        self._rich: RichProgress | None = None
        self._task: TaskID | None = None

    def __enter__(self) -> Bar:
        from rich.console import Console
        from rich.progress import BarColumn, Progress, SpinnerColumn, TextColumn, TimeElapsedColumn

        console = Console(file=self._stream, no_color=not self._colour, highlight=False)
        self._rich = Progress(
            SpinnerColumn(),
            TextColumn("{task.description}", markup=False),
            BarColumn(bar_width=20),
            TimeElapsedColumn(),
            console=console,
            transient=True,
        )
        self._rich.start()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, value: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self._rich is not None:
            self._rich.stop()

    def step(self, text: str) -> None:
        """Shows the step with an open-ended bar."""
        if self._rich is None:
            return
        if self._task is None:
            self._task = self._rich.add_task(text, total=None)
        else:
            self._rich.reset(self._task, total=None, description=text)

    def share(self, done: int, total: int) -> None:
        """Moves the bar."""
        if self._rich is not None and self._task is not None:
            self._rich.update(self._task, completed=done, total=total)


Display = Silent | Lines | Bar


def open_display(quiet: bool, plain: bool, colour: bool, stream: TextIO | None = None) -> Display:
    """The display for this run: nothing when quiet, a bar on a terminal, else plain lines."""
    target = sys.stderr if stream is None else stream
    if quiet:
        return Silent()
    if plain or not target.isatty():
        return Lines(target)
    return Bar(target, colour)
