"""What a test bench measures on a locked rotor: torque and terminal inductance over its angle.

Direct current I flows into phase A and out of B and C, or into A and out of B with C open. It
stands still in the stator, so its vector is fixed and the rotor is turned past it:

    feed            phase currents / I    vector / I    its axis, el    terminal L on d, q
    one-and-two     1, -1/2, -1/2         1             0               3/2 L_d, 3/2 L_q
    two-in-series   1, -1, 0              2/sqrt(3)     -30 degrees     2 L_d, 2 L_q

I is what a clamp round the lead to phase A reads. The terminal linkage is what the current's
change sees, psi_t = sum of (phase current / I) psi_k, as dW' = psi_t dI. With one-and-two the
halves in B and C are held, so an incremental inductance of that feed is no reading of an a.c.
bridge, whose current B and C share as their linkages ask; two-in-series is. Source of all:
derived.

Angles are those of the d axis ahead of the feed's axis, where it comes to rest by itself. The
torque's curve repeats as the rotor does: every pole pitch, or every pole pair where poles differ
or hold magnets. It takes no other symmetry for granted.

Axes of arrays: n_cur currents, rising; n_pos angles of one period, equally spaced, end excluded.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.types import FloatArray

from .quantities import STATED, shown_as, shown_estimate
from .skew import skew_cautions

DEGREE = math.pi / 180.0
MM = 1e3  # mH per H
DEFAULT_STEP_EL = 2.0  # degrees: 15 angles a slot pitch at two slots per pole and phase
WIDEST_STEP_EL, FINEST_STEP_EL = 10.0, 0.1  # degrees
MOST_CURRENTS = 12
FEEDS = ("one-and-two", "two-in-series")
EVEN = 1e-9  # of a step, that a period may be off a whole number of them


@dataclass(frozen=True, slots=True)
class Feed:
    """How the direct current is fed."""

    name: str
    weights: tuple[float, float, float]  # phase currents over I
    axis_el: float  # rad, of the current's vector in the stator

    @property
    def amplitude(self) -> float:
        """Length of the current's vector over I."""
        return math.sqrt(2.0 / 3.0 * self.terminal_factor)

    @property
    def terminal_factor(self) -> float:
        """Terminal inductance over that of a phase on the same axis."""
        return sum(weight**2 for weight in self.weights)

    def currents(self, current: float, angle_el: float) -> tuple[float, float]:
        """i_d and i_q in A of I in A, the d axis `angle_el` rad ahead of the feed's axis."""
        size = self.amplitude * current
        return size * math.cos(angle_el), -size * math.sin(angle_el)


def feed_of(name: str) -> Feed:
    """The feed called `name`, one of `FEEDS`."""
    if name == "one-and-two":
        return Feed(name, (1.0, -0.5, -0.5), 0.0)
    return Feed(name, (1.0, -1.0, 0.0), -math.pi / 6.0)


@dataclass(frozen=True, slots=True, eq=False)
class LockedCurves:
    """Torque and terminal linkage of a locked rotor, without end winding."""

    design_name: str
    feed: Feed
    pole_pairs: int
    poles_in_period: int
    currents: FloatArray  # (n_cur,) A
    angle: FloatArray  # (n_pos,) mechanical rad
    torque: FloatArray  # (n_cur, n_pos) N m
    linkage: FloatArray  # (n_cur, n_pos) V s, less that of the magnets alone
    slope: FloatArray  # (n_cur, n_pos) H, d psi_t / dI at a fixed angle
    bare_slope: FloatArray  # (n_pos,) H, the same without current
    coenergy: FloatArray  # (n_cur, n_pos) J
    end_inductance: float  # H, of a phase, by formula
    skew_steps: int
    rated_current: float  # A peak
    seconds: float

    @property
    def period(self) -> float:
        """Mechanical angle in rad after which all repeats."""
        return self.poles_in_period * math.pi / self.pole_pairs

    @property
    def apparent(self) -> FloatArray:
        """Terminal linkage over I, (n_cur, n_pos) in H, without end winding."""
        return self.linkage / self.currents[:, None]

    @property
    def terminal_end_inductance(self) -> float:
        """What the end winding adds to a terminal inductance, H, an estimate."""
        return self.feed.terminal_factor * self.end_inductance


@dataclass(frozen=True, slots=True, kw_only=True)
class LockedFigures:
    """What the curves of one current come to."""

    current: float = field(metadata=shown_as("current_a", "current", "A d.c.", exact=STATED))
    torque: float = field(metadata=shown_as("torque_peak_nm", "greatest torque", "N m"))
    torque_angle: float = field(
        metadata=shown_as("torque_peak_angle_mech_deg", "at the angle", "deg", 1.0 / DEGREE)
    )
    l_d: float = field(metadata=shown_as("l_d_apparent_mh", "L_d, apparent", "mH", MM))
    l_q: float = field(metadata=shown_as("l_q_apparent_mh", "L_q, apparent", "mH", MM))
    l_dd: float = field(metadata=shown_as("l_d_incremental_mh", "L_d, incremental", "mH", MM))
    l_qq: float = field(metadata=shown_as("l_q_incremental_mh", "L_q, incremental", "mH", MM))
    end: float = field(
        metadata=shown_estimate("end_winding_mh", "end winding of a phase, not in L", "mH", MM)
    )


def locked_figures(curves: LockedCurves) -> tuple[LockedFigures, ...]:
    """Peaks and inductances of each current; L_d and L_q of a phase, from the curve's extremes."""
    factor, found = curves.feed.terminal_factor, []
    for k, current in enumerate(curves.currents):
        # A crest between two angles: the interpolant's, not the samples'.
        fine, torque = _fine(curves, curves.torque[k])
        top = int(np.argmax(np.abs(torque)))
        apparent, slope = (_fine(curves, v[k])[1] for v in (curves.apparent, curves.slope))
        found.append(
            LockedFigures(
                current=float(current),
                torque=float(abs(torque[top])),
                torque_angle=float(fine[top]),
                l_d=float(apparent.max()) / factor,
                l_q=float(apparent.min()) / factor,
                l_dd=float(slope[int(np.argmax(apparent))]) / factor,
                l_qq=float(slope[int(np.argmin(apparent))]) / factor,
                end=curves.end_inductance,
            )
        )
    return tuple(found)


def locked_cautions(curves: LockedCurves) -> tuple[str, ...]:
    """What can hurt people or the machine on the bench, and what the curves leave out."""
    top = max(figures.torque for figures in locked_figures(curves))
    lines = [
        f"the rotor turns by itself with up to {top:.3g} N m when the current is switched on or"
        " the clamp slips: clamp it for more than that, and keep hands off",
        "phase A carries the peak current all the time, twice the copper loss it has in service"
        " at the same peak current: measure quickly, watch its temperature",
        "L_d and L_q hold no end winding; its estimate stands apart, within 30 %",
        "magnetising at rest leaves remanence in steel, which the curves have not: measure after"
        " several reversals of the current, and take the mean of both directions",
    ]
    most = float(curves.currents[-1])
    if most > curves.rated_current:
        lines.append(
            f"{most:g} A is {most / curves.rated_current:.2g} times the design's rated peak"
            " current: no winding is judged for it here"
        )
    return (*lines, *skew_cautions(curves.skew_steps))


def parsed_currents(text: str) -> tuple[float, ...]:
    """Currents of `--currents`, rising.

    Raises:
        LamwrightError: none, too many, twice the same, not positive or not numbers.
    """
    accepted = f"accepted up to {MOST_CURRENTS} different currents above 0 A, as 15,25,35"
    parts = [part.strip() for part in text.split(",")]
    if not any(parts):
        raise LamwrightError(f"--currents {text!r}: no current; {accepted}")
    found: list[float] = []
    for part in parts:
        try:
            value = float(part)
        except ValueError:
            raise LamwrightError(f"--currents {text}: {part!r} is no number; {accepted}") from None
        if not (math.isfinite(value) and value > 0.0):
            raise LamwrightError(f"--currents {text}: {part} A is not above 0; {accepted}")
        if value in found:
            raise LamwrightError(f"--currents {text}: {part} A stands there twice; {accepted}")
        found.append(value)
    if len(found) > MOST_CURRENTS:
        raise LamwrightError(f"--currents: {len(found)} currents; {accepted}")
    return tuple(sorted(found))


def locked_angles(
    pole_pairs: int, poles_in_period: int, step_deg: float | None
) -> tuple[float, ...]:
    """Angles of one period in mechanical rad, equally spaced, end excluded.

    Args:
        pole_pairs: of the machine.
        poles_in_period: after which the rotor, magnets in it, is itself again.
        step_deg: most that two neighbours may be apart, mechanical degrees; by default 2
            electrical ones.

    Raises:
        LamwrightError: a step that is none, or too wide or too fine to be of use.
    """
    widest, finest = WIDEST_STEP_EL / pole_pairs, FINEST_STEP_EL / pole_pairs
    step = DEFAULT_STEP_EL / pole_pairs if step_deg is None else step_deg
    if not finest <= step <= widest:
        raise LamwrightError(
            f"--step-deg {step:g}: not between {FINEST_STEP_EL:g} and {WIDEST_STEP_EL:g} electrical"
            f" degrees; accepted {finest:.4g} to {widest:.4g} (mechanical)"
        )
    period = 180.0 * poles_in_period / pole_pairs
    count = math.ceil(period / step - EVEN)
    return tuple(DEGREE * period * k / count for k in range(count))


def at_angles(curves: LockedCurves, values: FloatArray, angle: Sequence[float]) -> FloatArray:
    """A curve (n_pos,) at any mechanical angles in rad, by its trigonometric interpolant."""
    count = values.size
    factors = np.fft.rfft(values) / count
    factors[1:] *= 2.0
    if count % 2 == 0:
        factors[-1] *= 0.5
    turns = np.asarray(angle)[:, None] / curves.period * np.arange(factors.size)
    found: FloatArray = np.real(np.exp(2j * math.pi * turns) @ factors)
    return found


def _fine(curves: LockedCurves, values: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Eight times as many angles of the period and the curve there."""
    fine = curves.period * np.arange(8 * values.size) / (8 * values.size)
    return fine, at_angles(curves, values, fine.tolist())
