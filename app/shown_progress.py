"""Progress on the terminal: on stderr, as a bar, or without a terminal as one line a phase.

It is imported before a command starts its first process, so nothing heavy is at its top.
"""

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

import click

if TYPE_CHECKING:
    from .progress import Progress


@contextmanager
def shown_progress() -> "Iterator[Progress]":
    """Progress as a bar on a terminal, as a line for each phase elsewhere."""
    if not sys.stderr.isatty():
        yield _PlainLines()
        return
    from rich.console import Console
    from rich.progress import BarColumn, TextColumn, TimeElapsedColumn
    from rich.progress import Progress as Bar

    columns = (TextColumn("{task.description}"), BarColumn(), TimeElapsedColumn())
    bar = Bar(*columns, console=Console(stderr=True), transient=True)
    task = bar.add_task("start", total=1.0)

    def show(phase: str, share: float) -> None:
        bar.update(task, description=f"{phase:<22}", completed=share)
        if phase != "start":  # the bar has a thread, and workers are copies of a single one
            bar.start()

    try:
        yield show
    finally:
        bar.stop()


class _PlainLines:
    def __init__(self) -> None:
        self._phase = ""

    def __call__(self, phase: str, share: float) -> None:
        if phase != self._phase:
            self._phase = phase
            click.echo(f"{100.0 * share:3.0f} %  {phase}", err=True)
