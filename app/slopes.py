"""What every length and angle of a design is worth: one field and one stress, no sweep.

The current angle is searched as for the verdict. At the angle found the adjoint gives the slopes
of the linkages at each of 15 positions, and of the ribs' peak at overspeed; each key then costs a
dot product with the motion of the outline. Processor time on the demonstration design with 24
slots, 25 keys: 5 s.
"""

import math
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import click

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import Machine
from lamwright.geometry.remedies import value_of
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import winding_table
from lamwright.postprocess.figures_slopes import write_slopes
from lamwright.postprocess.files import json_text, prepared_folder, staged
from lamwright.postprocess.skew import step_point, turned_back
from lamwright.postprocess.slopes import (
    SHAPE_FIGURES,
    KeySlope,
    SlopeTable,
    key_slope,
    ranked,
    shape_figures,
    slopes_csv,
    slopes_record,
)
from lamwright.postprocess.torque import waveform_positions
from lamwright.postprocess.verdict import RPM
from lamwright.solver.adjoint_field import (
    OutlineSlope,
    linkage_slopes,
    mean_of,
    on_outline,
    turned_forth,
)
from lamwright.solver.adjoint_stress import PeakSlope, peak_slope, spinning_pole
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.design_motion import (
    PartMotion,
    draw_lamination,
    draw_rotor,
    draw_stator,
    magnet_turns,
    part_motion,
    shape_keys,
    size_motion,
)
from lamwright.solver.field import MagneticModel
from lamwright.solver.mesh import mesh_section
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.rotor_stress import elastic_material, rotor_stress
from lamwright.solver.types import FieldSolution, FloatArray

from .angle import most_torque
from .lamination import section_of
from .point import model_of, read_machine

JSON_FILE, CSV_FILE = "slopes.json", "slopes.csv"
MAGNETS_LOAD = "the magnets' load is not in the rib stress: of the spin alone, as in the verdict"
# Of the fields that are differentiated: an adjoint sees the residual that is left.
TOLERANCE = 1e-8
# Over 60 electrical degrees, every second one of the verdict's. A barrier's end shifts the slot
# ripple, so slopes ask for more positions than means do: against 30 the torque's slopes by end
# angles were off by 100 % with the search's 3 positions, by 14 % with 5, by 4 % with 7 or 10, by
# 0.6 % with 15 (of 2 % of the largest at least; two demonstration designs).
POSITIONS = 15


def slopes(path: str | Path, out: str | Path) -> SlopeTable:
    """Slopes of the design in the file `path`; table and tornado go to the folder `out`.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault.
        LamwrightError: the folder cannot be written.
        NotConverged: an iteration did not end; with its history.
    """
    machine = read_machine(path)
    section = section_of(machine)
    folder = prepared_folder(Path(out))
    table = slopes_of(machine, section)
    with staged(folder) as stage:
        write_text(stage / CSV_FILE, slopes_csv(table))
        write_text(stage / JSON_FILE, json_text(slopes_record(table)))
        write_slopes(stage, table)
    return table


def slopes_of(machine: Machine, section: CrossSection) -> SlopeTable:
    """The table of a machine whose pole is drawn.

    Raises:
        NotConverged: an iteration did not end; with its history.
    """
    design = machine.design
    sector = mesh_section(section)
    model = model_of(machine, section, sector)
    (i_d, i_q), fields = loaded_fields(model, design)
    rotor = part_motion(sector.rotor, design, draw_rotor)
    stator = part_motion(sector.stator, design, draw_stator)
    linkages = mean_slopes(model, section, design, fields, (rotor, stator))
    bare: OutlineSlope | None = None
    if machine.magnet is not None:
        still = _still_fields(model, design)
        bare = mean_slopes(model, section, design, still, (rotor, stator))[1]
    bare_psi_q = 0.0 if bare is None else bare.value
    lamination, peak, peak_on_outline = _peak(machine, section)
    at = shape_figures(
        design.pole_pairs,
        i_d,
        i_q,
        psi_d=linkages[0].value,
        psi_q=linkages[1].value,
        rib_peak=peak.peak,
        bare_psi_q=bare_psi_q,
    )
    rows: list[KeySlope] = []
    left_out: list[str] = [] if bare is None else [MAGNETS_LOAD]
    for key in shape_keys(design):
        try:
            moves = [part.velocity(design, key) for part in (rotor, stator, lamination)]
        except ValueError as reason:
            left_out.append(str(reason))
            continue
        sizes = size_motion(design, key)
        turns = None if bare is None else magnet_turns(design, key)
        by_key = {
            "psi_d": linkages[0].by_key(moves[0], moves[1], sizes, turns),
            "psi_q": linkages[1].by_key(moves[0], moves[1], sizes, turns),
            "rib_peak": float((peak_on_outline * moves[2]).sum()),
        }
        if bare is not None:
            by_key["bare_psi_q"] = bare.by_key(moves[0], moves[1], sizes, turns)
        value = value_of(design, key)
        rows.append(key_slope(key, value, design.pole_pairs, (i_d, i_q), at, by_key, bare_psi_q))
    return SlopeTable(design.name, i_d, i_q, at, peak.bias, ranked(rows), tuple(left_out))


def loaded_fields(
    model: MagneticModel, design: MachineDesign
) -> tuple[tuple[float, float], tuple[tuple[FieldSolution, ...], ...]]:
    """Currents of most torque, and the fields of each step of the rotor at all positions.

    Slopes are means over the positions and, of a skewed rotor, over its steps.
    """
    found = most_torque(model, design, lambda share: None)
    starts = [last[0] for last in found.last]
    return (found.i_d, found.i_q), _fields(model, design, (found.i_d, found.i_q), starts)


def _still_fields(
    model: MagneticModel, design: MachineDesign
) -> tuple[tuple[FieldSolution, ...], ...]:
    """The same without current, of a machine with magnets."""
    return _fields(model, design, (0.0, 0.0), [None] * len(skew_offsets(design)))


def _fields(
    model: MagneticModel,
    design: MachineDesign,
    currents: tuple[float, float],
    starts: Sequence[FieldSolution | None],
) -> tuple[tuple[FieldSolution, ...], ...]:
    """Fields of each step of the rotor at all positions, solved tightly."""
    tight = replace(model.settings, newton=NewtonSettings(tolerance=TOLERANCE))
    positions = waveform_positions(design.pole_pairs, POSITIONS)
    points = [OperatingPoint(*currents, float(position)) for position in positions]
    return tuple(
        solve_chain(
            replace(model, settings=tight),
            [step_point(point, offset, design.pole_pairs) for point in points],
            start=start,
        )
        for offset, start in zip(skew_offsets(design), starts, strict=True)
    )


def mean_of_fields(
    design: MachineDesign, fields: Sequence[Sequence[FieldSolution]]
) -> tuple[float, float]:
    """Mean psi_d and psi_q in V s over steps and positions of `loaded_fields`."""
    pairs = [
        turned_back(field.psi_d, field.psi_q, -design.pole_pairs * offset)
        for offset, step in zip(skew_offsets(design), fields, strict=True)
        for field in step
    ]
    d, q = zip(*pairs, strict=True)
    return sum(d) / len(d), sum(q) / len(q)


def mean_slopes(
    model: MagneticModel,
    section: CrossSection,
    design: MachineDesign,
    fields: Sequence[Sequence[FieldSolution]],
    parts: tuple[PartMotion, PartMotion],
) -> tuple[OutlineSlope, OutlineSlope]:
    """Slopes of the mean psi_d and psi_q over steps and positions of the fields."""
    winding = winding_table(design)
    both = [
        turned_forth(linkage_slopes(model, section, winding, field), design.pole_pairs * offset)
        for offset, step in zip(skew_offsets(design), fields, strict=True)
        for field in step
    ]
    d, q = (on_outline(mean_of([pair[axis] for pair in both]), *parts) for axis in (0, 1))
    return d, q


def _peak(machine: Machine, section: CrossSection) -> tuple[PartMotion, PeakSlope, FloatArray]:
    """The lamination's motion, the ribs' peak at overspeed, and its slope on the outline.

    The slope is scaled from the smoothed peak to the largest itself.
    """
    design, card = machine.design, machine.rotor_steel
    speed = design.duty.overspeed_factor * design.duty.maximum_speed_rpm / RPM
    solution = rotor_stress(section, card, speed)
    pole = spinning_pole(section, solution.mesh, elastic_material(card), speed)
    peak = peak_slope(pole, solution.displacement)
    motion = part_motion(solution.mesh, design, draw_lamination)
    return motion, peak, motion.extension.gathered(peak.slope) / (1.0 + peak.bias)


def print_slopes(table: SlopeTable, folder: str) -> None:
    """The table as plain text: values, then changes in percent, those of the torque ranked."""
    names = [how.label for how in SHAPE_FIGURES.values()]
    click.echo(table.design_name)
    for name, (key, value) in zip(names, table.figures.shown().items(), strict=True):
        click.echo(f"  {name:<22}  {value:.5g}  ({key})")
    keys = [f"{row.key} = {row.value:g}" for row in table.rows]
    left = max(map(len, keys), default=0)
    click.echo(f"change in % per step  {'':<{max(0, left - 12)}}{'step':>8}" + _heads())
    for key, row in zip(keys, table.rows, strict=True):
        percents = [row.percent(name, table.figures) for name in SHAPE_FIGURES]
        numbers = "".join(f"{_rounded(percent):>11}" for percent in percents)
        click.echo(f"  {key:<{left}}  {row.step:>4g} {row.unit:<3}{numbers}")
    for reason in table.left_out:
        click.echo(f"left out: {reason}")
    click.echo(f"at {table.i_d:.4g} A d and {table.i_q:.4g} A q, the angle held; files in {folder}")


def _heads() -> str:
    return "".join(f"{name:>11}" for name in ("torque", "saliency", "rib stress", "psi_d", "psi_q"))


def _rounded(percent: float) -> str:
    return "0" if percent == 0.0 or math.isclose(percent, 0.0, abs_tol=5e-6) else f"{percent:+.3g}"
