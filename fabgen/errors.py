"""The error family. Each message says what was given, what is allowed and what to do.

Depends on: nothing.
"""

from __future__ import annotations


class FabgenError(Exception):
    """Root of all errors meant for people; ``exit_status`` is what the command line returns."""

    exit_status = 1


class JobError(FabgenError, ValueError):
    """The job file, or a value in it, cannot be used."""

    exit_status = 2


class NoSolutionError(FabgenError, ValueError):
    """The job is valid but no buildable, matched feed was found; the message names the limit."""

    exit_status = 3


class ChecksFailedError(FabgenError):
    """A finding of severity stop blocks the pack."""

    exit_status = 4


class OutputError(FabgenError, OSError):
    """The output folder or a file cannot be written."""

    exit_status = 5


class NumericalError(FabgenError, ArithmeticError):
    """A self-check of the field computation failed."""

    exit_status = 6


class GeometryError(FabgenError, ValueError):
    """Sizes that cannot form the asked surface, contour or solid."""

    exit_status = 3


class NotCoveredError(FabgenError, NotImplementedError):
    """Valid, but this version does not build it."""

    exit_status = 7


class TimeLimitError(FabgenError):
    """The user's own time limit was reached."""

    exit_status = 8


class MemoryLimitError(FabgenError, MemoryError):
    """The computation needs more memory than this machine or its limits give."""

    exit_status = 9
