"""Tasks to rows: what is not in the ledger yet is carried out by a pool and committed at once.

Only the process that calls this writes the ledger. A run that ends at any moment, however, has
every committed row; the same call goes on from there.
"""

import queue
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import Future
from typing import TYPE_CHECKING

from .evaluation import Evaluation
from .study_pool import OverTime, Pool, PoolLost, TaskLost

if TYPE_CHECKING:
    from .ledger import Ledger
    from .ledger_rows import Row
    from .study_task import Task

ATTEMPTS = 2  # at a task whose process is lost, hangs or breaks off
PATIENCE_S = 0.5  # between two looks whether the pool has grown
AHEAD = 2  # tasks of a core that the pool holds, so that none waits for the ledger

OnRow = Callable[["Row", bool], None]  # a row, and whether it was in the ledger before


def untold(row: "Row", is_known: bool) -> None:
    """Tell nobody of a row."""


def carried_out(
    tasks: "Iterable[Task]",
    ledger: "Ledger",
    pool: "Pool[Task, Evaluation]",
    on_row: OnRow = untold,
    *,
    origin: str = "sweep",
    is_retrying: bool = False,
) -> "list[Row]":
    """Rows of all tasks, in their order.

    Args:
        tasks: drawn as the pool has room for them; two with the same hash are computed once.
        ledger: gets every new row, and serves those it has.
        pool: carries out what is new. A task that loses its process, goes on past its time limit
            or breaks off is tried once more, then its row says that it failed and why.
        on_row: called for each row in the order in which they come.
        origin: of the new rows.
        is_retrying: compute anew what the ledger says has failed.

    Raises:
        PoolLost: the pool is gone. What was finished is committed, as with all errors but those of
            the ledger itself.
        LamwrightError: the ledger cannot be written.
    """
    run = _Run(ledger, pool, on_row, origin, is_retrying)
    try:
        return run.rows(tasks)
    except (KeyboardInterrupt, PoolLost):
        run.keep_finished()
        raise


class _Run:
    """The tasks under way."""

    def __init__(
        self,
        ledger: "Ledger",
        pool: "Pool[Task, Evaluation]",
        on_row: OnRow,
        origin: str,
        is_retrying: bool,
    ) -> None:
        self._ledger, self._pool, self._on_row = ledger, pool, on_row
        self._origin, self._is_retrying = origin, is_retrying
        self._under_way: dict[str, Task] = {}
        self._attempts: dict[str, int] = {}
        self._finished: queue.SimpleQueue[tuple[str, Future[Evaluation]]] = queue.SimpleQueue()
        self._rows: dict[str, Row] = {}  # by hash

    def rows(self, tasks: "Iterable[Task]") -> "list[Row]":
        order: list[str] = []
        for task in self._unknown(tasks, order):
            self._under_way[task.hash] = task
            self._submit(task)
            while len(self._under_way) >= AHEAD * max(1, self._pool.cores):
                self._take_one()
        while self._under_way:
            self._take_one()
        return [self._rows[design_hash] for design_hash in order]

    def keep_finished(self) -> None:
        """Commit what has come in without waiting for more."""
        while not self._finished.empty():
            design_hash, future = self._finished.get()
            if not future.cancelled() and future.exception() is None:
                self._keep(design_hash, future.result())

    def _unknown(self, tasks: "Iterable[Task]", order: list[str]) -> "Iterator[Task]":
        """Tasks that are to be computed; `order` gets the hashes of all."""
        for task in tasks:
            order.append(task.hash)
            if task.hash in self._under_way or task.hash in self._rows:
                continue
            row = self._ledger.known(task.hash)
            if row is None or (row.outcome == "failed" and self._is_retrying):
                yield task
            else:
                self._rows[task.hash] = row
                self._on_row(row, True)

    def _submit(self, task: "Task") -> None:
        self._attempts[task.hash] = self._attempts.get(task.hash, 0) + 1
        future = self._pool.submit(task)
        future.add_done_callback(lambda done: self._finished.put((task.hash, done)))

    def _take_one(self) -> None:
        """Wait for a task to end, not for ever: the pool may have got room for more."""
        try:
            design_hash, future = self._finished.get(timeout=PATIENCE_S)
        except queue.Empty:
            return
        error = PoolLost("the pool was stopped") if future.cancelled() else future.exception()
        if error is None:
            self._keep(design_hash, future.result())
        elif isinstance(error, PoolLost):
            raise error
        elif self._attempts[design_hash] < ATTEMPTS:
            self._submit(self._under_way[design_hash])
        else:
            self._keep(design_hash, Evaluation("failed", _reason(error), "computation"))

    def _keep(self, design_hash: str, evaluation: Evaluation) -> None:
        task, attempts = self._under_way[design_hash], self._attempts[design_hash]
        row = self._ledger.record(task, evaluation, self._origin, attempts)
        del self._under_way[design_hash], self._attempts[design_hash]
        self._rows[design_hash] = row
        self._on_row(row, False)


def _reason(error: BaseException) -> str:
    """What a task that never came to an end says of itself, on one line."""
    said = " ".join(str(error).split())
    if not isinstance(error, TaskLost | OverTime):
        said = f"a fault of the program, {type(error).__name__}: {said}"
    return f"{said}; tried {ATTEMPTS} times"
