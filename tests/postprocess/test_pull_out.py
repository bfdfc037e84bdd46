"""Load angle and pull-out against the linear machine and a search by trial."""

import numpy as np
import pytest
from flux_laws import f1_map, linear_map

from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.inverse_map import currents_of
from lamwright.postprocess.pull_out import load_angle, pull_out_curve, pull_out_ratio
from lamwright.postprocess.terminals import shaft_torque, terminal_linkages, terminals
from lamwright.postprocess.torque_lines import torque_lines

AXIS, LONG = np.linspace(0.0, 25.0, 15), np.linspace(0.0, 50.0, 15)


def drive_of(flux_map, current):
    return terminals(
        coenergy_surface(flux_map),
        resistance=0.5,
        end_inductance=0.001,
        current_limit=current,
        line_voltage=400.0,
    )


def test_linear_machine_pulls_out_at_45_degrees():
    """T ~ sin 2 delta at constant flux (derived), so the ratio is 1 / sin 2 delta."""
    drive = drive_of(linear_map(2, 0.05, 0.01, AXIS, AXIS), 20.0)
    curve = pull_out_curve(torque_lines(drive))
    i_d, i_q = np.array([4.0, 3.0, 5.0]), np.array([4.0, 9.0, 20.0])
    psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
    delta = load_angle(psi_d, psi_q, 1)
    ratio, is_bound = pull_out_ratio(curve, shaft_torque(drive, i_d, i_q), np.hypot(psi_d, psi_q))
    assert ratio == pytest.approx(1.0 / np.sin(2.0 * delta), rel=5e-5)
    assert not is_bound.any()


def test_law_pulls_out_where_no_angle_gives_more():
    """The curve against 2 000 load angles at the same flux, read back through the inverse map."""
    drive = drive_of(f1_map(LONG, LONG), 40.0)
    curve = pull_out_curve(torque_lines(drive))
    flux, delta = np.array([0.1, 0.2, 0.3]), np.linspace(0.0, 0.5 * np.pi, 2000)
    i_d, i_q = currents_of(drive, flux[:, None] * np.cos(delta), flux[:, None] * np.sin(delta))
    on_map = np.isfinite(i_d)
    torque = shaft_torque(drive, np.nan_to_num(i_d), np.nan_to_num(i_q))
    best = np.where(on_map, torque, 0.0).max(axis=1)
    ratio, is_bound = pull_out_ratio(curve, best, flux)
    assert ratio == pytest.approx(np.ones(3), abs=1e-4)
    assert np.all(ratio >= 1.0 - 1e-6)
    assert is_bound.tolist() == [False, False, False]


def test_a_flux_whose_pull_out_needs_more_current_is_a_bound():
    """Of the linear machine: pull-out at psi_d = psi_q needs i_q = psi / (sqrt 2 (L_q + L_w))."""
    drive = drive_of(linear_map(2, 0.05, 0.01, AXIS, AXIS), 20.0)
    curve = pull_out_curve(torque_lines(drive))
    edge = 25.0 * np.sqrt(2.0) * 0.011
    flux = edge * np.array([0.95, 1.05])
    _, is_bound = pull_out_ratio(curve, np.ones(2), flux)
    assert is_bound.tolist() == [False, True]


def test_no_torque_has_no_ratio():
    """Nothing over zero: nan, not infinity."""
    drive = drive_of(linear_map(2, 0.05, 0.01, AXIS, AXIS), 20.0)
    ratio, is_bound = pull_out_ratio(pull_out_curve(torque_lines(drive)), np.zeros(1), np.ones(1))
    assert np.isnan(ratio[0])
    assert not is_bound[0]
