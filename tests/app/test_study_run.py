"""Tasks to rows: what is computed, how often it is tried, what is kept when it ends early."""

from concurrent.futures import Future

import pytest
from study_stand_ins import evaluated, stand_in_tasks

from lamwright.app.study_pool import OverTime, PoolLost, TaskLost
from lamwright.app.study_run import AHEAD, carried_out


class Notebook:
    """A ledger in memory."""

    def __init__(self):
        """Empty."""
        self.kept = {}

    def known(self, design_hash):
        """The row of a design, or None."""
        return self.kept.get(design_hash)

    def record(self, task, evaluation, origin="sweep", attempts=1):
        """Keep a row."""
        number = len(self.kept) + 1
        self.kept[task.hash] = Line(number, task, evaluation, origin, attempts)
        return self.kept[task.hash]


class Line:
    """A row."""

    def __init__(self, number, task, evaluation, origin, attempts):
        """Of a task."""
        self.number, self.hash, self.values = number, task.hash, task.values
        self.outcome, self.reason = evaluation.outcome, evaluation.reason
        self.figures, self.passes = evaluation.figures, evaluation.passes
        self.origin, self.attempts = origin, attempts


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


def test_rows_come_in_the_order_of_the_tasks_and_are_computed_once():
    """Two tasks with one hash are one design; what the ledger has is not computed again."""
    notebook, told = Notebook(), []
    tasks = stand_in_tasks(["a", "b", "c"])
    carried_out(tasks[1:2], notebook, Bench())
    bench = Bench()
    rows = carried_out(
        [*tasks, tasks[0], tasks[2]], notebook, bench, lambda row, known: told.append(known)
    )
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
def test_what_breaks_off_is_tried_twice_then_told(error, reason):
    """Once it may have been the machine; the second time it is filed, and the others are done."""
    once, twice = Notebook(), Notebook()
    tasks = stand_in_tasks(["a", "b"])
    rows = carried_out(tasks, once, Bench(fails=[error]))
    assert [(row.outcome, row.attempts) for row in rows] == [("done", 2), ("done", 1)]
    rows = carried_out(tasks[:1], twice, Bench(cores=1, fails=[error, error]))
    assert [(row.outcome, row.attempts) for row in rows] == [("failed", 2)]
    assert rows[0].reason == f"{reason}; tried 2 times"


def test_a_failed_row_stays_unless_it_is_to_be_tried_again():
    """The same command again leaves it; one that asks for it computes it."""
    notebook, lost = Notebook(), TaskLost("its process ended")
    tasks = stand_in_tasks(["a"])
    carried_out(tasks, notebook, Bench(fails=[lost, lost]))
    assert carried_out(tasks, notebook, bench := Bench())[0].outcome == "failed"
    assert bench.asked == []
    assert carried_out(tasks, notebook, Bench(), is_retrying=True)[0].outcome == "done"


def test_a_lost_pool_ends_it_and_keeps_what_is_finished():
    """The error is passed on; what came in before, and what waits beside it, is in the ledger."""
    notebook = Notebook()
    tasks = stand_in_tasks(["a", "b", "c"])
    bench = Bench(cores=5, fails=[PoolLost("scheduler gone")])
    with pytest.raises(PoolLost, match="scheduler gone"):
        carried_out(tasks, notebook, bench)
    assert set(notebook.kept) == {task.hash for task in tasks[1:]}


def test_the_interrupt_key_keeps_what_is_finished():
    """It comes while the first row is told; the others that are finished are committed too."""
    notebook = Notebook()

    def pressed(row, is_known):
        if len(notebook.kept) == 1:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        carried_out(stand_in_tasks("abc"), notebook, Bench(cores=5), pressed)
    assert len(notebook.kept) == 3


def test_the_pool_holds_few_tasks_at_a_time():
    """A hundred thousand designs are not all made before the first is done."""
    made, notebook = [], Notebook()

    def making():
        for task in stand_in_tasks([str(k) for k in range(40)]):
            made.append(len(notebook.kept))
            yield task

    carried_out(making(), notebook, Bench(cores=3))
    ahead = [k - kept for k, kept in enumerate(made)]
    assert max(ahead) <= AHEAD * 3
