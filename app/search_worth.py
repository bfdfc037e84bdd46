"""What a design is worth to a search: its goals, and how far it is from holding all limits.

A design that cannot be built has no figures, yet the search must learn which way leads out. Its
violation is graded by the stage of the screening that it reached: any design that was computed
comes before any that was rejected, and of those the later rejected first. Among computed ones it
is the sum of what they lack, each limit's part squeezed below one. Common practice for ranking
what cannot be compared; no source.
"""

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Protocol

from .search_front import turned

if TYPE_CHECKING:
    from .study import Study, StudyGoal, StudyLimit


class Looked(Protocol):
    """What is known of a design: a row of the ledger, or an evaluation."""

    @property
    def outcome(self) -> str:
        """Done, rejected or failed."""

    @property
    def stage(self) -> str:
        """In which it ended."""

    @property
    def passes(self) -> bool | None:
        """Whether all limits of design and study hold."""

    @property
    def figures(self) -> Mapping[str, float]:
        """In the unit of their keys."""


@dataclass(frozen=True, slots=True)
class Worth:
    """Goals turned so that less is better, and the violation, 0 where all limits hold."""

    goals: tuple[float, ...]  # 0 where there are none
    violation: float

    @property
    def holds(self) -> bool:
        """Whether the design may stand on the front."""
        return self.violation == 0.0


@dataclass(frozen=True, slots=True)
class Measure:
    """What a study asks of its designs."""

    goals: "tuple[StudyGoal, ...]"
    limits: "tuple[StudyLimit, ...]"
    stages: tuple[str, ...]  # of the screening, in the order that designs go through

    def worth(self, looked: Looked) -> Worth:
        """Of one design."""
        none = (0.0,) * len(self.goals)
        most = float(len(self.limits) + 1)  # above all that computed designs can lack
        if looked.outcome != "done":
            reached = self.stages.index(looked.stage) if looked.stage in self.stages else -1
            behind = len(self.stages) - reached
            # A crash or a time limit says nothing about the way out: last of all.
            return Worth(none, most + (behind if looked.outcome == "rejected" else behind + 1.0))
        goals = turned(looked.figures, self.goals)
        if goals is None:
            return Worth(none, most)
        lack = sum((lacking(limit, looked.figures) for limit in self.limits), 0.0)
        if lack == 0.0 and looked.passes is False:
            lack = 0.5  # a limit that is not among those stated
        return Worth(goals, lack)

    def all(self, rows: Sequence[Looked]) -> list[Worth]:
        """Of many designs."""
        return [self.worth(row) for row in rows]


def measure_of(study: "Study") -> Measure:
    """What a study asks: its goals, its limits, and those of its base design on other figures."""
    from .evaluation import limits_of
    from .study_screening import STAGES
    from .study_task import machine_of_study

    limits = limits_of(machine_of_study(study), study.limits)
    return Measure(study.goals, limits, STAGES)


def lacking(limit: "StudyLimit", figures: Mapping[str, float]) -> float:
    """How far a limit is from being held, 0 where it is, below 1 else; 1 without the figure."""
    value = figures.get(limit.figure, math.nan)
    if not math.isfinite(value):
        return 1.0
    if limit.holds(value):
        return 0.0
    bound = limit.least if limit.least is not None and value < limit.least else limit.most
    assert bound is not None
    gap = abs(value - bound) / (abs(bound) or 1.0)
    return max(gap / (1.0 + gap), 1e-12)  # never 0 where it is missed
