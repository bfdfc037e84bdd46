"""The shaft axis of a drawn lamination, and the whole turn from a drawing of a sector.

The axis is the centre that most of the drawing's arcs share, by length; its place is found by
least squares from the arcs' chords, whose bisectors all pass through it (derived). A drawing that
does not go all round is a sector: its two sides are dropped and the rest is copied round.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from .curves import Edge, Point
from .errors import OutlineError
from .outline_places import place_text

MOST_CENTRES = 60  # arcs tried as to their centre, the longest first
WHOLE_GAP = 1e-3  # m, a gap in the outermost circle up to this is no sector's
MOST_COPIES = 144
MOST_PIECES = 20_000  # copies counted: bounds the time to seconds
FULL_TURN = 2.0 * math.pi
RIM_SHARE = 0.25  # of what is drawn all round, that arcs of a rim cover


@dataclass(frozen=True, slots=True)
class Lamination:
    """All pieces of a whole turn about the axis at 0, in m."""

    pieces: tuple[Edge, ...]
    axis: Point  # in the drawing's coordinates
    sectors: int  # how often what was drawn stands in a whole turn

    def place(self, point: Point) -> Point:
        """A point about the axis in the drawing's coordinates."""
        return point + self.axis


def whole_lamination(edges: Sequence[Edge], tolerance: float) -> Lamination:
    """The drawing moved to its axis and completed to a whole turn.

    Args:
        edges: as drawn, in m.
        tolerance: m, how far arcs may miss a common centre, and a sector its whole share.

    Raises:
        OutlineError: without arcs about a common axis, or for a sector that is no whole share.
    """
    if len(edges) > MOST_PIECES:
        raise OutlineError(f"more than {MOST_PIECES} pieces; accepted a lamination alone")
    axis = shaft_axis(edges, tolerance)
    moved = [Edge(e.start - axis, e.end - axis, e.bulge) for e in edges]
    low, high = _covered(moved, tolerance)
    reach = max(max(abs(e.start), abs(e.end)) for e in moved)
    if (FULL_TURN - (high - low)) * reach < WHOLE_GAP:
        return Lamination(tuple(moved), axis, 1)
    angle = high - low
    count = round(FULL_TURN / angle)
    if not 2 <= count <= MOST_COPIES or abs(angle - FULL_TURN / count) * reach > 2.0 * tolerance:
        text = (
            f"what is drawn spans {math.degrees(angle):.4f} degrees about the axis at "
            f"{place_text(axis)}: no whole share of a turn"
        )
        raise OutlineError(text, axis + reach * cmath.exp(1j * high))
    sides = (cmath.exp(-1j * low), cmath.exp(-1j * high))
    kept = [e for e in moved if not any(_lies_on(e, side, 2.0 * tolerance) for side in sides)]
    if len(kept) * count > MOST_PIECES:
        raise OutlineError(f"more than {MOST_PIECES} pieces; accepted a lamination alone")
    pieces = []
    for k in range(count):
        turn = cmath.exp(2j * math.pi * k / count)
        pieces += [Edge(e.start * turn, e.end * turn, e.bulge) for e in kept]
    return Lamination(tuple(pieces), axis, count)


def shaft_axis(edges: Sequence[Edge], tolerance: float) -> Point:
    """The centre that most of the arcs share, by length.

    Raises:
        OutlineError: where there is no arc.
    """
    arcs = sorted((e for e in edges if not e.is_line), key=lambda e: -e.length)
    if not arcs:
        raise OutlineError("no arc in the drawing, so no axis; accepted arcs about the shaft axis")
    trials: list[tuple[float, list[Edge]]] = []
    for arc in arcs[:MOST_CENTRES]:
        if any(arc in sharing for _, sharing in trials):
            continue
        sharing = [e for e in arcs if is_about(e, arc.centre, tolerance)]
        if sharing:
            trials.append((sum(e.length * abs(e.sweep) for e in sharing), sharing))
    if not trials:
        raise OutlineError("no arc in the drawing that a shaft axis could be told by")
    trials.sort(key=lambda trial: -trial[0])
    # Barriers may share a centre of their own, but nothing lies beyond the rim. Of a rim that is no
    # circle an arc may hold all too, with a short part of it: then the bore tells the axis.
    farthest = [sharing for _, sharing in trials if _holds_all(sharing, edges, tolerance)]
    rims = [sharing for sharing in farthest if _goes_round(sharing, edges, tolerance)]
    circles = [sharing for _, sharing in trials if _is_circle(sharing, tolerance)]
    best = (rims or circles or farthest or [trials[0][1]])[0]
    centre = _common_centre(best)
    # A drawing made about its own origin stays as it is, to the last bit.
    return 0j if abs(centre) < tolerance else centre


def _holds_all(arcs: Sequence[Edge], edges: Sequence[Edge], tolerance: float) -> bool:
    """Whether no piece lies farther from the arcs' common centre than they do."""
    centre = arcs[0].centre
    reach = max(abs(e.start - centre) for e in arcs)
    # A short arc tells its centre badly: ten times the tolerance will do to tell it apart.
    return all(abs(e.point(0.5) - centre) < reach + 10.0 * tolerance for e in edges)


def _is_circle(arcs: Sequence[Edge], tolerance: float) -> bool:
    """Whether arcs of one radius go more than half round."""
    return any(
        sum(abs(e.sweep) for e in arcs if abs(e.radius - one.radius) < tolerance) > math.pi
        for one in arcs
    )


def _goes_round(arcs: Sequence[Edge], edges: Sequence[Edge], tolerance: float) -> bool:
    """Whether arcs about one centre are a rim's: of what is seen from it they cover enough."""
    centre = _common_centre(arcs)
    low, high = _covered(
        [Edge(e.start - centre, e.end - centre, e.bulge) for e in edges], tolerance
    )
    return sum(abs(e.sweep) for e in arcs) > RIM_SHARE * (high - low)


def is_about(edge: Edge, centre: Point, tolerance: float) -> bool:
    """Whether the arc runs about a centre: its ends and middle equally far from it."""
    if edge.is_line:
        return False
    radii = [abs(p - centre) for p in (edge.start, edge.point(0.5), edge.end)]
    is_even = max(radii) - min(radii) <= tolerance
    # A short flat arc is nearly even about any far point on its bisector.
    return is_even and abs(edge.radius / radii[1] - 1.0) < 0.02


def _common_centre(arcs: Sequence[Edge]) -> Point:
    rows, sides = [], []
    for edge in arcs:
        a, m, b = edge.start, edge.point(0.5), edge.end
        for p, q in ((a, b), (a, m), (m, b)):
            chord, middle = q - p, 0.5 * (p + q)
            rows.append((chord.real, chord.imag))
            sides.append((chord.conjugate() * middle).real)
    solution = np.linalg.lstsq(np.array(rows), np.array(sides), rcond=None)[0]
    return complex(solution[0], solution[1])


def _covered(edges: Sequence[Edge], tolerance: float) -> tuple[float, float]:
    """First and last angle of what is drawn, seen from the axis."""
    spans = []
    for edge in edges:
        parts = [edge.point(k / 4) for k in range(5)]
        parts = [p for p in parts if abs(p) > 100.0 * tolerance]
        if not parts:
            continue  # on the axis, where there is no angle
        start = low = high = cmath.phase(parts[0])
        for p, q in pairwise(parts):
            start += cmath.phase(q / p)
            low, high = min(low, start), max(high, start)
        base = math.floor(low / FULL_TURN) * FULL_TURN
        spans.append((low - base, high - base))
    # Spans that pass the angle 0 are cut there.
    cut = [(low, min(high, FULL_TURN)) for low, high in spans]
    cut += [(0.0, high - FULL_TURN) for _, high in spans if high > FULL_TURN]
    if not cut:
        raise OutlineError("nothing is drawn round the shaft axis")
    cut.sort()
    widest, after, reach = 0.0, 0.0, cut[0][1]
    for low, high in cut[1:]:
        if low - reach > widest:
            widest, after = low - reach, low
        reach = max(reach, high)
    around = cut[0][0] + FULL_TURN - reach
    if around >= widest:
        return cut[0][0], reach
    return after, after - widest + FULL_TURN


def _lies_on(edge: Edge, turn: complex, tolerance: float) -> bool:
    """Whether the edge lies on the ray that `turn` brings to the positive real axis."""
    points = [p * turn for p in (edge.start, edge.point(0.5), edge.end)]
    return all(abs(p.imag) <= tolerance and p.real > -tolerance for p in points)
