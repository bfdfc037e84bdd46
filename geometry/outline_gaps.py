"""How far two outlines are apart, all along the second, and what of the first has no partner."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from .curves import Edge
from .outline_distance import ComplexArray, FloatArray, feet
from .supplier_align import on_edges

STEPS = 6000  # points along an outline
REACH_SHARE = 0.05  # of the outline's size: further off there is no partner


@dataclass(frozen=True, slots=True, eq=False)
class OutlineGaps:
    """Distances in m of points of two outlines from the other one, `reach` at the most."""

    first: ComplexArray  # (n,) points of the first outline
    first_gap: FloatArray  # (n,)
    second: ComplexArray  # (m,) points of the second
    second_gap: FloatArray  # (m,)
    reach: float  # m; a gap of this size has no partner within

    @property
    def largest(self) -> tuple[float, complex]:
        """The largest distance and where it is."""
        gaps = np.concatenate([self.second_gap, self.first_gap])
        worst = int(np.argmax(gaps))
        return float(gaps[worst]), complex(np.concatenate([self.second, self.first])[worst])

    @property
    def is_beyond(self) -> bool:
        """Whether something has no partner within the reach."""
        return self.largest[0] >= self.reach


def outline_gaps(first: Sequence[Edge], second: Sequence[Edge]) -> OutlineGaps:
    """Distances between two outlines that lie on each other, edges in m."""
    size = max(abs(p) for e in (*first, *second) for p in (e.start, e.end))
    reach = REACH_SHARE * size

    def gaps(own: Sequence[Edge], other: Sequence[Edge]) -> tuple[ComplexArray, FloatArray]:
        at = on_edges(own, sum(e.length for e in own) / STEPS)
        return at, np.minimum(np.abs(feet(at, other, reach).distance), reach)

    (at_first, first_gap), (at_second, second_gap) = gaps(first, second), gaps(second, first)
    return OutlineGaps(at_first, first_gap, at_second, second_gap, reach)
