"""Loose lines and arcs to the areas they enclose: ends welded, crossings found, faces walked.

Idea. Ends nearer than the tolerance become one point; a curve is cut where another one ends on it
or crosses it; pieces drawn twice are kept once; what ends in the open is taken off and reported.
What remains is a plane graph. Leaving each point by the next edge clockwise walks round each face
with the face on the left (source: textbook matter, derived again); a walk with negative area is
the rim of a hole in the face that holds it. Cost: pairs of boxes that overlap, 0.3 s for 2000
pieces. Deviation: a crossing at a grazing angle next to a common end is a tangent point drawn
with rounding errors, and ignored.
"""

import cmath
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from .corners import crossings, foot, is_within
from .curves import Edge, Path, Point, area, reversed_edge, share_of
from .errors import OutlineError
from .outline_places import place_text
from .welding import Welder

GRAZING = 0.03  # rad, curves that cross at less beside a common end are drawn tangent
GRAZING_REACH = 60.0  # times the tolerance
MOST_PAIRS = 150_000  # of pieces whose boxes overlap: bounds the time; 3 n are usual
BLOCK = 256  # boxes compared at once, which bounds the memory


@dataclass(frozen=True, slots=True)
class Face:
    """An area enclosed: loops of signed edge numbers from 1, the outer one first."""

    loops: tuple[tuple[int, ...], ...]

    @property
    def numbers(self) -> frozenset[int]:
        """Numbers of its edges, from 1, without sign."""
        return frozenset(abs(signed) for loop in self.loops for signed in loop)


@dataclass(frozen=True, slots=True)
class Arrangement:
    """Edges that meet at their ends only, and the bounded faces between them."""

    edges: tuple[Edge, ...]
    sources: tuple[int, ...]  # of each edge: number of the piece it was cut from, from 0
    faces: tuple[Face, ...]
    open_ends: tuple[Point, ...]  # where a piece ended in the open; it was taken off
    healed: float  # m, largest distance over which ends were joined
    doubles: tuple[int, ...]  # numbers, from 0, of pieces dropped as there already

    def path(self, loop: Sequence[int]) -> Path:
        """A loop as a path."""
        return Path(tuple(self.edge(signed) for signed in loop))

    def edge(self, signed: int) -> Edge:
        """The edge of a signed number."""
        edge = self.edges[abs(signed) - 1]
        return edge if signed > 0 else reversed_edge(edge)

    def reaches(self, face: Face, radius: float, tolerance: float) -> bool:
        """Whether an edge of the face lies on the circle of `radius` in m about the origin."""
        for number in face.numbers:
            edge = self.edges[number - 1]
            if all(abs(abs(p) - radius) < 2.0 * tolerance for p in (edge.start, edge.point(0.5))):
                return True
        return False


def arrangement(pieces: Sequence[Edge], tolerance: float) -> Arrangement:
    """The plane graph of the pieces.

    Args:
        pieces: lines, and arcs of at most half a turn, in m; of two that coincide the first stays.
        tolerance: m, ends nearer than this are one.

    Raises:
        OutlineError: for a scribble, whose pieces cross each other everywhere.
    """
    welder = Welder(tolerance)
    for piece in pieces:
        welder.add(piece.start)
        welder.add(piece.end)
    points, number, healed = welder.welded()
    ends = [(number[2 * k], number[2 * k + 1]) for k in range(len(pieces))]
    curves = [
        Edge(points[a], points[b], piece.bulge) for piece, (a, b) in zip(pieces, ends, strict=True)
    ]
    cuts = _cuts(curves, ends, points, tolerance)
    graph = _Graph(points, tolerance)
    for k, (curve, pair) in enumerate(zip(curves, ends, strict=True)):
        graph.add_cut(curve, pair, cuts[k], k)
    open_ends = graph.pruned()
    return Arrangement(
        tuple(graph.edges),
        tuple(graph.sources),
        tuple(graph.faces()),
        tuple(points[v] for v in open_ends),
        healed,
        tuple(graph.doubles),
    )


def winds_about(path: Path, point: Point) -> bool:
    """Whether the closed path runs round the point; exact for arcs of at most half a turn."""
    total = 0.0
    for edge in path.edges:
        start, end = edge.start - point, edge.end - point
        if start == 0.0 or end == 0.0:
            return False
        turn = cmath.phase(end / start)
        if not edge.is_line and abs(point - edge.centre) < edge.radius:
            # Between chord and arc, or on the chord, the arc passes on the other side.
            sense = math.copysign(1.0, edge.bulge)
            if turn * sense < 0.0:
                turn += 2.0 * math.pi * sense
        total += turn
    return abs(total) > math.pi


def overlapping_boxes(edges: Sequence[Edge], margin: float) -> Iterator[tuple[int, int]]:
    """Pairs i < j of edges whose boxes, grown by `margin` m, overlap."""
    if not edges:
        return
    start = np.array([edge.start for edge in edges])
    end = np.array([edge.end for edge in edges])
    rise = 0.5 * np.abs(end - start) * np.abs([edge.bulge for edge in edges]) + 0.5 * margin
    low_x, high_x = np.minimum(start.real, end.real) - rise, np.maximum(start.real, end.real) + rise
    low_y, high_y = np.minimum(start.imag, end.imag) - rise, np.maximum(start.imag, end.imag) + rise
    for first in range(0, len(edges), BLOCK):
        rows = slice(first, first + BLOCK)
        meet = (
            (low_x[rows, None] <= high_x[None, :])
            & (low_x[None, :] <= high_x[rows, None])
            & (low_y[rows, None] <= high_y[None, :])
            & (low_y[None, :] <= high_y[rows, None])
        )
        for i, j in np.argwhere(meet).tolist():
            if first + i < j:
                yield first + i, j


def _cuts(
    curves: Sequence[Edge],
    ends: Sequence[tuple[int, int]],
    points: list[Point],
    tolerance: float,
) -> list[list[tuple[float, int]]]:
    """Shares and point numbers at which each curve is cut; new points are appended."""
    cuts: list[list[tuple[float, int]]] = [[] for _ in curves]
    fresh = Welder(tolerance)
    where: list[tuple[int, float]] = []
    for pairs, (i, j) in enumerate(overlapping_boxes(curves, 2.0 * tolerance)):
        if pairs > MOST_PAIRS:
            at = place_text(points[ends[i][0]])
            raise OutlineError(
                f"more than {MOST_PAIRS} pieces lie over each other, as at {at}; accepted the "
                "outline of a lamination"
            )
        for a, b in ((i, j), (j, i)):
            for v in ends[a]:
                if v not in ends[b] and _is_near(curves[b], points[v], tolerance):
                    cuts[b].append((share_of(curves[b], points[v]), v))
        for point in crossings(curves[i], curves[j]):
            if not (is_within(curves[i], point) and is_within(curves[j], point)):
                continue
            if _is_known(point, (i, j), curves, ends, points, tolerance):
                continue
            for k in (i, j):
                fresh.add(point)
                where.append((k, share_of(curves[k], point)))
    made, number, _ = fresh.welded()
    base = len(points)
    points += made
    for (k, share), v in zip(where, number, strict=True):
        cuts[k].append((share, base + v))
    return cuts


def _is_near(curve: Edge, point: Point, tolerance: float) -> bool:
    near = foot(curve, point)
    return abs(near - point) <= tolerance and is_within(curve, near)


def _is_known(
    point: Point,
    pair: tuple[int, int],
    curves: Sequence[Edge],
    ends: Sequence[tuple[int, int]],
    points: Sequence[Point],
    tolerance: float,
) -> bool:
    """Whether a crossing is one of the ends, or comes of rounding at a tangent point."""
    i, j = pair
    if any(abs(points[v] - point) <= 2.0 * tolerance for v in (*ends[i], *ends[j])):
        return True
    common = set(ends[i]) & set(ends[j])
    if not any(abs(points[v] - point) < GRAZING_REACH * tolerance for v in common):
        return False
    first, second = (curves[k].direction(share_of(curves[k], point)) for k in pair)
    return abs((first.conjugate() * second).imag) < GRAZING


class _Graph:
    """The plane graph while it is made: edges between numbered points."""

    def __init__(self, points: Sequence[Point], tolerance: float) -> None:
        self.points = points
        self.tolerance = tolerance
        self.edges: list[Edge] = []
        self.ends: list[tuple[int, int]] = []
        self.sources: list[int] = []
        self.doubles: list[int] = []
        self._between: dict[tuple[int, int], list[int]] = {}

    def add_cut(
        self, curve: Edge, ends: tuple[int, int], cuts: Sequence[tuple[float, int]], source: int
    ) -> None:
        """Add the pieces of a curve between its cuts."""
        inside = sorted(cut for cut in cuts if 0.0 < cut[0] < 1.0)
        stops = [(0.0, ends[0]), *inside, (1.0, ends[1])]
        is_double = True
        for (low, a), (high, b) in pairwise(stops):
            if a == b:
                continue
            bulge = math.tan((high - low) * curve.sweep / 4.0)
            is_double &= not self._add(Edge(self.points[a], self.points[b], bulge), (a, b), source)
        if is_double:
            self.doubles.append(source)

    def _add(self, edge: Edge, ends: tuple[int, int], source: int) -> bool:
        rivals = self._between.setdefault((min(ends), max(ends)), [])
        middle = edge.point(0.5)
        if any(abs(self.edges[k].point(0.5) - middle) <= 3.0 * self.tolerance for k in rivals):
            return False
        rivals.append(len(self.edges))
        self.edges.append(edge)
        self.ends.append(ends)
        self.sources.append(source)
        return True

    def pruned(self) -> list[int]:
        """Take off what ends in the open; the points where it ended."""
        at: dict[int, set[int]] = {}
        for k, ends in enumerate(self.ends):
            for v in ends:
                at.setdefault(v, set()).add(k)
        open_ends = [v for v, beside in at.items() if len(beside) == 1]
        gone: set[int] = set()
        todo = list(open_ends)
        while todo:
            v = todo.pop()
            for k in list(at[v]):
                gone.add(k)
                for w in self.ends[k]:
                    at[w].discard(k)
                    if len(at[w]) == 1:
                        todo.append(w)
        keep = [k for k in range(len(self.edges)) if k not in gone]
        self.edges = [self.edges[k] for k in keep]
        self.ends = [self.ends[k] for k in keep]
        self.sources = [self.sources[k] for k in keep]
        return open_ends

    def faces(self) -> list[Face]:
        """The bounded faces, holes given to the smallest face around them."""
        outers: list[tuple[float, list[int]]] = []
        inners: list[list[int]] = []
        for loop in self._loops():
            size = area(self._path(loop))
            if size > 0.0:
                outers.append((size, loop))
            else:
                inners.append(loop)
        outers.sort(key=lambda outer: outer[0])
        holes: list[list[tuple[int, ...]]] = [[] for _ in outers]
        paths = [self._path(loop) for _, loop in outers]
        boxes = [_box(path) for path in paths]
        for loop in inners:
            own = {abs(signed) for signed in loop}
            point = self._edge(loop[0]).point(0.5)
            for k, path in enumerate(paths):
                is_around = boxes[k][0] <= point.real <= boxes[k][1]
                if not is_around or not boxes[k][2] <= point.imag <= boxes[k][3]:
                    continue
                if own.isdisjoint(abs(s) for s in outers[k][1]) and winds_about(path, point):
                    holes[k].append(tuple(loop))
                    break
        return [
            Face((tuple(loop), *inside)) for (_, loop), inside in zip(outers, holes, strict=True)
        ]

    def _loops(self) -> list[list[int]]:
        leaving: dict[int, list[int]] = {}
        for k, (a, b) in enumerate(self.ends):
            leaving.setdefault(a, []).append(k + 1)
            leaving.setdefault(b, []).append(-k - 1)
        following: dict[int, int] = {}
        for beside in leaving.values():
            if len(beside) > 2:
                beside.sort(key=self._bearing(beside))
            for before, after in zip(beside, beside[1:] + beside[:1], strict=True):
                # Arriving by the reverse of `after`, the next edge clockwise is `before`.
                following[-after] = before
        loops = []
        while following:
            first = next(iter(following))
            loop = [first]
            step = following.pop(first)
            while step != first:
                loop.append(step)
                step = following.pop(step)
            loops.append(loop)
        return loops

    def _bearing(self, beside: Sequence[int]) -> "_Bearing":
        reach = 0.5 * min(self._edge(signed).length for signed in beside)
        return _Bearing(self, reach)

    def _edge(self, signed: int) -> Edge:
        edge = self.edges[abs(signed) - 1]
        return edge if signed > 0 else reversed_edge(edge)

    def _path(self, loop: Sequence[int]) -> Path:
        return Path(tuple(self._edge(signed) for signed in loop))


@dataclass(frozen=True, slots=True)
class _Bearing:
    """Angle at which an edge leaves a point, a little along it: tangent edges bend apart."""

    graph: _Graph
    reach: float

    def __call__(self, signed: int) -> float:
        edge = self.graph._edge(signed)
        return cmath.phase(edge.point(self.reach / edge.length) - edge.start)


def _box(path: Path) -> tuple[float, float, float, float]:
    rises = [0.5 * abs(e.end - e.start) * abs(e.bulge) for e in path.edges]
    x = [e.start.real for e in path.edges]
    y = [e.start.imag for e in path.edges]
    rise = max(rises)
    return min(x) - rise, max(x) + rise, min(y) - rise, max(y) + rise
