"""Stators for first designs: main sizes of invented machines from 40 to 300 mm of bore."""

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import NamedTuple

import numpy as np

from lamwright.app.angle import most_torque
from lamwright.app.point import model_of
from lamwright.app.start import StartChoices, laid_out, wishes_of
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import Machine
from lamwright.geometry.first_design import FirstDesign, rotor_needs
from lamwright.geometry.first_rotor import FirstBarrier, with_barriers
from lamwright.geometry.first_rotor import laid_out as rotor_laid_out
from lamwright.geometry.first_spread import Spread
from lamwright.geometry.first_wishes import Wishes
from lamwright.geometry.rotor_checks import rotor_faults
from lamwright.postprocess.torque import ripple, torque_waveform, waveform_positions
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.mesh import mesh_section
from lamwright.solver.tolerance import tolerance_settings

POSITIONS = 30


class Stator(NamedTuple):
    """Main sizes in mm, slots, poles, rpm."""

    outer: float
    bore: float
    length: float
    slots: int
    poles: int
    speed: float

    @property
    def choices(self) -> StartChoices:
        """What `start` is told."""
        return StartChoices(
            out=Path("first.toml"),
            poles=self.poles,
            maximum_speed_rpm=self.speed,
            outer_diameter_mm=self.outer,
            bore_mm=self.bore,
            length_mm=self.length,
            slots=self.slots,
        )


# The twelve of the issue; chosen for slots, poles, bore and speed before any was solved.
STATORS = {
    "24/4": Stator(140, 82, 100, 24, 4, 6000),
    "36/4": Stator(200, 125, 150, 36, 4, 4500),
    "36/6": Stator(180, 120, 120, 36, 6, 6000),
    "48/8": Stator(260, 180, 140, 48, 8, 4000),
    "18/2": Stator(80, 40, 60, 18, 2, 12000),
    "27/6": Stator(150, 100, 90, 27, 6, 6000),
    "48/4": Stator(270, 170, 200, 48, 4, 3600),
    "54/6": Stator(320, 220, 220, 54, 6, 3000),
    "72/8": Stator(420, 300, 250, 72, 8, 1800),
    "12/4": Stator(70, 40, 50, 12, 4, 12000),
    "30/4": Stator(170, 100, 120, 30, 4, 5000),
    "60/10": Stator(380, 280, 150, 60, 10, 1500),
}


def first_of(stator: Stator, barriers: int | None = None) -> tuple[FirstDesign, Wishes]:
    """The first design of a stator, as `start` lays it out."""
    wishes = replace(wishes_of(stator.choices), barriers=barriers)
    first, _, _ = laid_out(wishes)
    return first, wishes


def evenly_spread(first: FirstDesign, wishes: Wishes) -> MachineDesign | None:
    """The same rotor with its barrier ends spread evenly, without a look at the slots.

    Evenly is at k 90/(n+1) electrical degrees from the q axis, n + 1 like parts from q to d axis;
    where the first design lies there itself or these cannot be drawn, at (k - 1/2) 90/n, the
    middles of n like parts. None where neither can be drawn.
    """
    taken = first.rotor.taken.spread
    n = taken.barriers
    for spread in (Spread(n, 4 * n + 4, is_half=False), Spread(n, 4 * n, is_half=True)):
        if not np.allclose(spread.ends, taken.ends):
            even = even_design(first, wishes, spread)
            if even is not None:
                return even
    return None


def even_design(first: FirstDesign, wishes: Wishes, spread: Spread) -> MachineDesign | None:
    """The first design with other ends; None where that cannot be drawn.

    Only the ends are moved; where that cannot be drawn, barriers and ribs are laid out anew by the
    same rules.
    """
    taken, design = first.rotor.taken, first.design
    moved = [
        one.table.model_copy(update={"end_angle_deg": float(np.degrees(end)) / design.pole_pairs})
        for one, end in zip(taken.barriers, spread.ends, strict=True)
    ]
    even = design.model_copy(update={"rotor": with_barriers(design.rotor, moved)})
    if not rotor_faults(even):
        return even
    laid = rotor_laid_out(design, rotor_needs(wishes), spread, taken.insulation)
    if isinstance(laid, str):
        return None
    return with_tables(design, laid)


def with_tables(design: MachineDesign, barriers: Sequence[FirstBarrier]) -> MachineDesign:
    """The design with barriers that were laid out."""
    tables = [one.table for one in barriers]
    return design.model_copy(update={"rotor": with_barriers(design.rotor, tables)})


def ripples(wishes: Wishes, designs: list[MachineDesign]) -> list[float]:
    """Ripple of each design at the currents of most torque of the first."""
    found, currents = [], None
    for design in designs:
        section = cross_section(design)
        machine = Machine(design, wishes.steel, wishes.steel, Path("first.toml"))
        sector = mesh_section(section, tolerance_settings("normal")[0])
        model = model_of(machine, section, sector)
        if currents is None:
            best = most_torque(model, design, lambda _: None)
            currents = (best.i_d, best.i_q)
        positions = waveform_positions(design.pole_pairs, POSITIONS).tolist()
        fields = solve_chain(model, [OperatingPoint(*currents, at) for at in positions])
        found.append(ripple(torque_waveform(fields, design.pole_pairs)))
    return found
