"""Progress on the terminal: on stderr, as a bar, or without a terminal as one line a phase.

It is imported before a command starts its first process, so nothing heavy is at its top; the bar
itself is made once the workers are: its thread would forbid copies of this process.
"""

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

import click

if TYPE_CHECKING:
    from rich.progress import Progress as Bar

    from .progress import Progress


@contextmanager
def shown_progress() -> "Iterator[Progress]":
    """Progress as a bar on a terminal, as a line for each phase elsewhere."""
    if not sys.stderr.isatty():
        yield _PlainLines()
        return
    shown = _Drawn()
    try:
        yield shown
    finally:
        shown.stop()


class _Drawn:
    def __init__(self) -> None:
        self._bar: Bar | None = None

    def __call__(self, phase: str, share: float) -> None:
        if phase == "start":
            return
        if self._bar is None:
            self._bar = _bar()
            self._bar.start()
        self._bar.update(self._bar.task_ids[0], description=f"{phase:<22}", completed=share)

    def stop(self) -> None:
        if self._bar is not None:
            self._bar.stop()


def _bar() -> "Bar":
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn, TimeElapsedColumn

    columns = (TextColumn("{task.description}"), BarColumn(), TimeElapsedColumn())
    bar = Progress(*columns, console=Console(stderr=True), transient=True)
    bar.add_task("start", total=1.0)
    return bar


class _PlainLines:
    def __init__(self) -> None:
        self._phase = ""

    def __call__(self, phase: str, share: float) -> None:
        if phase != self._phase:
            self._phase = phase
            click.echo(f"{100.0 * share:3.0f} %  {phase}", err=True)
