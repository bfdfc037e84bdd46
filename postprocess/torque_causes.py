r"""The orders behind each order of the torque, in the trade's words.

By rule, without any field (derived): constant dq currents make waves of the winding's orders
nu = 1, -5, 7, -11, 13 ... (minus: against the rotor); what stands on the rotor turns with it. The
winding's -(m - 1) and m + 1 meet the rotor's orders m - 1 and m + 1 in torque of order m. Slots
give their orders k n_s +- 1 the working wave's winding factor and so the torque's orders k n_s;
n_r even places of barrier ends have orders k n_r +- 1 and so may raise k n_r and k n_r +- 2: why
n_r is kept away from n_s and n_s +- 2 (published rule, see `geometry.first_spread`).

By the field: `torque_pairs`. A wave of space order nu and time order k is the working wave moved by
k - 1 by the rotor and by nu - k by slots and winding (derived: a rotor has only even orders about
itself and moves both; what stands still moves nu alone, by multiples of 6).
"""

from dataclasses import dataclass
from fractions import Fraction

from lamwright.geometry.rotor_places import RotorPlaces
from lamwright.geometry.winding import WindingTable, winding_factor

from .torque_pairs import WavePair


@dataclass(frozen=True, slots=True)
class OrderCause:
    """What may make an order of the torque: winding and rotor orders on either side of it."""

    order: int  # electrical, m
    below: int  # rotor order m - 1; the winding's is its negative
    factor_below: float  # winding factor of that order
    above: int  # rotor and winding order m + 1
    factor_above: float
    is_slot: bool  # m is a multiple of n_s: both carry the working wave's winding factor
    is_ends: bool  # an even spread of the barrier ends has order m - 1 or m + 1


@dataclass(frozen=True, slots=True)
class Slotting:
    """What the orders are told by."""

    slots: Fraction  # n_s, slots of a pole pair
    places: int | None = None  # n_r; none where the ends lie on no even places


def slotting(winding: WindingTable, places: RotorPlaces | None) -> Slotting:
    """Slots and places of a pole pair."""
    slots = Fraction(2 * winding.slots, winding.poles)
    return Slotting(slots, None if places is None else places.count)


def order_cause(winding: WindingTable, by: Slotting, order: int) -> OrderCause:
    """The winding's and the rotor's orders beside an order of the torque."""
    below, above = order - 1, order + 1
    return OrderCause(
        order=order,
        below=below,
        factor_below=winding_factor(winding, below),
        above=above,
        factor_above=winding_factor(winding, above),
        is_slot=order % by.slots == 0,
        is_ends=_is_ends(below, by) or _is_ends(above, by),
    )


def pair_text(pair: WavePair, by: Slotting) -> str:
    """Both waves of a pair in words, the slower first."""
    return f"{wave_text(pair.space, pair.slow, by)} with {wave_text(pair.space, pair.fast, by)}"


def wave_text(space: float, time: float, by: Slotting) -> str:
    """A wave of the gap in words.

    Args:
        space: order relative to the working wave.
        time: electrical order; negative where the wave turns against the rotor, as `space` is
            positive.
        by: slots and places.
    """
    nu, k = (-space, -time) if time < 0.0 else (space, time)
    moved = nu - k
    is_slot = bool(moved) and Fraction(round(moved)) % by.slots == 0 and moved == round(moved)
    cause = " (slots)" if is_slot else ""
    if k == 1.0:
        return "working wave" if nu == 1.0 else f"winding order {nu:g}{cause}"
    ends = " (barrier ends)" if _is_ends(k, by) else ""
    if moved == 0.0:
        return f"rotor order {k:g}{ends}"
    return f"rotor order {k:g}{ends} moved by {moved:+g}{cause}"


def _is_ends(rotor_order: float, by: Slotting) -> bool:
    """Whether an even spread of barrier ends has an order k n_r +- 1, k from 1."""
    if by.places is None or rotor_order <= 1.0:
        return False
    return (rotor_order - 1.0) % by.places == 0.0 or (rotor_order + 1.0) % by.places == 0.0
