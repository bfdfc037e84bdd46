"""Smooth curves of a drawing as lines and tangent arcs within a stated distance.

Idea: between two parameters the curve is replaced by two arcs that meet tangentially and have the
curve's own ends and end tangents (a biarc with equal control lengths; source: derived, plane
geometry). Where a sample of the curve lies further off than the tolerance, the interval is halved.
The error falls with the cube of the length, so 2 um need few arcs; a circle is met exactly.
"""

import cmath
import math
from collections.abc import Callable, Sequence
from itertools import pairwise

from .curves import Edge, Point

FIT_TOL = 2e-6  # m, largest distance of the arcs from the drawn curve; a punch keeps 1e-5 m
FLAT_TOL = 1e-9  # m, an arc that rises less above its chord is a line
SAMPLES = 12  # of the curve, on which each fit is judged
MOST_HALVINGS = 14  # of one interval: a curve that needs more has no tangent there
PARALLEL = 1e-9  # 1 - cos of the angle between the tangents

Curve = Callable[[float], tuple[Point, complex]]  # parameter -> point (m) and unit tangent


def fitted_arcs(curve: Curve, breaks: Sequence[float], tolerance: float = FIT_TOL) -> list[Edge]:
    """The curve as edges, each no further than `tolerance` m from it (judged at samples).

    Args:
        curve: point in m and unit tangent at a parameter.
        breaks: parameters in rising order, from start to end, with every corner among them.
        tolerance: in m.
    """
    edges: list[Edge] = []
    for low, high in pairwise(breaks):
        # Parts short of half a turn: ends that coincide have no chord.
        parts = [low + (high - low) * k / 4 for k in range(5)]
        for start, end in pairwise(parts):
            edges += _interval(curve, start, end, tolerance, MOST_HALVINGS)
    return edges


def straightened(edge: Edge) -> Edge:
    """The edge, as a line where its arc rises less than a nanometre above the chord."""
    rise = 0.5 * abs(edge.end - edge.start) * abs(edge.bulge)
    return Edge(edge.start, edge.end) if rise < FLAT_TOL else edge


def _interval(curve: Curve, low: float, high: float, tolerance: float, halvings: int) -> list[Edge]:
    (start, begin), (end, finish) = curve(low), curve(high)
    if abs(end - start) < FLAT_TOL:
        return []
    edges = _biarc(_off_corner(curve, low, high, begin), finish, start, end)
    inside = [curve(low + (high - low) * (k + 0.5) / SAMPLES)[0] for k in range(SAMPLES)]
    if halvings == 0 or max(_distance(edges, point) for point in inside) <= tolerance:
        return edges
    middle = 0.5 * (low + high)
    return _interval(curve, low, middle, tolerance, halvings - 1) + _interval(
        curve, middle, high, tolerance, halvings - 1
    )


def _off_corner(curve: Curve, low: float, high: float, tangent: complex) -> complex:
    """The tangent at the start as seen from inside: at a corner two of them meet."""
    just_inside = curve(low + 1e-7 * (high - low))[1]
    return just_inside if abs(just_inside - tangent) > 1e-3 else tangent


def _biarc(begin: complex, finish: complex, start: Point, end: Point) -> list[Edge]:
    chord = end - start
    both = begin + finish
    along = (chord * both.conjugate()).real
    unlike = 2.0 * (1.0 - (begin * finish.conjugate()).real)
    if unlike > PARALLEL:
        root = math.sqrt(along**2 + unlike * abs(chord) ** 2)
        reach = (root - along) / unlike
    elif abs(along) > 0.0:
        reach = 0.5 * abs(chord) ** 2 / along
    else:
        return [Edge(start, end)]
    joint = 0.5 * (start + end + reach * (begin - finish))
    if min(abs(joint - start), abs(end - joint)) < FLAT_TOL:
        return [Edge(start, end)]
    first = 2.0 * cmath.phase((joint - start) / begin)
    second = 2.0 * cmath.phase(finish / (end - joint))
    return [
        straightened(Edge(start, joint, math.tan(first / 4.0))),
        straightened(Edge(joint, end, math.tan(second / 4.0))),
    ]


def _distance(edges: Sequence[Edge], point: Point) -> float:
    gaps = []
    for edge in edges:
        if edge.is_line:
            chord = edge.end - edge.start
            gaps.append(abs(((point - edge.start) * chord.conjugate()).imag) / abs(chord))
        else:
            gaps.append(abs(abs(point - edge.centre) - edge.radius))
    return min(gaps)
