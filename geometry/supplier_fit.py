"""A closed contour of lines and arcs fitted to measured points by least squares.

Idea. The designed contour says how many lines and arcs there are and in which order; joints and
sweeps are what is sought (Gauss-Newton on the points' distances; derivatives in closed form). A
line stays one unless the points bend it by more than their noise explains. Where the points tell
little, as of a joint's place along a smooth curve or of a fillet with six points, the design helps:
joints, chords, sweeps and kinks are expected near the designed ones (standard deviations below, of
the size of a punch's tolerances), against the noise found. Exact drawings are met exactly.
Axes: n points of one contour, m edges, 3 m unknowns: joints x, joints y, sweeps.
"""

import cmath
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from .curves import Edge
from .outline_distance import ComplexArray, Feet, FloatArray, IntArray, beside, feet
from .supplier_samples import Samples

BoolArray = npt.NDArray[np.bool_]

HELD = 1e-4  # m, of joints from the design where points do not tell
BENT = 0.01  # rad, of sweeps likewise
STRETCHED = (1e-5, 0.01)  # m and share of the length, of edges' chords likewise
KINK = math.radians(0.2)  # of joints that are smooth in the design
SMOOTH = math.radians(0.5)
NOISE = (1e-5, 5e-8)  # m, first guess and least standard deviation of points
LEAST_SCATTER = 2e-6  # m
STEPS = 8
OUTLYING = 6.0  # standard deviations, or
LEAST_OUTLYING = 2e-5  # m
ENOUGH_ENDS = 20  # points on a line that tell it without what lies between
LONG = 1e-3  # m, lines that may turn out bent
BEND_SIGNS = 4.0  # standard errors
LEAST_BEND = 1.5e-6  # m, rise of a line that is bent


@dataclass(frozen=True, slots=True, eq=False)
class FittedContour:
    """The contour as measured."""

    edges: tuple[Edge, ...]
    noise: float  # m, standard deviation of the points about it, robust
    residual: FloatArray  # (n,) m, of the points, positive outside the steel
    covariance: FloatArray  # (3m, 3m) m^2, m rad, rad^2

    def standard_error(self, number: int, share: float) -> float:
        """Of the contour's place in m across itself, at a share of edge `number`."""
        row = self.row(number, share)
        return math.sqrt(max(0.0, float(row @ self.covariance @ row)))

    def row(self, number: int, share: float) -> FloatArray:
        """Derivative (3m,) of that place by the unknowns, to the right of the edge."""
        columns, rows = _rows(self.edges, number, np.array([share]))
        whole = np.zeros(3 * len(self.edges))
        whole[columns] = rows[0]
        return whole


def fitted_contour(designed: Sequence[Edge], samples: Samples, reach: float) -> FittedContour:
    """The designed contour moved to fit the points.

    Args:
        designed: closed, the steel to its left, m.
        samples: of this contour, in the same frame.
        reach: m, points further off count for nothing.
    """
    is_line = np.array([edge.is_line for edge in designed])
    fit = _fit(designed, designed, is_line, samples, reach)
    bent = is_line & ~_still_straight(fit, samples, reach)
    if bent.any():
        fit = _fit(designed, fit.edges, is_line & ~bent, samples, reach)
    return fit


def _fit(
    designed: Sequence[Edge],
    first: Sequence[Edge],
    is_straight: BoolArray,
    samples: Samples,
    reach: float,
) -> FittedContour:
    count, noise = len(designed), NOISE[0]
    limit = reach  # the first step may have far to go; then what lies off is no part of the contour
    origin = np.array([edge.start for edge in designed])
    angles = np.array([edge.sweep for edge in designed])
    joints = np.array([edge.start for edge in first])
    sweeps = np.array([edge.sweep for edge in first])
    smooth = np.abs(_kinks(origin, angles)) < SMOOTH
    stretching = _stretch(origin)
    free = np.concatenate([np.ones(2 * count, dtype=bool), ~is_straight])
    edges = tuple(first)
    for _ in range(STEPS):
        found = feet(samples.at, edges, reach)
        use = _used(found, samples, limit, designed)
        off = _carried(samples.at, edges, found)
        # Priors in the same unit: a joint off by HELD weighs as a point off by the noise.
        weights = np.repeat([noise / HELD, noise / HELD, noise / BENT], count) ** 2
        turning = _kink_rows(joints)[smooth] * (noise / KINK)
        moved = joints - origin
        gone = np.concatenate([moved.real, moved.imag, sweeps - angles])
        normal = np.diag(weights) + turning.T @ turning + stretching * noise**2
        side = -(weights * gone) - stretching @ gone * noise**2
        side -= turning.T @ _kinks(joints, sweeps)[smooth] * (noise / KINK)
        for k, own in _own_points(found.edge, use):
            columns, rows = _rows(edges, k, found.share[own])
            normal[np.ix_(columns, columns)] += rows.T @ rows
            side[columns] += rows.T @ off[own]
        step = np.zeros(3 * count)
        step[free] = np.linalg.solve(normal[np.ix_(free, free)], side[free])
        joints = joints + step[:count] + 1j * step[count : 2 * count]
        sweeps = sweeps + step[2 * count :]
        edges = _edges(joints, sweeps)
        noise = _scatter(off[use])
        limit = outlying(noise)
        if np.abs(step[: 2 * count]).max() < 1e-2 * noise:
            break
    covariance = np.zeros((3 * count, 3 * count))
    covariance[np.ix_(free, free)] = noise**2 * np.linalg.inv(normal[np.ix_(free, free)])
    last = feet(samples.at, edges, reach)
    return FittedContour(edges, noise, last.distance, covariance)


def outlying(noise: float) -> float:
    """Distance in m beyond which a point is no part of its contour."""
    return max(OUTLYING * noise, LEAST_OUTLYING)


def _scatter(off: FloatArray) -> float:
    """Standard deviation in m of distances (n,), single ones far off left out."""
    if not off.size:
        return NOISE[0]
    middle = 1.4826 * float(np.median(np.abs(off)))
    near = off[np.abs(off) <= OUTLYING * max(middle, LEAST_SCATTER)]
    return max(NOISE[1], middle, float(np.sqrt(np.mean(near**2))))


def _stretch(joints: ComplexArray) -> FloatArray:
    """What changes of the chords cost, as a matrix (3m, 3m) on the unknowns, 1/m^2."""
    count = joints.size
    chords = np.roll(joints, -1) - joints
    weights = 1.0 / (STRETCHED[0] + STRETCHED[1] * np.abs(chords)) ** 2
    change = np.roll(np.eye(count), 1, axis=1) - np.eye(count)
    one = change.T @ (weights[:, None] * change)
    cost = np.zeros((3 * count, 3 * count))
    cost[:count, :count] = one
    cost[count : 2 * count, count : 2 * count] = one
    return cost


def _used(found: Feet, samples: Samples, limit: float, designed: Sequence[Edge]) -> BoolArray:
    """Points near the contour; between the ends of a straight piece, only those of lines.

    A line traced by many points is told by those: what lies between is no further measurement.
    """
    near = (np.abs(found.distance) < limit) & (found.edge >= 0)
    ends = np.bincount(found.edge[near & ~samples.is_between], minlength=len(designed))
    by_chords = np.array([e.is_line for e in designed]) & (ends < ENOUGH_ENDS)
    return near & (~samples.is_between | by_chords[found.edge])


def _own_points(number: IntArray, use: BoolArray) -> Iterator[tuple[int, IntArray]]:
    """Each edge that has points to be used, and which."""
    chosen = np.flatnonzero(use)
    chosen = chosen[np.argsort(number[chosen], kind="stable")]
    first = np.flatnonzero(np.diff(number[chosen], prepend=-1))
    for own in np.split(chosen, first[1:]):
        if own.size:
            yield int(number[own[0]]), own


def _carried(points: ComplexArray, edges: Sequence[Edge], found: Feet) -> FloatArray:
    """Distance (n,) of each point right of the unbounded line or circle of its edge."""
    off = np.zeros(points.size)
    for k, own in _own_points(found.edge, found.edge >= 0):
        off[own] = beside(points[own], edges[k])[0]
    return off


def _rows(edges: Sequence[Edge], k: int, t: FloatArray) -> tuple[IntArray, FloatArray]:
    """Derivative of the contour's place to its right at shares t (n,) of edge k.

    With P = a + (b - a) f, f = (1 - e^{i t w}) / (1 - e^{i w}), of an arc from a to b with sweep w
    (derived); of a line f = t.

    Returns:
        Numbers (5,) of the unknowns that it depends on, and the derivative (n, 5) by them.
    """
    count, edge = len(edges), edges[k]
    chord, after = edge.end - edge.start, (k + 1) % count
    f, slope = _shape(t, edge.sweep)
    back = np.conj(-1j * chord / abs(chord) * np.exp(1j * (t - 0.5) * edge.sweep))
    parts = [back * (1.0 - f), back * f, 1j * back * (1.0 - f), 1j * back * f, back * chord * slope]
    columns = np.array([k, after, count + k, count + after, 2 * count + k])
    return columns, np.column_stack([part.real for part in parts])


def _shape(t: FloatArray, sweep: float) -> tuple[ComplexArray, ComplexArray]:
    """The share f of the chord at shares t of an arc, and its derivative by the sweep."""
    if abs(sweep) < 1e-4:
        bow = np.asarray(0.5j * t * (t - 1.0), dtype=np.complex128)
        return t + sweep * bow, bow
    part, whole = np.exp(1j * t * sweep), cmath.exp(1j * sweep)
    f = (1.0 - part) / (1.0 - whole)
    slope = (-1j * t * part * (1.0 - whole) + 1j * whole * (1.0 - part)) / (1.0 - whole) ** 2
    return f, slope


def _kinks(joints: ComplexArray, sweeps: FloatArray) -> FloatArray:
    """Angle (m,) by which the contour turns at the start of each edge."""
    chords = np.roll(joints, -1) - joints
    return np.asarray(
        np.angle(chords / np.roll(chords, 1) * np.exp(-0.5j * (sweeps + np.roll(sweeps, 1))))
    )


def _kink_rows(joints: ComplexArray) -> FloatArray:
    """Derivative (m, 3m) of the kinks by joints and sweeps."""
    count = joints.size
    chords = np.roll(joints, -1) - joints
    rows = np.zeros((count, 3 * count))
    for k in range(count):
        before, after = (k - 1) % count, (k + 1) % count
        for column, factor in ((0, 1.0), (count, 1j)):
            ahead, back = (factor / chords[k]).imag, (factor / chords[before]).imag
            rows[k, column + after] += ahead
            rows[k, column + k] -= ahead + back
            rows[k, column + before] += back
        rows[k, 2 * count + k] -= 0.5
        rows[k, 2 * count + before] -= 0.5
    return rows


def _edges(joints: ComplexArray, sweeps: FloatArray) -> tuple[Edge, ...]:
    ends = np.roll(joints, -1)
    return tuple(
        Edge(complex(a), complex(b), math.tan(0.25 * float(w)))
        for a, b, w in zip(joints, ends, sweeps, strict=True)
    )


def _still_straight(fit: FittedContour, samples: Samples, reach: float) -> BoolArray:
    """Whether no more than noise bends each edge: its points' part of 4 t (1 - t)."""
    straight = np.ones(len(fit.edges), dtype=bool)
    found = feet(samples.at, fit.edges, reach)
    for k, edge in enumerate(fit.edges):
        own = found.edge == k
        if edge.length < LONG or own.sum() < 12:
            continue
        t, off = found.share[own], found.distance[own]
        shape = 4.0 * t * (1.0 - t)
        basis = np.column_stack([np.ones(t.size), t, shape])
        solution = np.linalg.lstsq(basis, off, rcond=None)[0]
        error = float(np.std(off - basis @ solution))
        error *= math.sqrt(float(np.linalg.inv(basis.T @ basis + 1e-12 * np.eye(3))[2, 2]))
        straight[k] = abs(float(solution[2])) <= max(BEND_SIGNS * error, LEAST_BEND)
    return straight
