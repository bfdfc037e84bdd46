"""Stand-ins for the evaluation of a design, importable by name in worker processes."""

import hashlib
import random
import time
from collections.abc import Sequence

from study_deeds import misbehaving, slept

from lamwright.app.evaluation import Evaluation
from lamwright.app.study_task import Task

STAND_IN_S = 0.05  # of `timed`


def evaluated(task: Task) -> Evaluation:
    """An evaluation whose figures follow from the values alone; its text says how to misbehave."""
    misbehaving(task.design_text)
    x, y = (float(value) for value in task.values.values())
    figures = {"torque_nm": x * y, "torque_ripple_percent": abs(x - y)}
    return Evaluation("done", figures=figures, passes=x * y > 4.0, seconds=0.0)


def ready(seconds: float) -> int:
    """The number of a process that has what `timed` needs, after a sleep."""
    return slept(seconds)


def timed(task: Task) -> Evaluation:
    """As many figures as a quick evaluation has, after 50 ms of sleep or of computing."""
    if task.design_text.startswith("sleep"):
        time.sleep(STAND_IN_S)
    else:
        ends = time.process_time() + STAND_IN_S
        while time.process_time() < ends:
            sum(range(2000))
    chance = random.Random(task.hash)
    figures = {f"figure_{k}_mm": chance.random() for k in range(35)}
    return Evaluation("done", "", "quick", figures, {}, True, STAND_IN_S)


def stand_in_tasks(wishes: Sequence[str]) -> list[Task]:
    """A task for each wish."""
    return [
        Task(
            hash=hashlib.sha256(f"{k} {wish}".encode()).hexdigest(),
            values={"rotor.gap_mm": 0.3 + 0.1 * k, "rotor.outer_diameter_mm": 80.0 - k},
            design_name="stand_in.toml",
            design_text=wish,
            cards={},
        )
        for k, wish in enumerate(wishes)
    ]


def drawn(task: Task) -> Evaluation:
    """Figures drawn from the task's hash after 30 ms; every seventh or so is rejected."""
    time.sleep(0.03)
    chance = random.Random(task.hash)
    if chance.random() < 1 / 7:
        return Evaluation("rejected", "drawn by lot", "outline", seconds=0.03)
    figures = {"torque_nm": chance.random(), "torque_ripple_percent": 50.0 * chance.random()}
    passes = figures["torque_ripple_percent"] < 25.0
    return Evaluation("done", "", "field", figures, {"torque_nm": 0.01}, passes, 0.03)


def main() -> None:
    """The program with `drawn` for its evaluation."""
    from lamwright.app import evaluation
    from lamwright.app.cli import main

    evaluation.evaluate = drawn
    main(prog_name="lamwright")
