"""The chapter of `map` that lays a design beside two yardsticks at rated current.

The ideal rotor is solved by our own fields (`ideal_rotor`); the induction machine is an estimate by
its equivalent circuit (`postprocess.induction_machine`), of which only the magnetising curve is
solved. The design's own figures come from the map's surface.
"""

import math
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import phase_resistance
from lamwright.postprocess.coenergy_surface import CoenergySurface, linkages, torque
from lamwright.postprocess.figures_yardsticks import write_yardsticks
from lamwright.postprocess.induction_machine import (
    ASSUMPTIONS,
    cage_of,
    circuit_of,
    induction_point,
    torque_at_loss,
)
from lamwright.postprocess.operating import copper_loss, saliency_ratio, search_positions
from lamwright.postprocess.quantities import RPM, figures_of
from lamwright.postprocess.shifted_surface import shift_errors
from lamwright.postprocess.yardsticks import (
    DesignFigures,
    IdealFigures,
    InductionFigures,
    Yardsticks,
    yardsticks_csv,
)
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.types import FieldSolution

from .chapter import Chapter
from .desk import Desk
from .ideal_rotor import IdealRotor, ideal_rotor, round_model
from .mapped import Mapped
from .pool import Crew

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

CSV_FILE = "yardsticks.csv"
YARDSTICK = "not estimated: a yardstick, whose assumptions err by far more than its mesh"
ANGLES = 1801  # tried on the surface: 0.05 degrees, 1e-6 of the torque
# Of rated current, as magnetising current round a solid rotor; the curve between is a line.
MAGNETISING = (0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.75, 1.0)


def yardstick_chapter(mapped: Mapped, stage: Path) -> Chapter:
    """Figures of both yardsticks; `yardsticks.csv` and a picture go to `stage`."""
    machine, design = mapped.machine, mapped.machine.design
    own = design_figures(design, mapped.surface)
    model = round_model(machine, mapped.section)
    ideal: tuple[IdealFigures, ...] = ()
    not_given: list[str] = []
    if machine.magnet is None:
        shaft = mapped.section.shaft_radius
        ideal = (ideal_figures(own, ideal_rotor(design, model, shaft, mapped.crew)),)
    else:
        not_given.append("ideal rotor: it has no magnets, and the design has")
    induction: tuple[InductionFigures, ...] = ()
    found = induction_of(own, design, model, mapped.crew)
    if isinstance(found, str):
        not_given.append(f"induction machine in the same frame: {found}")
    else:
        induction = (found,)
    yardsticks = Yardsticks(design.name, own, ideal, induction, ASSUMPTIONS)
    write_text(stage / CSV_FILE, yardsticks_csv(yardsticks))
    write_yardsticks(stage, yardsticks)
    cautions = [
        "the ideal rotor is endlessly thin sheets and gaps without ribs: a yardstick, no machine"
    ] * len(ideal)
    if induction:
        cautions.append(f"the induction machine is an estimate; assumed: {'; '.join(ASSUMPTIONS)}")
    errors = shift_errors((own,), [(design_figures(design, s),) for s in mapped.shifted])
    if induction and errors:
        share = errors["yardstick_design_torque_nm"] / own.current
        errors["yardstick_design_torque_per_ampere_nm_per_a"] = share
    others: tuple[DataclassInstance, ...] = (*ideal, *induction)
    why = {item.key: YARDSTICK for group in others for item in figures_of(group)}
    return Chapter(
        (own, *ideal, *induction),
        tuple(cautions),
        tuple(not_given),
        errors=errors,
        without_error=why,
        table_errors={CSV_FILE: {"value": "each as the figure of its key"}},
    )


def design_figures(design: MachineDesign, surface: CoenergySurface) -> DesignFigures:
    """The design at rated current and its angle of most torque, from the map's surface."""
    current = design.duty.rated_current_a
    gamma = np.linspace(0.0, 0.5 * math.pi, ANGLES)
    i_d, i_q = current * np.cos(gamma), current * np.sin(gamma)
    # The ends lie on an axis, where a cosine's rounding may leave the surface.
    i_d[-1] = i_q[0] = 0.0
    values = torque(surface, i_d, i_q)
    best = int(np.argmax(values[1:-1])) + 1
    psi_d, psi_q = (
        float(v[0]) for v in linkages(surface, i_d[best : best + 1], i_q[best : best + 1])
    )
    bare = linkages(surface, np.zeros(1), np.zeros(1))[1]  # of magnets
    return DesignFigures(
        current=current,
        torque=float(values[best]),
        saliency=saliency_ratio(float(i_d[best]), float(i_q[best]), psi_d, psi_q - float(bare[0])),
        copper_loss=copper_loss(current, phase_resistance(design)),
    )


def ideal_figures(own: DesignFigures, ideal: IdealRotor) -> IdealFigures:
    """The ideal rotor's figures and the design's shares of them."""
    return IdealFigures(
        gap_share=ideal.gap_share,
        torque=ideal.torque,
        saliency=ideal.saliency,
        torque_share=own.torque / ideal.torque,
        saliency_share=own.saliency / ideal.saliency,
    )


def induction_of(
    own: DesignFigures, design: MachineDesign, model: MagneticModel, crew: Crew[Desk]
) -> InductionFigures | str:
    """The induction machine at rated current, or why it is not given."""
    cage = cage_of(design)
    if isinstance(cage, str):
        return cage
    currents = [share * own.current for share in MAGNETISING]
    positions = search_positions(design.pole_pairs, design.stator.slots).tolist()
    tasks = [partial(_magnetised, model, currents, position) for position in positions]
    linkage = np.mean(crew.share(tasks, lambda count: None), axis=0)
    circuit = circuit_of(design, cage, currents, linkage.tolist())
    limits = (design.duty.rated_speed_rpm / RPM, design.duty.supply_voltage_v)
    point = induction_point(circuit, own.current, *limits)
    if point is None:
        return "at rated speed and current no slip is within the supply voltage"
    return InductionFigures(
        torque=point.torque,
        torque_same_loss=torque_at_loss(circuit, own.current, own.copper_loss, limits),
        torque_per_ampere=point.torque / own.current,
        design_torque_per_ampere=own.torque / own.current,
        stator_loss=point.stator_copper_loss,
        rotor_loss=point.rotor_copper_loss,
        slip=point.slip,
        voltage=point.line_voltage,
        power_factor=point.power_factor,
        magnetising=point.magnetising_current,
    )


def _magnetised(
    model: MagneticModel, currents: list[float], position: float, _: Desk
) -> list[float]:
    """Linkages on the axis of the currents at one position, V s."""
    solution: FieldSolution | None = None
    found = []
    for current in currents:
        solution = solve_point(model, current, 0.0, position, solution)
        found.append(solution.psi_d)
    return found
