"""Regions to a welded outline: each point and each edge once, loops as signed edge numbers.

Axes: n_point welded points, n_edge edges.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from lamwright.geometry.curves import Edge
from lamwright.geometry.section import Region

from .types import IntArray

ComplexArray = npt.NDArray[np.complex128]
WELD_TOL = 1e-9  # m; outlines are exact to rounding (1e-16), a punch to 1e-5


@dataclass(frozen=True, slots=True, eq=False)
class Outline:
    """The edges of a set of regions, each stored once.

    `loops[region][loop]` lists signed edge numbers from 1, negative where the loop runs the edge
    backwards; the outer loop is first.
    """

    points: ComplexArray  # (n_point,), m
    edges: tuple[Edge, ...]  # between welded points
    ends: IntArray  # (n_edge, 2), point numbers
    loops: tuple[tuple[tuple[int, ...], ...], ...]


def weld(points: ComplexArray) -> tuple[ComplexArray, IntArray]:
    """Points closer than WELD_TOL made one: the kept points and each point's number."""
    label = np.arange(points.size)
    pairs = _near(points)
    before = label - 1
    while np.any(before != label):  # the least number spreads along chains of near points
        before = label.copy()
        for one, other in (pairs, pairs[::-1]):
            np.minimum.at(label, one, before[other])
    # Numbered in order of first appearance, so that the result follows the input's order.
    _, first, back = np.unique(label, return_index=True, return_inverse=True)
    order = np.argsort(first, kind="stable")
    rank = np.empty_like(order)
    rank[order] = np.arange(order.size)
    return points[first[order]], rank[back].astype(np.int64)


def _near(points: ComplexArray) -> tuple[IntArray, IntArray]:
    """All pairs closer than WELD_TOL; a sort suffices, a search tree takes 0.2 s to import."""
    order = np.argsort(points.real, kind="stable")
    at = points[order]
    firsts, seconds = [order[:0]], [order[:0]]
    for ahead in range(1, points.size):
        step = at[ahead:] - at[:-ahead]
        if not np.any(step.real <= WELD_TOL):
            break  # nor any pair farther apart in the order
        near = np.flatnonzero(np.abs(step) <= WELD_TOL)
        firsts.append(order[near])
        seconds.append(order[near + ahead])
    return np.concatenate(firsts), np.concatenate(seconds)


def outline_of(regions: Sequence[Region]) -> Outline:
    """The welded outline of `regions`, whose touching edges must be identical.

    Raises:
        ValueError: where a path is not closed.
    """
    paths = [
        (k, path) for k, region in enumerate(regions) for path in (region.outer, *region.holes)
    ]
    edges = [edge for _, path in paths for edge in path.edges]
    ends = np.array([p for edge in edges for p in (edge.start, edge.end)], dtype=np.complex128)
    points, number = weld(ends)
    number = number.reshape(-1, 2)
    book = EdgeBook(points)
    loops: list[list[tuple[int, ...]]] = [[] for _ in regions]
    at = 0
    for k, path in paths:
        here = number[at : at + len(path.edges)]
        at += len(path.edges)
        if np.any(here[:, 1] != np.roll(here[:, 0], -1)):
            raise ValueError(f"region {regions[k].name}: a path is not closed")
        signed = (book.add(e, int(a), int(b)) for e, (a, b) in zip(path.edges, here, strict=True))
        loops[k].append(tuple(s for s in signed if s != 0))
    return Outline(
        points=points,
        edges=tuple(book.edges),
        ends=np.array(book.ends, dtype=np.int64).reshape(-1, 2),
        loops=tuple(tuple(loop) for loop in loops),
    )


class EdgeBook:
    """Finds an edge again, run either way; two edges with the same ends differ by their rise."""

    def __init__(self, points: ComplexArray) -> None:
        """Start with no edge between `points`."""
        self.points = points
        self.edges: list[Edge] = []
        self.ends: list[tuple[int, int]] = []
        self._known: dict[tuple[int, int], list[tuple[float, int]]] = {}

    def add(self, edge: Edge, a: int, b: int) -> int:
        """Signed number (from 1) of the edge; 0 for one shorter than WELD_TOL."""
        if a == b:
            return 0
        way = 1 if a < b else -1
        rise = way * 0.5 * edge.bulge * abs(edge.end - edge.start)
        known = self._known.setdefault((min(a, b), max(a, b)), [])
        for other, signed in known:
            if abs(other - rise) < WELD_TOL:
                return way * signed
        self.edges.append(Edge(complex(self.points[a]), complex(self.points[b]), edge.bulge))
        self.ends.append((a, b))
        known.append((rise, way * len(self.edges)))
        return len(self.edges)
