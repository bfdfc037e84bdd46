"""Radial ribs: strips of iron across a barrier, anywhere along it, upright or inclined.

A rib's middle line goes through a pivot: the middle between the barrier's two sides at the stated
height off the q axis, counted along a parallel to that axis. It is parallel to the q axis or
turned about the pivot by the tilt, unless the rib stands on that axis; its two straight sides lie
half a width to either side, and each of their corners with the barrier's sides is rounded. All of
this holds for any chain of lines and arcs, so a rib may cross the bottom, a bend or an arm alike.

Where the sides run side by side the rib has its stated width. On a slope they are shifted along
each other; if the fillets leave no part of them face to face, the rib would be thinnest between
two fillets, and wider than stated. Then the straight sides are moved together until the thinnest
place has the stated width (secant method, to 1e-13 m).

A fillet of half the thickness means a full round: one circle that touches both sides of the
barrier and the rib's side. Where the thickness varies its radius is found so that the straight
side vanishes (secant method); where it does not, it is half the thickness.

One side of one rib is drawn with the cavity above it; the other by mirroring, so that symmetric
ribs are mirror images to the last bit. Source of all formulas: derived, plane geometry.
"""

import cmath
import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise

from .bands import Band, mirrored_band
from .chain_fillets import rounded
from .corners import crossings, is_within
from .curves import Edge, Point, line, mirrored_edge, piece, reversed_edge
from .design import BarrierDesign
from .distances import nearest
from .mid_lines import MM

FULL_ROUND_TOL = 1e-9  # m, a fillet so close to half the thickness is meant to be it
LENGTH_TOL = 1e-13  # m, of what is found by iteration; 1e-4 of a nanometre
MOST_STEPS = 60
ASIDE_TOL = 1e-6  # of an edge's chord, far above rounding
SLIVER = 1e-9  # relative to a fillet: a shorter edge is rounding


@dataclass(frozen=True, slots=True)
class RibCut:
    """A radial rib in the q axis's frame, as stated (m, rad)."""

    height: float  # of the pivot off the q axis
    tilt: float  # of the middle line, counter-clockwise from the q axis
    width: float
    fillet: float
    is_full_round: bool


@dataclass(frozen=True, slots=True)
class RibSide:
    """One side of a rib with its fillets, from shaft to rim, and the barrier's sides beyond it."""

    edges: tuple[Edge, ...]
    to_shaft: tuple[Edge, ...]  # outward, away from the rib
    to_rim: tuple[Edge, ...]


def rib_cuts(barrier: BarrierDesign) -> tuple[RibCut, ...]:
    """The radial ribs of a barrier in counter-clockwise order.

    Raises:
        ValueError: if their width or places are not stated.
    """
    if barrier.radial_ribs == 0:
        return ()
    if barrier.radial_rib_mm is None:
        raise ValueError("radial ribs need radial_rib_mm")
    width, radius = MM * barrier.radial_rib_mm, MM * barrier.fillet_mm
    full = 0.5 * MM * barrier.thickness_mm
    is_full = abs(radius - full) < FULL_ROUND_TOL
    tilt = math.radians(barrier.radial_rib_tilt_deg)
    return tuple(
        RibCut(
            height,
            # Positive leans the rim's end away from the q axis, on both sides of it.
            tilt * math.copysign(1.0, height) if abs(height) > 0.5 * width else 0.0,
            width,
            full if is_full else radius,
            is_full,
        )
        for height in sorted(_heights(barrier))
    )


def _heights(barrier: BarrierDesign) -> tuple[float, ...]:
    """Heights of the ribs off the q axis in m."""
    places, count = barrier.radial_rib_places_mm, barrier.radial_ribs
    if places is not None:
        if len(places) != count:
            raise ValueError("radial_ribs differs from the number of radial_rib_places_mm")
        return tuple(MM * place for place in places)
    if count == 1:
        return (0.0,)
    if count > 2 or barrier.radial_rib_offset_mm is None:
        raise ValueError("radial ribs need their places")
    offset = MM * barrier.radial_rib_offset_mm
    return (-offset, offset)


# The same ribs are checked, checked for webs beside them, and drawn.
@lru_cache(maxsize=64)
def rib_sides(band: Band, cut: RibCut) -> tuple[RibSide, RibSide]:
    """The clockwise and the counter-clockwise side of a rib, the rib as wide as stated.

    Raises:
        ValueError: if the rib or a fillet does not fit on the barrier.
    """
    along = _along(cut)
    pivot = _pivot(band, cut.height) if cut.tilt else complex(0.0, cut.height)
    mirrored = mirrored_band(band)

    def sides(width: float) -> tuple[RibSide, RibSide]:
        shift = 0.5j * width * along
        below = _side(mirrored, (pivot - shift).conjugate(), cut, along.conjugate())
        return _mirrored(below), _side(band, pivot + shift, cut, along)

    def excess(pair: tuple[RibSide, RibSide]) -> float:
        start, end = thinnest(*pair, cut)
        return abs(end - start) - cut.width

    stated = sides(cut.width)
    by = excess(stated)
    if by < LENGTH_TOL:
        return stated
    return sides(_root(lambda width: excess(sides(width)), cut.width, cut.width - by))


def mirrored_pair(sides: tuple[RibSide, RibSide]) -> tuple[RibSide, RibSide]:
    """The sides of the rib on the other side of the q axis."""
    below, above = sides
    return _mirrored(above), _mirrored(below)


def thinnest(below: RibSide, above: RibSide, cut: RibCut) -> tuple[Point, Point]:
    """Where a rib is thinnest: in the middle of its sides where they run side by side.

    Between rounds without straight part, or sides that do not face each other, the nearest points.
    """
    along = _along(cut)
    straight = [[e for e in side.edges if e.is_line] for side in (below, above)]
    if straight[0] and straight[1]:
        starts = [
            min((line.start, line.end), key=lambda p: (p / along).real) for line, *_ in straight
        ]
        spans = [sorted(((e.start / along).real, (e.end / along).real)) for e, *_ in straight]
        first, last = max(span[0] for span in spans), min(span[1] for span in spans)
        if first <= last:
            middle = 0.5 * (first + last)
            lower, upper = (
                start + (middle - span[0]) * along
                for start, span in zip(starts, spans, strict=True)
            )
            return lower, upper
    pairs = [nearest(a, b) for a in below.edges for b in above.edges]
    return min(pairs, key=lambda pair: abs(pair[0] - pair[1]))


def _pivot(band: Band, height: float) -> Point:
    """The middle between the barrier's sides at a height off the q axis."""
    start, end = _crossing(band, complex(0.0, height), 1.0 + 0j, band.rim_on_axis)
    return 0.5 * (start.point + end.point)


@dataclass(frozen=True, slots=True)
class Spot:
    """A point on a side of a band."""

    at: float  # along the line that meets the side there, in m
    is_rim: bool  # whether the side is the one towards the rim
    index: int  # of the edge
    point: Point


def _crossing(band: Band, base: Point, along: complex, near: Point) -> tuple[Spot, Spot]:
    """Where a line goes from the shaft's side through the barrier to the rim's, nearest `near`."""
    probe = line(base, base + along)
    met = _met(band, probe)
    through = [(p, q) for p, q in pairwise(met) if not p.is_rim and q.is_rim]
    if not through:
        raise ValueError("a radial rib lies beyond the sides of its barrier")
    at = ((near - base) / along).real
    return min(through, key=lambda pair: abs(0.5 * (pair[0].at + pair[1].at) - at))


def _met(band: Band, probe: Edge) -> list[Spot]:
    """Where an unbounded line meets the band's sides, in order along it."""
    found = []
    across = (probe.end - probe.start).conjugate() / abs(probe.end - probe.start)
    for is_rim, chain in ((False, band.to_shaft), (True, band.to_rim)):
        for index, edge in enumerate(chain):
            if _is_aside(edge, probe.start, across):
                continue
            for point in crossings(edge, probe):
                if is_within(edge, point):
                    at = ((point - probe.start) / (probe.end - probe.start)).real
                    found.append(Spot(at, is_rim, index, point))
    return sorted(found, key=lambda spot: spot.at)


def _is_aside(edge: Edge, base: Point, across: complex) -> bool:
    """Whether an edge lies on one side of a line; most of a fine chain's do, so it pays to look.

    No arc up to half a turn is farther from its chord than half of it times the bulge.
    """
    first, last = ((edge.start - base) * across).imag, ((edge.end - base) * across).imag
    reach = (0.5 * abs(edge.bulge) + ASIDE_TOL) * abs(edge.end - edge.start)
    return abs(edge.bulge) <= 1.0 and first * last > 0.0 and min(abs(first), abs(last)) > reach


def _side(band: Band, base: Point, cut: RibCut, along: complex) -> RibSide:
    """The counter-clockwise side of a rib whose straight line goes through `base`."""
    shaft, rim = _crossing(band, base, along, base)
    straight = line(shaft.point, rim.point)
    inward = [reversed_edge(edge) for edge in reversed(_beyond(band.to_shaft, shaft))]
    outward = _beyond(band.to_rim, rim)

    def left(radius: float) -> float:
        """What two fillets of that radius leave of the straight side."""
        at_rim = rounded([straight], outward, radius)[0][0].end
        at_shaft = rounded(inward, [straight], radius)[2][0].start
        return ((at_rim - at_shaft) / along).real

    radius = cut.fillet
    if cut.is_full_round and abs(left(radius)) > LENGTH_TOL:
        radius = _root(left, radius, radius + 0.5 * left(radius))
    (middle,), rim_fillet, outward = rounded([straight], outward, radius)
    inward, shaft_fillet, (middle,) = rounded(inward, [middle], radius)
    edges = [shaft_fillet, middle, rim_fillet]
    if cut.is_full_round:
        edges = [shaft_fillet, Edge(shaft_fillet.end, rim_fillet.end, rim_fillet.bulge)]
    return RibSide(
        tuple(edges), tuple(reversed_edge(edge) for edge in reversed(inward)), tuple(outward)
    )


def _beyond(chain: tuple[Edge, ...], spot: Spot) -> list[Edge]:
    """The chain from a point on it to its end."""
    edge, rest = chain[spot.index], list(chain[spot.index + 1 :])
    first = piece(edge, spot.point, edge.end)
    return [first, *rest] if abs(first.end - first.start) > SLIVER * edge.length else rest


def _mirrored(side: RibSide) -> RibSide:
    """The side mirrored in the q axis, its edges still from shaft to rim, chains still outward."""
    return RibSide(
        *(
            tuple(mirrored_edge(edge) for edge in chain)
            for chain in (side.edges, side.to_shaft, side.to_rim)
        )
    )


def _along(cut: RibCut) -> complex:
    return cmath.exp(1j * cut.tilt) if cut.tilt else 1.0 + 0j


def _root(of: Callable[[float], float], first: float, second: float) -> float:
    """Where a smooth function of a length vanishes, by the secant method from two values."""
    f_first, f_second = of(first), of(second)
    for _ in range(MOST_STEPS):
        if abs(f_second) < LENGTH_TOL:
            return second
        if f_second == f_first:
            break
        first, second = second, second - f_second * (second - first) / (f_second - f_first)
        f_first, f_second = f_second, of(second)
    raise ValueError("a radial rib cannot be given its width and fillets here")
