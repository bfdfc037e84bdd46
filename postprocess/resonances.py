"""Where a machine's speed brings its own frequencies to those of its laminations.

What shakes a lamination comes at whole multiples of the speed, its orders: the shaft's turn and its
double; every 6th electrical order (torque, and all that the rotor sees of a balanced winding) and
the slots, each with its double; on the stator the even electrical orders too, as the stress of the
gap is a square of the field (see `force_orders`). An order can only shake a mode whose waves fit:
the stress of a centred machine has space orders that are multiples of its sectors, a machine with
its axis off the middle those next to them (derived; any such wave moves modes of its own cyclic
index alone). A whole machine without sectors fits all modes.

Waves that turn are seen from rotor and stator with frequencies that differ by multiples of the
speed: the sidebands of an offset axis are not told apart. A converter's own frequency is left out.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from lamwright.geometry.section import CrossSection
from lamwright.solver.modal import Mode, Period
from lamwright.solver.types import FloatArray

Driver = Literal["field", "offset axis", "neither"]
ELECTRICAL = (6, 12, 18, 24)
STATOR_ELECTRICAL = (2, 4, 8, 10)  # beside these
TURN = 2.0 * math.pi


@dataclass(frozen=True, slots=True)
class Order:
    """Something that comes `times` a turn of the shaft."""

    name: str
    times: int


@dataclass(frozen=True, slots=True, eq=False)
class Lamination:
    """A lamination's lowest modes and what may shake them."""

    key: str  # rotor_free, rotor_held or stator
    name: str
    period: Period
    modes: tuple[Mode, ...]
    orders: tuple[Order, ...]  # rising
    sectors: int  # the centred machine's field repeats so often round the circle
    errors: FloatArray  # (n_mode,), of the frequencies, Hz


@dataclass(frozen=True, slots=True, eq=False)
class Meeting:
    """The speed at which an order has a mode's frequency."""

    lamination: Lamination
    number: int  # of the mode in its lamination, from 1
    order: Order
    speed: float  # rad/s, mechanical

    @property
    def mode(self) -> Mode:
        """Which frequency is met."""
        return self.lamination.modes[self.number - 1]


def orders_of(section: CrossSection, *, is_stator: bool) -> tuple[Order, ...]:
    """The orders of a lamination; equal ones are one with both names."""
    kinds = sorted((*ELECTRICAL, *(STATOR_ELECTRICAL if is_stator else ())))
    named = [("shaft", 1), ("shaft x2", 2)]
    named += [(f"electrical {k}", k * section.pole_pairs) for k in kinds]
    named += [("slots", section.slots), ("slots x2", 2 * section.slots)]
    found: dict[int, list[str]] = {}
    for name, times in named:
        found.setdefault(times, []).append(name)
    return tuple(Order(" and ".join(names), times) for times, names in sorted(found.items()))


def driver(mode: Mode, sectors: int) -> Driver:
    """What can shake a mode by its waves: the field of the centred machine, or off its middle."""
    if mode.index % sectors == 0:
        return "field"
    is_beside = any((mode.index + step) % sectors == 0 for step in (1, -1))
    return "offset axis" if is_beside else "neither"


def meeting_speed(mode: Mode, order: Order) -> float:
    """Mechanical speed in rad/s at which the order has the mode's frequency."""
    return TURN * mode.frequency / order.times


def meetings(laminations: Sequence[Lamination], top_speed: float) -> tuple[Meeting, ...]:
    """All meetings up to `top_speed` in rad/s, by rising speed."""
    found = [
        Meeting(lamination, number, order, meeting_speed(mode, order))
        for lamination in laminations
        for number, mode in enumerate(lamination.modes, start=1)
        for order in lamination.orders
    ]
    within = [meeting for meeting in found if meeting.speed <= top_speed]
    return tuple(sorted(within, key=lambda meeting: meeting.speed))


def nearest(mode: Mode, orders: Sequence[Order], speed: float) -> tuple[Order, float]:
    """The order nearest to a mode at `speed` in rad/s, and its frequency over the mode's less 1."""
    shares = [order.times * speed / (TURN * mode.frequency) - 1.0 for order in orders]
    k = min(range(len(orders)), key=lambda n: abs(shares[n]))
    return orders[k], shares[k]
