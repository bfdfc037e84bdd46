"""The grid of currents and positions of a flux map: chosen for a design, or checked as given.

Without magnets a rotor whose poles mirror in their q axis has W' even in both currents, so one
quadrant tells all. Magnets, or poles that do not mirror, ask for both signs of i_q; i_d from 0 is
enough, since the rest follows by the mirror (magnets) or by the reversal of both currents.

With the magnets' own flux the ribs are saturated at any current, and steps are equal in i_q.

A point is the mean over positions equally spaced over 60 electrical degrees. The first slot ripple
has n = `slot_order` / 6 periods in them (q, where the slots per pole and phase are whole), so M
positions hold whole periods of it, and the first of its harmonics that the mean lets through is
number M / gcd(M, n). By default M is the least from 12 on that makes this 4 or more.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.rotor_mirror import is_mirrored
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.operating import slot_order
from lamwright.postprocess.torque import waveform_positions
from lamwright.solver.types import FloatArray

POINTS = (15, 15)
POSITIONS = 12
BEYOND = 1.25  # times the supply's most current
# Denser towards zero: ribs saturate within the first ampere or so, where equal steps see psi_q
# bend between two nodes alone. On demo_24s4p_arc the angle of most torque at 2.5 % of the most
# current is 55 degrees on this grid, 46 on equal steps, and the curve above it runs smooth.
GRADING_D, GRADING_Q = 1.2, 1.6
LEAST_CURRENTS, MOST_CURRENTS = 3, 200  # of an axis
LEAST_POSITIONS, MOST_POSITIONS = 6, 360
# First slot harmonic that a mean may let through. On demo_24s4p_arc Maxwell's mean torque is off by
# 2 % of the greatest where the third comes through, by 0.2 % (the mesh's) where the sixth does.
CLEAR = 4


@dataclass(frozen=True, slots=True, eq=False)
class MapGrid:
    """Currents and positions of a map."""

    i_d: FloatArray  # (n_d,), A peak, rising
    i_q: FloatArray  # (n_q,), A peak, rising
    position: FloatArray  # (n_pos,), rad mechanical
    cautions: tuple[str, ...] = ()

    @property
    def n_points(self) -> int:
        """Pairs of currents."""
        return self.i_d.size * self.i_q.size


@dataclass(frozen=True, slots=True)
class GridWishes:
    """What a user asks of the grid; the rest is chosen."""

    points: tuple[int, int] | None = None  # of i_d and of i_q
    i_d: tuple[float, ...] | None = None  # A peak
    i_q: tuple[float, ...] | None = None
    positions: int | None = None


def map_grid(machine: Machine, section: CrossSection, wishes: GridWishes) -> MapGrid:
    """The grid of a design's map.

    Raises:
        LamwrightError: a wish cannot be met; option, value, fault, remedy.
    """
    most = machine.design.duty.most_current_a
    is_even_q = machine.magnet is None and is_mirrored(section)
    count_d, count_q = _counts(wishes)
    # An even number of currents of both signs would leave zero out.
    count_q += 1 - count_q % 2 if not is_even_q else 0
    top = BEYOND * most
    i_d = top * np.linspace(0.0, 1.0, count_d) ** GRADING_D
    i_q = top * np.linspace(0.0, 1.0, count_q) ** GRADING_Q
    if not is_even_q:
        i_q = np.linspace(-top, top, count_q)
    if wishes.i_d is not None:
        i_d = _checked("--i-d", wishes.i_d, most, may_begin_below=False)
    if wishes.i_q is not None:
        i_q = _checked("--i-q", wishes.i_q, most, may_begin_below=not is_even_q)
    pole_pairs, slots = section.pole_pairs, section.slots
    count = wishes.positions
    if count is None:
        count = positions_for(pole_pairs, slots)
    if not LEAST_POSITIONS <= count <= MOST_POSITIONS:
        raise LamwrightError(
            f"--positions {count}: {'too few' if count < LEAST_POSITIONS else 'too many'}; "
            f"accepted {LEAST_POSITIONS} to {MOST_POSITIONS}"
        )
    return MapGrid(
        i_d, i_q, waveform_positions(pole_pairs, count), _cautions(pole_pairs, slots, count)
    )


def positions_for(pole_pairs: int, slots: int) -> int:
    """Positions over 60 electrical degrees whose mean is clear of the slot ripple."""
    n = slot_order(pole_pairs, slots) // 6
    return next(m for m in range(POSITIONS, POSITIONS + n + 2) if m // math.gcd(m, n) >= CLEAR)


def _cautions(pole_pairs: int, slots: int, count: int) -> tuple[str, ...]:
    n = slot_order(pole_pairs, slots) // 6
    first = count // math.gcd(count, n)
    if first >= CLEAR:
        return ()
    better = positions_for(pole_pairs, slots)
    return (
        f"{count} positions meet the slot ripple at {first} of its phases, so part of it is taken "
        f"for the mean; {better} positions do not",
    )


def _counts(wishes: GridWishes) -> tuple[int, int]:
    points = POINTS if wishes.points is None else wishes.points
    for count in points:
        if not LEAST_CURRENTS <= count <= MOST_CURRENTS:
            raise LamwrightError(
                f"--points {points[0]}x{points[1]}: {count} currents make no grid; accepted "
                f"{LEAST_CURRENTS} to {MOST_CURRENTS} for each axis"
            )
    return points


def _checked(
    option: str, values: Sequence[float], most: float, *, may_begin_below: bool
) -> FloatArray:
    """The currents of an axis as given, rising and wide enough."""
    shown = ",".join(f"{value:g}" for value in values)
    text, first = f"{option} {shown}", "-" if may_begin_below else "0"
    remedy = f"accepted {LEAST_CURRENTS} to {MOST_CURRENTS} rising currents in A"
    if not all(math.isfinite(value) for value in values):
        raise LamwrightError(f"{text}: not all finite numbers; {remedy}")
    if not LEAST_CURRENTS <= len(values) <= MOST_CURRENTS:
        raise LamwrightError(f"{text}: {len(values)} currents make no grid; {remedy}")
    if any(after <= before for before, after in pairwise(values)):
        raise LamwrightError(f"{text}: the currents do not rise; {remedy}")
    if first == "0" and values[0] < 0.0:
        raise LamwrightError(f"{text}: negative currents follow by the mirror; accepted from 0 on")
    if first == "0" and values[0] > 0.0:
        raise LamwrightError(f"{text}: begins above 0; accepted lists that begin with 0")
    if values[0] > 0.0:
        raise LamwrightError(f"{text}: begins above 0; accepted lists that begin at or below 0")
    if values[-1] < most * (1.0 - 1e-9):
        raise LamwrightError(
            f"{text}: ends below the most current; accepted lists to {most:g} A or more"
        )
    return np.array(values, dtype=float)
