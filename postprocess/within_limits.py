"""The best current within the limits of current and voltage, by a search over the current angle.

Angles count from the d axis on the motoring side: i_d = side I cos gamma, i_q = I sin gamma.
On a ray of constant angle torque grows with the current, so the most torque on the ray stands where
the ray leaves the allowed region: at the current limit or at the voltage limit, which is bracketed
on levels of current. What is left is one search over the angle, by grids that zoom in. A grid does
not mind the corner that the torque has over the angle where both limits meet. Found angles are
within 1e-8 rad where both limits meet.
Axes: n points, n_angle, n_level.
"""

from collections.abc import Callable

import numpy as np

from lamwright.solver.types import FloatArray

from .brackets import roots
from .terminals import (
    Terminals,
    has_both_signs,
    shaft_torque,
    square_voltage,
    terminal_linkages,
)

RIGHT_ANGLE = 0.5 * np.pi
LEVELS = 17  # currents on a ray
ROOT_TOL = 1e-10  # of the current where a ray leaves the limits
FIRST_ANGLES, LATER_ANGLES, ZOOMS = 31, 13, 9  # 90 degrees to 2 x 3 / 6^9 degree = 1e-8 rad


def angle_range(drive: Terminals) -> tuple[float, float]:
    """Current angles in rad that are searched: down to -90 degrees where the map has them."""
    return (-RIGHT_ANGLE if has_both_signs(drive) else 0.0), RIGHT_ANGLE


def currents_at(
    drive: Terminals, current: FloatArray, gamma: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """i_d and i_q in A of amplitudes in A at angles in rad from the motoring d axis."""
    return drive.side * current * np.cos(gamma), current * np.sin(gamma)


def ray_ends(drive: Terminals, gamma: FloatArray, omega_e: FloatArray) -> FloatArray:
    """The most current in A within both limits at each angle and speed; NaN where there is none.

    Args:
        drive: the machine and its limits.
        gamma: rad, any shape.
        omega_e: rad/s, of a shape that broadcasts to that of `gamma`.
    """
    omega = np.broadcast_to(omega_e, gamma.shape)[..., None]

    def excess(current: FloatArray) -> FloatArray:
        i_d, i_q = currents_at(drive, current, gamma[..., None])
        return square_voltage(drive, i_d, i_q, omega) - drive.voltage_limit**2

    level = drive.current_limit * np.linspace(0.0, 1.0, LEVELS)
    levels = np.broadcast_to(level, (*gamma.shape, LEVELS))
    over = excess(levels)
    # Magnets may leave a short piece of the ray: look closer where the voltage is least.
    step = level[1]
    least = level[np.argmin(over, axis=-1)][..., None]
    near = np.clip(least + step * np.linspace(-1.0, 1.0, LEVELS), 0.0, drive.current_limit)
    is_missed = np.all(over > 0.0, axis=-1, keepdims=True)
    if np.any(is_missed):
        levels = np.where(is_missed, near, levels)
        over = excess(levels)
    is_allowed = over <= 0.0
    last = LEVELS - 1 - np.argmax(is_allowed[..., ::-1], axis=-1)[..., None]
    following = np.minimum(last + 1, LEVELS - 1)
    low, high = (np.take_along_axis(levels, k, axis=-1) for k in (last, following))
    end = roots(excess, low, high, ROOT_TOL)
    # Where the last level is allowed nothing changes sign, and the ray ends at the current limit.
    end = np.where(np.isnan(end), low, end)
    return np.where(np.any(is_allowed, axis=-1), end[..., 0], np.nan)


def best_angles(
    value: Callable[[FloatArray], FloatArray], low: FloatArray, high: FloatArray
) -> FloatArray:
    """The angle of the greatest value in each row, by grids that zoom in.

    Args:
        value: angles (n, n_angle) in rad -> values, NaN where there is none.
        low: (n,) rad; `high` likewise.
        high: see `low`.
    """
    low, high = np.array(low, dtype=np.float64), np.array(high, dtype=np.float64)
    best = low
    for zoom in range(ZOOMS + 1):
        count = LATER_ANGLES if zoom else FIRST_ANGLES
        share = np.linspace(0.0, 1.0, count)
        grid = low[:, None] + (high - low)[:, None] * share
        values = value(grid)
        k = np.argmax(np.where(np.isnan(values), -np.inf, values), axis=-1)
        row = np.arange(k.size)
        best = grid[row, k]
        low, high = grid[row, np.maximum(k - 1, 0)], grid[row, np.minimum(k + 1, count - 1)]
    return best


def most_torque_within(drive: Terminals, omega_e: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Current in A and its angle in rad of most torque within both limits at each speed (n,).

    NaN where no current is within the limits, or none of them gives motoring torque.
    """
    low, high = angle_range(drive)

    def value(gamma: FloatArray) -> FloatArray:
        current = ray_ends(drive, gamma, omega_e[:, None])
        return _ray_torque(drive, current, gamma)

    start, end = np.full(omega_e.shape, low), np.full(omega_e.shape, high)
    gamma = best_angles(value, start, end)
    current = ray_ends(drive, gamma, omega_e)
    is_motoring = _ray_torque(drive, current, gamma) > 0.0
    nothing = np.full(omega_e.shape, np.nan)
    return np.where(is_motoring, current, nothing), np.where(is_motoring, gamma, nothing)


def most_power_factor(drive: Terminals, current: float) -> tuple[float, float]:
    """The greatest power factor at a current in A without resistance, and its angle in rad."""
    low, high = angle_range(drive)

    def value(gamma: FloatArray) -> FloatArray:
        i_d, i_q = currents_at(drive, np.asarray(current), gamma)
        psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
        # cos phi = (psi_d i_q - psi_q i_d) / (|psi| |i|), derived: u = j omega psi
        return np.asarray((psi_d * i_q - psi_q * i_d) / (np.hypot(psi_d, psi_q) * current))

    gamma = best_angles(value, np.array([low]), np.array([high]))
    return float(value(gamma[:, None])[0, 0]), float(gamma[0])


def _ray_torque(drive: Terminals, current: FloatArray, gamma: FloatArray) -> FloatArray:
    """Torque in N m, NaN where the current is."""
    known = np.where(np.isnan(current), 0.0, current)
    found = shaft_torque(drive, *currents_at(drive, known, gamma))
    return np.where(np.isnan(current), np.nan, found)
