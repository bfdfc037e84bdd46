"""The current angle of most torque of a machine, from fields at the fewest rotor positions."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.postprocess.magnet_angle import best_magnet_angle, motoring_base
from lamwright.postprocess.operating import (
    TurnedLinkage,
    best_angle,
    dq_currents,
    mean_linkage_slope,
    search_positions,
)
from lamwright.solver.chains import linkage_slope
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.types import FieldSolution

USUAL_ANGLES = 2  # tried, for the share done


@dataclass(frozen=True, slots=True, eq=False)
class AngleFound:
    """The currents of most torque, and the fields solved on the way to them."""

    gamma: float  # rad
    i_d: float  # A
    i_q: float
    last: tuple[FieldSolution, ...]  # at the last angle tried, one for each search position
    fields: tuple[FieldSolution, ...]


def most_torque(
    model: MagneticModel, design: MachineDesign, on_done: Callable[[float], None]
) -> AngleFound:
    """Currents of most torque at rated current, by the linkages' mean over a few positions.

    Args:
        model: of the design.
        design: its poles, slots and rated current count.
        on_done: called with the share done, 0 to 1, after each field.
    """
    pole_pairs, current = design.pole_pairs, design.duty.rated_current_a
    positions = search_positions(pole_pairs, design.stator.slots)
    fields: list[FieldSolution] = []

    def torque_of(gamma: float) -> tuple[float, float]:
        i_d, i_q = dq_currents(current, gamma)
        before = fields[-len(positions) :]
        linkages = []
        for k, position in enumerate(positions):
            # Started at the same position with the currents before; at first beside it.
            start = before[k] if before else fields[-1] if fields else None
            field = solve_point(model, i_d, i_q, float(position), start)
            # d i_d/d gamma = -i_q, d i_q/d gamma = i_d at constant current
            slopes = linkage_slope(model, field, -i_q, i_d)
            linkages.append((field.psi_d, field.psi_q, *slopes))
            fields.append(field)
            on_done(min(1.0, len(fields) / (USUAL_ANGLES * len(positions))))
        mean = TurnedLinkage(*np.mean(linkages, axis=0).tolist())
        return mean_linkage_slope(pole_pairs, current, gamma, mean)

    if model.magnet.still_energy > 0.0:
        bare = solve_point(model, 0.0, 0.0, float(positions[0]))
        gamma = best_magnet_angle(torque_of, motoring_base(bare.psi_q)).gamma
    else:
        gamma = best_angle(torque_of).gamma
    i_d, i_q = dq_currents(current, gamma)
    return AngleFound(gamma, i_d, i_q, tuple(fields[-len(positions) :]), tuple(fields))
