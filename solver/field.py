"""The magnetic field at one operating point: currents and rotor position to `FieldSolution`.

The rotor's position is exact at any angle: whole edges of the turning circle by renumbering, the
rest by shearing the rotor's half of the gap (`gap.py`). What depends on the position only (linear
matrix entries, pattern, gap geometry) is kept for the next current at the same position, the
symbolic factor for all positions whose patterns agree.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from .condensed import Condensed, CondensedSolver, condensed, whole_places
from .gap import RotorPlace, rotor_place, sheared
from .integrals import dq_values, gap_torque, phase_currents, steel_energies
from .kernel import quadrature, quadrature_places
from .linear import SparseSolver, analyse
from .model import FieldSettings, MagneticModel, linear_tangent, magnetic_model
from .newton import NewtonSettings, minimise
from .pattern import (
    Numbering,
    Pattern,
    node_values,
    summed,
    turn_gap,
    turned_ends,
    turned_numbering,
    turned_pattern,
)
from .point_energy import LinearPart, PointEnergy, linear_part
from .steel import NU_0
from .steel_kernel import SteelState
from .types import FieldSolution, FloatArray, IntArray, NewtonReport, Quadrature

__all__ = [
    "FieldSettings",
    "MagneticModel",
    "Position",
    "at_position",
    "kept_energy",
    "magnetic_model",
    "solve_foreseen",
    "solve_point",
    "unknowns",
    "whole_energy",
]


@dataclass(frozen=True, slots=True, eq=False)
class Position:
    """The linear part of the model for one rotor position."""

    dof: IntArray  # (n_node,)
    sign: FloatArray  # (n_node,)
    linear: LinearPart  # of all linear elements
    condensed: Condensed | None  # what Newton's iteration leaves out, ...
    kept: LinearPart  # ... and the linear part of what it keeps
    gap_elements: IntArray  # both halves of the gap
    gap_quad: Quadrature
    gap_places: FloatArray


def whole_energy(model: MagneticModel, place: Position, load: FloatArray) -> PointEnergy:
    """Energy by all unknowns under a load (n_dof,) in A."""
    return PointEnergy(model.iron, whole_places(model.iron), place.linear, load)


def kept_energy(model: MagneticModel, place: Position, load: FloatArray) -> PointEnergy:
    """Energy by the unknowns that Newton's iteration keeps under a load (n_dof,) of all in A."""
    if place.condensed is None:
        return whole_energy(model, place, load)
    steel = place.condensed.steel
    return PointEnergy(model.iron, steel, place.kept, place.condensed.reduced(load))


def solve_point(
    model: MagneticModel,
    i_d: float,
    i_q: float,
    position: float,
    start: FieldSolution | None = None,
) -> FieldSolution:
    """The field with given dq currents at one rotor position.

    Args:
        model: the machine.
        i_d: peak d-axis current in A.
        i_q: peak q-axis current in A.
        position: mechanical angle in rad of the rotor's d axis ahead of phase A's axis.
        start: a neighbouring solution of the same model; its rotor part is carried with the rotor.

    Raises:
        NotConverged: when Newton's iteration fails, with its history.
        ValueError: when `start` is of another mesh.
    """
    currents = phase_currents(i_d, i_q, model.sector.pole_pairs * position)
    load = currents @ model.linkage + model.magnet.load
    if not load.any():
        guess = _Guess(np.zeros(load.size))
    else:
        guess = _first_guess(model, currents, position, start)
    return _solution(model, i_d, i_q, position, load, guess)


def solve_foreseen(
    model: MagneticModel,
    i_d: float,
    i_q: float,
    position: float,
    guesses: Sequence[FloatArray],
) -> FieldSolution:
    """The field with given dq currents at one rotor position, from guesses of its unknowns.

    Args:
        model: the machine.
        i_d: peak d-axis current in A.
        i_q: peak q-axis current in A.
        position: mechanical angle in rad of the rotor's d axis ahead of phase A's axis.
        guesses: (n_dof,) each, as `foreseen` makes them; the one of least residual is taken.

    Raises:
        NotConverged: when Newton's iteration fails, with its history.
    """
    currents = phase_currents(i_d, i_q, model.sector.pole_pairs * position)
    load = currents @ model.linkage + model.magnet.load
    best = guesses[0] if load.any() else np.zeros(load.size)
    if load.any() and len(guesses) > 1:
        energy = whole_energy(model, at_position(model, position), load)
        best = min(guesses, key=lambda a: float(np.linalg.norm(energy.residual(a)[0])))
    return _solution(model, i_d, i_q, position, load, _Guess(best))


def unknowns(model: MagneticModel, solution: FieldSolution) -> FloatArray:
    """The unknowns (n_dof,) of a solution of the model."""
    return _nodal(model, solution)[model.representative]


def _solution(
    model: MagneticModel,
    i_d: float,
    i_q: float,
    position: float,
    load: FloatArray,
    guess: "_Guess",
) -> FieldSolution:
    """The field with a load (n_dof,) in A from a first guess."""
    theta_e = model.sector.pole_pairs * position
    place = at_position(model, position)
    a, state, report = _minimum(model, place, load, guess.a, model.settings.newton, True)

    per_machine = model.sector.sectors * model.stack_length
    psi_abc = per_machine * (model.linkage @ a)
    psi_d, psi_q = dq_values(psi_abc, theta_e)
    a_node = node_values(place.dof, place.sign, a)
    a_node.flags.writeable = psi_abc.flags.writeable = False
    stored, costored = _energies(model, state)
    linear = 0.5 * float(a @ place.linear.times(a))
    still = model.magnet.still_energy
    released = float(a @ model.magnet.load)  # see `magnet`; both are 0 without magnets
    n_rotor = model.sector.rotor.nodes.shape[0]
    torque = gap_torque(
        place.gap_quad,
        place.gap_places,
        a_node[place.gap_elements],
        model.bore_radius - model.rim_radius,
    )
    return FieldSolution(
        i_d=i_d,
        i_q=i_q,
        position=position,
        a_rotor=a_node[:n_rotor],
        a_stator=a_node[n_rotor:],
        psi_abc=psi_abc,
        psi_d=psi_d,
        psi_q=psi_q,
        torque=per_machine * torque,
        energy=per_machine * (stored + linear + still - released),
        coenergy=per_machine * (costored + linear - still),
        newton=replace(report, coarse_steps=guess.steps),
        corner_a=guess.corner_a,
    )


def _minimum(
    model: MagneticModel,
    place: Position,
    load: FloatArray,
    first: FloatArray,
    settings: NewtonSettings,
    with_shortcuts: bool,
) -> tuple[FloatArray, SteelState, NewtonReport]:
    """All unknowns (n_dof,) under a load, by those that the iteration keeps."""
    energy, left = kept_energy(model, place, load), place.condensed
    scale = float(np.linalg.norm(load)) or 1.0
    start = first if left is None else first[left.kept]
    a, state, report = minimise(energy, start, scale, settings, energy if with_shortcuts else None)
    return a if left is None else left.recovered(a, load), state, report


@dataclass(frozen=True, slots=True, eq=False)
class _Guess:
    a: FloatArray  # (n_dof,)
    corner_a: FloatArray | None = None  # (n_corner,), of the first-order elements
    steps: int = 0  # theirs


def _first_guess(
    model: MagneticModel, currents: FloatArray, position: float, start: FieldSolution | None
) -> _Guess:
    """The neighbour's field changed as that of first-order elements changes, or that itself."""
    nodal = _no_field(model) if start is None else _nodal(model, start)
    known = None if start is None else start.corner_a
    if model.coarse is None or (start is not None and known is None):
        return _Guess(nodal[model.representative])
    coarse, lift = model.coarse.model, model.coarse.lift
    place = at_position(coarse, position)
    load = currents @ coarse.linkage + coarse.magnet.load
    first = np.zeros(load.size) if known is None else known[coarse.representative]
    if not load.any():  # the load may sit on middles alone
        return _Guess(nodal[model.representative])
    settings = coarse.settings.newton
    if known is None:  # what is left of a guess from zero would spoil the next points' too
        settings = replace(settings, tolerance=0.1 * settings.tolerance)
    a, _, report = _minimum(coarse, place, load, first, settings, False)
    corner_a = node_values(place.dof, place.sign, a)
    nodal = nodal + lift(corner_a if known is None else corner_a - known)
    return _Guess(nodal[model.representative], corner_a, report.steps)


def _no_field(model: MagneticModel) -> FloatArray:
    return np.zeros(model.sector.rotor.nodes.shape[0] + model.sector.stator.nodes.shape[0])


def _nodal(model: MagneticModel, start: FieldSolution) -> FloatArray:
    """Nodal potentials (n_node,) of a solution of the same meshes."""
    own = (model.sector.rotor.nodes.shape[0], model.sector.stator.nodes.shape[0])
    if (start.a_rotor.size, start.a_stator.size) != own:
        raise ValueError("start: a solution on another mesh")
    return np.concatenate([start.a_rotor, start.a_stator])


def at_position(model: MagneticModel, position: float) -> Position:
    """The model's linear part with the rotor at `position` rad ahead of phase A's axis."""
    place = rotor_place(model.sector, model.axis_a + position)
    period = 2 * model.sector.n_circle  # edges of two sectors
    key = (place.shift % period, place.rest)
    return model.positions.get(key, lambda: _make_position(model, place))


def _make_position(model: MagneticModel, place: RotorPlace) -> Position:
    numbering, gap, still = model.numbering, model.rotor_gap, model.stator_gap
    dof, sign = turned_numbering(numbering, place.shift)
    turned = turn_gap(model.pattern, numbering, gap.row, gap.column, place.shift)
    nodes = sheared(gap.nodes, place.rest, model.rim_radius, model.sector.circle_radius)
    quad = quadrature(nodes, gap.elements, 6)
    packed = linear_tangent(quad, np.full(gap.elements.shape[0], NU_0))
    values = model.fixed_values.copy()
    values[turned.slot] += turned.sign * summed(gap.scatter, packed)
    left = model.condensed.get("", lambda: condensed(model))
    if left is None:
        solver = _solver(model, numbering, turned.pattern, model.ends, place.shift)
        linear = kept = linear_part(turned.pattern, values, solver)
    else:
        pattern = turned_pattern(left.pattern, left.numbering, place.shift)
        solver = _solver(model, left.numbering, pattern, left.ends, place.shift)
        kept = linear_part(pattern, left.values(values), solver)
        linear = linear_part(turned.pattern, values, CondensedSolver(left, solver))
    return Position(
        dof=dof,
        sign=sign,
        linear=linear,
        condensed=left,
        kept=kept,
        gap_elements=np.concatenate([gap.node[gap.elements], still.elements]),
        gap_quad=_joined(quad, still.quad),
        gap_places=np.concatenate([quadrature_places(nodes, gap.elements, 6), still.places]),
    )


def _solver(
    model: MagneticModel, numbering: Numbering, pattern: Pattern, ends: IntArray, shift: int
) -> SparseSolver:
    """Solver for the turned pattern of the unknowns of a numbering."""
    # Turning by a whole sector changes signs but no partner.
    return model.factors.get(
        shift % model.sector.n_circle,
        lambda: analyse(
            pattern.indptr,
            pattern.indices,
            model.settings.solver,
            turned_ends(numbering, ends, shift),
        ),
    )


def _joined(first: Quadrature, second: Quadrature) -> Quadrature:
    return Quadrature(
        grad=np.concatenate([first.grad, second.grad]),
        weight=np.concatenate([first.weight, second.weight]),
    )


def _energies(model: MagneticModel, state: SteelState) -> tuple[float, float]:
    """Energy and coenergy of the steel, per sector and metre of stack, in J/m."""
    iron = model.iron
    total = np.zeros(2)
    for part, law in (
        (slice(None, iron.n_rotor), iron.rotor_law),
        (slice(iron.n_rotor, None), iron.stator_law),
    ):
        total += steel_energies(
            iron.quad.weight.T[:, part], state.b2[:, part], state.nu[:, part], law
        )
    return float(total[0]), float(total[1])
