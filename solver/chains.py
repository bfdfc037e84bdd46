"""Operating points in a row, each started from the ones before.

The rotor's part of a solution is carried with the rotor. Where three points lie on one straight
line in (i_d, i_q, position) the last two solutions are extrapolated: fully along a line of
currents (44 instead of 48 steps for 12 points), by half where the rotor turns, as the teeth make
the field waver (steps a point at 0.5 and 1 degree: none 3.2, 4.5; half 3.0, 4.1; full 3.3, 5.6,
measured on 24 slots). Chains are independent of one another: give each worker its own.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from .field import MagneticModel, PointEnergy, at_position, solve_point
from .integrals import dq_values, phase_currents
from .types import FieldSolution, FloatArray

ON_LINE_TOL = 1e-6  # of the step between points
LONGEST_REACH = 2.0  # times the last step; farther out the straight line is no better
TURNING_SHARE = 0.5  # of the extrapolation where the rotor turns, see above


@dataclass(frozen=True, slots=True)
class OperatingPoint:
    """Peak dq currents in A and the rotor's position in rad (mechanical)."""

    i_d: float
    i_q: float
    position: float


def solve_chain(
    model: MagneticModel,
    points: Sequence[OperatingPoint],
    on_done: Callable[[int, FieldSolution], None] | None = None,
    start: FieldSolution | None = None,
) -> tuple[FieldSolution, ...]:
    """Fields of all points, in their order.

    Args:
        model: the machine.
        points: neighbours should differ little; order them so.
        on_done: called with the index and the solution of every point as it is done.
        start: a solution near the first point; without one the chain begins from zero.

    Raises:
        NotConverged: when Newton's iteration fails at a point.
    """
    solutions: list[FieldSolution] = []
    for k, point in enumerate(points):
        near = _start(solutions, points[:k], point) if solutions else start
        solution = solve_point(model, point.i_d, point.i_q, point.position, near)
        solutions.append(solution)
        if on_done is not None:
            on_done(k, solution)
    return tuple(solutions)


def linkage_slope(
    model: MagneticModel, solution: FieldSolution, di_d: float, di_q: float
) -> tuple[float, float]:
    """Changes of psi_d and psi_q in V s for small changes of the currents at a fixed position.

    Exact for the discrete field: one solve with the tangent at the solution. Source: derived,
    K da = dload.

    Args:
        model: of the solution.
        solution: converged.
        di_d: change of i_d in A.
        di_q: change of i_q in A.
    """
    theta_e = model.sector.pole_pairs * solution.position
    currents = phase_currents(solution.i_d, solution.i_q, theta_e)
    place = at_position(model, solution.position)
    energy = PointEnergy(model, place, currents @ model.linkage + model.magnet.load)
    nodal = np.concatenate([solution.a_rotor, solution.a_stator])
    _, state = energy.residual(nodal[model.representative])
    change = energy.solve_tangent(state, phase_currents(di_d, di_q, theta_e) @ model.linkage)
    per_machine = model.sector.sectors * model.stack_length
    return dq_values(per_machine * (model.linkage @ change), theta_e)


def fanned(
    positions: Sequence[float], solved: Sequence[float]
) -> tuple[tuple[int, tuple[int, ...]], ...]:
    """Chains over positions that lead away from positions already solved, both ways.

    Args:
        positions: rising, rad.
        solved: likewise.

    Returns:
        For each chain the number of the solved position that it starts from and the numbers of
        its positions in order; the longest chain first.
    """
    at, known = np.asarray(positions), np.asarray(solved)
    nearest = np.argmin(np.abs(at[:, None] - known), axis=1)
    chains = []
    for k, start in enumerate(known):
        own = np.flatnonzero(nearest == k)
        ahead, behind = own[at[own] >= start], own[at[own] < start][::-1]
        chains += [(k, tuple(way.tolist())) for way in (ahead, behind) if way.size]
    return tuple(sorted(chains, key=lambda chain: -len(chain[1])))


def _start(
    solutions: Sequence[FieldSolution], before: Sequence[OperatingPoint], point: OperatingPoint
) -> FieldSolution:
    last = solutions[-1]
    if len(solutions) == 1:
        return last
    reach = _reach(_vector(before[-2]), _vector(before[-1]), _vector(point))
    if reach == 0.0:
        return last
    first = solutions[-2]
    return replace(
        last,
        a_rotor=last.a_rotor + reach * (last.a_rotor - first.a_rotor),
        a_stator=last.a_stator + reach * (last.a_stator - first.a_stator),
    )


def _reach(first: FloatArray, last: FloatArray, point: FloatArray) -> float:
    """By how many of the last steps to extrapolate; 0 off the line."""
    step, ahead = last - first, point - last
    length = float(step @ step)
    if length == 0.0:
        return 0.0
    reach = float(ahead @ step) / length
    is_on_line = float(np.abs(ahead - reach * step).max()) <= ON_LINE_TOL * float(length**0.5)
    if not is_on_line or not 0.0 < reach <= LONGEST_REACH:
        return 0.0
    return reach if step[2] == 0.0 else TURNING_SHARE * reach


def _vector(point: OperatingPoint) -> FloatArray:
    return np.array([point.i_d, point.i_q, point.position])
