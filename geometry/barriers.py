"""Barriers as closed paths of lines and arcs: two halves joined on the q axis, cut by radial ribs.

Everything is written in the q axis's frame (shaft axis at 0, q axis along +x). The halves come
from `half_barrier`.

Source of all formulas: derived, plane trigonometry.
"""

import math
from dataclasses import dataclass

from .corners import crossings, fillet
from .curves import Edge, Path, Point, closed, line, mirrored_edge, piece, reversed_edge
from .design import BarrierDesign
from .half_barrier import HalfBarrier
from .mid_lines import MM

FULL_ROUND_TOL = 1e-9  # m, a fillet so close to half the thickness is meant to be it


@dataclass(frozen=True, slots=True)
class RibCut:
    """A radial rib in the q axis's frame: parallel to that axis, its middle at height `middle`."""

    middle: float
    width: float
    fillet: float


def rib_cuts(barrier: BarrierDesign) -> tuple[RibCut, ...]:
    """The radial ribs of a barrier in counter-clockwise order.

    Raises:
        ValueError: if there are ribs without width, or two without offset.
    """
    if barrier.radial_ribs == 0:
        return ()
    if barrier.radial_rib_mm is None:
        raise ValueError("radial ribs need radial_rib_mm")
    width, radius = MM * barrier.radial_rib_mm, MM * barrier.fillet_mm
    full = 0.5 * MM * barrier.thickness_mm
    if abs(radius - full) < FULL_ROUND_TOL:
        radius = full
    if barrier.radial_ribs == 1:
        return (RibCut(0.0, width, radius),)
    if barrier.radial_rib_offset_mm is None:
        raise ValueError("two radial ribs need radial_rib_offset_mm")
    offset = MM * barrier.radial_rib_offset_mm
    return (RibCut(-offset, width, radius), RibCut(offset, width, radius))


def cavities(half: HalfBarrier, cuts: tuple[RibCut, ...]) -> tuple[Path, ...]:
    """The cavities of a barrier in the q axis's frame, counter-clockwise about the shaft axis.

    Args:
        half: the barrier's upper half; the lower one is its mirror image.
        cuts: its radial ribs, none, one on the q axis, or two symmetric to it.

    Returns:
        One counter-clockwise path per cavity, one more than there are ribs, all corners rounded.

    Raises:
        ValueError: if a rib or fillet does not fit; `checks` says what would.
    """
    if not cuts:
        return (_whole(half),)
    cut = cuts[-1]
    upper = _outer_cavity(half, cut.middle + 0.5 * cut.width, cut.fillet)
    lower = closed([mirrored_edge(reversed_edge(edge)) for edge in reversed(upper.edges)])
    if len(cuts) == 1:
        return (lower, upper)
    middle = _middle_cavity(
        half.to_shaft[0], half.to_rim[0], cut.middle - 0.5 * cut.width, cut.fillet
    )
    return (lower, middle, upper)


def _across(edge: Edge) -> Edge:
    """An edge that starts on the q axis at a right angle, joined with its mirror image."""
    start = edge.end.conjugate()
    return Edge(start, edge.end, math.tan(0.5 * edge.sweep))


def _whole(half: HalfBarrier) -> Path:
    to_shaft, to_rim = half.to_shaft, half.to_rim
    inward = [reversed_edge(edge) for edge in reversed(to_shaft[1:])]
    outward = list(to_rim[1:])
    return closed(
        [
            *inward,
            reversed_edge(_across(to_shaft[0])),
            *[mirrored_edge(edge) for edge in to_shaft[1:]],
            *[mirrored_edge(reversed_edge(edge)) for edge in reversed(half.end)],
            *[mirrored_edge(reversed_edge(edge)) for edge in reversed(outward)],
            _across(to_rim[0]),
            *outward,
            *half.end,
        ]
    )


def _outer_cavity(half: HalfBarrier, height: float, radius: float) -> Path:
    """What lies between the rib's side at `height` and the upper end."""
    to_shaft, to_rim = half.to_shaft, half.to_rim
    inner, outer = _at_height(to_shaft[0], height), _at_height(to_rim[0], height)
    sharp = closed(
        [
            line(inner, outer),
            piece(to_rim[0], outer, to_rim[0].end),
            *to_rim[1:],
            *half.end,
            *[reversed_edge(edge) for edge in reversed(to_shaft[1:])],
            reversed_edge(piece(to_shaft[0], inner, to_shaft[0].end)),
        ]
    )
    # The later corner first: a fillet shifts the numbers of the corners behind it.
    return fillet(fillet(sharp, 1, radius), 0, radius)


def _middle_cavity(to_shaft: Edge, to_rim: Edge, height: float, radius: float) -> Path:
    """What lies between two ribs, whose facing sides are at +-`height`."""
    inner, outer = _at_height(to_shaft, height), _at_height(to_rim, height)
    below, above = _across(to_shaft), _across(to_rim)
    path = closed(
        [
            line(inner.conjugate(), outer.conjugate()),
            piece(above, outer.conjugate(), outer),
            line(outer, inner),
            reversed_edge(piece(below, inner.conjugate(), inner)),
        ]
    )
    for corner in (3, 2, 1, 0):
        path = fillet(path, corner, radius)
    return path


def _at_height(edge: Edge, height: float) -> Point:
    """Where the unbounded first edge of a side has y = `height`, nearest to the shaft axis."""
    points = crossings(edge, line(complex(0.0, height), complex(1.0, height)))
    if not points:
        raise ValueError("a radial rib lies beyond the bottom of its barrier")
    return min(points, key=lambda point: point.real)
