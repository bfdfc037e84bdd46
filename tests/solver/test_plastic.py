"""Elastic-plastic bodies against closed forms, invariants and differences.

Plates are drawn and meshed by the tool's own mesher, so elements are uneven everywhere.
"""

import math

import numpy as np
import pytest

from lamwright.geometry.curves import Path, arc, line
from lamwright.geometry.errors import NotConverged
from lamwright.geometry.section import Region
from lamwright.solver.elastic import edge_force, elastic_body, stress_of_strain
from lamwright.solver.isoparametric import points_at, six_points
from lamwright.solver.limit_load import limit_load
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.plastic import PathSettings, elastic_answer, load_path
from lamwright.solver.plastic_kernel import (
    element_force,
    factorise,
    internal_force,
    on_load,
    plastic_body,
    strains,
    stressed,
    virgin,
)
from lamwright.solver.return_mapping import linear_hardening, perfectly_plastic
from lamwright.solver.supports import unsupported, with_fixed
from tests.plates import MPA, STEEL, at_x, at_y, edges_on, fine_arcs, nodes_on, polygon, uniform

YIELD, E = 350.0 * MPA, STEEL.youngs_modulus
LONG, HIGH = 10e-3, 4e-3
TENSION = uniform(YIELD, 0.0)
EXACT = PathSettings(newton=NewtonSettings(tolerance=1e-13))  # near rounding


def plate(size, low=0.0):
    """A mesh of the rectangle 0..LONG by low..low + HIGH."""
    corners = (1j * low, LONG + 1j * low, LONG + 1j * (low + HIGH), 1j * (low + HIGH))
    return mesh_regions([Region("plate", "rotor_steel", polygon(*corners))], lambda edge: size)


def bar(curve, size=1.5e-3, criterion="von Mises"):
    """A bar on rollers at x = 0 and its end load at yield strength."""
    mesh = plate(size)
    supports = with_fixed(unsupported(mesh), nodes_on(mesh, at_x(0.0)), 0)
    supports = with_fixed(supports, nodes_on(mesh, lambda z: np.abs(z) < 1e-9), 1)
    body = elastic_body(mesh, STEEL)
    pull = edge_force(mesh, edges_on(mesh, at_x(LONG)), TENSION)
    return plastic_body(body, supports, curve, criterion), pull


@pytest.mark.parametrize("criterion", ["von Mises", "Tresca"])
def test_a_bar_in_tension_collapses_at_yield_times_area(criterion):
    """Both bounds meet at 1 (check values C3): the uniform field is in the elements, so 1e-6."""
    found = limit_load(*bar(perfectly_plastic(YIELD), criterion=criterion))
    assert found.first_yield == pytest.approx(1.0, rel=1e-9)
    assert found.lower == pytest.approx(1.0, rel=1e-6)
    assert found.upper == pytest.approx(1.0, rel=1e-6)


def test_patch_of_uniform_plastic_flow():
    """Hardening bar, 1.2 x yield and back: uniform everywhere, exact, on any mesh (1e-10).

    p = 0.2 yield / h, u = LONG (1.2 yield / E + p); sideways -nu elastic and -1/2 plastic.
    After unloading no stress is left and the growth is LONG p.
    """
    modulus = 5e9
    plastic, pull = bar(linear_hardening(YIELD, modulus))
    path = load_path(plastic, pull, (1.2, 0.0), EXACT)
    up, down = path.stops
    gained = 0.2 * YIELD / modulus
    assert up.hardened == pytest.approx(np.full(up.hardened.shape, gained), rel=1e-9)
    assert up.stress[..., 0] == pytest.approx(np.full(up.hardened.shape, 1.2 * YIELD), rel=1e-10)
    assert np.abs(up.stress[..., 1:]).max() < 1e-8 * YIELD
    moved = plastic.displacement(up)
    nodes = plastic.body.mesh.nodes
    along = 1.2 * YIELD / E + gained
    across = -0.3 * 1.2 * YIELD / E - 0.5 * gained
    assert moved == pytest.approx(nodes * [along, across], abs=1e-9 * LONG * along)
    assert plastic.displacement(down)[:, 0] == pytest.approx(
        nodes[:, 0] * gained, abs=1e-9 * LONG * gained
    )
    assert np.abs(down.stress).max() < 1e-8 * YIELD


def test_a_rigid_turn_strains_nothing():
    """Displacements w x r have no strain and no force: 1e-10 of what their size could make."""
    plastic, _ = bar(perfectly_plastic(YIELD))
    turn = 1e-2
    nodes = plastic.body.mesh.nodes
    moved = turn * np.stack([-nodes[:, 1], nodes[:, 0]], axis=1)
    motion = moved[plastic.body.mesh.elements].reshape(-1, 12)
    strain = strains(plastic, motion)
    assert np.abs(strain).max() < 1e-10 * turn
    force = element_force(plastic, stress_of_strain(plastic.body, strain))
    assert np.abs(force).max() < 1e-10 * turn * E * LONG


def test_bending_moment_against_curvature():
    """M = M_y (1.5 - 0.5 (kappa_y / kappa)^2) beyond M_y = yield h^2 / 6; at most 1.5 M_y.

    The end is turned and stays plane; the state is one of uniaxial stress over the height, so
    beam theory is exact. 0.1 %: front within an element of an eighth of the height.
    """
    mesh = plate(HIGH / 8.0, low=-0.5 * HIGH)
    supports = with_fixed(unsupported(mesh), nodes_on(mesh, at_x(0.0)), 0)
    supports = with_fixed(supports, nodes_on(mesh, lambda z: np.abs(z - 0.5j * -HIGH) < 1e-9), 1)
    bend = YIELD / E / (0.5 * HIGH)  # 1/m, at first yield
    for node in nodes_on(mesh, at_x(LONG)):
        supports = with_fixed(supports, np.array([node]), 0, -bend * LONG * mesh.nodes[node, 1])
    plastic = plastic_body(elastic_body(mesh, STEEL), supports, perfectly_plastic(YIELD))
    path = load_path(plastic, np.zeros(mesh.nodes.shape), (1.0, 1.5, 2.0, 4.0, 20.0))
    first = YIELD * HIGH**2 / 6.0
    for state in path.stops:
        # sigma_xx does not depend on x: the moment is int sigma y dA over the length.
        height = points_at(mesh, six_points()[0])[..., 1]
        moment = -np.sum(plastic.body.quad.weight * state.stress[..., 0] * height) / LONG
        exact = first * (1.5 - 0.5 / state.factor**2)
        assert moment == pytest.approx(exact, rel=1e-3)


def console(size=1.2e-3):
    """A bar with a load that bends it too, hardening by a table's first slope."""
    mesh = plate(size)
    supports = with_fixed(unsupported(mesh), nodes_on(mesh, at_x(0.0)), 0)
    supports = with_fixed(supports, nodes_on(mesh, at_x(0.0)), 1)
    pull = edge_force(mesh, edges_on(mesh, at_y(HIGH)), uniform(0.0, 0.06 * YIELD))
    pull += edge_force(mesh, edges_on(mesh, at_x(LONG)), uniform(0.2 * YIELD, 0.0))
    return plastic_body(elastic_body(mesh, STEEL), supports, linear_hardening(YIELD, 2e9)), pull


def test_elastic_range_scales_exactly_and_history_tells_it():
    """Below first yield half the load gives half the answer, in one step each: 1e-10."""
    plastic, pull = console()
    first = elastic_answer(plastic, on_load(plastic, pull)).first_yield
    path = load_path(plastic, pull, (0.49 * first, 0.98 * first))
    half, whole = path.stops
    assert len(path.history) == 2
    assert whole.stress == pytest.approx(2.0 * half.stress, abs=1e-10 * YIELD)
    assert whole.moved == pytest.approx(2.0 * half.moved, abs=1e-10 * np.abs(whole.moved).max())
    assert not whole.hardened.any()


def test_unloading_is_elastic():
    """From beyond yield half-way down: stress changes by the elastic answer, in one step, 1e-10.

    Reverse yield starts at twice the yield stress of range only.
    """
    plastic, pull = console()
    linear = elastic_answer(plastic, on_load(plastic, pull))
    high = 2.0 * linear.first_yield
    path = load_path(plastic, pull, (high, 0.5 * high))
    up, down = path.stops
    assert up.hardened.max() > 0.0
    assert np.array_equal(up.hardened, down.hardened)
    change = up.stress - down.stress
    assert change == pytest.approx(0.5 * high * linear.stress, abs=1e-9 * YIELD)


def test_tangent_matrix_is_the_derivative_of_the_internal_force():
    """K (K^-1 v) by central differences is v: 1e-6, differences across a kink none here."""
    plastic, pull = console()
    linear = elastic_answer(plastic, on_load(plastic, pull))
    before, factor = virgin(plastic), 3.0 * linear.first_yield
    at = stressed(plastic, before, factor * linear.moved, factor)
    assert at.flows.size > 20
    factorise(plastic, at)
    v = np.random.default_rng(5).normal(size=plastic.n_unknown) * linear.scale
    way = plastic.solver.solve(v)
    eps = 1e-7 * np.abs(factor * linear.moved).max() / np.abs(way).max()
    ends = [
        internal_force(
            plastic, stressed(plastic, before, factor * linear.moved + k * eps * way, factor).stress
        )
        for k in (1.0, -1.0)
    ]
    assert (ends[0] - ends[1]) / (2.0 * eps) == pytest.approx(v, abs=1e-5 * np.abs(v).max())


def test_steps_do_not_matter_much_and_stops_are_met():
    """Four times the steps: the tip's motion changes by less than 0.5 %; factors are exact."""
    plastic, pull = console()
    first = elastic_answer(plastic, on_load(plastic, pull)).first_yield
    paths = [load_path(plastic, pull, (3.0 * first, 0.0), PathSettings(steps=n)) for n in (8, 32)]
    assert paths[0].stops[0].factor == 3.0 * first
    few, many = (path.stops[1].moved for path in paths)
    assert few == pytest.approx(many, abs=5e-3 * np.abs(many).max())


def test_beyond_the_limit_load_there_is_no_equilibrium():
    """NotConverged carries the factors that were reached, below the limit, and the last tried."""
    plastic, pull = bar(perfectly_plastic(YIELD), size=4e-3)
    with pytest.raises(NotConverged, match="beyond the limit load") as caught:
        load_path(plastic, pull, (0.5, 1.05))
    assert caught.value.history[0] == 0.5
    assert max(caught.value.history[:-1]) <= 1.0 + 1e-6 < caught.value.history[-1]


def test_limit_loads_are_refused_where_there_is_none():
    """Hardening has no limit load."""
    with pytest.raises(ValueError, match="perfectly plastic"):
        limit_load(*bar(linear_hardening(YIELD, 1e9), size=4e-3))


@pytest.mark.parametrize(
    ("criterion", "most"), [("Tresca", 1.0), ("von Mises", 2.0 / math.sqrt(3))]
)
def test_strip_with_a_hole_collapses_at_its_net_section(criterion, most):
    """Tresca: net section x yield, both theorems (strips of uniaxial stress; a neck across).

    von Mises: between that and 2/sqrt(3) of it, a neck that cannot contract along itself.
    1 % above for the mesh, whose limit is never below the true one.
    """
    r, half = 1.5e-3, 0.5 * HIGH
    quarter = Path(
        (
            line(r + 0j, LONG + 0j),
            line(LONG + 0j, LONG + 1j * half),
            line(LONG + 1j * half, 1j * half),
            line(1j * half, 1j * r),
            arc(1j * r, r + 0j, 0j, ccw=False),
        )
    )
    mesh = mesh_regions([Region("plate", "rotor_steel", quarter)], fine_arcs(0.2e-3, 0.4e-3, r))
    supports = with_fixed(unsupported(mesh), nodes_on(mesh, at_x(0.0)), 0)
    supports = with_fixed(supports, nodes_on(mesh, at_y(0.0)), 1)
    pull = edge_force(mesh, edges_on(mesh, at_x(LONG)), TENSION)
    plastic = plastic_body(elastic_body(mesh, STEEL), supports, perfectly_plastic(YIELD), criterion)
    found = limit_load(plastic, pull)
    net = 1.0 - r / half
    assert found.upper >= net
    assert found.lower <= 1.01 * most * net
