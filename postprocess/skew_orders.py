r"""Torque orders of a skewed rotor, for any number of steps and for a continuous skew.

A part of the stack whose d axis lies an electrical angle a ahead of the rotor's sees its torque
wave a later and the current vector turned back by a (`skew`): with T_m(gamma) the content of order
m at the current angle gamma, T(theta_e) = sum T_m e^(j m theta_e), the whole has the mean of

    T_m(gamma - a) e^(j m a)

over its steps, or over the angle where the skew is continuous (derived). The second factor alone
gives the skew factor; the first is why a slot order is not gone under load where the skew factor
is zero. T_m(gamma - a) is taken at a few turns and interpolated by the polynomial through them: at
five turns within 1e-4 of the mean torque of the solved steps (24/4 demo, one slot pitch).

Axes: n_turn turns of the current vector, n_order orders 0, 6, 12 ...
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.skew import continuous_skew_factor, skew_factor
from lamwright.solver.types import FloatArray

from .gap_waves import ComplexArray

TURNS = 5  # of the current vector, odd: the middle one is the machine without skew
POINTS = 8  # of Gauss in the mean over a continuous skew, per period of the highest order


@dataclass(frozen=True, slots=True, eq=False)
class TurnedTorque:
    """Content of the torque of one part of the stack at a few turns of the current vector."""

    turn: FloatArray  # (n_turn,), rad el, by which the part is ahead of the rotor
    order: tuple[int, ...]  # (n_order,), electrical, from 0
    content: ComplexArray  # (n_turn, n_order), N m: T = sum over both signs of T_m e^(j m theta_e)


@dataclass(frozen=True, slots=True, eq=False)
class SkewedTorque:
    """Torque of a skewed rotor by order."""

    steps: int  # 1: none; 0: continuous
    angle_el: float  # rad, of the whole skew
    mean: float  # N m
    order: tuple[int, ...]  # (n_order,), electrical, from 6
    amplitude: FloatArray  # (n_order,), N m
    by_factor: FloatArray  # (n_order,), N m: unskewed amplitude times the skew factor alone


def skew_turns(widest_el: float, count: int = TURNS) -> FloatArray:
    """Turns (count,) in rad el at which the torque of a part is to be computed.

    Args:
        widest_el: widest skew of interest in rad el, from end to end.
        count: odd.
    """
    # Chebyshev's places with both ends: the interpolation is nowhere bad, and 0 is among them.
    places = -np.cos(np.pi * np.arange(count) / (count - 1))
    places[count // 2] = 0.0
    return np.asarray(0.5 * widest_el * places)


def turned_torque(turn: FloatArray, torque: Sequence[FloatArray]) -> TurnedTorque:
    """Contents from waveforms over 60 electrical degrees.

    Args:
        turn: (n_turn,) rad el, rising.
        torque: for each turn (n_pos,) in N m at equally spaced positions of the part from 0.
    """
    content = np.fft.rfft(np.array(torque), axis=1) / len(torque[0])
    if len(torque[0]) % 2 == 0:
        content = content[:, :-1]  # the middle order has no phase
    orders = tuple(6 * m for m in range(content.shape[1]))
    return TurnedTorque(np.asarray(turn), orders, content)


def skewed(torque: TurnedTorque, steps: int, angle_el: float, highest: int) -> SkewedTorque:
    """Torque by order of a rotor skewed in steps.

    Args:
        torque: of a part of the stack.
        steps: equal parts; 1 for none, 0 for a continuous skew.
        angle_el: of the whole skew in rad el; the design's own meaning, see `geometry.skew`.
        highest: order reported.

    Raises:
        ValueError: the skew is wider than the turns.
    """
    # Middles of equal parts: the steps themselves, or Gauss's points of a continuous skew.
    if steps:
        places = (np.arange(steps) - 0.5 * (steps - 1)) * angle_el / steps
        weight = np.full(steps, 1.0 / steps)
    else:
        waves = 1 + math.ceil(highest * angle_el / (2.0 * math.pi))
        places, weight = np.polynomial.legendre.leggauss(POINTS * waves)
        places, weight = 0.5 * angle_el * places, 0.5 * weight
    widest = float(np.abs(torque.turn).max())
    if np.abs(places).max() > widest * (1.0 + 1e-9):
        raise ValueError(f"a skew by {angle_el:.4g} rad is wider than the turns computed")
    order = np.array(torque.order)
    kept = (order > 0) & (order <= highest)
    content = weight @ (_at(torque, places) * np.exp(1j * np.outer(places, order)))
    plain = _at(torque, np.zeros(1))[0]
    factors = [_factor(m, steps, angle_el) for m in order[kept].tolist()]
    return SkewedTorque(
        steps=steps,
        angle_el=angle_el,
        mean=float(content[0].real),
        order=tuple(order[kept].tolist()),
        amplitude=2.0 * np.abs(content[kept]),
        by_factor=2.0 * np.abs(plain[kept]) * np.abs(factors),
    )


def _factor(order: int, steps: int, angle_el: float) -> float:
    return skew_factor(order, steps, angle_el) if steps else continuous_skew_factor(order, angle_el)


def _at(torque: TurnedTorque, places: FloatArray) -> ComplexArray:
    """Content (n, n_order) of parts ahead by `places` (n,) rad el."""
    scale = float(np.abs(torque.turn).max()) or 1.0
    count = torque.turn.size
    at_turns = np.polynomial.chebyshev.chebvander(torque.turn / scale, count - 1)
    coefficients = np.linalg.solve(at_turns.astype(np.complex128), torque.content)
    return np.asarray(np.polynomial.chebyshev.chebvander(places / scale, count - 1) @ coefficients)
