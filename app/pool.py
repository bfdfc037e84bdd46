"""Worker processes for one design, and the sharing of its chains between them and this process.

A worker is a process (`process.py`) with pickled calls on its input and pickled results on its
output. It owns one desk, an object made once, on which the calls are methods: what is built there
(meshes, factorisations) stays there.

A worker ignores the interrupt key, also while it starts: the process that asked for it decides.
It ends when its input closes, which happens by itself when that process dies.
Cost: 0.1 s until the first call is served (0.01 s by a copy of this process), then 0.1 ms a call
(measured, without imports).
"""

import contextlib
import os
import pickle
import queue
import signal
import sys
import threading
import traceback
from collections import deque
from collections.abc import Callable, Sequence
from concurrent.futures import Future
from functools import partial
from typing import IO, Concatenate, Generic, NoReturn, ParamSpec, TypeVar, cast

from lamwright.geometry.errors import LamwrightError

from .process import Copy, Process, anew, may_fork

Desk = TypeVar("Desk")
P = ParamSpec("P")
R = TypeVar("R")

_SERVE = "from lamwright.app.pool import serve_anew; serve_anew()"


class WorkerLost(LamwrightError, RuntimeError):
    """A worker process that ended without an answer, as when memory runs out."""

    exit_code = 3


class Worker(Generic[Desk]):
    """A process with a desk of its own; calls are served in the order given."""

    def __init__(self, make_desk: Callable[[], Desk], process: Process | None = None) -> None:
        """Have the desk made by a process that runs `serve`, by default one started anew."""
        self._process = process or anew(_SERVE)
        self._open: deque[Future[object]] = deque()
        self._last: Future[object] | None = None
        self._lost = False
        # Held for the list of open calls alone, never while a future's callbacks run: they take
        # their owner's lock, which another thread may hold that waits to submit here.
        self._lock = threading.Lock()
        self._outbox: queue.SimpleQueue[bytes | None] = queue.SimpleQueue()
        self._outbox.put(pickle.dumps(make_desk, pickle.HIGHEST_PROTOCOL))
        self._threads = [
            threading.Thread(target=work, daemon=True) for work in (self._deliver, self._collect)
        ]
        for thread in self._threads:
            thread.start()

    def submit(
        self, method: Callable[Concatenate[Desk, P], R], *args: P.args, **kwargs: P.kwargs
    ) -> "Future[R]":
        """Call a method of the desk there; the result comes as a future."""
        future: Future[R] = Future()
        call = pickle.dumps((method, args, kwargs), pickle.HIGHEST_PROTOCOL)
        with self._lock:
            self._last = cast("Future[object]", future)  # Future is invariant
            self._open.append(self._last)
            self._outbox.put(call)
            is_lost = self._lost
        if is_lost:
            self._fail_open()
        return future

    @property
    def is_lost(self) -> bool:
        """Whether its process is known to have ended."""
        return self._lost

    @property
    def waiting(self) -> int:
        """Number of calls without an answer yet."""
        return len(self._open)

    def when_free(self, call: Callable[[], None]) -> None:
        """Do `call` once all calls so far have their answers, at once where there are none."""
        if self._last is None:
            call()
        else:
            self._last.add_done_callback(lambda _: call())

    @property
    def pid(self) -> int:
        """Number of the process."""
        return self._process.pid

    def stop(self) -> None:
        """End the process, whatever it is doing."""
        self._process.kill()
        self._process.wait()
        self._outbox.put(None)
        for thread in self._threads:
            thread.join()
        _given(self._process.stdout).close()

    def _deliver(self) -> None:
        """Write the calls; in a thread, since a worker that still imports reads slowly."""
        stream = _given(self._process.stdin)
        if hasattr(signal, "pthread_sigmask"):
            # Where a library has reset it, a write to a process that ended would end this one.
            signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGPIPE})
        with contextlib.suppress(OSError):  # the process has ended; the collector sees it too
            while (call := self._outbox.get()) is not None:
                stream.write(call)
                stream.flush()
        with contextlib.suppress(OSError):  # what is left in the buffer goes nowhere
            stream.close()

    def _collect(self) -> None:
        stream = _given(self._process.stdout)
        try:
            while True:
                result, error = pickle.load(stream)
                future = self._open.popleft()
                if error is None:
                    future.set_result(result)
                else:
                    future.set_exception(error)
        except Exception:  # the end of the process, or bytes that are no answer: nobody may wait
            with self._lock:
                self._lost = True
            self._fail_open()

    def _fail_open(self) -> None:
        with self._lock:
            failed = list(self._open)
            self._open.clear()
        for future in failed:
            lost = WorkerLost("a worker process ended without an answer; out of memory?")
            future.set_exception(lost)


def serve_anew() -> NoReturn:
    """What a worker that is started anew runs."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    # Libraries print to descriptor 1; the results have a copy of it that nobody else knows.
    results = os.fdopen(os.dup(1), "wb")
    os.dup2(2, 1)
    serve(sys.stdin.buffer, results)


def serve(stream: IO[bytes], results: IO[bytes]) -> NoReturn:
    """Make the desk, then serve the calls in `stream` until it closes, which ends the process."""
    calls: queue.SimpleQueue[tuple[Callable[..., object], tuple[object, ...], dict[str, object]]]
    calls = queue.SimpleQueue()
    make_desk = pickle.load(stream)
    # Reading in a thread keeps the sender from waiting, and notices its end at once.
    threading.Thread(target=_read_calls, args=(stream, calls), daemon=True).start()
    desk = make_desk()
    while True:
        results.write(_answer(desk, *calls.get()))
        results.flush()


def _read_calls(stream: IO[bytes], calls: "queue.SimpleQueue[object]") -> None:
    try:
        while True:
            calls.put(pickle.load(stream))
    except (EOFError, OSError):
        os._exit(0)
    except BaseException:  # a call that does not exist here; the sender must not wait
        traceback.print_exc()
        os._exit(1)


def _answer(
    desk: object,
    method: Callable[..., object],
    args: tuple[object, ...],
    kwargs: dict[str, object],
) -> bytes:
    """Pickle of (result, error), one of them None."""
    try:
        return pickle.dumps((method(desk, *args, **kwargs), None), pickle.HIGHEST_PROTOCOL)
    except Exception as error:
        return pickle.dumps((None, _portable(error)), pickle.HIGHEST_PROTOCOL)


def _portable(error: Exception) -> Exception:
    """The error itself where it survives pickling, else its text."""
    try:
        pickle.loads(pickle.dumps(error))
    except Exception:
        if isinstance(error, LamwrightError):
            return LamwrightError(str(error))
        return RuntimeError(f"{type(error).__name__}: {error}")
    return error


class Crew(Generic[Desk]):
    """This process and its workers, each with a desk; the workers are gone at the end."""

    def __init__(self, make_desk: Callable[[], Desk], workers: int) -> None:
        """Start the workers and make this process's own desk."""
        self.workers: list[Worker[Desk]] = []
        try:
            if may_fork():
                self.own = make_desk()  # first: the copies have what is imported for it
                self._hire(make_desk, workers)
            else:
                self._hire(make_desk, workers)  # first: their imports run beside the own ones
                self.own = make_desk()
        except BaseException:
            self._stop()
            raise

    def _hire(self, make_desk: Callable[[], Desk], workers: int) -> None:
        # All copies are made before a worker starts threads here.
        copies = [Copy(serve) if may_fork() else None for _ in range(workers)]
        self.workers += [Worker(make_desk, copy) for copy in copies]

    def __enter__(self) -> "Crew[Desk]":
        """The crew itself."""
        return self

    def __exit__(self, *_: object) -> None:
        """End the workers, whatever they are doing."""
        self._stop()

    def start(
        self, method: Callable[Concatenate[Desk, P], R], *args: P.args, **kwargs: P.kwargs
    ) -> "Future[R]":
        """Call a method at the least busy desk of a worker, or here where there is no worker."""
        if self.workers:
            least_busy = min(self.workers, key=lambda worker: worker.waiting)
            return least_busy.submit(method, *args, **kwargs)
        future: Future[R] = Future()
        future.set_result(method(self.own, *args, **kwargs))
        return future

    def everywhere(
        self, method: Callable[Concatenate[Desk, P], R], *args: P.args, **kwargs: P.kwargs
    ) -> None:
        """Call a method at every desk."""
        for worker in self.workers:
            worker.submit(method, *args, **kwargs)
        method(self.own, *args, **kwargs)

    def share(
        self, tasks: Sequence[Callable[[Desk], R]], on_done: Callable[[int], None]
    ) -> list[R]:
        """Results of all tasks in their order, from the workers and from this process.

        Each takes the next task when it is free (a worker when its calls so far are done), so the
        order of work depends on the machine; the results do not, as long as no task depends on
        another. Tasks must be picklable.
        `on_done` gets the number of finished tasks, always in the caller's thread.
        """
        waiting = deque(enumerate(tasks))
        results: list[Future[R]] = [Future() for _ in tasks]

        def hand_out(worker: Worker[Desk]) -> None:
            with contextlib.suppress(IndexError):
                k, task = waiting.popleft()
                worker.submit(_do, task).add_done_callback(lambda done: take_in(worker, k, done))

        def take_in(worker: Worker[Desk], k: int, done: "Future[R]") -> None:
            error = done.exception()
            if error is not None:
                results[k].set_exception(error)
                return
            hand_out(worker)
            results[k].set_result(done.result())

        for worker in self.workers:
            worker.when_free(partial(hand_out, worker))
        with contextlib.suppress(IndexError):
            while True:
                k, task = waiting.popleft()
                results[k].set_result(task(self.own))
                on_done(sum(result.done() for result in results))
        for result in results:
            result.result()
            on_done(sum(result.done() for result in results))
        return [result.result() for result in results]

    def _stop(self) -> None:
        for worker in self.workers:
            worker.stop()


def _do(desk: Desk, task: Callable[[Desk], R]) -> R:
    return task(desk)


def spare_cores() -> int:
    """Cores that this process may use beside the one it runs on."""
    if hasattr(os, "sched_getaffinity"):  # Linux only
        return len(os.sched_getaffinity(0)) - 1
    return (os.cpu_count() or 1) - 1


def _given(stream: IO[bytes] | None) -> IO[bytes]:
    assert stream is not None  # both ends are pipes
    return stream
