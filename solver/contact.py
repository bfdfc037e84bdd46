"""Frictionless unilateral contact of bodies that are known by their compliance at the contacts.

    w = C f + g + B q,   w >= 0,  f >= 0,  f . w = 0,   B^T f = b

w are the gaps, f the forces that close them, g the gaps without forces, C the compliance of both
sides together, q rigid motions that nothing but the contacts holds and b what the forces must
balance in them. Contacts are pairs of nodes of second-order meshes that fit each other, f nodal
forces: consistent, and a constant pressure makes all of them positive (1/6, 2/3, 1/6 of an edge).
Forces and gaps are unique where forces can balance the loads at all: those of the least energy
1/2 f.C f + g.f; a motion may stay free, as of a block that rocks on one node. The primal-dual
active set finds them (Hintermueller, Ito & Kunisch, SIAM J. Optimization 13, 2002, from memory) in
a few steps, as a rule; where it does not, non-negative least squares do (Lawson & Hanson 1974, from
memory), which end after a finite number of steps. Whatever method found it, the solution is
checked.
Axes: n contacts, k rigid motions.
"""

from dataclasses import dataclass, replace

import numpy as np

from lamwright.geometry.errors import NotConverged

from .supports import BoolArray
from .types import FloatArray

MOST_STEPS = 60  # of the active set, which needs 2 to 10 where it converges at all
# Of the greatest force or gap: 1e4 times the rounding of a compliance of condition 1e4.
SIGN_TOL = 1e-8
WEIGHT = 1e4  # of a balance beside the energy in least squares; only its contacts are kept


@dataclass(frozen=True, slots=True, eq=False)
class ContactProblem:
    """What contacts answer to forces, in SI per metre of stack."""

    compliance: FloatArray  # (n, n), m^2/N, symmetric and positive definite
    gap: FloatArray  # (n,), m, without forces; negative where the bodies overlap
    motion: FloatArray  # (n, k), opening of the gaps by unit rigid motions
    load: FloatArray  # (k,), N/m, what the forces must be in these motions


@dataclass(frozen=True, slots=True, eq=False)
class ContactState:
    """Forces and gaps in equilibrium."""

    force: FloatArray  # (n,), N/m, zero where open
    gap: FloatArray  # (n,), m, zero where closed
    motion: FloatArray  # (k,), rigid motions
    closed: BoolArray  # (n,)
    history: tuple[float, ...]  # contacts that changed sides in each step


def closed_contacts(problem: ContactProblem) -> ContactState:
    """The forces that keep the bodies apart.

    Raises:
        NotConverged: where no such forces were found; nothing is known then.
    """
    # Free motions close most of the gap at once: a small force would drown in its rounding.
    shift = np.linalg.lstsq(problem.motion, problem.gap, rcond=None)[0]
    nearer = replace(problem, gap=problem.gap - problem.motion @ shift)
    state = _active_set(nearer)
    if state is None:
        state = _least_squares(nearer)
    if state is None:
        raise NotConverged(
            "contact not found: neither the active set nor least squares end at forces and gaps"
            " that are all positive",
            (float(len(problem.gap)),),
        )
    return replace(state, motion=state.motion - shift)


def _active_set(problem: ContactProblem) -> ContactState | None:
    """From all contacts closed that overlap, or all where nothing does."""
    closed = problem.gap < 0.0
    if problem.load.size or not np.any(closed):
        closed = np.ones_like(closed)
    stiffness = 1.0 / np.diag(problem.compliance)
    history: list[float] = []
    for _ in range(MOST_STEPS):
        state = _with_closed(problem, closed, history)
        if state is None:
            return None
        if _is_solution(problem, state):
            return state
        after = state.force - stiffness * state.gap > 0.0
        history.append(float(np.count_nonzero(after != closed)))
        if history[-1] == 0.0:
            return None
        closed = after
    return None


def _least_squares(problem: ContactProblem) -> ContactState | None:
    """The same by non-negative least squares, then solved with the contacts that these close."""
    from scipy.optimize import nnls

    scale = 1.0 / np.sqrt(np.diag(problem.compliance))
    try:
        root = np.linalg.cholesky(problem.compliance * np.outer(scale, scale))
        rows = [root.T]
        right = [-np.linalg.solve(root, scale * problem.gap)]
        if problem.load.size:
            motion = problem.motion * scale[:, None]
            size = np.maximum(np.abs(motion).max(axis=0), 1e-300)
            rows.append(WEIGHT * (motion / size).T)
            right.append(WEIGHT * problem.load / size)
        force, _ = nnls(np.vstack(rows), np.concatenate(right), maxiter=20 * len(scale) + 100)
    except (np.linalg.LinAlgError, RuntimeError):
        return None
    state = _with_closed(problem, force > 0.0, [float(len(scale))])
    return state if state is not None and _is_solution(problem, state) else None


def _with_closed(
    problem: ContactProblem, closed: BoolArray, history: list[float]
) -> ContactState | None:
    """Forces that just close the gaps of `closed` contacts and balance the loads."""
    n, k = len(problem.gap), len(problem.load)
    at = np.flatnonzero(closed)
    border = problem.motion[at]
    # Scaled, so that the bordered matrix is as well conditioned as the compliance.
    size = float(np.abs(problem.compliance[np.ix_(at, at)]).max()) if len(at) else 1.0
    reach = np.maximum(np.abs(problem.motion).max(axis=0, initial=0.0), 1e-300)
    border = size * border / reach
    matrix = np.block([[problem.compliance[np.ix_(at, at)], border], [border.T, np.zeros((k, k))]])
    right = np.concatenate([-problem.gap[at], size * problem.load / reach])
    try:
        if k and np.linalg.matrix_rank(border) < k:
            # Too few contacts to tell all motions, as a block that rocks on one: the least turn.
            found = np.linalg.lstsq(matrix, right, rcond=None)[0]
        else:
            found = np.linalg.solve(matrix, right)
    except np.linalg.LinAlgError:
        return None
    force = np.zeros(n)
    force[at] = found[: len(at)]
    motion = size * found[len(at) :] / reach
    gap = problem.compliance @ force + problem.gap + problem.motion @ motion
    gap[at] = 0.0
    return ContactState(force, gap, motion, closed.copy(), tuple(history))


def _is_solution(problem: ContactProblem, state: ContactState) -> bool:
    """Whether no force pulls, no gap overlaps and all loads are balanced, to rounding."""
    least_force = -SIGN_TOL * np.abs(state.force).max(initial=0.0)
    balance = np.abs(problem.motion.T @ state.force - problem.load)
    reach = np.abs(problem.motion).max(axis=0, initial=0.0)
    scale = reach * ((problem.motion != 0.0).T @ np.abs(state.force)) + np.abs(problem.load)
    least_gap = -SIGN_TOL * np.abs(state.gap).max(initial=0.0)
    values = np.concatenate([state.force, state.gap, state.motion])
    return bool(
        np.all(np.isfinite(values))
        and np.all(state.force >= least_force)
        and np.all(state.gap >= least_gap)
        and np.all(balance <= SIGN_TOL * scale)
    )
