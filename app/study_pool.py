"""What carries tasks out, near or far: one `submit` for this machine's cores and for a cluster.

`study_workers.LocalPool` and `study_cluster.ClusterPool` are pools. A pool is made with one
function, importable by name where the work is done, and calls it for each task. Tasks and results
are pickled. A task that kills its process or goes on past the time limit costs itself alone:
its future fails, the pool goes on.
"""

from concurrent.futures import Future
from typing import Protocol, TypeVar

from lamwright.geometry.errors import LamwrightError

Task = TypeVar("Task", contravariant=True)
Result = TypeVar("Result")


class TaskLost(LamwrightError, RuntimeError):
    """The process that worked at a task ended without an answer, as when memory runs out."""

    exit_code = 3


class OverTime(LamwrightError, TimeoutError):
    """A task that was ended at its time limit."""

    exit_code = 3


class PoolLost(LamwrightError, RuntimeError):
    """The pool itself is gone or cannot be used: no task will be carried out any more."""

    exit_code = 3


class Pool(Protocol[Task, Result]):
    """Carries tasks out, several at a time, in no promised order."""

    @property
    def cores(self) -> int:
        """Tasks that it works at at the same time; may change while a cluster grows."""

    def submit(self, task: Task, /) -> Future[Result]:
        """Have a task carried out; never waits for it.

        The future fails with `TaskLost`, `OverTime`, `PoolLost`, or with what the function raised.
        """

    def stop(self) -> None:
        """End the work at once, whatever is under way; open futures are cancelled or fail."""
