"""Limits of a key's drag, found in a process of their own: the search tries a key 40 to 90 times.

In the server's process it would hold up every outline meanwhile. The newest question is served
first, for a pointer rests on that mark; who no longer waits for an answer is forgotten.
"""

import asyncio
import contextlib
import threading
import time
from concurrent.futures import Future, InvalidStateError
from dataclasses import dataclass, field
from functools import partial

from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import JSONResponse, Response

from lamwright.geometry.errors import LamwrightError

from .page_api import json_object, text_of
from .page_drawing import Record
from .page_folder import Folder
from .page_outline import range_record
from .pool import Worker, WorkerLost

LIMIT_S = 60.0  # of one search; the longest of the gallery's takes 1 s
MOST_WAITING = 64
LOOK_S = 0.1  # between looks whether anybody still waits
GONE = 499  # the status of an answer that nobody reads


class RangeDesk:
    """What a worker has imported; nothing of a design stays in it but its drawings and cards."""

    def limits(self, folder: Folder, path: str, text: str, key: str) -> Record:
        """How far a key may move, as of `range_record`."""
        return range_record(folder, path, text, key)


@dataclass(eq=False, slots=True)
class _Asked:
    path: str
    text: str
    key: str
    answer: "Future[Record]" = field(default_factory=Future)


class Ranges:
    """The searches of a folder's designs; stop it, best by `with`."""

    def __init__(self, folder: Folder) -> None:
        """Nothing is started before it is asked for."""
        self._folder = folder
        self._lock = threading.Lock()  # never held while a worker is called: it has one too
        self._waiting: list[_Asked] = []
        self._running: _Asked | None = None
        self._worker: Worker[RangeDesk] | None = None
        self._is_stopped = False

    def __enter__(self) -> "Ranges":
        """The searches themselves."""
        return self

    def __exit__(self, *_: object) -> None:
        """End the process, whatever it is doing."""
        self.stop()

    def warm(self) -> None:
        """Have the worker start, so that the first mark need not wait for it."""
        self._ready_worker()

    def ask(self, path: str, text: str, key: str) -> "Future[Record]":
        """Ask how far a key may move.

        Raises:
            Outside: the name leads out of the folder.
        """
        self._folder.design_file(path)
        asked = _Asked(path, text, key)
        with self._lock:
            self._waiting.append(asked)
            dropped = self._waiting[:-MOST_WAITING]
            del self._waiting[:-MOST_WAITING]
        for one in dropped:
            one.answer.cancel()
        self._begin()
        return asked.answer

    def forget(self, answer: "Future[Record]") -> None:
        """Nobody waits for an answer any more; a search under way goes on to its end."""
        with self._lock:
            self._waiting = [one for one in self._waiting if one.answer is not answer]
        answer.cancel()

    @property
    def waiting(self) -> int:
        """Number of questions whose search has not begun."""
        return len(self._waiting)

    def stop(self) -> None:
        """End the process, whatever it is doing."""
        with self._lock:
            self._is_stopped = True
            left, self._waiting = self._waiting, []
            worker, self._worker = self._worker, None
        for one in left:
            one.answer.cancel()
        if worker is not None:
            worker.stop()

    def _ready_worker(self) -> Worker[RangeDesk]:
        with self._lock:
            if self._worker is None:
                self._worker = Worker(RangeDesk)
            return self._worker

    def _begin(self) -> None:
        with self._lock:
            if self._running is not None or not self._waiting or self._is_stopped:
                return
            asked = self._running = self._waiting.pop()
        worker = self._ready_worker()
        timer = threading.Timer(LIMIT_S, partial(self._over_time, worker))
        timer.daemon = True
        timer.start()
        done = worker.submit(RangeDesk.limits, self._folder, asked.path, asked.text, asked.key)
        done.add_done_callback(partial(self._ended, asked, worker, timer))

    def _over_time(self, worker: Worker[RangeDesk]) -> None:
        with self._lock:
            if self._worker is worker:
                self._worker = None  # the next one gets a new process
        worker.stop()

    def _ended(
        self,
        asked: _Asked,
        worker: Worker[RangeDesk],
        timer: threading.Timer,
        done: "Future[Record]",
    ) -> None:
        timer.cancel()
        error = done.exception()
        with self._lock:
            self._running = None
            if isinstance(error, WorkerLost) and self._worker is worker:
                self._worker = None
        with contextlib.suppress(InvalidStateError):  # forgotten
            if error is None:
                asked.answer.set_result(done.result())
            else:
                asked.answer.set_exception(error)
        self._begin()


async def range_answer(ranges: Ranges, request: Request) -> Response:
    """The answer to who asks, unless the page has turned to another text and hung up."""
    body = json_object(await request.body())
    path, text, key = (text_of(body, name) for name in ("path", "text", "key"))
    began = time.perf_counter()
    asked = await run_in_threadpool(ranges.ask, path, text, key)
    answer = asyncio.wrap_future(asked)
    while not answer.done():
        await asyncio.wait({answer}, timeout=LOOK_S)
        if not answer.done() and await request.is_disconnected():
            ranges.forget(asked)
            return Response(status_code=GONE)
    if answer.cancelled():
        raise LamwrightError("too many questions at a time; ask again")
    return JSONResponse({**answer.result(), "ms": round(1e3 * (time.perf_counter() - began), 1)})
