"""The current angle of most torque of a machine, from fields at the fewest rotor positions."""

import itertools
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.skew import skew_offsets
from lamwright.postprocess.magnet_angle import MAGNET_ANGLES, best_magnet_angle, motoring_base
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
from lamwright.solver.types import FieldSolution, FloatArray

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
    bare: FieldSolution | None  # at no current, where there are magnets


Slopes = tuple[float, float]  # of psi_d and psi_q to the angle at constant current, V s/rad
# Points, fields to start from (one for each point or none) -> fields and slopes.
Solve = Callable[
    [Sequence[OperatingPoint], Sequence[FieldSolution]], list[tuple[FieldSolution, Slopes]]
]


def solved_with_slopes(
    model: MagneticModel,
    points: Sequence[OperatingPoint],
    starts: Sequence[FieldSolution],
    on_field: Callable[[], None] = lambda: None,
) -> list[tuple[FieldSolution, Slopes]]:
    """Fields at the points and what their linkages change with the current angle.

    Each starts from its own of `starts`, or without any from the one before.
    """
    solved: list[tuple[FieldSolution, Slopes]] = []
    for k, point in enumerate(points):
        start = starts[k] if starts else solved[-1][0] if solved else None
        field = solve_point(model, point.i_d, point.i_q, point.position, start)
        # d i_d/d gamma = -i_q, d i_q/d gamma = i_d at constant current
        solved.append((field, linkage_slope(model, field, -point.i_q, point.i_d)))
        on_field()
    return solved


def most_torque(
    model: MagneticModel,
    design: MachineDesign,
    on_done: Callable[[float], None],
    close: float = AngleSettings().close,
    positions: FloatArray | None = None,
    near: float | None = None,
    solve: Solve | None = None,
) -> AngleFound:
    """Currents of most torque at rated current, by the linkages' mean over a few positions.

    Args:
        model: of the design.
        design: its poles, slots and rated current count.
        on_done: called with the share done, 0 to 1, after each field.
        close: rad, `AngleSettings.close`: the wider, the less well the torques are known.
        positions: in rad, over which the mean is taken; `search_positions` by default.
        near: an angle in rad near the best one, which is tried first and may do.
        solve: another way to have the model's fields solved, which tells of none.
    """
    pole_pairs, current = design.pole_pairs, design.duty.rated_current_a
    offsets = skew_offsets(design)
    if positions is None:
        positions = search_positions(pole_pairs, design.stator.slots)
    # Of each step all positions, then those of the next.
    places = [(float(position), offset) for offset in offsets for position in positions]
    fields: list[FieldSolution] = []
    told = itertools.count(1)

    def on_field() -> None:
        on_done(min(1.0, next(told) / (USUAL_ANGLES * len(places))))

    solved_at = solve or partial(solved_with_slopes, model, on_field=on_field)

    def torque_of(gamma: float) -> tuple[float, float]:
        i_d, i_q = dq_currents(current, gamma)
        points = [
            step_point(OperatingPoint(i_d, i_q, position), offset, pole_pairs)
            for position, offset in places
        ]
        # Started at the same position with the currents before; at first beside it.
        solved = solved_at(points, fields[-len(places) :])
        linkages = []
        for (_, offset), (field, slopes) in zip(places, solved, strict=True):
            back = -pole_pairs * offset
            linkages.append(
                (*turned_back(field.psi_d, field.psi_q, back), *turned_back(*slopes, back))
            )
            fields.append(field)
        mean = TurnedLinkage(*np.mean(linkages, axis=0).tolist())
        return mean_linkage_slope(pole_pairs, current, gamma, mean)

    bare = None
    if model.magnet.still_energy > 0.0:
        bare = solve_point(model, 0.0, 0.0, places[0][0])
        base = motoring_base(bare.psi_q)
        settings = _begun(replace(MAGNET_ANGLES, close=close), near, base)
        gamma = best_magnet_angle(torque_of, base, settings).gamma
    else:
        gamma = best_angle(torque_of, _begun(AngleSettings(close=close), near, 0.0)).gamma
    i_d, i_q = dq_currents(current, gamma)
    last, count = fields[-len(places) :], len(places) // len(offsets)
    by_step = tuple(tuple(last[at : at + count]) for at in range(0, len(last), count))
    return AngleFound(gamma, i_d, i_q, by_step, tuple(fields), bare)


def _begun(settings: AngleSettings, near: float | None, base: float) -> AngleSettings:
    return settings if near is None else replace(settings, first=near - base, least_angles=1)
