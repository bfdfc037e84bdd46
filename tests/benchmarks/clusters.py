"""A study on a Dask cluster on this machine: designs a second by 1 to 64 workers."""

import os
import tempfile
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from dask_processes import Cluster, cluster
from study_rows import plain_study
from study_stand_ins import STAND_IN_S, ready, stand_in_tasks, timed

from lamwright.app.ledger import Ledger
from lamwright.app.study_hire import PoolWishes, hired
from lamwright.app.study_run import carried_out

from .timing import PROCESSOR, WALL, Notes
from .workload import Workload

LIMIT_S = 60.0
START_S = 0.3  # a task that long goes to another worker while one has it
TICKS = os.sysconf("SC_CLK_TCK") if hasattr(os, "sysconf") else 100


@dataclass(frozen=True, slots=True)
class Spent:
    """Processor time in s until now."""

    coordinator: float
    scheduler: float
    workers: float  # and the processes that they have designs done by


def cluster_rate(work: Workload, notes: Notes) -> dict[str, float]:
    """Designs a second of a stand-in that sleeps 50 ms, and of one that computes so long.

    Each worker is a process of one thread. Where a worker's own process for designs has started
    before, so that nothing is imported meanwhile; the ledger is written as in any study.
    """
    found: dict[str, float] = {}
    with tempfile.TemporaryDirectory() as folder, cluster(Path(folder), 0) as made:
        for count in work.cluster_workers:
            for _ in range(count - len(made.workers)):
                made.add_worker()
            _wait_for(made, count)
            for how in work.cluster_deeds:
                rate = _rate(made, Path(folder) / f"{how}{count}", how, count, work, notes)
                found[f"cluster_rate_{how}_{count}"] = rate
    return {"cluster_rate": max(found.values()), **found}


def _wait_for(made: Cluster, count: int) -> None:
    """Until each worker has done something."""
    seen: set[int] = set()
    with hired(ready, PoolWishes(scheduler_file=made.file), LIMIT_S) as pool:
        while len(seen) < count:
            seen |= {one.result() for one in [pool.submit(START_S) for _ in range(2 * count)]}


def _rate(made: Cluster, folder: Path, how: str, count: int, work: Workload, notes: Notes) -> float:
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


def _spent(made: Cluster) -> Spent:
    workers = [pid for process in made.workers for pid in (process.pid, *_children(process.pid))]
    return Spent(PROCESSOR(), _processor([made.scheduler.pid]), _processor(workers))


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
