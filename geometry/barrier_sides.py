"""The two sides of a barrier's upper half, each a curve of its own, for every family.

A half circle of half the end's thickness about the end's centre is touched by both sides: by the
rim's side on its right, by the shaft's on its left, seen outward along the barrier. So a barrier
as thick on the q axis as at its end has parallel sides, and any other has sides that run apart.

- arc, straight, vee: each side is the parallel, at half the end's thickness, of a guide line from
  the q axis to the end's centre. The guides of the two sides start half the end's thickness inside
  their own sides; of equal thickness they are one line. A straight barrier's bottom is as thick
  as on the q axis and its arms as at the end; arc and vee change gradually.
- hyperbolic, streamline: each side is a field line of its own (`flux_lines`) that touches the
  circle, drawn as the arcs fitted to it.

A side is either drawn to where it touches the end's circle, or followed on towards the rim to the
point where a fillet of the end touches it. The fillet's centre lies on the parallel of the side
inside the barrier, at the fillet's radius, and on a line or circle that the end prescribes.

Source: derived, plane geometry.
"""

import cmath
import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

from .arc_fit import fitted
from .corners import crossings, foot, is_within
from .curves import Edge, Point, chained, circle, offset_edge, piece, share_of
from .design import BarrierDesign
from .flux_lines import FieldLine, disc_line, hyperbola, touching
from .mid_lines import (
    MM,
    arc_half,
    arm_angle,
    bend_radius,
    cap_centre,
    end_thickness_mm,
    legs_between,
    straight_half,
    vee_half,
)

TO_SHAFT, TO_RIM = 1.0, -1.0  # sides: to the left and right of a barrier's outward sense
FITTED = ("hyperbolic", "streamline")
SCAN = 6  # steps back along a field line to where a fillet lies within its guide
MOST_STEPS = 60
LEAST_RISE = 1e-9  # m, of an end above the bottom: flatter arcs are lost in rounding
ROOT_TOL = 2e-15  # of the bracket's larger end: rounding


@dataclass(frozen=True, slots=True)
class Seat:
    """What places a barrier's upper half, in m."""

    rotor_radius: float
    pole_pairs: int
    rim_vertex: float  # where the rim's side meets the q axis
    shaft_vertex: float  # where the shaft's side meets it
    cap: Point  # centre of the end
    half: float  # half the end's thickness
    rib: float

    @property
    def reach(self) -> float:
        """Largest distance of the barrier from the shaft axis."""
        return self.rotor_radius - self.rib

    def vertex(self, side: float) -> float:
        """Where a side meets the q axis."""
        return self.shaft_vertex if side == TO_SHAFT else self.rim_vertex


def seat_of(barrier: BarrierDesign, rotor_radius: float, pole_pairs: int) -> Seat:
    """The lengths that place a barrier, without a check."""
    depth, thickness = barrier.depth_mm, barrier.thickness_mm
    return Seat(
        rotor_radius,
        pole_pairs,
        rim_vertex=rotor_radius - MM * depth,
        shaft_vertex=rotor_radius - MM * (depth + thickness),
        cap=cap_centre(barrier, rotor_radius),
        half=0.5 * MM * end_thickness_mm(barrier),
        rib=MM * barrier.tangential_rib_mm,
    )


def guide_bottom(barrier: BarrierDesign, seat: Seat, side: float) -> float:
    """Where the guide line of a side meets the q axis, in m from the shaft axis."""
    inside = 0.5 * end_thickness_mm(barrier)
    if side == TO_SHAFT:
        inside = barrier.thickness_mm - inside
    # Of equal thickness both sides' guides start at the same number, to the last bit.
    return seat.rotor_radius - MM * (barrier.depth_mm + inside)


def guide_bend(barrier: BarrierDesign, side: float) -> float:
    """Radius of a side's guide line in its bend or nose, in m.

    The rim's side then has the stated radius, the shaft's the mean of both thicknesses more.
    """
    rim_side = end_thickness_mm(barrier)
    return bend_radius(barrier) + 0.5 * MM * (barrier.thickness_mm if side > 0.0 else rim_side)


@dataclass(frozen=True, slots=True)
class Contact:
    """A fillet that touches a side."""

    centre: Point
    touch: Point
    where: float  # along the side: the number of an edge, or the parameter of a curve


class Side(Protocol):
    """One side of a barrier's upper half."""

    @property
    def direction(self) -> complex:
        """Unit tangent where it touches the end's circle, outward."""

    def to_touch(self) -> tuple[Edge, ...]:
        """From the q axis to the end's circle."""

    def contact(self, radius: float, guide: Edge) -> Contact | None:
        """The outermost fillet whose centre lies on an unbounded guide; None where none fits."""

    def up_to(self, contact: Contact) -> tuple[Edge, ...]:
        """From the q axis to where a fillet touches it."""


@dataclass(frozen=True, slots=True)
class ArcSide:
    """A side of lines and arcs."""

    edges: tuple[Edge, ...]  # to the end's circle
    which: float  # TO_SHAFT or TO_RIM
    reach: float

    @property
    def direction(self) -> complex:
        """Unit tangent at the end."""
        return self.edges[-1].direction(1.0)

    def to_touch(self) -> tuple[Edge, ...]:
        """The side as it is."""
        return self.edges

    def contact(self, radius: float, guide: Edge) -> Contact | None:
        """The outermost fillet whose centre lies on an unbounded guide.

        Raises:
            ValueError: if the last edge turns back before it comes near the rim.
        """
        edges = (*self.edges[:-1], _followed(self.edges[-1], self.reach))
        for number in range(len(edges) - 1, -1, -1):
            try:
                inside = offset_edge(edges[number], -self.which * radius)
            except ValueError:
                return None  # the fillet is larger than the side is round
            centres = [c for c in crossings(inside, guide) if is_within(inside, c)]
            if centres:
                centre = max(centres, key=abs)
                return Contact(centre, foot(edges[number], centre), number)
        return None

    def up_to(self, contact: Contact) -> tuple[Edge, ...]:
        """The side cut or followed to where a fillet touches it."""
        number = int(contact.where)
        edge = self.edges[number]
        return (*self.edges[:number], piece(edge, edge.start, contact.touch))


@dataclass(frozen=True, slots=True)
class FieldSide:
    """A side along a field line, drawn as the arcs fitted to it."""

    line: FieldLine
    touch: Point  # on the end's circle
    which: float
    reach: float

    @property
    def direction(self) -> complex:
        """Unit tangent where it touches the end's circle."""
        return 1j * self.line.normal(self.touch)

    def to_touch(self) -> tuple[Edge, ...]:
        """Arcs to the point of contact.

        Raises:
            ValueError: if too many would be needed.
        """
        return self._fitted(self.line.at_radius(abs(self.touch)), self.touch)

    def contact(self, radius: float, guide: Edge) -> Contact | None:
        """The fillet whose centre lies on an unbounded guide; None where there is none."""
        inward = -1j * self.which * radius

        def off(parameter: float) -> float:
            point, tangent = self.line.at(parameter)
            return _beyond(guide, point + inward * tangent)

        last = self.line.at_radius(self.reach)
        if off(last) <= 0.0:
            return None
        steps = (last * (1.0 - k / SCAN) for k in range(1, SCAN + 1))
        before = next((parameter for parameter in steps if off(parameter) < 0.0), None)
        if before is None:
            return None
        parameter = root(off, before, last)
        touch, tangent = self.line.at(parameter)
        return Contact(touch + inward * tangent, touch, parameter)

    def up_to(self, contact: Contact) -> tuple[Edge, ...]:
        """Arcs to where a fillet touches it.

        Raises:
            ValueError: if too many would be needed.
        """
        return self._fitted(contact.where, contact.touch)

    def _fitted(self, last: float, touch: Point) -> tuple[Edge, ...]:
        fit = fitted(self.line.at, 0.0, last)
        if not fit.is_close:
            raise ValueError("no 24 arcs follow a side of the barrier to 2 um")
        end = fit.edges[-1]
        return (*fit.edges[:-1], Edge(end.start, touch, end.bulge))


def side_of(barrier: BarrierDesign, seat: Seat, which: float) -> Side:
    """One side of a barrier.

    Args:
        barrier: one barrier of the design.
        seat: where it lies.
        which: `TO_SHAFT` or `TO_RIM`.

    Raises:
        ValueError: if there is no such side; `checks` says what would fit.
    """
    if barrier.shape in FITTED:
        family = hyperbola if barrier.shape == "hyperbolic" else disc_line(seat.pole_pairs)
        line, touch = touching(family, seat.vertex(which), seat.cap, -which * seat.half)
        return FieldSide(line, touch, which, seat.reach)
    guide = guide_line(barrier, seat, which)
    edges = chained([offset_edge(edge, which * seat.half) for edge in guide])
    return ArcSide(edges, which, seat.reach)


def guide_line(barrier: BarrierDesign, seat: Seat, side: float) -> tuple[Edge, ...]:
    """The line whose parallel a side is: from the q axis to the end's centre.

    Raises:
        ValueError: if there is none.
    """
    bottom, cap = guide_bottom(barrier, seat, side), seat.cap
    if bottom <= 0.0 or cap.real - bottom <= LEAST_RISE:
        raise ValueError("the barrier's end lies no further out than its bottom")
    if barrier.shape == "arc":
        return (arc_half(bottom, cap),)
    radius = guide_bend(barrier, side)
    if barrier.shape == "vee":
        return vee_half(bottom, cap, radius)
    legs = legs_between(bottom, cap, arm_angle(barrier, seat.pole_pairs), radius)
    return straight_half(bottom, cap, legs)


def _followed(edge: Edge, radius: float) -> Edge:
    """The edge followed beyond its end to a circle about the shaft axis."""
    rim = circle(0j, radius).edges[0]
    beyond = [(share_of(edge, point), point) for point in crossings(edge, rim)]
    ahead = [(share, point) for share, point in beyond if share >= 1.0]
    if not ahead:
        raise ValueError("a side of the barrier turns back before it comes near the rim")
    return piece(edge, edge.start, min(ahead, key=lambda pair: pair[0])[1])


def _beyond(guide: Edge, point: Point) -> float:
    """How far a point lies beyond an unbounded circle, or to the right of a line."""
    if guide.is_line:
        return -((point - guide.start) / guide.direction(0.5)).imag
    return abs(point - guide.centre) - guide.radius


def root(value: Callable[[float], float], low: float, high: float) -> float:
    """Where a function of unlike signs at both ends is 0, by the Illinois rule.

    Source: Dowell and Jarratt 1971, from memory: false position, the value kept twice is halved.
    """
    at_low, at_high = value(low), value(high)
    for _ in range(MOST_STEPS):
        middle = (low * at_high - high * at_low) / (at_high - at_low)
        at_middle = value(middle)
        if at_middle * at_high < 0.0:
            low, at_low = high, at_high
        else:
            at_low *= 0.5
        if at_middle == 0.0 or abs(middle - high) <= ROOT_TOL * abs(high):
            return middle
        high, at_high = middle, at_middle
    return high


def sweep_between(start: Point, end: Point, centre: Point) -> float:
    """Counter-clockwise angle from `start` to `end` about `centre`, 0 to 2 pi."""
    return cmath.phase((end - centre) / (start - centre)) % (2.0 * math.pi)
