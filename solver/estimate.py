"""Error bars of torque, ripple and linkages from the solutions of one waveform.

1. At a few positions the field is carried to a mesh four times as fine and corrected there
   (`estimate_step`); the change of a figure times `BEYOND` is its error. BEYOND = 1/(1 - 2^-r)
   with r = 4/3, the rate of energies at a right-angled corner of iron in air (singular exponent
   2/3, textbook matter); smooth parts converge faster, down to a factor of 1.07 at r = 4.
2. In the mean over a period torque is 3/2 p (psi_d i_q - psi_q i_d) exactly (derived: power
   balance), so the mean torque by Maxwell's stress is off by its difference to that of the
   linkages, known at all positions and free of cost, and by the linkages' own error.
3. Ripple is off by the changes of torque at its highest and its lowest position, less its share
   of what the mean torque is off by, which moves all positions alike.
4. A figure of both linkages changes from sample to sample as a whole: what the two have in common
   cancels where the figure lets it.
Independent parts are added: twice the standard error of the mean over the sampled positions, what
conjugate gradients left (`KNOWN_TO`), a floor of Newton's iteration. What is not in it: the steel
curve, the third dimension, the shape of the punched part.
Measured on thirty random machines at `normal` against 16 times the elements
(tests/solver/test_estimate.py): stated over true error, least, median, most, and share within a
third and five: torque 1.2, 1.6, 5.2, 97 %; torque by linkages 1.3, 1.7, 11, 93 %; psi_d 1.3, 1.6,
3.0, 100 %; psi_q 1.3, 1.6, 13, 97 % (the 13 for a true error of 7e-6); saliency 1.4, 1.8, 65, 83 %;
ripple 1.2, 1.8, 8.8, 87 %. Ratios may be exact by chance: where saliency is off by more than 1e-4
or ripple by more than 1e-3, the most is 2.5 and 3.7.
Axes: n_sample sampled positions.
"""

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.section import CrossSection
from lamwright.geometry.winding import WindingTable

from .estimate_step import Change, changes, fine_level
from .model import MagneticModel
from .types import FieldSolution, FloatArray

BEYOND = 1.0 / (1.0 - 2.0 ** (-4.0 / 3.0))  # 1.66, see above
BEYOND_LEAST = 1.0 / (1.0 - 2.0**-4)  # 1.07
KNOWN_TO = 0.1  # of a change: the tolerance of the last conjugate gradients
NEWTON_FLOOR = 2e-6  # of a figure; at the residual allowed they are within 1e-6 (NewtonSettings)
SAMPLES = 3  # evenly spaced positions for the linkages, whose errors waver little

Figure = Callable[[float, float], float]  # psi_d, psi_q in V s -> a figure


@dataclass(frozen=True, slots=True)
class LinkageErrors:
    """What is known of the error of the mean linkages: their changes on the finer mesh in V s."""

    change_d: FloatArray  # (n_sample,)
    change_q: FloatArray

    def of(self, figure: Figure, psi_d: float, psi_q: float) -> float:
        """Error of a figure that follows from the mean linkages in V s.

        Both linkages change together, as their errors have the same cause and often cancel.
        """
        own = figure(psi_d, psi_q)
        pairs = zip(self.change_d, self.change_q, strict=True)
        change = np.array([figure(psi_d + d, psi_q + q) - own for d, q in pairs])
        floor = abs(figure(psi_d * (1.0 + NEWTON_FLOOR), psi_q) - own)
        floor += abs(figure(psi_d, psi_q * (1.0 + NEWTON_FLOOR)) - own)
        return BEYOND * abs(float(change.mean())) + _doubt(change) + floor


@dataclass(frozen=True, slots=True)
class FieldErrors:
    """Absolute errors of the means over a waveform, whole machine, SI."""

    torque: float  # N m, of the mean by Maxwell's stress
    torque_linkage: float  # N m, of the mean by the linkages
    ripple: float  # of (max - min) / mean
    psi_d: float  # V s
    psi_q: float  # V s
    linkages: LinkageErrors
    # At any one position, and of the amplitude of any order of torque: bounds.
    torque_at: float  # N m
    psi_d_at: float  # V s
    psi_q_at: float  # V s
    order: float  # N m


@dataclass(frozen=True, slots=True)
class NoLoadErrors:
    """Absolute errors of a machine with magnets and without current, SI."""

    linkages: LinkageErrors  # of the means
    waver: float  # V s, rms of what linkages are off by from position to position
    cogging: float  # N m, of the peak to peak


def no_load_errors(
    solutions: Sequence[FieldSolution], sampled: Mapping[int, Change]
) -> NoLoadErrors:
    """Error bars of a waveform without current from the changes at `sample_places`.

    Args:
        solutions: the whole waveform.
        sampled: change of each sampled solution, by its place in `solutions`.
    """
    change_d = np.array([c.psi_d for c in sampled.values()])
    change_q = np.array([c.psi_q for c in sampled.values()])
    torque = np.array([s.torque for s in solutions])
    high, low = (sampled[int(k)].torque for k in (torque.argmax(), torque.argmin()))
    return NoLoadErrors(
        linkages=LinkageErrors(change_d, change_q),
        waver=BEYOND * math.hypot(float(change_d.std()), float(change_q.std())),
        cogging=BEYOND * (abs(high - low) + KNOWN_TO * (abs(high) + abs(low))),
    )


def field_errors(
    model: MagneticModel,
    section: CrossSection,
    winding: WindingTable,
    solutions: Sequence[FieldSolution],
) -> FieldErrors:
    """Error bars of a waveform, all in this process.

    Args:
        model: that the solutions are of.
        section: the pole that the mesh is of.
        winding: conductors of all slots.
        solutions: equal currents, positions evenly spaced over 60 electrical degrees.
    """
    level = fine_level(model, section, winding)
    sampled = {k: changes(level, solutions[k]) for k in sample_places(solutions)}
    return errors_of(solutions, sampled, model.sector.pole_pairs)


def sample_places(solutions: Sequence[FieldSolution]) -> tuple[int, ...]:
    """The solutions to sample: evenly spaced, and those of most and least torque."""
    count = len(solutions)
    torque = np.array([s.torque for s in solutions])
    even = {k * count // SAMPLES for k in range(min(SAMPLES, count))}
    return tuple(sorted(even | {int(torque.argmax()), int(torque.argmin())}))


def errors_of(
    solutions: Sequence[FieldSolution], sampled: Mapping[int, Change], pole_pairs: int
) -> FieldErrors:
    """Error bars of a waveform from the changes at `sample_places`.

    Args:
        solutions: the whole waveform.
        sampled: change of each sampled solution, by its place in `solutions`.
        pole_pairs: of the machine.
    """
    i_d, i_q = solutions[0].i_d, solutions[0].i_q
    torque = np.array([s.torque for s in solutions])
    psi_d, psi_q = np.array([s.psi_d for s in solutions]), np.array([s.psi_q for s in solutions])
    mean = float(torque.mean())
    by_linkage = float(linkage_torque(pole_pairs, i_d, i_q, psi_d, psi_q).mean())
    change_d = np.array([c.psi_d for c in sampled.values()])
    change_q = np.array([c.psi_q for c in sampled.values()])
    change_torque = np.array([c.torque for c in sampled.values()])
    linkages = LinkageErrors(change_d, change_q)
    middle = float(psi_d.mean()), float(psi_q.mean())
    change = linkage_torque(pole_pairs, i_d, i_q, change_d, change_q)
    doubt = _doubt(change) + NEWTON_FLOOR * abs(by_linkage)
    expected = float(change.mean())
    torque_error = doubt + max(
        abs(by_linkage - mean + share * expected) for share in (BEYOND_LEAST, BEYOND)
    )
    return FieldErrors(
        torque=torque_error,
        torque_linkage=BEYOND * abs(expected) + doubt,
        ripple=_ripple_error(torque, sampled, by_linkage - mean + BEYOND * expected, doubt),
        psi_d=linkages.of(lambda d, q: d, *middle),
        psi_q=linkages.of(lambda d, q: q, *middle),
        linkages=linkages,
        torque_at=_most(change_torque),
        psi_d_at=_most(change_d) + NEWTON_FLOOR * float(np.abs(psi_d).max()),
        psi_q_at=_most(change_q) + NEWTON_FLOOR * float(np.abs(psi_q).max()),
        # One that swings with an order by c moves its amplitude by c; it is seen at few positions.
        order=_most(change_torque - change_torque.mean()) + NEWTON_FLOOR * abs(mean),
    )


def linkage_torque(
    pole_pairs: int, i_d: float, i_q: float, psi_d: FloatArray, psi_q: FloatArray
) -> FloatArray:
    """Torque in N m of linkages in V s; in the mean over a period it is the torque."""
    # T = 3/2 p (psi_d i_q - psi_q i_d), derived: power balance
    return 1.5 * pole_pairs * (psi_d * i_q - psi_q * i_d)


def angle_error(relative_torque_error: float, search_tolerance: float) -> float:
    """Error in rad of the current angle of most torque.

    Near it T = T_best (1 - 2 (gamma - gamma_best)^2), derived from sin 2 gamma. If the relative
    error of T changes with gamma no faster than T itself does about 45 degrees (slope 2, an
    assumption, not measured), it moves the best angle by a half of it.
    """
    return search_tolerance + 0.5 * abs(relative_torque_error)


def _most(change: FloatArray) -> float:
    """Error of what changes (n_sample,) by as much at the most."""
    return BEYOND * (1.0 + KNOWN_TO) * float(np.abs(change).max())


def _doubt(change: FloatArray) -> float:
    """What the changes (n_sample,) leave open of the error of a mean figure."""
    scatter = 0.0
    if len(change) > 1:
        scatter = 2.0 * float(change.std(ddof=1)) / math.sqrt(len(change))
    return scatter + KNOWN_TO * BEYOND * float(np.abs(change).mean())


def _ripple_error(
    torque: FloatArray, sampled: Mapping[int, Change], shift: float, doubt: float
) -> float:
    """Error of (max - min) / mean where the mean is off by `shift`, within `doubt`, in N m."""
    mean = abs(float(torque.mean()))
    high, low = (sampled[int(k)].torque for k in (torque.argmax(), torque.argmin()))
    ripple = float(np.ptp(torque)) / mean
    change = BEYOND * (high - low) - ripple * shift * math.copysign(1.0, float(torque.mean()))
    return (abs(change) + BEYOND * KNOWN_TO * (abs(high) + abs(low)) + ripple * doubt) / mean
