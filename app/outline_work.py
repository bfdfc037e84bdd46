"""The punch outline as a task for another process, and a process that is early ready for it."""

import contextlib
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import IO, TYPE_CHECKING, NoReturn

from .imports import quick_imports
from .pool import Worker, serve, spare_cores
from .process import Copy, anew, may_fork

if TYPE_CHECKING:
    from lamwright.geometry.section import CrossSection
    from lamwright.postprocess.quantities import OutlineFigures

_SERVE = """
from lamwright.app.outline_work import load
load()
from lamwright.app.pool import serve_anew
serve_anew()
"""


@dataclass(frozen=True, slots=True)
class OutlineWork:
    """How true the written outline is, and the wall time it took."""

    figures: "OutlineFigures"
    seconds: float


def outlined(desk: object, section: "CrossSection", path: Path) -> OutlineWork:
    """Write the lamination as DXF; at any desk, of which nothing is needed."""
    from .lamination import write_outline

    began = time.perf_counter()
    figures = write_outline(section, path)
    return OutlineWork(figures, time.perf_counter() - began)


@contextlib.contextmanager
def early_outliner() -> "Iterator[Callable[[], Worker[object] | None]]":
    """A process that begins to import what `outlined` needs, where there is a core to spare.

    In the block a call gives its worker, or None; at the end both are gone.
    """
    if not spare_cores():
        yield lambda: None
        return
    process = Copy(_serve_loaded) if may_fork() else anew(_SERVE)
    hired: list[Worker[object]] = []

    def hire() -> "Worker[object]":
        hired.append(Worker(object, process))
        return hired[0]

    try:
        yield hire
    finally:
        if hired:
            hired[0].stop()
        else:
            process.kill()
            process.wait()
            for pipe in (process.stdin, process.stdout):
                assert pipe is not None
                pipe.close()


def load() -> None:
    """Import what `outlined` needs."""
    with quick_imports():
        from lamwright.geometry import dxf

        from . import lamination  # noqa: F401

        dxf.load()


def _serve_loaded(calls: IO[bytes], answers: IO[bytes]) -> NoReturn:
    load()
    serve(calls, answers)
