"""Modes of rotor and stator lamination against the orders of speed, slots and field."""

from functools import partial
from pathlib import Path

from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.modal_tables import (
    Speeds,
    meetings_csv,
    modal_cautions,
    modal_figures,
    modes_csv,
)
from lamwright.postprocess.quantities import RPM
from lamwright.postprocess.resonances import Lamination, orders_of
from lamwright.solver.modal import lowest_modes
from lamwright.solver.modal_bodies import rotor_period, stator_period
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
    )


def _laminations(ribbed: Ribbed) -> tuple[Lamination, Lamination, Lamination]:
    section, machine = ribbed.section, ribbed.machine
    material = elastic_material(machine.rotor_steel)
    mesh = ribbed.stress.solution.mesh
    periods = [
        ("rotor_free", "rotor, bore free", rotor_period(section, mesh, material, is_held=False)),
        ("rotor_held", "rotor, bore held", rotor_period(section, mesh, material, is_held=True)),
        (
            "stator",
            "stator",
            stator_period(
                section,
                elastic_material(machine.stator_steel),
                ribbed.wishes.teeth_mass_factor or 1.0,
            ),
        ),
    ]
    free, held, stator = (
        Lamination(
            key=key,
            name=name,
            period=period,
            modes=lowest_modes(period, MODES),
            orders=orders_of(section, is_stator=key == "stator"),
            sectors=section.sectors,
        )
        for key, name, period in periods
    )
    return free, held, stator


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
