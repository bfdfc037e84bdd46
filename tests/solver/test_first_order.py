"""First-order elements on the corners: exact for what is linear, and a good first guess."""

import math

import numpy as np
import pytest
from shipped import NAMES, shipped, shipped_model

from lamwright.solver.field import at_position, solve_point, whole_energy
from lamwright.solver.first_order import first_order
from lamwright.solver.integrals import phase_currents
from lamwright.solver.model import joined_parts
from lamwright.solver.newton import NewtonSettings, minimise
from lamwright.solver.pattern import node_values


def test_a_linear_function_is_carried_exactly():
    """Corners and the middles of straight edges.

    A curved edge's middle is off by its sagitta, 0.15 of the chord at most (in the shaft).
    """
    sector = shipped("demo_24s4p_arc", 1.6).sector
    corners, lift = first_order(sector)
    values = np.concatenate([corners.rotor.nodes, corners.stator.nodes])
    nodes, _ = joined_parts(sector)
    miss = np.hypot(*(np.stack([lift(v) for v in values.T], axis=1) - nodes).T)
    start, end = values[lift.parents].transpose(1, 0, 2)
    assert np.median(miss) < 1e-12  # m
    assert np.all(miss <= 0.2 * np.hypot(*(end - start).T))


def test_the_first_guess_is_a_field_of_the_same_machine():
    """Linkages of the first-order field within 5 %; measured 1 to 3 %."""
    model = shipped_model("demo_24s4p_arc", 1.6)
    solution = solve_point(model, 7.0, 10.0, 0.1)
    coarse = model.coarse
    assert coarse is not None
    assert solution.corner_a is not None
    a = solution.corner_a[coarse.model.representative]
    psi = 4.0 * model.stack_length * (coarse.model.linkage @ a)
    assert psi == pytest.approx(solution.psi_abc, abs=0.05 * np.abs(solution.psi_abc).max())


@pytest.mark.parametrize("share", [1.0, 3.0])
@pytest.mark.parametrize("name", NAMES)
def test_the_shortcuts_lead_to_the_same_field_in_fewer_steps(name, share):
    """The energy has one minimum: 1e-5. At most 6 factorisations where Newton takes 10 to 17."""
    model, rated = shipped_model(name, 1.6), share * shipped(name, 1.6).rated
    i_d, i_q, position = 0.6 * rated, 0.8 * rated, 0.1
    solution = solve_point(model, i_d, i_q, position)
    place = at_position(model, position)
    currents = phase_currents(i_d, i_q, model.sector.pole_pairs * position)
    load = currents @ model.linkage + model.magnet.load
    plain, _, report = minimise(
        whole_energy(model, place, load),
        np.zeros(load.size),
        float(np.linalg.norm(load)),
        NewtonSettings(tolerance=1e-5),
    )
    nodal = np.concatenate([solution.a_rotor, solution.a_stator])
    expected = node_values(place.dof, place.sign, plain)
    # At the tolerance of 1e-4 small fields of no weight are known to some 1e-3 of the largest.
    assert nodal == pytest.approx(expected, abs=2e-3 * np.abs(expected).max())
    assert math.dist(model.linkage @ plain, solution.psi_abc / _whole(model)) < 1e-5 * math.hypot(
        *(model.linkage @ plain)
    )
    assert solution.newton.steps <= 6 < report.steps


def _whole(model):
    return model.sector.sectors * model.stack_length
