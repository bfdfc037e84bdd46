"""Worker processes: order, errors, death, sharing. Desks here are plain built-in objects."""

import copy
import os
import signal
import subprocess
import sys
import threading
import time
from functools import partial
from pathlib import Path

import pytest

from lamwright.app.pool import Crew, Worker, WorkerLost
from lamwright.app.threads import SINGLE_THREADED
from lamwright.geometry.design_file import read_design
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.winding import winding_table

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"
TIMEOUT = 20.0  # s, far above the 0.1 s a call takes here

needs_copies = pytest.mark.skipif(
    not Path("/proc/self/task").exists(), reason="this system does not tell a process's threads"
)


@pytest.fixture
def hired():
    """Start workers by their desk's maker; they are stopped at the end."""
    workers = []

    def hire(make_desk):
        workers.append(Worker(make_desk))
        return workers[-1]

    yield hire
    for worker in workers:
        worker.stop()


def test_calls_are_served_in_order_on_one_desk(hired):
    """What is put on the desk stays there for later calls."""
    worker = hired(list)
    for item in "abc":
        worker.submit(list.append, item)
    assert worker.submit(list.copy).result(TIMEOUT) == ["a", "b", "c"]


def test_calls_larger_than_a_pipe_do_not_block_the_sender(hired):
    """A megabyte to a busy worker returns at once; a pipe alone holds 64 kB."""
    worker = hired(partial(float, 1.0))
    worker.submit(time.sleep)
    began = time.perf_counter()
    worker.submit(float.__eq__, b"x" * 1_000_000)
    assert not worker.submit(float.__bool__).done()
    assert time.perf_counter() - began < 1.0


def test_results_larger_than_a_pipe_do_not_block_the_worker(hired):
    """A megabyte back that nobody has asked for yet does not hold up the next call."""
    worker = hired(partial(bytes, 1_000_000))
    large = worker.submit(bytes.upper)
    assert worker.submit(bytes.__len__).result(TIMEOUT) == 1_000_000
    assert large.result(TIMEOUT) == bytes(1_000_000)


def test_an_error_comes_back_as_itself(hired):
    """Type and text of an error survive the way back, and the worker goes on."""
    worker = hired(list)
    with pytest.raises(ValueError, match="5 is not in list"):
        worker.submit(list.index, 5).result(TIMEOUT)
    assert worker.submit(list.__len__).result(TIMEOUT) == 0


def test_a_result_that_cannot_be_sent_is_an_error_not_silence(hired):
    """A view of memory cannot be pickled; the caller must not wait for ever."""
    worker = hired(bytes)
    with pytest.raises(TypeError, match="cannot pickle"):
        worker.submit(memoryview).result(TIMEOUT)


def test_death_of_a_worker_fails_what_is_open_and_what_follows(hired):
    """A process that ends while serving: `WorkerLost`, for every call, at once."""
    worker = hired(int)
    with pytest.raises(WorkerLost, match="ended without an answer"):
        worker.submit(os._exit).result(TIMEOUT)
    with pytest.raises(WorkerLost, match="ended without an answer"):
        worker.submit(int.__bool__).result(TIMEOUT)


def test_a_lost_worker_calls_back_without_its_lock(hired):
    """A callback waits for its owner's lock, the owner, who holds it, for the worker's: never both.

    The owner holds its lock all the time; the callback of the lost call waits for it; a call that
    the owner makes meanwhile must come back, as failed.
    """
    owners, waits = threading.Lock(), threading.Event()
    worker = hired(partial(float, 60.0))  # s of sleep

    def called_back(_: object) -> None:
        waits.set()
        with owners:
            pass

    with owners:
        lost = worker.submit(time.sleep)
        lost.add_done_callback(called_back)
        os.kill(worker.pid, signal.SIGKILL)
        assert waits.wait(TIMEOUT)
        answers = []
        thread = threading.Thread(
            target=lambda: answers.append(worker.submit(time.sleep)), daemon=True
        )
        thread.start()
        thread.join(TIMEOUT)
        assert answers, "the call waits for the callback, the callback for the caller"
    assert isinstance(answers[0].exception(TIMEOUT), WorkerLost)


def test_death_of_a_worker_does_not_end_this_process():
    """Where a library has set SIGPIPE to its default, writing to the dead would kill the writer."""
    code = (
        "import os, signal; from lamwright.app.pool import Worker, WorkerLost\n"
        "signal.signal(signal.SIGPIPE, signal.SIG_DFL)\n"
        "w = Worker(int); os.kill(w.pid, signal.SIGKILL)\n"
        "calls = [w.submit(int.__add__, 10**k) for k in range(4000)]\n"
        "print(type(calls[-1].exception(20)).__name__); w.stop()"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True)
    assert (done.returncode, done.stdout) == (0, "WorkerLost\n"), done.stderr


def test_worker_is_deaf_to_the_interrupt_key_from_birth(hired):
    """The signal of the terminal goes to all processes; a starting worker must not print."""
    worker = hired(int)
    os.kill(worker.pid, signal.SIGINT)
    assert worker.submit(int.__bool__).result(TIMEOUT) is False
    os.kill(worker.pid, signal.SIGINT)
    assert worker.submit(int.__bool__).result(TIMEOUT) is False


def test_worker_ends_with_the_process_that_started_it():
    """A caller that is killed leaves nobody behind, not even in the middle of a call."""
    code = (
        "import time; from functools import partial; from lamwright.app.pool import Worker\n"
        "w = Worker(partial(float, 60)); w.submit(time.sleep)\n"
        "print(w.pid, flush=True); time.sleep(60)"
    )
    assert not any(_runs(pid) for pid in _left_by_killed(code))


def _runs(pid):
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    return True


def test_worker_holds_blas_to_one_thread(hired):
    """The variables are set before numpy loads there, whatever the caller has loaded."""
    worker = hired(partial(str, "OPENBLAS_NUM_THREADS"))
    assert SINGLE_THREADED["OPENBLAS_NUM_THREADS"] == "1"
    assert worker.submit(os.getenv).result(TIMEOUT) == "1"


def test_shared_tasks_keep_their_order():
    """Results stand in the order of the tasks, whoever did them; each is counted once."""
    counts = []
    with Crew(partial(int, 7), workers=1) as crew:
        results = crew.share([partial(divmod, k) for k in range(40)], counts.append)
    assert results == [divmod(k, 7) for k in range(40)]
    assert counts == sorted(counts)
    assert counts[-1] == 40


def test_both_processes_take_tasks():
    """The worker is given the first task, this process takes the second."""
    with Crew(os.getpid, workers=1) as crew:
        results = crew.share([partial(max, 0)] * 2, lambda done: None)
        assert results == [crew.workers[0].pid, os.getpid()]


def test_a_worker_takes_shared_tasks_when_its_calls_are_done():
    """While a worker sleeps (for as many seconds as its number), this process does all tasks."""
    with Crew(os.getpid, 1) as crew:
        asleep = crew.start(time.sleep)
        assert crew.share([int] * 3, lambda done: None) == [os.getpid()] * 3
        assert not asleep.done()


def test_calls_go_to_the_least_busy_worker():
    """Of two workers, one asleep, the other one answers every time."""
    with Crew(os.getpid, 2) as crew:
        asleep = crew.start(time.sleep)
        answers = {crew.start(int).result(TIMEOUT) for _ in range(3)}
        assert len(answers) == 1
        assert answers < {worker.pid for worker in crew.workers}
        assert not asleep.done()


def test_a_crew_without_workers_does_it_all():
    """One core: shared tasks, single calls and calls to every desk all happen here."""
    with Crew(list, workers=0) as crew:
        crew.everywhere(list.append, 5)
        assert crew.start(list.copy).result(0) == [5]
        assert crew.share([list.copy] * 2, lambda done: None) == [[5], [5]]


def test_every_desk_is_reached():
    """What is called everywhere is done at the workers' desks and at the own one."""
    with Crew(list, workers=2) as crew:
        crew.everywhere(list.append, 5)
        assert crew.own == [5]
        assert [worker.submit(list.copy).result(TIMEOUT) for worker in crew.workers] == [[5], [5]]


def test_a_failed_task_fails_the_whole():
    """The error of a task is the caller's, also when the worker had it; nobody waits for ever."""
    with Crew(int, workers=1) as crew, pytest.raises(ZeroDivisionError):
        crew.share([partial(divmod, 1)] * 4, lambda done: None)


def test_the_crew_is_gone_after_an_interruption():
    """Whatever ends the block ends the workers, busy or not."""
    with pytest.raises(KeyboardInterrupt):
        _interrupted(pids := [])
    assert not any(_runs(pid) for pid in pids)


def _interrupted(pids):
    with Crew(partial(float, 60.0), workers=2) as crew:
        pids += [worker.pid for worker in crew.workers]
        crew.start(time.sleep)
        raise KeyboardInterrupt


def test_an_error_that_cannot_be_sent_keeps_its_kind(hired):
    """`GeometryError` is made from findings, not from its text: its base class comes back."""
    design = read_design(DEMO)
    odd = design.model_copy(update={"stator": design.stator.model_copy(update={"slots": 25})})
    with pytest.raises(LamwrightError, match=r"stator\.slots = 25: 4 poles give no three"):
        hired(partial(copy.copy, odd)).submit(winding_table).result(TIMEOUT)


# The desk is the module `sys`, on which the process that hires has put something.
KNOWN = """
import os, sys, threading, time
from functools import partial
from lamwright.app.pool import Crew
sys.told = "here"
{first}
with Crew(partial(__import__, "sys"), 2) as crew:
    print(*[worker.submit(hasattr, "told").result(20) for worker in crew.workers])
    print(type(crew.workers[1].submit(getattr, "untold").exception(20)).__name__)
    print(len({{os.getpid(), *(worker.pid for worker in crew.workers)}}))
"""


@needs_copies
def test_workers_are_copies_of_a_process_with_one_thread():
    """They know what it alone has been told, serve on their own, and their errors come back."""
    assert _printed(KNOWN.format(first="")) == ["True True", "AttributeError", "3"]


def test_workers_start_anew_beside_threads():
    """A thread that sleeps is enough: a lock that it held would stay locked in a copy."""
    first = "threading.Thread(target=time.sleep, args=(60,), daemon=True).start()"
    assert _printed(KNOWN.format(first=first)) == ["False False", "AttributeError", "3"]


@needs_copies
def test_copies_end_with_the_process_that_made_them():
    """Killed in the middle of calls it leaves nobody, though the last holds the pipes of all."""
    code = (
        "import time; from functools import partial; from lamwright.app.pool import Crew\n"
        "crew = Crew(partial(float, 60), 2)\n"
        "for worker in crew.workers: worker.submit(time.sleep)\n"
        "print(*[worker.pid for worker in crew.workers], flush=True); time.sleep(60)"
    )
    assert not any(_runs(pid) for pid in _left_by_killed(code))


def _printed(code):
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True)
    assert done.returncode == 0, done.stderr
    return done.stdout.splitlines()


def _left_by_killed(code):
    """Processes whose numbers a caller printed, some time after it was killed."""
    with subprocess.Popen([sys.executable, "-c", code], stdout=subprocess.PIPE) as caller:
        pids = [int(pid) for pid in caller.stdout.readline().split()]
        caller.kill()
    until = time.monotonic() + TIMEOUT
    while any(_runs(pid) for pid in pids) and time.monotonic() < until:
        time.sleep(0.05)
    return pids
