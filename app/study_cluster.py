"""A pool of the workers of a Dask scheduler; owner of `distributed`.

See `CLUSTER.md` for how scheduler and workers are started. Only the caller's process writes the
ledger: a worker is sent a task and sends back an evaluation, and needs neither the study's folder
nor any file.
"""

import asyncio
import logging
import time
import warnings
from collections.abc import Callable
from concurrent.futures import CancelledError, Future
from pathlib import Path
from typing import TYPE_CHECKING, Any, Generic, TypeVar

from lamwright.geometry.errors import LamwrightError

from .study_cluster_worker import carry_out
from .study_pool import PoolLost, TaskLost
from .version import version

if TYPE_CHECKING:
    from .study_hire import PoolWishes

Task = TypeVar("Task")
Result = TypeVar("Result")

CONNECT_S = 10.0
STOP_S = 1.0
BETWEEN_COUNTS_S = 1.0
# Workers that may be lost with a task in hand before the scheduler gives the task up. Designs run
# in processes of their own, so a lost worker was taken by its machine, and no task is to blame.
ALLOWED_FAILURES = 20
MUST_AGREE = ("dask", "distributed")  # versions, beside Python's own


class ClusterPool(Generic[Task, Result]):
    """The workers of a scheduler; stop it, best by `with`."""

    def __init__(
        self, call: Callable[[Task], Result], wishes: "PoolWishes", limit_s: float
    ) -> None:
        """Connect, and hold the workers that are there to this program's versions.

        Args:
            call: what is done with a task, importable by name on the workers.
            wishes: address or file of the scheduler, TLS files.
            limit_s: time that a task may take, in s.

        Raises:
            LamwrightError: no scheduler answers, or versions differ; one line.
        """
        self._call = call
        self._limit_s = limit_s
        self._place = _place(wishes)
        self._client = _connected(wishes, self._place)
        try:
            _check_versions(self._client, self._place)
            _allow_failures(self._client)
        except BaseException:
            self.stop()
            raise
        self._counted = (-BETWEEN_COUNTS_S, 0)

    def __enter__(self) -> "ClusterPool[Task, Result]":
        """The pool itself."""
        return self

    def __exit__(self, *_: object) -> None:
        """Leave the scheduler."""
        self.stop()

    @property
    def cores(self) -> int:
        """Threads of all workers, as the scheduler knows them now."""
        then, count = self._counted
        now = time.monotonic()
        if now - then > BETWEEN_COUNTS_S:
            try:
                count = sum(self._client.nthreads().values())
            except (OSError, CancelledError):
                count = 0  # the tasks under way tell what is wrong
            self._counted = (now, count)
        return count

    def submit(self, task: Task, /) -> "Future[Result]":
        """Have a task carried out; see `study_pool.Pool`."""
        if self._client.status not in ("running", "connecting"):
            raise PoolLost(f"{self._place}: the scheduler is gone")
        loop = self._client.loop.asyncio_loop
        return asyncio.run_coroutine_threadsafe(self._carried_out(task), loop)

    async def _carried_out(self, task: Task) -> Result:
        from distributed import KilledWorker

        arguments = (self._call, task, self._limit_s, version())
        remote = self._client.submit(carry_out, *arguments, pure=False)
        try:
            result: Result = await remote
        except KilledWorker:
            reason = f"{ALLOWED_FAILURES + 1} workers were lost while they had it"
            raise TaskLost(reason) from None
        except PoolLost as error:
            raise PoolLost(f"{self._place}: {error}; install the same everywhere") from None
        except ModuleNotFoundError as error:
            remedy = "install the same lamwright everywhere"
            raise PoolLost(f"{self._place}: a worker says: {error}; {remedy}") from None
        except CancelledError:  # also asyncio's
            raise PoolLost(f"{self._place}: the scheduler is gone") from None
        return result

    def stop(self) -> None:
        """Leave the scheduler, which drops what no worker has begun."""
        self._client.close(timeout=STOP_S)


def _place(wishes: "PoolWishes") -> str:
    """The scheduler as the user named it."""
    if wishes.cluster is not None:
        return f"--cluster {wishes.cluster}"
    return f"--scheduler-file {wishes.scheduler_file}"


def _connected(wishes: "PoolWishes", place: str) -> Any:
    try:
        from distributed import Client
        from distributed.security import Security
    except ImportError:
        remedy = "install lamwright with its extra, as lamwright[cluster]"
        raise LamwrightError(f"{place}: takes the library distributed; {remedy}") from None
    _silence()
    security = None
    if wishes.tls_ca is not None:
        security = Security(
            tls_ca_file=str(wishes.tls_ca),
            tls_client_cert=str(wishes.tls_cert),
            tls_client_key=str(wishes.tls_key),
            require_encryption=True,
        )
    if wishes.scheduler_file is not None:
        _check_scheduler_file(wishes.scheduler_file, place)
        where = {"scheduler_file": str(wishes.scheduler_file)}
    else:
        where = {"address": str(wishes.cluster)}
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # of versions: they are checked below
            return Client(
                **where,
                security=security,
                timeout=CONNECT_S,
                set_as_default=False,
                name="lamwright",
            )
    except (OSError, ValueError, TypeError, RuntimeError) as error:
        said = " ".join(str(error).split())
        raise LamwrightError(f"{place}: no scheduler can be used there: {said}") from None


def _silence() -> None:
    """Keep the library's loggers from the terminal: they tell what is raised or done again."""
    for name in [*logging.root.manager.loggerDict]:
        if name.partition(".")[0] == "distributed":
            logging.getLogger(name).setLevel(logging.CRITICAL)


def _check_scheduler_file(path: Path, place: str) -> None:
    """Dask would wait for a file that is not there."""
    if not path.is_file():
        raise LamwrightError(
            f"{place}: no such file; start: dask scheduler --scheduler-file {path}"
        )


def _check_versions(client: Any, place: str) -> None:
    """Python, Dask and this program must be the same everywhere.

    Raises:
        LamwrightError: they are not; one line with the first place that differs.
    """
    found = client.get_versions(check=False)
    here = _versions(found["client"])
    others = {"the scheduler": found["scheduler"]}
    others |= {f"worker {address}": told for address, told in found["workers"].items()}
    for who, told in others.items():
        for name, have in _versions(told).items():
            if have != here[name]:
                raise LamwrightError(f"{place}: {who} has {name} {have}, here is {here[name]}")
    for address, told in client.run(version, on_error="return").items():
        if told == version():
            continue
        has = f"says: {told}" if isinstance(told, BaseException) else f"has lamwright {told}"
        remedy = f"install lamwright {version()} there"
        raise LamwrightError(f"{place}: worker {address} {has}; {remedy}")


def _versions(told: Any) -> dict[str, str]:
    """Versions that must agree, by name, from what Dask tells of a process."""
    packages, python = dict(told["packages"]), str(told["host"]["python"])
    agreeing = {name: str(packages.get(name)) for name in MUST_AGREE}
    return {"Python": ".".join(python.split(".")[:2]), **agreeing}


def _allow_failures(client: Any) -> None:
    """Have the scheduler not blame tasks for workers that are lost."""

    def allow(dask_scheduler: Any, least: int = ALLOWED_FAILURES) -> None:
        # Inside, so that it is sent as code: the scheduler may be without lamwright.
        dask_scheduler.allowed_failures = max(least, dask_scheduler.allowed_failures)

    client.run_on_scheduler(allow)
