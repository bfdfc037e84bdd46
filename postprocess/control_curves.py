"""Most torque per ampere and most torque per volt: the two curves that a drive follows.

Per ampere: at each amplitude of the current, the angle of most torque, where dT/d gamma = 0; up to
the current limit. Per volt: for each torque, the currents that need the least voltage at a speed,
or the least flux linkage, which is the same with no resistance. Source: derived; in a linear
machine the first is gamma = 45 degrees, the second tan gamma = L_d / L_q (Betz et al. 1993).

Axes: n points of a curve.
"""

import math
from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .brackets import roots
from .terminals import (
    Terminals,
    has_both_signs,
    shaft_torque,
    square_linkage_slopes,
    square_voltage_slopes,
    terminal_linkages,
    torque_slopes,
)
from .torque_lines import LinePoints, TorqueLines, Value, least_on_lines

ANGLES = 181  # tried on each circle, to find the best of several humps
CURVE_POINTS = 40


@dataclass(frozen=True, slots=True, eq=False)
class ControlCurve:
    """A curve on the i_d-i_q plane."""

    i_d: FloatArray  # (n,), A
    i_q: FloatArray  # (n,), A
    psi_d: FloatArray  # (n,), V s, end winding included
    psi_q: FloatArray  # (n,), V s
    torque: FloatArray  # (n,), N m

    @property
    def amplitude(self) -> FloatArray:
        """Peak current in A (n,)."""
        return np.hypot(self.i_d, self.i_q)

    @property
    def gamma(self) -> FloatArray:
        """Current angle from the d axis in rad (n,)."""
        return np.arctan2(self.i_q, self.i_d)


def curve_through(drive: Terminals, i_d: FloatArray, i_q: FloatArray) -> ControlCurve:
    """The curve of given points, with what the map says there."""
    psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
    return ControlCurve(i_d, i_q, psi_d, psi_q, shaft_torque(drive, i_d, i_q))


def circle_angles(drive: Terminals, amplitude: float) -> FloatArray:
    """Current angles (n,) in rad on the motoring half of a circle, as far as it is mapped.

    Counted from the motoring d axis: i_d = side I cos, i_q = I sin.
    """
    low, high = drive.surface.i_q_range
    first = math.asin(max(-1.0, low / amplitude)) if has_both_signs(drive) else 0.0
    return np.linspace(first, math.asin(min(1.0, high / amplitude)), ANGLES)


def most_per_ampere(drive: Terminals, amplitude: FloatArray) -> ControlCurve:
    """The points of most torque at the amplitudes in A (n,), within the map, above 0."""
    angles = np.stack([circle_angles(drive, one) for one in amplitude])
    found = shaft_torque(
        drive,
        drive.side * amplitude[:, None] * np.cos(angles),
        amplitude[:, None] * np.sin(angles),
    )
    best = np.argmax(found, axis=1)
    rows = np.arange(best.size)
    low = angles[rows, np.maximum(best - 1, 0)]
    high = angles[rows, np.minimum(best + 1, ANGLES - 1)]

    def slope(angle: FloatArray) -> FloatArray:
        i_d, i_q = drive.side * amplitude * np.cos(angle), amplitude * np.sin(angle)
        t_d, t_q = torque_slopes(drive, i_d, i_q)
        return t_q * amplitude * np.cos(angle) - t_d * drive.side * i_q

    angle = roots(slope, low, high)
    angle = np.where(np.isfinite(angle), angle, angles[rows, best])
    return curve_through(drive, drive.side * amplitude * np.cos(angle), amplitude * np.sin(angle))


def ampere_curve(drive: Terminals, points: int = CURVE_POINTS) -> ControlCurve:
    """Most torque per ampere at equal steps of the amplitude up to the current limit."""
    return most_per_ampere(drive, drive.current_limit * np.arange(1, points + 1) / points)


def least_current(lines: TorqueLines, torque: FloatArray) -> LinePoints:
    """The least current for each torque in N m, any shape; nan where the map has not the torque."""

    def square(i_d: FloatArray, i_q: FloatArray, *_: FloatArray) -> FloatArray:
        return i_d**2 + i_q**2

    return least_on_lines(lines, torque, square, lambda i_d, i_q: (2.0 * i_d, 2.0 * i_q))


def least_linkage(lines: TorqueLines, torque: FloatArray) -> LinePoints:
    """The least flux linkage for each torque in N m: most torque per volt with no resistance."""

    def square(_: FloatArray, __: FloatArray, psi_d: FloatArray, psi_q: FloatArray) -> FloatArray:
        return psi_d**2 + psi_q**2

    return least_on_lines(
        lines, torque, square, lambda i_d, i_q: square_linkage_slopes(lines.drive, i_d, i_q)
    )


def least_voltage(lines: TorqueLines, torque: FloatArray, omega_e: FloatArray) -> LinePoints:
    """The least voltage for each torque in N m at a speed in electrical rad/s, resistance in.

    Torques and speeds broadcast; at standstill this is the least current.
    """
    drive = lines.drive
    torque, omega_e = np.broadcast_arrays(torque, omega_e)
    return least_on_lines(
        lines,
        torque,
        square_voltage_at_nodes(drive, omega_e),
        lambda i_d, i_q: square_voltage_slopes(drive, i_d, i_q, omega_e),
    )


def square_voltage_at_nodes(drive: Terminals, omega_e: FloatArray) -> Value:
    """u_d^2 + u_q^2 in V^2 of a line's nodes at its speed in electrical rad/s (n_line)."""
    speed = np.asarray(omega_e)[..., None]

    def square(
        i_d: FloatArray, i_q: FloatArray, psi_d: FloatArray, psi_q: FloatArray
    ) -> FloatArray:
        u_d = drive.resistance * i_d - speed * psi_q
        return u_d**2 + (drive.resistance * i_q + speed * psi_d) ** 2

    return square


def volt_curve(lines: TorqueLines, torque: FloatArray, omega_e: float | None) -> ControlCurve:
    """Most torque per volt at torques in N m (n,), where its point lies inside the map.

    Args:
        lines: of the drive.
        torque: rising, above 0.
        omega_e: electrical rad/s at which the resistance counts; None for least flux linkage.
    """
    if omega_e is None:
        points = least_linkage(lines, torque)
    else:
        points = least_voltage(lines, torque, np.asarray(omega_e))
    is_inside = np.isfinite(points.i_d) & ~points.is_edge
    return curve_through(lines.drive, points.i_d[is_inside], points.i_q[is_inside])
