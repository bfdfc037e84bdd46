"""Surfaces with their linkages off by a share: what they are, and what figures make of them."""

import numpy as np
import pytest
from flux_laws import f1_map, linear_map

from lamwright.postprocess.coenergy_surface import coenergy_surface, incremental, linkages
from lamwright.postprocess.map_figures import map_figures
from lamwright.postprocess.shifted_surface import shift_errors, shifted, with_angle

AXIS = np.linspace(0.0, 15.0, 7)
BOTH = np.linspace(-15.0, 15.0, 9)
L_D, L_Q = 0.12, 0.02  # invented, H


def test_linkages_of_a_linear_machine_are_off_by_the_shares():
    """Each axis has its own linkage there, so both shifts are exact; magnets' part counts too."""
    surface = coenergy_surface(linear_map(2, L_D, L_Q, AXIS, BOTH, psi_m=0.1))
    i_d, i_q = np.array([3.0, 8.0]), np.array([-4.0, 11.0])
    own_d, own_q = linkages(surface, i_d, i_q)
    off_d, off_q = linkages(shifted(surface, 0.02, -0.03), i_d, i_q)
    assert off_d == pytest.approx(1.02 * own_d, rel=1e-9)
    assert off_q == pytest.approx(0.97 * own_q, rel=1e-9)


def test_a_saturating_machine_keeps_psi_d_where_there_is_no_i_q():
    """psi_q is off by its share everywhere, psi_d on its own axis: the definition."""
    surface = coenergy_surface(f1_map(np.linspace(0.0, 50.0, 9), np.linspace(0.0, 50.0, 9)))
    moved = shifted(surface, 0.01, 0.02)
    i_d, i_q, none = np.array([5.0, 30.0]), np.array([10.0, 40.0]), np.zeros(2)
    assert linkages(moved, i_d, i_q)[1] == pytest.approx(1.02 * linkages(surface, i_d, i_q)[1])
    assert linkages(moved, i_d, none)[0] == pytest.approx(1.01 * linkages(surface, i_d, none)[0])
    assert incremental(moved, i_d, i_q)[1] == pytest.approx(
        1.02 * incremental(surface, i_d, i_q)[1], rel=1e-6
    )


def test_errors_of_figures_are_sums_of_what_each_shift_does():
    """Linear machine at 45 degrees: T = 3/4 p (L_d - L_q) I^2, by each inductance's share."""
    flux_map = linear_map(2, L_D, L_Q, AXIS, AXIS)
    surface = coenergy_surface(flux_map)
    own = map_figures(flux_map, surface, 12.0)
    others = [
        (map_figures(flux_map, shifted(surface, *share), 12.0),) for share in ((0.01, 0), (0, 0.02))
    ]
    found = shift_errors((own,), others)
    by_share = 0.75 * 2 * 12.0**2 * (0.01 * L_D + 0.02 * L_Q)
    assert found["rated_torque_nm"] == pytest.approx(by_share, rel=1e-6)
    assert found["rated_l_dd_mh"] == pytest.approx(1e3 * 0.01 * L_D, rel=1e-6)
    assert "rated_current_a" not in found  # stated
    assert with_angle(found, 0.01, ("rated_current_angle_deg",))[
        "rated_current_angle_deg"
    ] == pytest.approx(np.degrees(0.01))
