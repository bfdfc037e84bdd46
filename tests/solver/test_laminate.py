"""A block of sheets as one material: bounds, its two parts, least energy, derivatives."""

import numpy as np
import pytest
from steel_s19 import s19_exact

from lamwright.solver.laminate import Laminate
from lamwright.solver.steel import MU_0, linear_law

STEEL = s19_exact()
# Unsaturated, at the knee of the sheets, beyond it, across and along, both signs.
B_D = np.array([0.0, 0.2, 0.9, 1.2, 1.6, -1.3, 0.0, 0.7, 2.4])
B_Q = np.array([0.0, 0.1, 0.0, 0.3, -0.8, 0.2, 1.0, 1.9, 0.5])


@pytest.mark.parametrize("share", [0.0, 0.2, 0.4, 0.5])
def test_linear_sheets_meet_both_bounds(share: float) -> None:
    """Checks A6.3: mu_d = (1 - k) mu + k, mu_q = 1 / ((1 - k)/mu + k); exact."""
    state = Laminate(linear_law(2000.0), share).state(np.array([0.8]), np.array([0.03]))
    mu_d = (1.0 - share) * 2000.0 + share
    mu_q = 1.0 / ((1.0 - share) / 2000.0 + share)
    assert state.h_d == pytest.approx(0.8 / (MU_0 * mu_d), rel=1e-9)
    assert state.h_q == pytest.approx(0.03 / (MU_0 * mu_q), rel=1e-9)
    assert state.dd == pytest.approx(1.0 / (MU_0 * mu_d), rel=1e-9)
    assert state.qq == pytest.approx(1.0 / (MU_0 * mu_q), rel=1e-9)


def test_sheets_alone_are_the_steel() -> None:
    """K = 0: H = nu(|B|^2) B in both directions; to rounding."""
    state = Laminate(STEEL, 0.0).state(B_D, B_Q)
    nu, _ = STEEL(B_D**2 + B_Q**2)
    assert state.h_d == pytest.approx(nu * B_D, rel=1e-9, abs=1e-9)
    assert state.h_q == pytest.approx(nu * B_Q, rel=1e-9, abs=1e-9)


@pytest.mark.parametrize("share", [0.3, 0.5])
def test_sheets_and_gaps_share_field_and_flux(share: float) -> None:
    """Along: one H, fluxes add. Across: one B, magnetomotive forces add. To 1e-9."""
    block = Laminate(STEEL, share)
    state, b_t = block.state(B_D, B_Q), block.sheet_flux(B_D, B_Q)
    nu, _ = STEEL(b_t**2 + B_Q**2)
    assert (1.0 - share) * b_t + share * MU_0 * state.h_d == pytest.approx(B_D, abs=1e-9)
    assert state.h_d == pytest.approx(nu * b_t)
    assert (1.0 - share) * nu * B_Q + share * B_Q / MU_0 == pytest.approx(state.h_q)


def test_energy_is_the_least_of_all_splits() -> None:
    """No split of the flux between sheets and gaps stores less: scanned, to the scan's 1e-5."""
    share = 0.4
    block = Laminate(STEEL, share)
    split = np.linspace(0.0, 3.0, 30001)
    for b_d, b_q in ((1.2, 0.3), (1.6, 0.8), (0.2, 0.1)):
        gap = (b_d - (1.0 - share) * split) / share
        stored = (1.0 - share) * STEEL.energy_density(split**2 + b_q**2)
        stored += share * (gap**2 + b_q**2) / (2.0 * MU_0)
        found = block.energy_density(np.array([b_d]), np.array([b_q]))[0]
        assert found == pytest.approx(stored.min(), rel=1e-5)


@pytest.mark.parametrize("share", [0.2, 0.5])
def test_field_and_slopes_are_derivatives_of_the_energy(share: float) -> None:
    """Central differences of 1e-5 T: the steel's table has kinks in its second slope, 1e-3 of it.

    Slopes are symmetric and positive, so the field's energy is convex.
    """
    block, eps = Laminate(STEEL, share), 1e-5
    state = block.state(B_D, B_Q)
    for d, q, h, slopes in (
        (eps, 0.0, state.h_d, (state.dd, state.dq)),
        (0.0, eps, state.h_q, (state.dq, state.qq)),
    ):
        ahead, behind = block.state(B_D + d, B_Q + q), block.state(B_D - d, B_Q - q)
        work = block.energy_density(B_D + d, B_Q + q) - block.energy_density(B_D - d, B_Q - q)
        assert work / (2.0 * eps) == pytest.approx(h, rel=1e-5, abs=1e-2)
        scale = np.maximum(state.dd, state.qq)
        for after, before, slope in (
            (ahead.h_d, behind.h_d, slopes[0]),
            (ahead.h_q, behind.h_q, slopes[1]),
        ):
            by_difference = (after - before) / (2.0 * eps)
            assert np.abs(by_difference - slope).max() < 1e-3 * scale.max()
            assert np.all(np.abs(by_difference - slope) < 2e-2 * scale)
    assert np.all(state.dd > 0.0)
    assert np.all(state.dd * state.qq > state.dq**2)
