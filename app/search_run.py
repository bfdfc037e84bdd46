"""One study to one folder by search: `searched` and `polished` with ledger, pool and progress."""

import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.files import prepared_folder

from .search import Course, searched
from .search_front import on_front
from .search_polish import Polisher, PolishState, begun_polish, polished, raise_if_idle
from .search_polish_state import packed_polish, unpacked_polish
from .search_slopes import KNOWN_FIGURES, axis_motions, design_slopes
from .search_space import search_space
from .search_state import SearchSettings, SearchState, begun_state, packed_state, unpacked_state
from .search_worth import measure_of
from .study_hire import PoolWishes, checked, hired
from .study_run import carried_out
from .sweep import INTERRUPTED, Watch, unwatched

if TYPE_CHECKING:
    from .evaluation import Evaluation
    from .ledger import Ledger
    from .ledger_rows import Row
    from .search_slopes import DesignSlopes
    from .study import Study, Values
    from .study_pool import Pool
    from .study_task import Task

SEARCH, POLISH = "search", "polish"  # names of the states, and origins of rows
# Tries of a member of the front. Some 5 s of a core for slopes, once for each step accepted.
ROUNDS = 6
SLOPES_SECONDS = 600.0  # that the slopes of one design may take, however busy the machine is
LEAST_POPULATION = 4

Told = Callable[[Course], None]


@dataclass(frozen=True, slots=True)
class SearchReport:
    """What came of a search."""

    study: "Study"
    state: SearchState
    polish: PolishState | None
    front: "tuple[Row, ...]"  # along the first goal, its best first
    rows: "tuple[Row, ...]"  # of all designs in the ledger
    computed: int  # of them, by this run
    seconds: float


def search(
    path: str | Path,
    out: str | Path,
    settings: SearchSettings,
    wishes: PoolWishes | None = None,
    watch: Watch = unwatched,
    on_generation: Told = lambda course: None,
) -> SearchReport:
    """Search the study in `path`, or go on with its search, with the ledger in `out`.

    Args:
        path: study file.
        out: folder, made where it is missing.
        settings: how to search; population and seed of a search that goes on are fixed.
        wishes: who computes; by default this machine's cores.
        watch: is told of each row.
        on_generation: is told how far the search has come.

    Raises:
        DesignError: the study cannot be read or searched; one line for each fault.
        LamwrightError: the folder cannot be written or holds another study or search, options do
            not fit together, or the cluster cannot be used.
        KeyboardInterrupt: with a line for the user; what is finished stays.
    """
    _raise_if_bad(settings)
    wishes = checked(wishes or PoolWishes())
    from .study_file import read_study

    began = time.perf_counter()
    study = read_study(Path(path), is_searched=True)
    space = search_space(study)
    if settings.polish:  # refused before anything is computed
        raise_if_idle(space, study.goals, KNOWN_FIGURES)
    folder = prepared_folder(Path(out))
    from .evaluation import evaluate, imported
    from .ledger import Ledger

    try:
        with (
            Ledger.open(folder, study) as ledger,
            hired(evaluate, wishes, study.seconds, imported) as pool,
        ):
            run = _Run(study, settings, ledger, pool, watch)
            state = run.search(on_generation)
            polish = run.polish(state, wishes) if settings.polish else None
            rows, front = run.rows_and_front()
    except KeyboardInterrupt:
        raise KeyboardInterrupt(INTERRUPTED) from None
    seconds = time.perf_counter() - began
    return SearchReport(study, state, polish, front, rows, run.computed, seconds)


def _raise_if_bad(settings: SearchSettings) -> None:
    if settings.population < LEAST_POPULATION or settings.population % 2:
        fault = f"accepted even numbers from {LEAST_POPULATION}"
        raise LamwrightError(f"--population {settings.population}: {fault}")
    if settings.budget < settings.population:
        raise LamwrightError(
            f"--budget {settings.budget}: less than a generation; accepted from "
            f"{settings.population}, or a smaller --population"
        )


class _Run:
    """One search under way."""

    def __init__(
        self,
        study: "Study",
        settings: SearchSettings,
        ledger: "Ledger",
        pool: "Pool[Task, Evaluation]",
        watch: Watch,
    ) -> None:
        self.study, self.settings, self.ledger, self.pool = study, settings, ledger, pool
        self.watch = watch
        self.space = search_space(study)
        self.measure = measure_of(study)
        self.computed = 0

    def search(self, on_generation: Told) -> SearchState:
        kept = self.ledger.state(SEARCH)
        state = begun_state(self.settings)
        if kept is not None:
            state = unpacked_state(kept, self.settings)
        self.ledger.note("planned", str(self.settings.budget))
        with self.watch(self.study, max(0, self.settings.budget - len(state.asked))) as show:
            return searched(
                self.space,
                self.measure,
                lambda values, origin: self.looked(values, origin, show),
                state,
                lambda state: self.ledger.keep_state(packed_state(state), SEARCH),
                on_generation,
                [base_values(self.study)],
            )

    def polish(self, state: SearchState, wishes: PoolWishes) -> PolishState:
        rows = self.known(state.hashes)
        members = self.settings.polish
        kept = unpacked_polish(self.ledger.state(POLISH), len(state.asked), members)
        begun = kept or begun_polish(state, rows, members)
        with (
            hired(design_slopes, wishes, SLOPES_SECONDS) as slopes_pool,
            self.watch(self.study, ROUNDS * len(begun.lines) - len(begun.points)) as show,
        ):
            worker = Polisher(
                self.space,
                self.measure,
                lambda values, origin: self.looked(values, origin, show),
                lambda many: self.slopes(many, slopes_pool),
                lambda values: axis_motions(self.study, self.space, values),
            )
            return polished(
                worker,
                begun,
                state.goals(),
                ROUNDS,
                lambda state: self.ledger.keep_state(packed_polish(state), POLISH),
            )

    def looked(
        self, values: "Sequence[Values]", origin: str, show: "Callable[[Row, bool], None]"
    ) -> "list[Row]":
        from .study_task import task_of

        def count(row: "Row", is_known: bool) -> None:
            self.computed += not is_known
            show(row, is_known)

        tasks = (task_of(self.study, one) for one in values)
        return carried_out(tasks, self.ledger, self.pool, count, origin=origin)

    def slopes(
        self, many: "Sequence[Values]", pool: "Pool[Task, DesignSlopes]"
    ) -> "list[DesignSlopes]":
        from .search_slopes import DesignSlopes
        from .study_pool import PoolLost
        from .study_task import task_of

        futures = [pool.submit(task_of(self.study, values)) for values in many]
        found = []
        for future in futures:
            try:
                found.append(future.result())
            except PoolLost:
                raise
            except Exception as error:  # whatever one design does costs its line alone
                found.append(DesignSlopes(refusal=" ".join(str(error).split())))
        return found

    def known(self, hashes: Sequence[str]) -> "list[Row]":
        rows = [self.ledger.known(design_hash) for design_hash in hashes]
        if None in rows:
            raise LamwrightError(
                f"{self.ledger.path}: lacks designs of its search; give another --out"
            )
        return [row for row in rows if row is not None]

    def rows_and_front(self) -> "tuple[tuple[Row, ...], tuple[Row, ...]]":
        """All rows of the ledger, and those of its front in the order of the first goal.

        Designs of an earlier polish, or of a sweep of the same study, may stand on the front too.
        """
        rows = self.ledger.rows()
        worths = self.measure.all(rows)
        held = [k for k, worth in enumerate(worths) if worth.holds]
        held.sort(key=lambda k: (worths[k].goals, rows[k].hash))  # not by who was finished first
        goals = np.array([worths[k].goals for k in held], dtype=float)
        best = [k for k, is_best in zip(held, on_front(goals), strict=True) if is_best]
        return tuple(rows), tuple(rows[k] for k in best)


def base_values(study: "Study") -> "Values":
    """The base design's own values of the study's keys, as far as the base states them."""
    from lamwright.geometry.design_keys import stated

    from .study_keys import LAYOUT, keys_meant
    from .study_task import machine_of_study

    design = machine_of_study(study).design
    found: dict[str, float | int | str] = {}
    for key in study.keys:
        if key.key.startswith(LAYOUT):
            continue
        values = {stated(design, name) for name in keys_meant(design, key.key)}
        if len(values) == 1 and isinstance(value := values.pop(), int | float | str):
            found[key.key] = value
    return found
