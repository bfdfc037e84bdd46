"""The figures of one assessment, drawn by its crew beside the other work, or after it.

What draws is imported where a figure is drawn: without pictures that spares 20 ms at the start.
"""

from collections.abc import Callable
from concurrent.futures import Future
from functools import partial
from pathlib import Path

from .desk import Desk
from .pool import Crew


class Album:
    """Figures to come; all are there once it is closed."""

    def __init__(self, crew: Crew[Desk], stage: Path, *, is_wanted: bool, is_late: bool) -> None:
        """An empty album of the folder `stage`.

        Args:
            crew: draws.
            stage: where the figures go.
            is_wanted: else nothing is drawn.
            is_late: nothing is drawn before the album is closed.
        """
        self._crew, self._stage = crew, stage
        self._is_wanted, self._is_late = is_wanted, is_late
        self._drawn: list[Future[None]] = []
        self._later: list[Callable[[Desk], None]] = []

    def add(self, name: str, *shown: object) -> None:
        """Have the figure of this name drawn, of what its composer in `figures.COMPOSERS` takes."""
        if not self._is_wanted:
            return
        if self._is_late:
            self._later.append(partial(_figure, self._stage, name, shown))
        else:
            self._drawn.append(self._crew.start(Desk.figure, self._stage, name, *shown))

    def close(self, on_done: Callable[[float], None]) -> None:
        """Wait for all; `on_done` gets the share of the late ones that are drawn."""
        for figure in self._drawn:
            figure.result()
        count = len(self._later)
        self._crew.share(self._later, lambda done: on_done(done / count))


def _figure(stage: Path, name: str, shown: tuple[object, ...], desk: Desk) -> None:
    desk.figure(stage, name, *shown)
