"""The chapter of `map` on control: curves, tables, inverse map and C header for the drive engineer.

Limits: `duty.most_current_a`, peak; `duty.supply_voltage_v` between lines of a star connection;
speeds up to `duty.maximum_speed_rpm`.
"""

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import design_hash
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import end_winding_inductance, phase_resistance
from lamwright.postprocess.c_header import c_header_text
from lamwright.postprocess.control import Control, control_of
from lamwright.postprocess.control_figures import (
    curve_figures,
    pull_out_figures,
    reading_figures,
)
from lamwright.postprocess.control_files import (
    LINE_RMS,
    control_variables,
    curve_csv,
    drive_header,
    inverse_csv,
    planning_csv,
    volt_speeds_csv,
)
from lamwright.postprocess.figures_control import write_control
from lamwright.postprocess.netcdf import write_netcdf
from lamwright.postprocess.quantities import RPM
from lamwright.postprocess.shifted_surface import shift_errors, with_angle
from lamwright.postprocess.terminals import Terminals, terminals

from .chapter import Chapter
from .mapped import Mapped
from .version import version

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

ANGLES = ("gamma_at_current_limit_el_deg",)
OF_SURFACE = "not estimated row by row: of the map's linkages, see rated_psi_d_vs, rated_psi_q_vs"
TABLE_FILE, INVERSE_FILE = "control_table.csv", "inverse_map.csv"
AMPERE_FILE, VOLT_FILE = "most_torque_per_ampere.csv", "most_torque_per_volt.csv"
VOLT_SPEEDS_FILE = "most_torque_per_volt_speeds.csv"
VOLT_SPEEDS = (0.25, 0.5, 0.75, 1.0)  # of the maximum speed, beside rated speed
NETCDF_FILE, HEADER_FILE = "control.nc", "control.h"


def control_chapter(mapped: Mapped, stage: Path) -> Chapter:
    """Figures of the curves and of the drive's table; files and a picture go to `stage`."""
    design, wishes = mapped.machine.design, mapped.control
    duty, pole_pairs = design.duty, mapped.section.pole_pairs
    try:
        drive = terminals(
            mapped.surface,
            resistance=phase_resistance(design),
            end_inductance=end_winding_inductance(design),
            current_limit=duty.most_current_a,
            line_voltage=duty.supply_voltage_v,
        )
        most_speed = duty.maximum_speed_rpm / RPM * pole_pairs
        control = control_of(drive, most_speed, wishes.table_size, wishes.number_format)
    except LamwrightError as error:
        return Chapter((), not_given=(f"control curves and tables: {error}",))
    write_text(stage / TABLE_FILE, planning_csv(control.planning, pole_pairs))
    write_text(stage / INVERSE_FILE, inverse_csv(control.inverse))
    write_text(stage / AMPERE_FILE, curve_csv(control.per_ampere))
    write_text(stage / VOLT_FILE, curve_csv(control.per_volt))
    shares = {share * duty.maximum_speed_rpm for share in VOLT_SPEEDS}
    speeds = [rpm / RPM for rpm in sorted({duty.rated_speed_rpm, *shares})]
    write_text(stage / VOLT_SPEEDS_FILE, volt_speeds_csv(control, speeds))
    cautions = control_cautions(control, duty.maximum_speed_rpm)
    header = drive_header(control, design.name, _header_text(mapped, control, cautions))
    write_text(stage / HEADER_FILE, c_header_text(header, wishes.number_format))
    write_netcdf(
        stage / NETCDF_FILE,
        control_variables(control),
        {
            "title": f"control curves and tables of {design.name}",
            "source": f"lamwright {version()}",
            "design_hash": design_hash(design, mapped.machine.cards),
            "winding_temperature_c": design.winding.temperature_c,
            "current_limit_a": drive.current_limit,
            "voltage_limit_v": drive.voltage_limit,
        },
    )
    write_control(stage, design.name, control, most_speed)
    omega_e = duty.rated_speed_rpm / RPM * pole_pairs
    figures = _figures(drive, omega_e)
    others = [_figures(replace(drive, surface=surface), omega_e) for surface in mapped.shifted]
    not_given = []
    if len(figures) == 1:
        not_given.append(
            f"pull-out at rated speed: the supply of {duty.supply_voltage_v:g} V reaches no torque"
            f" at {duty.rated_speed_rpm:g} rpm"
        )
    return Chapter(
        (*figures, reading_figures(control)),
        cautions,
        tuple(not_given),
        errors=with_angle(shift_errors(figures, others), mapped.angle_error, ANGLES),
        table_errors={
            name: {"all columns": OF_SURFACE}
            for name in (TABLE_FILE, INVERSE_FILE, AMPERE_FILE, VOLT_FILE, VOLT_SPEEDS_FILE)
        },
    )


def _figures(drive: Terminals, omega_e: float) -> "tuple[DataclassInstance, ...]":
    """Figures of the curve, and of the pull-out where the supply reaches a torque."""
    pull_out = pull_out_figures(drive, omega_e)
    return (curve_figures(drive), *(() if pull_out is None else (pull_out,)))


def control_cautions(control: Control, most_rpm: float) -> tuple[str, ...]:
    """What a drive engineer must know before using the tables, one line each."""
    drive, pole_pairs = control.drive, control.drive.surface.pole_pairs
    lines = [
        "control tables: computed from the cross-section, resistance and end winding by formula,"
        " torque at the gap with iron and friction losses not taken off; commission them on the"
        " machine with the current limited"
    ]
    last = float(control.reading.omega_e[-1]) / pole_pairs * RPM
    if last < most_rpm * (1.0 - 1e-9):
        lines.append(
            f"control tables: above {last:.0f} rpm the supply reaches no torque, so the drive's"
            f" table ends there and not at {most_rpm:.0f} rpm"
        )
    if control.per_volt.i_d.size < control.per_ampere.i_d.size:
        lines.append(
            "most torque per volt: torques whose point lies beyond the flux map are left out"
        )
    if control.planning.values.is_bound.any():
        lines.append(
            "pull-out ratios marked as lower bounds: the pull-out needs more current than the map"
            " holds"
        )
    if not drive.surface.even_d:
        lines.append(
            "control tables: the rotor is not mirror symmetric; they hold for motoring forwards"
            " alone"
        )
    return tuple(lines)


def _header_text(mapped: Mapped, control: Control, cautions: tuple[str, ...]) -> tuple[str, ...]:
    design, error = mapped.machine.design, control.error
    braking = (
        "To brake, change the sign of i_d; the voltage is then lower."
        if control.drive.surface.even_d
        else "Braking is not covered: the rotor is not mirror symmetric."
    )
    beyond = 100.0 * error.beyond_limit
    return (
        f"Currents for torque and speed of {design.name}. {design.note}".strip(),
        f"Written by lamwright {version()}; design {design_hash(design, mapped.machine.cards)}.",
        "dq currents and flux linkages are peak values, amplitude-invariant, d axis along the flux"
        " carriers, motoring positive; linkages with end winding. Winding at"
        f" {design.winding.temperature_c:g} C.",
        f"Limits: {control.drive.current_limit:g} A peak;"
        f" {control.drive.voltage_limit * LINE_RMS:g} V rms between lines, star connection.",
        "Reading: limit the speed to the axis; take torque_limit linearly in speed; share = torque"
        " / torque_limit, 0 to 1; i_d, i_q and psi bilinearly in share and speed. Every node of"
        f" the table is reachable. {braking}",
        f"Reading errs, tried at {error.places} places between the nodes with the numbers as"
        f" rounded here: torque {error.torque_most:.3g} N m at most, {error.torque_rms:.3g} N m"
        f" rms; current {error.current_most:.3g} A at most, {error.current_rms:.3g} A rms from the"
        f" least current; voltage up to {error.voltage_over * LINE_RMS:.3g} V rms over the limit"
        f" between lines; {beyond:.2g} % of the places ask for more than the true limit.",
        # Pull-out does not stand in the header.
        *(f"Caution: {line}." for line in cautions if not line.startswith("pull-out")),
    )
