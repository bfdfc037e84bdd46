"""What a Newton iteration took at one random point, and the worst of many at a run's end."""

import json
from collections.abc import Iterable
from dataclasses import asdict, dataclass

PROPERTY = "newton_case"  # of a test's report: a `Case` as JSON


@dataclass(frozen=True, slots=True)
class Case:
    """One solve from zero."""

    seed: int
    point: int
    times_rated: float
    gamma: float  # rad, from the d axis
    position: float  # rad, mechanical
    rotor_steel: str
    stator_steel: str
    steps: int  # of the second-order elements
    coarse_steps: int  # of the first-order elements that gave the start

    @property
    def most(self) -> int:
        """Steps of the longer of the two iterations."""
        return max(self.steps, self.coarse_steps)

    def record(self) -> dict[str, object]:
        """For JSON."""
        return asdict(self)

    def __str__(self) -> str:
        """One line that is enough to do it again."""
        return (
            f"{self.steps} + {self.coarse_steps} first-order steps: seed {self.seed}, point "
            f"{self.point}: {self.times_rated:.2f} x rated, {self.gamma:.3f} rad from the d axis, "
            f"position {self.position:.3f} rad; rotor {self.rotor_steel}; "
            f"stator {self.stator_steel}"
        )


def summary(records: Iterable[str]) -> list[str]:
    """Lines about all cases: how many, how many steps, and the worst ones."""
    cases = [Case(**json.loads(record)) for record in records]
    if not cases:
        return []
    lines = []
    for name in ("steps", "coarse_steps"):
        counts = sorted(getattr(case, name) for case in cases)
        if counts[-1] == 0:
            continue
        mean, nine = sum(counts) / len(counts), counts[int(0.99 * (len(counts) - 1))]
        what = "second" if name == "steps" else "first"
        lines.append(
            f"{len(cases)} solves, {what}-order steps: mean {mean:.2f}, 99 % within {nine}, "
            f"most {counts[-1]}"
        )
    worst = sorted(cases, key=lambda case: (-case.steps - case.coarse_steps, case.seed))
    return [*lines, *(f"worst: {case}" for case in worst[:3])]
