"""Welding of points against a search of all pairs."""

import numpy as np
import pytest

from lamwright.solver.mesh_outline import WELD_TOL, weld


@pytest.mark.parametrize("count", [1, 2, 40, 150])
def test_weld_joins_what_is_near_and_nothing_else(count):
    """Copies of random points, each moved by less than half the tolerance, become one again.

    A third of the points share one x, so a sort along x alone does not part them. Exact: which
    copies belong together is known.
    """
    rng = np.random.default_rng(count)
    base = rng.uniform(size=count) + 1j * rng.uniform(size=count)
    base[::3] = 0.5 + 1j * base[::3].imag
    choice = rng.integers(0, count, 3 * count)
    moved = 0.2 * WELD_TOL * (rng.uniform(size=choice.size) + 1j * rng.uniform(size=choice.size))
    points, number = weld(base[choice] + moved)
    _, first = np.unique(choice, return_index=True)
    assert points.size == first.size
    rank = {int(choice[k]): n for n, k in enumerate(np.sort(first))}  # order of appearance
    assert number.tolist() == [rank[int(c)] for c in choice]


def test_weld_follows_chains_of_near_points():
    """Each point near the next one: all are one point, in whatever order they come."""
    rng = np.random.default_rng(0)
    line = 1.0 + 0.9 * WELD_TOL * np.arange(50) * np.exp(1j)
    points, number = weld(rng.permutation(line))
    assert points.size == 1
    assert not np.any(number)
