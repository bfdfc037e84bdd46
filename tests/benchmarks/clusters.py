"""A study on a Dask cluster on this machine: designs a second by 1 to 64 workers."""

import os
import tempfile
from collections.abc import Iterable
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path

from dask_processes import cluster, worker_options
from study_rows import plain_study
from study_stand_ins import STAND_IN_S, ready, stand_in_tasks, timed

from lamwright.app.ledger import Ledger
from lamwright.app.study_hire import PoolWishes, hired
from lamwright.app.study_run import carried_out

from .nursery import Nursery
from .timing import PROCESSOR, WALL, Notes
from .workload import Workload

LIMIT_S = 60.0
START_S = 0.3  # a task that long goes to another worker while one has it
AT_ONCE = 16  # workers that start side by side
TICKS = os.sysconf("SC_CLK_TCK") if hasattr(os, "sysconf") else 100


@dataclass(frozen=True, slots=True)
class Made:
    """A cluster on this machine."""

    file: Path  # of its scheduler
    scheduler: int  # number of its process
    nursery: Nursery

    def grow(self, count: int) -> None:
        """Have so many workers, each with a process for designs that has begun."""
        wishes = PoolWishes(scheduler_file=self.file)
        while (here := len(self.nursery.workers)) < count:
            for k in range(here, min(count, here + AT_ONCE)):
                log = self.file.parent / f"worker{k}.log"
                self.nursery.add(log, worker_options(self.file, f"w{k}"))
            seen: set[int] = set()
            with hired(ready, wishes, LIMIT_S) as pool:
                while len(seen) < len(self.nursery.workers):
                    asked = [pool.submit(START_S) for _ in range(2 * len(self.nursery.workers))]
                    seen |= {one.result() for one in asked}


@dataclass(frozen=True, slots=True)
class Spent:
    """Processor time in s until now."""

    coordinator: float
    scheduler: float
    workers: float  # and the processes that they have designs done by


def cluster_rate(work: Workload, notes: Notes) -> dict[str, float]:
    """Designs a second of a stand-in that sleeps 50 ms, and of one that computes so long.

    Each worker is a process of one thread. Workers, and their own processes for designs, have
    started before, so that nothing is imported meanwhile; the ledger is written as in any study.
    """
    found: dict[str, float] = {}
    with (
        tempfile.TemporaryDirectory() as folder,
        cluster(Path(folder), 0) as started,
        closing(Nursery()) as nursery,
    ):
        made = Made(started.file, started.scheduler.pid, nursery)
        for count in work.cluster_workers:
            made.grow(count)
            for how in work.cluster_deeds:
                rate = _rate(made, Path(folder) / f"{how}{count}", how, count, work, notes)
                found[f"cluster_rate_{how}_{count}"] = rate
    return {"cluster_rate": max(found.values()), **found}


def _rate(made: Made, folder: Path, how: str, count: int, work: Workload, notes: Notes) -> float:
    folder.mkdir()
    designs = min(work.cluster_designs, 40 + 20 * count)
    tasks = stand_in_tasks([f"{how} {k}" for k in range(designs)])
    with (
        Ledger.open(folder, plain_study(drawings={})) as ledger,
        hired(timed, PoolWishes(scheduler_file=made.file), LIMIT_S) as pool,
    ):
        before, began = _spent(made), WALL()
        carried_out(tasks, ledger, pool)
        wall, after = WALL() - began, _spent(made)
    each = [
        1e3 * (getattr(after, part) - getattr(before, part)) / designs for part in Spent.__slots__
    ]
    rate = designs / wall
    shares = ", ".join(f"{ms:.1f} ({ms * rate / 1e3:.0%})" for ms in each)
    notes.say(
        f"{count} workers, {how}: {rate:.1f}/s, {rate * STAND_IN_S / count:.2f} of the ideal; "
        f"processor time a design in ms (of a core) by {', '.join(Spent.__slots__)}: {shares}"
    )
    return rate


def _spent(made: Made) -> Spent:
    workers = [pid for worker in made.nursery.workers for pid in (worker, *_children(worker))]
    return Spent(PROCESSOR(), _processor([made.scheduler]), _processor(workers))


def _children(pid: int) -> list[int]:
    files = Path(f"/proc/{pid}/task").glob("*/children")
    return [int(child) for file in files for child in file.read_text().split()]


def _processor(pids: Iterable[int]) -> float:
    """User's and system's time of processes, in s (Linux)."""
    total = 0
    for pid in pids:
        fields = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()
        total += int(fields[11]) + int(fields[12])
    return total / TICKS
