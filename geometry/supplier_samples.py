"""A drawn or measured outline as points: whatever it is made of, however it is joined.

Points are taken on every piece, so that loose, doubled and gaping drawings serve as well as closed
ones. Between the ends of a straight piece a point is marked: where the outline is an arc traced by
chords, it lies inside the arc and only the ends tell the arc.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from .curves import Edge
from .outline_distance import ComplexArray, points_on

MOST_SAMPLES = 12_000  # aimed at, over all pieces: a second for fitting
LEAST_ON_ARC = 8  # spaces
SAME = 1e-9  # m, points nearer than this are one


@dataclass(frozen=True, slots=True, eq=False)
class Samples:
    """Points of an outline in m, axes n_point."""

    at: ComplexArray  # (n,)
    is_between: npt.NDArray[np.bool_]  # (n,) inside a straight piece, not one of its ends
    step: float  # m, between the points of a piece at the most

    def at_places(self, at: ComplexArray) -> "Samples":
        """The same points elsewhere (n,)."""
        return Samples(at, self.is_between, self.step)

    def kept(self, which: npt.NDArray[np.bool_]) -> "Samples":
        """Some of the points."""
        return Samples(self.at[which], self.is_between[which], self.step)


def samples_of(edges: Sequence[Edge], step: float | None = None) -> Samples:
    """Points on all edges.

    Args:
        edges: lines and arcs in m.
        step: m between points; by default what gives `MOST_SAMPLES` over all edges.
    """
    if step is None:
        step = sum(edge.length for edge in edges) / MOST_SAMPLES
    least = LEAST_ON_ARC if len(edges) < MOST_SAMPLES else 1  # so many tell themselves
    ends = np.array([p for edge in edges for p in (edge.start, edge.end)])
    parts, between = [ends], [np.zeros(ends.size, dtype=bool)]
    for edge in edges:
        count = int(np.ceil(edge.length / step))
        if not edge.is_line:
            count = max(count, least)
        if count > 1:
            inner = points_on(edge, np.arange(1, count) / count)
            parts.append(inner)
            between.append(np.full(inner.size, edge.is_line))
    at, is_between = np.concatenate(parts), np.concatenate(between)
    _, first = np.unique(np.round(at / SAME), return_index=True)
    return Samples(at[first], is_between[first], step)
