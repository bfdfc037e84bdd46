"""Means, ripple and apparent inductances of a flux map against the law it was made from."""

import math

import numpy as np
import pytest
from flux_laws import F1_POLE_PAIRS, f1_linkages, f1_map, linear_map

from lamwright.postprocess.flux_map import (
    apparent_inductances,
    linkage_torque,
    mean_coenergy,
    mean_linkages,
    mean_torque,
    ripple,
    torque_swing,
)

CURRENTS = np.linspace(0.0, 30.0, 7)


def test_means_are_those_of_the_law():
    """Linkages of the law do not change with the position: only rounding may differ."""
    flux_map = f1_map(CURRENTS, CURRENTS, swing=0.3)
    psi_d, psi_q, coenergy = f1_linkages(CURRENTS[:, None], CURRENTS)
    torque = 1.5 * F1_POLE_PAIRS * (psi_d * CURRENTS - psi_q * CURRENTS[:, None])
    assert mean_linkages(flux_map)[0] == pytest.approx(psi_d, abs=1e-14)
    assert mean_linkages(flux_map)[1] == pytest.approx(psi_q, abs=1e-14)
    assert mean_coenergy(flux_map) == pytest.approx(coenergy, abs=1e-13)
    assert mean_torque(flux_map) == pytest.approx(torque, abs=1e-12)
    assert linkage_torque(flux_map) == pytest.approx(torque, abs=1e-12)


def test_ripple_is_that_of_the_waveform_put_in():
    """Order 6 of amplitude a swings by 2 a exactly; without a mean there is no ripple."""
    flux_map = linear_map(3, 0.04, 0.01, CURRENTS, CURRENTS, swing=0.25)
    mean = 1.5 * 3 * 0.03 * CURRENTS[:, None] * CURRENTS
    assert torque_swing(flux_map) == pytest.approx(np.full((7, 7), 0.5), rel=1e-12)
    assert ripple(flux_map)[1:, 1:] == pytest.approx(0.5 / mean[1:, 1:], rel=1e-12)
    assert np.isnan(ripple(flux_map)[0]).all()


def test_apparent_inductances_are_those_of_a_linear_machine():
    """L = psi / i; at zero current there is none."""
    l_d, l_q = apparent_inductances(linear_map(2, 0.04, 0.01, CURRENTS, CURRENTS))
    assert l_d[1:] == pytest.approx(np.full((6, 7), 0.04), rel=1e-13)
    assert l_q[:, 1:] == pytest.approx(np.full((7, 6), 0.01), rel=1e-13)
    assert all(math.isnan(value) for value in (*l_d[0], *l_q[:, 0]))
