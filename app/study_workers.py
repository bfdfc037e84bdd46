"""A pool of worker processes on this machine.

Each worker is a pebble pool of one process. One pool of several would be simpler, but its
processes share a pipe and its locks: one that is killed while it holds a lock stops all of them
for a minute, and one that is killed while idle breaks the pool. Here either costs at most the
design that the worker had.

Workers are started anew (spawn): gmsh holds global state that no fork should copy, and Windows and
macOS do so anyway. They ignore the interrupt key from birth, the process that asked for them
decides, and they end with it however it ends.
Cost (measured, two cores): 0.2 s until the first answer, then 0.3 ms a task; a worker that was
killed is back after 0.2 s. What the tasks import comes on top.
"""

import contextlib
import multiprocessing
import os
import signal
import threading
from collections import deque
from collections.abc import Callable, Iterator
from concurrent.futures import Future
from concurrent.futures.process import BrokenProcessPool
from functools import partial
from multiprocessing import connection
from typing import TYPE_CHECKING, Generic, TypeVar

from .study_pool import OverTime, PoolLost, TaskLost
from .threads import hold_threads

if TYPE_CHECKING:
    from pebble import ProcessPool

Task = TypeVar("Task")
Result = TypeVar("Result")

_STOPPED = "the pool was stopped"


class LocalPool(Generic[Task, Result]):
    """Worker processes that take the next task when they are free; stop it, best by `with`."""

    def __init__(
        self,
        call: Callable[[Task], Result],
        cores: int,
        limit_s: float | None = None,
        ready: Callable[[], object] | None = None,
    ) -> None:
        """Hire workers; they start with the first tasks, or at once where they have to get ready.

        Args:
            call: what is done with a task, importable by name.
            cores: number of workers.
            limit_s: time that a task may take, in s; the imports before it do not count.
            ready: what each worker does before its first task, importable by name.
        """
        hold_threads()  # inherited; numpy reads it where it is imported
        self._call = call
        self._cores = cores
        self._limit_s = limit_s
        self._lock = threading.RLock()
        self._free = [_Seat(ready) for _ in range(cores)]
        self._seats = tuple(self._free)
        self._waiting: deque[tuple[Task, Future[Result]]] = deque()
        self._under_way: set[Future[Result]] = set()
        self._is_stopped = False
        if ready is not None:
            for seat in self._seats:
                seat.start(_nothing, None, None)

    def __enter__(self) -> "LocalPool[Task, Result]":
        """The pool itself."""
        return self

    def __exit__(self, *_: object) -> None:
        """End the workers, whatever they are doing."""
        self.stop()

    @property
    def cores(self) -> int:
        """Number of workers."""
        return self._cores

    def submit(self, task: Task, /) -> "Future[Result]":
        """Have a task carried out; see `study_pool.Pool`."""
        future: Future[Result] = Future()
        with self._lock:
            if self._is_stopped:
                raise PoolLost(_STOPPED)
            self._waiting.append((task, future))
            if self._free:
                self._hand_out(self._free.pop())
        return future

    def stop(self) -> None:
        """End the workers, whatever they are doing; open futures are cancelled or fail."""
        with self._lock:
            self._is_stopped = True
            for _, future in self._waiting:
                future.cancel()
            self._waiting.clear()
        for seat in self._seats:
            seat.begin_stop()
        for seat in self._seats:
            seat.end_stop()  # ends pebble's threads: nobody answers any more
        for future in self._under_way:
            future.set_exception(PoolLost(_STOPPED))
        self._under_way.clear()

    def _hand_out(self, seat: "_Seat") -> None:
        """Give the next task to a seat that is free; called with the lock."""
        while self._waiting:
            task, future = self._waiting.popleft()
            if future.set_running_or_notify_cancel():
                self._under_way.add(future)
                answer = seat.start(self._call, task, self._limit_s)
                answer.add_done_callback(partial(self._take_in, seat, future))
                return
        self._free.append(seat)

    def _take_in(self, seat: "_Seat", future: "Future[Result]", answer: "Future[Result]") -> None:
        """Pass an answer on, and the next task to its seat; called in a thread of pebble."""
        with self._lock:
            self._under_way.discard(future)
            if not self._is_stopped:
                self._hand_out(seat)
        error = answer.exception()
        if error is None:
            future.set_result(answer.result())
        elif self._is_stopped:
            future.set_exception(PoolLost(_STOPPED))
        else:
            future.set_exception(self._told(error))

    def _told(self, error: BaseException) -> BaseException:
        """The error as `study_pool.Pool` promises it."""
        from pebble import ProcessExpired

        if isinstance(error, ProcessExpired):
            return TaskLost(f"its process {_ending(error.exitcode)}")
        if isinstance(error, BrokenProcessPool):
            return TaskLost("its process ended before it began")
        if isinstance(error, TimeoutError) and error.args[:1] == ("Task timeout",):
            return OverTime(f"took longer than the {self._limit_s:g} s that a design may take")
        return error


class _Seat:
    """One worker process at a time."""

    def __init__(self, ready: Callable[[], object] | None) -> None:
        self._ready = ready
        self._pool: ProcessPool | None = None
        self._spent: list[ProcessPool] = []

    def start(
        self, call: Callable[[Task], Result], task: Task, limit_s: float | None
    ) -> "Future[Result]":
        """Give it a task; a broken pool is replaced by a new one."""
        from pebble import ProcessPool

        if self._pool is not None and not self._pool.active:
            self._spent.append(self._pool)  # cannot be joined here: this may be its own thread
            self._pool = None
        with _born_deaf():
            if self._pool is None:
                spawn = multiprocessing.get_context("spawn")
                self._pool = ProcessPool(
                    1, initializer=_settle, initargs=(self._ready,), context=spawn
                )
            return self._pool.schedule(call, args=(task,), timeout=limit_s)

    def begin_stop(self) -> None:
        if self._pool is not None:
            self._spent.append(self._pool)
        for pool in self._spent:
            pool.stop()  # type: ignore[no-untyped-call]

    def end_stop(self) -> None:
        for pool in self._spent:
            pool.join()


def _settle(ready: Callable[[], object] | None) -> None:
    """What a worker does first."""
    # pebble's handler runs only between two lines of Python, seconds after it was asked to end.
    signal.signal(signal.SIGTERM, signal.SIG_DFL)
    threading.Thread(target=_end_with_parent, daemon=True).start()
    if ready is not None:
        with contextlib.suppress(Exception):  # the first task will tell
            ready()


def _nothing(_: None) -> None:
    """A task that starts a worker."""


def _end_with_parent() -> None:
    parent = multiprocessing.parent_process()
    assert parent is not None
    connection.wait([parent.sentinel])
    os._exit(1)


@contextlib.contextmanager
def _born_deaf() -> Iterator[None]:
    """Processes and threads started in this block never get the interrupt key."""
    if not hasattr(signal, "pthread_sigmask"):
        yield  # Windows: a worker is deaf only once it runs
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def _ending(code: int) -> str:
    """How a process ended, by its exit code."""
    if code >= 0:
        return f"ended with exit code {code}"
    try:
        name = signal.Signals(-code).name
    except ValueError:
        name = f"signal {-code}"
    return f"was killed ({name})" + (", out of memory?" if name == "SIGKILL" else "")
