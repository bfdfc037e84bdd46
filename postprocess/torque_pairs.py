r"""Which waves of the air gap meet to make each order of the torque.

From Maxwell's stress on a circle, with the waves of `gap_waves` (derived):

    T(t) = (8 pi L / mu0) sum_n n^2 Im(conj(alpha_n) beta_n)

free of the radius, and only waves born in the stator with waves born in the rotor, of the same
space order n. With time orders k_s and k_r it turns with e^(j (k_r - k_s) theta_e): torque of order
m comes of pairs whose time orders are m apart, and of no others,

    T_m = (4 pi L / (j mu0)) sum_n n^2 [ sum_{k_r - k_s = -m} conj(alpha) beta
                                        - sum_{k_r - k_s = m} alpha conj(beta) ].

A winding in constant dq currents makes waves of all its orders nu = 1, -5, 7, -11, 13 ... at time
order 1 (minus: against the rotor). What stands on the rotor turns with it: time order = space
order. So the winding's order nu meets the rotor's order |nu| and makes torque of order |nu - 1|,
a multiple of 6 (derived): -11 and 13 make 12.

Axes: n_time time orders, n_space space orders.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.solver.steel import MU_0
from lamwright.solver.types import FloatArray

from .gap_waves import ComplexArray, GapWaves

LISTED = 6  # pairs of an order
LEAST_SHARE = 0.02  # of an order's torque, for a pair to be listed


@dataclass(frozen=True, slots=True)
class WavePair:
    """Two waves of one space order, and what torque they make of an order.

    `forth` is the part of the slower wave born in the stator with the faster one born in the
    rotor, `back` the part the other way round; both turn at one angle to the order's whole torque
    and often nearly cancel, as steel on both sides mirrors every wave.
    """

    order: int  # electrical, of the torque
    space: float  # relative to the working wave, positive
    slow: float  # time order of one wave, negative against the rotor
    fast: float  # time order of the other, `order` higher
    amplitude: float  # N m
    share: float  # of the order's torque, in phase with it; all pairs of an order sum to 1
    forth: float  # likewise
    back: float


def pair_torques(waves: GapWaves, order: int) -> ComplexArray:
    """All pairs' parts of T_m in N m: T(theta_e) = sum T_m e^(j m theta_e).

    Args:
        waves: of the gap.
        order: electrical, m.

    Returns:
        (2, n_time, n_space): the rotor's time order k_r by rows; first the stator's order
        k_r - m, then k_r + m. Orders beyond the sampling's reach fold back, as those of the
        sampled torque do, so that the sum is the transform of the torque at the positions.
    """
    shift = order * waves.sixths // 6
    alpha, beta = waves.stator_born, waves.rotor_born
    factor = 4.0 * math.pi * waves.stack_length / (1j * MU_0) * waves.space_orders**2
    below = -np.roll(alpha, shift, axis=0) * beta.conj()  # k_s = k_r - m
    above = np.roll(alpha, -shift, axis=0).conj() * beta  # k_s = k_r + m
    return np.asarray(factor * np.stack([below, above]))


def torque_of_waves(waves: GapWaves, order: int) -> complex:
    """T_m in N m, the sum of all pairs; amplitude of the harmonic is twice its magnitude."""
    return complex(pair_torques(waves, order).sum())


def torque_at_positions(waves: GapWaves) -> FloatArray:
    """Torque in N m (n_time,) at every position of the period."""
    alpha, beta = waves.stator_at_positions(), waves.rotor_at_positions()
    product = np.imag(alpha.conj() * beta)
    return np.asarray(8.0 * math.pi * waves.stack_length / MU_0 * (product @ waves.space_orders**2))


def largest_pairs(
    waves: GapWaves, order: int, most: int = LISTED, least_share: float = LEAST_SHARE
) -> tuple[WavePair, ...]:
    """The pairs that make most of an order of the torque, largest first.

    Args:
        waves: of the gap.
        order: electrical, above 0.
        most: pairs at the most.
        least_share: of the order's own amplitude, that a pair must reach by its own.
    """
    below, above = pair_torques(waves, order)
    shift = order * waves.sixths // 6
    forth, back = below, np.roll(above, shift, axis=0)  # rows: the faster wave's time order
    parts = forth + back
    whole = complex(parts.sum())
    along = whole.conjugate() / abs(whole) ** 2 if whole else 0.0
    times = waves.time_orders
    found = []
    for at in np.argsort(np.abs(parts), axis=None)[::-1][:most].tolist():
        k, n = divmod(at, parts.shape[1])
        part = complex(parts[k, n])
        if abs(part) <= least_share * abs(whole):
            break
        found.append(
            WavePair(
                order=order,
                space=float(waves.space_orders[n]) / waves.pole_pairs,
                slow=float(times[k - shift]),
                fast=float(times[k]),
                amplitude=2.0 * abs(part),
                share=(part * along).real,
                forth=(complex(forth[k, n]) * along).real,
                back=(complex(back[k, n]) * along).real,
            )
        )
    return tuple(found)


def torque_orders(waves: GapWaves, orders: Sequence[int]) -> FloatArray:
    """Amplitudes in N m (n_order,) of orders of the torque, from the waves."""
    return np.array([2.0 * abs(torque_of_waves(waves, order)) for order in orders])
