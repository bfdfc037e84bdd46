"""The points of a flux map on disk, committed one by one as they finish.

An SQLite file in write-ahead mode: a process that is killed at any moment leaves every committed
point and nothing of the others. One process writes; it holds the file's lock as long as it lives,
so that two runs never mix.
"""

import io
import json
import sqlite3
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from types import TracebackType

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.foreseen import Node
from lamwright.solver.types import FloatArray

STORE_FILE = "map.sqlite"
FORM = 1  # of the tables below

_TABLES = """
create table if not exists run (key text primary key, value text not null) without rowid;
create table if not exists point (
    d integer, q integer, waves blob not null, harvest blob not null, primary key (d, q)
) without rowid;
"""


@dataclass(frozen=True, slots=True, eq=False)
class PointRecord:
    """What is kept of a pair of currents."""

    waves: FloatArray  # (4, n_pos): psi_d, psi_q in V s, torque in N m, coenergy in J
    harvest: FloatArray  # any shape, the same at all points; empty where nothing is asked


class PointStore:
    """The store of one map; close it, best by `with`."""

    def __init__(self, folder: Path, run: Mapping[str, object]) -> None:
        """Open or make the store of a run in the folder.

        Args:
            folder: of the results.
            run: what makes the map, by name: design, mesh, grid, version.

        Raises:
            LamwrightError: the file is of another run, in use, or no store.
        """
        self._path = folder / STORE_FILE
        try:
            self._file = sqlite3.connect(self._path, timeout=0.0, isolation_level=None)
            self._begin(run)
        except sqlite3.DatabaseError as error:
            self._file.close()
            busy = "locked" in str(error)
            fault = "in use by another run" if busy else f"no store of a map: {error}"
            remedy = "wait for it, or give another --out" if busy else "remove it"
            raise LamwrightError(f"{self._path}: {fault}; {remedy}") from None
        except BaseException:
            self._file.close()
            raise

    def _begin(self, run: Mapping[str, object]) -> None:
        file = self._file
        file.execute("pragma locking_mode = exclusive")
        file.execute("pragma journal_mode = wal")
        # A commit then outlives the process, and the last ones not a loss of power.
        file.execute("pragma synchronous = normal")
        file.execute("begin immediate")
        for table in _TABLES.split(";"):
            file.execute(table)
        stated = {"form": FORM, **run}
        kept = {key: json.loads(value) for key, value in file.execute("select * from run")}
        if not kept:
            rows = [(key, json.dumps(value)) for key, value in stated.items()]
            file.executemany("insert into run values (?, ?)", rows)
            kept = {key: json.loads(value) for key, value in rows}
        file.execute("commit")
        other = [key for key, value in stated.items() if kept.get(key) != json_like(value)]
        if other:
            raise LamwrightError(
                f"{self._path}: holds points with another {' and '.join(other)}; give another "
                "--out, or remove it"
            )

    def __enter__(self) -> "PointStore":
        """The store itself."""
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """Close the file."""
        self._file.close()

    def points(self) -> dict[Node, PointRecord]:
        """All points kept."""
        return {
            (d, q): PointRecord(_array(waves), _array(harvest))
            for d, q, waves, harvest in self._file.execute("select * from point")
        }

    def keep(self, node: Node, record: PointRecord) -> None:
        """Commit a point."""
        row = (*node, _bytes(record.waves), _bytes(record.harvest))
        self._file.execute("insert into point values (?, ?, ?, ?)", row)


def json_like(value: object) -> object:
    """The value as it comes back from JSON."""
    return json.loads(json.dumps(value))


def _bytes(array: FloatArray) -> bytes:
    stream = io.BytesIO()
    np.save(stream, array, allow_pickle=False)
    return stream.getvalue()


def _array(data: bytes) -> FloatArray:
    array: FloatArray = np.load(io.BytesIO(data), allow_pickle=False)
    return array
