"""How the barrier ends of a rotor lie round its rim: the even places nearest to them.

Ripple rules speak of n_r even places of a pole pair (`first_spread`), some of them idle; a real
rotor's ends lie near some such places, more or less. Of all counts the one is taken whose places
the ends miss by the least share of their spacing.
"""

import math
from dataclasses import dataclass

from .design import MachineDesign
from .first_spread import FEWEST, MOST

MOST_AWAY = 0.2  # of the spacing; ends at random miss by up to 0.5 and rarely all by less


@dataclass(frozen=True, slots=True)
class RotorPlaces:
    """The even places nearest to the barrier ends."""

    count: int  # n_r, of a pole pair
    away: float  # rad el, by which the worst end misses its place


def rotor_places(design: MachineDesign) -> RotorPlaces | None:
    """The places nearest to the design's barrier ends.

    None where the rotor is a drawing, poles or halves are unlike, or the ends lie on no even
    places.
    """
    rotor = design.rotor
    is_plain = not rotor.alternate_barrier and all(b.other_half is None for b in rotor.barrier)
    if rotor.outline is not None or not rotor.barrier or not is_plain:
        return None
    ends = [math.radians(b.end_angle_deg) * design.pole_pairs for b in rotor.barrier]
    found = []
    for places in range(max(2, 4 * len(ends) + FEWEST), 4 * len(ends) + MOST + 1, 2):
        spacing = 2.0 * math.pi / places
        for first in (0.5, 1.0):  # of the spacing, from the q axis: both halves are alike
            steps = [end / spacing - first for end in ends]
            if len({round(step) for step in steps}) == len(ends):  # each its own place
                share = max(abs(step - round(step)) for step in steps)
                found.append((round(share, 9), places))
    share, count = min(found, default=(1.0, 0))
    return RotorPlaces(count, share * 2.0 * math.pi / count) if share <= MOST_AWAY else None
