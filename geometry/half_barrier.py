"""The upper half of a barrier: its two sides and its end, as exact lines and arcs.

All is written in the q axis's frame: shaft axis at 0, q axis along +x. The sides run from the
q axis, which they leave at a right angle, out to the end; the end runs from the rim's side to the
shaft's. Reversed `to_shaft`, then `to_rim`, then `end` is counter-clockwise. A side may have many
edges, and its first one may be short: what cuts a barrier has to look along the whole side.
"""

import functools
from dataclasses import dataclass

from .barrier_ends import ClosedEnd, flat_end, round_end, square_end
from .barrier_sides import TO_RIM, TO_SHAFT, Seat, seat_of, side_of
from .curves import Edge, Point
from .design import BarrierDesign
from .mid_lines import MM, end_fillet_mm

# Checks and drawing ask for the same few outlines again and again, a search for ranges for one
# changed barrier beside unchanged ones: a fitted one takes 2 ms.
MOST_KEPT = 64


@dataclass(frozen=True, slots=True)
class HalfBarrier:
    """The part of a barrier above the q axis, in m."""

    to_shaft: tuple[Edge, ...]  # side that faces the shaft, from the q axis outward
    to_rim: tuple[Edge, ...]  # side that faces the rim, from the q axis outward
    end: tuple[Edge, ...]  # from the end of `to_rim` to the end of `to_shaft`
    rib: tuple[Point, Point]  # thinnest place of the tangential rib: on the barrier, on the rim
    rib_width: float  # as stated in the design


@functools.lru_cache(maxsize=MOST_KEPT)
def half_barrier(barrier: BarrierDesign, rotor_radius: float, pole_pairs: int) -> HalfBarrier:
    """The barrier's upper half.

    Args:
        barrier: one barrier of the design.
        rotor_radius: in m.
        pole_pairs: sets the default of straight arms' angle, half the pole pitch, and the flux
            lines of a streamline barrier.

    Raises:
        ValueError: if the barrier has no outline; `checks` says what would fit.
    """
    seat = seat_of(barrier, rotor_radius, pole_pairs)
    if not 0.0 < seat.shaft_vertex < seat.rim_vertex or seat.reach <= 2.0 * seat.half:
        raise ValueError("the barrier does not fit between the shaft axis and the rim")
    closed = _closed(barrier, seat)
    width = MM * barrier.tangential_rib_mm
    return HalfBarrier(closed.to_shaft, closed.to_rim, closed.end, closed.rib, width)


def _closed(barrier: BarrierDesign, seat: Seat) -> ClosedEnd:
    sides = (side_of(barrier, seat, TO_SHAFT), side_of(barrier, seat, TO_RIM))
    if barrier.end_shape == "round":
        return round_end(sides, seat)
    radius = MM * end_fillet_mm(barrier)
    if barrier.end_shape == "square":
        return square_end(sides, seat, radius)
    inner = barrier.tangential_rib_inner_mm
    return flat_end(sides, seat, radius, seat.rib if inner is None else MM * inner)
