"""Curves and tables of a drive as CSV, with a unit in every header, and for netCDF and C.

Empty cells are points that a limit forbids, or figures that a point has not got: no power factor
without current, no pull-out ratio without torque.
"""

import math
from collections.abc import Mapping, Sequence

import numpy as np

from lamwright.solver.types import FloatArray

from .c_header import CArray, CHeader
from .control import Control, volt_torques
from .control_curves import ControlCurve, volt_curve
from .control_tables import ControlTable
from .files import csv_text
from .inverse_map import InverseMap
from .netcdf import Variable
from .quantities import RPM
from .terminals import voltages
from .torque_lines import torque_lines

DEGREE = math.pi / 180.0
LINE_RMS = math.sqrt(1.5)  # V rms between lines of a star connection per V peak of a phase


def curve_csv(curve: ControlCurve) -> str:
    """One row for each point of a curve."""
    return _csv(_curve(curve))


def _curve(curve: ControlCurve) -> dict[str, FloatArray]:
    return {
        "current_a": curve.amplitude,
        "gamma_el_deg": curve.gamma / DEGREE,
        "i_d_a": curve.i_d,
        "i_q_a": curve.i_q,
        "psi_d_vs": curve.psi_d,
        "psi_q_vs": curve.psi_q,
        "psi_stator_vs": np.hypot(curve.psi_d, curve.psi_q),
        "torque_nm": curve.torque,
    }


def volt_speeds_csv(control: Control, speeds: Sequence[float]) -> str:
    """Most torque per volt with resistance: a row for each speed (rad/s, mechanical) and point."""
    drive, lines = control.drive, torque_lines(control.drive)
    pole_pairs = drive.surface.pole_pairs
    tables = []
    for speed in speeds:
        curve = volt_curve(lines, volt_torques(control.per_ampere), pole_pairs * speed)
        volts = np.hypot(*voltages(drive, curve.i_d, curve.i_q, np.asarray(pole_pairs * speed)))
        still = {"speed_rpm": np.full(curve.i_d.shape, speed * RPM)}
        tables.append({**still, **_curve(curve), "voltage_line_rms_v": volts * LINE_RMS})
    return _csv({key: np.concatenate([table[key] for table in tables]) for key in tables[0]})


def planning_csv(table: ControlTable, pole_pairs: int) -> str:
    """One row for each torque and speed, reachable or not."""
    points, values = table.points, table.values
    speed = np.broadcast_to(table.omega_e / pole_pairs * RPM, points.torque.shape)
    columns = {
        "torque_nm": points.torque,
        "speed_rpm": speed,
        "reachable": points.is_reachable,
        "i_d_a": points.i_d,
        "i_q_a": points.i_q,
        "current_a": np.hypot(points.i_d, points.i_q),
        "gamma_el_deg": np.arctan2(points.i_q, points.i_d) / DEGREE,
        "voltage_line_rms_v": values.voltage * LINE_RMS,
        "power_factor": values.power_factor,
        "psi_stator_vs": values.linkage,
        "load_angle_el_deg": values.load_angle / DEGREE,
        "pull_out_ratio": values.pull_out,
        "pull_out_is_lower_bound": values.is_bound,
        "field_weakening": points.is_weakened,
    }
    columns["gamma_el_deg"] = np.where(columns["current_a"] > 0.0, columns["gamma_el_deg"], np.nan)
    return _csv(columns)


def inverse_csv(inverse: InverseMap) -> str:
    """One row for each pair of linkages; empty currents lie outside the flux map."""
    psi_d, psi_q = np.meshgrid(inverse.psi_d, inverse.psi_q, indexing="ij")
    columns = {
        "psi_d_vs": psi_d,
        "psi_q_vs": psi_q,
        "inside": np.isfinite(inverse.i_d),
        "i_d_a": inverse.i_d,
        "i_q_a": inverse.i_q,
    }
    return _csv(columns)


def _csv(columns: Mapping[str, FloatArray]) -> str:
    flat = [np.ravel(values) for values in columns.values()]
    return csv_text(
        list(columns), [[_cell(value) for value in row] for row in zip(*flat, strict=True)]
    )


def _cell(value: float) -> str:
    if isinstance(value, np.bool_):
        return str(int(value))
    # What rounding leaves of zero is zero.
    return "" if math.isnan(value) else f"{0.0 if abs(value) < 1e-12 else value:.9g}"


def control_variables(control: Control) -> tuple[Variable, ...]:
    """Everything as labelled arrays in SI units, axes first."""
    p = control.drive.surface.pole_pairs
    plan, read, inverse = control.planning, control.reading, control.inverse
    grid, drive, psi = ("torque", "speed"), ("share", "drive_speed"), ("psi_d", "psi_q")
    found = [
        Variable("torque", ("torque",), plan.axis, "N m", "torque asked for"),
        Variable("speed", ("speed",), plan.omega_e / p, "rad s-1", "mechanical speed"),
        Variable("share", ("share",), read.axis, "1", "torque over the torque limit"),
        Variable("drive_speed", ("drive_speed",), read.omega_e / p, "rad s-1", "mechanical speed"),
        Variable("psi_d", ("psi_d",), inverse.psi_d, "V s", "d-axis linkage, with end winding"),
        Variable("psi_q", ("psi_q",), inverse.psi_q, "V s", "q-axis linkage, with end winding"),
        Variable("inverse_i_d", psi, inverse.i_d, "A", "d-axis current of linkages"),
        Variable("inverse_i_q", psi, inverse.i_q, "A", "q-axis current of linkages"),
        Variable("torque_limit", ("speed",), plan.limit.torque, "N m", "greatest torque"),
        Variable(
            "drive_torque_limit", ("drive_speed",), read.limit.torque, "N m", "greatest torque"
        ),
        *_table_variables("", grid, plan),
        *_table_variables("drive_", drive, read),
    ]
    for name, said, curve in _curves(control):
        axis = f"{name}_current"
        found.append(Variable(axis, (axis,), curve.amplitude, "A", f"peak current, {said}"))
        for key, values, unit in (
            ("i_d", curve.i_d, "A"),
            ("i_q", curve.i_q, "A"),
            ("psi_d", curve.psi_d, "V s"),
            ("psi_q", curve.psi_q, "V s"),
            ("torque", curve.torque, "N m"),
        ):
            found.append(Variable(f"{name}_{key}", (axis,), values, unit, f"{key}, {said}"))
    return tuple(found)


def _table_variables(prefix: str, axes: tuple[str, str], table: ControlTable) -> list[Variable]:
    points, values = table.points, table.values
    rows = (
        ("reachable", points.is_reachable.astype(float), "1", "1 where both limits allow it"),
        ("i_d", points.i_d, "A", "d-axis current, peak"),
        ("i_q", points.i_q, "A", "q-axis current, peak"),
        ("voltage", values.voltage, "V", "voltage, peak of a phase"),
        ("power_factor", values.power_factor, "1", "power factor of the fundamental"),
        ("psi_stator", values.linkage, "V s", "amount of stator flux linkage"),
        ("load_angle", values.load_angle, "rad", "electrical angle of it from the d axis"),
        ("pull_out_ratio", values.pull_out, "1", "torque at pull-out over torque, constant flux"),
        ("pull_out_is_bound", values.is_bound.astype(float), "1", "1 where it is a lower bound"),
    )
    return [Variable(f"{prefix}{key}", axes, array, unit, name) for key, array, unit, name in rows]


def _curves(control: Control) -> Sequence[tuple[str, str, ControlCurve]]:
    return (
        ("per_ampere", "most torque per ampere", control.per_ampere),
        ("per_volt", "most torque per volt, no resistance", control.per_volt),
    )


def _volt_arrays(control: Control) -> list[CArray]:
    """Most torque per volt; none where the map holds no point of it, as C has no empty arrays."""
    volt = control.per_volt
    if not volt.i_d.size:
        return []
    linkage = np.hypot(volt.psi_d, volt.psi_q)
    return [
        CArray("volt_psi", "flux", linkage, "most torque per volt: stator flux linkage"),
        CArray("volt_i_d", "current", volt.i_d, "most torque per volt: d-axis current"),
        CArray("volt_i_q", "current", volt.i_q, "most torque per volt: q-axis current"),
        CArray("volt_torque", "torque", volt.torque, "most torque per volt: torque"),
    ]


def drive_header(control: Control, design_name: str, text: Sequence[str]) -> CHeader:
    """The drive's table, both curves and the inverse map for C.

    Args:
        control: of the drive.
        design_name: free text.
        text: paragraphs of the comment at the head.
    """
    table, curve, inverse = control.reading, control.per_ampere, control.inverse
    volt = control.per_volt
    pole_pairs = control.drive.surface.pole_pairs
    n_torque, n_speed = table.points.torque.shape
    constants = (
        ("POLE_PAIRS", str(pole_pairs), "pole pairs"),
        ("TORQUE_NODES", str(n_torque), "rows of the table"),
        ("SPEED_NODES", str(n_speed), "columns of the table"),
        ("AMPERE_NODES", str(curve.i_d.size), "points of most torque per ampere"),
        ("VOLT_NODES", str(volt.i_d.size), "points of most torque per volt"),
        ("PSI_D_NODES", str(inverse.psi_d.size), "rows of the inverse map"),
        ("PSI_Q_NODES", str(inverse.psi_q.size), "columns of the inverse map"),
        ("CURRENT_LIMIT_A", f"{control.drive.current_limit:.6e}", "A, peak"),
        ("VOLTAGE_LIMIT_V", f"{control.drive.voltage_limit:.6e}", "V, peak of a phase"),
    )
    units = {
        "share": "no unit",
        "speed": "rad/s mechanical",
        "torque": "N m",
        "current": "A peak",
        "flux": "V s peak",
    }
    where = "[share][speed]"
    arrays = (
        CArray("speed", "speed", table.omega_e / pole_pairs, "speeds of the table, equal steps"),
        CArray("share", "share", table.axis, "shares of the torque limit, growing as squares"),
        CArray("torque_limit", "torque", table.limit.torque, "greatest torque at each speed"),
        CArray("i_d", "current", table.points.i_d, f"d-axis current {where}"),
        CArray("i_q", "current", table.points.i_q, f"q-axis current {where}"),
        CArray("psi", "flux", table.values.linkage, f"amount of stator flux linkage {where}"),
        CArray("ampere_current", "current", curve.amplitude, "most torque per ampere: amplitude"),
        CArray("ampere_i_d", "current", curve.i_d, "most torque per ampere: d-axis current"),
        CArray("ampere_i_q", "current", curve.i_q, "most torque per ampere: q-axis current"),
        CArray("ampere_torque", "torque", curve.torque, "most torque per ampere: torque"),
        *_volt_arrays(control),
        CArray("psi_d", "flux", inverse.psi_d, "d-axis linkages of the inverse map"),
        CArray("psi_q", "flux", inverse.psi_q, "q-axis linkages of the inverse map"),
        CArray("inverse_i_d", "current", inverse.i_d, "d-axis current [psi_d][psi_q]"),
        CArray("inverse_i_q", "current", inverse.i_q, "q-axis current [psi_d][psi_q]"),
        CArray(
            "inverse_valid",
            "",
            np.isfinite(inverse.i_d),
            "whether the node lies on the flux map; use no cell with a 0 at a corner",
        ),
    )
    return CHeader(design_name, tuple(text), constants, units, arrays)
