"""Torque over 60 electrical degrees: mean two ways, ripple, spectrum by order.

With sinusoidal phase currents, constant in dq, a three-phase machine repeats every 60 electrical
degrees, so equally spaced positions over that span (end excluded) are one period: the mean is the
exact mean of every order below the sampling limit, and a discrete Fourier transform needs no
window. Harmonic m of the period is electrical order 6 m.

Three torques are compared (all derived from the energy balance, checks A8.1 and A8.2):

    Maxwell stress          T(theta)
    flux linkages           1.5 p (psi_d i_q - psi_q i_d), equal to T in the mean only
    linkages and coenergy   1.5 p (psi_d i_q - psi_q i_d) + dW'/d theta at constant i_d, i_q

The last one holds at every position: W' at constant phase currents has the slope T, and turning
the currents with the rotor adds sum psi_k di_k/d theta = -1.5 p (psi_d i_q - psi_q i_d).

Ripple is (max - min) / mean of the trigonometric interpolant, not of the samples: samples miss
the crests by up to 1 - cos(pi / n) of a harmonic's amplitude at n samples per period (9 % at
7.5) and by an amount that depends on where the first one falls. Both are kept; where they differ
much, the positions are too few.

Axes: n_pos positions, n_order harmonics.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FieldSolution, FloatArray

PERIOD_EL = math.pi / 3.0  # rad, 60 electrical degrees
DEFAULT_POSITIONS = 30  # 3 per period of order 60: the fifth slot harmonic at two slots per pole
# and phase, the third at three
SAMPLES_PER_PERIOD = 3  # fewest positions per period of a reported order
OVERSAMPLING = 32  # interpolant points per position: crest of the highest order within 0.2 %


@dataclass(frozen=True, slots=True, eq=False)
class TorqueWaveform:
    """One period (60 electrical degrees) of torque and linkages at constant i_d, i_q."""

    pole_pairs: int
    i_d: float  # A
    i_q: float  # A
    angle_el: FloatArray  # (n_pos,), rad, electrical angle of the rotor's d axis from phase A
    torque: FloatArray  # (n_pos,), N m, Maxwell stress
    psi_d: FloatArray  # (n_pos,), V s
    psi_q: FloatArray  # (n_pos,), V s
    coenergy: FloatArray  # (n_pos,), J

    @property
    def mean(self) -> float:
        """Mean torque in N m by the Maxwell stress."""
        return float(np.mean(self.torque))

    @property
    def mean_linkage(self) -> float:
        """Mean torque in N m by the flux linkages."""
        return float(np.mean(linkage_torque(self)))


@dataclass(frozen=True, slots=True, eq=False)
class TorqueSpectrum:
    """Torque harmonics by electrical order."""

    order: tuple[int, ...]  # (n_order,), multiples of 6
    amplitude: FloatArray  # (n_order,), N m
    phase: FloatArray  # (n_order,), rad: amplitude cos(order theta_e + phase)


def waveform_positions(pole_pairs: int, count: int = DEFAULT_POSITIONS) -> FloatArray:
    """Mechanical positions in rad (count,), equally spaced over 60 electrical degrees."""
    return np.linspace(0.0, PERIOD_EL / pole_pairs, count, endpoint=False)


def torque_waveform(solutions: Sequence[FieldSolution], pole_pairs: int) -> TorqueWaveform:
    """The waveform of solutions at equal currents and equally spaced positions.

    Args:
        solutions: in the order of `waveform_positions`.
        pole_pairs: of the machine.

    Raises:
        ValueError: currents differ, or positions are not one period equally spaced.
    """
    angle_el = pole_pairs * np.array([s.position for s in solutions])
    spaced = angle_el[0] + np.arange(len(solutions)) * PERIOD_EL / len(solutions)
    if not np.allclose(angle_el, spaced, rtol=0.0, atol=1e-9):
        raise ValueError("positions are not equally spaced over 60 electrical degrees")
    if len({(s.i_d, s.i_q) for s in solutions}) != 1:
        raise ValueError("the currents of a waveform must not change with the position")
    return TorqueWaveform(
        pole_pairs=pole_pairs,
        i_d=solutions[0].i_d,
        i_q=solutions[0].i_q,
        angle_el=angle_el,
        torque=np.array([s.torque for s in solutions]),
        psi_d=np.array([s.psi_d for s in solutions]),
        psi_q=np.array([s.psi_q for s in solutions]),
        coenergy=np.array([s.coenergy for s in solutions]),
    )


def linkage_torque(waveform: TorqueWaveform) -> FloatArray:
    """Torque by the flux linkages in N m (n_pos,); only its mean is a torque."""
    w = waveform
    # T = 3/2 p (psi_d i_q - psi_q i_d), derived: power balance, mean over a period
    return 1.5 * w.pole_pairs * (w.psi_d * w.i_q - w.psi_q * w.i_d)


def coenergy_torque(waveform: TorqueWaveform) -> FloatArray:
    """Torque at each position in N m (n_pos,) by linkages and the slope of the coenergy.

    The slope is that of the trigonometric interpolant, so it is as good as the positions are
    many; of the middle order of an even count, which has no slope at the samples, nothing is
    taken. Source: derived, see the head of the file.
    """
    w = waveform
    count = len(w.coenergy)
    content = np.fft.rfft(w.coenergy)
    if count % 2 == 0:
        content[-1] = 0.0
    order_el = 6.0 * np.arange(len(content))
    slope = np.fft.irfft(1j * order_el * content, count)  # dW'/d theta_e, J per electrical rad
    return linkage_torque(w) + w.pole_pairs * slope


def coenergy_difference(waveform: TorqueWaveform) -> float:
    """Largest difference of Maxwell and coenergy torque over the period, relative to the mean."""
    difference = np.abs(waveform.torque - coenergy_torque(waveform))
    return float(np.max(difference) / abs(waveform.mean))


def interpolant(values: FloatArray, oversampling: int = OVERSAMPLING) -> FloatArray:
    """Trigonometric interpolant of one period (n_pos,) at `oversampling` points per sample.

    The middle order of an even count is taken as a cosine at the samples, as is usual.
    """
    count = len(values)
    content = np.fft.rfft(values)
    if count % 2 == 0:
        content[-1] *= 0.5
    return np.fft.irfft(content, count * oversampling) * oversampling


def ripple(waveform: TorqueWaveform) -> float:
    """(max - min) / mean of the torque's interpolant over 60 electrical degrees."""
    return float(np.ptp(interpolant(waveform.torque)) / abs(waveform.mean))


def ripple_of_samples(waveform: TorqueWaveform) -> float:
    """(max - min) / mean of the samples alone: never more than `ripple`."""
    return float(np.ptp(waveform.torque) / abs(waveform.mean))


def spectrum(waveform: TorqueWaveform) -> TorqueSpectrum:
    """Torque harmonics up to the highest order with three positions per period."""
    count = len(waveform.torque)
    content = np.fft.rfft(waveform.torque)[1 : count // SAMPLES_PER_PERIOD + 1]
    orders = tuple(6 * m for m in range(1, len(content) + 1))
    phase = np.angle(content) - np.array(orders) * waveform.angle_el[0]
    return TorqueSpectrum(orders, 2.0 * np.abs(content) / count, phase)
