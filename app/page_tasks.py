"""What takes long and leaves files in the folder: releases and sweeps, and the rows of a sweep.

Each is a process of its own, as `page_process` says. A sweep's rows are read from its ledger, by
whoever computes them: a sweep started in a terminal is watched in the same way. The list of tasks
is the running server's; what they have finished lies in the folder.
"""

import secrets
import threading
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any, Literal

from lamwright.geometry.design_file import design_hash
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.files import VERDICT_FILE

from .page_api import BadRequest, Page, flag_of, maybe_text_of, text_of, whole_of
from .page_drawing import Record
from .page_folder import Folder
from .page_job import job_id_of
from .page_jobs import Jobs
from .page_outline import outlined
from .page_process import Hired

MOST_TASKS = 50  # remembered
MOST_ROWS = 500  # of one answer
Kind = Literal["release", "sweep"]


@dataclass(frozen=True, slots=True)
class Task:
    """A release or sweep."""

    id: str
    kind: Kind
    folder: str  # name of where its files go
    state: Literal["running", "done", "failed", "stopped"] = "running"
    phase: str = ""
    share: float = 0.0
    error: str | None = None
    done: Mapping[str, Any] | None = None

    @property
    def record(self) -> Record:
        """As the page gets it."""
        return {
            "task": self.id,
            "kind": self.kind,
            "folder": self.folder,
            "state": self.state,
            "phase": self.phase,
            "share": self.share,
            "error": self.error,
            "result": None if self.done is None else dict(self.done),
        }


class Tasks:
    """The tasks of a server; stop them, best by `with`."""

    def __init__(self) -> None:
        """None yet."""
        self._lock = threading.Lock()
        self._tasks: dict[str, Task] = {}
        self._hired: dict[str, Hired] = {}
        self._count = 0
        self._start = secrets.token_hex(8)  # another server gives the same numbers

    def __enter__(self) -> "Tasks":
        """The tasks themselves."""
        return self

    def __exit__(self, *_: object) -> None:
        """End all of them; what a sweep has finished stays."""
        with self._lock:
            hired = list(self._hired.values())
        for one in hired:
            one.end()
            one.join()

    def start(self, kind: Kind, folder: str, order: Mapping[str, Any]) -> Task:
        """Begin a task.

        Raises:
            LamwrightError: another one writes to the same folder.
        """
        with self._lock:
            if any(t.folder == folder and t.state == "running" for t in self._tasks.values()):
                raise LamwrightError(f"{folder}: a task is at work there; wait for it, or stop it")
            self._count += 1
            task = Task(f"task-{self._count}", kind, folder)
            self._tasks[task.id] = task
            for old in list(self._tasks)[: max(0, len(self._tasks) - MOST_TASKS)]:
                if self._tasks[old].state != "running":
                    del self._tasks[old]
            self._hired[task.id] = Hired(
                order, lambda said: self._told(task.id, said), is_asked=kind == "sweep"
            )
        return task

    def one(self, task_id: str) -> Record:
        """A task.

        Raises:
            LamwrightError: there is none such.
        """
        with self._lock:
            if task_id not in self._tasks:
                raise LamwrightError("no such task since the page was started")
            return self._tasks[task_id].record

    def all(self) -> Record:
        """All that are remembered, the newest last, and of which start their numbers are."""
        with self._lock:
            tasks = [task.record for task in self._tasks.values()]
        return {"tasks": tasks, "start": self._start}

    def stop_one(self, task_id: str) -> None:
        """End a task; a sweep goes on from its finished rows when it is started again."""
        self.one(task_id)
        with self._lock:
            hired = self._hired.pop(task_id, None)
            if hired is not None:
                hired.end()
                self._tasks[task_id] = replace(self._tasks[task_id], state="stopped")

    def _told(self, task_id: str, said: Mapping[str, Any]) -> None:
        with self._lock:
            task = self._tasks.get(task_id)
            if task is None or task.state != "running":
                return
            if "phase" in said:
                task = replace(task, phase=str(said["phase"]), share=float(said["share"]))
            else:
                self._hired.pop(task_id, None)
                error = said.get("error")
                state: Literal["failed", "done"] = "failed" if error else "done"
                task = replace(task, state=state, error=error, done=said.get("done"), share=1.0)
            self._tasks[task_id] = task


def release(page: Page, jobs: Jobs, tasks: Tasks, body: Mapping[str, object]) -> Record:
    """Begin a release of a saved design; its full verdict is taken where it is known.

    Raises:
        LamwrightError: the design has faults.
    """
    path = text_of(body, "path")
    out = _out(page.folder, body, f"{Path(path).stem}-release", path)
    text = page.folder.text(path)[0]
    one = outlined(page.folder, path, text)
    if one.machine is None or one.section is None:
        raise LamwrightError("\n".join(found.text for found in one.found))
    due = design_hash(one.machine.design, one.machine.cards)
    verdict = jobs.place(job_id_of("full", due)) / VERDICT_FILE
    order = {
        "kind": "release",
        "root": str(page.folder.root),
        "design": str(page.folder.design_file(path)),
        "out": str(page.folder.file(out)),
        "verdict": str(verdict) if verdict.is_file() else None,
        "despite_limits": flag_of(body, "despite_limits"),
    }
    return tasks.start("release", out, order).record


def sweep(tasks: Tasks, page: Page, body: Mapping[str, object]) -> Record:
    """Begin or go on with the sweep of a study file."""
    path = text_of(body, "path")
    out = _out(page.folder, body, f"{Path(path).stem}-sweep", path)
    study = page.folder.design_file(path)
    base = _base_of(page.folder, path)
    if base is not None:
        page.folder.name_of(study.parent / base)
        page.folder.keep_inside(*_named(page.folder, study.parent / base))
    root = str(page.folder.root)
    order = {"kind": "sweep", "root": root, "study": str(study), "out": str(page.folder.file(out))}
    return tasks.start("sweep", out, order).record


def ledger_record(page: Page, query: Mapping[str, str]) -> Record:
    """Rows of a ledger after a number, at most 500, with what its study asks for.

    A study that was not swept yet, or whose sweep is about to begin, has none: its study is None.

    Raises:
        BadRequest: the number is none.
        LamwrightError: the ledger cannot be read.
    """
    from .ledger import Ledger
    from .ledger_file import LEDGER_FILE, is_locked

    since = query.get("since", "0")
    if not (since.isascii() and since.isdigit()) or len(since) > 12:
        raise BadRequest("since: accepted a whole number from 0")
    folder = _ledger_folder(page.folder, query["folder"])
    none: Record = {"study": None, "rows": [], "total": 0, "planned": None, "is_written": False}
    if not (folder / LEDGER_FILE).is_file():
        return none
    try:
        ledger = Ledger.read(folder)
    except LamwrightError:
        if is_locked(folder):  # its tables are being made
            return {**none, "is_written": True}
        raise
    with ledger:
        study = ledger.study
        rows = ledger.rows(f"number > {int(since)}", limit=MOST_ROWS)
        planned = ledger.noted("planned")
        return {
            "study": {
                "name": study.name,
                "keys": list(study.keys),
                "goals": [{"figure": f, "sense": sense} for f, sense in study.goals],
                "limits": [{"figure": f, "least": lo, "most": hi} for f, lo, hi in study.limits],
                "effort": study.effort,
            },
            "rows": [
                {
                    "number": row.number,
                    "outcome": row.outcome,
                    "reason": row.reason,
                    "passes": row.passes,
                    "seconds": row.seconds,
                    "values": dict(row.values),
                    "figures": dict(row.figures),
                    "errors": dict(row.errors),
                }
                for row in rows
            ],
            "total": ledger.count(),
            "planned": int(planned) if planned and planned.isdigit() else None,
            "is_written": ledger.is_written,
        }


def pick(page: Page, body: Mapping[str, object]) -> Record:
    """The design of a ledger's row as text, and a free name for it beside the study's base.

    There the names of its cards hold.
    """
    from .ledger import Ledger

    folder, number = text_of(body, "folder"), whole_of(body, "row")
    with Ledger.read(_ledger_folder(page.folder, folder)) as ledger:
        row, design = ledger.row(number), ledger.design(number)
        name = ledger.study.name
    study = maybe_text_of(body, "study")
    path = None if study is None else _free_name(page.folder, study, number)
    values = dict(row.values)
    return {"text": design.text, "values": values, "study": name, "row": number, "path": path}


def _ledger_folder(folder: Folder, name: str) -> Path:
    """The folder of a ledger whose file is no link that leads outside."""
    from .ledger_file import LEDGER_FILE

    return folder.file(f"{folder.name_of(folder.file(name))}/{LEDGER_FILE}").parent


def _free_name(folder: Folder, study: str, number: int) -> str:
    """Of a row's design; that of the study's base, then the row's number."""
    path = folder.design_file(study)
    base = _base_of(folder, study)
    if base is None:
        raise LamwrightError(f"{study}: names no base; accepted the study's file")
    named = folder.name_of(path.parent / base)
    stem = f"{named.removesuffix('.toml')}-row{number}"
    names = (f"{stem}{more}.toml" for more in ("", *(f"-{k}" for k in range(2, 1000))))
    return next(name for name in names if not folder.design_file(name).exists())


def _out(folder: Folder, body: Mapping[str, object], usual: str, path: str) -> str:
    """Name of the folder for the results, beside the file that they are of."""
    stated = maybe_text_of(body, "out")
    name = stated or (Path(path).parent / usual).as_posix()
    folder.new_folder(name)
    return name


def _base_of(folder: Folder, study: str) -> str | None:
    import tomllib

    try:
        base = tomllib.loads(folder.text(study)[0]).get("base")
    except (ValueError, RecursionError):
        return None  # its reader says what is wrong
    return base if isinstance(base, str) else None


def _named(folder: Folder, path: Path) -> tuple[str, str]:
    name = folder.name_of(path)
    return name, folder.text(name)[0]
