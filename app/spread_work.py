"""Full solutions of machines as made, at the desks of a crew.

Every made machine is solved on the drawn one's meshes, moved, at the same currents (a drive knows
nothing of the rotor it got) and positions, each field from the drawn machine's at that position.
Tasks depend on none another, so results do not depend on who did what.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.geometry.winding import winding_table
from lamwright.postprocess.magnetic_pull import pulls
from lamwright.postprocess.operating import mean_linkage_torque, saliency_ratio
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.summary import magnetic_figures
from lamwright.postprocess.torque import torque_waveform, waveform_positions
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.cut_motion import MachineMotion
from lamwright.solver.eccentric import eccentric_model, solve_eccentric
from lamwright.solver.field import FieldSettings, MagneticModel, magnetic_model, solve_point
from lamwright.solver.gap_circle import circle_field
from lamwright.solver.made_machine import (
    Deviation,
    SpoiltEdges,
    made_laws,
    made_section,
    made_sector,
    made_stress,
    standing_out,
)
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.steel import reluctivity_law
from lamwright.solver.types import FieldSolution, FloatArray, PlanarMesh, SectorMesh

from .point import model_of

# As of the pull's in `ripple_work`.
WHOLE_MESH = MeshSettings(scale=2.0)
WHOLE_POSITIONS = 6  # over 60 electrical degrees
MEGA = 1e6


@dataclass(frozen=True, slots=True, eq=False)
class DrawnMachine:
    """A machine as drawn, with all that is needed to solve it as made."""

    machine: Machine
    section: CrossSection
    sector: SectorMesh
    lamination: PlanarMesh
    motions: tuple[MachineMotion, ...]
    edges: SpoiltEdges | None
    speed: float  # rad/s, overspeed
    fields: tuple[FieldSolution, ...] = ()  # to start from, at all positions


@dataclass(frozen=True, slots=True)
class EccentricEffect:
    """What a rotor beside the stator's axis changes, as shares, and the pull on it."""

    torque: float  # 1
    saliency: float  # 1
    pull: float  # N, mean over the positions


class SpreadDesk:
    """What a process keeps between made machines: the drawn one."""

    def __init__(self) -> None:
        """An empty desk."""
        self._drawn: DrawnMachine | None = None

    def take(self, drawn: DrawnMachine) -> None:
        """Keep the drawn machine."""
        self._drawn = drawn

    def figures(self, deviation: Deviation) -> FloatArray:
        """Torque, ripple, saliency, margin and growth (5,) of a made machine, in shown units."""
        assert self._drawn is not None
        return np.concatenate(
            [magnetic_values(self._drawn, deviation), elastic_values(self._drawn, deviation)]
        )

    def eccentric(
        self, machine: Machine, currents: tuple[float, float], offset: float
    ) -> EccentricEffect:
        """What an eccentric rotor changes; the whole circle is meshed for it."""
        return eccentric_effect(machine, currents, offset)


def made_model(drawn: DrawnMachine, deviation: Deviation) -> MagneticModel:
    """The magnetic model of a made machine."""
    machine, design = drawn.machine, drawn.machine.design
    # No stack holds more steel than its height.
    stacking = min(1.0, design.rotor.stacking_factor + deviation.stacking)
    rotor = reluctivity_law(machine.rotor_steel, stacking)
    stator = rotor
    if machine.stator_steel != machine.rotor_steel:
        stator = reluctivity_law(machine.stator_steel, stacking)
    laws = made_laws((rotor, stator), drawn.edges, deviation)
    settings = FieldSettings(shaft_relative_permeability=design.rotor.shaft_relative_permeability)
    return magnetic_model(
        made_sector(drawn.sector, drawn.motions, deviation.moved),
        made_section(drawn.section, drawn.motions, deviation.moved),
        winding_table(design),
        *laws,
        settings,
    )


def magnetic_values(drawn: DrawnMachine, deviation: Deviation) -> FloatArray:
    """Mean torque in N m, ripple in % and saliency (3,) of a made machine."""
    model = made_model(drawn, deviation)
    fields = [solve_point(model, near.i_d, near.i_q, near.position, near) for near in drawn.fields]
    waveform = torque_waveform(fields, drawn.section.pole_pairs)
    by_key = {figure.key: figure.value for figure in figures_of(magnetic_figures(waveform))}
    return np.array(
        [by_key[key] for key in ("torque_nm", "torque_ripple_percent", "saliency_ratio")]
    )


def elastic_values(drawn: DrawnMachine, deviation: Deviation) -> FloatArray:
    """Yield margin and growth in um (2,) of a made machine at overspeed."""
    card = drawn.machine.rotor_steel
    solution = made_stress(
        drawn.section, drawn.lamination, drawn.motions, deviation.moved, card, drawn.speed
    )
    strength = MEGA * card.yield_strength_mpa.value * deviation.yield_share
    return np.array([strength / solution.peak, MEGA * standing_out(solution)])


def drawn_fields(
    model: MagneticModel, currents: tuple[float, float], positions: int, near: FieldSolution
) -> tuple[FieldSolution, ...]:
    """Fields at the currents at all positions over 60 electrical degrees."""
    places = waveform_positions(model.sector.pole_pairs, positions).tolist()
    return solve_chain(model, [OperatingPoint(*currents, place) for place in places], start=near)


def eccentric_effect(
    machine: Machine, currents: tuple[float, float], offset: float
) -> EccentricEffect:
    """Changes of torque and saliency with the rotor's axis `offset` m off, and the pull."""
    section = cross_section(machine.design, machine.design.rotor.poles)
    model = model_of(machine, section, mesh_section(section, WHOLE_MESH))
    beside = eccentric_model(model, complex(offset))
    places = waveform_positions(section.pole_pairs, WHOLE_POSITIONS).tolist()
    centred: list[FieldSolution] = []
    moved: list[FieldSolution] = []
    circles = []
    for place in places:
        centred.append(solve_point(model, *currents, place, centred[-1] if centred else None))
        moved.append(solve_eccentric(beside, *currents, place, centred[-1]))
        circles.append(circle_field(beside.reader, moved[-1]))
    forces = pulls(beside.reader, circles, section.stack_length)
    return EccentricEffect(
        torque=_torque(moved) / _torque(centred) - 1.0,
        saliency=_saliency(moved) / _saliency(centred) - 1.0,
        pull=float(abs(np.mean(forces))),
    )


def _torque(fields: Sequence[FieldSolution]) -> float:
    # By the linkages: the two kinds of field integrate Maxwell's stress on different paths.
    pole_pairs = 1  # of a ratio
    psi_d, psi_q = ([getattr(f, n) for f in fields] for n in ("psi_d", "psi_q"))
    return mean_linkage_torque(pole_pairs, fields[0].i_d, fields[0].i_q, psi_d, psi_q)


def _saliency(fields: Sequence[FieldSolution]) -> float:
    psi_d, psi_q = (float(np.mean([getattr(f, n) for f in fields])) for n in ("psi_d", "psi_q"))
    return saliency_ratio(fields[0].i_d, fields[0].i_q, psi_d, psi_q)
