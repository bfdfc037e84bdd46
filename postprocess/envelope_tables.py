"""Envelope, efficiency and voltage run as CSV, units in the headers; not reached is empty."""

import math

import numpy as np

from lamwright.solver.types import FloatArray

from .efficiency import KnownLosses, LoadPoints
from .envelope import REGION_NAMES, Envelope, Region
from .files import csv_text
from .quantities import RPM
from .voltage_run import VoltageRun

DEGREE = math.pi / 180.0
LINE = math.sqrt(1.5)  # rms between lines over the peak of a phase, in star


def envelope_csv(found: Envelope) -> str:
    """One row for each speed."""
    columns = {
        "speed_rpm": RPM * found.speed,
        "torque_nm": found.torque,
        "power_w": found.power,
        "current_peak_a": found.current,
        "current_angle_deg": found.gamma / DEGREE,
        "i_d_a": found.i_d,
        "i_q_a": found.i_q,
        "line_voltage_rms_v": LINE * found.voltage,
        "power_factor": found.power_factor,
    }
    names = [REGION_NAMES[Region(int(region))] for region in found.region]
    rows = [
        [*(_text(value) for value in row), name]
        for row, name in zip(zip(*columns.values(), strict=True), names, strict=True)
    ]
    return csv_text([*columns, "limit"], rows)


def efficiency_csv(
    speed: FloatArray,
    torque: FloatArray,
    least_loss: LoadPoints,
    least_current: LoadPoints,
    losses: KnownLosses,
) -> str:
    """One row for each speed and shaft torque; losses that are not given stay empty.

    Args:
        speed: (n,) rad/s asked for; `torque` (n,) in N m likewise.
        torque: see `speed`.
        least_loss: (n,) points of least loss.
        least_current: (n,) points of least current.
        losses: what is known of them.
    """
    nothing = np.full(speed.shape, np.nan)
    has_iron, has_friction = losses.iron is not None, losses.friction is not None
    columns = {
        "speed_rpm": RPM * speed,
        "torque_nm": torque,
        "efficiency_percent": 100.0 * least_loss.efficiency,
        "input_w": least_loss.input,
        "copper_loss_w": least_loss.copper,
        "stator_iron_loss_w": least_loss.stator_iron if has_iron else nothing,
        "rotor_iron_loss_w": least_loss.rotor_iron if has_iron else nothing,
        "friction_loss_w": least_loss.friction if has_friction else nothing,
        "i_d_a": least_loss.i_d,
        "i_q_a": least_loss.i_q,
        "efficiency_least_current_percent": 100.0 * least_current.efficiency,
        "i_d_least_current_a": least_current.i_d,
        "i_q_least_current_a": least_current.i_q,
    }
    rows = [[_text(value) for value in row] for row in zip(*columns.values(), strict=True)]
    return csv_text(list(columns), rows)


def voltage_run_csv(run: VoltageRun, pole_pairs: int) -> str:
    """One row for each time kept."""
    columns = {
        "time_s": run.time,
        "i_d_a": run.i_d,
        "i_q_a": run.i_q,
        "torque_nm": run.torque,
        "speed_rpm": RPM * run.omega_e / pole_pairs,
        "stored_j": run.stored,
        "supplied_j": run.supplied,
        "copper_j": run.copper,
        "iron_j": run.iron,
        "shaft_j": run.shaft,
    }
    rows = [[_text(value) for value in row] for row in zip(*columns.values(), strict=True)]
    return csv_text(list(columns), rows)


def _text(value: float) -> str:
    return f"{value:.7g}" if math.isfinite(value) else ""
