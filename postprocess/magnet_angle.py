"""The current angle of most torque of a machine with magnets.

Mirroring a pole about its q axis turns i_d into -i_d and the torque round, so torque over the
current angle is odd about 90 degrees: a sum of cos gamma, sin 2 gamma, cos 3 gamma, sin 4 gamma ...
(derived). A linear machine has the first two only, magnet and reluctance torque, and is met from
one angle; the values and slopes of the two best angles give all four. The search runs over both
signs of i_q, since a strong magnet or saturation may bring the best angle below zero. Outward
magnets give the same torque half a turn further on, which is where they are looked for.
"""

import math
from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from .operating import (
    DEGREE,
    GRID,
    AngleSearch,
    AngleSettings,
    best_angle,
    chosen_angles,
    kept_conditions,
    uphill,
)

MAGNET_ANGLES = AngleSettings(first=42.0 * DEGREE, least=-60.0 * DEGREE, most=88.0 * DEGREE)


def motoring_base(no_load_psi_q: float) -> float:
    """Angle in rad that the search counts from: 0 for inward magnets, pi for outward ones.

    Args:
        no_load_psi_q: V s, negative for inward magnets.
    """
    return math.pi if no_load_psi_q > 0.0 else 0.0


def best_magnet_angle(
    torque_of: Callable[[float], tuple[float, float]],
    base: float,
    settings: AngleSettings = MAGNET_ANGLES,
) -> AngleSearch:
    """The current angle of most torque at constant current.

    Args:
        torque_of: current angle in rad -> mean torque in N m and its slope in N m/rad.
        base: of `motoring_base`.
        settings: angles counted from the base.

    Raises:
        NotConverged: the prediction still moves after `most_angles` angles, or rests at a bound.
        LamwrightError: no motoring torque.
    """
    found = best_angle(lambda gamma: torque_of(base + gamma), settings, predicted_angle)
    return replace(
        found, gamma=base + found.gamma, tried=tuple(base + gamma for gamma in found.tried)
    )


def predicted_angle(
    tried: Sequence[float], values: Sequence[tuple[float, float]], use: AngleSettings
) -> float:
    """Maximum of the torque's series through the one or two best angles."""
    chosen = chosen_angles(tried, values, use)
    gamma = np.array([tried[k] for k in chosen])
    torque, slope = np.array([values[k] for k in chosen]).T
    kept = kept_conditions(gamma, use)
    order = np.arange(1, kept.size + 1)
    # cos, sin, cos, sin ... of gamma, 2 gamma, 3 gamma, 4 gamma ...
    shift = np.where(order % 2 == 1, 0.0, -0.5 * math.pi)
    rows = np.cos(np.outer(gamma, order) + shift)
    slopes = -order * np.sin(np.outer(gamma, order) + shift)
    conditions, right = np.concatenate([rows, slopes]), np.concatenate([torque, slope])
    series = np.linalg.solve(conditions[kept], right[kept])
    low, high = uphill(tried, values, chosen, use, 2.0)
    grid = np.arange(low, high, GRID)
    return float(grid[np.argmax(np.cos(np.outer(grid, order) + shift) @ series)])
