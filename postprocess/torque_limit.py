"""The greatest torque at each speed within the current and the voltage limit, as tables take it.

    most torque per ampere at the current limit          up to base speed,
    where the current circle meets the voltage limit     beyond it,
    most torque per volt at the voltage limit            where that needs less than the limit

(derived); found by the search of `within_limits`, the envelope's too.
Axes: n_speed speeds.
"""

from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .terminals import Terminals, shaft_torque
from .within_limits import currents_at, most_torque_within

NEAR = 1e-9  # of torque, current and voltage: how exactly a limit is met


@dataclass(frozen=True, slots=True, eq=False)
class TorqueLimit:
    """The greatest torque at each speed, nan where no current within the limits motors."""

    omega_e: FloatArray  # (n_speed,), electrical rad/s
    torque: FloatArray  # (n_speed,), N m
    i_d: FloatArray  # (n_speed,), A
    i_q: FloatArray  # (n_speed,), A


def torque_limit(drive: Terminals, omega_e: FloatArray) -> TorqueLimit:
    """The greatest torque at speeds in electrical rad/s (n_speed,), 0 and above."""
    current, angle = most_torque_within(drive, omega_e)
    is_known = np.isfinite(current)
    i_d, i_q = currents_at(drive, *(np.where(is_known, x, 0.0) for x in (current, angle)))
    found = (np.where(is_known, x, np.nan) for x in (shaft_torque(drive, i_d, i_q), i_d, i_q))
    return TorqueLimit(omega_e, *found)
