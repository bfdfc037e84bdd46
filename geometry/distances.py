"""Exact distances between lines and arcs.

The nearest points of two edges are a common point, or have an end of one edge among them, or lie
on a common normal: the perpendicular from an arc's centre to a line, or the line through both
centres of two arcs (derived: stationarity of the distance along both edges). Every candidate is a
pair of points on the edges, so the least of them is the distance.
"""

import math
from collections.abc import Sequence

from .corners import foot, intersections, is_within
from .curves import Edge, Point


def nearest(first: Edge, second: Edge) -> tuple[Point, Point]:
    """The nearest points of two edges, on the first and on the second."""
    for point in intersections(first, second):
        return point, point
    pairs = [(p, q) for p in (first.start, first.end) for q in (second.start, second.end)]
    pairs += [(p, q) for p, q in _end_feet(first, second)]
    pairs += [(p, q) for q, p in _end_feet(second, first)]
    pairs += [
        (p, q)
        for p, q in _common_normals(first, second)
        if is_within(first, p) and is_within(second, q)
    ]
    return min(pairs, key=lambda pair: abs(pair[0] - pair[1]))


def distance(first: Sequence[Edge], second: Sequence[Edge], enough: float = math.inf) -> float:
    """Least distance in m between two chains of edges, 0 where they cross.

    Args:
        first: one chain.
        second: the other.
        enough: a distance in m that need not be told from a larger one: the result is exact below
            it and otherwise no less than it.
    """
    # No point of an edge lies further than half its length from its middle: pairs that this
    # bound keeps apart need no closer look, 5 of 9 for two straight barriers.
    spots_1, spots_2 = ([(e.point(0.5), 0.5 * e.length, e) for e in es] for es in (first, second))
    bounds = [
        (abs(middle_1 - middle_2) - half_1 - half_2, edge_1, edge_2)
        for middle_1, half_1, edge_1 in spots_1
        for middle_2, half_2, edge_2 in spots_2
    ]
    gap = math.inf
    for bound, edge_1, edge_2 in sorted(bounds, key=lambda pair: pair[0]):
        if bound >= min(gap, enough):
            break
        p, q = nearest(edge_1, edge_2)
        gap = min(gap, abs(p - q))
    return gap


def _end_feet(first: Edge, second: Edge) -> list[tuple[Point, Point]]:
    feet = [(end, foot(second, end)) for end in (first.start, first.end)]
    return [(end, point) for end, point in feet if is_within(second, point)]


def _common_normals(first: Edge, second: Edge) -> list[tuple[Point, Point]]:
    if first.is_line and second.is_line:
        return []
    if first.is_line:
        point = foot(first, second.centre)
        return [(point, foot(second, point))]
    if second.is_line:
        point = foot(second, first.centre)
        return [(foot(first, point), point)]
    between = second.centre - first.centre
    if between == 0.0:
        return []
    unit = between / abs(between)
    return [
        (first.centre + s * first.radius * unit, second.centre + t * second.radius * unit)
        for s in (1.0, -1.0)
        for t in (1.0, -1.0)
    ]
