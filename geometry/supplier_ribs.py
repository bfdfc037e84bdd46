"""Every rib of a measured outline: its least width, and how surely it is known.

A rib between two straight sides that are parallel by design has its mean width, unless its taper
shows above the noise: the least of two noisy lines is their tilts' more than the rib's.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from .curves import Edge, Point, share_of
from .distances import nearest
from .outline_distance import FloatArray
from .outline_edges import distance_to
from .section import Rib
from .supplier_fit import FittedContour
from .supplier_ideal import Ideal

LEAST_REACH = 3e-4  # m, edges this near to a rib's end belong to the rib
SIGNS = 3.0  # standard errors of a taper that shows
PARALLEL = 1e-6  # rad
SAME = 1e-8  # m
LEAST_FACING = 2e-4  # m, of both sides of an even rib


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
        even = _even_width(rib, ideal, fitted, sides)
        if even is not None:
            width, error, start, end = even
            found.append(MeasuredRib(pole, rib.name, rib.width, width, error, start, end))
            continue
        (start, end), first, second = min(pairs, key=lambda pair: abs(pair[0][0] - pair[0][1]))
        error = math.hypot(_error(fitted, first, start), _error(fitted, second, end))
        found.append(MeasuredRib(pole, rib.name, rib.width, abs(end - start), error, start, end))
    return tuple(found)


def _even_width(
    rib: Rib,
    ideal: Ideal,
    fitted: Sequence[FittedContour],
    sides: Sequence[Sequence[tuple[int, int]]],
) -> tuple[float, float, Point, Point] | None:
    """Mean width in m, its standard error and where, of a rib without a taper that shows."""
    for c, k in sides[0]:
        for d, m in sides[1]:
            designed = ideal.contours[c].path.edges[k], ideal.contours[d].path.edges[m]
            shares = _parallel(*designed, rib.width)
            one, other = fitted[c], fitted[d]
            if shares is None or not (one.edges[k].is_line and other.edges[m].is_line):
                continue
            ahead = one.edges[k].end - one.edges[k].start
            ahead = ahead / abs(ahead)
            ends = [(one.edges[k].point(s), other.edges[m].point(t)) for s, t in shares]
            widths = [abs(((q - p) * ahead.conjugate()).imag) for p, q in ends]
            # Both sides' right is out of the steel: what moves there widens the rib.
            rows = [(one.row(k, s), other.row(m, t)) for s, t in shares]
            means = tuple(0.5 * (a + b) for a, b in zip(*rows, strict=True))
            tapers = tuple(a - b for a, b in zip(*rows, strict=True))
            if abs(widths[0] - widths[1]) > SIGNS * _spread(one, other, tapers):
                return None
            start, end = (0.5 * (a + b) for a, b in zip(*ends, strict=True))
            return 0.5 * sum(widths), _spread(one, other, means), start, end
    return None


def _parallel(
    first: Edge, second: Edge, width: float
) -> tuple[tuple[float, float], tuple[float, float]] | None:
    """Shares of two lines at both ends of where they face each other `width` m apart."""
    if not (first.is_line and second.is_line):
        return None
    ahead, chord = first.end - first.start, second.end - second.start
    across = ((second.start - first.start) * ahead.conjugate()).imag / abs(ahead)
    turn = (chord * ahead.conjugate()).imag / (abs(chord) * abs(ahead))
    if abs(turn) > PARALLEL or abs(abs(across) - width) > SAME:
        return None
    at = sorted(share_of(first, p) for p in (second.start, second.end))
    low, high = max(0.0, at[0]), min(1.0, at[1])
    if (high - low) * abs(ahead) < LEAST_FACING:
        return None
    side = 1j * ahead / abs(ahead) * across
    low_end, high_end = (share_of(second, first.point(s) + side) for s in (low, high))
    return (low, low_end), (high, high_end)


def _spread(one: FittedContour, other: FittedContour, rows: tuple[FloatArray, FloatArray]) -> float:
    """Standard deviation in m of a width that has these derivatives by both contours."""
    if one is other:
        row = rows[0] + rows[1]
        return math.sqrt(max(0.0, float(row @ one.covariance @ row)))
    return math.sqrt(
        max(0.0, sum(float(r @ f.covariance @ r) for r, f in zip(rows, (one, other), strict=True)))
    )


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
