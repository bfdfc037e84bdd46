"""Frictionless contact on few contacts, against every choice of closed ones and a punch."""

import itertools

import numpy as np
import pytest

from lamwright.geometry.errors import NotConverged
from lamwright.solver.contact import ContactProblem, _least_squares, closed_contacts


def free(compliance: np.ndarray, gap: np.ndarray) -> ContactProblem:
    return ContactProblem(compliance, gap, np.zeros((len(gap), 0)), np.zeros(0))


def found_by_trial(compliance: np.ndarray, gap: np.ndarray) -> np.ndarray:
    """The forces of the one set of closed contacts whose forces and gaps are all positive."""
    n = len(gap)
    for chosen in itertools.product([False, True], repeat=n):
        closed = np.array(chosen)
        force = np.zeros(n)
        force[closed] = np.linalg.solve(compliance[np.ix_(closed, closed)], -gap[closed])
        if np.all(force >= 0.0) and np.all((compliance @ force + gap)[~closed] >= 0.0):
            return force
    raise AssertionError("no solution")


def random_compliance(rng: np.random.Generator, n: int) -> np.ndarray:
    root = rng.normal(size=(n, n))
    return 1e-9 * (root @ root.T + 0.1 * np.eye(n))


@pytest.mark.parametrize("method", [closed_contacts, _least_squares])
def test_the_one_solution_is_found_among_all_choices(method):
    """Uniqueness of a positive definite problem (derived); to rounding. Active set and fallback."""
    rng = np.random.default_rng(7)
    for _ in range(60):
        compliance = random_compliance(rng, 7)
        gap = 1e-5 * rng.normal(size=7)
        state = method(free(compliance, gap))
        want = found_by_trial(compliance, gap)
        assert state.force == pytest.approx(want, abs=1e-7 * np.abs(want).max(initial=1.0))
        assert np.all(state.force[~state.closed] == 0.0)
        assert np.all(state.gap[state.closed] == 0.0)


def test_bodies_apart_bear_nothing():
    """All gaps open: no force, gaps as they are."""
    gap = np.array([1e-6, 2e-6, 0.5e-6])
    state = closed_contacts(free(random_compliance(np.random.default_rng(1), 3), gap))
    assert np.all(state.force == 0.0)
    assert state.gap == pytest.approx(gap)


@pytest.mark.parametrize("share", [0.0, 0.1, 0.25, 0.4])
def test_rigid_block_on_springs_lifts_off_beyond_a_sixth(share):
    """Load N at e from the middle of a base b: beyond b/6 it bears on 3 (b/2 - e) alone.

    Statics of a linear pressure, textbook matter; greatest pressure 2 N / length, or
    N/b (1 + 6 e / b) where all of it bears. 400 springs: 1 %.
    """
    n, base, load = 400, 0.02, 1000.0
    place = base * ((np.arange(n) + 0.5) / n - 0.5)
    motion = -np.column_stack([np.ones(n), place])
    eccentric = share * base
    problem = ContactProblem(
        1e-9 * np.eye(n), np.full(n, 1e-4), motion, -load * np.array([1.0, eccentric])
    )
    state = closed_contacts(problem)
    pressure = state.force * n / base
    bears = base if share <= 1 / 6 else 3.0 * (0.5 * base - eccentric)
    most = load / base * (1.0 + 6.0 * share) if share <= 1 / 6 else 2.0 * load / bears
    assert state.force.sum() == pytest.approx(load, rel=1e-9)
    assert state.force @ place == pytest.approx(load * eccentric, abs=1e-9 * load * base)
    assert pressure.max() == pytest.approx(most, rel=1e-2)
    assert np.mean(state.closed) * base == pytest.approx(bears, rel=1e-2)


def test_a_load_that_nothing_can_balance_is_told():
    """A block loaded beside its base tips over: no figure."""
    place = np.linspace(-0.01, 0.01, 9)
    problem = ContactProblem(
        1e-9 * np.eye(9),
        np.zeros(9),
        -np.column_stack([np.ones(9), place]),
        -np.array([1.0, 0.02]),
    )
    with pytest.raises(NotConverged, match="contact not found"):
        closed_contacts(problem)
