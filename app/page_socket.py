"""The page's socket: what is wanted comes in, what becomes of it goes out, both as JSON frames.

The first frame brings the token. A frame that is no JSON object, or asks for nothing that there is,
closes the socket; uvicorn closes it at a frame beyond its bound. Jobs change in other threads:
what is to be told waits in a queue, of a job's progress the last alone, so that a page that reads
slowly costs no memory.
"""

import asyncio
import contextlib
import itertools
from collections.abc import Mapping
from functools import partial

from starlette.concurrency import run_in_threadpool
from starlette.websockets import WebSocket, WebSocketDisconnect

from lamwright.geometry.errors import LamwrightError

from .page_api import BadRequest, json_object, text_of, whole_of
from .page_drawing import Record
from .page_guard import Door
from .page_job import Effort, Job, job_id_of
from .page_jobs import Jobs, Refused
from .version import version

PATIENCE_S = 5.0  # for the token
MOST_OPEN = 32
LONGEST_FRAME = 1 << 20  # bytes
MALFORMED, POLICY, WRONG_TOKEN, TOO_MANY = 1007, 1008, 4403, 1013

_numbers = itertools.count(1)


class Sockets:
    """All sockets of a server."""

    def __init__(self, jobs: Jobs, door: Door) -> None:
        """None is open."""
        self._jobs, self._door = jobs, door
        self._open = 0

    async def serve(self, socket: WebSocket) -> None:
        """One socket, from its beginning to its end."""
        if self._open >= MOST_OPEN:
            await socket.close(TOO_MANY)
            return
        self._open += 1
        try:
            await socket.accept()
            try:
                async with asyncio.timeout(PATIENCE_S):
                    first = json_object(await _frame(socket))
            except TimeoutError:
                await _close(socket, POLICY, "no token came")
                return
            if not self._door.opens(first.get("token")):
                await _close(socket, WRONG_TOKEN, "not the token of this start")
                return
            await _Talk(socket, self._jobs).held()
        except BadRequest as error:
            await _close(socket, MALFORMED, str(error)[:100])
        except WebSocketDisconnect:
            pass
        finally:
            self._open -= 1


class _Talk:
    """What is said on one socket."""

    def __init__(self, socket: WebSocket, jobs: Jobs) -> None:
        self._socket, self._jobs = socket, jobs
        self._owner = f"socket {next(_numbers)}"
        self._watched: dict[str, int | None] = {}  # ticket by job
        self._news: dict[str, Job] = {}  # the last of each job
        self._has_news = asyncio.Event()
        self._loop = asyncio.get_running_loop()

    async def held(self) -> None:
        end = self._jobs.listen(self._heard)
        teller = asyncio.create_task(self._tell())
        try:
            await self._say({"kind": "ready", "version": version()})
            while True:
                await self._answer(json_object(await _frame(self._socket)))
        finally:
            end()
            teller.cancel()
            with contextlib.suppress(asyncio.CancelledError, Exception):
                await teller
            self._jobs.leave(self._owner)

    async def _answer(self, asked: Mapping[str, object]) -> None:
        if "want" in asked:
            await self._want(asked)
        elif "look" in asked:
            await self._look(asked)
        elif "watch" in asked:
            await self._watch(text_of(asked, "watch"))
        elif "cancel" in asked:
            await run_in_threadpool(self._jobs.cancel, text_of(asked, "cancel"))
        else:
            raise BadRequest("accepted want, look, watch or cancel")

    async def _want(self, asked: Mapping[str, object]) -> None:
        ticket, effort = whole_of(asked, "ticket"), effort_of(asked)
        path, text = text_of(asked, "path"), text_of(asked, "text")
        call = partial(self._jobs.want, effort, path, text, self._owner)
        try:
            job = await run_in_threadpool(call)
        except Refused as error:
            found = [{"line": o.line, "key": o.key, "text": o.text} for o in error.found]
            await self._say({"kind": "refused", "ticket": ticket, "findings": found})
            return
        except LamwrightError as error:
            found = [{"line": None, "key": None, "text": str(error)}]
            await self._say({"kind": "refused", "ticket": ticket, "findings": found})
            return
        self._watched[job.id] = ticket
        while len(self._watched) > 200:
            del self._watched[next(iter(self._watched))]
        await self._say({"kind": "job", "ticket": ticket, **job.record})
        # It may have ended before it was watched: its state is told as it is now.
        self._heard(await run_in_threadpool(self._jobs.state, job.id))

    async def _look(self, asked: Mapping[str, object]) -> None:
        """Whether a design's verdict is finished or under way; nothing is begun."""
        ticket, due = whole_of(asked, "ticket"), text_of(asked, "look")
        job = await run_in_threadpool(self._jobs.state, job_id_of("full", due))
        if job.state in ("waiting", "running", "done"):
            self._watched.setdefault(job.id, ticket)
        await self._say({"kind": "job", "ticket": ticket, **job.record})
        self._heard(await run_in_threadpool(self._jobs.state, job.id))

    async def _watch(self, job_id: str) -> None:
        try:
            job = await run_in_threadpool(self._jobs.state, job_id)
        except LamwrightError as error:
            raise BadRequest(str(error)) from None
        self._watched.setdefault(job.id, None)
        await self._say({"kind": "job", "ticket": None, **job.record})
        self._heard(await run_in_threadpool(self._jobs.state, job_id))

    def _heard(self, job: Job) -> None:
        """A job has changed; called in any thread."""
        with contextlib.suppress(RuntimeError):  # the loop has ended
            self._loop.call_soon_threadsafe(self._note, job)

    def _note(self, job: Job) -> None:
        if job.id in self._watched:
            self._news.pop(job.id, None)
            self._news[job.id] = job
            self._has_news.set()

    async def _tell(self) -> None:
        while True:
            await self._has_news.wait()
            self._has_news.clear()
            while self._news:
                job = self._news.pop(next(iter(self._news)))
                await self._say(await run_in_threadpool(self._message, job))
                if job.state in ("done", "failed", "superseded"):
                    self._watched.pop(job.id, None)

    def _message(self, job: Job) -> Record:
        ticket = self._watched.get(job.id)
        if job.state == "done":
            result = self._jobs.result(job.id)
            if result is None:
                failed = {**job.record, "state": "failed", "error": "its result was removed"}
                return {"kind": "failed", "ticket": ticket, **failed}
            return {"kind": "done", "ticket": ticket, **job.record, "result": result}
        kind = job.state if job.state in ("failed", "superseded") else "progress"
        known = {} if job.figures is None else {"result": job.figures}
        return {"kind": kind, "ticket": ticket, **job.record, **known}

    async def _say(self, message: Record) -> None:
        try:
            await self._socket.send_json(message)
        except RuntimeError:  # the library's word for a window that was closed meanwhile
            raise WebSocketDisconnect from None


def effort_of(asked: Mapping[str, object]) -> Effort:
    """The effort that is wanted.

    Raises:
        BadRequest: there is none such.
    """
    wanted = asked.get("want")
    if wanted == "coarse":
        return "coarse"
    if wanted == "full":
        return "full"
    raise BadRequest("want: accepted coarse or full")


async def _close(socket: WebSocket, code: int, why: str) -> None:
    with contextlib.suppress(RuntimeError, WebSocketDisconnect):  # it has gone already
        await socket.close(code, why)


async def _frame(socket: WebSocket) -> str:
    """The next frame.

    Raises:
        BadRequest: it is no text, or too long.
        WebSocketDisconnect: there is none.
    """
    message = await socket.receive()
    if message["type"] == "websocket.disconnect":
        raise WebSocketDisconnect(message.get("code", 1000))
    text = message.get("text")
    if text is None:
        raise BadRequest("accepted frames of text")
    if len(text) > LONGEST_FRAME:
        raise BadRequest("frame too long")
    return str(text)
