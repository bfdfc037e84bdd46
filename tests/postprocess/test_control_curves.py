"""Most torque per ampere and per volt against the linear machine and the published law F1."""

import math

import numpy as np
import pytest
from flux_laws import F1_RATED, f1_linkages, f1_map, linear_map

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.control_curves import (
    ampere_curve,
    least_current,
    least_linkage,
    least_voltage,
    most_per_ampere,
    volt_curve,
)
from lamwright.postprocess.terminals import (
    shaft_torque,
    square_linkage,
    square_linkage_slopes,
    square_voltage,
    square_voltage_slopes,
    terminals,
    torque_slopes,
)
from lamwright.postprocess.torque_lines import greatest_torque, on_line, torque_lines

L_D, L_Q, PSI_M = 0.05, 0.01, 0.05  # invented, H and V s
AXIS, BOTH = np.linspace(0.0, 25.0, 15), np.linspace(-25.0, 25.0, 29)


def drive_of(flux_map, current=20.0, resistance=0.5, end=0.001):
    return terminals(
        coenergy_surface(flux_map),
        resistance=resistance,
        end_inductance=end,
        current_limit=current,
        line_voltage=400.0,
    )


LINEAR = drive_of(linear_map(2, L_D, L_Q, AXIS, AXIS))
MAGNETS = drive_of(linear_map(2, L_D, L_Q, AXIS, BOTH, psi_m=PSI_M))
F1 = drive_of(f1_map(np.linspace(0.0, 50.0, 15), np.linspace(0.0, 50.0, 15)), current=40.0)
LINES = {id(drive): torque_lines(drive) for drive in (LINEAR, MAGNETS, F1)}


@pytest.mark.parametrize(
    ("amplitude", "angle", "torque", "psi_d", "psi_q"),
    [
        (5.0, 46.090, 1.66603, 0.195779, 0.043222),
        (10.0, 50.004, 6.17615, 0.326802, 0.069219),
        (F1_RATED, 57.520, 20.2858, 0.439309, 0.115671),
        (30.0, 59.821, 30.6386, 0.475481, 0.140449),
        (40.0, 61.510, 43.8170, 0.506124, 0.167066),
    ],
)
def test_published_law(amplitude, angle, torque, psi_d, psi_q):
    """F1 of the check values, 15 x 15 nodes: torque within 0.2 %, angle within 0.5 degree.

    Linkages are held to 0.3 %, what half a degree moves them.
    """
    drive = drive_of(
        f1_map(np.linspace(0.0, 50.0, 15), np.linspace(0.0, 50.0, 15)), current=40.0, end=0.0
    )
    point = most_per_ampere(drive, np.array([amplitude]))
    assert np.degrees(point.gamma[0]) == pytest.approx(angle, abs=0.5)
    assert point.torque[0] == pytest.approx(torque, rel=2e-3)
    assert point.psi_d[0] == pytest.approx(psi_d, rel=3e-3)
    assert point.psi_q[0] == pytest.approx(psi_q, rel=3e-3)


def test_linear_machine_has_its_best_angle_at_45_degrees():
    """T = T_45 sin 2 gamma (checks A7), the leakage of end windings changes nothing."""
    curve = ampere_curve(LINEAR)
    assert np.degrees(curve.gamma) == pytest.approx(np.full(40, 45.0), rel=2e-3)
    best = 0.75 * 2 * (L_D - L_Q) * curve.amplitude**2
    assert curve.torque == pytest.approx(best, rel=1e-6)


def test_linear_machine_has_least_flux_at_the_saliency():
    """Angle of tan gamma = L_d / L_q (checks A7), here of the terminals: end winding in both."""
    torque = np.linspace(0.02, 0.2, 9) * greatest_torque(LINES[id(LINEAR)])
    curve = volt_curve(LINES[id(LINEAR)], torque, None)
    assert curve.torque == pytest.approx(torque)
    assert curve.i_q / curve.i_d == pytest.approx(np.full(9, (L_D + 0.001) / (L_Q + 0.001)))


def test_linear_machine_with_magnets():
    """Best sin g = (sqrt(psi_m^2 + 8 dL^2 I^2) - psi_m) / (4 dL I), dL = L_d - L_q.

    Derived: T = 3/2 p I cos g (psi_m + dL I sin g), dT/dg = 0 is quadratic in sin g.
    """
    curve, delta = ampere_curve(MAGNETS), L_D - L_Q
    root = np.sqrt(PSI_M**2 + 8.0 * (delta * curve.amplitude) ** 2)
    assert np.sin(curve.gamma) == pytest.approx((root - PSI_M) / (4.0 * delta * curve.amplitude))
    assert np.all(curve.i_d > 0.0)


def test_outward_magnets_motor_on_the_other_side():
    """Turning the magnets round turns both currents round; torque stays (derived)."""
    turned = drive_of(linear_map(2, L_D, L_Q, AXIS, BOTH, psi_m=-PSI_M))
    there, here = ampere_curve(turned), ampere_curve(MAGNETS)
    assert turned.side == -1
    assert there.torque == pytest.approx(here.torque)
    assert there.i_d == pytest.approx(-here.i_d)
    assert there.i_q == pytest.approx(-here.i_q)


def test_least_flux_with_magnets_ends_where_they_are_balanced():
    """At small torque the least flux is that of L_q i_q = psi_m, i_d = 0 (derived): i_q below."""
    lines = LINES[id(MAGNETS)]
    point = least_linkage(lines, np.array([0.0]))
    assert point.i_d == pytest.approx([0.0], abs=1e-9)
    assert point.i_q == pytest.approx([PSI_M / (L_Q + 0.001)], rel=1e-6)


@pytest.mark.parametrize("drive", [LINEAR, MAGNETS, F1], ids=["linear", "magnets", "law"])
def test_curves_rise(drive):
    """More torque takes more current, and more voltage, on the curve of each."""
    curve, lines = ampere_curve(drive), LINES[id(drive)]
    assert np.all(np.diff(curve.torque) > 0.0)
    volt = volt_curve(lines, curve.torque, None)
    assert volt.torque.size > 5
    assert np.all(np.diff(np.hypot(volt.psi_d, volt.psi_q)) > 0.0)


@pytest.mark.parametrize("drive", [LINEAR, MAGNETS, F1], ids=["linear", "magnets", "law"])
def test_no_point_of_a_line_is_less(drive):
    """Each least point against 400 others of its line; they are exact, so nothing is lower."""
    lines = LINES[id(drive)]
    torque = np.array([0.05, 0.3, 0.6]) * ampere_curve(drive).torque[-1]
    i_q = np.linspace(drive.surface.i_q_range[0], drive.surface.i_q_range[1], 401)[1:-1]
    i_d = on_line(lines, torque[:, None], i_q)
    omega = np.full(3, 500.0)
    pairs = [
        (least_current(lines, torque), lambda d, q: d**2 + q**2),
        (least_linkage(lines, torque), lambda d, q: square_linkage(drive, d, q)),
        (
            least_voltage(lines, torque, omega),
            lambda d, q: square_voltage(drive, d, q, 500.0),
        ),
    ]
    for point, value in pairs:
        assert shaft_torque(drive, point.i_d, point.i_q) == pytest.approx(torque)
        on_map = np.isfinite(i_d)
        others = np.where(on_map, value(np.where(on_map, i_d, 0.0), i_q), np.inf)
        assert np.all(value(point.i_d, point.i_q) <= others.min(axis=1) * (1.0 + 1e-12))
        assert np.all(value(point.i_d, point.i_q) > 0.9 * others.min(axis=1))


def test_law_without_interpolation():
    """The angle of most torque of F1 itself by trial of 20 001 angles, at rated current."""
    gamma = np.radians(np.linspace(40.0, 75.0, 20001))
    i_d, i_q = F1_RATED * np.cos(gamma), F1_RATED * np.sin(gamma)
    psi_d, psi_q, _ = f1_linkages(i_d, i_q)
    torque = 3.0 * (psi_d * i_q - psi_q * i_d)
    point = most_per_ampere(F1, np.array([F1_RATED]))
    assert point.torque[0] == pytest.approx(torque.max(), rel=2e-4)
    assert math.degrees(abs(point.gamma[0] - gamma[torque.argmax()])) < 0.1


@pytest.mark.parametrize("drive", [LINEAR, MAGNETS, F1], ids=["linear", "magnets", "law"])
def test_slopes_against_differences(drive):
    """Central differences err by the step squared times third slopes: 1e-6 of the slope's size."""
    i_d, i_q = np.array([3.0, 11.0, 17.0]), np.array([4.0, 9.0, 18.0])
    step = 1e-3
    cases = [
        (lambda d, q: shaft_torque(drive, d, q), torque_slopes(drive, i_d, i_q)),
        (lambda d, q: square_linkage(drive, d, q), square_linkage_slopes(drive, i_d, i_q)),
        (
            lambda d, q: square_voltage(drive, d, q, 400.0),
            square_voltage_slopes(drive, i_d, i_q, 400.0),
        ),
    ]
    for value, (along_d, along_q) in cases:
        by_d = (value(i_d + step, i_q) - value(i_d - step, i_q)) / (2.0 * step)
        by_q = (value(i_d, i_q + step) - value(i_d, i_q - step)) / (2.0 * step)
        scale = max(np.abs(by_d).max(), np.abs(by_q).max())
        assert along_d == pytest.approx(by_d, abs=1e-6 * scale)
        assert along_q == pytest.approx(by_q, abs=1e-6 * scale)


def test_a_limit_beyond_the_map_is_one_line():
    """Currents are never taken from outside the map."""
    with pytest.raises(
        LamwrightError, match=r"current limit 26 A: outside the flux map.*25 A"
    ) as e:
        drive_of(linear_map(2, L_D, L_Q, AXIS, AXIS), current=26.0)
    assert "\n" not in str(e.value)


def test_a_rotor_without_saliency_is_one_line():
    """L_d = L_q gives no torque at any angle, L_d < L_q none that motors."""
    with pytest.raises(LamwrightError, match="no saliency along its d axis"):
        drive_of(linear_map(2, L_Q, L_D, AXIS, AXIS))
