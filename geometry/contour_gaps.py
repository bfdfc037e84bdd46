"""How far two closed contours lie apart, vertex by vertex or as curves.

Axes: v vertices with the middles of their edges between, p points, e edges.
"""

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from .curves import Edge, Path, Point

SAMPLES = (0.0, 0.25, 0.5, 0.75)  # shares of an edge: of a rise, the greatest is in the middle
BLOCK = 200_000  # pairs of points and edges at once
STARTS = 4  # vertices tried as the first one
FULL = 2.0 * np.pi

Points = npt.NDArray[np.complex128]
Gaps = list[tuple[float, Point]]


def vertex_gaps(mine: Path, other: Path) -> Gaps:
    """Distance of each vertex and each edge's middle of `other` from that of `mine`, and where.

    Both have as many edges and run the same way; where `other` starts is found.
    """
    ours, theirs = _outline_points(mine), _outline_points(other)
    near = np.argsort(np.abs(theirs[::2] - ours[0]), kind="stable")[:STARTS]
    # The first vertex may be the one that was moved: the second one votes too.
    further = np.argsort(np.abs(theirs[::2] - ours[2 % ours.size]), kind="stable")[:STARTS] - 1
    best: npt.NDArray[np.float64] | None = None
    at = theirs
    for start in dict.fromkeys((*near.tolist(), *further.tolist())):
        turned = np.roll(theirs, -2 * start)
        gaps = np.abs(turned - ours)
        if best is None or np.sum(gaps) < np.sum(best):
            best, at = gaps, turned
    assert best is not None
    return list(zip(best.tolist(), at.tolist(), strict=True))


def curve_gaps(mine: Path, other: Path) -> Gaps:
    """Distances of points all along each curve from the other, and where on `other` or beside it.

    Points are the vertices and quarters of all edges of both.
    """
    theirs, ours = _samples(other), _samples(mine)
    back, onto = distances(theirs, mine.edges), distances(ours, other.edges)
    return [
        *zip(back.tolist(), theirs.tolist(), strict=True),
        *zip(onto.tolist(), ours.tolist(), strict=True),
    ]


def distances(points: Points, edges: Sequence[Edge]) -> npt.NDArray[np.float64]:
    """Distance in m of each of the points (p,) to the nearest of the edges."""
    start = np.array([e.start for e in edges])
    chord = np.array([e.end for e in edges]) - start
    bulge = np.array([e.bulge for e in edges])
    result = np.empty(points.size)
    step = max(1, BLOCK // len(edges))
    for first in range(0, points.size, step):
        block = points[first : first + step, None]
        lines = np.where(bulge == 0.0, _to_lines(block, start, chord), np.inf)
        arcs = np.where(bulge != 0.0, _to_arcs(block, start, chord, bulge), np.inf)
        result[first : first + step] = np.min(np.minimum(lines, arcs), axis=1)
    return result


def _to_lines(points: Points, start: Points, chord: Points) -> npt.NDArray[np.float64]:
    length = np.maximum(np.abs(chord) ** 2, np.finfo(float).tiny)
    share = np.clip(((points - start) * chord.conj()).real / length, 0.0, 1.0)
    return np.asarray(np.abs(points - start - share * chord))


def _to_arcs(
    points: Points, start: Points, chord: Points, bulge: npt.NDArray[np.float64]
) -> npt.NDArray[np.float64]:
    safe = np.where(bulge == 0.0, 1.0, bulge)
    centre = start + 0.5 * chord + 1j * chord * (1.0 - safe**2) / (4.0 * safe)
    radius = np.abs(start - centre)
    sweep = 4.0 * np.arctan(safe)
    ray = points - centre
    begin = np.where(radius > 0.0, start - centre, 1.0)
    # Turn from the start in the arc's sense of travel, 0 to a full one.
    turn = np.mod(np.sign(sweep) * np.angle(ray / begin), FULL)
    ends = np.minimum(np.abs(points - start), np.abs(points - start - chord))
    on = turn <= np.abs(sweep)
    return np.asarray(np.where(on, np.minimum(ends, np.abs(np.abs(ray) - radius)), ends))


def _outline_points(path: Path) -> Points:
    return np.array([p for e in path.edges for p in (e.start, e.point(0.5))])


def _samples(path: Path) -> Points:
    return np.array([e.point(share) for e in path.edges for share in SAMPLES])
