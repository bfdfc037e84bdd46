r"""Where the barriers of a first design end: spread evenly against the stator's slots.

Barrier ends, with some places left empty ("idle"), lie equally spaced round a pole pair like the
slots of a rotor, n_r of them against the stator's n_s slots of a pole pair. Mmf orders k n_r +- 1
of the rotor that meet orders j n_s +- 1 of the slots make torque ripple (derived: their product
has a mean). Published rule: n_r neither n_s nor n_s +- 2, best n_s +- 4 (Vagati, Pastorelli,
Franceschini, Petrache, IEEE Trans. Ind. Appl. 34(4), 1998, from memory).

Both poles of a pair and both halves of a pole are alike, so n_r is even, and the first end lies
half a spacing or a whole one from the q axis. Angles are electrical from the q axis, rad.
"""

import math
from collections.abc import Iterable
from dataclasses import dataclass
from fractions import Fraction

BEST_DISTANCE = 4  # of n_r from n_s, published
MOST_ORDER = 3  # k and j up to which orders that meet are counted; common practice, no source
LAST_END = math.radians(84.0)  # an end nearer to the d axis would choke the innermost carrier
FIRST_END = math.radians(10.0)  # before it there is no room for a barrier


@dataclass(frozen=True, slots=True)
class Spread:
    """Ends of the barriers of half a pole on places equally spaced round the pole pair."""

    barriers: int
    places: int  # n_r, even
    is_half: bool  # the first end lies half a spacing from the q axis, not a whole one

    @property
    def spacing(self) -> float:
        """Electrical angle between neighbouring places in rad."""
        return 2.0 * math.pi / self.places

    @property
    def ends(self) -> tuple[float, ...]:
        """Electrical angles of the ends from the q axis in rad, from the outermost barrier's."""
        first = 0.5 if self.is_half else 1.0
        return tuple((first + k) * self.spacing for k in range(self.barriers))

    @property
    def idle(self) -> int:
        """Places between the last end and the d axis at which no barrier ends."""
        left = (0.5 * math.pi - self.ends[-1]) / self.spacing
        return math.ceil(left - 1e-9) - 1


def even_spread(barriers: int) -> Spread:
    """Ends that share the half pole out evenly, whatever the slots: 90 / n degrees apart."""
    return Spread(barriers, 4 * barriers, is_half=True)


def spreads(
    slots_per_pole_pair: Fraction, barriers: Iterable[int], last_end: float = LAST_END
) -> tuple[Spread, ...]:
    """All spreads that come into question, the best first.

    Args:
        slots_per_pole_pair: of the stator, n_s; not whole where slots are fractional.
        barriers: of a pole, numbers to choose from, the most welcome first.
        last_end: electrical angle from the q axis beyond which no barrier can end, rad.
    """
    found = []
    for rank, count in enumerate(barriers):
        for places in range(4 * count - 2, 4 * count + 13, 2):
            for is_half in (False, True):
                spread = Spread(count, places, is_half)
                if spread.ends[0] >= FIRST_END and spread.ends[-1] <= last_end:
                    found.append((_merit(spread, slots_per_pole_pair, rank), spread))
    return tuple(spread for _, spread in sorted(found, key=lambda pair: pair[0]))


def meeting(places: int, slots_per_pole_pair: Fraction) -> Fraction:
    """How much mmf orders of rotor and slots meet: the sum of 1 / (k j)^2 over those that do.

    k n_r +- 1 = j n_s +- 1, so k n_r - j n_s is 0 or +-2. Amplitudes of a staircase fall as 1 over
    their order, and so 1 / (k j) twice: derived, an estimate.
    """
    total = Fraction(0)
    for k in range(1, MOST_ORDER + 1):
        for j in range(1, MOST_ORDER + 1):
            if k * places - j * slots_per_pole_pair in (-2, 0, 2):
                total += Fraction(1, (k * j) ** 2)
    return total


def _merit(spread: Spread, slots: Fraction, rank: int) -> tuple[Fraction, int, int, int]:
    """Sorts spreads: orders that meet, the published distance, idle places, barriers wished."""
    distance = abs(abs(spread.places - slots) - BEST_DISTANCE)
    return (meeting(spread.places, slots), math.ceil(distance), spread.idle, rank)
