r"""Depth and thickness of the barriers of a first design: arcs in one pole, in SI units.

Angles e are electrical, from the q axis; e_0 = 0, e_1 ... e_n are the barriers' ends, e_(n+1) the
d axis at 90 degrees. The barriers share out a depth of the pole, most of it iron.

Carriers. The d axis's flux density in the gap is B sin e. What enters the rotor between e_k and
e_(k+1) leaves on the other side of the q axis and crosses it in carrier k, so equal flux density in
all carriers needs (derived; Vagati, Franceschini, Marongiu, Troglia 1992, from memory)

    w_k ~ cos e_k - cos e_(k+1).

Barriers. The q axis's mmf is F cos e. A carrier takes the mean of its part of the gap,
f_k = F (sin e_(k+1) - sin e_k) / (e_(k+1) - e_k), and barrier k the drop between its carriers.
Equal flux density in all barriers needs (derived, mmf drop over thickness; the same source)

    t_k ~ f_(k-1) - f_k.

An arc through its end at the rim can be neither as flat as the rim nor bent beyond a right angle to
it: its bottom is let lie only where it meets the rim at 45 to 90 degrees (common practice, no
source). Barriers that would lie flatter are put deeper; then the carrier outside has iron to spare.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

FLATTEST = math.radians(135.0)  # between the radii of arc and rim where they meet
STEEPEST = math.radians(90.0)
MOST_OF_SPACING = 0.5  # of the places at the rim that a barrier's end may take; no source
HALVINGS = 50


@dataclass(frozen=True, slots=True)
class PoleRoom:
    """What the barriers of a pole are put into, in m."""

    rotor_radius: float
    shaft_radius: float
    pole_pairs: int

    @property
    def depth(self) -> float:
        """From the rim to the shaft."""
        return self.rotor_radius - self.shaft_radius


@dataclass(frozen=True, slots=True)
class PlacedBarrier:
    """One barrier of half a pole, in m and rad."""

    end: float  # mechanical angle from the q axis
    depth: float  # on the q axis, from the rim to its outer edge
    thickness: float
    end_thickness: float


@dataclass(frozen=True, slots=True)
class Shares:
    """How iron and air of a pole's depth are shared out, each of sum 1."""

    carriers: tuple[float, ...]  # n + 1, from the rim to the shaft
    barriers: tuple[float, ...]  # n


def shares(ends: Sequence[float]) -> Shares:
    """Shares for equal flux density in all carriers and in all barriers.

    Args:
        ends: electrical angles of the ends from the q axis, rising, rad.
    """
    e = [0.0, *ends, 0.5 * math.pi]
    carriers = [math.cos(a) - math.cos(b) for a, b in pairwise(e)]
    means = [(math.sin(b) - math.sin(a)) / (b - a) for a, b in pairwise(e)]
    drops = [a - b for a, b in pairwise(means)]
    return Shares(tuple(carriers), tuple(drop / sum(drops) for drop in drops))


def placed_barriers(
    room: PoleRoom, ends: Sequence[float], insulation: float, ribs: Sequence[float]
) -> tuple[PlacedBarrier, ...]:
    """The barriers, as deep into the pole as their arcs and the shaft allow.

    Args:
        room: radii and pole pairs.
        ends: electrical angles of the ends from the q axis, rising, rad.
        insulation: share of air in the depth that carriers and barriers take by their shares.
        ribs: widths of the tangential ribs in m.
    """
    low, high, share = 0.0, room.depth, shares(ends)
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        fits = _at_depth(room, ends, share, insulation, ribs, middle)
        low, high = (middle, high) if fits is not None else (low, middle)
    placed = _at_depth(room, ends, share, insulation, ribs, low)
    return () if placed is None else placed


def _at_depth(
    room: PoleRoom,
    ends: Sequence[float],
    share: Shares,
    insulation: float,
    ribs: Sequence[float],
    depth: float,
) -> tuple[PlacedBarrier, ...] | None:
    """The barriers with `depth` shared out among them, None where an arc would bend too far."""
    spacing = (ends[1] - ends[0] if len(ends) > 1 else 2.0 * ends[0]) / room.pole_pairs
    widest = MOST_OF_SPACING * spacing * room.rotor_radius
    edge = 0.0  # where the next carrier begins
    placed = []
    for k, end in enumerate(ends):
        thickness = insulation * depth * share.barriers[k]
        end_thickness = min(thickness, widest)
        cap = room.rotor_radius - ribs[k] - 0.5 * end_thickness
        turn = end / room.pole_pairs
        # The guide line of the rim's side lies half the end's thickness below it.
        flattest, steepest = (
            room.rotor_radius - arc_bottom(cap, turn, angle) - 0.5 * end_thickness
            for angle in (FLATTEST, STEEPEST)
        )
        top = max(edge + (1.0 - insulation) * depth * share.carriers[k], flattest)
        if top > steepest:
            return None
        placed.append(PlacedBarrier(turn, top, thickness, end_thickness))
        edge = top + thickness
    if edge + (1.0 - insulation) * depth * share.carriers[-1] > room.depth:
        return None
    return tuple(placed)


def arc_bottom(cap: float, turn: float, angle: float) -> float:
    """Where an arc about a point of the q axis crosses that axis, in m from the shaft axis.

    The sine rule in the triangle of shaft axis, arc's centre and the arc's end: derived.

    Args:
        cap: distance of the arc's end from the shaft axis in m.
        turn: angle of that end from the q axis in rad.
        angle: between the radii of the arc and of the rim there, in rad.
    """
    if turn + angle >= math.pi:
        return cap * math.cos(turn)  # flat as a chord
    return cap * (math.sin(angle) - math.sin(turn)) / math.sin(turn + angle)
