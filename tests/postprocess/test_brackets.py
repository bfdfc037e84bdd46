"""Roots in brackets against closed forms."""

import numpy as np
import pytest

from lamwright.postprocess.brackets import roots


def test_roots_of_many_scales_at_once():
    """x^3 = c has the root c^(1/3), met to the tolerance of 1e-12 whatever the others take."""
    cubes = np.array([2.0, 1e-9, 5.0, 26.999999, 1e-30])
    found = roots(lambda x: x**3 - cubes, np.zeros(5), np.full(5, 3.0))
    assert found == pytest.approx(np.cbrt(cubes), rel=3e-12)


def test_a_root_at_an_end_is_that_end():
    """f(low) = 0 is a root, though no sign changes."""
    assert roots(lambda x: x**2, np.zeros(1), np.ones(1)) == pytest.approx([0.0])


def test_a_bracket_without_a_root_says_so():
    """One sign at both ends: nan, beside equations that have one."""
    found = roots(lambda x: x - np.array([0.5, 7.0]), np.zeros(2), np.ones(2))
    assert found[0] == pytest.approx(0.5)
    assert np.isnan(found[1])


def test_a_jump_is_closed_in_on():
    """Bisection shrinks a bracket round a jump, where no interpolation helps."""
    found = roots(lambda x: np.where(x > 0.3, 1.0, -1.0), np.zeros(1), np.ones(1))
    assert found == pytest.approx([0.3], abs=1e-11)


def test_a_function_that_ends_inside_the_bracket_has_no_root():
    """What cannot be evaluated is told as nan, and holds up nothing beside it."""

    def broken(x):
        return np.where((x > 0.1) & (x < 0.9) & [True, False], np.nan, x - 0.5)

    found = roots(broken, np.zeros(2), np.ones(2))
    assert np.isnan(found[0])
    assert found[1] == pytest.approx(0.5)
