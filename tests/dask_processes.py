"""A Dask scheduler and its workers as processes on the loopback, for tests."""

import os
import subprocess
import sys
import time
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path

import study_stand_ins

PATIENCE_S = 120.0


class Cluster:
    """A scheduler and workers of one thread each; their options beside."""

    def __init__(self, folder: Path, options: Sequence[str] = ()) -> None:
        """Start the scheduler."""
        self.file = folder / "scheduler.json"
        self._folder = folder
        self._options = options
        self.workers: list[subprocess.Popen[bytes]] = []
        self.scheduler = self._started(
            "scheduler", "--host", "127.0.0.1", "--port", "0", "--scheduler-file", str(self.file)
        )
        until = time.monotonic() + PATIENCE_S
        while not self.file.exists() and time.monotonic() < until:
            time.sleep(0.05)

    def add_worker(self, *options: str) -> None:
        """One more."""
        own = worker_options(self.file, f"w{len(self.workers)}")
        self.workers.append(self._started("worker", *own, *options))

    def stop(self) -> None:
        """Kill them all."""
        for process in (*self.workers, self.scheduler):
            process.kill()
            process.wait()

    def _started(self, what: str, *options: str) -> subprocess.Popen[bytes]:
        command = [sys.executable, "-m", "distributed.cli.dask_" + what, "--no-dashboard"]
        log = (self._folder / f"{what}{len(self.workers)}.log").open("wb")
        with log:
            return subprocess.Popen(
                [*command, *options, *self._options],
                stdout=log,
                stderr=log,
                env={**os.environ, "PYTHONPATH": searched()},
            )


def worker_options(scheduler_file: Path, name: str) -> tuple[str, ...]:
    """Of `dask worker` with one thread; its folder is beside the scheduler's file."""
    where = ("--scheduler-file", str(scheduler_file))
    where += ("--local-directory", str(scheduler_file.parent / name))
    return (*where, "--nworkers", "1", "--nthreads", "1", "--no-nanny", "--name", name)


def searched() -> str:
    """Where a process looks for modules: the stand-ins first."""
    tests = str(Path(study_stand_ins.__file__).parent)
    return os.pathsep.join([tests, *(path for path in sys.path if path and path != tests)])


@contextmanager
def cluster(folder: Path, workers: int, options: Sequence[str] = ()) -> Iterator[Cluster]:
    """A scheduler with workers while the block runs."""
    made = Cluster(folder, options)
    try:
        for _ in range(workers):
            made.add_worker()
        yield made
    finally:
        made.stop()
