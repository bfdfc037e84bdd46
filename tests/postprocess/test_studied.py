"""What the pictures of a study are drawn from: fronts, effects, grids."""

import numpy as np
import pytest

from lamwright.postprocess.studied import (
    StudyAxis,
    best_first,
    best_of,
    cells_of,
    effect_of,
    front_of,
    is_grid,
)

NAN = float("nan")


def axis(values, **fields):
    return StudyAxis("x", "x", "", np.array(values, dtype=float), **fields)


@pytest.mark.parametrize("senses", [("most", "least"), ("least", "least"), ("least", "most")])
def test_a_front_is_what_no_design_beats(senses):
    """Against the definition, pair by pair, on 60 designs with ties and gaps (seed 3)."""
    random = np.random.default_rng(3)
    values = random.integers(0, 12, (2, 60)).astype(float)
    values[0, :4], values[1, 2:6] = NAN, NAN
    among = random.random(60) < 0.8
    first, second = (axis(v, sense=s) for v, s in zip(values, senses, strict=True))
    front = front_of(first, second, among)
    losses = np.array([first.losses, second.losses])
    chosen = [k for k in range(60) if among[k] and np.isfinite(losses[:, k]).all()]
    beaten = {
        k
        for k in chosen
        for m in chosen
        if (losses[:, m] <= losses[:, k]).all() and (losses[:, m] < losses[:, k]).any()
    }
    best = {tuple(losses[:, k]) for k in chosen if k not in beaten}
    assert {tuple(losses[:, k]) for k in front} == best
    assert len(front) == len(best)
    assert (np.diff(first.losses[front]) > 0.0).all()


def test_the_best_holds_every_limit_where_one_does():
    """Else it is the best of all; NaN never is."""
    goal = axis([3.0, 9.0, NAN, 5.0], sense="most")
    assert best_of(goal, np.array([True, False, True, True])) == 3
    assert best_of(goal, np.zeros(4, dtype=bool)) == 1
    assert best_of(axis([NAN], sense="most"), np.array([True])) is None


def test_limits_hold_at_equality_and_not_without_a_value():
    """Both ends of a range."""
    held = axis([1.0, 2.0, 3.0, NAN, 3.1], least=2.0, most=3.0).holds
    assert held.tolist() == [False, True, True, False, False]


def test_effects_are_means_and_deviations_of_those_that_share_a_value():
    """In closed form; a single design has no deviation, a gap does not count."""
    key = axis([1.0, 1.0, 2.0, 2.0, 3.0, 3.0], is_key=True)
    effect = effect_of(key, axis([2.0, 4.0, 7.0, NAN, 1.0, 1.0]))
    assert effect.at.tolist() == [1.0, 2.0, 3.0]
    assert effect.mean.tolist() == [3.0, 7.0, 1.0]
    assert effect.deviation == pytest.approx([np.sqrt(2.0), 0.0, 0.0])
    assert effect.count.tolist() == [2, 1, 2]


def test_effects_of_many_values_are_taken_over_ranges_of_equal_size():
    """A line over 80 values: eight ranges of ten, each mean on the line."""
    at = np.random.default_rng(1).permutation(80).astype(float)
    effect = effect_of(axis(at, is_key=True), axis(3.0 * at + 1.0))
    assert effect.count.tolist() == [10] * 8
    assert effect.mean == pytest.approx(3.0 * effect.at + 1.0)


def test_a_grid_is_told_from_a_scattered_set():
    """A grid with one hole is one; 16 points with values of their own are none."""
    first, second = (axis(v.ravel(), is_key=True) for v in np.meshgrid([1, 2, 4], [5, 6]))
    assert is_grid((first, second))
    holed = [axis(one.values[:-1], is_key=True) for one in (first, second)]
    assert is_grid(holed)
    assert cells_of(holed)[2].tolist() == [[0, 1, 2], [3, 4, -1]]
    scattered = np.random.default_rng(2).random((2, 16))
    assert not is_grid([axis(one, is_key=True) for one in scattered])
    assert not is_grid([first])


def test_the_best_come_first_and_then_those_behind():
    """A front of four, and one of two behind it: ends first, then the next front."""
    first, second = axis([4, 3, 2, 1, 3, 1], sense="most"), axis([9, 5, 3, 1, 8, 4], sense="least")
    every = np.ones(6, dtype=bool)
    assert front_of(first, second, every).tolist() == [0, 1, 2, 3]
    assert best_first(first, second, every, 3) == [0, 2, 3]
    assert best_first(first, second, every, 9) == [0, 1, 2, 3, 4, 5]
