"""Worker processes of a study: what one design costs the others, and who outlives whom."""

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
import study_deeds
from study_deeds import misbehaving, noted, slept

from lamwright.app.study_pool import OverTime, PoolLost, TaskLost
from lamwright.app.study_workers import LocalPool

LIMIT_S = 2.0
PATIENCE_S = 60.0  # far above any busy machine: a test fails by it only where it would hang


@pytest.fixture(scope="module")
def pool():
    with LocalPool(misbehaving, 2, LIMIT_S) as hired:
        yield hired


def test_a_crash_a_hang_and_an_error_cost_their_own_task_alone(pool):
    """Of ten tasks under way together three go wrong, each in its way; seven are done."""
    wishes = ["a", "die", "b", "hang", "c", "raise broken off", "d", "e", "f", "g"]
    futures = {wish: pool.submit(wish) for wish in wishes}
    errors = {wish: future.exception(PATIENCE_S) for wish, future in futures.items()}
    told = {wish: error for wish, error in errors.items() if error is not None}
    assert set(told) == {"die", "hang", "raise broken off"}
    assert isinstance(told["die"], TaskLost)
    assert str(told["die"]) == "its process was killed (SIGKILL), out of memory?"
    assert isinstance(told["hang"], OverTime)
    assert str(told["hang"]) == "took longer than the 2 s that a design may take"
    assert isinstance(told["raise broken off"], ValueError)
    assert futures["g"].result() == "g done"


@pytest.mark.parametrize(
    ("wish", "said"),
    [("exit 7", "its process ended with exit code 7"), ("leave", "3")],
)
def test_a_task_that_ends_its_process_is_told(pool, wish, said):
    """By the system's call, or by Python's exit, which a worker survives."""
    assert str(pool.submit(wish).exception(PATIENCE_S)) == said
    assert pool.submit("next").result(PATIENCE_S) == "next done"


def test_workers_get_ready_before_any_task(monkeypatch, tmp_path):
    """Each of both notes its process at once; what fails there is left to the first task."""
    monkeypatch.setenv("NOTED", str(tmp_path))
    with LocalPool(slept, 2, LIMIT_S, noted) as hired:
        ends = time.monotonic() + PATIENCE_S
        while len(found := list(tmp_path.iterdir())) < 2:
            assert time.monotonic() < ends
            time.sleep(0.01)
        assert str(hired.submit(0.0).result(PATIENCE_S)) in {file.name for file in found}


def test_a_worker_killed_while_idle_is_replaced():
    """Pebble takes its pool for broken then: the next task finds a new one, or is told lost."""
    with LocalPool(slept, 1) as hired:
        first = hired.submit(0.0).result(PATIENCE_S)
        os.kill(first, signal.SIGKILL)
        if (error := hired.submit(0.0).exception(PATIENCE_S)) is not None:
            assert str(error) == "its process ended before it began"
        assert hired.submit(0.0).result(PATIENCE_S) != first


def test_all_cores_work_at_the_same_time():
    """Two tasks that sleep longer than their start takes are in two processes."""
    with LocalPool(slept, 2) as hired:
        futures = [hired.submit(1.0) for _ in range(2)]
        assert len({future.result(PATIENCE_S) for future in futures}) == 2


def test_a_stopped_pool_leaves_nobody_waiting():
    """Under way, waiting and new tasks are all told; the processes are gone."""
    hired = LocalPool(slept, 1)
    worker = hired.submit(0.0).result(PATIENCE_S)
    under_way, waiting = hired.submit(1000.0), hired.submit(0.0)
    while not under_way.running():
        time.sleep(0.01)
    hired.stop()
    assert isinstance(under_way.exception(PATIENCE_S), PoolLost)
    assert waiting.cancelled()
    with pytest.raises(PoolLost, match="the pool was stopped"):
        hired.submit(0.0)
    assert not _runs(worker)


@pytest.mark.skipif(not Path("/proc/self/status").exists(), reason="Linux tells a process' masks")
def test_workers_are_deaf_to_the_interrupt_key_from_birth():
    """It reaches the whole process group; one process decides what it means."""
    with LocalPool(slept, 1) as hired:
        worker = hired.submit(0.0).result(PATIENCE_S)
        status = Path(f"/proc/{worker}/status").read_text()
        ignored = int(status.split("SigIgn:")[1].split()[0], 16)
        blocked = int(status.split("SigBlk:")[1].split()[0], 16)
        bit = 1 << (signal.SIGINT - 1)
        assert ignored & bit
        assert blocked & bit  # from before its first line of Python on


def test_killed_in_the_middle_of_tasks_it_leaves_nobody():
    """Kill -9 of the coordinator alone: workers that would have worked on end by themselves."""
    code = (
        "import sys, time\n"
        "from study_deeds import slept\n"
        "from lamwright.app.study_workers import LocalPool\n"
        "pool = LocalPool(slept, 2)\n"
        "first = [pool.submit(0.5) for _ in range(2)]\n"
        "pids = [one.result() for one in first]\n"
        "busy = [pool.submit(1000.0) for _ in range(2)]\n"
        "print(*pids, flush=True)\n"
        "time.sleep(1000.0)\n"
    )
    paths = [*sys.path, str(Path(study_deeds.__file__).parent)]
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(path for path in paths if path)}
    with subprocess.Popen(
        [sys.executable, "-c", code], stdout=subprocess.PIPE, text=True, env=environment
    ) as caller:
        assert caller.stdout is not None
        workers = [int(pid) for pid in caller.stdout.readline().split()]
        time.sleep(0.3)  # both are in their long tasks
        assert len(workers) == 2
        assert all(_runs(pid) for pid in workers)
        caller.kill()
    ends = time.monotonic() + PATIENCE_S
    while any(_runs(pid) for pid in workers) and time.monotonic() < ends:
        time.sleep(0.05)
    assert not any(_runs(pid) for pid in workers)


def _runs(pid):
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    return True
