"""Many windows that ask, cancel, leave and come back while workers die: nothing is stuck."""

import contextlib
import os
import random
import signal
import threading
import time
from functools import lru_cache
from pathlib import Path

import pytest
from page_client import DEMO, demo_folder

from lamwright.app import page_jobs
from lamwright.app.page_jobs import Jobs
from lamwright.app.pool import Worker

SECONDS = float(os.environ.get("LAMWRIGHT_STRESS_SECONDS", "15"))
WINDOWS, TEXTS = 6, 12
# A desk that works for some milliseconds, fails, or dies; in a process of its own.
DESK = """
import os, random, time
class CoarseDesk:
    def verdict(self, root, path, text, due, out):
        chance = random.random()
        time.sleep(0.02 * chance)
        if chance > 0.97:
            os._exit(1)
        if chance > 0.94:
            raise ValueError("of the stand-in")
        if chance > 0.5:
            return
        out.mkdir(parents=True, exist_ok=True)
        (out / "result.json").write_text("{}")
"""


class Process:
    """A full verdict's process that tells and ends in a thread of its own."""

    def __init__(self, order, tell) -> None:
        """Start it."""
        self._is_ended = False
        self._tell = tell
        self._thread = threading.Thread(target=self._work, daemon=True)
        self._thread.start()

    def _work(self) -> None:
        for k in range(5):
            time.sleep(0.004)
            if not self._is_ended:
                self._tell({"phase": "field", "share": k / 5})
        if not self._is_ended:
            self._tell(random.choice([{"done": {}}, {"error": "of the stand-in"}]))

    def end(self) -> None:
        """Tell no more."""
        self._is_ended = True

    def join(self) -> None:
        """Wait for the thread."""
        self._thread.join()


@pytest.mark.slow
def test_nothing_is_stuck(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    """Every wish comes to an end, no thread waits for ever, no worker or time limit is left.

    Six windows for 15 s (LAMWRIGHT_STRESS_SECONDS for longer) with twelve designs, coarse and full:
    wishes, cancels, leaving; time limits of 0.01 s; workers killed while idle and at work.
    """
    page = demo_folder(tmp_path)
    (tmp_path / "stress_desk.py").write_text(DESK)
    monkeypatch.syspath_prepend(tmp_path)
    monkeypatch.setenv("PYTHONPATH", f"{tmp_path}{os.pathsep}{os.environ.get('PYTHONPATH', '')}")
    from stress_desk import CoarseDesk  # type: ignore[import-not-found]

    monkeypatch.setattr(page_jobs, "outlined", lru_cache(page_jobs.outlined))
    monkeypatch.setattr(page_jobs, "CoarseDesk", CoarseDesk)
    monkeypatch.setattr(page_jobs, "coarse_desk", CoarseDesk)
    monkeypatch.setattr(page_jobs, "Hired", Process)
    hired: list[Worker[object]] = []

    def worker(make):
        hired.append(Worker(make))
        return hired[-1]

    monkeypatch.setattr(page_jobs, "Worker", worker)
    base = page.folder.text(DEMO)[0]
    texts = [base.replace("gap_mm = 0.4", f"gap_mm = 0.{400 + k}") for k in range(TEXTS)]
    for text in texts:
        page_jobs.outlined(page.folder, DEMO, text)
    before = threading.active_count()
    jobs = Jobs(page.folder)
    told, done = [0], [0] * WINDOWS
    jobs.listen(lambda job: told.__setitem__(0, told[0] + 1))
    end = time.monotonic() + SECONDS
    faults: list[BaseException] = []

    def window(k: int) -> None:
        rng = random.Random(k)
        try:
            while time.monotonic() < end:
                effort = rng.choice(["coarse", "coarse", "full"])
                job = jobs.want(effort, DEMO, rng.choice(texts), f"window {k}")
                jobs.state(job.id)
                jobs.result(job.id)
                chance = rng.random()
                if chance < 0.2:
                    jobs.cancel(job.id)
                elif chance < 0.3:
                    jobs.leave(f"window {k}")
                elif chance < 0.32:
                    jobs._over_time(job.id)
                time.sleep(0.01 * rng.random())
                done[k] += 1
        except BaseException as error:
            faults.append(error)

    threads = [threading.Thread(target=window, args=(k,), daemon=True) for k in range(WINDOWS)]
    for thread in threads:
        thread.start()
    killed = 0
    while time.monotonic() < end:
        time.sleep(0.05)
        with contextlib.suppress(IndexError, ProcessLookupError):
            if not hired[-1].is_lost:
                os.kill(hired[-1].pid, signal.SIGKILL)
                killed += 1
    for thread in threads:
        thread.join(30.0)
    assert faults == []
    assert [thread for thread in threads if thread.is_alive()] == []
    until = time.monotonic() + 30.0
    while any(job.state in ("waiting", "running") for job in list(jobs._known.values())):
        assert time.monotonic() < until, jobs._known
        time.sleep(0.02)
    assert min(done) > 5 * SECONDS
    assert killed > SECONDS
    assert told[0] > 20 * SECONDS
    assert jobs._timers == {}
    jobs.stop()
    while threading.active_count() > before:
        assert time.monotonic() < until, threading.enumerate()
        time.sleep(0.05)
