"""Slopes of integrals over moving elements against differences of the integrals themselves."""

import numpy as np
import pytest

from lamwright.solver.form_slope import flow_slope, form_slope, mean_slope
from lamwright.solver.kernel import element_residual, flux_state, quadrature, shape_integrals

STEP = 1e-6  # of elements of size 1: central differences err by 1e-12 times third derivatives
# Two elements with curved edges, numbers of their own.
NODES = np.array(
    [
        *([0.0, 0.0], [1.0, 0.1], [0.1, 0.9], [0.5, -0.1], [0.6, 0.6], [-0.05, 0.5]),
        *([1.1, 0.1], [2.0, 0.3], [1.2, 1.1], [1.6, 0.1], [1.7, 0.8], [1.1, 0.6]),
    ]
)
ELEMENTS = np.arange(12).reshape(2, 6)


def law(b2):
    """An invented law with nu' of either sign."""
    return 2.0 + np.sin(b2), np.cos(b2)


def by_difference(value):
    slope = np.zeros((12, 2))
    for node in range(12):
        for k in (0, 1):
            moved = [NODES.copy(), NODES.copy()]
            moved[0][node, k] -= STEP
            moved[1][node, k] += STEP
            slope[node, k] = (value(moved[1]) - value(moved[0])) / (2.0 * STEP)
    return slope.reshape(2, 6, 2)


@pytest.mark.parametrize("n_qp", [3, 6])
def test_form_slope_is_the_derivative_of_the_residual(n_qp):
    """The form is lambda . r with r from the kernel; differences of step 1e-6 round off at 1e-9."""
    a, dual = np.random.default_rng(2).normal(size=(2, 2, 6))

    def value(nodes):
        quad = quadrature(nodes, ELEMENTS, n_qp)
        return float(np.sum(element_residual(quad, flux_state(quad, a, law)) * dual))

    slope = form_slope(NODES, ELEMENTS, n_qp, (a, dual), law)
    assert slope == pytest.approx(by_difference(value), abs=1e-8 * np.abs(slope).max())


def test_a_rigid_motion_changes_no_form():
    """Shifting all nodes leaves every integral: slopes of an element sum to nothing."""
    a, dual = np.random.default_rng(3).normal(size=(2, 2, 6))
    slope = form_slope(NODES, ELEMENTS, 3, (a, dual), law)
    assert np.abs(slope.sum(axis=1)).max() < 1e-12 * np.abs(slope).max()


def test_mean_slope_is_the_derivative_of_the_mean():
    """The mean over both elements as `model` takes it for coil sides."""
    values = np.random.default_rng(5).normal(size=(2, 6))

    def mean(nodes):
        integrals = shape_integrals(nodes, ELEMENTS)
        return float(np.sum(integrals * values) / integrals.sum())

    slope = mean_slope(NODES, ELEMENTS, values)
    assert slope == pytest.approx(by_difference(mean), abs=1e-8 * np.abs(slope).max())


def test_flow_slope_is_the_derivative_of_a_magnet_s_load():
    """The load c . grad lambda as `magnet` sums it: by the nodes, and linear in c."""
    dual, along = np.random.default_rng(7).normal(size=(2, 6)), np.array([0.7, -1.9])

    def value(nodes):
        quad = quadrature(nodes, ELEMENTS)
        return float(np.einsum("eq,eqdi,ei,d->", quad.weight, quad.grad, dual, along))

    slope, by_c = flow_slope(NODES, ELEMENTS, 3, dual, along)
    assert slope == pytest.approx(by_difference(value), abs=1e-8 * np.abs(slope).max())
    assert by_c @ along == pytest.approx(value(NODES), rel=1e-12)
