"""Stand-ins for the evaluation of a design, importable by name in worker processes."""

import hashlib
import os
import random
import signal
import sys
import time
from collections.abc import Sequence
from pathlib import Path

from lamwright.app.evaluation import Evaluation
from lamwright.app.study_task import Task


def doubled(number: int) -> int:
    return 2 * number


def slept(seconds: float) -> int:
    """Sleep; gives the process it happened in."""
    time.sleep(seconds)
    return os.getpid()


def misbehaving(wish: str) -> str:
    """Do what is asked, such as die or hang."""
    what, _, more = wish.partition(" ")
    if what == "die":
        os.kill(os.getpid(), signal.SIGKILL)
    if what == "exit":
        os._exit(int(more))
    if what == "die-once" and not Path(more).exists():  # at the first call with this file
        Path(more).touch()
        os.kill(os.getpid(), signal.SIGKILL)
    if what == "hang":
        time.sleep(1000.0)
    if what == "sleep":
        time.sleep(float(more))
    if what == "raise":
        raise ValueError(more)
    if what == "leave":
        sys.exit(3)
    return f"{wish} done"


def evaluated(task: Task) -> Evaluation:
    """An evaluation whose figures follow from the values alone; its text says how to misbehave."""
    misbehaving(task.design_text)
    x, y = (float(value) for value in task.values.values())
    figures = {"torque_nm": x * y, "torque_ripple_percent": abs(x - y)}
    return Evaluation("done", figures=figures, passes=x * y > 4.0, seconds=0.0)


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
