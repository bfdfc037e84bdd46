r"""What the gap's field pulls at: stress by space and time order, and the force on each tooth.

Maxwell's stress on the turning circle, from the waves of `gap_waves`: with B = B_r + j B_theta

    sigma_r + j sigma_theta = B^2 / (2 mu0),

sigma_r = (B_r^2 - B_theta^2) / (2 mu0) and sigma_theta = B_r B_theta / mu0: what acts on the rotor;
on the stator acts the opposite, so a positive sigma_r pulls a tooth towards the shaft. Over angle
and time (sums of e^(j (r theta - k theta_e))) the space order r is the number of waves round the
bore that shake the stator's ring, k times the electrical frequency how often. k > 0 turns with the
rotor. Products of waves n, k and n', k' have orders n +- n', k +- k', so like poles leave only
multiples of the poles (or of the sectors), and even k.

The force of a tooth is the integral of either stress over its slot pitch, along the circle: the
sideways ones of all teeth, times the radius, are the torque.

Axes: n_time positions of a period, n_all points round the circle.
"""

import math
from dataclasses import dataclass

import numpy as np

from lamwright.solver.steel import MU_0
from lamwright.solver.types import FloatArray

from .gap_waves import ComplexArray, GapWaves, field_on_circle

LEAST_SHARE = 0.003  # of the mean radial stress, for an order to be listed


@dataclass(frozen=True, slots=True)
class ForceOrder:
    """A wave of stress on the bore."""

    space: int  # waves round the bore, 0 or more
    time: float  # electrical order, negative where it turns against the rotor; 0 stands still
    radial: float  # Pa, amplitude
    tangential: float  # Pa


@dataclass(frozen=True, slots=True, eq=False)
class ToothForces:
    """Force on every tooth at every position of a period; tooth 0 lies at angle 0."""

    angle_el: FloatArray  # (n_time,), rad
    pull: FloatArray  # (n_time, slots), N, towards the shaft
    tangential: FloatArray  # (n_time, slots), N, counter-clockwise


def stress_on_rotor(waves: GapWaves) -> ComplexArray:
    """Stress sigma_r + j sigma_theta in Pa on the circle, (n_time, n_all), from angle 0.

    Twice as many points as the highest order of B^2 needs.
    """
    radial, tangential = field_on_circle(waves, 8 * int(waves.space_orders[-1]))
    return np.asarray((radial + 1j * tangential) ** 2 / (2.0 * MU_0))


def force_orders(
    waves: GapWaves,
    stress: ComplexArray,
    highest_space: int,
    highest_time: float,
    least_share: float = LEAST_SHARE,
) -> tuple[ForceOrder, ...]:
    """Waves of stress, the largest first; the first is the mean.

    Args:
        waves: of the gap.
        stress: on the rotor, see `stress_on_rotor`.
        highest_space: order listed.
        highest_time: electrical order listed.
        least_share: of the mean radial stress, that either amplitude must reach.
    """
    n_all = stress.shape[1]
    times = waves.time_orders
    amplitudes = []
    for part in (stress.real, stress.imag):
        # e^(j r theta) by the transform over space, e^(-j k theta_e) by the inverse one over time.
        content = np.fft.ifft(np.fft.rfft(part, axis=1)[:, : highest_space + 1] / n_all, axis=0)
        amplitudes.append(2.0 * np.abs(content))
        amplitudes[-1][0, 0] *= 0.5
    radial, tangential = amplitudes
    mean = float(radial[0, 0])
    is_listed = np.maximum(radial, tangential) >= least_share * mean
    is_listed &= (np.abs(times) <= highest_time)[:, None]
    is_listed[times < 0.0, 0] = False  # order 0 does not turn: one sign is both
    rows, columns = np.nonzero(is_listed)
    found = [
        ForceOrder(
            space=r,
            time=float(times[k]),
            radial=float(radial[k, r]),
            tangential=float(tangential[k, r]),
        )
        for k, r in zip(rows.tolist(), columns.tolist(), strict=True)
    ]
    mean_first = sorted(found, key=lambda order: -order.radial)
    return tuple(sorted(mean_first, key=lambda order: (order.space, order.time) != (0, 0.0)))


def tooth_forces(waves: GapWaves, stress: ComplexArray) -> ToothForces:
    """Force on each tooth, of the whole stack.

    Args:
        waves: of the gap.
        stress: on the rotor, see `stress_on_rotor`.
    """
    n_time, n_all = stress.shape
    half = math.pi / waves.slots  # rad, half a slot pitch
    content = np.fft.fft(stress, axis=1) / n_all
    order = np.fft.fftfreq(n_all, 1.0 / n_all)
    share = 2.0 * half * np.sinc(order * half / math.pi)  # int of e^(j n theta) over the pitch
    middles = 2.0 * half * np.arange(waves.slots)
    force = (content * share) @ np.exp(1j * np.outer(order, middles))
    force *= waves.radius * waves.stack_length
    angle = 2.0 * math.pi * waves.sixths / 6.0 / n_time * np.arange(n_time)
    return ToothForces(angle, force.real, -force.imag)


def tooth_orders(forces: ToothForces, sixths: int) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Electrical orders (n_order,), amplitudes of pull and tangential force in N of a tooth.

    The largest over all teeth, order by order; order 0 is the mean.

    Args:
        forces: over a period.
        sixths: of 60 electrical degrees in the period.
    """
    n_time = forces.angle_el.size
    parts = []
    for force in (forces.pull, forces.tangential):
        content = np.abs(np.fft.rfft(force, axis=0)) / n_time
        content[1:] *= 2.0
        parts.append(content.max(axis=1))
    orders = np.arange(parts[0].size) * 6.0 / sixths
    return np.asarray(orders), parts[0], parts[1]
