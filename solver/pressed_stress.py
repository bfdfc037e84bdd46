"""Stress of a pressed lamination at a speed, and the speeds at which its fit is lost.

The bore's nodes bear a known pressure and no shear, so only the stress along the bore is left to
find there, from the strain along it: sigma_t = E (epsilon_t - epsilon_free) - nu p, derived.
Axes: n contacts, n_bore of them at the bore first; n_node; n_seat magnets.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from .bearings import edge_lengths
from .elastic import von_mises, without_rigid_motion
from .isoparametric import boundary_edges
from .pressed import Pressed, contacts_at
from .rib_loads import rib_loads
from .stress_recovery import recovered_stress
from .supports import BoolArray
from .types import FloatArray, StressSolution

SPEED_TOL = 1e-7  # of the squared speed at which a contact opens, where it is searched for
FAR = 1e4  # times the squared speed at which a free bore would lose the shaft: never, beyond
FAINT = 1e-4  # of the squared speed: a contact that opens below a hundredth of the speed opens at 0
# (start, end, middle) of an edge, of its length: int N_i N_j ds of second-order edges.
EDGE_MASS = np.array([[4.0, -1.0, 2.0], [-1.0, 4.0, 2.0], [2.0, 2.0, 16.0]]) / 30.0


@dataclass(frozen=True, slots=True, eq=False)
class PressedStress:
    """What a pressed lamination bears at one speed."""

    solution: StressSolution  # the error of its peak is not estimated, and stated as infinite
    pressure: FloatArray  # (n_bore,), Pa at the bore's nodes
    angle: FloatArray  # (n_bore,), rad
    closed: BoolArray  # (n_bore,)
    mean_pressure: float  # Pa over the whole bore, keyways left out
    bearing: FloatArray  # (n_seat,), N/m, what the magnets press their walls with
    resolved: BoolArray  # (n_node,); under a magnet the mesh does not tell the stress
    history: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Loosening:
    """Speeds in rad/s at which the fit is lost; infinite where it never is."""

    first: float  # at one place of the bore; 0 where it is not closed all round at rest
    everywhere: float


def stress_at(item: Pressed, speed: float) -> PressedStress:
    """The stress at `speed` in rad/s.

    Raises:
        NotConverged: where no contact forces were found.
    """
    state = contacts_at(item, speed)
    mesh = item.body.mesh
    force = speed**2 * item.spin_force + item.heat_force
    push = state.force * item.direction
    np.add.at(force, item.nodes, np.column_stack([push.real, push.imag]))
    moved = item.held.displacement(force)
    if item.section.is_full_circle:
        if np.any(state.closed[: item.n_bore]):
            moved = moved + state.motion[-2:]
        else:
            moved = without_rigid_motion(item.body, moved)
    n = item.n_bore
    pressure = _pressure(item, state.force, state.closed)
    stress = recovered_stress(item.body, moved, _free_edges(item), item.sides, item.strain)
    stress = _with_pressure(item, stress, pressure)
    level = von_mises(stress)
    loads = rib_loads(item.body, moved, item.section.ribs, speed, item.strain, item.centre)
    for array in (moved, stress, level, loads):
        array.setflags(write=False)
    solution = StressSolution(
        mesh=mesh,
        displacement=moved,
        stress=stress,
        von_mises=level,
        speed=speed,
        peak=float(level.max()),
        peak_error=math.inf,
        rib_loads=loads,
        refinements=0,
    )
    length = float(edge_lengths(mesh, item.bore).sum())
    ends = np.cumsum([n, *(len(seat.nodes) for seat in item.seats)])
    bearing = [state.force[a:b].sum() for a, b in pairwise(ends.tolist())]
    return PressedStress(
        solution=solution,
        pressure=pressure,
        angle=np.angle(item.direction[:n]) % (2.0 * math.pi),
        closed=state.closed[:n],
        mean_pressure=float(state.force[:n].sum()) / length if length else 0.0,
        bearing=np.array(bearing),
        resolved=_resolved(item),
        history=state.history,
    )


def loosening(item: Pressed) -> Loosening:
    """The speeds at which the fit is lost.

    Raises:
        NotConverged: where no contact forces were found on the way.
    """
    if not item.has_fit:
        return Loosening(0.0, 0.0)
    n = item.n_bore
    at_rest = contacts_at(item, 0.0)
    if not np.any(at_rest.closed[:n]):
        return Loosening(0.0, 0.0)
    everywhere = _lost_everywhere(item)
    if not np.all(at_rest.closed[:n]):
        return Loosening(0.0, everywhere)
    return Loosening(_lost_first(item), everywhere)


def _start(item: Pressed) -> float:
    """About the squared speed at which the fit is lost."""
    rest, spin = item.rest[: item.n_bore], item.spin[: item.n_bore]
    return float(-rest.min() / max(spin.mean(), np.abs(spin).max() / FAR))


def _lost_first(item: Pressed) -> float:
    """The speed up to which a bore that is closed all round stays so."""
    if item.seats:
        return _crossing(lambda square: -_least_overlap(item, square), _start(item))
    # Forces grow by the same with every square of the speed as long as all contacts are closed.
    n, k = item.motion.shape
    matrix = np.block([[item.compliance, item.motion], [item.motion.T, np.zeros((k, k))]])
    right = np.zeros((n + k, 2))
    right[:n, 0], right[:n, 1], right[n:, 1] = -item.rest, -item.spin, item.load
    at_rest, by_square = np.linalg.solve(matrix, right)[:n].T
    falls = by_square < 0.0
    return math.sqrt(float(np.min(-at_rest[falls] / by_square[falls], initial=math.inf)))


def _lost_everywhere(item: Pressed) -> float:
    """The least speed at which no gap at the bore is negative without a force there."""
    if item.seats:
        return _crossing(lambda square: _least_gap(item, square), _start(item))
    # Without forces the gaps are straight in the square of the speed.
    if item.section.is_full_circle:
        return _lost_by_ring(item)
    overlaps = item.rest < 0.0
    if np.any(item.spin[overlaps] <= 0.0):
        return math.inf
    square = float(np.max(-item.rest[overlaps] / item.spin[overlaps]))
    left = (item.rest + square * item.spin)[~overlaps]
    return math.inf if np.any(left < 0.0) else math.sqrt(square)


def _lost_by_ring(item: Pressed) -> float:
    """The same of a whole ring, which may lie anywhere."""
    from scipy.optimize import linprog

    far, size = _start(item), np.abs(item.rest).max()
    found = linprog(
        [0.0, 0.0, 1.0],
        A_ub=-np.column_stack([item.motion, far / size * item.spin]),
        b_ub=item.rest / size,
        bounds=[(None, None), (None, None), (0.0, None)],
    )
    return math.sqrt(far * float(found.x[2])) if found.x is not None else math.inf


def _least_gap(item: Pressed, square: float) -> float:
    """The least gap in m at the bore of a rotor with magnets that bears nowhere on its shaft."""
    n = item.n_bore
    force = contacts_at(item, math.sqrt(square), without_bore=True).force
    gap = (item.rest + square * item.spin + item.compliance @ force)[:n]
    if not item.section.is_full_circle:
        return float(gap.min())
    from scipy.optimize import linprog

    # The ring lies where its least gap is largest.
    size = np.abs(gap).max()
    found = linprog(
        [0.0, 0.0, -1.0],
        A_ub=np.column_stack([-item.motion[:n, -2:], np.ones(n)]),
        b_ub=gap / size,
        bounds=[(None, None)] * 3,
    )
    return float(size * found.x[2]) if found.x is not None else -math.inf


def _least_overlap(item: Pressed, square: float) -> float:
    """The least overlap in m that a force at the bore takes away; less the gap where one is."""
    state = contacts_at(item, math.sqrt(square))
    n = item.n_bore
    overlap = state.force * np.diag(item.compliance) - state.gap
    return float(overlap[:n].min())


def _crossing(value: Callable[[float], float], start: float) -> float:
    """The speed at whose square a value, negative at rest and nearly straight in it, is zero."""
    from scipy.optimize import brentq

    low, high = 0.0, start
    while value(high) < 0.0:
        low, high = high, 2.0 * high
        if high > FAR * start:
            return math.inf
    # At rest magnets bear on nothing, and on a curved wall faint loads drown in its own gap.
    low = max(low, FAINT * high)
    if value(low) >= 0.0:
        return 0.0
    return math.sqrt(float(brentq(value, low, high, xtol=SPEED_TOL * high, rtol=SPEED_TOL)))


def _free_edges(item: Pressed) -> np.ndarray:
    """Boundary edges without shear: all but the sides and the walls under magnets."""
    edges = boundary_edges(item.body.mesh)
    loaded = np.zeros(len(item.body.mesh.nodes), dtype=np.bool_)
    loaded[item.sides.first] = loaded[item.sides.second] = True
    loaded[item.nodes[item.n_bore :]] = True
    return np.asarray(edges[~loaded[edges[:, 2]]])


def _resolved(item: Pressed) -> BoolArray:
    """Which nodes (n_node,) share no element with a node that a magnet may press."""
    elements = item.body.mesh.elements
    near = np.any(np.isin(elements, item.nodes[item.n_bore :]), axis=1)
    resolved = np.ones(len(item.body.mesh.nodes), dtype=np.bool_)
    resolved[elements[near]] = False
    return resolved


def _pressure(item: Pressed, force: FloatArray, closed: BoolArray) -> FloatArray:
    """Pressure (n_bore,) in Pa whose nodal forces these are; none where the contact is open."""
    n = item.n_bore
    number = np.full(len(item.body.mesh.nodes), -1, dtype=np.int64)
    number[item.nodes[:n]] = np.arange(n)
    if item.sides.first.size:
        number[item.sides.second] = number[item.sides.first]
    mass = np.zeros((n, n))
    if n:
        at = number[item.bore]
        length = edge_lengths(item.body.mesh, item.bore)
        np.add.at(mass, (at[:, :, None], at[:, None, :]), length[:, None, None] * EDGE_MASS)
    on = np.flatnonzero(closed[:n])
    pressure = np.zeros(n)
    pressure[on] = np.linalg.solve(mass[np.ix_(on, on)], force[on])
    return pressure


def _with_pressure(item: Pressed, stress: FloatArray, pressure: FloatArray) -> FloatArray:
    """The stress with that of the pressure added at the bore: -p across it and -nu p along it."""
    out = stress.copy()
    nu = item.body.poissons_ratio[0]
    nodes = item.nodes[: item.n_bore]
    lists = [(nodes, pressure)]
    pair = np.isin(item.sides.first, nodes)
    if np.any(pair):
        value = np.zeros(len(stress))
        value[nodes] = pressure
        lists.append((item.sides.second[pair], value[item.sides.first[pair]]))
    for at, p in lists:
        x, y = item.body.mesh.nodes[at].T / np.hypot(*item.body.mesh.nodes[at].T)
        out[at] -= p[:, None] * np.column_stack(
            [x * x + nu * y * y, y * y + nu * x * x, (1.0 - nu) * x * y]
        )
    return out
