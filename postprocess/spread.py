"""What tolerances do to the figures of a machine: worst case, share that holds, who makes it.

A figure is modelled by its own value as drawn and, for each source of spread with its deviation u
in units of its limit, a line and a parabola without products of different sources:

    f(u) = f_0 + sum_k [ (f_k+ - f_k-) / 2 u_k + ((f_k+ + f_k-) / 2 - f_0) u_k^2 ]

from full solutions f_k+, f_k- at both limits of one source alone. Sources are independent,
normal with the limits as 3 sigma, or uniform between the limits. With u symmetric about 0 a line
and a parabola do not correlate, so (derived) a source's variance is a^2 m_2 + b^2 (m_4 - m_2^2),
with the moments m_2 = 1/9, m_4 = 1/27 normal, 1/3, 1/5 uniform, and the mean moves by b m_2.

The share of rotors that hold is a binomial count; its interval is that of Clopper and Pearson
(1934) (m), exact: it covers the share at least as often as stated. It knows nothing of the model's
own error, which the checked solutions tell.
Axes: n_sample machines, n_source sources, n_figure figures.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt
from scipy.special import betaincinv

from lamwright.solver.types import FloatArray

Distribution = Literal["normal", "uniform"]
MOMENTS: dict[Distribution, tuple[float, float]] = {
    "normal": (1.0 / 9.0, 1.0 / 27.0),
    "uniform": (1.0 / 3.0, 1.0 / 5.0),
}
CONFIDENCE = 0.95
# Of a figure's own spread: above it the model is not fit to count with.
MOST_MISS = 0.3


@dataclass(frozen=True, slots=True)
class SpreadFigure:
    """A figure that spreads, in the unit that it is shown in, and its limit."""

    key: str
    label: str
    unit: str
    limit: float | None = None  # none: not judged
    is_least: bool = True


@dataclass(frozen=True, slots=True)
class SpreadSource:
    """Something that is not made as drawn, and its limit to both sides."""

    key: str  # as in the design file
    label: str
    limit: float
    unit: str


@dataclass(frozen=True, slots=True, eq=False)
class SourceEffect:
    """Change of every figure at both limits of a source alone."""

    source: SpreadSource
    low: FloatArray  # (n_figure,), at minus the limit
    high: FloatArray  # (n_figure,), at plus the limit

    @property
    def line(self) -> FloatArray:
        """Slope (n_figure,) per limit."""
        return np.asarray(0.5 * (self.high - self.low))

    @property
    def bend(self) -> FloatArray:
        """Change (n_figure,) that has the same sign at both limits."""
        return np.asarray(0.5 * (self.high + self.low))


@dataclass(frozen=True, slots=True, eq=False)
class SpreadModel:
    """The figures as functions of the deviations."""

    figures: tuple[SpreadFigure, ...]
    nominal: FloatArray  # (n_figure,)
    effects: tuple[SourceEffect, ...]
    distribution: Distribution

    def at(self, deviations: FloatArray) -> FloatArray:
        """Figures (n_sample, n_figure) at deviations (n_sample, n_source) in limits."""
        if not self.effects:
            return np.tile(self.nominal, (len(deviations), 1))
        lines = np.array([effect.line for effect in self.effects])
        bends = np.array([effect.bend for effect in self.effects])
        return np.asarray(self.nominal + deviations @ lines + deviations**2 @ bends)


@dataclass(frozen=True, slots=True)
class Share:
    """A share of machines with its confidence interval."""

    holding: int
    samples: int
    low: float
    high: float

    @property
    def value(self) -> float:
        """The share itself."""
        return self.holding / self.samples


@dataclass(frozen=True, slots=True)
class ModelCheck:
    """The model against full solutions of random machines, for one figure, in its unit."""

    rms: float
    largest: float
    spread: float  # standard deviation of the full solutions
    correlation: float | None  # none where the figure hardly moves

    @property
    def is_good(self) -> bool:
        """Whether the model misses little of what it has to tell."""
        return self.rms <= MOST_MISS * self.spread


def drawn_deviations(
    distribution: Distribution, samples: int, sources: int, seed: Sequence[int]
) -> FloatArray:
    """Random deviations (n_sample, n_source) in units of the limits; the same for the same seed."""
    random = np.random.default_rng(seed)
    if distribution == "normal":
        return np.asarray(random.normal(0.0, 1.0 / 3.0, (samples, sources)))
    return np.asarray(random.uniform(-1.0, 1.0, (samples, sources)))


def worst_case(model: SpreadModel) -> tuple[FloatArray, FloatArray]:
    """Least and largest figures (n_figure,) with every source at its worst within its limits.

    Each source counts with the more harmful of its two limits, or not at all.
    """
    none = np.zeros_like(model.nominal)
    ends = [(none, effect.low, effect.high) for effect in model.effects]
    least = model.nominal + sum((np.min(end, axis=0) for end in ends), none)
    most = model.nominal + sum((np.max(end, axis=0) for end in ends), none)
    return least, most


def moments(model: SpreadModel) -> tuple[FloatArray, FloatArray]:
    """Mean (n_figure,) and standard deviation of the figures, in closed form."""
    second, _ = MOMENTS[model.distribution]
    none = np.zeros_like(model.nominal)
    mean = model.nominal + second * sum((effect.bend for effect in model.effects), none)
    return mean, np.sqrt(sum(variances(model), none))


def variances(model: SpreadModel) -> FloatArray:
    """Variance (n_source, n_figure) that each source makes."""
    second, fourth = MOMENTS[model.distribution]
    found = [
        effect.line**2 * second + effect.bend**2 * (fourth - second**2) for effect in model.effects
    ]
    return np.array(found).reshape(len(found), len(model.figures))


def variance_shares(model: SpreadModel) -> FloatArray:
    """Share (n_source, n_figure) of each figure's variance; 0 where a figure does not move."""
    found = variances(model)
    total = found.sum(axis=0)
    return np.asarray(found / np.where(total > 0.0, total, 1.0))


def holds(figures: Sequence[SpreadFigure], values: FloatArray) -> npt.NDArray[np.bool_]:
    """Whether each judged figure (n_sample, n_figure) meets its limit; true where none is."""
    fine = np.ones(values.shape, dtype=np.bool_)
    for k, figure in enumerate(figures):
        if figure.limit is not None:
            own = values[:, k]
            fine[:, k] = own >= figure.limit if figure.is_least else own <= figure.limit
    return fine


def whole(figures: Sequence[SpreadFigure], values: FloatArray) -> npt.NDArray[np.bool_]:
    """Which machines (n_sample,) hold all limits."""
    return np.asarray(holds(figures, values).all(axis=1), dtype=np.bool_)


def share_of(holding: npt.NDArray[np.bool_], confidence: float = CONFIDENCE) -> Share:
    """The share of true values (n_sample,) with its interval."""
    count, samples = int(np.sum(holding)), len(holding)
    return Share(count, samples, *binomial_interval(count, samples, confidence))


def binomial_interval(count: int, samples: int, confidence: float) -> tuple[float, float]:
    """Least and largest share that agree with `count` of `samples` (Clopper, Pearson 1934 (m))."""
    tail = 0.5 * (1.0 - confidence)
    low = betaincinv(count, samples - count + 1, tail) if count else 0.0
    high = betaincinv(count + 1, samples - count, 1.0 - tail) if count < samples else 1.0
    return float(low), float(high)


def worsened(
    figures: Sequence[SpreadFigure], values: FloatArray, checks: Sequence[ModelCheck]
) -> FloatArray:
    """The values (n_sample, n_figure), each nearer to its limit by the model's rms miss."""
    miss = np.array([check.rms for check in checks])
    sign = np.array([-1.0 if figure.is_least else 1.0 for figure in figures])
    return np.asarray(values + sign * miss)


def model_checks(modelled: FloatArray, solved: FloatArray) -> tuple[ModelCheck, ...]:
    """The model against full solutions, both (n_sample, n_figure)."""
    found = []
    for ours, theirs in zip(modelled.T, solved.T, strict=True):
        miss, spread = ours - theirs, float(np.std(theirs))
        moves = len(theirs) > 1 and spread > 1e-9 * abs(float(np.mean(theirs)))
        moves = moves and float(np.std(ours)) > 0.0
        found.append(
            ModelCheck(
                rms=float(np.sqrt(np.mean(miss**2))),
                largest=float(np.abs(miss).max()),
                spread=spread,
                correlation=float(np.corrcoef(ours, theirs)[0, 1]) if moves else None,
            )
        )
    return tuple(found)
