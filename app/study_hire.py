"""The pool that is asked for: this machine's cores, or a cluster's.

Nothing heavy is imported before it is needed: a study with a fault is refused at once.
"""

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TypeVar

from lamwright.geometry.errors import LamwrightError

from .pool import spare_cores
from .study_pool import Pool

MOST_WORKERS = 256

Task = TypeVar("Task")
Result = TypeVar("Result")


@dataclass(frozen=True, slots=True)
class PoolWishes:
    """Who is to carry a study out."""

    workers: int | None = None  # processes on this machine; by default one a core
    limit_s: float | None = None  # that a design may take; by default the study's
    cluster: str | None = None  # address of a Dask scheduler, as tcp://10.0.0.5:8786
    scheduler_file: Path | None = None  # that a Dask scheduler wrote
    tls_ca: Path | None = None  # certificate of who signed all others
    tls_cert: Path | None = None  # certificate of this process
    tls_key: Path | None = None  # its key

    @property
    def is_cluster(self) -> bool:
        """Whether others than this machine's cores do the work."""
        return self.cluster is not None or self.scheduler_file is not None


def checked(wishes: PoolWishes) -> PoolWishes:
    """The wishes, if they fit together.

    Raises:
        LamwrightError: with the options that do not.
    """
    if wishes.workers is not None and not 1 <= wishes.workers <= MOST_WORKERS:
        raise LamwrightError(f"--workers {wishes.workers}: accepted 1 to {MOST_WORKERS}")
    if wishes.limit_s is not None and not wishes.limit_s > 0.0:
        raise LamwrightError(f"--time-limit {wishes.limit_s:g}: accepted above 0, in s")
    if wishes.cluster is not None and wishes.scheduler_file is not None:
        raise LamwrightError("--cluster and --scheduler-file name a scheduler; give one of them")
    if wishes.is_cluster and wishes.workers is not None:
        raise LamwrightError(
            "--workers is of this machine's; a cluster's workers are started beside it, see "
            "app/CLUSTER.md"
        )
    files = {
        "--tls-ca": wishes.tls_ca,
        "--tls-cert": wishes.tls_cert,
        "--tls-key": wishes.tls_key,
    }
    missing = [name for name, path in files.items() if path is None]
    if 0 < len(missing) < len(files):
        raise LamwrightError(f"{', '.join(missing)}: not given; TLS takes all three files")
    if not missing and not wishes.is_cluster:
        raise LamwrightError("--tls-ca: of no use without --cluster or --scheduler-file")
    for name, path in files.items():
        if path is not None and not path.is_file():
            raise LamwrightError(f"{name} {path}: no such file")
    return wishes


@contextmanager
def hired(
    call: Callable[[Task], Result],
    wishes: PoolWishes,
    limit_s: float,
    ready: Callable[[], object] | None = None,
) -> "Iterator[Pool[Task, Result]]":
    """The pool while the block runs; its workers are ended after it, whatever they are doing.

    Args:
        call: what is done with a task, importable by name.
        wishes: who does it.
        limit_s: time that a task may take, in s, where the wishes state none.
        ready: what each worker on this machine does before its first task, importable by name.

    Raises:
        LamwrightError: the wishes do not fit together.
        PoolLost: the cluster cannot be reached or used.
    """
    checked(wishes)
    pool = _pool(call, wishes, wishes.limit_s or limit_s, ready)
    try:
        yield pool
    finally:
        pool.stop()


def _pool(
    call: Callable[[Task], Result],
    wishes: PoolWishes,
    limit_s: float,
    ready: Callable[[], object] | None,
) -> "Pool[Task, Result]":
    if wishes.is_cluster:
        from .study_cluster import ClusterPool

        return ClusterPool(call, wishes, limit_s)
    from .study_workers import LocalPool

    return LocalPool(call, wishes.workers or spare_cores() + 1, limit_s, ready)
