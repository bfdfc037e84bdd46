"""The narrow places of a lamination: of the steel between contours, or of the gaps in it.

A narrow place is a circle that touches two edges at its ends of a diameter and has no contour
inside: so a corner's own short edges are none, and the steel between two slots that one contour
runs round is one (derived: the local least of the width is a double point of the medial axis).
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from .arrangement import overlapping_boxes
from .contours import Contour
from .curves import Edge, Point
from .distances import nearest
from .enclosure import encloses
from .outline_edges import distances_to

TOUCH = 1e-6  # m, edges no further apart are in contact
EMPTY = 1e-6  # of the circle's radius, that a contour may reach into it by rounding


@dataclass(frozen=True, slots=True)
class Web:
    """A narrow place between points `start` and `end` (m) of contours by their numbers from 0."""

    start: Point
    end: Point
    first: int
    second: int

    @property
    def width(self) -> float:
        """Width in m."""
        return abs(self.end - self.start)

    @property
    def place(self) -> Point:
        """The middle, in m."""
        return 0.5 * (self.start + self.end)


def steel_webs(contours: Sequence[Contour], within: float) -> tuple[Web, ...]:
    """All places where the steel is no wider than `within` m, thinnest first."""
    return _narrow(contours, within, lambda point: _in_steel(contours, point))


def air_throats(contour: Contour, within: float) -> tuple[Web, ...]:
    """All places where the gap that a contour leaves on its right is no wider than `within` m."""
    return _narrow((contour,), within, lambda point: not _in_steel((contour,), point))


def edge_pairs(
    contours: Sequence[Contour], margin: float
) -> list[tuple[tuple[int, Edge], tuple[int, Edge]]]:
    """Pairs of edges nearer than about `margin` m that do not follow each other, with contours."""
    numbered = [
        (c, k, len(contour.path.edges), edge, edge.point(0.5), 0.5 * edge.length)
        for c, contour in enumerate(contours)
        for k, edge in enumerate(contour.path.edges)
    ]
    pairs = []
    for i, j in overlapping_boxes([one[3] for one in numbered], 2.0 * margin):
        a, k, count, first, middle, half = numbered[i]
        b, m, _, second, other, reach = numbered[j]
        # No point of an edge lies further than half its length from its middle.
        if abs(middle - other) - half - reach > margin:
            continue
        if a != b or (k - m) % count not in (1, count - 1):
            pairs.append(((a, first), (b, second)))
    return pairs


def _narrow(
    contours: Sequence[Contour], within: float, counts: Callable[[Point], bool]
) -> tuple[Web, ...]:
    found = []
    for (a, first), (b, second) in edge_pairs(contours, within):
        p, q = nearest(first, second)
        if TOUCH < abs(q - p) <= within:
            found.append(Web(p, q, a, b))
    if not found:
        return ()
    middles = np.array([web.place for web in found])
    gaps = np.full(middles.size, np.inf)
    for contour in contours:
        for edge in contour.path.edges:
            gaps = np.minimum(gaps, distances_to(edge, middles))
    empty = [
        web
        for web, gap in zip(found, gaps, strict=True)
        if gap >= 0.5 * web.width * (1.0 - EMPTY) and counts(web.place)
    ]
    return tuple(sorted(empty, key=lambda web: web.width))


def _in_steel(contours: Sequence[Contour], point: Point) -> bool:
    """Whether the steel, to the left of every contour, is at a point off the contours."""
    # Inside the outer contour and outside all others, or outside a lone hole.
    inside = sum(encloses(contour.path, point) for contour in contours)
    has_outer = any(contour.layer == "OUTER_CONTOUR" for contour in contours)
    return inside == (1 if has_outer else 0)
