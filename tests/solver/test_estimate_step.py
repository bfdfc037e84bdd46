"""The finer level: the same equations as the assembled ones, nearly the same solution."""

import math

import numpy as np
import pytest

from lamwright.solver.estimate_step import FineLevel, _equations, _gap_at, changes, fine_level
from lamwright.solver.field import at_position, magnetic_model, solve_point, whole_energy
from lamwright.solver.gap import rotor_place
from lamwright.solver.model import MagneticModel
from lamwright.solver.pattern import turned_numbering
from lamwright.solver.types import FieldSolution
from tests.shipped import NAMES, shipped, shipped_model

NAME = NAMES[-1]  # shares its positions with the fewest unknowns


@pytest.fixture(scope="module")
def coarse() -> MagneticModel:
    """A coarse model, so that the assembled finer one is quick to make."""
    return shipped_model(NAME, 2.0, 1e-7)


@pytest.fixture(scope="module")
def level(coarse: MagneticModel) -> FineLevel:
    """Its mesh quartered."""
    one = shipped(NAME, 2.0)
    return fine_level(coarse, one.section, one.winding)


@pytest.fixture(scope="module")
def assembled(coarse: MagneticModel, level: FineLevel) -> MagneticModel:
    """The model of the quartered mesh, with its matrix."""
    one = shipped(NAME, 2.0)
    laws = coarse.iron.rotor_law, coarse.iron.stator_law
    return magnetic_model(level.sector, one.section, one.winding, *laws, coarse.settings)


def solved(model: MagneticModel, position: float) -> FieldSolution:
    """The field at rated current, 55 electrical degrees."""
    current, gamma = shipped(NAME, 2.0).rated, math.radians(55.0)
    return solve_point(model, current * math.cos(gamma), current * math.sin(gamma), position)


@pytest.mark.parametrize("edges", [0.0, 7.2, 61.9])
def test_equations_are_the_assembled_ones(
    coarse: MagneticModel, level: FineLevel, assembled: MagneticModel, edges: float
):
    """Residual and tangent at any field equal those of the assembled model: twins, to rounding.

    At rests below a quarter of an edge both take the same number of whole edges.
    """
    sector = coarse.sector
    position = edges * math.pi / (sector.pole_pairs * sector.n_circle) - coarse.axis_a
    place = rotor_place(sector, coarse.axis_a + position)
    dof, sign = turned_numbering(level.numbering, 2 * place.shift)
    rng = np.random.default_rng(1)
    a, load, v = 1e-3 * rng.normal(size=(3, level.numbering.n_dof))
    equations = _equations(level, _gap_at(level, place.rest), dof, sign, load)
    own, state = equations.residual(a)
    other, other_state = whole_energy(assembled, at_position(assembled, position), load).residual(a)
    assert np.abs(own - other).max() < 1e-9 * np.abs(other).max()
    tangent = equations.tangent(state)
    energy = whole_energy(assembled, at_position(assembled, position), load)
    back = energy.solve_tangent(other_state, tangent.times(v))
    assert np.abs(back - v).max() < 1e-6 * np.abs(v).max()  # rounding times the condition number


@pytest.mark.parametrize("edges", [0.0, 20.2])
def test_changes_are_those_of_the_converged_finer_field(
    coarse: MagneticModel, level: FineLevel, assembled: MagneticModel, edges: float
):
    """Two steps, a few percent of residual left each: within 20 % of the converged change.

    Conjugate gradients stop at 5 and 10 %, the second Newton step leaves some percent. Linkages
    are taken as a vector, since at some positions one of the two hardly changes; torque, a small
    difference of large stresses, is allowed 5 % of the linkages' relative change more.
    """
    sector = coarse.sector
    position = edges * math.pi / (sector.pole_pairs * sector.n_circle) - coarse.axis_a
    before, after = solved(coarse, position), solved(assembled, position)
    change = changes(level, before)
    exact = np.array([after.psi_d - before.psi_d, after.psi_q - before.psi_q])
    missed = np.array([change.psi_d, change.psi_q]) - exact
    assert np.linalg.norm(missed) < 0.2 * np.linalg.norm(exact)
    least = 0.05 * abs(after.psi_d / before.psi_d - 1.0) * abs(before.torque)
    assert change.torque == pytest.approx(after.torque - before.torque, rel=0.2, abs=least)
    assert 0 < change.steps <= 30
