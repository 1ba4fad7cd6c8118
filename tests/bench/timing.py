"""Times of several pieces of work, taken in turn so that a busy machine hits all of them alike."""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any


@dataclass
class Timing:
    """Seconds of wall clock and of processor time (all threads) of each repetition."""

    wall_s: list[float] = field(default_factory=list)
    cpu_s: list[float] = field(default_factory=list)

    @property
    def best_s(self) -> float:
        """Least wall time: what the work takes when nobody else wants the processor."""
        return min(self.wall_s)

    @property
    def median_s(self) -> float:
        """Median wall time."""
        return statistics.median(self.wall_s)

    @property
    def best_cpu_s(self) -> float:
        """Least processor time; on an idle machine the wall time lies below it where threads share the work."""
        return min(self.cpu_s)

    def run(self, work: Callable[[], Any]) -> None:
        """Time one repetition."""
        wall, cpu = time.perf_counter(), time.process_time()
        work()
        self.cpu_s.append(time.process_time() - cpu)
        self.wall_s.append(time.perf_counter() - wall)


def in_turn(works: Sequence[Callable[[], Any]], repetitions: int) -> list[Timing]:
    """Time each piece of work ``repetitions`` times, one after the other in turn, after one untimed round."""
    timings = [Timing() for _ in works]
    for work in works:
        work()
    for _ in range(repetitions):
        for timing, work in zip(timings, works, strict=True):
            timing.run(work)
    return timings
