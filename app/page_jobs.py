"""Verdicts as jobs: who waits, who works, who asked, and what is finished on disk.

A job is known by its effort and its design's content (with cards, and the version that computes),
so another layout of the text, another tab, a reload or a restarted server find the same one. It is
finished where its last file lies in the page's cache; a job whose process or server was killed
leaves none, is seen as never begun and begins again when it is asked for.

One process computes coarse verdicts, one after the other, and stays warm; another full ones, anew
for each. Who asks for a newer one gives up what waits for the older ones, of full verdicts also
what is under way; what others ask for too goes on.
"""

import contextlib
import json
import shutil
import threading
from collections.abc import Callable, Hashable, Mapping
from concurrent.futures import Future
from dataclasses import replace
from pathlib import Path
from typing import Any

from lamwright.geometry.design_file import design_hash
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.files import VERDICT_FILE

from .page_coarse import RESULT_FILE, CoarseDesk, coarse_desk
from .page_drawing import Record
from .page_folder import Folder
from .page_job import TOLERANCE, Effort, Job, State, effort_of_id, job_id_of
from .page_outline import Found, outlined
from .page_process import Hired
from .pool import Worker

MOST_KEPT = {"coarse": 200, "full": 30}  # results in the cache: 0.6 MB and some 3 MB each
MOST_FAILED = 64
LIMIT_S = {"coarse": 120.0, "full": 3600.0}


class Refused(LamwrightError, ValueError):
    """A design of which no verdict can be made; with its findings."""

    def __init__(self, found: tuple[Found, ...]) -> None:
        """Keep them."""
        super().__init__("\n".join(one.text for one in found))
        self.found = found


OnChange = Callable[[Job], None]


class Jobs:
    """The jobs of a folder; stop it, best by `with`."""

    def __init__(self, folder: Folder) -> None:
        """Nothing is started before it is asked for."""
        self._folder = folder
        self._lock = threading.RLock()
        self._known: dict[str, Job] = {}  # waiting, running and failed, in the order of asking
        self._listeners: list[OnChange] = []
        self._worker: Worker[CoarseDesk] | None = None
        self._hired: Hired | None = None
        self._run: object = None  # of the hired process
        self._timers: dict[str, threading.Timer] = {}
        self._is_stopped = False

    def __enter__(self) -> "Jobs":
        """The jobs themselves."""
        return self

    def __exit__(self, *_: object) -> None:
        """End the processes, whatever they are doing."""
        self.stop()

    def listen(self, call: OnChange) -> Callable[[], None]:
        """Have each change told, in any thread; gives what ends it."""
        with self._lock:
            self._listeners.append(call)

        def end() -> None:
            with self._lock, contextlib.suppress(ValueError):
                self._listeners.remove(call)

        return end

    def warm(self) -> None:
        """Have the coarse worker start, so that the first verdict need not wait for it."""
        with self._lock:
            self._ready_worker()

    def want(self, effort: Effort, path: str, text: str, owner: Hashable) -> Job:
        """Ask for a verdict.

        Args:
            effort: coarse or full.
            path: name of the design in the folder.
            text: of the design.
            owner: who asks: what it asked for before is given up, see above.

        Raises:
            Refused: the design has faults.
            Outside: a name leads out of the folder.
        """
        one = outlined(self._folder, path, text)
        if one.machine is None or one.section is None:
            raise Refused(one.found)
        due = design_hash(one.machine.design, one.machine.cards)
        job_id = job_id_of(effort, due)
        with self._lock:
            self._give_up(effort, owner, but=job_id)
            job = self.state(job_id)
            if job.state in ("waiting", "running"):
                job = replace(job, owners=job.owners | {owner})
                self._known[job_id] = job
            elif job.state != "done":
                job = Job(
                    *(job_id, effort, "waiting"),
                    **{"path": path, "text": text, "design_hash": due},  # type: ignore[arg-type]
                    owners=frozenset({owner}),
                )
                self._known.pop(job_id, None)
                self._known[job_id] = job
                self._tell(job)
            self._begin(effort)
            return self.state(job_id)

    def state(self, job_id: str) -> Job:
        """A job by its id; of one that is not known, or was interrupted, the state "none".

        Raises:
            Outside: this is no id.
        """
        effort = effort_of_id(job_id)
        with self._lock:
            if job_id in self._known:
                return self._known[job_id]
        is_done = (self.place(job_id) / _last_file(effort)).is_file()
        return Job(job_id, effort, "done" if is_done else "none", share=float(is_done))

    def result(self, job_id: str) -> Record | None:
        """What a finished job says; of one under way its figures, or None."""
        job = self.state(job_id)
        if job.state != "done":
            return job.figures
        place = self.place(job_id)
        with contextlib.suppress(OSError, ValueError, KeyError):
            if effort_of_id(job_id) == "coarse":
                read: Record = json.loads((place / RESULT_FILE).read_text(encoding="utf-8"))
                return read
            from .page_result import full_record

            return full_record(place)
        return None

    def place(self, job_id: str) -> Path:
        """The folder of a job's results.

        Raises:
            Outside: this is no id.
        """
        effort = effort_of_id(job_id)
        return self._folder.cache / effort / job_id.removeprefix(f"{effort}-")

    def cancel(self, job_id: str) -> None:
        """End a job that waits, or a full one under way."""
        with self._lock:
            job = self._known.get(job_id)
            if job is not None and job.state in ("waiting", "running"):
                self._drop(job)
                self._begin(job.effort)

    def leave(self, owner: Hashable) -> None:
        """An owner has gone: nobody waits for its coarse jobs; a full one goes on."""
        with self._lock:
            for job in list(self._known.values()):
                if owner in job.owners:
                    left = replace(job, owners=job.owners - {owner})
                    self._known[job.id] = left
                    if not left.owners and left.state == "waiting" and left.effort == "coarse":
                        self._drop(left)

    def stop(self) -> None:
        """End the processes, whatever they are doing."""
        with self._lock:
            self._is_stopped = True
            self._known.clear()
            self._listeners.clear()
            for timer in self._timers.values():
                timer.cancel()
            worker, hired, self._worker, self._hired = self._worker, self._hired, None, None
        if hired is not None:
            hired.end()
            hired.join()
        if worker is not None:
            worker.stop()

    def _give_up(self, effort: Effort, owner: Hashable, but: str) -> None:
        """An owner wants something newer: what only it waited for is dropped."""
        for job in list(self._known.values()):
            if job.effort != effort or job.id == but or job.state not in ("waiting", "running"):
                continue
            left = replace(job, owners=job.owners - {owner})
            self._known[job.id] = left
            can_end = effort == "full" or job.state == "waiting"
            if not left.owners and can_end:
                self._drop(left)

    def _drop(self, job: Job) -> None:
        if job.state == "running":
            if job.effort == "coarse":
                return  # a second of work, kept for whoever comes back to this design
            if self._hired is not None:
                self._hired.end()
                self._hired = None
        self._end(job, "superseded")

    def _begin(self, effort: Effort) -> None:
        """Let the next waiting job begin, if nothing of its effort is under way."""
        jobs = [job for job in self._known.values() if job.effort == effort]
        waiting = [job for job in jobs if job.state == "waiting"]
        if self._is_stopped or not waiting or any(job.state == "running" for job in jobs):
            return
        job = replace(waiting[0], state="running")
        self._known[job.id] = job
        self._tell(job)
        try:
            if effort == "coarse":
                self._begin_coarse(job)
            else:
                self._begin_full(job)
        except (OSError, ValueError, LamwrightError) as error:
            self._end(job, "failed", str(error))
            return
        if self._known.get(job.id, job).state != "running":
            return  # ended already, as by a worker that was lost at once
        timer = threading.Timer(LIMIT_S[effort], self._over_time, (job.id,))
        timer.daemon = True
        self._timers[job.id] = timer
        timer.start()

    def _ready_worker(self) -> Worker[CoarseDesk]:
        if self._worker is not None and self._worker.is_lost:  # while idle: out of memory?
            self._dismiss()
        if self._worker is None:
            self._worker = Worker(coarse_desk)
        return self._worker

    def _begin_coarse(self, job: Job) -> None:
        worker = self._ready_worker()
        future = worker.submit(
            CoarseDesk.verdict,
            *(self._folder.root, job.path, job.text, job.design_hash, self.place(job.id)),
        )
        future.add_done_callback(lambda done: self._coarse_ended(job.id, worker, done))

    def _coarse_ended(self, job_id: str, worker: Worker[CoarseDesk], done: "Future[None]") -> None:
        from .pool import WorkerLost

        error = done.exception()
        with self._lock:
            job = self._known.get(job_id)
            if self._worker is not worker or job is None or job.state != "running":
                return  # over its time; the same may run again, by another worker
            if isinstance(error, WorkerLost):
                self._dismiss()
            self._end(job, "failed" if error else "done", _said(error))
            self._begin("coarse")

    def _dismiss(self) -> None:
        """Let a lost worker go, the next job gets a new process; not in this thread, maybe its."""
        if self._worker is not None:
            threading.Thread(target=self._worker.stop, daemon=True).start()
            self._worker = None

    def _begin_full(self, job: Job) -> None:
        place = self.place(job.id)
        shutil.rmtree(place, ignore_errors=True)
        place.mkdir(parents=True)
        root = place / ".design"
        copy = self._folder.mirrored(job.path, job.text, root)
        order = {"kind": "full", "root": str(root), "design": str(copy), "out": str(place)}
        order["tolerance"] = TOLERANCE
        self._run = run = object()
        self._hired = Hired(order, lambda said: self._full_told(job.id, run, said))

    def _full_told(self, job_id: str, run: object, said: Mapping[str, Any]) -> None:
        with self._lock:
            job = self._known.get(job_id)
            if self._run is not run or job is None or job.state != "running":
                return  # given up; the same may run again, in another process
            if "phase" in said:
                job = replace(job, phase=str(said["phase"]), share=float(said["share"]))
                self._known[job_id] = job
                self._tell(job)
                return
            if "result" in said:
                job = replace(job, figures=said["result"])
                self._known[job_id] = job
                self._tell(job)
                return
            self._hired = None
            self._end(job, "failed" if "error" in said else "done", said.get("error"))
            self._begin("full")

    def _over_time(self, job_id: str) -> None:
        with self._lock:
            job = self._known.get(job_id)
            if job is None or job.state != "running":
                return
            self._end(job, "failed", f"took longer than {LIMIT_S[job.effort]:g} s")
            worker, hired = None, None
            if job.effort == "coarse":
                worker, self._worker = self._worker, None
            else:
                hired, self._hired = self._hired, None
        if worker is not None:
            worker.stop()
        if hired is not None:
            hired.end()
        with self._lock:
            self._begin(job.effort)

    def _end(self, job: Job, state: State, error: str | None = None) -> None:
        """A job is over; only failed ones are remembered, finished ones lie on disk."""
        if (timer := self._timers.pop(job.id, None)) is not None:
            timer.cancel()
        self._known.pop(job.id, None)
        share = 1.0 if state == "done" else job.share
        ended = replace(job, state=state, error=error, share=share, owners=frozenset())
        ended = replace(ended, text="", figures=None)
        if state == "failed":
            failed = [one.id for one in self._known.values() if one.state == "failed"]
            for old in failed[: max(0, len(failed) + 1 - MOST_FAILED)]:
                del self._known[old]
            self._known[job.id] = ended
        if state == "done":
            self._prune(job.effort)
        self._tell(ended)

    def _prune(self, effort: Effort) -> None:
        """Keep the newest results."""
        with contextlib.suppress(OSError):
            places = list((self._folder.cache / effort).iterdir())
            if len(places) > MOST_KEPT[effort]:
                places.sort(key=lambda place: place.stat().st_mtime)
                under_way = {self.place(job_id) for job_id in self._known}
                for old in places[: len(places) - MOST_KEPT[effort]]:
                    if old not in under_way:
                        shutil.rmtree(old, ignore_errors=True)

    def _tell(self, job: Job) -> None:
        for call in list(self._listeners):
            call(job)


def _last_file(effort: Effort) -> str:
    return RESULT_FILE if effort == "coarse" else VERDICT_FILE


def _said(error: BaseException | None) -> str | None:
    if error is None:
        return None
    if isinstance(error, LamwrightError):
        return str(error)
    return f"a fault of the program: {type(error).__name__}: {error}"
