"""The condensed system against the whole one, which nothing has been taken out of."""

import sys
from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from scipy.sparse import csc_matrix
from scipy.sparse.linalg import spsolve
from shipped import shipped

from lamwright.app.point import model_of
from lamwright.geometry.cross_section import cross_section
from lamwright.solver.cache import Cache
from lamwright.solver.condensed import Condensed
from lamwright.solver.eccentric import eccentric_model, solve_eccentric
from lamwright.solver.field import (
    MagneticModel,
    at_position,
    kept_energy,
    solve_point,
    unknowns,
    whole_energy,
)
from lamwright.solver.integrals import phase_currents
from lamwright.solver.linear import CholmodSolver, analyse
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.pattern import summed
from lamwright.solver.point_energy import PointEnergy
from lamwright.solver.steel_kernel import steel_tangent
from lamwright.solver.types import FieldSolution, FloatArray

DEMO, MAGNETS = "demo_24s4p_arc", "demo_36s4p_magnet"
COARSE = 4.0
SECTORS = [(DEMO, 1), (MAGNETS, 1), (DEMO, 2)]  # the whole circle: eccentric, below
POSITIONS = (0.0, 0.0314, 1.234)  # rad; whole edges, a sheared gap, over the sector's end


@cache
def model(name: str, poles: int) -> MagneticModel:
    """A sector of so many poles, solved so far that a last step leads to rounding."""
    machine = shipped(name, COARSE).machine
    section = cross_section(machine.design, poles)
    made = model_of(machine, section, mesh_section(section, MeshSettings(scale=COARSE)))
    return replace(made, settings=replace(made.settings, newton=NewtonSettings(tolerance=1e-8)))


def condensed_of(model: MagneticModel, position: float) -> Condensed:
    found = at_position(model, position).condensed
    assert found is not None
    return found


def load_at(model: MagneticModel, i_d: float, i_q: float, position: float) -> FloatArray:
    currents = phase_currents(i_d, i_q, model.sector.pole_pairs * position)
    return np.asarray(currents @ model.linkage + model.magnet.load)


def uncondensed(model: MagneticModel, position: float, load: FloatArray) -> PointEnergy:
    """The energy whose tangent is factorised with all its unknowns."""
    energy = whole_energy(model, at_position(model, position), load)
    solver = analyse(energy.linear.pattern.indptr, energy.linear.pattern.indices)
    return replace(energy, linear=replace(energy.linear, solver=solver))


def tangent(energy: PointEnergy, a: FloatArray) -> csc_matrix:
    """The whole tangent matrix at `a`."""
    _, state = energy.residual(a)
    linear = energy.linear
    values = linear.values + summed(energy.places.scatter, steel_tangent(energy.iron.metric, state))
    entries = values, linear.pattern.indices, linear.pattern.indptr
    lower = csc_matrix(entries, shape=(a.size, a.size))
    diagonal = csc_matrix((lower.diagonal(), (range(a.size), range(a.size))), shape=lower.shape)
    return csc_matrix(lower + lower.T - diagonal)


def newton_step(energy: PointEnergy, a: FloatArray) -> FloatArray:
    """Where Newton's step leads from `a`."""
    residual, state = energy.residual(a)
    return a - energy.solve_tangent(state, residual)


def assert_solves_the_whole(model: MagneticModel, load: FloatArray, field: FieldSolution) -> None:
    """From the field, brought to rounding on the kept unknowns, no step of all leads away: 1e-10.

    Newton converges quadratically, so that the step is the error.
    """
    left, place = condensed_of(model, field.position), at_position(model, field.position)
    kept, energy = unknowns(model, field)[left.kept], kept_energy(model, place, load)
    for _ in range(2):
        kept = newton_step(energy, kept)
    a = left.recovered(kept, load)
    error = newton_step(uncondensed(model, field.position, load), a) - a
    assert np.abs(error).max() < 1e-10 * np.abs(a).max()
    assert np.abs(unknowns(model, field) - a).max() < 1e-6 * np.abs(a).max()


@pytest.mark.parametrize(("name", "poles"), SECTORS)
def test_fields_solve_the_whole_system(name: str, poles: int) -> None:
    """At positions as a skewed rotor's steps take them; with magnets at no current too."""
    machine = model(name, poles)
    last = 0.0 if name == MAGNETS else 3.0
    for position, current in zip(POSITIONS, (6.0, 9.0, last), strict=True):
        field = solve_point(machine, current, 1.3 * current, position)
        load = load_at(machine, current, 1.3 * current, position)
        assert_solves_the_whole(machine, load, field)


@pytest.mark.parametrize(("name", "poles"), SECTORS)
def test_the_whole_tangent_is_solved(name: str, poles: int) -> None:
    """What adjoint and error bars ask for: any right side, all unknowns, against SciPy."""
    machine = model(name, poles)
    rng = np.random.default_rng(7)
    for position in POSITIONS:
        energy = whole_energy(
            machine, at_position(machine, position), load_at(machine, 6.0, 8.0, 0)
        )
        a = 1e-3 * rng.normal(size=energy.load.size)
        rhs = rng.normal(size=a.size)
        found = energy.solve_tangent(energy.residual(a)[1], rhs)
        expected = spsolve(tangent(energy, a), rhs)
        assert np.abs(found - expected).max() < 1e-10 * np.abs(expected).max()
        assert np.array_equal(energy.solve_held(rhs), found)


def test_kept_rows_are_those_of_the_whole() -> None:
    """With what is gone recovered, its rows hold to rounding and the others are the same."""
    machine, position = model(DEMO, 1), POSITIONS[1]
    place, load = at_position(machine, position), load_at(machine, 6.0, 8.0, POSITIONS[1])
    left = condensed_of(machine, position)
    a_kept = 1e-2 * np.random.default_rng(8).normal(size=left.kept.size)
    whole, _ = whole_energy(machine, place, load).residual(left.recovered(a_kept, load))
    kept, _ = kept_energy(machine, place, load).residual(a_kept)
    size = np.abs(kept).max()
    assert np.abs(whole[left.gone]).max() < 1e-12 * size
    assert np.abs(whole[left.kept] - kept).max() < 1e-12 * size


def test_elimination_is_worth_it_and_fills_nothing() -> None:
    """A tenth of the unknowns in small parts; no more matrix entries, no more in the factor."""
    machine = model(DEMO, 1)
    place = at_position(machine, 0.0)
    left = condensed_of(machine, 0.0)
    assert left.gone.size > 0.1 * machine.numbering.n_dof
    assert np.diff(left.inverse.indptr).max() < 200
    assert left.slot.size < machine.pattern.indices.size
    touched = np.union1d(machine.iron.dof, machine.numbering.dof[machine.rotor_gap.node])
    assert not np.intersect1d(left.gone, touched).size
    assert isinstance(place.kept.solver, CholmodSolver)


def test_eccentric_gap_is_condensed_anew() -> None:
    """What has gone lies in the stretched half of the gap too: a centred one would be wrong."""
    centred = model(DEMO, 4)
    solve_point(centred, 6.0, 9.0, 0.05)
    gap = centred.bore_radius - centred.rim_radius
    moved = eccentric_model(centred, 0.3 * gap)
    field = solve_eccentric(moved, 6.0, 9.0, 0.05)
    load = load_at(moved.model, 6.0, 9.0, 0.05)
    assert_solves_the_whole(moved.model, load, field)
    gone = condensed_of(moved.model, 0.05).gone
    assert np.intersect1d(gone, moved.model.numbering.dof[moved.model.stator_gap.elements]).size


def test_nothing_goes_where_no_library_orders(monkeypatch: pytest.MonkeyPatch) -> None:
    """Without cvxopt all unknowns are kept; the field is the same."""
    machine = model(DEMO, 1)
    expected = solve_point(machine, 6.0, 9.0, 0.05)
    monkeypatch.setitem(sys.modules, "cvxopt", None)
    alone = replace(machine, factors=Cache(1), positions=Cache(1), condensed=Cache(1), coarse=None)
    assert at_position(alone, 0.05).condensed is None
    found = solve_point(alone, 6.0, 9.0, 0.05)
    found_a, expected_a = unknowns(alone, found), unknowns(machine, expected)
    assert found_a == pytest.approx(expected_a, abs=1e-6 * np.abs(expected_a).max())
