"""Operating points within both limits against closed forms and against a search by trial."""

import math

import numpy as np
import pytest
from flux_laws import f1_map, linear_map

from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.control_points import control_points
from lamwright.postprocess.terminals import (
    has_both_signs,
    shaft_torque,
    square_voltage,
    terminal_linkages,
    terminals,
)
from lamwright.postprocess.torque_limit import torque_limit
from lamwright.postprocess.torque_lines import torque_lines

L_D, L_Q = 0.05, 0.01  # invented, H
AXIS, BOTH = np.linspace(0.0, 25.0, 15), np.linspace(-25.0, 25.0, 29)
TRIALS = 401  # of amplitude and of angle


def drive_of(flux_map, current=20.0, resistance=0.5, line_voltage=400.0):
    return terminals(
        coenergy_surface(flux_map),
        resistance=resistance,
        end_inductance=0.0,
        current_limit=current,
        line_voltage=line_voltage,
    )


DRIVES = {
    "linear": drive_of(linear_map(2, L_D, L_Q, AXIS, AXIS)),
    "outward magnets": drive_of(linear_map(2, L_D, L_Q, AXIS, BOTH, psi_m=-0.05)),
    "strong magnets": drive_of(linear_map(2, L_D, L_Q, AXIS, BOTH, psi_m=0.25)),
    "law": drive_of(f1_map(np.linspace(0.0, 50.0, 15), np.linspace(0.0, 50.0, 15)), 40.0),
}
SPEEDS = np.array([0.0, 150.0, 400.0, 700.0, 1100.0, 2500.0])  # electrical rad/s


def table(name):
    drive = DRIVES[name]
    lines = torque_lines(drive)
    limit = torque_limit(drive, SPEEDS)
    torque = np.linspace(0.0, 1.0, 8) * np.nanmax(limit.torque)
    return drive, limit, control_points(lines, torque[:, None], SPEEDS, limit.torque)


@pytest.fixture(scope="module", params=list(DRIVES))
def solved(request):
    return table(request.param)


def test_every_point_keeps_what_it_promises(solved):
    """The asked torque, within both limits; what is not reachable has no currents at all."""
    drive, _, points = solved
    held = points.is_reachable
    i_d, i_q = points.i_d[held], points.i_q[held]
    assert shaft_torque(drive, i_d, i_q) == pytest.approx(points.torque[held], abs=1e-8)
    assert np.all(np.hypot(i_d, i_q) <= drive.current_limit * (1.0 + 1e-7))
    voltage = np.sqrt(square_voltage(drive, i_d, i_q, points.omega_e[held]))
    assert np.all(voltage <= drive.voltage_limit * (1.0 + 1e-7))
    assert np.all(np.isnan(points.i_d[~held]))
    assert np.all(np.isnan(points.i_q[~held]))
    assert held[0].all()  # zero torque costs nothing, or what balances the magnets
    assert not held[-1, -1]
    weakened = points.is_weakened[held]
    assert voltage[weakened] == pytest.approx(np.full(weakened.sum(), drive.voltage_limit))


def test_no_trial_is_better(solved):
    """400 amplitudes by 400 angles: none has more torque, none needs less current.

    Trials can only be worse. The best of them lies up to a step off, which was measured to cost
    5.4 % of the torque where the limits of strong magnets cross at a small angle.
    """
    drive, limit, points = solved
    first = -0.5 * math.pi if has_both_signs(drive) else 0.0
    gamma = np.linspace(first, 0.5 * math.pi, TRIALS)
    amplitude = np.linspace(0.0, drive.current_limit, TRIALS)[:, None]
    i_d, i_q = drive.side * amplitude * np.cos(gamma), amplitude * np.sin(gamma)
    torque = shaft_torque(drive, i_d, i_q)
    psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
    for k, omega in enumerate(SPEEDS):
        square = (drive.resistance * i_d - omega * psi_q) ** 2
        square += (drive.resistance * i_q + omega * psi_d) ** 2
        torque_here = np.where(square <= drive.voltage_limit**2, torque, -np.inf)
        best = torque_here.max()
        assert limit.torque[k] * (1.0 + 1e-7) >= best >= 0.93 * limit.torque[k]
        per_amplitude = np.maximum.accumulate(torque_here.max(axis=1))
        own = np.hypot(points.i_d[1:, k], points.i_q[1:, k])
        tried = np.searchsorted(per_amplitude, points.torque[1:, k])
        tried = np.append(amplitude, np.inf)[tried]
        assert np.all(tried[np.isfinite(own)] >= own[np.isfinite(own)] * (1.0 - 1e-7))


def test_limit_of_the_linear_machine():
    """No resistance: base speed U / (I |psi(45 deg)|), and 3/2 p (U/w)^2 dL/(2 L_d L_q) far above.

    Derived: at 45 degrees |psi| = I sqrt((L_d^2 + L_q^2)/2); most torque per flux is at
    psi_d = psi_q = psi / sqrt 2, currents psi_d/L_d and psi_q/L_q.
    """
    drive = drive_of(linear_map(2, L_D, L_Q, AXIS, AXIS), resistance=0.0)
    volts, amps = drive.voltage_limit, drive.current_limit
    base = volts / (amps * math.sqrt(0.5 * (L_D**2 + L_Q**2)))
    speeds = np.array([0.0, 0.999 * base, 1.001 * base, 3000.0, 6000.0])
    limit = torque_limit(drive, speeds)
    most = 0.75 * 2 * (L_D - L_Q) * amps**2
    assert limit.torque[:2] == pytest.approx([most, most])
    assert 0.99 * most < limit.torque[2] < most
    far = 1.5 * 2 * (volts / speeds[3:]) ** 2 * (L_D - L_Q) / (2.0 * L_D * L_Q)
    assert limit.torque[3:] == pytest.approx(far)
    used = np.hypot(limit.i_d, limit.i_q) / amps
    assert used[:3] == pytest.approx(np.ones(3))
    assert np.all(used[3:] < 0.9)  # the voltage alone rules


def test_a_speed_that_magnets_forbid_has_no_point():
    """Psi_m w > U with psi_m / L_q over the current limit: nothing is within the voltage."""
    drive = drive_of(linear_map(2, L_D, L_Q, AXIS, BOTH, psi_m=0.25))
    lines, speeds = torque_lines(drive), np.array([100.0, 2.0e5])
    limit = torque_limit(drive, speeds)
    assert np.isfinite(limit.torque).tolist() == [True, False]
    points = control_points(lines, np.zeros(2), speeds, limit.torque)
    assert points.is_reachable.tolist() == [True, False]
    assert np.isnan(points.i_q[1])


def test_resistance_alone_can_hold_the_current_down():
    """At standstill U = R I: most current is U / R below the limit, at 45 degrees."""
    drive = drive_of(linear_map(2, L_D, L_Q, AXIS, AXIS), resistance=5.0, line_voltage=60.0)
    limit = torque_limit(drive, np.zeros(1))
    current = drive.voltage_limit / drive.resistance
    assert current < drive.current_limit
    assert limit.i_d == pytest.approx([current / math.sqrt(2.0)], rel=1e-6)
    assert limit.torque == pytest.approx([0.75 * 2 * (L_D - L_Q) * current**2], rel=1e-6)
