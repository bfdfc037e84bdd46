"""Operating points for torques and speeds: the least current within both limits.

Of one torque the current is least at most torque per ampere and grows along the line of that
torque on both sides; the voltage is least at most torque per volt. So the point asked for is the
first if the supply reaches it, otherwise the place between the two where the voltage is the
supply's: field weakening (derived). It exists if the torque is not above `torque_limit` of that
speed. Each is a root in a bracket; no point of a search by trial needs less (tests/postprocess).
Motoring forwards; to brake, i_d changes its sign where the rotor is mirror symmetric, and the
voltage is then lower by what the resistance takes.

Axes: n any shape.
"""

from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .brackets import BoolArray, roots
from .control_curves import least_current, least_voltage
from .terminals import square_voltage
from .torque_limit import NEAR
from .torque_lines import TorqueLines, number, on_line


@dataclass(frozen=True, slots=True, eq=False)
class ControlPoints:
    """Currents for torques and speeds; nan where a limit forbids the torque."""

    torque: FloatArray  # (n), N m, asked for
    omega_e: FloatArray  # (n), electrical rad/s
    i_d: FloatArray  # (n), A
    i_q: FloatArray  # (n), A
    is_reachable: BoolArray  # (n), truth
    is_weakened: BoolArray  # (n), whether the voltage limit is met


def control_points(
    lines: TorqueLines, torque: FloatArray, omega_e: FloatArray, limit: FloatArray
) -> ControlPoints:
    """The least currents for torques of 0 and above within both limits.

    Args:
        lines: of the drive.
        torque: N m; torques, speeds and limits broadcast.
        omega_e: electrical rad/s, 0 and above.
        limit: N m, from `torque_limit` at the same speeds.
    """
    drive = lines.drive
    torque, omega_e, limit = np.broadcast_arrays(torque, omega_e, limit)
    is_reachable = torque <= limit * (1.0 + NEAR)
    asked = np.where(is_reachable, np.minimum(torque, limit), 0.0)
    per_ampere = least_current(lines, asked)
    i_d, i_q = per_ampere.i_d.copy(), per_ampere.i_q.copy()
    most = drive.voltage_limit**2
    over = square_voltage(drive, number(i_d), number(i_q), omega_e) > most * (1.0 + NEAR)
    is_weakened = is_reachable & over
    if is_weakened.any():
        weak = (asked[is_weakened], omega_e[is_weakened])
        i_q[is_weakened] = _weakened(lines, *weak, i_q[is_weakened])
        i_d[is_weakened] = on_line(lines, weak[0], i_q[is_weakened])
    return ControlPoints(
        torque,
        omega_e,
        np.where(is_reachable, i_d, np.nan),
        np.where(is_reachable, i_q, np.nan),
        is_reachable,
        is_weakened,
    )


def _weakened(
    lines: TorqueLines, torque: FloatArray, omega_e: FloatArray, start: FloatArray
) -> FloatArray:
    """i_q in A (n,) where lines of torque meet the voltage limit, from most per ampere on."""
    drive = lines.drive
    least = least_voltage(lines, torque, omega_e)

    def excess(i_q: FloatArray) -> FloatArray:
        i_d = on_line(lines, torque, i_q)
        return square_voltage(drive, number(i_d), i_q, omega_e) - drive.voltage_limit**2

    i_q = roots(excess, start, least.i_q)
    # At the limit set by most torque per volt the two ends of the line's piece are one.
    return np.where(np.isfinite(i_q), i_q, least.i_q)
