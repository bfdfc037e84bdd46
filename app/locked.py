"""What a test bench measures on a locked rotor: one design to one folder, on all cores.

The angles are cut into runs of neighbours, each with all currents; a run starts anew, so results do
not depend on who did it. A skewed rotor's steps stand at other angles under the same currents: the
whole is the mean of the curve at those.
"""

import math
import time
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import click
import numpy as np

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import end_winding_inductance
from lamwright.postprocess.files import json_text, prepared_folder, staged
from lamwright.postprocess.locked import (
    DEGREE,
    Feed,
    LockedCurves,
    feed_of,
    locked_angles,
    locked_cautions,
    locked_figures,
    parsed_currents,
)
from lamwright.postprocess.locked_measured import (
    MEASURED,
    Comparison,
    compared,
    has_measured,
    read_measured,
)
from lamwright.postprocess.locked_tables import comparison_csv, locked_csv, locked_record
from lamwright.postprocess.quantities import figures_of
from lamwright.solver.types import FloatArray

from .lamination import section_of
from .lines import number
from .point import read_machine
from .pool import Crew, spare_cores
from .progress import Progress, silent
from .run import MOST_WORKERS
from .version import version

if TYPE_CHECKING:
    from lamwright.solver.tolerance import ToleranceName

    from .bench import Bench

CSV_FILE, JSON_FILE, COMPARISON_FILE = "locked.csv", "locked.json", "locked_comparison.csv"
RUN = 10  # angles of a run; a fresh start costs what three angles do


@dataclass(frozen=True, slots=True, eq=False)
class LockedRotor:
    """The curves and the measured values beside them."""

    curves: LockedCurves
    comparisons: tuple[Comparison, ...]


def locked(
    path: str | Path,
    out: str | Path,
    currents: str,
    feed: str = "one-and-two",
    step_deg: float | None = None,
    measured: Path | None = None,
    zero_deg: float = 0.0,
    progress: Progress = silent,
    tolerance: "ToleranceName" = "normal",
) -> LockedRotor:
    """Curves of the design in the file `path`; table, record and picture go to the folder `out`.

    Args:
        path: design file.
        out: folder, made where it is missing.
        currents: direct currents in A, separated by commas.
        feed: one of `postprocess.locked.FEEDS`.
        step_deg: most between two angles, mechanical degrees; 2 electrical ones by default.
        measured: table with measured values to lay beside.
        zero_deg: its angles' reading with the d axis on the feed's axis.
        progress: called with the phase and the share done.
        tolerance: how fine to mesh.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault.
        LamwrightError: a bad current, step or table, or the folder cannot be written.
        NotConverged: an iteration did not end; with its history.
    """
    values = parsed_currents(currents)
    machine = read_machine(path)
    section = section_of(machine)
    # Magnets change sign from pole to pole.
    period = section.rotor_period if machine.magnet is None else math.lcm(2, section.rotor_period)
    angles = locked_angles(section.pole_pairs, period, step_deg)
    if not math.isfinite(zero_deg):
        raise LamwrightError(f"--zero-deg {zero_deg}: not a finite number; accepted any finite one")
    # A bad table is told before the minutes that the fields take.
    found = () if measured is None else read_measured(measured, values, zero_deg)
    folder = prepared_folder(Path(out))
    _refuse_to_lose(folder / CSV_FILE, measured)
    curves = locked_curves(machine, section, feed_of(feed), angles, values, progress, tolerance)
    comparisons = tuple(compared(curves, one) for one in found)
    with staged(folder) as stage:
        from lamwright.postprocess.figures_locked import write_locked

        progress("pictures", 0.95)
        write_text(stage / CSV_FILE, locked_csv(curves, comparisons))
        if comparisons:
            write_text(stage / COMPARISON_FILE, comparison_csv(curves, comparisons))
        mark = design_hash(machine.design, machine.cards)
        record = locked_record(curves, comparisons, version(), mark)
        write_text(stage / JSON_FILE, json_text(record))
        write_locked(stage, curves, comparisons)
    return LockedRotor(curves, comparisons)


def locked_curves(
    machine: Machine,
    section: CrossSection,
    feed: Feed,
    angles: tuple[float, ...],
    currents: tuple[float, ...],
    progress: Progress = silent,
    tolerance: "ToleranceName" = "normal",
) -> LockedCurves:
    """Curves over `angles` (mechanical rad) of one period, at `currents` in A, shared by a crew."""
    began = time.perf_counter()
    progress("start", 0.0)
    offsets = skew_offsets(machine.design)
    runs = [angles[k : k + RUN] for k in range(0, len(angles), RUN)]
    with Crew(make_bench, min(spare_cores(), MOST_WORKERS, len(offsets) * len(runs) - 1)) as crew:
        from lamwright.solver.mesh import mesh_section
        from lamwright.solver.tolerance import tolerance_settings

        from .bench import Bench
        from .point import model_of

        progress("mesh", 0.02)
        sector = mesh_section(section, tolerance_settings(tolerance)[0])
        crew.everywhere(Bench.take_model, model_of(machine, section, sector))
        tasks = [
            partial(_readings, feed, tuple(angle + offset for angle in run), (0.0, *currents))
            for offset in offsets
            for run in runs
        ]
        progress("rotor angles", 0.05)
        done = crew.share(
            tasks, lambda count: progress("rotor angles", 0.05 + 0.9 * count / len(tasks))
        )
    steps = np.split(np.concatenate(done), len(offsets))
    torque, linkage, slope, coenergy = np.mean(steps, axis=0).transpose(2, 1, 0)
    return LockedCurves(
        design_name=machine.design.name,
        feed=feed,
        pole_pairs=section.pole_pairs,
        poles_in_period=round(len(angles) * (angles[1] - angles[0]) / section.pole_angle),
        currents=np.array(currents),
        angle=np.array(angles),
        torque=torque[1:],
        linkage=linkage[1:] - linkage[0],
        slope=slope[1:],
        bare_slope=slope[0],
        coenergy=coenergy[1:],
        end_inductance=end_winding_inductance(machine.design),
        skew_steps=len(offsets),
        rated_current=machine.design.duty.rated_current_a,
        seconds=time.perf_counter() - began,
    )


def make_bench() -> "Bench":
    """An empty bench; what it needs is imported where it is made."""
    from .bench import Bench

    return Bench()


def _readings(
    feed: Feed, angles: tuple[float, ...], currents: tuple[float, ...], bench: "Bench"
) -> FloatArray:
    return bench.readings(feed, angles, currents)


def _refuse_to_lose(table: Path, measured: Path | None) -> None:
    """A table that somebody has filled in is written over only with its own values in it."""
    if measured is not None and table.exists() and measured.resolve() == table.resolve():
        return
    if has_measured(table):
        raise LamwrightError(
            f"--out {table.parent}: {table.name} there holds measured values; accepted with"
            f" --measured {table}, or another folder"
        )


def print_locked(found: LockedRotor, folder: str) -> None:
    """Figures of each current, how far measured values lie off, cautions, and the folder."""
    curves = found.curves
    step = curves.period / len(curves.angle) / DEGREE
    click.echo(
        f"{curves.design_name}: locked rotor, feed {curves.feed.name}, {len(curves.angle)} angles,"
        f" {step:.4g} deg apart; inductances of a phase"
    )
    rows = [list(figures_of(one)) for one in locked_figures(curves)]
    left = max(len(figure.label) for figure in rows[0])
    for figures in zip(*rows, strict=True):
        about = "~" if figures[0].is_estimate else " "
        cells = "".join(f"{about + number(figure.value):>12}" for figure in figures)
        click.echo(f"  {figures[0].label:<{left}}{cells}  {figures[0].unit}")
    for one in found.comparisons:
        name, unit, factor = MEASURED[one.measured.column]
        worst = float(one.difference[one.worst]) / factor
        at = f" at {one.measured.current:g} A" if one.measured.current else ""
        click.echo(
            f"measured {name}{at}, {len(one.measured.value)} values:"
            f" {number(one.rms / factor)} {unit} rms off, {worst:+.4g} {unit} at most, at"
            f" {one.measured.angle[one.worst] / DEGREE:.4g} deg"
        )
    for line in locked_cautions(curves):
        click.echo(f"- {line}")
    click.echo(f"files: {folder}")
