"""The designs of a study as plain arrays, and what its pictures show of them.

Axes of arrays: n designs. A design without a value has NaN there.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

from lamwright.solver.types import FloatArray

BoolArray = npt.NDArray[np.bool_]
IntArray = npt.NDArray[np.int64]

MOST_VALUES = 16  # of a key that each get a point of their own in a curve of effects
BINS = 8  # of a key with more values


@dataclass(frozen=True, slots=True, eq=False)
class StudyAxis:
    """A key or a figure over all designs."""

    name: str  # as in study file and ledger
    label: str  # for a reader, without unit
    unit: str  # "" for a ratio
    values: FloatArray  # (n,); of texts their place among `texts`
    texts: tuple[str, ...] = ()
    errors: FloatArray | None = None  # (n,) of the values
    is_key: bool = False
    least: float | None = None  # limits of the study
    most: float | None = None
    sense: Literal["most", "least"] | None = None  # of a goal

    @property
    def title(self) -> str:
        """Label with unit."""
        return f"{self.label}, {self.unit}" if self.unit else self.label

    @property
    def holds(self) -> BoolArray:
        """Which designs (n,) keep this axis' limits; those without a value do not."""
        low = True if self.least is None else self.values >= self.least
        high = True if self.most is None else self.values <= self.most
        return np.isfinite(self.values) & low & high

    @property
    def losses(self) -> FloatArray:
        """The values (n,) with the sign by which less is better."""
        return -self.values if self.sense == "most" else self.values


@dataclass(frozen=True, slots=True, eq=False)
class Studied:
    """All designs of a study."""

    name: str
    numbers: IntArray  # (n,) of the designs in the ledger
    passes: BoolArray  # (n,) every limit holds
    reasons: tuple[str, ...]  # of n, why a design has no figures; "" where it has
    keys: tuple[StudyAxis, ...]
    figures: tuple[StudyAxis, ...]  # goals first, then limits, then others

    @property
    def goals(self) -> tuple[StudyAxis, ...]:
        """The figures that are goals."""
        return tuple(axis for axis in self.figures if axis.sense is not None)


@dataclass(frozen=True, slots=True, eq=False)
class Effect:
    """A figure over a key: mean and spread of the designs that share a value or range of it."""

    at: FloatArray  # (m,) value of the key, or mean of its values in the range
    mean: FloatArray  # (m,)
    deviation: FloatArray  # (m,) standard deviation, 0 of a single design
    count: IntArray  # (m,) designs


def front_of(first: StudyAxis, second: StudyAxis, among: BoolArray) -> IntArray:
    """Designs that no other is better than in one goal without being worse in the other.

    Args:
        first: a goal.
        second: another.
        among: (n,) which designs count.

    Returns:
        Their indices, from the best to the worst by the first goal; of equal designs one.
    """
    finite = among & np.isfinite(first.values) & np.isfinite(second.values)
    chosen = np.flatnonzero(finite)
    order = chosen[np.lexsort((chosen, second.losses[chosen], first.losses[chosen]))]
    members, least = [], np.inf
    for k in order:
        if second.losses[k] < least:
            members.append(k)
            least = second.losses[k]
    return np.array(members, dtype=np.int64)


def best_first(first: StudyAxis, second: StudyAxis, among: BoolArray, most: int) -> list[int]:
    """Designs of a front, both ends and evenly between; then of the front that is behind it."""
    left = among.copy()
    found: list[int] = []
    while len(found) < most:
        front = front_of(first, second, left)
        if not front.size:
            break
        room = most - len(found)
        places = np.arange(front.size)
        if front.size > room:
            places = np.unique(np.linspace(0, front.size - 1, room).round().astype(np.int64))
        found += [int(k) for k in front[places]]
        left[front] = False
    return found


def best_of(goal: StudyAxis, passes: BoolArray) -> int | None:
    """The best design by a goal among those that pass, or among all where none does."""
    having = np.isfinite(goal.values)
    among = np.flatnonzero(having & passes if np.any(having & passes) else having)
    return int(among[np.argmin(goal.losses[among])]) if among.size else None


def effect_of(key: StudyAxis, figure: StudyAxis) -> Effect:
    """Mean and spread of a figure over a key; a key of many values in ranges of as many designs."""
    having = np.isfinite(key.values) & np.isfinite(figure.values)
    at, values = key.values[having], figure.values[having]
    order = np.argsort(at, kind="stable")
    at, values = at[order], values[order]
    distinct = np.unique(at)
    if distinct.size <= MOST_VALUES:
        parts = [np.flatnonzero(at == value) for value in distinct]
    else:
        parts = np.array_split(np.arange(at.size), BINS)
    return Effect(
        np.array([np.mean(at[part]) for part in parts]),
        np.array([np.mean(values[part]) for part in parts]),
        np.array([np.std(values[part], ddof=1) if part.size > 1 else 0.0 for part in parts]),
        np.array([part.size for part in parts], dtype=np.int64),
    )


def is_grid(keys: Sequence[StudyAxis]) -> bool:
    """Whether two keys vary and every pair of their values has at most one design."""
    if len(keys) != 2:
        return False
    pairs = np.column_stack([key.values for key in keys])
    sides = [np.unique(key.values).size for key in keys]
    cells = np.unique(pairs, axis=0).shape[0]
    # Half of the cells at least: a low-discrepancy set has nearly none twice in a line.
    return bool(cells == pairs.shape[0] and min(sides) > 1 and 2 * cells >= sides[0] * sides[1])


def cells_of(keys: Sequence[StudyAxis]) -> tuple[FloatArray, FloatArray, IntArray]:
    """Values of two keys, and the design of each pair (second, first), -1 where there is none."""
    first, at_first = np.unique(keys[0].values, return_inverse=True)
    second, at_second = np.unique(keys[1].values, return_inverse=True)
    cells = np.full((second.size, first.size), -1, dtype=np.int64)
    cells[at_second.ravel(), at_first.ravel()] = np.arange(keys[0].values.size)
    return first, second, cells
