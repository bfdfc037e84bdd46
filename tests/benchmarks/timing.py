"""Clocks, interleaved pairs and growth exponents.

What runs in one thread is timed by the processor time of this process, so that a neighbour who
takes the core away is not counted; what starts processes is timed by the wall.
"""

import gc
import sys
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TextIO

import numpy as np

from lamwright.solver.types import FloatArray

Clock = Callable[[], float]
Values = Sequence[float] | FloatArray
PROCESSOR: Clock = time.process_time
WALL: Clock = time.perf_counter


@dataclass(frozen=True, slots=True)
class Notes:
    """Where the spread of every figure is told; silent unless asked for."""

    stream: TextIO | None = None

    def tell(self, name: str, values: Values, unit: str = "") -> None:
        """Median, least and greatest of what was measured."""
        if self.stream is not None:
            low, middle, high = np.min(values), np.median(values), np.max(values)
            text = f"{middle:.4g} ({low:.4g} to {high:.4g}, {len(values)} values) {unit}"
            print(f"  {name}: {text}", file=self.stream, flush=True)

    def say(self, text: str) -> None:
        """A remark."""
        if self.stream is not None:
            print(f"  {text}", file=self.stream, flush=True)


ALOUD = Notes(sys.stderr)
SILENT = Notes()


def seconds(work: Callable[[], object], clock: Clock = PROCESSOR) -> float:
    """Time of one call, the garbage collector held off."""
    gc.collect()
    was_on = gc.isenabled()
    gc.disable()
    try:
        began = clock()
        work()
        return clock() - began
    finally:
        if was_on:
            gc.enable()


def interleaved(
    works: Sequence[Callable[[], object]], rounds: int, clock: Clock = PROCESSOR
) -> FloatArray:
    """Times (rounds, n_work) of works that take turns: A B A B; the first turn is not counted.

    Other programs that come and go so slow down all works alike.
    """
    for work in works:
        work()
    return np.array([[seconds(work, clock) for work in works] for _ in range(rounds)])


def ratio(
    name: str,
    slow: Callable[[], object],
    fast: Callable[[], object],
    rounds: int,
    notes: Notes = SILENT,
    clock: Clock = PROCESSOR,
) -> float:
    """Median over the rounds of time(slow) / time(fast), taken in turns."""
    times = interleaved((slow, fast), rounds, clock)
    ratios = times[:, 0] / times[:, 1]
    notes.tell(f"{name}, first", 1e3 * times[:, 0], "ms")
    notes.tell(f"{name}, second", 1e3 * times[:, 1], "ms")
    notes.tell(f"{name}, ratio", ratios)
    return float(np.median(ratios))


def growth_exponent(sizes: Values, times: Values) -> float:
    """Slope of log(time) over log(size) by least squares."""
    slope = np.polyfit(np.log(sizes), np.log(times), 1)[0]
    return float(slope)
