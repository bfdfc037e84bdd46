"""One study to one folder: every point of it computed once, `sweep`."""

import time
from collections.abc import Callable
from contextlib import AbstractContextManager, nullcontext
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.postprocess.files import prepared_folder

from .study_hire import PoolWishes, checked, hired
from .study_run import OnRow, carried_out, untold

if TYPE_CHECKING:
    from .ledger_rows import Row
    from .study import Study

# Gives what is to be called for each row, for a study and its number of designs.
Watch = Callable[["Study", int | None], AbstractContextManager[OnRow]]

INTERRUPTED = "interrupted; what is finished is kept: the same command goes on from there"


@dataclass(frozen=True, slots=True)
class SweepReport:
    """What came of a sweep."""

    study: "Study"
    rows: "tuple[Row, ...]"  # of all designs, in the study's order
    computed: int  # of them, by this run
    seconds: float


def unwatched(study: "Study", total: int | None) -> AbstractContextManager[OnRow]:
    """Nobody looks."""
    return nullcontext(untold)


def sweep(
    path: str | Path,
    out: str | Path,
    wishes: PoolWishes | None = None,
    watch: Watch = unwatched,
    *,
    is_retrying: bool = False,
) -> SweepReport:
    """Compute all designs of the study in `path` into the ledger in `out`.

    Args:
        path: study file.
        out: folder, made where it is missing; designs that its ledger has are not computed again.
        wishes: who computes; by default this machine's cores.
        watch: is told of each row.
        is_retrying: compute anew what has failed before.

    Raises:
        DesignError: the study cannot be read; one line for each fault.
        LamwrightError: the folder cannot be written or holds another study, options do not fit
            together, or the cluster cannot be used.
        KeyboardInterrupt: with a line for the user; what is finished stays.
    """
    wishes = checked(wishes or PoolWishes())
    from .study_file import read_study
    from .study_points import counted, points_of

    began = time.perf_counter()
    study = read_study(Path(path))
    planned = counted(study)
    folder = prepared_folder(Path(out))
    from .evaluation import evaluate, imported
    from .ledger import Ledger
    from .study_task import task_of

    computed = 0

    def count(row: "Row", is_known: bool) -> None:
        nonlocal computed
        computed += not is_known
        show(row, is_known)

    try:
        with Ledger.open(folder, study) as ledger:
            # Workers get ready while points and tasks are made; none is hired for nothing.
            ready = imported if ledger.count() < planned else None
            with (
                hired(evaluate, wishes, study.seconds, ready) as pool,
                watch(study, planned) as show,
            ):
                ledger.note("planned", str(planned))
                tasks = (task_of(study, values) for values in points_of(study))
                rows = carried_out(tasks, ledger, pool, count, is_retrying=is_retrying)
    except KeyboardInterrupt:
        raise KeyboardInterrupt(INTERRUPTED) from None
    return SweepReport(study, tuple(rows), computed, time.perf_counter() - began)
