"""The envelope against the closed forms of a linear machine, and against trying all currents.

Linear machine without resistance (checks A7; Betz et al. 1993, from memory, re-derived), with
xi = L_d / L_q, p pole pairs, I and U the limits of current and phase voltage, peak:
most torque per ampere at 45 degrees, corner at U / (L_q I sqrt((xi^2 + 1) / 2)), both limits
together at cos^2 gamma = ((U / (omega L_q I))^2 - 1) / (xi^2 - 1), most torque per volt at
tan gamma = xi, from omega = U / (L_q I) sqrt((1 + xi^2) / (2 xi^2)) on, with the torque
3/2 p (U / omega)^2 (1/L_q - 1/L_d) / 2.
"""

import dataclasses
import math

import numpy as np
import pytest
from flux_laws import F1_RATED, F1_RESISTANCE, f1_map, linear_map

from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.control_curves import most_per_ampere
from lamwright.postprocess.envelope import Region, corner, envelope
from lamwright.postprocess.landmarks import landmarks
from lamwright.postprocess.terminals import terminals, voltages
from lamwright.postprocess.within_limits import most_power_factor

POLE_PAIRS, CURRENT, LINE_VOLTAGE, L_Q = 2, 12.0, 400.0, 0.02
VOLTAGE = math.sqrt(2.0 / 3.0) * LINE_VOLTAGE
MAP_CURRENTS = np.linspace(0.0, 1.25 * CURRENT, 5)
# Where both limits meet angles are within 1e-8 rad, and so is the torque, times its slope.
TORQUE_TOL = 1e-7


def linear(xi=5.0, resistance=0.0, end_inductance=0.0, psi_m=0.0):
    """A linear machine at its supply; its map holds the inductances less the end winding's."""
    i_q = MAP_CURRENTS if psi_m == 0.0 else np.concatenate([-MAP_CURRENTS[:0:-1], MAP_CURRENTS])
    l_d, l_q = xi * L_Q - end_inductance, L_Q - end_inductance
    given = linear_map(POLE_PAIRS, l_d, l_q, MAP_CURRENTS, i_q, psi_m=psi_m)
    return terminals(
        coenergy_surface(given),
        resistance=resistance,
        end_inductance=end_inductance,
        current_limit=CURRENT,
        line_voltage=LINE_VOLTAGE,
    )


def f1():
    """The published law F1 at its plate's voltage and current."""
    currents = np.linspace(0.0, 40.0, 15)
    return terminals(
        coenergy_surface(f1_map(currents, currents)),
        resistance=F1_RESISTANCE,
        end_inductance=0.0,
        current_limit=F1_RATED,
        line_voltage=370.0,
    )


@pytest.mark.parametrize("end_inductance", [0.0, 0.003])
@pytest.mark.parametrize("xi", [2.0, 5.0, 10.0])
def test_corner_and_regions_of_a_linear_machine(xi, end_inductance):
    """The closed forms at the file's head; the end winding's part moves from map to terminals."""
    drive = linear(xi, end_inductance=end_inductance)
    found = corner(drive)
    omega_corner = VOLTAGE / (L_Q * CURRENT * math.sqrt((xi**2 + 1.0) / 2.0))
    assert found.speed == pytest.approx(omega_corner / POLE_PAIRS, rel=1e-7)
    # The surface is exact, the optimum met to 1e-9 of the torque.
    assert found.gamma == pytest.approx(math.pi / 4.0, abs=1e-6)
    factor = 1.5 * POLE_PAIRS * (xi - 1.0) * L_Q * CURRENT**2
    assert found.torque == pytest.approx(0.5 * factor, rel=1e-9)
    omega_volt = VOLTAGE / (L_Q * CURRENT) * math.sqrt((1.0 + xi**2) / (2.0 * xi**2))
    omega = np.array([0.4 * omega_corner, 0.5 * (omega_corner + omega_volt), 1.7 * omega_volt])
    swept = envelope(drive, omega / POLE_PAIRS)
    assert swept.region.tolist() == [Region.CURRENT, Region.BOTH, Region.VOLTAGE]
    cos2 = ((VOLTAGE / (omega[1] * L_Q * CURRENT)) ** 2 - 1.0) / (xi**2 - 1.0)
    torque = [
        0.5 * factor,
        factor * math.sqrt(cos2 * (1.0 - cos2)),
        1.5 * POLE_PAIRS * (VOLTAGE / omega[2]) ** 2 * (1.0 - 1.0 / xi) / L_Q / 2.0,
    ]
    assert swept.torque == pytest.approx(torque, rel=TORQUE_TOL)
    assert math.tan(swept.gamma[2]) == pytest.approx(xi, rel=1e-4)


@pytest.mark.parametrize("xi", [2.0, 5.0, 10.0])
def test_power_factor_of_a_linear_machine(xi):
    """Most is (xi - 1) / (xi + 1) at tan gamma = sqrt xi, whatever the current."""
    factor, gamma = most_power_factor(linear(xi), CURRENT)
    assert factor == pytest.approx((xi - 1.0) / (xi + 1.0), rel=1e-9)
    assert math.tan(gamma) == pytest.approx(math.sqrt(xi), rel=1e-4)


def test_landmarks_of_a_linear_machine():
    """Most torque per volt starts at the closed form's speed; power ends where T omega says.

    Landmarks are found to 4^-8 of a step between speeds, here 2e-5 of 25 rad/s.
    """
    xi = 5.0
    drive = linear(xi)
    found = landmarks(drive, envelope(drive, np.linspace(0.0, 1000.0, 41)), 100.0)
    by_key = {
        item.metadata["shown"].key: getattr(group, item.name) * item.metadata["shown"].scale
        for group in found.figures
        for item in dataclasses.fields(group)
    }
    omega_volt = VOLTAGE / (L_Q * CURRENT) * math.sqrt((1.0 + xi**2) / (2.0 * xi**2))
    rpm = 30.0 / math.pi / POLE_PAIRS
    assert by_key["most_torque_per_volt_from_rpm"] == pytest.approx(omega_volt * rpm, rel=2e-4)
    # Where both limits rule, T omega = its value at the corner: x = (U / (omega L_q I))^2,
    # (x - 1)(xi^2 - x) / x = the same at the corner's x_0 = (xi^2 + 1) / 2, so x = xi^2 / x_0.
    x_0 = (xi**2 + 1.0) / 2.0
    omega_end = VOLTAGE / (L_Q * CURRENT) / math.sqrt(xi**2 / x_0)
    assert by_key["constant_power_end_rpm"] == pytest.approx(omega_end * rpm, rel=2e-4)
    assert by_key["constant_power_ratio"] == pytest.approx(math.sqrt(x_0**2 / xi**2), rel=2e-4)
    assert found.lines == ()


def test_nothing_within_the_limits_of_a_saturated_machine_beats_the_envelope():
    """All currents of a fine grid, tried at 5 speeds of the law F1; and the limits are kept.

    Steps of 1/300 of the current limit and 0.2 degree: the best of them is within 0.6 % of the
    most (where both limits meet torque falls by 2 to 3 % a degree).
    """
    drive = f1()
    speed = np.array([0.0, 250.0, 340.0, 500.0, 1500.0])
    found = envelope(drive, speed)
    amplitude, gamma = np.meshgrid(
        np.linspace(0.0, F1_RATED, 301), np.radians(np.linspace(0.0, 90.0, 451)), indexing="ij"
    )
    i_d, i_q = amplitude * np.cos(gamma), amplitude * np.sin(gamma)
    still = voltages(drive, i_d, i_q, 0.0)
    turning = voltages(drive, i_d, i_q, 1.0)
    # T = 3/2 p (psi_d i_q - psi_q i_d), psi from the voltages at 1 rad/s
    psi_d, psi_q = turning[1] - still[1], still[0] - turning[0]
    torque = 1.5 * POLE_PAIRS * (psi_d * i_q - psi_q * i_d)
    for k, omega in enumerate(POLE_PAIRS * speed):
        volts = np.hypot(still[0] - omega * psi_q, still[1] + omega * psi_d)
        best = torque[volts <= drive.voltage_limit].max()
        assert best <= found.torque[k] * (1.0 + 1e-7)
        assert best >= found.torque[k] * (1.0 - 6e-3)
        u_d, u_q = voltages(drive, found.i_d[k], found.i_q[k], omega)
        assert math.hypot(u_d, u_q) <= drive.voltage_limit * (1.0 + 1e-7)
        assert found.current[k] <= F1_RATED * (1.0 + 1e-12)


@pytest.mark.parametrize("is_generating", [False, True])
def test_power_in_is_shaft_power_and_copper_loss(is_generating):
    """3/2 |u| |i| cos phi = T omega + 3/2 R I^2 (derived), motoring and generating, to rounding."""
    found = envelope(f1(), np.linspace(0.0, 900.0, 7), is_generating)
    apparent = 1.5 * found.voltage * found.current
    copper = 1.5 * F1_RESISTANCE * found.current**2
    assert apparent * found.power_factor == pytest.approx(found.power + copper, rel=1e-9)
    assert np.all(found.torque < 0.0) if is_generating else np.all(found.torque > 0.0)


def test_a_generator_keeps_the_voltage_at_its_own_currents():
    """The mirrored search is checked at the currents it gives back: i_d turned, voltage by the map.

    A generator makes more torque than a motor at the same limits: the resistance helps it.
    """
    drive, speed = f1(), np.linspace(50.0, 900.0, 6)
    found, motor = envelope(drive, speed, is_generating=True), envelope(drive, speed)
    u_d, u_q = voltages(drive, found.i_d, found.i_q, POLE_PAIRS * speed)
    assert np.hypot(u_d, u_q) == pytest.approx(found.voltage, rel=1e-9)
    assert np.all(found.voltage <= drive.voltage_limit * (1.0 + 1e-7))
    assert np.all(-found.torque >= motor.torque * (1.0 - TORQUE_TOL))
    assert -found.torque[-1] > 1.02 * motor.torque[-1]


def test_speeds_that_strong_magnets_close_stay_empty():
    """psi_m = 0.5 V s wants I > psi_m / L_q = 25 A; at 12 A psi_q = 0.26 V s is left.

    So from omega = U / 0.26 on no current is within both limits (closed form, no resistance).
    """
    drive = linear(5.0, psi_m=0.5)
    last = VOLTAGE / (0.5 - L_Q * CURRENT) / POLE_PAIRS
    found = envelope(drive, np.array([0.5, 0.9, 0.999, 1.001, 1.5]) * last)
    assert (found.region == Region.NONE).tolist() == [False, False, False, True, True]
    for values in (found.torque, found.power, found.current, found.voltage, found.power_factor):
        assert np.isnan(values).tolist() == [False, False, False, True, True]
    told = landmarks(drive, envelope(drive, np.linspace(0.0, 2.0 * last, 21)), 1.5 * last)
    rpm = 30.0 / math.pi
    assert told.lines[-2:] == (
        f"no torque is reached from {rpm * last:.0f}/min up: speeds left empty",
        f"no torque is reached at rated speed, {1.5 * rpm * last:.0f}/min",
    )


def test_a_supply_that_the_resistance_takes_has_no_base_speed():
    """12 A in 30 Ohm take 360 V of 327: the current limit is not reached even at standstill."""
    drive = linear(5.0, resistance=30.0)
    assert corner(drive) is None
    told = landmarks(drive, envelope(drive, np.linspace(0.0, 300.0, 7)), 150.0)
    assert told.lines == (
        "base speed: the resistance alone takes 360 V at 12 A, the supply gives 326.6 V a phase",
    )
    still = envelope(drive, np.array([0.0]))
    assert still.current[0] == pytest.approx(VOLTAGE / 30.0, rel=1e-9)


def test_resistance_moves_the_corner_as_the_quadratic_says():
    """|R i + j omega psi|^2 = U^2 at the angle of most torque per ampere, put in again."""
    drive = linear(5.0, resistance=1.5)
    found = corner(drive)
    best = most_per_ampere(drive, np.array([CURRENT]))
    u_d, u_q = voltages(drive, best.i_d, best.i_q, POLE_PAIRS * found.speed)
    assert math.hypot(u_d[0], u_q[0]) == pytest.approx(VOLTAGE, rel=1e-9)
    assert found.speed < corner(linear(5.0)).speed
