"""A whole barrier as a band between two chains of edges, from its clockwise end to the other.

Both halves are drawn as upper halves in the q axis's frame; the lower one is a mirror image, maybe
of another design. Every side crosses the q axis at a right angle, so unlike halves join there
tangent-continuously. Seen along the band, counter-clockwise about the shaft axis, the shaft lies
to the left and the rim to the right.
"""

import math
from dataclasses import dataclass
from itertools import pairwise

from .curves import Edge, Point, mirrored_edge, reversed_edge
from .half_barrier import HalfBarrier

SAME_CURVE = 1e-9  # relative; halves that are alike have the same curvature to the last bit
AXIS_TOL = 1e-12  # m, a joint this near to the q axis lies on it


@dataclass(frozen=True, slots=True)
class Band:
    """Both sides of a barrier, counter-clockwise about the shaft axis, and its two ends (m)."""

    to_shaft: tuple[Edge, ...]
    to_rim: tuple[Edge, ...]
    upper_end: tuple[Edge, ...]  # from the rim's side to the shaft's
    lower_end: tuple[Edge, ...]  # from the shaft's side to the rim's

    @property
    def is_symmetric(self) -> bool:
        """Whether the band is its own mirror image to the last bit."""
        return mirrored_band(self) == self

    @property
    def rim_on_axis(self) -> Point:
        """Where the side towards the rim crosses the q axis."""
        return min((edge.end for edge in self.to_rim), key=lambda point: abs(point.imag))


def band_of(upper: HalfBarrier, lower: HalfBarrier) -> Band:
    """The band of two halves, both given as upper halves."""
    return Band(
        to_shaft=(*_mirrored(lower.to_shaft), *upper.to_shaft),
        to_rim=(*_mirrored(lower.to_rim), *upper.to_rim),
        upper_end=upper.end,
        lower_end=_mirrored(lower.end),
    )


def mirrored_band(band: Band) -> Band:
    """The band mirrored in the q axis, again counter-clockwise."""
    return Band(
        to_shaft=_mirrored(band.to_shaft),
        to_rim=_mirrored(band.to_rim),
        upper_end=_mirrored(band.lower_end),
        lower_end=_mirrored(band.upper_end),
    )


def _mirrored(edges: tuple[Edge, ...]) -> tuple[Edge, ...]:
    """Mirrored in the q axis and run the other way."""
    return tuple(mirrored_edge(reversed_edge(edge)) for edge in reversed(edges))


def merged(edges: list[Edge]) -> list[Edge]:
    """The chain with edges that are one line or circle across the q axis made one."""
    result = edges[:1]
    for before, after in pairwise(edges):
        is_joint = abs(after.start.imag) < AXIS_TOL and _is_same(before, after)
        if is_joint:
            bulge = math.tan(0.25 * (before.sweep + after.sweep))
            result[-1] = Edge(result[-1].start, after.end, bulge)
        else:
            result.append(after)
    return result


def _is_same(before: Edge, after: Edge) -> bool:
    """Whether two edges that touch at a common end are of one line or circle."""
    if before.is_line or after.is_line:
        return before.is_line and after.is_line
    same_sense = before.bulge * after.bulge > 0.0
    return same_sense and abs(before.radius - after.radius) < SAME_CURVE * before.radius
