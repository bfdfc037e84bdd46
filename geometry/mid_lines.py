"""Guide lines of barriers in the q axis's frame, and the lengths that place them.

The q axis's frame has the shaft axis at 0 and the q axis along +x. A guide line is written for the
upper half alone, from the q axis to the centre of the barrier's end; a side of the barrier is its
parallel. Seen along it, the shaft lies to the left and the rim to the right. The centre of the end
lies at `end_angle` from the q axis, on the circle that leaves the tangential rib between a round
end and the rim.

Source of all formulas: derived, plane trigonometry.
"""

import cmath
import math
from dataclasses import dataclass

from .curves import Edge, Point, line
from .design import BarrierDesign

MM = 1e-3  # m


@dataclass(frozen=True, slots=True)
class StraightLegs:
    """Bottom and arm of a straight barrier's mid-line, as far as the bend leaves them (m, rad)."""

    turn: float  # of the bend
    bottom_left: float  # half the straight bottom; negative where the bend does not fit
    arm_left: float  # the straight arm; negative where the bend does not fit


def cap_centre(barrier: BarrierDesign, rotor_radius: float) -> Point:
    """Centre of the barrier's upper round end in the q axis's frame, in m."""
    radius = rotor_radius - MM * (barrier.tangential_rib_mm + 0.5 * end_thickness_mm(barrier))
    return cmath.rect(radius, math.radians(barrier.end_angle_deg))


def end_thickness_mm(barrier: BarrierDesign) -> float:
    """Thickness at the barrier's end in mm; by default that on the q axis."""
    return barrier.thickness_mm if barrier.end_thickness_mm is None else barrier.end_thickness_mm


def end_fillet_mm(barrier: BarrierDesign) -> float:
    """Radius of a flat or square end's fillets in mm; by default a quarter of its thickness."""
    stated = barrier.end_fillet_mm
    return 0.25 * end_thickness_mm(barrier) if stated is None else stated


def arm_angle(barrier: BarrierDesign, pole_pairs: int) -> float:
    """Angle of a straight barrier's arms with the q axis in rad; by default half the pole pitch."""
    if barrier.arm_angle_deg is None:
        return 0.5 * math.pi / pole_pairs
    return math.radians(barrier.arm_angle_deg)


def bend_radius(barrier: BarrierDesign) -> float:
    """Inner radius of a straight barrier's bends in m; by default the thickness."""
    stated = barrier.bend_radius_mm
    return MM * (barrier.thickness_mm if stated is None else stated)


def legs_between(bottom: float, cap: Point, angle: float, radius: float) -> StraightLegs:
    """Bottom and arm of a line with one bend.

    A bend of turn phi and radius r uses up r tan(phi / 2) of bottom and arm.

    Args:
        bottom: distance from the shaft axis to the bottom in m.
        cap: end of the arm in m.
        angle: of the arm with the q axis in rad.
        radius: of the bend in m.
    """
    out = cmath.rect(1.0, angle)
    arm = (cap.real - bottom) / out.real
    corner = cap - arm * out
    turn = 0.5 * math.pi - angle
    leg = radius * math.tan(0.5 * turn)
    return StraightLegs(turn, bottom_left=corner.imag - leg, arm_left=arm - leg)


def arc_half(bottom: float, cap: Point) -> Edge:
    """The arc about a point of the q axis from (bottom, 0) to `cap`, in m."""
    # Circle about (centre, 0) through (bottom, 0) and the cap's centre:
    # (centre - bottom)^2 = |cap|^2 - 2 centre Re cap + centre^2.
    centre = 0.5 * (abs(cap) ** 2 - bottom**2) / (cap.real - bottom)
    half_span = math.atan2(cap.imag, centre - cap.real)
    return Edge(complex(bottom), cap, -math.tan(0.25 * half_span))


def vee_half(bottom: float, cap: Point, radius: float) -> tuple[Edge, Edge]:
    """A nose of `radius` about a point of the q axis, and the arm from it to `cap`, in m.

    Raises:
        ValueError: if the end lies within the nose, or the arms would run together.
    """
    nose = cap - (bottom + radius)
    if abs(nose) <= radius:
        raise ValueError("the end of the barrier lies within its nose")
    # The arm runs at `radius` to the left of the nose's centre.
    angle = cmath.phase(nose) - math.asin(radius / abs(nose))
    if not 0.0 < angle < 0.5 * math.pi:
        raise ValueError("the arms of the vee do not open towards the rim")
    touch = bottom + radius + cmath.rect(radius, angle + 0.5 * math.pi)
    bulge = -math.tan(0.25 * (0.5 * math.pi - angle))
    return Edge(complex(bottom), touch, bulge), line(touch, cap)


def straight_half(bottom: float, cap: Point, legs: StraightLegs) -> tuple[Edge, ...]:
    """Half a bottom, bend and arm from (bottom, 0) to `cap`, in m.

    Raises:
        ValueError: if the bend does not fit.
    """
    if legs.bottom_left <= 0.0 or legs.arm_left <= 0.0:
        raise ValueError("the bend does not fit on the bottom and the arm")
    first = complex(bottom, legs.bottom_left)
    second = cap - cmath.rect(legs.arm_left, 0.5 * math.pi - legs.turn)
    bend = Edge(first, second, -math.tan(0.25 * legs.turn))
    return (line(complex(bottom), first), bend, line(second, cap))
