"""The envelope, the efficiency and a run in time of a mapped machine: tables, pictures, figures."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import end_winding_inductance, phase_resistance
from lamwright.postprocess.efficiency import (
    IronLosses,
    KnownLosses,
    LoadPoints,
    at_currents,
    load_points,
)
from lamwright.postprocess.envelope import Envelope, Region, envelope
from lamwright.postprocess.envelope_tables import efficiency_csv, envelope_csv, voltage_run_csv
from lamwright.postprocess.figure_errors import SUFFIX, lacking_errors
from lamwright.postprocess.figures_envelope import (
    EfficiencySheet,
    write_efficiency,
    write_envelope,
)
from lamwright.postprocess.landmarks import LINE, landmarks
from lamwright.postprocess.quantities import CHECK, RPM, STATED, scaled_by_key, shown_as
from lamwright.postprocess.shifted_surface import shift_errors, summed, with_angle
from lamwright.postprocess.table_errors import PLACE, Columns
from lamwright.postprocess.terminals import Terminals, terminals
from lamwright.postprocess.voltage_run import (
    Feed,
    VoltageRun,
    energy_gap,
    small_swings,
    steady_voltages,
    voltage_run,
)
from lamwright.solver.types import FloatArray

from .chapter import Chapter
from .control_chapter import OF_SURFACE
from .known_losses import known_losses
from .mapped import Mapped

if TYPE_CHECKING:
    pass

SPEEDS = 81  # of the envelope, from 0 to the maximum speed
TABLE_SPEEDS, TABLE_TORQUES = 24, 20  # of the efficiency's table
SHEET_SPEEDS, SHEET_SHARES = 45, 32  # of its picture: shares of the most torque at each speed
LEAST_SHARE, MOST_SHARE = 0.01, 0.998
CAUTIONS = (
    "envelope and efficiency: voltage and copper loss rest on resistance and end-winding leakage by"
    " formula; iron loss is not in the envelope; sinusoidal supply: a converter adds losses",
)
BEST_ANGLES = ("base_current_angle_deg", "most_power_factor_angle_deg")
FLAT = "where a flat best lies among the points of the picture: not estimated"
RAMP, MOST_PERIODS, DAMPINGS = 20.0, 80.0, 7.0  # of the run; e^-7 = 1e-3 is left of a swing


@dataclass(frozen=True, slots=True, kw_only=True)
class EfficiencyFigures:
    """The best efficiency of the map, and that at rated speed on the envelope."""

    best: float = field(
        metadata=shown_as("best_efficiency_percent", "best efficiency, of losses given", "%", 100.0)
    )
    torque: float = field(
        metadata=shown_as(
            "best_efficiency_torque_nm", "best efficiency, shaft torque", "N m", exact=FLAT
        )
    )
    speed: float = field(
        metadata=shown_as(
            "best_efficiency_speed_rpm", "best efficiency, speed", "1/min", RPM, exact=FLAT
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class RunFigures:
    """A run in time on constant voltage, from zero current to a point of the envelope."""

    speed: float = field(
        metadata=shown_as("voltage_run_speed_rpm", "voltage run, speed", "1/min", RPM, exact=STATED)
    )
    current_difference: float = field(
        metadata=shown_as(
            "voltage_run_current_difference_percent",
            "voltage run, end off the table: current",
            "%",
            100.0,
            exact=CHECK,
        )
    )
    torque_difference: float = field(
        metadata=shown_as(
            "voltage_run_torque_difference_percent",
            "voltage run, end off the table: torque",
            "%",
            100.0,
            exact=CHECK,
        )
    )
    energy_gap: float = field(
        metadata=shown_as(
            "voltage_run_energy_gap_percent",
            "voltage run, what its energies lack",
            "%",
            100.0,
            exact=CHECK,
        )
    )
    damping: float = field(
        metadata=shown_as(
            "voltage_run_damping_time_ms", "voltage run, swings die down to 1/e in", "ms", 1e3
        )
    )


def envelope_chapter(mapped: Mapped, stage: Path) -> Chapter:
    """Envelope, efficiency and voltage run; their files in `stage`."""
    design = mapped.machine.design
    top, rated = (rpm / RPM for rpm in (design.duty.maximum_speed_rpm, design.duty.rated_speed_rpm))
    try:
        drive = drive_of(mapped)
    except LamwrightError as error:
        return Chapter(figures=(), not_given=(f"envelope, efficiency, voltage run: {error}",))
    found = envelope(drive, np.linspace(0.0, top, SPEEDS))
    marks = landmarks(drive, found, rated)
    if marks.corner is not None and marks.corner.speed < top:
        # With the corner itself, so that the curves bend where they should.
        found = envelope(drive, np.union1d(found.speed, [marks.corner.speed]))
    write_text(stage / "envelope.csv", envelope_csv(found))
    generating = envelope(drive, found.speed, is_generating=True)
    write_text(stage / "envelope_generating.csv", envelope_csv(generating))
    write_envelope(stage, design.name, found, marks.corner, drive.voltage_limit)
    figures, lines = [*marks.figures], [*marks.lines]
    losses = known_losses(mapped)
    efficiency = _efficiency(stage, mapped, drive, losses, top)
    run = _run(stage, drive, losses, rated)
    shifts = [replace(drive, surface=surface) for surface in mapped.shifted]
    others = [landmarks(shift, envelope(shift, found.speed), rated).figures for shift in shifts]
    errors = with_angle(shift_errors(marks.figures, others), mapped.angle_error, BEST_ANGLES)
    for made, name in ((efficiency, "efficiency"), (run, "voltage run")):
        if isinstance(made, str):
            lines.append(f"{name}: {made}")
        else:
            figures.append(made)
    if isinstance(efficiency, EfficiencyFigures):
        errors |= _efficiency_error(drive, shifts, losses, efficiency)
    if isinstance(run, RunFigures):
        errors |= summed([_damping_error(drive, shift, rated, run) for shift in shifts])
    return Chapter(
        tuple(figures),
        CAUTIONS,
        tuple(lines),
        errors=errors,
        without_error=lacking_errors(marks.figures, errors),
        table_errors={
            "envelope.csv": _columns(found, [envelope(shift, found.speed) for shift in shifts]),
            **{
                name: {"all columns": OF_SURFACE}
                for name in ("envelope_generating.csv", "efficiency.csv", "voltage_run.csv")
            },
        },
    )


def _efficiency_error(
    drive: Terminals, shifts: Sequence[Terminals], losses: KnownLosses, best: EfficiencyFigures
) -> dict[str, float]:
    """By the linkages at the currents of the best point; its iron loss is taken as it is."""
    speed, torque = np.array([best.speed]), np.array([best.torque])
    point = load_points(drive, losses, speed, torque)
    others = [
        float(at_currents(shift, losses, speed, point.i_d, point.i_q).efficiency[0])
        for shift in shifts
    ]
    own = float(point.efficiency[0])
    if not others or not math.isfinite(own):
        return {}
    return scaled_by_key(best, {"best": sum(abs(other - own) for other in others)})


def _damping_error(
    drive: Terminals, shift: Terminals, rated: float, run: RunFigures
) -> dict[str, float]:
    table = envelope(drive, np.array([rated]))
    omega_e = drive.surface.pole_pairs * rated
    swing = small_swings(shift, float(table.i_d[0]), float(table.i_q[0]), omega_e)[0]
    return scaled_by_key(run, {"damping": abs(-1.0 / swing.real - run.damping)})


def _columns(found: Envelope, others: Sequence[Envelope]) -> Columns:
    """Errors of the columns of `envelope.csv`: the most that any row differs by."""
    scale = {
        "torque": ("torque_nm", 1.0),
        "power": ("power_w", 1.0),
        "current": ("current_peak_a", 1.0),
        "gamma": ("current_angle_deg", 180.0 / math.pi),
        "i_d": ("i_d_a", 1.0),
        "i_q": ("i_q_a", 1.0),
        "voltage": ("line_voltage_rms_v", LINE),
        "power_factor": ("power_factor", 1.0),
    }
    columns: Columns = {"speed_rpm": PLACE, "limit": "which limit rules"}
    for name, (key, unit) in scale.items():
        own = getattr(found, name)
        off = [np.abs(getattr(other, name) - own) for other in others]
        if off:
            columns[key + SUFFIX] = unit * sum(float(np.nan_to_num(one).max()) for one in off)
    return columns


def drive_of(mapped: Mapped) -> Terminals:
    """The machine behind its terminals, with the limits of its duty.

    Raises:
        LamwrightError: no current within the limit motors, or the map does not hold them all.
    """
    design, surface = mapped.machine.design, mapped.surface
    for name, (low, _) in (("i_d", surface.i_d_range), ("i_q", surface.i_q_range)):
        if low > 0.0:
            raise LamwrightError(
                f"the flux map begins at {name} = {low:g} A; accepted grids that begin at 0 A"
            )
    return terminals(
        surface,
        resistance=phase_resistance(design),
        end_inductance=end_winding_inductance(design),
        current_limit=design.duty.most_current_a,
        line_voltage=design.duty.supply_voltage_v,
    )


def _efficiency(
    stage: Path, mapped: Mapped, drive: Terminals, losses: KnownLosses, top: float
) -> EfficiencyFigures | str:
    """Table and picture of the efficiency; a line where no torque is reached."""
    sheet_speed = top * np.linspace(LEAST_SHARE, 1.0, SHEET_SPEEDS)
    most = _most_shaft_torque(drive, losses, sheet_speed)
    if not np.any(most > 0.0):
        return "no torque is left at the shaft at any speed"
    # Closer towards no torque, where the efficiency falls.
    share = LEAST_SHARE + (MOST_SHARE - LEAST_SHARE) * np.linspace(0.0, 1.0, SHEET_SHARES) ** 1.6
    torque = np.where(most > 0.0, most, np.nan)[:, None] * share
    points = _points(drive, losses, np.repeat(sheet_speed, SHEET_SHARES), torque.ravel())
    has_iron = losses.iron is not None
    sheet = EfficiencySheet(sheet_speed, torque, points, losses.missing, has_iron)
    write_efficiency(stage, mapped.machine.design.name, sheet)
    greatest = float(np.nanmax(torque))
    speed, asked = (
        axis.ravel()
        for axis in np.meshgrid(
            np.linspace(0.0, top, TABLE_SPEEDS + 1)[1:],
            np.linspace(0.0, greatest, TABLE_TORQUES + 1)[1:],
            indexing="ij",
        )
    )
    table = load_points(drive, losses, speed, asked)
    thrifty = load_points(drive, losses, speed, asked, "current")
    write_text(stage / "efficiency.csv", efficiency_csv(speed, asked, table, thrifty, losses))
    if not has_iron:
        return "its best point is not given without iron loss"
    best = int(np.nanargmax(points.efficiency))
    return EfficiencyFigures(
        best=float(points.efficiency[best]),
        torque=float(points.torque[best]),
        speed=float(points.speed[best]),
    )


def _most_shaft_torque(drive: Terminals, losses: KnownLosses, speed: FloatArray) -> FloatArray:
    """The envelope's torque (n,) in N m less the drag, NaN where nothing is reached."""
    found = envelope(drive, speed)
    return at_currents(drive, losses, speed, found.i_d, found.i_q).torque


def _points(
    drive: Terminals, losses: KnownLosses, speed: FloatArray, torque: FloatArray
) -> LoadPoints:
    """Points of least loss, NaN where the torque is."""
    is_asked = np.isfinite(torque)
    found = load_points(drive, losses, speed, np.where(is_asked, torque, 1.0))
    i_d, i_q = (np.where(is_asked, i, np.nan) for i in (found.i_d, found.i_q))
    return at_currents(drive, losses, speed, i_d, i_q)


def _run(stage: Path, drive: Terminals, losses: KnownLosses, rated: float) -> RunFigures | str:
    """A run from zero current to the envelope's point at rated speed; a line where it cannot be.

    The stator's iron loss is in where it is given, by a branch beside the emf.
    """
    table: Envelope = envelope(drive, np.array([rated]))
    if table.region[0] == Region.NONE:
        return f"no torque is reached at rated speed, {RPM * rated:.0f}/min"
    i_d, i_q = float(table.i_d[0]), float(table.i_q[0])
    omega_e = drive.surface.pole_pairs * rated
    iron = None if losses.iron is None else partial(_stator_loss, losses.iron)
    u_d, u_q = steady_voltages(drive, i_d, i_q, omega_e, iron)
    from_d, from_q = steady_voltages(drive, 0.0, 0.0, omega_e, iron)
    period = 2.0 * math.pi / omega_e
    damping = -1.0 / small_swings(drive, i_d, i_q, omega_e)[0].real
    duration = RAMP * period + min(DAMPINGS * damping, MOST_PERIODS * period)
    feed = Feed(u_d, u_q, omega_e, RAMP * period, from_d, from_q)
    try:
        run: VoltageRun = voltage_run(drive, feed, (0.0, 0.0), duration, iron)
    except LamwrightError as error:
        return str(error)
    write_text(stage / "voltage_run.csv", voltage_run_csv(run, drive.surface.pole_pairs))
    off = math.hypot(run.i_d[-1] - i_d, run.i_q[-1] - i_q) / math.hypot(i_d, i_q)
    return RunFigures(
        speed=rated,
        current_difference=off,
        torque_difference=float(run.torque[-1] / table.torque[0]) - 1.0,
        energy_gap=energy_gap(run, duration - period),
        damping=damping,
    )


def _stator_loss(losses: IronLosses, i_d: float, i_q: float, omega_e: float) -> float:
    """Iron loss of the stator in W."""
    return float(losses(np.array(i_d), np.array(i_q), np.array(omega_e))[0])
