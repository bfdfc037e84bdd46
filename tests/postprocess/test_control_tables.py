"""The tables of currents over torque and speed, and what a drive errs by that reads them."""

import numpy as np
import pytest
from flux_laws import f1_map, linear_map

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.control_tables import (
    drive_table,
    planning_table,
    reading_error,
    speed_limits,
)
from lamwright.postprocess.pull_out import pull_out_curve
from lamwright.postprocess.terminals import terminals
from lamwright.postprocess.torque_lines import torque_lines

AXIS, BOTH = np.linspace(0.0, 25.0, 15), np.linspace(-25.0, 25.0, 29)
LONG = np.linspace(0.0, 50.0, 15)


def lines_of(flux_map, current=40.0, line_voltage=370.0):
    return torque_lines(
        terminals(
            coenergy_surface(flux_map),
            resistance=0.54,
            end_inductance=0.0,
            current_limit=current,
            line_voltage=line_voltage,
        )
    )


LAW = lines_of(f1_map(LONG, LONG))
PULL_OUT = pull_out_curve(LAW)
LIMIT = speed_limits(LAW, 1400.0, 6)


def test_planning_table_marks_what_is_out_of_reach():
    """F1 law: all torques at standstill, few at speed; empty exactly above the limit."""
    table = planning_table(LAW, PULL_OUT, LIMIT, 8)
    assert table.axis[[0, -1]] == pytest.approx([0.0, 43.817], rel=2e-3)  # F1, 40 A
    above = table.axis[:, None] > table.limit.torque * (1.0 + 1e-9)
    assert np.array_equal(~table.points.is_reachable, above)
    for values in (table.points.i_d, table.values.voltage, table.values.linkage):
        assert np.array_equal(np.isnan(values), above)


def test_power_factor_and_voltage_close_the_power():
    """1.5 U I cos phi = shaft power T w / p + copper loss (power balance of steady state)."""
    table = planning_table(LAW, PULL_OUT, LIMIT, 8)
    held = table.points.is_reachable & (table.points.torque > 0.0)
    current = np.hypot(table.points.i_d, table.points.i_q)[held]
    values, points = table.values, table.points
    power = 1.5 * (values.voltage * values.power_factor)[held] * current
    shaft = points.torque[held] * points.omega_e[held] / 2.0
    assert power == pytest.approx(shaft + 1.5 * 0.54 * current**2, rel=1e-9)


def test_more_torque_or_speed_leaves_less_margin():
    """At one speed the pull-out ratio falls as torque grows (constant or growing flux apart)."""
    values = planning_table(LAW, PULL_OUT, LIMIT, 8).values
    assert np.nanmin(values.pull_out) >= 1.0
    weakened = values.pull_out[1:, -1]
    weakened = weakened[np.isfinite(weakened)]
    assert np.all(np.diff(weakened) < 0.0)


def test_every_node_of_the_drives_table_is_reachable():
    """Shares of the limit, so no cell is cut by it; the last row is the limit itself."""
    table = drive_table(LAW, PULL_OUT, LIMIT, 8)
    assert table.points.is_reachable.all()
    assert np.all(np.isfinite(table.points.i_d))
    assert table.points.torque[-1] == pytest.approx(LIMIT.torque)


@pytest.mark.slow
def test_reading_errs_less_on_finer_tables():
    """Bilinear reading: half the step takes a smooth error to a quarter; kinks leave about half.

    Currents 5 % too large give about 10 % more torque, which must be seen.
    """
    errors = []
    for count, factor in ((4, 1.0), (8, 1.0), (4, 1.05)):
        limit = speed_limits(LAW, 1400.0, count)
        table = drive_table(LAW, PULL_OUT, limit, count)
        i_d, i_q = factor * table.points.i_d, factor * table.points.i_q
        errors.append(reading_error(LAW, table, limit=limit.torque, i_d=i_d, i_q=i_q))
    coarse, fine, wrong = errors
    assert fine.places == 21**2
    assert 0.0 < fine.torque_rms < 0.5 * coarse.torque_rms
    assert 0.0 < fine.torque_most < coarse.torque_most < 9.0
    assert 0.0 < fine.current_rms < coarse.current_rms
    assert fine.voltage_over < coarse.voltage_over
    assert wrong.torque_rms > coarse.torque_rms + 0.01 * LIMIT.torque.max()


def test_reading_a_coarse_table_errs():
    """Three shares by three speeds: far off in torque, and over the voltage between the nodes."""
    limit = speed_limits(LAW, 1400.0, 3)
    table = drive_table(LAW, PULL_OUT, limit, 3)
    error = reading_error(
        LAW, table, limit=limit.torque, i_d=table.points.i_d, i_q=table.points.i_q
    )
    assert error.places == 6**2
    assert 0.3 < error.torque_rms < error.torque_most
    assert 0.3 < error.current_rms < error.current_most
    assert error.voltage_over > 1.0


def test_speeds_that_magnets_forbid_end_the_drives_table():
    """Psi_m w > U beyond some speed: the drive's speeds end before, the planning table is empty."""
    lines = lines_of(linear_map(2, 0.05, 0.01, AXIS, BOTH, psi_m=0.3), current=20.0)
    limit = speed_limits(lines, 10000.0, 9)
    pull_out = pull_out_curve(lines)
    assert np.isnan(limit.torque[-1])
    table = drive_table(lines, pull_out, limit, 4)
    assert 0.0 < table.omega_e[-1] < 10000.0
    assert table.points.is_reachable.all()
    assert not planning_table(lines, pull_out, limit, 4).points.is_reachable[:, -1].any()


def test_a_supply_too_weak_is_one_line():
    """Magnets against a hundredth of a volt: torque at standstill alone."""
    lines = lines_of(
        linear_map(2, 0.05, 0.01, AXIS, BOTH, psi_m=0.3), current=20.0, line_voltage=0.5
    )
    limit = speed_limits(lines, 1000.0, 5)
    with pytest.raises(LamwrightError, match=r"no torque above standstill.*supply_voltage_v") as e:
        drive_table(lines, pull_out_curve(lines), limit, 4)
    assert "\n" not in str(e.value)
