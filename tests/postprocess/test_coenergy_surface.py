"""The coenergy surface against a linear machine, a published law, and its own invariants."""

import pickle

import numpy as np
import pytest
from flux_laws import F1_POLE_PAIRS, F1_RATED, f1_linkages, f1_map, linear_map

from lamwright.postprocess.coenergy_surface import (
    coenergy,
    coenergy_surface,
    incremental,
    linkages,
    node_residual,
    torque,
)

GRID = np.linspace(0.0, 1.25 * F1_RATED, 15)
SURFACE = coenergy_surface(f1_map(GRID, GRID))


def places(count, reach):
    return np.random.default_rng(7).uniform(-reach, reach, (2, count))


def test_linear_machine_is_met_exactly():
    """Quadratics have no third slopes, so the surface is theirs; with magnets and oblique axes."""
    law = linear_map(2, 0.05, 0.01, np.linspace(-9, 9, 5), [-9, 1, 5, 9], l_dq=0.002, psi_m=0.1)
    surface = coenergy_surface(law)
    i_d, i_q = places(100, 9.0)
    for found, l_inc in zip(incremental(surface, i_d, i_q), (0.05, 0.002, 0.01), strict=True):
        assert found == pytest.approx(np.full(100, l_inc), abs=1e-12)
    assert linkages(surface, i_d, i_q)[1] == pytest.approx(0.01 * i_q + 0.002 * i_d - 0.1)
    assert (surface.even_d, surface.even_q) == (False, False)


def test_nodes_are_met():
    """The nodes' linkages and coenergy are conditions of the fit: only rounding is left."""
    flux_map = f1_map(GRID, GRID)
    assert node_residual(SURFACE, flux_map) < 1e-12
    own = coenergy(SURFACE, GRID[:, None], GRID)
    assert own == pytest.approx(flux_map.coenergy[..., 0], abs=1e-11)


def test_published_law_between_the_nodes():
    """F1 at 15 x 15: torque within 0.2 % of the greatest, the check's own tolerance."""
    i_d, i_q = places(2000, GRID[-1])
    psi_d, psi_q, _ = f1_linkages(i_d, i_q)
    law = 1.5 * F1_POLE_PAIRS * (psi_d * i_q - psi_q * i_d)
    assert torque(SURFACE, i_d, i_q) == pytest.approx(law, abs=0.002 * np.abs(law).max())


@pytest.mark.parametrize(
    ("i_peak", "best", "angle"),
    [(10.0, 6.17615, 50.004), (F1_RATED, 20.2858, 57.520)],
)
def test_most_torque_of_the_published_law(i_peak, best, angle):
    """F1 of the check values: torque within 0.2 %, angle within 0.5 degree electrical."""
    gamma = np.radians(np.linspace(30.0, 80.0, 5001))
    found = torque(SURFACE, i_peak * np.cos(gamma), i_peak * np.sin(gamma))
    assert found.max() == pytest.approx(best, rel=2e-3)
    assert np.degrees(gamma[found.argmax()]) == pytest.approx(angle, abs=0.5)


def test_no_energy_on_a_closed_path():
    """Reciprocity is exact: 3/2 of psi . di round any loop is zero."""
    turn = np.linspace(0.0, 2.0 * np.pi, 1000, endpoint=False)
    i_d, i_q = 12.0 + 9.0 * np.cos(turn), 11.0 + 8.0 * np.sin(turn)
    psi_d, psi_q = linkages(SURFACE, i_d, i_q)
    work = np.mean(-9.0 * psi_d * np.sin(turn) + 8.0 * psi_q * np.cos(turn))
    assert abs(work) < 1e-7 * np.mean(np.abs(psi_d)) * 9.0


def test_slopes_are_slopes():
    """Linkages and inductances by central differences of 1 mA: the error goes with its square."""
    i_d, i_q = places(50, GRID[-1] - 0.1)
    step = 1e-3
    psi_d, psi_q = linkages(SURFACE, i_d, i_q)
    up, down = coenergy(SURFACE, i_d + step, i_q), coenergy(SURFACE, i_d - step, i_q)
    assert (up - down) / (3.0 * step) == pytest.approx(psi_d, abs=1e-7)
    ahead, behind = (linkages(SURFACE, i_d, i_q + s) for s in (step, -step))
    _, l_dq, l_qq = incremental(SURFACE, i_d, i_q)
    assert (ahead[0] - behind[0]) / (2.0 * step) == pytest.approx(l_dq, abs=1e-7)
    assert (ahead[1] - behind[1]) / (2.0 * step) == pytest.approx(l_qq, abs=1e-7)
    assert psi_q.shape == (50,)


def test_negative_currents_are_mirrored():
    """W' is even in both currents: psi_d odd in i_d, even in i_q; l_dq odd in either."""
    i_d, i_q = np.abs(places(20, GRID[-1]))
    psi_d, psi_q = linkages(SURFACE, i_d, i_q)
    mirrored = linkages(SURFACE, -i_d, i_q)
    assert mirrored[0] == pytest.approx(-psi_d)
    assert mirrored[1] == pytest.approx(psi_q)
    assert incremental(SURFACE, i_d, -i_q)[1] == pytest.approx(-incremental(SURFACE, i_d, i_q)[1])
    assert linkages(SURFACE, np.array(0.0), np.array(5.0))[0] == 0.0


def test_magnets_leave_no_mirror_across_the_q_axis():
    """Where psi_q does not vanish at i_q = 0, negative i_q is unknown and refused."""
    surface = coenergy_surface(linear_map(2, 0.05, 0.01, GRID, GRID, psi_m=0.1))
    assert (surface.even_d, surface.even_q) == (True, False)
    with pytest.raises(ValueError, match=r"i_q: currents outside the map, 0 to 27\.4"):
        linkages(surface, np.array(-3.0), np.array(-3.0))


def test_bad_axes_are_refused():
    """Fewer than three currents show no bend; currents must rise."""
    for axis in ([0.0, 5.0], [0.0, 5.0, 4.0]):
        with pytest.raises(ValueError, match="i_d: not 3 or more rising currents"):
            coenergy_surface(linear_map(2, 0.05, 0.01, axis, GRID))


def test_a_surface_goes_to_another_process():
    """With the spline it holds: the same values to the last bit."""
    i_d, i_q = places(20, F1_RATED)
    other = pickle.loads(pickle.dumps(SURFACE))
    for own, sent in zip(linkages(SURFACE, i_d, i_q), linkages(other, i_d, i_q), strict=True):
        assert np.array_equal(own, sent)
