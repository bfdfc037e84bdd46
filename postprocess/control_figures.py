"""Figures of a drive's curves and tables, for the screen and `map.json`."""

import math
from dataclasses import dataclass, field

import numpy as np

from .control import Control
from .control_curves import most_per_ampere
from .control_files import DEGREE, LINE_RMS
from .control_points import control_points
from .control_tables import point_values
from .pull_out import pull_out_curve
from .quantities import CHECK, STATED, shown_as, shown_estimate
from .terminals import Terminals
from .torque_limit import torque_limit
from .torque_lines import torque_lines


@dataclass(frozen=True, slots=True, kw_only=True)
class CurveFigures:
    """Most torque per ampere at the current limit."""

    current: float = field(
        metadata=shown_as("current_limit_a", "current limit, peak", "A", exact=STATED)
    )
    torque: float = field(
        metadata=shown_as("torque_at_current_limit_nm", "torque at the current limit", "N m")
    )
    gamma: float = field(
        metadata=shown_as(
            "gamma_at_current_limit_el_deg", "its current angle", "el deg", 1.0 / DEGREE
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class PullOutFigures:
    """The stator flux at the most torque of rated speed; voltages are by formula."""

    torque: float = field(
        metadata=shown_estimate("torque_most_rated_speed_nm", "most torque at rated speed", "N m")
    )
    load_angle: float = field(
        metadata=shown_estimate(
            "load_angle_rated_speed_el_deg", "its load angle", "el deg", 1.0 / DEGREE
        )
    )
    ratio: float = field(
        metadata=shown_estimate(
            "pull_out_ratio_rated_speed", "its pull-out over torque at constant flux", ""
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadingFigures:
    """What bilinear reading of the C header's table errs by."""

    torque_most: float = field(
        metadata=shown_as(
            "table_torque_error_most_nm", "drive's table: greatest torque error", "N m", exact=CHECK
        )
    )
    torque_rms: float = field(
        metadata=shown_as(
            "table_torque_error_rms_nm", "drive's table: torque error, rms", "N m", exact=CHECK
        )
    )
    current_most: float = field(
        metadata=shown_as(
            "table_current_error_most_a", "drive's table: greatest current error", "A", exact=CHECK
        )
    )
    current_rms: float = field(
        metadata=shown_as(
            "table_current_error_rms_a", "drive's table: current error, rms", "A", exact=CHECK
        )
    )
    voltage_over: float = field(
        metadata=shown_estimate(
            "table_voltage_excess_line_rms_v",
            "drive's table: most voltage over the limit",
            "V rms",
            LINE_RMS,
            exact=CHECK,
        )
    )


def curve_figures(drive: Terminals) -> CurveFigures:
    """Figures of most torque per ampere at the current limit."""
    curve, side = most_per_ampere(drive, np.array([drive.current_limit])), drive.side
    gamma = math.atan2(float(curve.i_q[-1]), side * float(curve.i_d[-1])) * side
    return CurveFigures(
        current=drive.current_limit,
        torque=float(curve.torque[-1]),
        gamma=gamma if side > 0 else math.pi + gamma,
    )


def pull_out_figures(drive: Terminals, omega_e: float) -> PullOutFigures | None:
    """Figures at the most torque of a speed in electrical rad/s; None if there is none."""
    lines, speed = torque_lines(drive), np.array([omega_e])
    limit = torque_limit(drive, speed).torque
    if not limit[0] > 0.0:
        return None
    points = control_points(lines, limit, speed, limit)
    values = point_values(lines, pull_out_curve(lines), points)
    return PullOutFigures(
        torque=float(limit[0]),
        load_angle=float(values.load_angle[0]),
        ratio=float(values.pull_out[0]),
    )


def reading_figures(control: Control) -> ReadingFigures:
    """Figures of the reading error."""
    e = control.error
    return ReadingFigures(
        torque_most=e.torque_most,
        torque_rms=e.torque_rms,
        current_most=e.current_most,
        current_rms=e.current_rms,
        voltage_over=e.voltage_over,
    )
