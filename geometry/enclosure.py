"""Whether a point lies inside a closed path of lines and arcs, exactly.

The angle under which the path is seen from the point adds up to a full turn inside and to nothing
outside. An arc is seen under the angle of its chord, and a full turn besides where the point lies
between chord and arc (derived).
"""

import cmath
import math

from .curves import Edge, Path, Point


def encloses(path: Path, point: Point) -> bool:
    """Whether the point, which must not lie on the path, is inside it."""
    turn = sum(_seen(part, point) for edge in path.edges for part in _halves(edge))
    return abs(turn) > math.pi


def _halves(edge: Edge) -> tuple[Edge, ...]:
    """Arcs of more than half a turn in two, so that each lies on one side of its chord."""
    if abs(edge.bulge) <= 1.0:
        return (edge,)
    middle, bulge = edge.point(0.5), math.tan(edge.sweep / 8.0)
    return (Edge(edge.start, middle, bulge), Edge(middle, edge.end, bulge))


def _seen(edge: Edge, point: Point) -> float:
    product = (edge.start - point).conjugate() * (edge.end - point)
    angle = cmath.phase(product)
    if edge.is_line or abs(point - edge.centre) >= edge.radius:
        return angle
    # Angle and side by one product: on the chord itself, whichever side rounding takes it for,
    # the arc is seen under half a turn. Negative to the right of the chord, where a
    # counter-clockwise arc bulges.
    if product.imag == 0.0:
        return math.copysign(math.pi, edge.bulge)
    if product.imag * edge.bulge < 0.0:
        return angle + math.copysign(2.0 * math.pi, edge.bulge)
    return angle
