"""A search whose evaluation is a formula, in this process: `python -m search_stand_in STUDY OUT N`.

Run as a module it ends itself by SIGKILL at the Nth evaluation, as if somebody had pulled the plug.
"""

import os
import signal
import sys
from collections.abc import Callable, Iterator
from concurrent.futures import Future
from contextlib import contextmanager
from pathlib import Path

from lamwright.app import evaluation, search_run
from lamwright.app.evaluation import Evaluation
from lamwright.app.search_run import SearchReport
from lamwright.app.search_slopes import KNOWN_FIGURES, DesignSlopes
from lamwright.app.search_state import SearchSettings

STUDY = """\
name = "invented"
base = "{base}"

[[vary]]
key = "rotor.barrier[1].thickness_mm"
least = 2.0
most = 6.0

[[vary]]
key = "rotor.barrier[1].end_angle_deg"
least = 10.0
most = 40.0

[[limit]]
figure = "active_mass_kg"
most = 9.0

[[goal]]
figure = "torque_nm"
sense = "most"

[[goal]]
figure = "torque_ripple_percent"
sense = "least"
"""
SETTINGS = SearchSettings(population=8, budget=48, seed=3, stall=0)


def study_file(folder: Path) -> Path:
    """The study on the demonstration design."""
    base = Path(__file__).parent.parent / "designs" / "demo_24s4p_arc.toml"
    path = folder / "invented.toml"
    path.write_text(STUDY.format(base=base.as_posix()), encoding="utf-8")
    return path


def formula(values: dict[str, float]) -> Evaluation:
    """Two bowls, best at (3, 20) and (5, 30); thick barriers far out leave no room."""
    x, y = (values[f"rotor.barrier[1].{name}"] for name in ("thickness_mm", "end_angle_deg"))
    if x + 0.1 * y > 7.0:
        return Evaluation("rejected", f"barrier 1: no room at {y:g}", "geometry")
    torque = 20.0 - (x - 3.0) ** 2 - 0.01 * (y - 20.0) ** 2
    ripple = 5.0 + (x - 5.0) ** 2 + 0.01 * (y - 30.0) ** 2
    figures = {"torque_nm": torque, "torque_ripple_percent": ripple, "active_mass_kg": 2.0 * x}
    figures |= {"saliency_ratio": 5.0, "yield_margin": 2.0}
    return Evaluation("done", figures=figures, passes=ripple <= 15.0 and 2.0 * x <= 9.0)


class Bench:
    """A pool that carries tasks out at once, in this process."""

    cores = 1

    def __init__(self, call: Callable) -> None:
        """As the real ones."""
        self._call = call

    def submit(self, task: object) -> Future:
        """A future that is done."""
        future: Future = Future()
        future.set_result(self._call(task))
        return future


@contextmanager
def stood_in(end: Callable[[int], None] = lambda count: None) -> Iterator[list[dict]]:
    """Formulas instead of fields while the block runs; gives what is asked for.

    `end` is called with the number of each evaluation before it is made.
    """
    asked: list[dict] = []

    def evaluate(task: object) -> Evaluation:
        end(len(asked))
        asked.append(dict(task.values))
        return formula(task.values)

    @contextmanager
    def hired(
        call: Callable, wishes: object, limit_s: float, ready: Callable | None = None
    ) -> Iterator[Bench]:
        yield Bench(call)

    before = evaluation.evaluate, search_run.hired, search_run.design_slopes
    evaluation.evaluate, search_run.hired = evaluate, hired
    search_run.design_slopes = slopes
    try:
        yield asked
    finally:
        evaluation.evaluate, search_run.hired, search_run.design_slopes = before


def slopes(task: object) -> DesignSlopes:
    """Exact relative slopes of the torque; ripple has none, as in truth."""
    x, y = (task.values[f"rotor.barrier[1].{name}"] for name in ("thickness_mm", "end_angle_deg"))
    torque = formula(task.values).figures["torque_nm"]
    by = {
        "rotor.barrier[1].thickness_mm": -2.0 * (x - 3.0) / torque,
        "rotor.barrier[1].end_angle_deg": -0.02 * (y - 20.0) / torque,
    }
    assert "torque_nm" in KNOWN_FIGURES
    return DesignSlopes({"torque_nm": by})


def run(path: Path, out: Path, settings: SearchSettings = SETTINGS) -> SearchReport:
    """The search, to its end."""
    return search_run.search(path, out, settings)


def _pull_the_plug(at: int) -> Callable[[int], None]:
    def end(count: int) -> None:
        if count == at:
            os.kill(os.getpid(), signal.SIGKILL)

    return end


if __name__ == "__main__":
    with stood_in(_pull_the_plug(int(sys.argv[3]))):
        run(Path(sys.argv[1]), Path(sys.argv[2]))
