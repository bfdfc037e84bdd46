"""A study: a base design, the keys that vary, what to compute of each design, limits and goals.

What the study file states (`study_file`), as values: a study becomes points (`study_points`), a
point a task (`study_task`), a task an evaluation (`evaluation`), and that a row of the ledger.
"""

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Literal

from lamwright.geometry.errors import DesignError

if TYPE_CHECKING:
    from lamwright.solver.tolerance import ToleranceName

Value = float | int | str
Values = Mapping[str, Value]  # of one design, by key, in the study's order of keys

Effort = Literal["quick", "full"]
Sense = Literal["most", "least"]
SampleKind = Literal["grid", "sobol", "halton"]
Distribution = Literal["even", "normal"]


@dataclass(frozen=True, slots=True)
class StudyKey:
    """A key that varies: of the design file, or one by which all barriers are laid out anew.

    Either `choices` states its values, or `low` and `high` the range; a `step` then makes the
    range's values countable.
    """

    key: str  # `rotor.gap_mm`, `rotor.barrier[1].depth_mm`, `layout.barriers`
    choices: tuple[Value, ...] | None = None
    low: float | None = None
    high: float | None = None
    step: float | None = None
    whole: bool = False  # takes whole numbers only
    distribution: Distribution = "even"  # between low and high
    mean: float | None = None  # of the normal distribution, cut off at low and high
    deviation: float | None = None

    @property
    def values(self) -> tuple[Value, ...] | None:
        """All values in order; None of a range without a step."""
        if self.choices is not None:
            return self.choices
        if self.step is None:
            return None
        assert self.low is not None
        assert self.high is not None
        count = int((self.high - self.low) / self.step + 1e-9) + 1
        # To 12 digits: 0.1 x 3 shall be 0.3.
        steps = [float(f"{self.low + k * self.step:.12g}") for k in range(count)]
        return tuple(round(step) for step in steps) if self.whole else tuple(steps)


@dataclass(frozen=True, slots=True)
class StudyLimit:
    """What a figure must keep; one of both ends may be open."""

    figure: str  # key of a figure of the verdict, in its unit
    least: float | None = None
    most: float | None = None

    def holds(self, value: float) -> bool:
        """Whether the limit is met; being equal meets it."""
        low = self.least is None or value >= self.least
        return low and (self.most is None or value <= self.most)


@dataclass(frozen=True, slots=True)
class StudyGoal:
    """A figure that is to be as large or as small as can be."""

    figure: str
    sense: Sense


class StudyError(DesignError):
    """A study file that cannot be used."""


@dataclass(frozen=True, slots=True)
class Sampling:
    """Which points are computed: all of the grid, or a low-discrepancy set."""

    kind: SampleKind = "grid"
    designs: int = 0  # of a low-discrepancy set
    seed: int = 1


@dataclass(frozen=True, slots=True)
class Study:
    """A study file, read and checked, with the text of all files that its designs need."""

    name: str
    note: str
    path: Path
    base_name: str  # of the design file, without its folder
    base_text: str
    cards: Mapping[str, str]  # texts of steel and magnet cards, by their names in the design
    drawings: Mapping[str, bytes]  # by their names in the design
    keys: tuple[StudyKey, ...]
    effort: Effort
    tolerance: "ToleranceName"
    limits: tuple[StudyLimit, ...]
    goals: tuple[StudyGoal, ...]
    sampling: Sampling
    most_designs: int  # that a grid may have
    seconds: float  # that one design may take
    errors: bool = False  # whether quick figures get error bars

    @property
    def hash(self) -> str:
        """SHA-256 in hex of what makes it this study: another size of sample is still the same."""
        stated = (
            *(self.base_text, sorted(self.cards.items())),
            sorted((name, sha256_of(data)) for name, data in self.drawings.items()),
            [(key.key, key.choices, key.low, key.high, key.step) for key in self.keys],
            [(key.distribution, key.mean, key.deviation) for key in self.keys],
            (self.effort_told, self.tolerance, self.sampling.kind, self.sampling.seed),
            [(limit.figure, limit.least, limit.most) for limit in self.limits],
            [(goal.figure, goal.sense) for goal in self.goals],
        )
        return sha256_of(json.dumps(stated).encode())

    @property
    def effort_told(self) -> str:
        """The effort in words, with whether there are error bars where that is a question."""
        return f"{self.effort}, with errors" if self.errors else self.effort


def sha256_of(data: bytes) -> str:
    """SHA-256 in hex."""
    return hashlib.sha256(data).hexdigest()
