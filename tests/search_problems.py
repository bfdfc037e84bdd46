"""Problems for the search whose fronts are known, as tables of figures or as formulas."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field

from lamwright.app.search_space import Axis, SearchSpace
from lamwright.app.search_worth import Measure
from lamwright.app.study import StudyGoal, StudyLimit

STAGES = ("read", "shape", "ribs", "field")  # of an invented screening


@dataclass(frozen=True)
class Looked:
    """A row as the search reads it."""

    hash: str
    values: Mapping[str, object]
    outcome: str = "done"
    stage: str = "field"
    passes: bool | None = True
    figures: Mapping[str, float] = field(default_factory=dict)


class Counted:
    """An evaluation by a formula that keeps what it was asked for."""

    def __init__(self, formula: Callable[[Mapping[str, object]], Mapping[str, float] | str]):
        """Figures by values, or the stage that rejects them."""
        self.formula, self.rows = formula, []

    def __call__(self, values: Sequence[Mapping[str, object]], origin: str) -> list[Looked]:
        """Rows in the order of the values."""
        return [self.looked(one) for one in values]

    def looked(self, values: Mapping[str, object]) -> Looked:
        """One row."""
        found, name = self.formula(values), repr(sorted(values.items()))
        if isinstance(found, str):
            row = Looked(name, values, "rejected", found, None)
        else:
            row = Looked(name, values, figures=found)
        self.rows.append(row)
        return row


def lengths(count: int, high: Sequence[float] | float = 1.0, low: Sequence[float] | float = 0.0):
    """A space of `count` lengths x1, x2, ... from low to high in 10 000 steps."""
    lows = [low] * count if isinstance(low, float) else low
    highs = [high] * count if isinstance(high, float) else high
    pairs = enumerate(zip(lows, highs, strict=True), start=1)
    return SearchSpace(
        tuple(
            Axis(f"x{k}", 10_001, low=one, step=(two - one) / 10_000, is_length=True)
            for k, (one, two) in pairs
        )
    )


def measure(limits: Sequence[StudyLimit] = ()) -> Measure:
    """Two goals f1 and f2, the less the better."""
    goals = (StudyGoal("f1", "least"), StudyGoal("f2", "least"))
    return Measure(goals, tuple(limits), STAGES)


def zdt1(values: Mapping[str, object]) -> dict[str, float]:
    """Zitzler, Deb, Thiele 2000, T1: f2 = 1 - sqrt(f1) on the front, where x2 ... are 0 (m)."""
    x = [float(value) for value in values.values()]
    g = 1.0 + 9.0 * sum(x[1:]) / (len(x) - 1)
    return {"f1": x[0], "f2": g * (1.0 - (x[0] / g) ** 0.5)}


OSY_SPACE = lengths(6, high=(10.0, 10.0, 5.0, 6.0, 5.0, 10.0), low=(0.0, 0.0, 1.0, 0.0, 1.0, 0.0))
OSY_LIMITS = tuple(StudyLimit(f"c{k}", least=0.0) for k in range(1, 7))


def osy(values: Mapping[str, object]) -> dict[str, float]:
    """Osyczka, Kundu 1995: two goals, six limits (m)."""
    x1, x2, x3, x4, x5, x6 = (float(value) for value in values.values())
    squares = (x1 - 2) ** 2, (x2 - 2) ** 2, (x3 - 1) ** 2, (x4 - 4) ** 2, (x5 - 1) ** 2
    weights = (25.0, 1.0, 1.0, 1.0, 1.0)
    return {
        "f1": -sum(weight * one for weight, one in zip(weights, squares, strict=True)),
        "f2": x1**2 + x2**2 + x3**2 + x4**2 + x5**2 + x6**2,
        "c1": x1 + x2 - 2.0,
        "c2": 6.0 - x1 - x2,
        "c3": 2.0 - x2 + x1,
        "c4": 2.0 - x1 + 3.0 * x2,
        "c5": 4.0 - (x3 - 3.0) ** 2 - x4,
        "c6": (x5 - 3.0) ** 2 + x6 - 4.0,
    }


def osy_front(count: int = 200) -> list[dict[str, float]]:
    """Figures along the front's five pieces, x4 = x6 = 0 (Deb 2001, limits analysed) (m)."""
    shares = [k / (count - 1) for k in range(count)]
    points = []
    for s in shares:
        points += [
            (5.0, 1.0, 1.0 + 4.0 * s, 5.0),
            (5.0, 1.0, 1.0 + 4.0 * s, 1.0),
            (4.056 + 0.944 * s, (4.056 + 0.944 * s - 2.0) / 3.0, 1.0, 1.0),
            (0.0, 2.0, 1.0 + 2.732 * s, 1.0),
            (s, 2.0 - s, 1.0, 1.0),
        ]
    names = ("x1", "x2", "x3", "x4", "x5", "x6")
    return [
        osy(dict(zip(names, (x1, x2, x3, 0.0, x5, 0.0), strict=True))) for x1, x2, x3, x5 in points
    ]
