"""Modes of rotor and stator lamination against the orders of speed, slots and field."""

from functools import partial
from pathlib import Path

from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.modal_tables import (
    Speeds,
    meetings_csv,
    modal_cautions,
    modal_columns,
    modal_errors,
    modal_figures,
    modes_csv,
)
from lamwright.postprocess.quantities import RPM
from lamwright.postprocess.resonances import Lamination, orders_of
from lamwright.solver.estimate_mesh import SparseRows
from lamwright.solver.modal import Period, lowest_modes
from lamwright.solver.modal_bodies import finer_rotor, finer_stator, rotor_period, stator_period
from lamwright.solver.modal_error import frequency_errors
from lamwright.solver.rotor_stress import elastic_material

from .ribbed import Ribbed, RibChapter

MODES = 8  # of each lamination


def modal_chapter(ribbed: Ribbed, stage: Path) -> RibChapter:
    """Lowest modes, `modes.csv`, `mode_speeds.csv` and their picture."""
    machine = ribbed.machine
    laminations = _laminations(ribbed)
    duty = machine.design.duty
    speeds = Speeds(duty.rated_speed_rpm / RPM, ribbed.maximum_speed, ribbed.overspeed)
    write_text(stage / "modes.csv", modes_csv(laminations, speeds))
    write_text(stage / "mode_speeds.csv", meetings_csv(laminations, speeds))
    if ribbed.pictures:
        from lamwright.postprocess.figures import write_figure
        from lamwright.postprocess.figures_modal import modal_figure

        compose = partial(modal_figure, machine.design.name, laminations, speeds)
        write_figure(stage, "modes", compose)
    return RibChapter(
        figures=modal_figures(laminations, speeds),
        cautions=modal_cautions(laminations, speeds),
        not_given=_not_given(ribbed),
        errors=modal_errors(laminations, speeds),
        table_errors=modal_columns(laminations, speeds),
    )


def _laminations(ribbed: Ribbed) -> tuple[Lamination, Lamination, Lamination]:
    section, machine = ribbed.section, ribbed.machine
    material = elastic_material(machine.rotor_steel)
    mesh = ribbed.stress.solution.mesh
    free, held = (
        rotor_period(section, mesh, material, is_held=is_held) for is_held in (False, True)
    )
    of_stator = elastic_material(machine.stator_steel), ribbed.wishes.teeth_mass_factor or 1.0
    stator = stator_period(section, *of_stator)
    return (
        _lamination(
            ribbed,
            ("rotor_free", "rotor, bore free"),
            free,
            finer_rotor(section, free, material, is_held=False),
        ),
        _lamination(
            ribbed,
            ("rotor_held", "rotor, bore held"),
            held,
            finer_rotor(section, held, material, is_held=True),
        ),
        _lamination(
            ribbed, ("stator", "stator"), stator, finer_stator(section, stator, *of_stator)
        ),
    )


def _lamination(
    ribbed: Ribbed, names: tuple[str, str], period: Period, finer: tuple[Period, SparseRows]
) -> Lamination:
    modes = lowest_modes(period, MODES)
    return Lamination(
        key=names[0],
        name=names[1],
        period=period,
        modes=modes,
        orders=orders_of(ribbed.section, is_stator=names[0] == "stator"),
        sectors=ribbed.section.sectors,
        errors=frequency_errors(*finer, modes),
    )


def _not_given(ribbed: Ribbed) -> tuple[str, ...]:
    lines = ["stiffening of the modes by speed: left out, frequencies are those at rest"]
    if ribbed.wishes.teeth_mass_factor is None:
        lines.append(
            "winding in the stator's modes: needs its mass, --teeth-mass-factor; they are of bare"
            " iron"
        )
    if ribbed.machine.magnet is not None:
        lines.append("magnets in the rotor's modes: their mass is left out")
    return tuple(lines)
