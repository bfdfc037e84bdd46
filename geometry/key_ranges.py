"""How far each length and angle may move, all others as they stand, before the outline breaks.

From the value as it stands the key walks outward in growing steps, no longer than a fortieth of
the key's domain, until the exact checks find a fault; between the last value that fits and the
first that does not the end is closed in by bisection, sped up by what the faults say is missing,
and rounded inward. All checks are tried once more at the rounded ends. What fits again beyond a
fault is not looked for, and a fault that only a stretch shorter than a step has may be missed.

Cost measured, one core: 0.7 s for 26 keys of a rotor with three arc barriers, 9 s for 39 keys of
one with notches, holes, keyways and an eccentric rim besides.
"""

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from .checks import shape_faults, shared_faults
from .design import MachineDesign
from .remedies import Fault, domain_of, value_of, with_value

FIRST_STEP = 0.01  # of the value, or of a unit
GROWTH = 2.0
STEPS = 40  # a walk's longest step is the domain over this
RESOLUTION = 1e-7  # mm or degrees, of an end before it is rounded
DECIMALS = 3
MOST_TRIALS = 200  # of closing in on an end; a third of them halve it
ROUNDING = 1e-3  # of the last decimal: an end so close to its round number reaches it

Check = Callable[[float], Sequence[Fault]]


@dataclass(frozen=True, slots=True)
class RangeEnd:
    """One end of a range: the last value that fits, and what stops the key there."""

    value: float  # mm or degrees
    code: str  # of the check; empty where the search ended without a fault
    text: str


@dataclass(frozen=True, slots=True)
class KeyRange:
    """The values of a key that fit while all others stay."""

    key: str
    value: float  # mm or degrees
    least: RangeEnd
    most: RangeEnd


def key_ranges(design: MachineDesign, keys: Sequence[str]) -> tuple[KeyRange, ...]:
    """The ranges of all keys of a design without a fault."""
    return tuple(key_range(design, key) for key in keys)


def key_range(design: MachineDesign, key: str) -> KeyRange:
    """The range of one key of a design without a fault."""
    value = value_of(design, key)

    def quick(tried: float) -> Sequence[Fault]:
        return shared_faults(with_value(design, key, tried), key)

    def whole(tried: float) -> Sequence[Fault]:
        return shape_faults(with_value(design, key, tried))

    domain = domain_of(design, key)
    low = _end(value, min(domain.low, value), quick, whole, domain.is_low_accepted)
    high = _end(value, max(domain.high, value), quick, whole, True)
    return KeyRange(key, value, low, high)


def _end(value: float, limit: float, quick: Check, whole: Check, is_accepted: bool) -> RangeEnd:
    """The last fitting value from `value` towards `limit`."""
    inside, outside, found = _walk(value, limit, quick, is_accepted)
    if outside is not None:
        inside, found = _closed_in(inside, outside, found, quick)
    end = _rounded(value, inside)
    if (missed := whole(end)) and end != value:
        found = missed
        # A round number that itself does not fit, though all before it do: the one before it.
        end = _rounded(value, inside, 0.0)
        if end != value and (missed := whole(end)):
            inside, found = _closed_in(value, end, missed, whole)
            end = _rounded(value, inside, 0.0)
    if found:
        return RangeEnd(end, found[0].code, f"{found[0].keys[0]}: {found[0].text}")
    return RangeEnd(end, "", f"no check; the search ends at {limit:g}")


def _walk(
    value: float, limit: float, check: Check, is_accepted: bool
) -> tuple[float, float | None, Sequence[Fault]]:
    """The last value tried that fits, the first that does not (None if all do) and its faults."""
    way = math.copysign(1.0, limit - value)
    room = abs(limit - value)
    step = FIRST_STEP * max(abs(value), 1.0)
    inside, gone = value, 0.0
    while gone < room:
        gone = min(gone + min(step, room / STEPS if room > STEPS * step else room), room)
        tried = value + way * gone
        if gone == room and not is_accepted:
            # The limit itself is no value: one beside it stands for it.
            tried = limit - way * min(RESOLUTION, 0.5 * room)
        if found := check(tried):
            return inside, tried, found
        inside, step = tried, GROWTH * step
    return inside, None, ()


def _closed_in(
    inside: float, outside: float, found: Sequence[Fault], check: Check
) -> tuple[float, Sequence[Fault]]:
    """The last fitting value between one that fits and one that does not, and what stops it.

    What is missing falls nearly straight towards the end: two values of the same fault tell where
    it would be gone. Every third value halves what is left, whatever the fault does.
    """
    last = before = (outside, found[0])
    for count in range(MOST_TRIALS):
        if abs(outside - inside) <= RESOLUTION:
            break
        tried = _guessed(inside, outside, last, before, count)
        if faults := check(tried):
            before, last = last, (tried, faults[0])
            outside, found = tried, faults
        else:
            inside = tried
    return inside, found


def _guessed(
    inside: float,
    outside: float,
    last: tuple[float, Fault],
    before: tuple[float, Fault],
    count: int,
) -> float:
    """Where to look next: where the fault should be gone, else a step back from outside."""
    way = math.copysign(RESOLUTION, inside - outside)
    if count % 3 == 2:
        return 0.5 * (inside + outside)
    fall = before[1].lack - last[1].lack
    if last[1].identity != before[1].identity or fall <= 0.0:
        return outside + 0.25 * (inside - outside)
    end = last[0] + (last[0] - before[0]) * last[1].lack / fall
    if abs(end - inside) < 2.0 * RESOLUTION:
        return inside - 0.9 * way  # found from inside: only to be confirmed
    tried = end + 0.5 * way
    is_between = min(inside, outside) < tried < max(inside, outside)
    return tried if is_between else 0.5 * (inside + outside)


def _rounded(value: float, end: float, slack: float = ROUNDING) -> float:
    """The end rounded towards the value as it stands, which it does not pass."""
    scale = 10.0**DECIMALS
    if end < value:
        return min(math.ceil(end * scale - slack) / scale, value)
    return max(math.floor(end * scale + slack) / scale, value)
