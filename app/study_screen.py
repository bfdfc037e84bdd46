"""What a study shows on its way: a bar on a terminal, plain lines elsewhere, both on stderr."""

import sys
import time
from collections import deque
from collections.abc import Callable, Iterator
from contextlib import AbstractContextManager, contextmanager
from typing import TYPE_CHECKING

import click
from rich.console import Console
from rich.markup import escape

if TYPE_CHECKING:
    from .ledger_rows import Row
    from .study import Study, StudyGoal
    from .study_run import OnRow

BETWEEN_LINES_S = 10.0
MOST_TOLD = 20  # failures told one by one
OF_RATE = 200  # last designs that the rate is taken of
LEAST_OF_RATE = 5  # designs, before the time until the first is left out


class StudyProgress:
    """Counts and the best so far; told of each row as `study_run.OnRow`."""

    def __init__(
        self,
        study: "Study",
        total: int | None,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        """Start the clock; `total` is the number of designs, None where it is not known."""
        self.total = total
        self.known = self.computed = self.rejected = self.failed = self.passing = 0
        self._goals = study.goals
        self._best: dict[StudyGoal, Row] = {}
        self._clock = clock
        self._began = clock()
        self._ends: deque[float] = deque(maxlen=OF_RATE)

    def __call__(self, row: "Row", is_known: bool) -> None:
        """Count a row."""
        if is_known:
            self.known += 1
            self._began = self._clock()  # reading known rows takes no computing
        else:
            self.computed += 1
            self._ends.append(self._clock())
        self.failed += row.outcome == "failed"
        self.rejected += row.outcome == "rejected"
        self.passing += row.passes is True
        for goal in self._goals if row.outcome == "done" else ():
            if goal.figure in row.figures and self._is_better(goal, row):
                self._best[goal] = row

    @property
    def done(self) -> int:
        """Designs that have a row."""
        return self.known + self.computed

    @property
    def rate(self) -> float | None:
        """Designs computed in a second, of late; None before the first.

        The first ones also waited for the start of the workers.
        """
        if not self._ends:
            return None
        is_running = len(self._ends) >= LEAST_OF_RATE
        first, count = (self._ends[0], -1) if is_running else (self._began, 0)
        spent = self._ends[-1] - first
        return (len(self._ends) + count) / spent if spent > 0.0 else None

    def best(self, goal: "StudyGoal") -> "Row | None":
        """The best row of a goal: of those that pass, or of all where none does."""
        return self._best.get(goal)

    def text(self) -> str:
        """Rate, time left, failures and the best so far on one line."""
        parts = []
        if (rate := self.rate) is not None:
            parts.append(f"{_rate(rate)}")
            if self.total is not None and self.done < self.total:
                parts.append(f"{time_text((self.total - self.done) / rate)} left")
        if self.known:
            parts.append(f"{self.known} known before")
        if self.rejected:
            parts.append(f"{self.rejected} rejected")
        if self.failed:
            parts.append(f"{self.failed} failed")
        if self._best or self.passing:
            parts.append(f"{self.passing} pass")
        for goal, row in self._best.items():
            held = "" if row.passes or not self.passing else " (passes not)"
            parts.append(f"best {goal.figure} {row.figures[goal.figure]:.4g}{held}")
        return ", ".join(parts)

    def _is_better(self, goal: "StudyGoal", row: "Row") -> bool:
        before = self._best.get(goal)
        if before is None:
            return True
        if (before.passes is True) != (row.passes is True):
            return row.passes is True
        new, old = row.figures[goal.figure], before.figures[goal.figure]
        return new > old if goal.sense == "most" else new < old


def watched(what: str) -> "Callable[[Study, int | None], AbstractContextManager[OnRow]]":
    """Shows the progress of `what`, for `sweep.Watch`."""
    return lambda study, total: shown(StudyProgress(study, total), what)


@contextmanager
def shown(progress: StudyProgress, what: str) -> "Iterator[OnRow]":
    """What to call for each row, so that the user sees the progress of `what`."""
    if not sys.stderr.isatty():
        yield _Lines(progress, what)
        return
    from rich.progress import BarColumn, Progress, TextColumn

    columns = (
        TextColumn("{task.description}"),
        BarColumn(bar_width=20),
        TextColumn("{task.completed}" + ("" if progress.total is None else "/{task.total}")),
        TextColumn("{task.fields[text]}"),
    )
    console = Console(stderr=True)
    with Progress(*columns, console=console, transient=True) as bar:
        task = bar.add_task(escape(what), total=progress.total, text="")

        def show(row: "Row", is_known: bool) -> None:
            progress(row, is_known)
            bar.update(task, completed=progress.done, text=escape(progress.text()))
            if row.outcome == "failed" and progress.failed <= MOST_TOLD:
                console.print(escape(_failure(row)), style="yellow", soft_wrap=True)

        yield show


class _Lines:
    """A line now and then, one for each of the first failures, and one at the end."""

    def __init__(self, progress: StudyProgress, what: str) -> None:
        self._progress, self._what = progress, what
        self._last = time.monotonic()

    def __call__(self, row: "Row", is_known: bool) -> None:
        self._progress(row, is_known)
        if row.outcome == "failed" and self._progress.failed <= MOST_TOLD:
            click.echo(_failure(row), err=True)
        now = time.monotonic()
        is_end = self._progress.done == self._progress.total
        if is_end or now - self._last >= BETWEEN_LINES_S:
            self._last = now
            total = "" if self._progress.total is None else f"/{self._progress.total}"
            count = f"{self._what}: {self._progress.done}{total}"
            click.echo(f"{count}  {self._progress.text()}".rstrip(), err=True)


def _failure(row: "Row") -> str:
    return f"design {row.number} failed: {row.reason}"


def _rate(rate: float) -> str:
    return f"{rate:.3g}/s" if rate >= 1.0 else f"{60.0 * rate:.3g}/min"


def time_text(seconds: float) -> str:
    """Seconds as a person says them."""
    whole = round(seconds)
    if whole < 60:
        return f"{whole} s"
    minutes = round(seconds / 60.0)
    if minutes < 60:
        return f"{minutes} min"
    return f"{minutes // 60} h {minutes % 60} min"
