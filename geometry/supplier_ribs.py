"""Every rib of a measured outline: its least width, and how surely it is known."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from .curves import Edge, Point, share_of
from .distances import nearest
from .outline_edges import distance_to
from .supplier_fit import FittedContour
from .supplier_ideal import Ideal

LEAST_REACH = 3e-4  # m, edges this near to a rib's end belong to the rib


@dataclass(frozen=True, slots=True)
class MeasuredRib:
    """A rib of one pole at its thinnest place, in m, in the rotor's frame."""

    pole: int  # from 1
    name: str
    designed: float
    width: float
    error: float  # standard error of the width, by the noise of the points
    start: Point
    end: Point

    @property
    def difference(self) -> float:
        """Width less the designed one, m."""
        return self.width - self.designed


def measured_ribs(ideal: Ideal, fitted: Sequence[FittedContour]) -> tuple[MeasuredRib, ...]:
    """All ribs of all poles."""
    found = []
    for pole, rib in ideal.ribs:
        reach = max(rib.width, LEAST_REACH)
        sides = [_beside(point, ideal, fitted, reach) for point in (rib.start, rib.end)]
        pairs = [
            (nearest(fitted[c].edges[k], fitted[d].edges[m]), (c, k), (d, m))
            for c, k in sides[0]
            for d, m in sides[1]
        ]
        (start, end), first, second = min(pairs, key=lambda pair: abs(pair[0][0] - pair[0][1]))
        error = math.hypot(_error(fitted, first, start), _error(fitted, second, end))
        found.append(MeasuredRib(pole, rib.name, rib.width, abs(end - start), error, start, end))
    return tuple(found)


def _beside(
    point: Point, ideal: Ideal, fitted: Sequence[FittedContour], reach: float
) -> list[tuple[int, int]]:
    """Contour and number of the edges that a rib's end is on or near, of the nearest contour."""
    gaps = [[distance_to(edge, point) for edge in contour.path.edges] for contour in ideal.contours]
    own = min(range(len(gaps)), key=lambda c: min(gaps[c]))
    return [(own, k) for k, gap in enumerate(gaps[own]) if gap <= reach]


def _error(fitted: Sequence[FittedContour], at: tuple[int, int], point: Point) -> float:
    contour, number = at
    edge: Edge = fitted[contour].edges[number]
    share = min(1.0, max(0.0, share_of(edge, point)))
    return fitted[contour].standard_error(number, share)
