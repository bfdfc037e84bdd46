"""Barrier families as closed paths of lines and arcs.

A barrier is a mid-line, half a thickness to either side of it, and a half circle on each end: the
mid-line thickened by a disc. So both families need only their mid-line. It is written in the
q axis's frame (shaft axis at 0, q axis along +x), for the upper half alone, from the q axis to the
centre of the round end; the lower half is its mirror image. Seen along the upper half, the shaft
lies to the left and the rim to the right.

The centre of a round end lies at `end_angle` from the q axis, on the circle that leaves the
tangential rib between the round end and the rim. The distance from the shaft axis grows along
every mid-line, so the rib is thinnest there and exactly as wide as stated.

Source of all formulas: derived, plane trigonometry.
"""

import cmath
import math
from dataclasses import dataclass

from .corners import crossings, fillet
from .curves import (
    Edge,
    Path,
    Point,
    chained,
    closed,
    line,
    mirrored_edge,
    offset_edge,
    piece,
    reversed_edge,
)
from .design import BarrierDesign

MM = 1e-3  # m
FULL_ROUND_TOL = 1e-9  # m, a fillet so close to half the thickness is meant to be it


@dataclass(frozen=True, slots=True)
class MidLine:
    """Upper half of a barrier's mid-line in the q axis's frame, from the q axis outward (m)."""

    edges: tuple[Edge, ...]
    thickness: float

    @property
    def cap_centre(self) -> Point:
        """Centre of the upper round end."""
        return self.edges[-1].end


@dataclass(frozen=True, slots=True)
class StraightLegs:
    """Bottom and arm of a straight barrier's mid-line, as far as the bend leaves them (m, rad)."""

    turn: float  # of the bend
    bottom_left: float  # half the straight bottom; negative where the bend does not fit
    arm_left: float  # the straight arm; negative where the bend does not fit


@dataclass(frozen=True, slots=True)
class RibCut:
    """A radial rib in the q axis's frame: parallel to that axis, its middle at height `middle`."""

    middle: float
    width: float
    fillet: float


def mid_line(barrier: BarrierDesign, rotor_radius: float, pole_pairs: int) -> MidLine:
    """The barrier's mid-line.

    Args:
        barrier: one barrier of the design.
        rotor_radius: in m.
        pole_pairs: sets the default of the arms' angle, half the pole pitch.

    Raises:
        ValueError: if the barrier has no mid-line; `checks` says what would fit.
    """
    thickness = MM * barrier.thickness_mm
    bottom, cap = bottom_radius(barrier, rotor_radius), cap_centre(barrier, rotor_radius)
    if bottom <= 0.0 or cap.real <= bottom:
        raise ValueError("the barrier's end lies no further out than its bottom")
    if barrier.shape == "arc":
        return MidLine((_arc_half(bottom, cap),), thickness)
    legs = straight_legs(barrier, rotor_radius, pole_pairs)
    return MidLine(_straight_half(bottom, cap, legs), thickness)


def bottom_radius(barrier: BarrierDesign, rotor_radius: float) -> float:
    """Distance from the shaft axis to the mid-line on the q axis, in m."""
    return rotor_radius - MM * (barrier.depth_mm + 0.5 * barrier.thickness_mm)


def cap_centre(barrier: BarrierDesign, rotor_radius: float) -> Point:
    """Centre of the barrier's upper round end in the q axis's frame, in m."""
    radius = rotor_radius - MM * (barrier.tangential_rib_mm + 0.5 * barrier.thickness_mm)
    return cmath.rect(radius, math.radians(barrier.end_angle_deg))


def arm_angle(barrier: BarrierDesign, pole_pairs: int) -> float:
    """Angle of a straight barrier's arms with the q axis in rad; by default half the pole pitch."""
    if barrier.arm_angle_deg is None:
        return 0.5 * math.pi / pole_pairs
    return math.radians(barrier.arm_angle_deg)


def bend_radius(barrier: BarrierDesign) -> float:
    """Inner radius of a straight barrier's bends in m; by default the thickness."""
    stated = barrier.bend_radius_mm
    return MM * (barrier.thickness_mm if stated is None else stated)


def straight_legs(barrier: BarrierDesign, rotor_radius: float, pole_pairs: int) -> StraightLegs:
    """Where bottom and arm of a straight barrier's mid-line would meet, also if they do not fit.

    A bend of turn phi and mid-line radius r uses up r tan(phi / 2) of bottom and arm.
    """
    bottom, cap = bottom_radius(barrier, rotor_radius), cap_centre(barrier, rotor_radius)
    angle = arm_angle(barrier, pole_pairs)
    out = cmath.rect(1.0, angle)
    arm = (cap.real - bottom) / out.real
    corner = cap - arm * out
    turn = 0.5 * math.pi - angle
    leg = (bend_radius(barrier) + 0.5 * MM * barrier.thickness_mm) * math.tan(0.5 * turn)
    return StraightLegs(turn, bottom_left=corner.imag - leg, arm_left=arm - leg)


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


def cavities(mid: MidLine, cuts: tuple[RibCut, ...]) -> tuple[Path, ...]:
    """The cavities of a barrier in the q axis's frame, counter-clockwise about the shaft axis.

    Args:
        mid: the barrier's mid-line.
        cuts: its radial ribs, none, one on the q axis, or two symmetric to it.

    Returns:
        One counter-clockwise path per cavity, one more than there are ribs, all corners rounded.

    Raises:
        ValueError: if a rib or fillet does not fit; `checks` says what would.
    """
    to_shaft, to_rim = (_side(mid, sign * 0.5 * mid.thickness) for sign in (1.0, -1.0))
    if not cuts:
        return (_whole(to_shaft, to_rim),)
    cut = cuts[-1]
    upper = _outer_cavity(to_shaft, to_rim, cut.middle + 0.5 * cut.width, cut.fillet)
    lower = closed([mirrored_edge(reversed_edge(edge)) for edge in reversed(upper.edges)])
    if len(cuts) == 1:
        return (lower, upper)
    middle = _middle_cavity(to_shaft[0], to_rim[0], cut.middle - 0.5 * cut.width, cut.fillet)
    return (lower, middle, upper)


def _arc_half(bottom: float, cap: Point) -> Edge:
    # Circle about (centre, 0) through (bottom, 0) and the cap's centre:
    # (centre - bottom)^2 = |cap|^2 - 2 centre Re cap + centre^2.
    centre = 0.5 * (abs(cap) ** 2 - bottom**2) / (cap.real - bottom)
    half_span = math.atan2(cap.imag, centre - cap.real)
    return Edge(complex(bottom), cap, -math.tan(0.25 * half_span))


def _straight_half(bottom: float, cap: Point, legs: StraightLegs) -> tuple[Edge, ...]:
    if legs.bottom_left <= 0.0 or legs.arm_left <= 0.0:
        raise ValueError("the bend does not fit on the bottom and the arm")
    first = complex(bottom, legs.bottom_left)
    second = cap - cmath.rect(legs.arm_left, 0.5 * math.pi - legs.turn)
    bend = Edge(first, second, -math.tan(0.25 * legs.turn))
    return (line(complex(bottom), first), bend, line(second, cap))


def _side(mid: MidLine, distance: float) -> tuple[Edge, ...]:
    return chained([offset_edge(edge, distance) for edge in mid.edges])


def _across(edge: Edge) -> Edge:
    """An edge that starts on the q axis at a right angle, joined with its mirror image."""
    start = edge.end.conjugate()
    return Edge(start, edge.end, math.tan(0.5 * edge.sweep))


def _whole(to_shaft: tuple[Edge, ...], to_rim: tuple[Edge, ...]) -> Path:
    inward = [reversed_edge(edge) for edge in reversed(to_shaft[1:])]
    outward = list(to_rim[1:])
    return closed(
        [
            *inward,
            reversed_edge(_across(to_shaft[0])),
            *[mirrored_edge(edge) for edge in to_shaft[1:]],
            Edge(to_shaft[-1].end.conjugate(), to_rim[-1].end.conjugate(), 1.0),
            *[mirrored_edge(reversed_edge(edge)) for edge in reversed(outward)],
            _across(to_rim[0]),
            *outward,
            Edge(to_rim[-1].end, to_shaft[-1].end, 1.0),
        ]
    )


def _outer_cavity(
    to_shaft: tuple[Edge, ...], to_rim: tuple[Edge, ...], height: float, radius: float
) -> Path:
    """What lies between the rib's side at `height` and the upper round end."""
    inner, outer = _at_height(to_shaft[0], height), _at_height(to_rim[0], height)
    sharp = closed(
        [
            line(inner, outer),
            piece(to_rim[0], outer, to_rim[0].end),
            *to_rim[1:],
            Edge(to_rim[-1].end, to_shaft[-1].end, 1.0),
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
