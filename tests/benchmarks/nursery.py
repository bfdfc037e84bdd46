"""Dask workers as copies of one process that has imported what they need (fork; Linux, macOS).

A worker started anew takes 2 s of a core for its imports, so that 64 of them took two cores longer
than anybody waits. A copy is at work after hundredths of a second and shares the pages of what was
imported. It is a process of its own all the same, with its own loop, connections and process for
designs.

Run as a program, it is the parent: each line of its input is the options of a worker as JSON, first
the file for what it says; each line of its output is the number of the process. The end of its
input ends it and all workers.
"""

import contextlib
import gc
import json
import os
import signal
import subprocess
import sys
from collections.abc import Sequence
from pathlib import Path

from dask_processes import searched


class Nursery:
    """Workers that come from one parent; close it."""

    def __init__(self) -> None:
        """Start the parent."""
        self.workers: list[int] = []  # numbers of their processes
        command = [sys.executable, "-m", "benchmarks.nursery"]
        self._parent = subprocess.Popen(
            command,
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            text=True,
            env={**os.environ, "OPENBLAS_NUM_THREADS": "1", "PYTHONPATH": searched()},
        )

    def add(self, log: Path, options: Sequence[str]) -> None:
        """One more worker with these options of `dask worker`."""
        asked, told = self._parent.stdin, self._parent.stdout
        assert asked is not None
        assert told is not None
        print(json.dumps([str(log), *options]), file=asked, flush=True)
        self.workers.append(int(told.readline()))

    def close(self) -> None:
        """End the parent and all workers."""
        self._parent.communicate()  # closes both its pipes and waits


def main() -> None:
    """Be the parent."""
    import distributed.cli.dask_worker as command
    import study_stand_ins  # noqa: F401

    import lamwright.app.study_cluster_worker  # noqa: F401

    assert len(os.listdir("/proc/self/task")) == 1, "a copy of several threads is not whole"
    gc.freeze()  # what is imported is not looked at again: its pages stay shared
    started: list[int] = []
    for line in sys.stdin:
        log, *options = json.loads(line)
        pid = os.fork()
        if pid == 0:
            _be_worker(command.main, log, options)
        started.append(pid)
        print(pid, flush=True)
    for pid in started:
        with contextlib.suppress(ProcessLookupError):
            os.kill(pid, signal.SIGKILL)


def _be_worker(worker: "object", log: str, options: list[str]) -> None:
    """Run `dask worker` in place of the parent."""
    try:
        silent, said = os.open(os.devnull, os.O_RDONLY), os.open(log, os.O_WRONLY | os.O_CREAT)
        os.dup2(silent, 0)
        os.dup2(said, 1)
        os.dup2(said, 2)
        worker(options)  # type: ignore[operator]  # a command of click
    finally:
        os._exit(1)


if __name__ == "__main__":
    main()
