"""The space that a search looks through: one axis a key, each a row of values that are counted.

A point is a row of places (n_axis,), whole numbers from 0. A range without a step is counted too,
in some ten thousand steps that are round numbers: no design file gets digits that nobody can
punch, and a point that comes again is known as the same. Breeding works on the unit cube, where
place k of n stands in the middle of its cell, (k + 1/2) / n.
Axes of arrays: n points, n_axis keys.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from lamwright.geometry.errors import DesignError
from lamwright.solver.types import FloatArray

if TYPE_CHECKING:
    from .study import Study, StudyKey, Value, Values

Places = NDArray[np.int64]

# Of a range without a step, at least: 0.1 um of a millimetre.
FINE_STEPS = 10_000
# From so many values on an axis is bred as a length, below as a number of steps.
FINE = 64


@dataclass(frozen=True, slots=True)
class Axis:
    """The values of one key: stated one by one, or evenly from `low` by `step`."""

    key: str
    count: int
    stated: "tuple[Value, ...] | None" = None
    low: float = 0.0
    step: float = 0.0
    is_length: bool = False  # from a range without a step: whoever polishes may leave the places

    @property
    def is_ordered(self) -> bool:
        """Whether neighbours on the axis are alike; names have no order."""
        return self.stated is None or not any(isinstance(value, str) for value in self.stated)

    def value(self, place: int) -> "Value":
        """The value at a place."""
        if self.stated is not None:
            return self.stated[place]
        return float(f"{self.low + place * self.step:.12g}")

    def place(self, value: "Value") -> int | None:
        """The place of a value, the nearest of numbers; None of what the axis has not."""
        if isinstance(value, str) or not self.is_ordered:
            return self.stated.index(value) if self.stated and value in self.stated else None
        values = [float(self.value(place)) for place in (0, self.count - 1)]
        if not min(values) <= value <= max(values):
            return None
        if self.stated is None:
            return round((value - self.low) / self.step) if self.count > 1 else 0
        return int(np.argmin([abs(float(one) - value) for one in self.stated]))


@dataclass(frozen=True, slots=True)
class SearchSpace:
    """All axes of a study in its order of keys."""

    axes: tuple[Axis, ...]

    @property
    def counts(self) -> Places:
        """Values of each axis (n_axis,)."""
        return np.array([axis.count for axis in self.axes], dtype=np.int64)

    @property
    def size(self) -> float:
        """How many points there are; a float, since ranges make it astronomical."""
        return math.prod(float(axis.count) for axis in self.axes)

    def values(self, places: Sequence[int] | Places) -> "Values":
        """The values of one point by key."""
        return {axis.key: axis.value(int(k)) for axis, k in zip(self.axes, places, strict=True)}

    def unit(self, places: Places) -> FloatArray:
        """Points (n, n_axis) in the unit cube."""
        return np.asarray((places + 0.5) / self.counts)

    def places(self, unit: FloatArray) -> Places:
        """The cells (n, n_axis) that points of the unit cube lie in."""
        cells = np.floor(np.asarray(unit) * self.counts).astype(np.int64)
        return np.clip(cells, 0, self.counts - 1)

    def place_of(self, values: "Values") -> tuple[int, ...] | None:
        """The place of a design; None where a key's value is outside."""
        found = [axis.place(values[axis.key]) for axis in self.axes if axis.key in values]
        if len(found) < len(self.axes) or None in found:
            return None
        return tuple(place for place in found if place is not None)


def search_space(study: "Study") -> SearchSpace:
    """The axes of a study.

    Raises:
        DesignError: nothing to choose, or no goal; one line.
    """
    if not study.goals:
        raise DesignError(f"{study.path}: goal: none is given; a search needs one at least")
    space = SearchSpace(tuple(_axis(key) for key in study.keys))
    if space.size < 2:
        raise DesignError(f"{study.path}: key: one design only; give keys with several values")
    return space


def _axis(key: "StudyKey") -> Axis:
    values = key.values
    if values is None and key.whole:
        assert key.low is not None
        assert key.high is not None
        values = tuple(range(math.ceil(key.low), math.floor(key.high) + 1))
    if values is not None:
        return Axis(key.key, len(values), stated=tuple(values))
    assert key.low is not None
    assert key.high is not None
    if key.high == key.low:
        return Axis(key.key, 1, low=key.low)
    step = 10.0 ** math.floor(math.log10((key.high - key.low) / FINE_STEPS))
    count = math.floor((key.high - key.low) / step + 1e-6) + 1
    return Axis(key.key, count, low=key.low, step=step, is_length=True)
