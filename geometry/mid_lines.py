"""Mid-lines of barriers in the q axis's frame, and the lengths that place them.

The q axis's frame has the shaft axis at 0 and the q axis along +x. A mid-line is written for the
upper half alone, from the q axis to the centre of the round end. Seen along it, the shaft lies to
the left and the rim to the right. The centre of a round end lies at `end_angle` from the q axis,
on the circle that leaves the tangential rib between the round end and the rim. The distance from
the shaft axis grows along every mid-line, so the rib is thinnest there and exactly as stated.

Source of all formulas: derived, plane trigonometry.
"""

import cmath
import math
from dataclasses import dataclass

from .curves import Edge, Point, line
from .design import BarrierDesign

MM = 1e-3  # m


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
