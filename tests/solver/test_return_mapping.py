"""The return to the yield surface: closest point, hardening, tangent against differences."""

import numpy as np
import pytest

from lamwright.solver.return_mapping import (
    YieldCurve,
    dissipation,
    equivalent,
    joined,
    linear_hardening,
    perfectly_plastic,
    returned,
    split,
    tangent,
)

YIELD, E, NU = 350e6, 210e9, 0.3
A, G = 0.5 * E / (1.0 - NU), 0.5 * E / (1.0 + NU)
TABLE = YieldCurve(np.array([0.0, 2e-3, 1e-2]), np.array([350e6, 400e6, 430e6]))
CASES = [
    ("von Mises", perfectly_plastic(YIELD)),
    ("von Mises", linear_hardening(YIELD, 5e9)),
    ("von Mises", TABLE),
    ("Tresca", perfectly_plastic(YIELD)),
]


def trials(criterion, n=2000):
    """Strains (n, 3) beyond yield and their trial stresses m, d, t."""
    strain = np.random.default_rng(1).normal(size=(n, 3)) * 5e-3
    trial = split_of(strain)
    out = equivalent(trial, criterion) > 1.01 * YIELD
    return strain[out], trial[out]


def split_of(strain):
    """m, d, t in Pa of elastic strains."""
    x, y, g = strain.T
    return np.stack([A * (x + y), G * (x - y), G * g], axis=-1)


def mapped(trial, criterion, curve):
    """The return from the virgin state."""
    n = len(trial)
    return returned(trial, np.zeros(n), np.full(n, A), np.full(n, G), curve, criterion)


@pytest.mark.parametrize(("criterion", "curve"), CASES)
def test_stresses_end_on_the_surface(criterion, curve):
    """Equivalent stress = yield stress at the new plastic strain, to rounding.

    The gained strain is the plastic work over the yield stress.
    """
    _, trial = trials(criterion)
    back = mapped(trial, criterion, curve)
    level = curve.at(back.hardened)[0]
    assert equivalent(back.stress, criterion) == pytest.approx(level, rel=1e-12)
    lost = (trial - back.stress) / [A, G, G]
    assert back.hardened == pytest.approx(np.sum(lost * back.stress, axis=1) / level, rel=1e-9)


@pytest.mark.parametrize("criterion", ["von Mises", "Tresca"])
def test_perfectly_plastic_return_is_the_closest_point(criterion):
    """(trial - s) C^-1 (other - s) <= 0 for every admissible stress: the definition."""
    _, trial = trials(criterion)
    back = mapped(trial, criterion, perfectly_plastic(YIELD))
    other = np.random.default_rng(2).normal(size=(3000, 3))
    other *= YIELD / equivalent(other, criterion)[:, None]
    lost = (trial - back.stress) / [A, G, G]
    work = lost @ other.T - np.sum(lost * back.stress, axis=1)[:, None]
    assert work.max() <= 1e-9 * YIELD * np.abs(lost).max()


@pytest.mark.parametrize("criterion", ["von Mises", "Tresca"])
def test_dissipation_is_the_largest_work_of_admissible_stresses(criterion):
    """Support function of the surface; 4e5 stresses on it miss its maximum by at most 2 %."""
    rng = np.random.default_rng(3)
    other = rng.normal(size=(400_000, 3))
    other *= 1.0 / equivalent(other, criterion)[:, None]
    stress = joined(other)
    for strain in rng.normal(size=(10, 3)):
        most = float(np.max(stress @ strain))
        bound = float(dissipation(strain, criterion))
        assert most <= bound * (1.0 + 1e-12)
        assert most == pytest.approx(bound, rel=2e-2)


@pytest.mark.parametrize(("criterion", "curve"), CASES)
def test_tangent_is_the_derivative_of_the_returned_stress(criterion, curve):
    """Central differences err by step^2 and by rounding: measured 3e-10 of E.

    Points within a step of a corner of surface or curve have no derivative: at most 2 in 100.
    """
    strain, trial = trials(criterion)
    n = len(strain)
    a, g = np.full(n, A), np.full(n, G)
    back = mapped(trial, criterion, curve)
    slope = tangent(back, trial, a, g, curve, criterion)
    assert slope == pytest.approx(slope.transpose(0, 2, 1), abs=1e-6 * E)
    way, step = np.random.default_rng(4).normal(size=strain.shape), 1e-8
    ends = [
        joined(mapped(split_of(strain + k * step * way), criterion, curve).stress)
        for k in (1.0, -1.0)
    ]
    by_difference = (ends[0] - ends[1]) / (2.0 * step)
    exact = np.einsum("nij,nj->ni", slope, way)
    error = np.abs(by_difference - exact).max(axis=1) / E
    assert np.quantile(error, 0.98) < 1e-8


def test_pulled_in_one_direction_follows_the_curve():
    """Uniaxial stress: E eps = s + E p with s = s_y(p), here by bisection on the sideways strain.

    Linear hardening h: s = (yield + h eps) / (1 + h / E), exact.
    """
    modulus, strain = 5e9, 6e-3
    curve = linear_hardening(YIELD, modulus)
    low, high = -strain, 0.0
    for _ in range(200):
        side = 0.5 * (low + high)
        trial = split_of(np.array([[strain, side, 0.0]]))
        stress = joined(mapped(trial, "von Mises", curve).stress)[0]
        low, high = (side, high) if stress[1] < 0.0 else (low, side)
    assert stress[0] == pytest.approx((YIELD + modulus * strain) / (1 + modulus / E), rel=1e-10)
    assert split(stress[None])[0] == pytest.approx([0.5 * stress[0], 0.5 * stress[0], 0.0])


def test_a_table_ends_flat():
    """Beyond its last point the steel is taken to be perfectly plastic: nothing is invented."""
    stress, slope = TABLE.at(np.array([0.0, 1e-3, 1e-2, 0.5]))
    assert stress == pytest.approx([350e6, 375e6, 430e6, 430e6])
    assert slope == pytest.approx([25e9, 25e9, 0.0, 0.0])
