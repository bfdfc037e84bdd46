r"""The star of slots: which phase each coil of a balanced three-phase winding belongs to.

All coils are alike, so the voltage phasors of C coils spread evenly round the machine lie on a
star of N = C / t spokes, t = gcd(C, pole pairs), t coils on each. A coil may be connected the
other way round, which turns its phasor by half a turn. Phase A takes the phasors within 30
electrical degrees of its axis, C reversed those of the next 60 degrees, then B, A reversed, C, B
reversed; a spoke never lies on a border. The three phases are alike if and only if N is a
multiple of 3 (Bianchi, Dai Pre, IEE Proc. Electr. Power Appl. 153(5), 2006, from memory). The
rest is derived.

Whole numbers throughout: electrical angles are counted in units of pi / N.
"""

import math
from collections.abc import Iterable
from dataclasses import dataclass

MOST_SLOTS = 144
MOST_POLES = 24

# Phase and sense of the six belts, 60 electrical degrees apart, counter-clockwise.
_BELTS = ((0, 1), (2, -1), (1, 1), (0, -1), (2, 1), (1, -1))


@dataclass(frozen=True, slots=True)
class Coil:
    """One coil: its start lies in slot `start`, its end `span` slots further on."""

    start: int
    phase: int  # 0, 1, 2
    sign: int  # +1: current of the phase flows out of the plane (+z) in the coil's end


@dataclass(frozen=True, slots=True)
class CoilStar:
    """All coils of a winding, where phase A's axis lies, and how often the star repeats."""

    coils: tuple[Coil, ...]
    axis_a: float  # mechanical rad in the stator's frame
    alike: int  # coils of a phase with one phasor, reversed ones included


def is_balanced(slots: int, poles: int, layers: int = 2) -> bool:
    """Whether a winding with three like phases exists; a single layer needs paired slots too."""
    repeats = math.gcd(slots, poles // 2)
    return slots % (3 * repeats) == 0 and (layers == 2 or slots % 2 == 0)


def nearest_slots(slots: int, poles: int, layers: int) -> tuple[int, ...]:
    """The next smaller and next larger slot number that `poles` can be wound in."""
    fit = [n for n in range(3, MOST_SLOTS + 1) if is_balanced(n, poles, layers)]
    return _neighbours(slots, fit)


def nearest_poles(slots: int, poles: int, layers: int) -> tuple[int, ...]:
    """The next smaller and next larger pole number that can be wound in `slots`."""
    fit = [n for n in range(2, MOST_POLES + 1, 2) if is_balanced(slots, n, layers)]
    return _neighbours(poles, fit)


def most_span(slots: int, poles: int) -> int:
    """The longest coil span under two pole pitches; one slot where there is none."""
    return max(1, math.ceil(2 * slots / poles) - 1)


def coil_star(slots: int, poles: int, layers: int, span: int) -> CoilStar:
    """The coils of a balanced winding.

    Two layers: a coil starts in every slot. A single layer with a whole number of slots per pole
    and phase: full-pitch coils start in the belts that are not reversed. Any other single layer:
    coils of odd span start in every second slot, so that starts and ends fill all slots.

    Args:
        slots: of the stator.
        poles: of the rotor, even.
        layers: 1 or 2.
        span: from a coil's start to its end, in slots.
    """
    pole_pairs = poles // 2
    is_classic = layers == 1 and slots % (3 * poles) == 0
    step = 1 if layers == 2 or is_classic else 2
    count = slots // step
    repeats = math.gcd(count, pole_pairs)
    spokes, turns = count // repeats, pole_pairs // repeats
    # The axis of the coil that starts in slot 0 lies (span + 1) / 2 slot pitches from angle 0. A
    # coil that spans an odd number of pole pitches and more than one links the wave reversed.
    offset = turns * (span + 1) // step
    if (pole_pairs * span) % (2 * slots) > slots:
        offset += spokes
    # Spokes lie at every second unit if their number is even, else reversed ones in between. The
    # belts are placed with A's axis at 0 where it can be, else one unit on.
    axis = 0 if spokes % 2 else (offset + spokes // 6 - 1) % 2
    coils = []
    for k in range(count):
        place = 2 * (k * turns % spokes) + offset - axis
        phase, sign = _BELTS[round(3 * place / spokes) % 6]
        if sign > 0 or not is_classic:
            coils.append(Coil(k * step, phase, sign))
    is_doubled = spokes % 2 == 0 and not is_classic
    return CoilStar(
        coils=tuple(coils),
        axis_a=axis * math.pi / (count * turns),
        alike=2 * repeats if is_doubled else repeats,
    )


def _neighbours(value: int, fit: Iterable[int]) -> tuple[int, ...]:
    below = [n for n in fit if n < value]
    above = [n for n in fit if n > value]
    return (*below[-1:], *above[:1])
