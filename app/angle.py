"""The current angle of most torque of a machine, from fields at the fewest rotor positions."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.skew import skew_offsets
from lamwright.postprocess.magnet_angle import best_magnet_angle, motoring_base
from lamwright.postprocess.operating import (
    AngleSettings,
    TurnedLinkage,
    best_angle,
    dq_currents,
    mean_linkage_slope,
    search_positions,
)
from lamwright.postprocess.skew import step_point, turned_back
from lamwright.solver.chains import OperatingPoint, linkage_slope
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.types import FieldSolution

USUAL_ANGLES = 2  # tried, for the share done


@dataclass(frozen=True, slots=True, eq=False)
class AngleFound:
    """The currents of most torque, and the fields solved on the way to them."""

    gamma: float  # rad
    i_d: float  # A
    i_q: float
    # At the last angle tried: for each step of the rotor, one for each search position.
    last: tuple[tuple[FieldSolution, ...], ...]
    fields: tuple[FieldSolution, ...]


def most_torque(
    model: MagneticModel,
    design: MachineDesign,
    on_done: Callable[[float], None],
    close: float = AngleSettings().close,
) -> AngleFound:
    """Currents of most torque at rated current, by the linkages' mean over a few positions.

    Args:
        model: of the design.
        design: its poles, slots and rated current count.
        on_done: called with the share done, 0 to 1, after each field.
        close: rad, `AngleSettings.close`: the wider, the less well the torques are known.
    """
    pole_pairs, current = design.pole_pairs, design.duty.rated_current_a
    offsets = skew_offsets(design)
    # Of each step all positions, then those of the next.
    places = [
        (float(position), offset)
        for offset in offsets
        for position in search_positions(pole_pairs, design.stator.slots)
    ]
    fields: list[FieldSolution] = []

    def torque_of(gamma: float) -> tuple[float, float]:
        i_d, i_q = dq_currents(current, gamma)
        before = fields[-len(places) :]
        linkages = []
        for k, (position, offset) in enumerate(places):
            point = step_point(OperatingPoint(i_d, i_q, position), offset, pole_pairs)
            # Started at the same position with the currents before; at first beside it.
            start = before[k] if before else fields[-1] if fields else None
            field = solve_point(model, point.i_d, point.i_q, point.position, start)
            # d i_d/d gamma = -i_q, d i_q/d gamma = i_d at constant current
            slopes = linkage_slope(model, field, -point.i_q, point.i_d)
            back = -pole_pairs * offset
            linkages.append(
                (*turned_back(field.psi_d, field.psi_q, back), *turned_back(*slopes, back))
            )
            fields.append(field)
            on_done(min(1.0, len(fields) / (USUAL_ANGLES * len(places))))
        mean = TurnedLinkage(*np.mean(linkages, axis=0).tolist())
        return mean_linkage_slope(pole_pairs, current, gamma, mean)

    if model.magnet.still_energy > 0.0:
        bare = solve_point(model, 0.0, 0.0, places[0][0])
        gamma = best_magnet_angle(torque_of, motoring_base(bare.psi_q), close).gamma
    else:
        gamma = best_angle(torque_of, AngleSettings(close=close)).gamma
    i_d, i_q = dq_currents(current, gamma)
    last, count = fields[-len(places) :], len(places) // len(offsets)
    by_step = tuple(tuple(last[at : at + count]) for at in range(0, len(last), count))
    return AngleFound(gamma, i_d, i_q, by_step, tuple(fields))
