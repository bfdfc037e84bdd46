"""The evaluation of one design of a study: its figures, or why there are none."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

OutcomeName = Literal["done", "rejected", "failed"]


@dataclass(frozen=True, slots=True)
class Evaluation:
    """What is known of a design after it was looked at.

    Rejected is a design that cannot be built or run; failed one whose computation did not come to
    an end.
    """

    outcome: OutcomeName
    reason: str = ""  # one line; empty where done
    stage: str = ""  # in which it ended, see `study_screening`
    figures: Mapping[str, float] = field(default_factory=dict)  # in the unit of their keys
    errors: Mapping[str, float] = field(default_factory=dict)  # of some figures, in their units
    passes: bool | None = None  # all limits of design and study; None where one is not known
    seconds: float = 0.0
