"""All that a drive needs of a machine, computed from its flux map at once."""

from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .c_numbers import NumberFormat, base_of, held
from .control_curves import ControlCurve, ampere_curve, volt_curve
from .control_tables import (
    ControlTable,
    ReadingError,
    drive_table,
    planning_table,
    reading_error,
    speed_limits,
)
from .inverse_map import InverseMap, inverse_map
from .pull_out import PullOutCurve, pull_out_curve
from .terminals import Terminals
from .torque_lines import torque_lines

VOLT_POINTS = 40
VOLT_FIRST = 0.1  # root of the least torque over the greatest of most torque per volt
INVERSE_POINTS = 25  # of each axis of the inverse map


@dataclass(frozen=True, slots=True, eq=False)
class Control:
    """Curves and tables of one drive."""

    drive: Terminals
    per_ampere: ControlCurve
    per_volt: ControlCurve  # least flux linkage, resistance left out
    inverse: InverseMap
    planning: ControlTable
    reading: ControlTable  # the drive's table
    error: ReadingError  # of the drive's table as rounded to its format
    form: NumberFormat
    current_base: float  # A, of the header in fixed point
    torque_base: float  # N m, likewise
    pull_out: PullOutCurve


def control_of(
    drive: Terminals, most_speed: float, size: tuple[int, int], form: NumberFormat
) -> Control:
    """Curves and tables up to a speed in electrical rad/s.

    Args:
        drive: the map behind its terminals.
        most_speed: electrical rad/s, above 0.
        size: torques and speeds of both tables.
        form: of the numbers that the drive holds.

    Raises:
        LamwrightError: the supply reaches no torque.
    """
    lines = torque_lines(drive)
    per_ampere, pull_out = ampere_curve(drive), pull_out_curve(lines)
    limit = speed_limits(lines, most_speed, size[1])
    planning = planning_table(lines, pull_out, limit, size[0])
    reading = drive_table(lines, pull_out, limit, size[0])
    points, inverse = reading.points, inverse_map(drive, INVERSE_POINTS)
    per_volt = volt_curve(lines, volt_torques(per_ampere), None)
    # All currents of the header share one base, and so do its torques.
    currents = [points.i_d, points.i_q, inverse.i_d, inverse.i_q, per_ampere.amplitude]
    current_base = base_of(form, *currents, per_volt.i_d, per_volt.i_q)
    torque_base = base_of(form, reading.limit.torque, per_ampere.torque, per_volt.torque)
    error = reading_error(
        lines,
        reading,
        limit=held(form, reading.limit.torque, torque_base),
        i_d=held(form, points.i_d, current_base),
        i_q=held(form, points.i_q, current_base),
    )
    return Control(
        drive,
        per_ampere,
        per_volt,
        inverse,
        planning,
        reading,
        error,
        form,
        current_base,
        torque_base,
        pull_out,
    )


def volt_torques(per_ampere: ControlCurve) -> FloatArray:
    """Torques in N m that most torque per volt is told at, up to that of the current limit.

    About equal steps of current, from where the map's nodes tell the linkage's bend.
    """
    most = float(per_ampere.torque[-1])
    return np.asarray(most * np.linspace(VOLT_FIRST, 1.0, VOLT_POINTS) ** 2)
