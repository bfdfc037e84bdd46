"""Tables of currents over torque and speed, as a drive engineer plans with and as a drive reads.

Two tables of the same points. The planning table has equal steps of torque in N m, so that what a
limit forbids stays empty. The drive's table has shares of the torque limit of its speed: every node
can be reached, no cell is cut by the limit, and reading it is

    share = torque / (torque limit, linear in speed),   i_d, i_q bilinear in share and speed.

What this reading errs by is measured against the map between the nodes, by `reading_error`.
Axes: n_torque torques or shares, n_speed speeds.
"""

from dataclasses import dataclass

import numpy as np
from scipy.interpolate import RegularGridInterpolator

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.types import FloatArray

from .brackets import BoolArray
from .control_points import ControlPoints, control_points
from .pull_out import PullOutCurve, load_angle, pull_out_ratio
from .terminals import shaft_torque, square_voltage, terminal_linkages, voltages
from .torque_limit import TorqueLimit, torque_limit
from .torque_lines import TorqueLines, number

PLACES = (1.0 / 6.0, 0.5, 5.0 / 6.0)  # of a cell, where the reading is tried, along both axes
LEAST_SHARE = 1e-3  # of the torque at standstill: a limit below it is no torque to speak of


@dataclass(frozen=True, slots=True, eq=False)
class PointValues:
    """What belongs to operating points; nan where they cannot be reached."""

    linkage: FloatArray  # (n), V s, amount, end winding included
    voltage: FloatArray  # (n), V, peak of a phase
    power_factor: FloatArray  # (n), of the fundamental; nan at no current
    load_angle: FloatArray  # (n), electrical rad; nan at no flux
    pull_out: FloatArray  # (n), torque at pull-out over torque; nan at no torque
    is_bound: BoolArray  # (n), whether that is a lower bound


@dataclass(frozen=True, slots=True, eq=False)
class ControlTable:
    """Operating points on a grid."""

    axis: FloatArray  # (n_torque,), N m, or share of the limit
    omega_e: FloatArray  # (n_speed,), electrical rad/s
    limit: TorqueLimit  # (n_speed,)
    points: ControlPoints  # (n_torque, n_speed)
    values: PointValues  # (n_torque, n_speed)


@dataclass(frozen=True, slots=True)
class ReadingError:
    """What bilinear reading of the drive's table errs by between its nodes."""

    places: int  # points tried
    torque_most: float  # N m, |torque at the currents read - torque asked for|
    torque_rms: float  # N m
    current_most: float  # A, vector from the currents read to the best ones
    current_rms: float  # A
    voltage_over: float  # V, peak of a phase, greatest beyond the limit; 0 if none
    beyond_limit: float  # share of places that ask for more than the true torque limit


def speed_limits(lines: TorqueLines, most_speed: float, count: int) -> TorqueLimit:
    """The torque limits at equal steps of speed from standstill to `most_speed` (electrical rad/s).

    Raises:
        LamwrightError: at no speed the supply reaches a torque.
    """
    limit = torque_limit(lines.drive, np.linspace(0.0, most_speed, count))
    if number(limit.torque).max() <= 0.0:
        raise LamwrightError(_weak_supply(lines, "at any speed"))
    return limit


def planning_table(
    lines: TorqueLines, pull_out: PullOutCurve, limit: TorqueLimit, count: int
) -> ControlTable:
    """The table over `count` torques in N m from zero to the greatest of the limits."""
    axis = np.linspace(0.0, float(number(limit.torque).max()), count)
    return _table(lines, pull_out, axis, axis[:, None], limit)


def drive_table(
    lines: TorqueLines, pull_out: PullOutCurve, limit: TorqueLimit, count: int
) -> ControlTable:
    """The table over `count` shares of the torque limit, up to the last speed with a torque.

    Shares grow as squares, so that currents, which go with the root of the torque, change by
    equal steps: half the rms torque error of equal shares (16 x 16, law F1 and magnets).

    Raises:
        LamwrightError: above standstill the supply reaches no torque.
    """
    has_torque = number(limit.torque) > LEAST_SHARE * number(limit.torque).max()
    count_s = limit.omega_e.size
    last = count_s - 1 if has_torque.all() else int(np.argmin(has_torque)) - 1
    if last < 1:
        raise LamwrightError(_weak_supply(lines, "above standstill"))
    if last < count_s - 1:
        limit = torque_limit(lines.drive, np.linspace(0.0, float(limit.omega_e[last]), count_s))
    axis = np.linspace(0.0, 1.0, count) ** 2
    return _table(lines, pull_out, axis, axis[:, None] * limit.torque, limit)


def _weak_supply(lines: TorqueLines, where: str) -> str:
    return (
        f"voltage limit {lines.drive.voltage_limit:.4g} V (peak of a phase): the supply reaches"
        f" no torque {where} of the table; raise duty.supply_voltage_v"
    )


def _table(
    lines: TorqueLines,
    pull_out: PullOutCurve,
    axis: FloatArray,
    torque: FloatArray,
    limit: TorqueLimit,
) -> ControlTable:
    points = control_points(lines, torque, limit.omega_e, limit.torque)
    return ControlTable(axis, limit.omega_e, limit, points, point_values(lines, pull_out, points))


def point_values(lines: TorqueLines, pull_out: PullOutCurve, points: ControlPoints) -> PointValues:
    """Voltage, power factor, load angle and pull-out of operating points."""
    drive, held = lines.drive, points.is_reachable
    i_d, i_q = number(points.i_d), number(points.i_q)
    psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
    u_d, u_q = voltages(drive, i_d, i_q, points.omega_e)
    linkage, voltage, current = np.hypot(psi_d, psi_q), np.hypot(u_d, u_q), np.hypot(i_d, i_q)
    apparent = voltage * current
    factor = (u_d * i_d + u_q * i_q) / np.where(apparent > 0.0, apparent, np.nan)
    angle = np.where(linkage > 0.0, load_angle(psi_d, psi_q, drive.side), np.nan)
    ratio, is_bound = pull_out_ratio(pull_out, points.torque, linkage)

    def where_held(values: FloatArray) -> FloatArray:
        return np.where(held, values, np.nan)

    return PointValues(
        where_held(linkage),
        where_held(voltage),
        where_held(factor),
        where_held(angle),
        where_held(ratio),
        held & is_bound,
    )


def reading_error(
    lines: TorqueLines,
    table: ControlTable,
    *,
    limit: FloatArray,
    i_d: FloatArray,
    i_q: FloatArray,
) -> ReadingError:
    """What a drive errs by that reads the drive's table bilinearly, tried within every cell.

    Args:
        lines: of the drive.
        table: from `drive_table`.
        limit: N m (n_speed,), the torque limits as the drive holds them, so rounded.
        i_d: A (n_torque, n_speed), likewise; i_q too.
        i_q: see i_d.
    """
    drive = lines.drive
    share, omega_e = _within(table.axis), _within(table.omega_e)
    asked = share[:, None] * np.interp(omega_e, table.omega_e, limit)
    places = np.stack(np.meshgrid(share, omega_e, indexing="ij"), axis=-1)
    read_d, read_q = (
        RegularGridInterpolator((table.axis, table.omega_e), values)(places)
        for values in (i_d, i_q)
    )
    off = shaft_torque(drive, read_d, read_q) - asked
    over = np.sqrt(square_voltage(drive, read_d, read_q, omega_e)) - drive.voltage_limit
    true = torque_limit(drive, omega_e)
    best = control_points(lines, asked, omega_e, true.torque)
    held = best.is_reachable
    away = np.hypot(read_d - best.i_d, read_q - best.i_q)[held]
    return ReadingError(
        places=off.size,
        torque_most=float(np.abs(off).max()),
        torque_rms=_rms(off),
        current_most=float(away.max()),
        current_rms=_rms(away),
        voltage_over=max(0.0, float(over.max())),
        beyond_limit=1.0 - float(held.mean()),
    )


def _within(axis: FloatArray) -> FloatArray:
    places: FloatArray = axis[:-1, None] + np.diff(axis)[:, None] * np.array(PLACES)
    return places.ravel()


def _rms(values: FloatArray) -> float:
    return float(np.sqrt(np.mean(values**2)))
