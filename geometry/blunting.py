"""Cut-outs that leave the rim along its tangent, given a corner that can be meshed.

Where a rounded pole end runs into the rim tangentially, the air between the rim circle and the
rounding begins with no angle at all. Iron is put into its tip up to where the tip is CUSP_DEPTH
deep, closed by a short line at CUSP_ANGLE to the rim: for a rounding of 3 mm 0.4 mm long and
0.004 mm2. No point of the outline moves by more than CUSP_DEPTH.
"""

import cmath
import math
from collections.abc import Sequence

from .curves import Edge, Point, arc, line, piece, reversed_edge

CUSP_DEPTH = 3e-5  # m, less than a punch or laser keeps a contour to
CUSP_ANGLE = math.pi / 6.0
TANGENT = math.cos(math.radians(15.0))  # a corner of less is a cusp
HALVINGS = 60


def blunted(edges: Sequence[Edge], rim: float) -> list[Edge]:
    """The edges with every cusp between the rim circle and another edge filled.

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
    for edge in leaving:
        if _lies_on(edge, rim):
            continue
        for along in leaving:
            way = (edge.direction(0.0).conjugate() * along.direction(0.0)).real
            if _lies_on(along, rim) and way > TANGENT:
                return _filled(edges, edge, along, rim)
    return edges


def _filled(edges: list[Edge], edge: Edge, along: Edge, rim: float) -> list[Edge]:
    low, high = 0.0, 1.0
    if rim - abs(edge.end) < CUSP_DEPTH:
        return edges
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if rim - abs(edge.point(middle)) < CUSP_DEPTH else (low, middle)
    inner = edge.point(high)
    sense = math.copysign(1.0, (along.start.conjugate() * along.end).imag)
    back = CUSP_DEPTH / math.tan(CUSP_ANGLE) / rim
    outer = inner / abs(inner) * rim * cmath.exp(-1j * sense * back)
    is_ccw = sense > 0.0
    gone = {edge, reversed_edge(edge), along, reversed_edge(along)}
    return [e for e in edges if e not in gone] + [
        piece(edge, inner, edge.end),
        arc(along.start, outer, 0j, ccw=is_ccw),
        arc(outer, along.end, 0j, ccw=is_ccw),
        line(outer, inner),
    ]
