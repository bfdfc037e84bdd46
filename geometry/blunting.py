"""Cut-outs that leave the rim along its tangent, given a corner that can be meshed.

Where a rounded pole end runs into the rim tangentially, the air between the rim circle and the
rounding begins with no angle at all, and no sound element fits into it. The rounding is replaced
by its chord until it is CUSP_DEPTH below the rim: iron is taken off by at most a quarter of that,
and the air begins with an angle, 5 degrees for a rounding of 3 mm. The iron stays convex there.
"""

import cmath
import math
from collections.abc import Sequence

from .curves import Edge, Point, line, piece, reversed_edge

CUSP_DEPTH = 4e-5  # m: no point of the contour moves by more than 1e-5, a punch's accuracy
TANGENT = math.cos(math.radians(15.0))  # a corner of less is a cusp
HALVINGS = 60


def blunted(edges: Sequence[Edge], rim: float) -> list[Edge]:
    """The edges with a chord wherever one would leave the rim circle along its tangent.

    Args:
        edges: any, those on the rim circle as arcs about the axis at 0.
        rim: radius in m.
    """
    result = list(edges)
    on_rim = {p for e in edges if _lies_on(e, rim) for p in (e.start, e.end)}
    for corner in sorted(on_rim, key=cmath.phase):
        result = _blunt(result, corner, rim)
    return result


def _lies_on(edge: Edge, rim: float) -> bool:
    points = (edge.start, edge.point(0.5), edge.end)
    return not edge.is_line and all(abs(abs(p) / rim - 1.0) < 1e-9 for p in points)


def _blunt(edges: list[Edge], corner: Point, rim: float) -> list[Edge]:
    leaving = [
        e if e.start == corner else reversed_edge(e) for e in edges if corner in (e.start, e.end)
    ]
    along = [e for e in leaving if _lies_on(e, rim)]
    for edge in leaving:
        ways = [(edge.direction(0.0).conjugate() * e.direction(0.0)).real for e in along]
        if edge not in along and max(ways, default=-1.0) > TANGENT:
            return _with_chord(edges, edge, rim)
    return edges


def _with_chord(edges: list[Edge], edge: Edge, rim: float) -> list[Edge]:
    low, high = 0.0, 1.0
    if edge.is_line or rim - abs(edge.end) < CUSP_DEPTH:
        return edges
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if rim - abs(edge.point(middle)) < CUSP_DEPTH else (low, middle)
    inner = edge.point(high)
    kept = [e for e in edges if e not in (edge, reversed_edge(edge))]
    return [*kept, line(edge.start, inner), piece(edge, inner, edge.end)]
