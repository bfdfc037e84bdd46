"""Fillets between two chains of edges, where the fillet may reach past an edge.

`corners.fillet` rounds the corner of two edges and has to fit on them. Where a barrier's side is
made of many short arcs, the circle that rounds a rib's corner touches one further on: the edges
are tried outward from the corner until one holds the point of contact. The edges of a chain meet
tangentially, so their parallels at the fillet's radius form one chain too, and the first contact
found is the fillet. Source: derived.
"""

import cmath
import math
from collections.abc import Sequence

from .corners import SHARE_TOL, crossings, foot, is_within
from .curves import Edge, Point, offset_edge, piece

Contact = tuple[Point, Point, float]  # on the edge before, on the edge after, signed sweep


def rounded(
    before: Sequence[Edge], after: Sequence[Edge], radius: float
) -> tuple[list[Edge], Edge, list[Edge]]:
    """Both chains cut back to the fillet between them, and the fillet.

    Args:
        before: chain that ends at the corner.
        after: chain that starts there.
        radius: of the fillet in m.

    Raises:
        ValueError: if the chains meet without a corner or hold no fillet of this radius.
    """
    corner = after[0].start
    turn = cmath.phase(after[0].direction(0.0) / before[-1].direction(1.0))
    if abs(turn) < SHARE_TOL or math.pi - abs(turn) < SHARE_TOL:
        raise ValueError("a fillet needs a corner: the edges meet tangentially")
    side = math.copysign(radius, turn)
    pairs = [(i, j) for i in range(len(before)) for j in range(len(after))]
    for i, j in sorted(pairs, key=sum):
        first, last = before[-1 - i], after[j]
        contact = _contact(first, last, side, corner)
        if contact is None:
            continue
        touch_before, touch_after, sweep = contact
        kept = [*before[: len(before) - 1 - i], piece(first, first.start, touch_before)]
        left = [piece(last, touch_after, last.end), *after[j + 1 :]]
        return kept, Edge(touch_before, touch_after, math.tan(sweep / 4.0)), left
    raise ValueError(f"a fillet of radius {radius:g} m does not fit on its edges")


def _contact(before: Edge, after: Edge, side: float, corner: Point) -> Contact | None:
    """Points of contact of the circle on the left (positive side) of both, nearest the corner."""
    try:
        tracks = offset_edge(before, side), offset_edge(after, side)
    except ValueError:  # the circle is too large for the inside of an arc
        return None
    found = []
    for centre in crossings(*tracks):
        touch_before, touch_after = foot(before, centre), foot(after, centre)
        if is_within(before, touch_before) and is_within(after, touch_after):
            sweep = cmath.phase((touch_after - centre) / (touch_before - centre))
            if sweep * side > 0.0:
                found.append((abs(centre - corner), touch_before, touch_after, sweep))
    if not found:
        return None
    _, touch_before, touch_after, sweep = min(found, key=lambda one: one[0])
    return touch_before, touch_after, sweep
