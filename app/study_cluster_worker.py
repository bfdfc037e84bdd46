"""What a cluster's worker does with a task: have it done by a process of its own.

As on one machine, a design that crashes or hangs then costs itself alone. Without that process it
would take the worker with it, and a scheduler blames all tasks that a lost worker had. The
worker stays free to answer its scheduler, so that one with sixteen threads is as good as sixteen
workers. The process ends with the worker, however that ends.

Nothing here knows the cluster's library: it is what its threads call.
"""

import concurrent.futures
import threading
from collections.abc import Callable
from typing import TypeVar

from .pool import Worker, WorkerLost
from .study_pool import OverTime, PoolLost, TaskLost
from .version import version

Task = TypeVar("Task")
Result = TypeVar("Result")

START_S = 300.0  # a process may take to start: imports from a cold network drive take minutes

_here = threading.local()  # of each thread: its process


def carry_out(call: Callable[[Task], Result], task: Task, limit_s: float, stated: str) -> Result:
    """The function's result for the task, from this thread's process.

    Args:
        call: importable by name here.
        task: what it is given.
        limit_s: time that it may take, in s, without the start of the process.
        stated: version of the program that asks.

    Raises:
        PoolLost: another version is installed here, or no process starts.
        OverTime: the time is up; the process is ended.
        TaskLost: the process ended without an answer.
    """
    if stated != version():
        raise PoolLost(f"lamwright {version()} is installed there, {stated} here")
    worker = _process(call)
    try:
        return worker.submit(_do, call, task).result(limit_s)
    except concurrent.futures.TimeoutError as error:
        if isinstance(error, OverTime) or worker.waiting == 0:
            raise  # the function's own
        _end(worker)
        raise OverTime(f"took longer than the {limit_s:g} s that a design may take") from None
    except WorkerLost:
        _end(worker)
        raise TaskLost("its process ended without an answer; out of memory?") from None


def _process(call: Callable[[Task], Result]) -> Worker[None]:
    """This thread's process, started where there is none; it has imported the function."""
    worker: Worker[None] | None = getattr(_here, "worker", None)
    if worker is None:
        worker = Worker(_no_desk)
        try:
            worker.submit(_know, call).result(START_S)
        except (concurrent.futures.TimeoutError, WorkerLost):
            worker.stop()
            raise TaskLost("its process could not be started") from None
        _here.worker = worker
    return worker


def end_here() -> None:
    """End this thread's process, if there is one."""
    if (worker := getattr(_here, "worker", None)) is not None:
        _end(worker)


def _end(worker: Worker[None]) -> None:
    _here.worker = None
    worker.stop()


def _no_desk() -> None:
    """What a process needs before its first task: nothing."""


def _know(_: None, call: Callable[[Task], Result]) -> None:
    """Unpickling the call has imported its module."""


def _do(_: None, call: Callable[[Task], Result], task: Task) -> Result:
    return call(task)
