"""A study's ledger beside the computing: what a row costs, what listing 100 000 of them does."""

import tempfile
from pathlib import Path

import numpy as np

from lamwright.app.evaluation import Evaluation
from lamwright.app.ledger import Ledger
from lamwright.app.study_task import Task
from tests.study_rows import ANGLE, BASE, CARDS, GAP, plain_study

from .timing import PROCESSOR, WALL, Notes, seconds
from .workload import Workload

ROWS = 100_000
SINGLE = 2_000  # rows that are committed one by one and timed
FIGURES = 37  # as many as a full evaluation has, about
WHERE = "figure_1_nm > 0.5 and passes"


def ledger_cost(work: Workload, notes: Notes) -> dict[str, float]:
    """Time to commit a row of 37 figures, and to list and filter 100 000 of them.

    The row's in ms of wall time, the median of 2000 commits, each a transaction of its own, and in
    ms of processor time, their mean. Listings in seconds of processor time: the 20 best of those
    that fulfil a condition of two parts, and every row with the five figures of goals and limits.
    """
    count = ROWS if work.scale <= 1.0 else 200
    study = plain_study(drawings={})
    random = np.random.default_rng(1)

    def task(k: int) -> Task:
        text = BASE.replace("key_7 = 49", f"key_7 = {k}")
        return Task(f"{k:064x}", {ANGLE: 0.1 * k, GAP: 0.3}, "d", text, CARDS)

    def evaluation() -> Evaluation:
        values = random.random(FIGURES)
        figures = {f"figure_{n}_nm": float(value) for n, value in enumerate(values)}
        return Evaluation("done", "", "field", figures, {}, bool(values[0] > 0.5), 1.0)

    with tempfile.TemporaryDirectory() as folder, Ledger.open(Path(folder), study) as ledger:
        pairs = [(task(k), evaluation()) for k in range(min(SINGLE, count))]
        began = PROCESSOR()
        walls = [1e3 * seconds_of(ledger, *pair) for pair in pairs]
        processor = 1e3 * (PROCESSOR() - began) / len(pairs)
        with ledger.together():
            for k in range(len(pairs), count):
                ledger.record(task(k), evaluation())
        few = [f"figure_{n}_nm" for n in range(5)]
        best = seconds(lambda: ledger.rows(WHERE, "-figure_1_nm", 20, few))
        every = seconds(lambda: ledger.rows(figures=few))
    notes.tell("a row", walls, "ms")
    notes.say(f"{count} rows")
    return {
        "ledger_cost": float(np.median(walls)),
        "ledger_cost_of_processor": processor,
        "ledger_cost_filtered_s": best,
        "ledger_cost_all_s": every,
    }


def seconds_of(ledger: Ledger, task: Task, evaluation: Evaluation) -> float:
    """Wall time of a commit."""
    began = WALL()
    ledger.record(task, evaluation)
    return WALL() - began
