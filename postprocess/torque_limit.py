"""The greatest torque at each speed within the current and the voltage limit.

    most torque per ampere at the current limit          up to base speed,
    where the current circle meets the voltage limit     beyond it,
    most torque per volt at the voltage limit            where that needs less than the limit

(derived). Each is a root in a bracket.
Axes: n_speed speeds.
"""

import math
from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .brackets import BoolArray, roots
from .control_curves import (
    circle_angles,
    least_voltage,
    most_per_ampere,
    square_voltage_at_nodes,
)
from .terminals import (
    Terminals,
    shaft_torque,
    square_voltage,
    square_voltage_slopes,
    terminal_linkages,
    torque_slopes,
)
from .torque_lines import AROUND, TorqueLines, greatest_torque, number, value_at_nodes

NEAR = 1e-9  # of torque, current and voltage: how exactly a limit is met
LIMIT_TOL = 1e-11  # of most torque per volt: its points must meet the voltage within `NEAR`
TORQUES = 48  # tried for the bracket of most torque at a voltage


@dataclass(frozen=True, slots=True, eq=False)
class TorqueLimit:
    """The greatest torque at each speed, nan where not even zero torque can be held."""

    omega_e: FloatArray  # (n_speed,), electrical rad/s
    torque: FloatArray  # (n_speed,), N m
    i_d: FloatArray  # (n_speed,), A
    i_q: FloatArray  # (n_speed,), A
    is_per_volt: BoolArray  # (n_speed,), whether most torque per volt sets it


def torque_limit(lines: TorqueLines, omega_e: FloatArray) -> TorqueLimit:
    """The greatest torque at speeds in electrical rad/s (n_speed,), 0 and above."""
    drive = lines.drive
    i_d, i_q = _most_on_circle(drive, omega_e)
    torque = np.where(np.isfinite(i_d), shaft_torque(drive, number(i_d), number(i_q)), np.nan)
    is_per_volt = np.zeros(omega_e.shape, dtype=np.bool_)
    # At and below base speed nothing gives more than most torque per ampere.
    best = most_per_ampere(drive, np.array([drive.current_limit])).torque[0]
    beyond = np.flatnonzero(~(torque >= best * (1.0 - NEAR)))
    if beyond.size:
        per_volt, by_d, by_q = _most_per_volt(lines, omega_e[beyond])
        is_free = np.hypot(by_d, by_q) <= drive.current_limit * (1.0 + NEAR)
        for values, free in ((torque, per_volt), (i_d, by_d), (i_q, by_q)):
            values[beyond[is_free]] = free[is_free]
        is_per_volt[beyond] = is_free
    return TorqueLimit(omega_e, torque, i_d, i_q, is_per_volt)


def _most_on_circle(drive: Terminals, omega_e: FloatArray) -> tuple[FloatArray, FloatArray]:
    """i_d, i_q in A (n_speed,) of most torque on the current circle within the voltage."""
    amplitude = drive.current_limit
    best = most_per_ampere(drive, np.array([amplitude]))
    angle = circle_angles(drive, amplitude)
    angle = np.sort(np.append(angle, math.atan2(best.i_q[0], drive.side * best.i_d[0])))
    i_d, i_q = drive.side * amplitude * np.cos(angle), amplitude * np.sin(angle)
    torque = shaft_torque(drive, i_d, i_q)
    psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
    speed = omega_e[:, None]
    square = (drive.resistance * i_d - speed * psi_q) ** 2
    square += (drive.resistance * i_q + speed * psi_d) ** 2
    is_within = (square <= drive.voltage_limit**2 * (1.0 + NEAR)) & (torque >= 0.0)
    node = np.argmax(np.where(is_within, torque, -np.inf), axis=1)
    before, after = np.maximum(node - 1, 0), np.minimum(node + 1, angle.size - 1)
    # The neighbour with more torque is beyond the voltage limit, or there is none.
    other = np.where(torque[after] > torque[before], after, before)

    def excess(at: FloatArray) -> FloatArray:
        currents = drive.side * amplitude * np.cos(at), amplitude * np.sin(at)
        return square_voltage(drive, *currents, omega_e) - drive.voltage_limit**2

    met = roots(excess, angle[node], angle[other])
    gained = shaft_torque(
        drive, drive.side * amplitude * np.cos(number(met)), amplitude * np.sin(number(met))
    )
    has_more = np.isfinite(met) & (gained > torque[node])
    chosen = np.where(has_more, met, angle[node])
    chosen = np.where(is_within.any(axis=1), chosen, np.nan)
    return drive.side * amplitude * np.cos(chosen), amplitude * np.sin(chosen)


def _most_per_volt(
    lines: TorqueLines, omega_e: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Most torque within the voltage, whatever the current, and its i_d, i_q (n_speed,).

    nan where not even zero torque is within it.
    """
    drive = lines.drive
    most, top = drive.voltage_limit**2, greatest_torque(lines) * (1.0 - NEAR)
    i_d, i_q = _locus_at_limit(lines, omega_e, *_i_q_bracket(lines, omega_e, top))
    torque = shaft_torque(drive, number(i_d), number(i_q))
    is_missed = ~np.isfinite(i_d)
    if is_missed.any():
        # The map ends before the voltage does, or zero torque is beyond it, or the table misled.
        speed = omega_e[is_missed]

        def excess(torque: FloatArray) -> FloatArray:
            point = least_voltage(lines, torque, speed)
            found = square_voltage(drive, number(point.i_d), number(point.i_q), speed)
            return np.where(np.isfinite(point.i_d), found - most, np.nan)

        none, whole = np.zeros(speed.shape), np.full(speed.shape, top)
        found = roots(excess, none, whole, LIMIT_TOL)
        ends = np.where(excess(none) > 0.0, np.nan, top)
        found = np.where(np.isfinite(found), found, ends)
        point = least_voltage(lines, number(found), speed)
        torque[is_missed] = found
        i_d[is_missed] = np.where(np.isfinite(found), point.i_d, np.nan)
        i_q[is_missed] = np.where(np.isfinite(found), point.i_q, np.nan)
    return torque, i_d, i_q


def _i_q_bracket(
    lines: TorqueLines, omega_e: FloatArray, top: float
) -> tuple[FloatArray, FloatArray]:
    """Between which i_q (n_speed,) most torque per volt meets the voltage limit, by the table."""
    # Towards zero in equal ratios: at many times base speed the torque is small.
    tried = np.concatenate([[0.0], top * np.geomspace(1e-4, 1.0, TORQUES)])
    torque, speed = np.broadcast_arrays(tried, omega_e[:, None])
    square = value_at_nodes(lines, torque, square_voltage_at_nodes(lines.drive, speed))
    last = np.sum(square.min(axis=-1) <= lines.drive.voltage_limit**2, axis=1) - 1
    rows, nodes = np.arange(omega_e.size), np.argmin(square, axis=-1)
    near = np.stack([nodes[rows, np.clip(last + k, 0, TORQUES)] for k in (-1, 0, 1, 2)])
    final = lines.i_q.size - 1
    low, high = np.maximum(near.min(axis=0) - AROUND, 0), near.max(axis=0) + AROUND
    return lines.i_q[low], lines.i_q[np.minimum(high, final)]


def _locus_at_limit(
    lines: TorqueLines, omega_e: FloatArray, low: FloatArray, high: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """i_d, i_q in A (n_speed,) of most torque per volt at the voltage limit; nan outside."""
    drive = lines.drive
    most = drive.voltage_limit**2

    def on_locus(i_q: FloatArray) -> tuple[FloatArray, FloatArray]:
        def along(amount: FloatArray) -> FloatArray:
            i_d = drive.side * amount
            t_d, t_q = torque_slopes(drive, i_d, i_q)
            v_d, v_q = square_voltage_slopes(drive, i_d, i_q, omega_e)
            return drive.side * (v_q * t_d - v_d * t_q)

        none = np.zeros(i_q.shape)
        amount = roots(along, none, np.interp(i_q, lines.i_q, lines.ends))
        return drive.side * amount, along(none)

    def excess(i_q: FloatArray) -> FloatArray:
        i_d, at_zero = on_locus(i_q)
        found = square_voltage(drive, number(i_d), i_q, omega_e) - most
        # Where magnets outweigh i_q the locus has not begun, elsewhere it has left the map.
        return np.where(np.isfinite(i_d), found, np.where(at_zero > 0.0, most, -most))

    i_q = roots(excess, low, high)
    i_d = on_locus(number(i_q))[0]
    is_met = np.abs(excess(number(i_q))) < 1e-6 * most
    is_met &= np.isfinite(i_q) & np.isfinite(i_d)
    return np.where(is_met, i_d, np.nan), np.where(is_met, i_q, np.nan)
