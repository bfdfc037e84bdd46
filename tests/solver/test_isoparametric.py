"""Curved second-order triangles: shape functions, quadrature, gradients, edges."""

import math

import numpy as np
import pytest

from lamwright.geometry.curves import circle
from lamwright.geometry.section import Region
from lamwright.solver.isoparametric import (
    NODE_PLACES,
    boundary_edges,
    gradients_at,
    points_at,
    quadrature,
    shape,
    shape_slope,
    six_points,
)
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.types import PlanarMesh


@pytest.fixture(scope="module")
def disc() -> PlanarMesh:
    """A disc of radius 1 m."""
    return mesh_regions([Region("disc", "rotor_steel", circle(0j, 1.0))], lambda edge: 0.3)


@pytest.mark.parametrize(("p", "q"), [(p, q) for p in range(5) for q in range(5 - p)])
def test_six_points_integrate_every_monomial_of_degree_4(p, q):
    """The integral of x^p y^q is p! q! / (p + q + 2)!: digits of the table, 1e-14."""
    places, weights = six_points()
    exact = math.factorial(p) * math.factorial(q) / math.factorial(p + q + 2)
    assert weights @ (places[:, 0] ** p * places[:, 1] ** q) == pytest.approx(exact, abs=1e-14)


def test_shape_functions_are_one_at_their_node_and_sum_to_one():
    """N_i at node j is 1 or 0, sums are 1, slopes sum to 0: exact."""
    assert shape(NODE_PLACES) == pytest.approx(np.eye(6), abs=1e-15)
    places = np.random.default_rng(1).dirichlet([1, 1, 1], 20)[:, :2]
    assert shape(places).sum(axis=1) == pytest.approx(np.ones(20), abs=1e-14)
    assert np.abs(shape_slope(places).sum(axis=2)).max() < 1e-14


def test_slopes_are_derivatives_of_the_shapes():
    """Central differences of a quadratic are exact: rounding of the step 1e-4 only, 1e-10."""
    places, eps = np.random.default_rng(2).dirichlet([1, 1, 1], 20)[:, :2], 1e-4
    for k in (0, 1):
        step = eps * np.eye(2)[k]
        by_difference = (shape(places + step) - shape(places - step)) / (2 * eps)
        assert shape_slope(places)[:, k] == pytest.approx(by_difference, abs=1e-10)


def test_gradients_of_a_linear_field_are_exact_on_curved_elements(disc: PlanarMesh):
    """The map's space holds linear fields: their gradient is met everywhere, rounding only."""
    grad, _ = gradients_at(disc.nodes[disc.elements], NODE_PLACES)
    values = (3.0 * disc.nodes[:, 0] - 2.0 * disc.nodes[:, 1])[disc.elements]
    slope = np.einsum("epdi,ei->epd", grad, values)
    assert slope == pytest.approx(np.broadcast_to([3.0, -2.0], slope.shape), abs=1e-11)


def test_area_and_moment_of_a_disc(disc: PlanarMesh):
    """Area pi, polar moment pi/2: the arcs' parabolas miss 1e-5 at steps of 15 degrees."""
    weight = quadrature(disc).weight
    radius2 = np.sum(points_at(disc, six_points()[0]) ** 2, axis=2)
    assert weight.sum() == pytest.approx(math.pi, rel=2e-5)
    assert np.sum(weight * radius2) == pytest.approx(0.5 * math.pi, rel=4e-5)


def test_boundary_edges_run_round_the_body(disc: PlanarMesh):
    """One closed chain, counter-clockwise, all its nodes on the circle."""
    edges = boundary_edges(disc)
    assert sorted(edges[:, 0]) == sorted(edges[:, 1])
    assert np.hypot(*disc.nodes[edges.ravel()].T) == pytest.approx(np.ones(edges.size))
    start, end = disc.nodes[edges[:, 0]], disc.nodes[edges[:, 1]]
    turn = start[:, 0] * end[:, 1] - start[:, 1] * end[:, 0]
    assert np.all(turn > 0.0)
