"""The page's server: addresses, answers, and its life from the first to the last request."""

import contextlib
import logging
import socket
from collections.abc import Awaitable, Callable, Mapping
from functools import partial
from importlib.resources import files
from pathlib import Path
from typing import Any

from starlette.applications import Starlette
from starlette.concurrency import run_in_threadpool
from starlette.exceptions import HTTPException
from starlette.requests import Request
from starlette.responses import FileResponse, JSONResponse, Response
from starlette.routing import Mount, Route, WebSocketRoute
from starlette.staticfiles import StaticFiles

from lamwright.geometry.errors import LamwrightError

from . import page_api
from .page_api import BadRequest, Page, json_object, text_of
from .page_coarse import FIELD_FILE
from .page_drawing import Record
from .page_folder import ChangedOnDisk, Outside
from .page_guard import Door, Guard, TooLarge
from .page_jobs import Jobs
from .page_ranges import Ranges, range_answer
from .page_result import shown_files
from .page_socket import Sockets, effort_of
from .page_tasks import Tasks, ledger_record, pick, release, sweep

STATIC = Path(str(files("lamwright.app"))) / "static"
OCTETS = "application/octet-stream"
INLINE = (".png", ".svg", ".csv", ".json", ".bin")  # what the page shows or reads by itself
STATUS = ((ChangedOnDisk, 409), (Outside, 403), (LamwrightError, 422), (OSError, 422))

Handler = Callable[[Request], Awaitable[Response]]


def page_app(page: Page, door: Door, jobs: Jobs, tasks: Tasks, ranges: Ranges) -> Guard:
    """The whole server, to be run by uvicorn or a test's client."""
    sockets = Sockets(jobs, door)
    routes = [
        Route("/", _index),
        Route("/api/page", _getting(lambda query: page_api.page_record(page))),
        Route("/api/design", _getting(lambda query: page_api.design_record(page, query["path"]))),
        Route("/api/name", _getting(lambda query: page_api.name_record(page, query))),
        *(
            Route(f"/api/{name}", _posting(page, call), methods=["POST"])
            for name, call in (
                ("outline", page_api.outline),
                ("draft", page_api.keep_draft),
                ("discard", page_api.discard_draft),
                ("save", page_api.save),
            )
        ),
        Route("/api/ranges", partial(range_answer, ranges), methods=["POST"]),
        Route("/api/jobs", _asking(jobs), methods=["POST"]),
        Route("/api/jobs/{job}", _job(jobs)),
        Route("/api/jobs/{job}/field", _job_file(jobs, FIELD_FILE)),
        Route("/api/jobs/{job}/file/{name}", _job_file(jobs)),
        WebSocketRoute("/api/work", sockets.serve),
        *_task_routes(page, jobs, tasks),
        Mount("/static", StaticFiles(directory=STATIC, follow_symlink=False)),
    ]
    handlers: dict[Any, Any] = {
        TooLarge: _too_large,
        HTTPException: _http_fault,
        **{kind: _fault for kind, _ in STATUS},
    }
    return Guard(Starlette(routes=routes, exception_handlers=handlers), door)


async def _index(request: Request) -> Response:
    return FileResponse(STATIC / "index.html", media_type="text/html")


def _getting(call: Callable[[Mapping[str, str]], Record]) -> Handler:
    async def answer(request: Request) -> Response:
        try:
            return JSONResponse(await run_in_threadpool(call, request.query_params))
        except KeyError as error:
            raise BadRequest(f"{error.args[0]}: missing in the address") from None

    return answer


def _posting(page: Page, call: Callable[[Page, Mapping[str, object]], Record]) -> Handler:
    async def answer(request: Request) -> Response:
        body = json_object(await request.body())
        return JSONResponse(await run_in_threadpool(call, page, body))

    return answer


def _asking(jobs: Jobs) -> Handler:
    """A verdict asked for without a socket, as by a script."""

    async def answer(request: Request) -> Response:
        body = json_object(await request.body())
        path, text = text_of(body, "path"), text_of(body, "text")
        job = await run_in_threadpool(jobs.want, effort_of(body), path, text, "without socket")
        return JSONResponse(job.record)

    return answer


def _job(jobs: Jobs) -> Handler:
    def record(job_id: str) -> Record:
        job = jobs.state(job_id)
        return {**job.record, "result": jobs.result(job_id)}

    async def answer(request: Request) -> Response:
        return JSONResponse(await run_in_threadpool(record, request.path_params["job"]))

    return answer


def _job_file(jobs: Jobs, fixed: str | None = None) -> Handler:
    """A file of a finished job; those of a full one by name."""

    async def answer(request: Request) -> Response:
        job_id: str = request.path_params["job"]
        name = fixed or request.path_params["name"]
        place = jobs.place(job_id)
        if jobs.state(job_id).state != "done":
            raise HTTPException(404, "this job has no result")
        if not (place / name).is_file() if fixed else name not in shown_files(place):
            raise HTTPException(404, "no such file")
        path = place / name
        if path.suffix not in INLINE:  # a report must not run as this page
            return FileResponse(path, media_type=OCTETS, filename=name)
        return FileResponse(path)

    return answer


def _task_routes(page: Page, jobs: Jobs, tasks: Tasks) -> list[Route]:
    async def released(request: Request) -> Response:
        body = json_object(await request.body())
        return JSONResponse(await run_in_threadpool(release, page, jobs, tasks, body))

    async def stopped(request: Request) -> Response:
        await run_in_threadpool(tasks.stop_one, request.path_params["task"])
        return JSONResponse({"stopped": True})

    async def one(request: Request) -> Response:
        return JSONResponse(tasks.one(request.path_params["task"]))

    return [
        Route("/api/release", released, methods=["POST"]),
        Route("/api/sweep", _posting(page, partial(sweep, tasks)), methods=["POST"]),
        Route("/api/tasks", _getting(lambda query: tasks.all())),
        Route("/api/tasks/{task}", one),
        Route("/api/tasks/{task}/stop", stopped, methods=["POST"]),
        Route("/api/ledger", _getting(lambda query: ledger_record(page, query))),
        Route("/api/pick", _posting(page, pick), methods=["POST"]),
    ]


async def _fault(request: Request, error: Exception) -> Response:
    status = next(status for kind, status in STATUS if isinstance(error, kind))
    said = str(error) if isinstance(error, LamwrightError) else "a file cannot be read or written"
    return JSONResponse({"error": said}, status)


async def _too_large(request: Request, error: Exception) -> Response:
    assert isinstance(error, TooLarge)
    return JSONResponse({"error": str(error)}, error.status, headers={"connection": "close"})


async def _http_fault(request: Request, error: Exception) -> Response:
    assert isinstance(error, HTTPException)
    return JSONResponse({"error": str(error.detail)}, error.status_code)


def listening(port: int) -> socket.socket:
    """A socket of the loopback alone.

    Args:
        port: 0 takes a free one.

    Raises:
        LamwrightError: the port is in use, or not to be had.
    """
    # With its protocol named: asyncio sets TCP_NODELAY on no other, and answers of two parts then
    # wait 40 ms for a delayed acknowledgement (measured).
    own = socket.socket(socket.AF_INET, socket.SOCK_STREAM, socket.IPPROTO_TCP)
    try:
        if hasattr(socket, "SO_EXCLUSIVEADDRUSE"):  # Windows: nobody else may listen there too
            own.setsockopt(socket.SOL_SOCKET, socket.SO_EXCLUSIVEADDRUSE, 1)
        else:  # a port whose last connections are still being forgotten can be had
            own.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        own.bind(("127.0.0.1", port))
        own.listen(64)
    except (OSError, OverflowError) as error:
        own.close()
        reason = "in use, maybe by a page that runs already"
        if not isinstance(error, OSError) or error.errno not in _IN_USE:
            reason = "cannot be had"
        raise LamwrightError(f"--port {port}: {reason}; accepted another, or 0 for any") from None
    return own


def serve(page: Page, door: Door, own: socket.socket) -> None:
    """Serve until the interrupt key; what is under way then ends."""
    with Jobs(page.folder) as jobs, Tasks() as tasks, Ranges(page.folder) as ranges:
        jobs.warm()
        ranges.warm()
        _run(page_app(page, door, jobs, tasks, ranges), own)


def _run(app: Guard, own: socket.socket) -> None:
    import uvicorn

    from .page_patience import is_worth_telling, patient_protocol

    config = uvicorn.Config(
        app,
        http=patient_protocol(),
        ws="websockets-sansio",
        ws_max_size=1 << 20,
        ws_max_queue=8,
        ws_per_message_deflate=False,
        log_level="error",
        access_log=False,
        server_header=False,
        limit_concurrency=128,
        h11_max_incomplete_event_size=32768,
        timeout_graceful_shutdown=2,
    )
    logging.getLogger("uvicorn.error").addFilter(is_worth_telling)
    with contextlib.closing(own):
        uvicorn.Server(config).run(sockets=[own])


def _in_use() -> frozenset[int]:
    import errno

    return frozenset({errno.EADDRINUSE, getattr(errno, "WSAEADDRINUSE", errno.EADDRINUSE)})


_IN_USE = _in_use()
