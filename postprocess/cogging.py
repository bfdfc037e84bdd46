"""Cogging: torque of the magnets without current, over the period of slots and poles.

Slots and poles meet alike lcm(slots, poles) times a turn, so the torque repeats as often: positions
over one such period hold all of it (derived; poles after which an unlike rotor repeats count as
one). Over a period its mean is zero, as no work is done.
Axes: n_pos positions, n_order orders.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .torque import SAMPLES_PER_PERIOD, interpolant

POSITIONS = 24  # of a period: 3 a period of its 8th order


@dataclass(frozen=True, slots=True, eq=False)
class Cogging:
    """One period of the torque without current."""

    per_turn: int  # periods in a turn of the rotor
    angle: FloatArray  # (n_pos,), mechanical rad
    torque: FloatArray  # (n_pos,), N m
    order: tuple[int, ...]  # (n_order,), mechanical: periods of the harmonic in a turn
    amplitude: FloatArray  # (n_order,), N m

    @property
    def peak_to_peak(self) -> float:
        """Largest less least torque in N m, of the interpolant."""
        return float(np.ptp(interpolant(self.torque)))


def cogging_per_turn(slots: int, poles: int, rotor_period: int = 1) -> int:
    """How often the torque without current repeats in a turn of the rotor."""
    return math.lcm(slots, poles // rotor_period)


def cogging_positions(per_turn: int, count: int = POSITIONS) -> FloatArray:
    """Mechanical positions in rad (count,) over one period, end excluded."""
    return np.linspace(0.0, 2.0 * math.pi / per_turn, count, endpoint=False)


def cogging(per_turn: int, positions: Sequence[float], torque: Sequence[float]) -> Cogging:
    """The period from torques (n_pos,) in N m at `cogging_positions`."""
    count = len(torque)
    content = np.fft.rfft(np.asarray(torque))[1 : count // SAMPLES_PER_PERIOD + 1]
    return Cogging(
        per_turn=per_turn,
        angle=np.asarray(positions),
        torque=np.asarray(torque),
        order=tuple(per_turn * k for k in range(1, content.size + 1)),
        amplitude=2.0 * np.abs(content) / count,
    )
