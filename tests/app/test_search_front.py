"""Fronts and hypervolumes against closed forms."""

import numpy as np
import pytest

from lamwright.app.search_front import REFERENCE, Frame, covered, frame_of, on_front, turned
from lamwright.app.study import StudyGoal

UNIT = Frame(np.zeros(2), np.ones(2))


def test_the_front_is_what_nothing_betters():
    """By the definition of dominance, pair by pair, on random designs with equal values."""
    goals = np.random.default_rng(5).integers(0, 6, (60, 3)).astype(float)
    front = on_front(goals)
    for k, one in enumerate(goals):
        bettered = any((other <= one).all() and (other < one).any() for other in goals)
        came_before = any((goals[j] == one).all() for j in range(k))
        assert front[k] == (not bettered and not came_before)


def test_hypervolume_of_steps_and_of_a_box():
    """Areas by hand: 1.1^2 of the origin; a staircase of two boxes less their overlap; a cube."""
    assert covered(np.zeros((1, 2)), UNIT) == pytest.approx(REFERENCE**2, rel=1e-14)
    stairs = np.array([[0.1, 0.6], [0.6, 0.1], [0.7, 0.7]])
    assert covered(stairs, UNIT) == pytest.approx(2 * 1.0 * 0.5 - 0.5**2, rel=1e-14)
    cube = Frame(np.zeros(3), np.ones(3))
    assert covered(np.full((1, 3), 0.1), cube) == pytest.approx(1.0, rel=1e-14)
    assert covered(np.array([[2.0, 2.0]]), UNIT) == 0.0
    assert covered(np.zeros((0, 2)), UNIT) == 0.0


def test_a_frame_makes_the_unit_of_a_goal_no_matter():
    """Any unit and offset of a goal: the same hypervolume, to rounding."""
    goals = np.random.default_rng(8).random((40, 2))
    other = goals * [250.0, 1e-3] + [-40.0, 7.0]
    assert covered(other, frame_of(other)) == pytest.approx(covered(goals, frame_of(goals)))


def test_one_design_has_a_frame():
    """A front of one point: itself at zero, and a better one counts for more."""
    frame = frame_of(np.array([[-5.0, 0.0]]))
    assert covered(np.array([[-5.0, 0.0]]), frame) == pytest.approx(REFERENCE**2)
    assert covered(np.array([[-6.0, 0.0]]), frame) > REFERENCE**2


def test_goals_are_turned_so_that_less_is_better():
    """Most changes its sign; a missing figure or one that is no number leaves none."""
    goals = (StudyGoal("torque_nm", "most"), StudyGoal("mass_kg", "least"))
    assert turned({"torque_nm": 30.0, "mass_kg": 4.0}, goals) == (-30.0, 4.0)
    assert turned({"torque_nm": 30.0}, goals) is None
    assert turned({"torque_nm": float("nan"), "mass_kg": 4.0}, goals) is None
