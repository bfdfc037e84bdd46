"""The upper half of a barrier: its two sides and its end, as exact lines and arcs.

All is written in the q axis's frame: shaft axis at 0, q axis along +x. The sides run from the
q axis, which they leave at a right angle, out to the end; the end runs from the rim's side to the
shaft's. Reversed `to_shaft`, then `to_rim`, then `end` is counter-clockwise.
"""

from dataclasses import dataclass

from .curves import Edge, Point, chained, offset_edge
from .design import BarrierDesign
from .mid_lines import MM, MidLine, mid_line


@dataclass(frozen=True, slots=True)
class HalfBarrier:
    """The part of a barrier above the q axis, in m."""

    to_shaft: tuple[Edge, ...]  # side that faces the shaft, from the q axis outward
    to_rim: tuple[Edge, ...]  # side that faces the rim, from the q axis outward
    end: tuple[Edge, ...]  # from the end of `to_rim` to the end of `to_shaft`
    rib: tuple[Point, Point]  # thinnest place of the tangential rib: on the barrier, on the rim
    rib_width: float  # as stated in the design


def half_barrier(barrier: BarrierDesign, rotor_radius: float, pole_pairs: int) -> HalfBarrier:
    """The barrier's upper half.

    Args:
        barrier: one barrier of the design.
        rotor_radius: in m.
        pole_pairs: sets the default of straight arms' angle, half the pole pitch.

    Raises:
        ValueError: if the barrier has no outline; `checks` says what would fit.
    """
    mid = mid_line(barrier, rotor_radius, pole_pairs)
    to_shaft, to_rim = (_side(mid, sign * 0.5 * mid.thickness) for sign in (1.0, -1.0))
    cap = mid.cap_centre
    out = cap / abs(cap)
    return HalfBarrier(
        to_shaft,
        to_rim,
        end=(Edge(to_rim[-1].end, to_shaft[-1].end, 1.0),),
        rib=(cap + 0.5 * mid.thickness * out, rotor_radius * out),
        rib_width=MM * barrier.tangential_rib_mm,
    )


def _side(mid: MidLine, distance: float) -> tuple[Edge, ...]:
    return chained([offset_edge(edge, distance) for edge in mid.edges])
