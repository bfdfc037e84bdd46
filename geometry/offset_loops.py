"""The exact parallel of a closed contour of lines and arcs: lines stay lines, arcs arcs.

Idea: a point of the parallel curve at distance d is nearest either to the inside of an edge, then
it lies on that edge's own parallel (an arc of radius +- d about the same centre, none where the
radius is used up), or to a corner, then it lies on the arc of radius d about it. So the parallels
of all edges, and an arc at each corner that opens, contain the whole result. They are cut where
they meet, and of the pieces those stay whose middle is no nearer to the contour than d; what stays
chains to loops. Corners that close, arcs that vanish, and a contour that meets itself far away are
all the same to this: no case is told apart.

Sharp corners: instead of the arc the two parallels are extended until they meet, if they do within
`MITRE` times d of the corner; so the parallel of the parallel is the contour again.
Source: derived; the selection by distance is common practice for offsets of polygons, no source.
Cost: all pairs of edges are looked at, most of them by their boxes only.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from .arrangement import overlapping_boxes
from .corners import crossings, intersections
from .curves import Edge, Path, Point, arc, closed, offset_edge, piece, share_of
from .outline_edges import distances_to
from .punch_options import Corners

WELD = 1e-8  # m, ends no further apart are one point; 1/100 of the promised 1e-6
NEAR = 1e-9  # m, by which a piece of the result may be nearer than d: rounding is 1e-16
MITRE = (
    5.0  # times d from the corner to the tip, as far as a corner is extended: from 23 degrees on
)


@dataclass(frozen=True, slots=True)
class _Joint:
    """What a corner adds between two parallels: an arc, or the tip up to which both extend."""

    rolled: Edge | None = None
    tip: Point | None = None


def offset_loops(path: Path, distance: float, corners: Corners) -> tuple[Path, ...]:
    """The parallel of a closed contour at `distance` m, to the right of travel if positive.

    Returns:
        Its loops, run as the contour is: one if the contour keeps its shape, none if nothing is
        left, more where it falls apart, or none where the loops touch and cannot be told apart.
    """
    if distance == 0.0:
        return (path,)
    sides = _parallels(path.edges, distance, corners)
    pieces = _cut(sides)
    middles = np.array([one.point(0.5) for one, _ in pieces])
    gaps = np.full(middles.size, np.inf)
    for edge in path.edges:
        gaps = np.minimum(gaps, distances_to(edge, middles))
    kept = [p for p, gap in zip(pieces, gaps, strict=True) if gap >= abs(distance) - NEAR]
    return _loops(kept, sides)


def _parallels(edges: Sequence[Edge], distance: float, corners: Corners) -> list[Edge]:
    """The parallels of all edges that have one, extended to tips, and the arcs at corners."""
    own = [_parallel(edge, distance) for edge in edges]
    joints = []
    for k, after in enumerate(edges):
        joints.append(_joint(edges[k - 1], after, own[k - 1], own[k], distance, corners))
    result = []
    for k, edge in enumerate(own):
        before, behind = joints[k], joints[(k + 1) % len(edges)]
        if before.rolled is not None:
            result.append(before.rolled)
        if edge is not None:
            result.append(_extended(edge, before.tip, behind.tip))
    return result


def _parallel(edge: Edge, distance: float) -> Edge | None:
    """The edge's own parallel; None where its radius is used up."""
    try:
        parallel = offset_edge(edge, -distance)
    except ValueError:
        return None
    return parallel if parallel.length > WELD else None


def _joint(
    before: Edge,
    after: Edge,
    near: Edge | None,
    far: Edge | None,
    distance: float,
    corners: Corners,
) -> _Joint:
    turn = cmath.phase(after.direction(0.0) / before.direction(1.0))
    if turn * distance <= 0.0 or abs(distance * turn) <= WELD:
        return _Joint()
    corner = after.start
    start = corner - 1j * distance * before.direction(1.0)
    end = corner - 1j * distance * after.direction(0.0)
    if corners == "sharp" and near is not None and far is not None:
        # Past the end of the one parallel and short of the start of the other.
        ahead = [
            tip
            for tip in crossings(near, far)
            if abs(tip - corner) <= MITRE * abs(distance)
            and ((tip - start) / before.direction(1.0)).real > 0.0
            and ((tip - end) / after.direction(0.0)).real < 0.0
        ]
        if ahead:
            return _Joint(tip=min(ahead, key=lambda tip: abs(tip - corner)))
    return _Joint(rolled=Edge(start, end, math.tan(turn / 4.0)))


def _extended(edge: Edge, start: Point | None, end: Point | None) -> Edge:
    """The edge from one point on its unbounded curve to another; its own ends where not given."""
    if start is None and end is None:
        return edge
    a, b = edge.start if start is None else start, edge.end if end is None else end
    if edge.is_line:
        return Edge(a, b)
    return arc(a, b, edge.centre, ccw=edge.bulge > 0.0)


def _cut(sides: Sequence[Edge]) -> list[tuple[Edge, int]]:
    """The sides cut at their common points, each piece with the number of its side."""
    cuts: list[list[Point]] = [[] for _ in sides]
    for i, j in overlapping_boxes(sides, WELD):
        for point in intersections(sides[i], sides[j]):
            if not _is_weld(sides[i], sides[j], point):
                cuts[i].append(point)
                cuts[j].append(point)
    pieces = []
    for k, (edge, points) in enumerate(zip(sides, cuts, strict=True)):
        inner = [p for p in points if min(abs(p - edge.start), abs(p - edge.end)) > WELD]
        stops = [edge.start, *sorted(inner, key=lambda p: share_of(edge, p)), edge.end]
        if len(stops) == 2:
            pieces.append((edge, k))
            continue
        for a, b in pairwise(stops):
            if abs(b - a) > WELD:
                pieces.append((piece(edge, a, b), k))
    return pieces


def _is_weld(first: Edge, second: Edge, point: Point) -> bool:
    """Whether the point is the one where two sides run on into each other.

    Curves that touch cross each other by rounding alone at up to 1e-5 m from where they touch, so
    it is the length of the sides that bounds the neighbourhood.
    """
    for end, start in ((first.end, second.start), (second.end, first.start)):
        if abs(end - start) <= WELD and abs(point - end) < 0.5 * min(first.length, second.length):
            return True
    return False


class _Nodes:
    """Points within `WELD` of each other as one number, found by a grid."""

    def __init__(self) -> None:
        self.points: list[Point] = []
        self._cells: dict[tuple[int, int], list[int]] = {}

    def of(self, point: Point) -> int:
        x, y = math.floor(point.real / WELD), math.floor(point.imag / WELD)
        for cell in ((x + i, y + j) for i in (-1, 0, 1) for j in (-1, 0, 1)):
            for known in self._cells.get(cell, ()):
                if abs(self.points[known] - point) <= WELD:
                    return known
        self.points.append(point)
        self._cells.setdefault((x, y), []).append(len(self.points) - 1)
        return len(self.points) - 1


def _loops(pieces: Sequence[tuple[Edge, int]], sides: Sequence[Edge]) -> tuple[Path, ...]:
    nodes = _Nodes()
    links = [(nodes.of(one.start), nodes.of(one.end), k) for one, k in pieces]
    bulges = [one.bulge for one, _ in pieces]
    left = _without_loose_ends(links)
    leaving = {links[n][0]: n for n in left}
    if len(leaving) != len(left):
        return ()  # two ways on: loops that touch
    loops = []
    while leaving:
        run = [leaving.pop(next(iter(leaving)))]
        while (node := links[run[-1]][1]) in leaving:
            run.append(leaving.pop(node))
        edges = [
            (Edge(nodes.points[links[n][0]], nodes.points[links[n][1]], bulges[n]), links[n][2])
            for n in run
        ]
        loops.append(_without_cuts(edges, sides))
    return tuple(loops)


def _without_loose_ends(links: Sequence[tuple[int, int, int]]) -> list[int]:
    """Numbers of the pieces that are part of a loop."""
    left = list(range(len(links)))
    while True:
        starts, ends = {links[n][0] for n in left}, {links[n][1] for n in left}
        kept = [n for n in left if links[n][0] in ends and links[n][1] in starts]
        if len(kept) == len(left):
            return kept
        left = kept


def _without_cuts(run: Sequence[tuple[Edge, int]], sides: Sequence[Edge]) -> Path:
    """A loop with the pieces of one side that follow each other made one again."""
    first = next((k for k in range(len(run)) if run[k - 1][1] != run[k][1]), 0)
    merged: list[tuple[Edge, int]] = []
    for edge, side in (*run[first:], *run[:first]):
        if merged and merged[-1][1] == side:
            merged[-1] = (piece(sides[side], merged[-1][0].start, edge.end), side)
        else:
            merged.append((edge, side))
    return closed([edge for edge, _ in merged])
