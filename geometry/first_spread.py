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

AVOIDED = (0, 2)  # distances of n_r from n_s, published
BEST_DISTANCE = 4  # likewise
FEWEST, MOST = -2, 12  # of n_r over 4 times the barriers: up to three idle places a half pole
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


@dataclass(frozen=True, slots=True)
class EvenEnds:
    """Ends of the barriers of half a pole, equally spaced up to the last one, wherever it lies."""

    barriers: int
    last: float  # electrical angle from the q axis in rad
    first_place: float = 0.5  # of the first end from the q axis, in spacings

    @property
    def ends(self) -> tuple[float, ...]:
        """Electrical angles of the ends from the q axis in rad, from the outermost barrier's."""
        spacing = self.last / (self.first_place + self.barriers - 1)
        return tuple((self.first_place + k) * spacing for k in range(self.barriers))


def spreads(barriers: Iterable[int]) -> tuple[Spread, ...]:
    """All spreads of so many barriers a pole, whatever the slots."""
    found = [
        Spread(count, places, is_half)
        for count in barriers
        for places in range(max(2, 4 * count + FEWEST), 4 * count + MOST + 1, 2)
        for is_half in (False, True)
    ]
    return tuple(s for s in found if s.ends[0] >= FIRST_END and s.ends[-1] <= LAST_END)


def is_avoided(spread: Spread, slots_per_pole_pair: Fraction) -> bool:
    """Whether the published rule is against a spread: n_r is n_s or n_s +- 2.

    n_s need not be whole where slots are fractional; an odd one is met by no even n_r.
    """
    return abs(spread.places - slots_per_pole_pair) in AVOIDED
