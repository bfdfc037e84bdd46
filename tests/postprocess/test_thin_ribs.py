"""The rule of the thinnest ribs: its step on linear problems that can be solved by hand."""

import numpy as np

from lamwright.postprocess.thin_ribs import limited, misfits, next_step


def test_a_linear_problem_is_solved_in_one_step():
    """Margins linear in the logarithms: the step meets the rule exactly, wherever it started.

    Random diagonally dominant slopes (a P-matrix, so there is one solution); seed fixed.
    """
    random = np.random.default_rng(7)
    for _ in range(200):
        n = int(random.integers(1, 9))
        slope = random.uniform(-1.0, 1.0, (n, n)) / n
        np.fill_diagonal(slope, random.uniform(1.0, 1.5, n))
        above, residual = random.uniform(0.0, 0.5, n), random.normal(0.0, 0.5, n)
        step = next_step(above, residual, slope)
        assert misfits(above + step, residual + slope @ step).max() < 1e-12


def test_a_rib_with_margin_to_spare_goes_to_its_floor():
    """Two ribs apart: the first has margin at its floor, the second gains what it lacks."""
    step = next_step(np.array([0.3, 0.1]), np.array([2.0, -0.2]), np.eye(2))
    np.testing.assert_allclose(step, [-0.3, 0.2], rtol=1e-12)


def test_a_rib_that_ignores_its_width_still_moves_the_right_way():
    """A peak that hardly follows the width asks for a wider rib, not for a leap."""
    step = next_step(np.array([0.5]), np.array([-0.1]), np.array([[-0.01]]))
    assert 0.0 < step[0] <= 0.5
    assert limited(np.array([5.0, -0.1]), 0.25).tolist() == [0.25, -0.1]
