"""The ends of a barrier's upper half: round, flat along the rim, or cut square.

All three leave the stated tangential rib at its thinnest:

- round: an arc of the end's circle, from where the rim's side touches it to where the shaft's
  does; the rib is thinnest on the ray through the circle's centre.
- flat: the sides run on towards the rim and are joined by an arc about the shaft axis, so the rib
  has the stated width all along it. With a wider inner width stated, the rib grows from the stated
  width at the rim side's fillet (towards the q axis) to the inner width at the shaft side's
  fillet, where the carrier behind the barrier begins: the end then is an arc that touches the
  concentric one at the first fillet and has a smaller radius.
- square: the sides run on and are joined by a line across the barrier, at a right angle to the
  direction half-way between both sides at the end's circle. The rib is thinnest at one of its two
  fillets.

Source: derived, plane geometry.
"""

from collections.abc import Callable
from dataclasses import dataclass

from .barrier_sides import TO_RIM, TO_SHAFT, Contact, Seat, Side, root, sweep_between
from .corners import is_within
from .curves import Edge, Point, arc, circle, line

MOST_STEPS = 40  # halvings until an end is found that is wide enough
HALF_TURN_TOL = 1e-12  # rad, sides of equal thickness are parallel to rounding

Sides = tuple[Side, Side]  # to_shaft, to_rim


@dataclass(frozen=True, slots=True)
class ClosedEnd:
    """Both sides as far as the end leaves them, the end, and the rib's thinnest place, in m."""

    to_shaft: tuple[Edge, ...]
    to_rim: tuple[Edge, ...]
    end: tuple[Edge, ...]
    rib: tuple[Point, Point]


def round_end(sides: Sides, seat: Seat) -> ClosedEnd:
    """The sides joined by an arc of the end's circle.

    Raises:
        ValueError: if the arc does not face the rim, or a side cannot be drawn.
    """
    to_shaft, to_rim = (side.to_touch() for side in sides)
    start, end, out = to_rim[-1].end, to_shaft[-1].end, seat.cap / abs(seat.cap)
    half_turn = Edge(start, end, 1.0)
    sweep = sweep_between(start, end, seat.cap)
    is_half = abs(sweep - half_turn.sweep) < HALF_TURN_TOL
    edge = half_turn if is_half else arc(start, end, seat.cap, ccw=True)
    farthest = seat.cap + seat.half * out
    if not is_within(edge, farthest):
        raise ValueError("the end of the barrier is turned away from the rim")
    return ClosedEnd(to_shaft, to_rim, (edge,), (farthest, seat.rotor_radius * out))


def flat_end(sides: Sides, seat: Seat, radius: float, inner_rib: float) -> ClosedEnd:
    """The sides, followed towards the rim, joined along the rim.

    Args:
        sides: to_shaft and to_rim.
        seat: where the barrier lies.
        radius: of both fillets in m.
        inner_rib: width of the rib at the shaft side's fillet in m, at least the rib's.

    Raises:
        ValueError: if the fillets or the inner width do not fit.
    """
    if inner_rib < seat.rib:
        raise ValueError("the rib is thinner at its inner side")
    near = _ring(seat.reach - radius)
    first = _contact(sides[1], radius, near)
    out = first.centre / abs(first.centre)
    start = seat.reach * out
    if inner_rib == seat.rib:
        centre = 0j
        second = _contact(sides[0], radius, near)
        end = seat.reach * second.centre / abs(second.centre)
    else:
        centre, second, end = _tapered(sides[0], seat, radius, inner_rib, out)
    if not 0.0 < sweep_between(start, end, centre) < 3.0:
        raise ValueError("the fillets leave no flat end between them")
    along = arc(start, end, centre, ccw=True)
    end_edges = (
        arc(first.touch, start, first.centre, ccw=True),
        along,
        arc(end, second.touch, second.centre, ccw=True),
    )
    place = along.point(0.5) if centre == 0j else start
    rib = (place, seat.rotor_radius * place / abs(place))
    return ClosedEnd(sides[0].up_to(second), sides[1].up_to(first), end_edges, rib)


def square_end(sides: Sides, seat: Seat, radius: float) -> ClosedEnd:
    """The sides, followed towards the rim, joined by a line across the barrier.

    Args:
        sides: to_shaft and to_rim.
        seat: where the barrier lies.
        radius: of both fillets in m.

    Raises:
        ValueError: if the fillets do not fit.
    """
    near, out = _ring(seat.reach - radius), _between(sides)
    for critical in (TO_RIM, TO_SHAFT):
        this, other = (sides[1], sides[0]) if critical == TO_RIM else sides
        corner = this.contact(radius, near)
        if corner is None or (corner.centre / out).imag * critical < 0.0:
            continue  # the fillet does not face the rim
        level = (corner.centre / out).real
        second = other.contact(radius, line(level * out, (level + 1j * seat.half) * out))
        if second is None or abs(second.centre) > abs(corner.centre):
            continue
        pair = (corner, second) if critical == TO_RIM else (second, corner)
        end = _across(pair, radius, out)
        ray = corner.centre / abs(corner.centre)
        rib = (corner.centre + radius * ray, seat.rotor_radius * ray)
        return ClosedEnd(sides[0].up_to(pair[1]), sides[1].up_to(pair[0]), end, rib)
    raise ValueError("the fillets do not fit on the square end")


def _between(sides: Sides) -> complex:
    """Unit vector half-way between the directions in which both sides touch the end's circle."""
    both = sides[0].direction + sides[1].direction
    return both / abs(both)


def _across(pair: tuple[Contact, Contact], radius: float, out: complex) -> tuple[Edge, ...]:
    """The line across a square end between its two fillets."""
    first, second = pair
    start, end = first.centre + radius * out, second.centre + radius * out
    if ((end - start) / out).imag <= 0.0:
        raise ValueError("the fillets leave no square end between them")
    return (
        arc(first.touch, start, first.centre, ccw=True),
        line(start, end),
        arc(end, second.touch, second.centre, ccw=True),
    )


def _contact(side: Side, radius: float, guide: Edge) -> Contact:
    corner = side.contact(radius, guide)
    if corner is None:
        raise ValueError("a fillet of the end does not fit")
    return corner


def _tapered(
    side: Side, seat: Seat, radius: float, inner_rib: float, out: complex
) -> tuple[Point, Contact, Point]:
    """Centre of an end that leaves `inner_rib` at the shaft's side, its fillet, its last point."""

    def drawn(shift: float) -> tuple[Point, Contact, Point]:
        centre = shift * seat.reach * out
        around = (1.0 - shift) * seat.reach
        corner = _contact(side, radius, _ring(around - radius, centre))
        ray = (corner.centre - centre) / abs(corner.centre - centre)
        return centre, corner, centre + around * ray

    def lack(shift: float) -> float:
        return abs(drawn(shift)[2]) - (seat.rotor_radius - inner_rib)

    return drawn(_shift(lack, 1.0 - 1.001 * radius / seat.reach))


def _ring(radius: float, centre: Point = 0j) -> Edge:
    """Half of the circle on which a fillet's centre lies."""
    if radius <= 0.0:
        raise ValueError("a fillet of the end does not fit")
    return circle(centre, radius).edges[0]


def _shift(lack: Callable[[float], float], last: float) -> float:
    """Where a falling function is 0 from 0 to `last`; behind it the end does not reach its side."""
    low, high = 0.0, last
    if lack(low) <= 0.0:
        raise ValueError("the end is too narrow for the rib's inner width")
    for _ in range(MOST_STEPS):
        middle = 0.5 * (low + high)
        try:
            gap = lack(middle)
        except ValueError:
            high = middle
            continue
        if gap <= 0.0:
            return root(lack, low, middle)
        low = middle
    raise ValueError("the end is too narrow for the rib's inner width")
