"""The designs of a study on disk, one row each, committed one by one as they finish.

An SQLite file in write-ahead mode: a process that is killed at any moment leaves every committed
row and nothing of the others. One process writes and holds a lock beside the file as long as it
lives; others may list the rows meanwhile. A design is known by its hash, so that none is computed
or kept twice.
"""

import sqlite3
from collections.abc import Collection, Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path
from types import TracebackType
from typing import TYPE_CHECKING

from lamwright.geometry.errors import LamwrightError

from .ledger_file import (
    LEDGER_FILE,
    TABLES,
    connected,
    is_locked,
    locked,
    packed,
    told,
    unpacked,
)
from .ledger_rows import ERROR, FIGURE, FIXED, KEY, Columns, Row, columns_of, quoted, rows_of
from .ledger_study import KeptDesign, KeptStudy, kept_design, kept_study, stated, texts_of
from .ledger_where import condition_of, ordered
from .version import version

if TYPE_CHECKING:
    from .evaluation import Evaluation
    from .study import Study
    from .study_task import Task

FORM = "1"  # of the tables

Cells = tuple[float | int | str | None, ...]


class Ledger:
    """The rows of one study; made by `open` or `read`, and closed, best by `with`."""

    def __init__(self, path: Path, file: sqlite3.Connection, lock: sqlite3.Connection | None):
        """Keep what is open."""
        self.path = path
        self._file = file
        self._lock = lock
        self._base = b""  # the text that most designs repeat
        self._columns = Columns((), (), ())
        self._version = version()

    @classmethod
    def open(cls, folder: str | Path, study: "Study") -> "Ledger":
        """The ledger of a study for writing, made where there is none.

        Raises:
            LamwrightError: it is of another study, in use, damaged, or cannot be written.
        """
        folder = Path(folder)
        path = folder / LEDGER_FILE
        with told(path):
            lock = locked(folder)
            try:
                ledger = cls(path, connected(path, is_writing=True), lock)
                ledger._begin(study)
            except BaseException:
                lock.close()
                raise
        return ledger

    @classmethod
    def read(cls, folder: str | Path) -> "Ledger":
        """The ledger in a folder for reading, also while another process writes.

        Raises:
            LamwrightError: there is none, or it cannot be read.
        """
        path = Path(folder) / LEDGER_FILE
        if not path.is_file():
            raise LamwrightError(f"{folder}: holds no {LEDGER_FILE}; give the --out of a study")
        with told(path):
            ledger = cls(path, connected(path, is_writing=False), None)
            ledger._base = ledger.study.base_text.encode()
            return ledger

    def _begin(self, study: "Study") -> None:
        file = self._file
        file.execute("pragma journal_mode = wal")
        # A commit outlives the process. The last ones may not outlive a loss of power, and are
        # computed again: 29 us a row instead of 199.
        file.execute("pragma synchronous = normal")
        made = {"form": FORM, **stated(study)}
        with self.together():
            for table in TABLES.split(";"):
                file.execute(table)
            kept = dict(file.execute("select name, value from study"))
            if not kept:
                file.executemany("insert into study values (?, ?)", made.items())
                kept = made
            other = [name for name, value in made.items() if kept.get(name) != value]
            if other:
                raise LamwrightError(
                    f"{self.path}: holds another study: its {' and '.join(other)} differ; give "
                    "another --out, or remove it"
                )
        self.note("name", study.name)
        self._base = study.base_text.encode()

    def __enter__(self) -> "Ledger":
        """The ledger itself."""
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """Close the file."""
        self.close()

    def close(self) -> None:
        """Close the file and let others write."""
        self._file.close()
        if self._lock is not None:
            self._lock.close()

    @property
    def is_written(self) -> bool:
        """Whether a process writes it now."""
        return self._lock is not None or is_locked(self.path.parent)

    @property
    def study(self) -> KeptStudy:
        """What the ledger keeps of its study."""
        with told(self.path):
            texts = dict(self._file.execute("select name, value from study"))
            texts.pop("form", None)
            return kept_study(self.noted("name") or "", texts)

    @property
    def columns(self) -> Columns:
        """The keys, figures and errors that have come up."""
        if self._lock is not None and self._columns.keys:
            return self._columns  # nobody else adds any
        with told(self.path):
            names = self._file.execute("select name from pragma_table_info('design')")
            return columns_of(name for (name,) in names)

    # Reading

    def known(self, design_hash: str) -> Row | None:
        """The row of a design, or None."""
        found = self._selected("where hash = ?", (design_hash,))
        return found[0] if found else None

    def row(self, number: int) -> Row:
        """A row by its number.

        Raises:
            LamwrightError: there is no such row.
        """
        found = self._selected("where number = ?", (number,))
        if not found:
            raise LamwrightError(f"{self.path}: has no design {number}; it has {self.count()}")
        return found[0]

    def rows(
        self,
        where: str | None = None,
        sort: str = "number",
        limit: int | None = None,
        figures: Collection[str] | None = None,
    ) -> list[Row]:
        """Rows that fulfil a condition.

        Args:
            where: a condition, see `ledger_where`; None for all rows.
            sort: name of a column; a minus before it turns the order round. Rows without a value
                there come last.
            limit: of how many are given.
            figures: which the rows get, with their errors; None for all. 100 000 rows take a
                third of the time with 3 figures instead of 37.

        Raises:
            LamwrightError: the condition or the name is not understood.
        """
        columns = self.columns
        end = ordered(where, sort, limit, columns)
        return self._selected(end.sql, end.parameters, columns.with_figures(figures))

    def cells(
        self,
        names: Sequence[str],
        where: str | None = None,
        sort: str = "number",
        limit: int | None = None,
    ) -> list[Cells]:
        """Some columns of rows, as SQL has them: a third of the time that whole rows take.

        Args:
            names: of columns, as users call them.
            where: a condition, as for `rows`; so are `sort` and `limit`.
            sort: name of a column.
            limit: of how many are given.

        Raises:
            LamwrightError: the condition or the name of `sort` is not understood.
        """
        columns = self.columns
        end = ordered(where, sort, limit, columns)
        chosen = [found[0] for name in names if (found := columns.found(name)) is not None]
        assert len(chosen) == len(names), names
        with told(self.path):
            sql = f"select {', '.join(chosen)} from design {end.sql}"
            return self._file.execute(sql, end.parameters).fetchall()

    def best(self, figure: str, sense: str) -> Row | None:
        """The row with the most or least of a figure among those that hold every limit.

        Where none does it is the best of all; None where no row has the figure.
        """
        columns = self.columns
        if figure not in columns.figures:
            return None
        column, turn = quoted(FIGURE + figure), "desc" if sense == "most" else "asc"
        order = f"order by coalesce(passes, 0) desc, {column} {turn}, hash limit 1"
        chosen = columns.with_figures((figure, *self.study.figures))
        found = self._selected(f"where {column} is not null {order}", (), chosen)
        return found[0] if found else None

    def holding(self) -> int:
        """How many rows hold every limit."""
        return self.count_where("passes")

    def reasons(self) -> list[tuple[str, str, int]]:
        """Outcome, reason and number of the rows without figures, each reason once."""
        with told(self.path):
            sql = "select outcome, reason, count(*) from design where outcome <> 'done' "
            return self._file.execute(sql + "group by outcome, reason").fetchall()

    def _selected(
        self, clause: str, parameters: tuple[object, ...], chosen: Columns | None = None
    ) -> list[Row]:
        with told(self.path):
            columns = chosen or self.columns
            sql = f"select {columns.select} from design {clause}"
            return rows_of(columns, self._file.execute(sql, parameters))

    def count(self) -> int:
        """How many rows there are."""
        return sum(self.outcomes().values())

    def count_where(self, where: str | None) -> int:
        """How many rows fulfil a condition."""
        condition = condition_of(where, self.columns)
        with told(self.path):
            sql = f"select count(*) from design where {condition.sql}"
            return int(self._file.execute(sql, condition.parameters).fetchone()[0])

    def outcomes(self) -> dict[str, int]:
        """How many rows have each outcome."""
        with told(self.path):
            sql = "select outcome, count(*) from design group by outcome order by outcome"
            return dict(self._file.execute(sql))

    def design(self, number: int) -> KeptDesign:
        """The design file of a row with the cards and drawings that it names.

        Raises:
            LamwrightError: there is no such row, or its file is damaged.
        """
        self.row(number)
        with told(self.path):
            sql = "select file, texts from design join cards on cards.number = cards "
            found = self._file.execute(sql + "where design.number = ?", (number,)).fetchone()
        return kept_design(unpacked(found[0], self._base), found[1])

    def check(self) -> None:
        """Read all of the file and hold it to its own sums.

        Raises:
            LamwrightError: it is damaged, with the first fault.
        """
        with told(self.path):
            fault = self._file.execute("pragma integrity_check(1)").fetchone()[0]
            if fault == "ok":
                fault = next(iter(self._file.execute("pragma foreign_key_check")), "ok")
            if fault != "ok":
                raise sqlite3.DatabaseError(f"malformed: {fault}")
            for number, file in self._file.execute("select number, file from design"):
                try:
                    unpacked(file, self._base)
                except LamwrightError as error:
                    raise LamwrightError(f"{self.path}: design {number}: {error}") from None

    # Writing

    def record(
        self, task: "Task", evaluation: "Evaluation", origin: str = "sweep", attempts: int = 1
    ) -> Row:
        """Commit what came of a task, and return its row.

        A design that is known already keeps its row, unless that had failed: then it is replaced.
        """
        before = self.known(task.hash)
        if before is not None and before.outcome != "failed":
            return before
        named: dict[str, object] = {
            "hash": task.hash,
            "outcome": evaluation.outcome,
            "reason": evaluation.reason,
            "stage": evaluation.stage,
            "passes": evaluation.passes,
            "seconds": evaluation.seconds,
            "tolerance": task.tolerance,
            "effort": task.effort,
            "version": self._version,
            "origin": origin,
            "attempts": attempts,
            **{KEY + name: value for name, value in task.values.items()},
            **{FIGURE + name: value for name, value in evaluation.figures.items()},
            **{ERROR + name: value for name, value in evaluation.errors.items()},
            "file": packed(task.design_text, self._base),
        }
        if before is not None:
            named["number"] = before.number
        with told(self.path), self.together():
            named["cards"] = self._card_number(texts_of(task.cards, task.drawings))
            self._add_columns(named)
            holes = ", ".join("?" * len(named))
            names = ", ".join(quoted(name) for name in named)
            sql = f"insert or replace into design ({names}) values ({holes})"
            self._file.execute(sql, tuple(named.values()))
        found = self.known(task.hash)
        assert found is not None
        return found

    @contextmanager
    def together(self) -> Iterator[None]:
        """What is written in the block is committed as one, or not at all; may be nested."""
        if self._file.in_transaction:
            yield
            return
        with told(self.path):
            self._file.execute("begin immediate")
            try:
                yield
                self._file.execute("commit")
            except BaseException:
                if self._file.in_transaction:
                    self._file.execute("rollback")
                self._columns = Columns((), (), ())  # new ones are gone
                raise

    def _add_columns(self, named: Mapping[str, object]) -> None:
        new = [name for name in named if not _is_known(name, self.columns)]
        for name in new:
            self._file.execute(f"alter table design add column {quoted(name)}")
        if new or not self._columns.keys:
            self._columns = Columns((), (), ())
            self._columns = self.columns  # read anew

    def _card_number(self, texts: str) -> int:
        self._file.execute("insert or ignore into cards (texts) values (?)", (texts,))
        sql = "select number from cards where texts = ?"
        return int(self._file.execute(sql, (texts,)).fetchone()[0])

    def state(self, name: str = "search") -> bytes | None:
        """What was kept under a name, or None."""
        with told(self.path):
            sql = "select value from state where name = ?"
            found = self._file.execute(sql, (name,)).fetchone()
        return None if found is None else bytes(found[0])

    def keep_state(self, blob: bytes, name: str = "search") -> None:
        """Keep bytes under a name; inside `together`, with the rows written there."""
        with told(self.path):
            self._file.execute("insert or replace into state values (?, ?)", (name, blob))

    def note(self, name: str, value: str) -> None:
        """Keep a word about the study for its readers, as how many designs are planned."""
        with told(self.path):
            self._file.execute("insert or replace into note values (?, ?)", (name, value))

    def noted(self, name: str) -> str | None:
        """What was noted under a name, or None."""
        with told(self.path):
            found = self._file.execute("select value from note where name = ?", (name,)).fetchone()
        return None if found is None else str(found[0])


def _is_known(name: str, columns: Columns) -> bool:
    for start, known in ((KEY, columns.keys), (FIGURE, columns.figures), (ERROR, columns.errors)):
        if name.startswith(start):
            return name.removeprefix(start) in known
    return name in FIXED or name in ("file", "cards")
