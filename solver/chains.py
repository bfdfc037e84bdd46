"""Operating points in a row, each started from the one before.

The rotor's part of a solution is carried with the rotor, and the change is foreseen by first-order
elements (`field.solve_point`). Chains are independent of one another: give each worker its own.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from .field import MagneticModel, at_position, solve_point, whole_energy
from .integrals import dq_values, phase_currents
from .types import FieldSolution


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
        near = solutions[-1] if solutions else start
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
    energy = whole_energy(model, place, currents @ model.linkage + model.magnet.load)
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
