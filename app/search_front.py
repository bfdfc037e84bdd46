"""The front of a search: what no other design betters in every goal, and how much it covers.

Goals are turned so that less is better. The hypervolume, what a front dominates up to a reference
point, tells in one number how far a search has come (Zitzler, Thiele 1999). Reference rule: goals
are scaled to the front itself, its best of each goal at 0 and its worst at 1, and the point lies
at 1.1 of each, so that the ends of a front count a little too (Ishibuchi, Imada, Setoguchi,
Nojima 2018). Two fronts are compared in one frame, always that of the better known one.
Axes of arrays: n designs, n_goal goals.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from lamwright.solver.types import FloatArray

if TYPE_CHECKING:
    from .study import StudyGoal

REFERENCE = 1.1  # of each scaled goal


@dataclass(frozen=True, slots=True, eq=False)
class Frame:
    """The scale of goals: best and worst of a front, (n_goal,) each."""

    best: FloatArray
    worst: FloatArray

    def scaled(self, goals: FloatArray) -> FloatArray:
        """Goals (n, n_goal), the front's best at 0 and its worst at 1."""
        span = self.worst - self.best
        # A front of one design, or one equal in a goal: any scale will do, take its size.
        size = np.where(self.best != 0.0, np.abs(self.best), 1.0)
        return np.asarray((goals - self.best) / np.where(span > 0.0, span, size))


def turned(figures: Mapping[str, float], goals: "Sequence[StudyGoal]") -> tuple[float, ...] | None:
    """Goals of one design, less is better; None where a figure is missing or no number."""
    found = [figures.get(goal.figure, np.nan) for goal in goals]
    if not np.isfinite(found).all():
        return None
    return tuple(
        -value if goal.sense == "most" else value for goal, value in zip(goals, found, strict=True)
    )


def on_front(goals: FloatArray) -> NDArray[np.bool_]:
    """Which of the designs (n, n_goal) no other betters (n,); of equal ones the first."""
    if len(goals) == 0:
        return np.zeros(0, dtype=bool)
    from moocore import is_nondominated

    return np.asarray(is_nondominated(goals, keep_weakly=False), dtype=bool)


def frame_of(goals: FloatArray) -> Frame:
    """The frame of the front of some designs (n, n_goal), one at least."""
    front = goals[on_front(goals)]
    return Frame(front.min(axis=0), front.max(axis=0))


def covered(goals: FloatArray, frame: Frame) -> float:
    """Hypervolume of designs (n, n_goal) in a frame; 0 where there is none."""
    if len(goals) == 0:
        return 0.0
    from moocore import hypervolume

    return float(hypervolume(frame.scaled(goals), ref=np.full(goals.shape[1], REFERENCE)))
