"""Tasks to rows: what is computed, how often it is tried, what is kept when it ends early."""

from concurrent.futures import Future

import pytest
from study_rows import plain_study
from study_stand_ins import evaluated, stand_in_tasks

from lamwright.app.ledger import Ledger
from lamwright.app.study_pool import OverTime, PoolLost, TaskLost
from lamwright.app.study_run import AHEAD, carried_out
from lamwright.app.study_workers import LocalPool


@pytest.fixture
def ledger(tmp_path):
    with Ledger.open(tmp_path, plain_study()) as opened:
        yield opened


class Bench:
    """A pool that carries tasks out at once, in this process."""

    def __init__(self, call=evaluated, cores=2, fails=()):
        """The first tasks meet the errors in `fails`."""
        self.cores, self.asked, self._call, self._fails = cores, [], call, list(fails)

    def submit(self, task):
        """A future that is done."""
        self.asked.append(task.hash)
        future = Future()
        try:
            if self._fails:
                raise self._fails.pop(0)
            future.set_result(self._call(task))
        except Exception as error:
            future.set_exception(error)
        return future


def test_rows_come_in_the_order_of_the_tasks_and_are_computed_once(ledger):
    """Two tasks with one hash are one design; what the ledger has is not computed again."""
    told = []
    tasks = stand_in_tasks(["a", "b", "c"])
    carried_out(tasks[1:2], ledger, Bench())
    bench = Bench()
    asked = [*tasks, tasks[0], tasks[2]]
    rows = carried_out(asked, ledger, bench, lambda row, is_known: told.append(is_known))
    assert [row.hash for row in rows] == [tasks[k].hash for k in (0, 1, 2, 0, 2)]
    assert sorted(bench.asked) == sorted([tasks[0].hash, tasks[2].hash])
    assert sorted(told) == [False, False, True]


@pytest.mark.parametrize(
    ("error", "reason"),
    [
        (TaskLost("its process was killed (SIGKILL)"), "its process was killed (SIGKILL)"),
        (OverTime("took longer than the 2 s"), "took longer than the 2 s"),
        (ValueError("two\nlines"), "a fault of the program, ValueError: two lines"),
    ],
)
def test_what_breaks_off_is_tried_twice_then_told(ledger, error, reason):
    """Once it may have been the machine; the second time it is filed, and the others are done."""
    first, second, third = stand_in_tasks(["a", "b", "c"])
    rows = carried_out([first, second], ledger, Bench(fails=[error]))
    assert [(row.outcome, row.attempts) for row in rows] == [("done", 2), ("done", 1)]
    rows = carried_out([third], ledger, Bench(fails=[error, error]))
    assert [(row.outcome, row.attempts) for row in rows] == [("failed", 2)]
    assert rows[0].reason == f"{reason}; tried 2 times"


def test_a_failed_row_stays_unless_it_is_to_be_tried_again(ledger):
    """The same command again leaves it; one that asks for it computes it."""
    lost, tasks = TaskLost("its process ended"), stand_in_tasks(["a"])
    carried_out(tasks, ledger, Bench(fails=[lost, lost]))
    assert carried_out(tasks, ledger, bench := Bench())[0].outcome == "failed"
    assert bench.asked == []
    assert carried_out(tasks, ledger, Bench(), is_retrying=True)[0].outcome == "done"
    assert ledger.outcomes() == {"done": 1}


def test_a_lost_pool_ends_it_and_keeps_what_is_finished(ledger):
    """The error is passed on; what came in before, and what waits beside it, is in the ledger."""
    tasks = stand_in_tasks(["a", "b", "c"])
    bench = Bench(cores=5, fails=[PoolLost("scheduler gone")])
    with pytest.raises(PoolLost, match="scheduler gone"):
        carried_out(tasks, ledger, bench)
    assert {row.hash for row in ledger.rows()} == {task.hash for task in tasks[1:]}


def test_the_interrupt_key_keeps_what_is_finished(ledger):
    """It comes while the first row is told; the others that are finished are committed too."""

    def pressed(row, is_known):
        if row.number == 1:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        carried_out(stand_in_tasks("abc"), ledger, Bench(cores=5), pressed)
    assert ledger.count() == 3


def test_the_pool_holds_few_tasks_at_a_time(ledger):
    """A hundred thousand designs are not all made before the first is done."""
    made = []

    def making():
        for task in stand_in_tasks([str(k) for k in range(40)]):
            made.append(ledger.count())
            yield task

    carried_out(making(), ledger, Bench(cores=3))
    ahead = [k - kept for k, kept in enumerate(made)]
    assert max(ahead) <= AHEAD * 3
    assert ledger.count() == 40


def test_rows_of_workers_that_die_are_those_of_workers_that_live(ledger):
    """Real processes; one of ten designs kills its own at the first try, then is done."""
    wishes = [f"die-once {ledger.path.parent / str(k)}" if k == 3 else "" for k in range(10)]
    tasks = stand_in_tasks(wishes)
    with LocalPool(evaluated, 2, 60.0) as pool:
        rows = carried_out(tasks, ledger, pool)
    assert [row.outcome for row in rows] == ["done"] * 10
    assert {k for k, row in enumerate(rows) if row.attempts == 2} >= {3}
    alone = [evaluated(task) for task in tasks]
    assert [row.figures for row in rows] == [one.figures for one in alone]
    ledger.check()
