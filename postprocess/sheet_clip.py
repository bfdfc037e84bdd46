"""Parts of outlines that a view shows, and where a line crosses them: exact on lines and arcs."""

import cmath
from collections.abc import Sequence
from itertools import pairwise

from lamwright.geometry.corners import foot, intersections, is_within
from lamwright.geometry.curves import Edge, Point, circle, line, piece, share_of
from lamwright.geometry.distances import nearest

SAME = 1e-9  # of an edge's length, cuts nearer to each other or to an end are one


def cut_at(edge: Edge, points: Sequence[Point]) -> list[Edge]:
    """The edge in pieces, parted at points that lie on it."""
    shares = sorted(
        share for share in (share_of(edge, p) for p in points) if SAME < share < 1 - SAME
    )
    marks = [edge.start, *(edge.point(share) for share in shares), edge.end]
    return [
        Edge(p, q) if edge.is_line else piece(edge, p, q)
        for p, q in pairwise(marks)
        if abs(q - p) > SAME * edge.length
    ]


def in_circle(edges: Sequence[Edge], centre: Point, radius: float) -> list[Edge]:
    """The parts of edges that lie within a circle, in the order of the edges."""
    fence = circle(centre, radius).edges
    kept = []
    for edge in edges:
        if nearest_gap(edge, centre) > radius:
            continue
        cuts = [point for one in fence for point in intersections(edge, one)]
        kept += [p for p in cut_at(edge, cuts) if abs(p.point(0.5) - centre) <= radius]
    return kept


def in_window(edges: Sequence[Edge], middle: float, half: float) -> list[Edge]:
    """The parts of edges whose points lie within `half` rad of the direction `middle`."""
    reach = 2.0 * max((abs(e.point(k / 2)) for e in edges for k in range(3)), default=1.0)
    fences = [line(0j, cmath.rect(reach, middle + side * half)) for side in (1.0, -1.0)]
    kept = []
    for edge in edges:
        cuts = [point for fence in fences for point in intersections(edge, fence)]
        kept += [p for p in cut_at(edge, cuts) if off_axis(p.point(0.5), middle) <= half]
    return kept


def off_axis(point: Point, middle: float) -> float:
    """Angle in rad between a point's direction and `middle`."""
    return abs(cmath.phase(point * cmath.exp(-1j * middle)))


def nearest_gap(edge: Edge, point: Point) -> float:
    """Distance from a point to an edge."""
    at = foot(edge, point)
    if is_within(edge, at):
        return abs(at - point)
    return min(abs(edge.start - point), abs(edge.end - point))


def nearest_edge(edges: Sequence[Edge], point: Point) -> Edge:
    """The edge that a point lies nearest to."""
    return min(edges, key=lambda edge: nearest_gap(edge, point))


def shortest(first: Sequence[Edge], second: Sequence[Edge]) -> tuple[Point, Point]:
    """The nearest points of two sets of edges."""
    pairs = [nearest(one, other) for one in first for other in second]
    return min(pairs, key=lambda pair: abs(pair[1] - pair[0]))


def heights_at(edges: Sequence[Edge], x: float) -> list[float]:
    """Heights at which edges cross the upright line at `x`, rising; a joint counts once."""
    reach = 2.0 * max(max(abs(e.start), abs(e.end)) for e in edges) + 1e-3
    upright = line(complex(x, -reach), complex(x, reach))
    found = sorted(point.imag for edge in edges for point in intersections(edge, upright))
    kept: list[float] = []
    for height in found:
        if not kept or height - kept[-1] > 1e-9 * reach:
            kept.append(height)
    return kept


def runs(edges: Sequence[Edge], chosen: Sequence[bool]) -> list[tuple[Edge, ...]]:
    """Chains of neighbouring chosen edges of a closed outline."""
    if all(chosen):
        return [tuple(edges)]
    first = next(k for k, is_chosen in enumerate(chosen) if not is_chosen)
    found: list[list[Edge]] = []
    was_chosen = False
    for k in range(first, first + len(edges)):
        is_chosen = chosen[k % len(edges)]
        if is_chosen and not was_chosen:
            found.append([])
        if is_chosen:
            found[-1].append(edges[k % len(edges)])
        was_chosen = is_chosen
    return [tuple(run) for run in found]


def turn_of(angle: float) -> complex:
    """The unit factor that turns the direction `angle` (rad) up."""
    return 1j * cmath.exp(-1j * angle)
