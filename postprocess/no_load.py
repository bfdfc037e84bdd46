"""The machine at no load: linkage of a phase over a whole period, back-emf, cogging torque.

Three equal phases see the rotor one after the other, psi_b(theta) = psi_a(theta - 120 deg), so
positions over 120 electrical degrees hold the whole period; where all poles of the rotor are
alike, psi_a(theta + 180 deg) = -psi_a(theta) too, and 60 degrees are enough (derived).
Axes: n_pos positions, n_all places of the period, n_order harmonics.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FieldSolution, FloatArray

from .torque import DEFAULT_POSITIONS, SAMPLES_PER_PERIOD, interpolant


@dataclass(frozen=True, slots=True, eq=False)
class NoLoad:
    """One electrical period of a phase's linkage, and the cogging torque over the positions."""

    angle_el: FloatArray  # (n_all,), rad, of the rotor's d axis from the phase's axis, from 0
    psi: FloatArray  # (n_all,), V s
    cogging: FloatArray  # (n_pos,), N m, at the first positions of the period
    psi_d: float  # V s, mean
    psi_q: float  # V s, mean


@dataclass(frozen=True, slots=True, eq=False)
class LinkageSpectrum:
    """Harmonics of a phase's linkage."""

    order: tuple[int, ...]  # (n_order,), electrical
    amplitude: FloatArray  # (n_order,), V s, peak


def no_load_positions(pole_pairs: int, rotor_period: int) -> FloatArray:
    """Mechanical positions in rad over 60 electrical degrees; 120 where poles are unlike.

    Args:
        pole_pairs: of the machine.
        rotor_period: poles after which the rotor repeats.
    """
    shares = 1 if rotor_period == 1 else 2
    span = shares * math.pi / 3.0 / pole_pairs
    return np.linspace(0.0, span, shares * DEFAULT_POSITIONS, endpoint=False)


def no_load(solutions: Sequence[FieldSolution], rotor_period: int) -> NoLoad:
    """The period from fields without current at `no_load_positions`, in their order."""
    psi = np.array([s.psi_abc for s in solutions])  # (n_pos, 3)
    is_half = rotor_period == 1
    # From 0 in steps of 60 degrees: a, -b, c, -a, b, -c; of 120 degrees: a, c, b.
    parts = (0, 1, 2, 0, 1, 2) if is_half else (0, 2, 1)
    signs = (1.0, -1.0, 1.0, -1.0, 1.0, -1.0) if is_half else (1.0, 1.0, 1.0)
    whole = np.concatenate([sign * psi[:, k] for k, sign in zip(parts, signs, strict=True)])
    return NoLoad(
        angle_el=np.linspace(0.0, 2.0 * math.pi, whole.size, endpoint=False),
        psi=whole,
        cogging=np.array([s.torque for s in solutions]),
        psi_d=float(np.mean([s.psi_d for s in solutions])),
        psi_q=float(np.mean([s.psi_q for s in solutions])),
    )


def linkage_spectrum(record: NoLoad) -> LinkageSpectrum:
    """Harmonics up to the highest order with three positions per period, without the mean."""
    count = record.psi.size
    content = np.fft.rfft(record.psi)[1 : count // SAMPLES_PER_PERIOD + 1]
    return LinkageSpectrum(
        tuple(range(1, len(content) + 1)), np.asarray(2.0 * np.abs(content) / count)
    )


def peak_linkage(record: NoLoad) -> float:
    """Largest linkage of a phase in V s, of the interpolant."""
    return float(np.abs(interpolant(record.psi)).max())


def cogging_torque(record: NoLoad) -> float:
    """Largest less least torque without current in N m, of the interpolant."""
    return float(np.ptp(interpolant(record.cogging)))


def line_emf(spectrum: LinkageSpectrum, omega_e: float) -> tuple[float, float]:
    """Back-emf between lines: rms of all harmonics and of the fundamental, in V.

    e_n = n omega psi_n; between the lines of a star sqrt(3) of it, and none of the orders that
    three divides. Derived.

    Args:
        spectrum: of a phase's linkage.
        omega_e: electrical angular frequency in rad/s.
    """
    order = np.array(spectrum.order)
    phase = order * omega_e * spectrum.amplitude / math.sqrt(2.0)
    line = math.sqrt(3.0) * np.where(order % 3 == 0, 0.0, phase)
    return float(np.linalg.norm(line)), float(line[0])
