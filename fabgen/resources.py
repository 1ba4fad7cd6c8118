"""What the machine gives: memory before a large step, and the user's own time limit.

Depends on: errors.
"""

from __future__ import annotations

import contextlib
import os
import signal
import sys
import threading
from collections.abc import Iterator
from pathlib import Path
from types import FrameType

from fabgen.errors import JobError, MemoryLimitError, TimeLimitError

MIB = 1 << 20
# Measured peak of a pack is below 2 GiB; below this figure even the smallest template does not pass.
NEEDED_MIB = 1400
_CGROUP_FILES = ("/sys/fs/cgroup/memory.max", "/sys/fs/cgroup/memory/memory.limit_in_bytes")


def memory_mib() -> dict[str, int]:
    """The known bounds on memory, by what sets them; empty where the system does not tell."""
    bounds: dict[str, int] = {}
    with contextlib.suppress(OSError, ValueError, IndexError):
        for line in Path("/proc/meminfo").read_text(encoding="ascii").splitlines():
            if line.startswith("MemAvailable:"):
                bounds["free memory"] = int(line.split()[1]) // 1024
    for name in _CGROUP_FILES:
        with contextlib.suppress(OSError, ValueError):
            bounds["the container's limit"] = int(Path(name).read_text(encoding="ascii")) // MIB
    if sys.platform != "win32":
        import resource

        for kind in (resource.RLIMIT_AS, resource.RLIMIT_DATA):
            soft = resource.getrlimit(kind)[0]
            if soft != resource.RLIM_INFINITY:
                bounds["the limit set by ulimit"] = min(soft // MIB, bounds.get("the limit set by ulimit", soft // MIB))
    return bounds


def one_linear_algebra_thread() -> None:
    """One thread for the linear algebra library, unless the user set another number; before numpy is imported.

    Its sums depend on how many threads share them, and a pack must be the same to the byte on any number of cores;
    besides, its threads wait in busy loops beside ours and cost more than they bring at these sizes.
    """
    for name in ("OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "OMP_NUM_THREADS", "VECLIB_MAXIMUM_THREADS"):
        os.environ.setdefault(name, "1")


def require_memory(needed_mib: int = NEEDED_MIB) -> None:
    """Refuses before the computation starts, since native libraries end the process when memory runs out."""
    for what, given in memory_mib().items():
        if given < needed_mib:
            raise MemoryLimitError(
                f"{what} is {given} MiB; the field computation and the solids need {needed_mib} MiB. "
                "Close other programs, raise the limit, or use a machine with more memory"
            )


@contextlib.contextmanager
def time_limit(seconds: float | None) -> Iterator[None]:
    """Raises TimeLimitError in the main thread when ``seconds`` have passed; None sets no limit."""
    if seconds is None:
        yield
        return
    if not 0 < seconds <= 1e6:
        raise JobError(f"--time-limit {seconds:g}: allowed: more than 0 and at most 1000000 seconds")
    if not hasattr(signal, "setitimer") or threading.current_thread() is not threading.main_thread():
        raise JobError("--time-limit is not available on this system; leave it out")

    def stop(_number: int, _frame: FrameType | None) -> None:
        raise TimeLimitError(
            f"the time limit of {seconds:g} s has passed; nothing was written. Give a longer --time-limit"
        )

    before = signal.signal(signal.SIGALRM, stop)
    # Again every second, should code in between have caught the first one.
    signal.setitimer(signal.ITIMER_REAL, seconds, 1.0)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)
        signal.signal(signal.SIGALRM, before)
