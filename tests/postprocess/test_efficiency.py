"""Efficiency of the law F1, losses invented: balance, least loss by trying all, a run in time."""

import math

import numpy as np
import pytest
from flux_laws import F1_RATED, F1_RESISTANCE, f1_linkages, f1_map

from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.control_curves import most_per_ampere
from lamwright.postprocess.efficiency import KnownLosses, at_currents, load_points
from lamwright.postprocess.envelope import envelope
from lamwright.postprocess.terminals import terminals, voltages
from lamwright.postprocess.voltage_run import Feed, steady_voltages, voltage_run

POLE_PAIRS = 2


@pytest.fixture(scope="module")
def drive():
    currents = np.linspace(0.0, 40.0, 15)
    return terminals(
        coenergy_surface(f1_map(currents, currents)),
        resistance=F1_RESISTANCE,
        end_inductance=0.0,
        current_limit=F1_RATED,
        line_voltage=370.0,
    )


def iron(i_d, i_q, omega_e):
    """Stator: 300 W at 665 rad/s and 0.45 V s, as f^1.5 B^2; rotor: 40 W at 20 A. Invented."""
    psi_d, psi_q, _ = f1_linkages(i_d, i_q)
    speed = (omega_e / 665.0) ** 1.5
    return 300.0 * speed * (psi_d**2 + psi_q**2) / 0.45**2, 0.1 * speed * (i_d**2 + i_q**2)


BARE = KnownLosses(iron=None, copper_factor=None, friction=None, missing=())
LOSSY = KnownLosses(
    iron=iron,
    copper_factor=lambda omega_e: 1.0 + 0.1 * (omega_e / 665.0) ** 2,
    friction=lambda speed: 0.2 * speed + 1e-6 * speed**3,
    missing=(),
)


def test_copper_alone_is_least_at_most_torque_per_ampere(drive):
    """Without other losses P = 3/2 R I^2, least on the curve of most torque per ampere."""
    curve = most_per_ampere(drive, np.array([4.0, 12.0, 20.0]))
    speed = np.full(3, 150.0)
    found = load_points(drive, BARE, speed, curve.torque)
    copper = 1.5 * F1_RESISTANCE * curve.amplitude**2
    shaft = curve.torque * speed
    # Found angles are within 0.14 degree of the best: second order, some 1e-5 of the loss.
    assert found.copper == pytest.approx(copper, rel=1e-4)
    assert found.efficiency == pytest.approx(shaft / (shaft + copper), rel=1e-5)
    assert found.torque == pytest.approx(curve.torque, rel=1e-7)


@pytest.mark.parametrize("aim", ["loss", "current"])
def test_the_balance_closes_at_the_torque_asked_for(drive, aim):
    """In = shaft + copper + iron of both + friction at each point; shaft torque as asked."""
    speed, torque = (x.ravel() for x in np.meshgrid([50.0, 200.0, 330.0], [1.0, 8.0, 17.0]))
    found = load_points(drive, LOSSY, speed, torque, aim)
    spent = found.copper + found.stator_iron + found.rotor_iron + found.friction
    assert found.torque == pytest.approx(torque, rel=1e-5)
    assert found.input == pytest.approx(found.torque * speed + spent, rel=1e-9)
    assert found.efficiency == pytest.approx(found.torque * speed / found.input, rel=1e-9)
    assert np.all(found.rotor_iron > 0.0)


def test_no_other_angle_loses_less(drive):
    """All losses at 181 angles, each with the current that makes the shaft torque (interpolated).

    Also within the limits: at 500 rad/s the voltage bounds the angle. 1e-3 of the loss is what
    half a degree and linear interpolation leave.
    """
    speed, torque = np.array([60.0, 300.0, 500.0]), np.array([5.0, 10.0, 6.0])
    found = load_points(drive, LOSSY, speed, torque)
    thrifty = load_points(drive, LOSSY, speed, torque, "current")
    for k in range(3):
        amplitude, gamma = np.meshgrid(
            np.linspace(0.2, F1_RATED, 241), np.radians(np.linspace(1.0, 89.5, 178)), indexing="ij"
        )
        i_d, i_q = amplitude * np.cos(gamma), amplitude * np.sin(gamma)
        tried = at_currents(drive, LOSSY, np.full(i_d.shape, speed[k]), i_d, i_q)
        lost = tried.input - tried.torque * speed[k]
        u_d, u_q = voltages(drive, i_d, i_q, POLE_PAIRS * speed[k])
        volts = np.hypot(u_d, u_q)
        best = math.inf
        for column in range(gamma.shape[1]):
            at = tried.torque[:, column]
            if at[-1] < torque[k]:
                continue
            loss, voltage = (np.interp(torque[k], at, x[:, column]) for x in (lost, volts))
            if voltage <= drive.voltage_limit:
                best = min(best, float(loss))
        own = found.input[k] - found.torque[k] * speed[k]
        assert own <= best * (1.0 + 1e-3)
        assert own >= best * (1.0 - 1e-2)
        assert own <= (thrifty.input[k] - thrifty.torque[k] * speed[k]) * (1.0 + 1e-4)
    # At speed the iron asks for less flux than least current has.
    current = [np.hypot(points.i_d, points.i_q)[1] for points in (found, thrifty)]
    assert current[0] > 1.01 * current[1]


def test_points_reach_as_far_as_the_envelope(drive):
    """At 99.5 % of the envelope's torque every speed is reached, at 100.5 % none is."""
    speed = np.linspace(40.0, 700.0, 12)
    most = envelope(drive, speed).torque
    below = load_points(drive, BARE, speed, 0.995 * most)
    assert np.all(np.isfinite(below.efficiency))
    u_d, u_q = voltages(drive, below.i_d, below.i_q, POLE_PAIRS * speed)
    assert np.all(np.hypot(u_d, u_q) <= 1.001 * drive.voltage_limit)
    above = load_points(drive, BARE, speed, 1.005 * most)
    for values in (above.efficiency, above.i_d, above.copper, above.input, above.torque):
        assert np.all(np.isnan(values))


def test_a_run_in_time_has_the_map_s_efficiency(drive):
    """The point's voltages drive a run; over a period its shaft work over what it took is the same.

    Without rotor loss and friction, which the run does not know. 1e-4: how far it has settled.
    """
    losses = KnownLosses(
        iron=lambda i_d, i_q, w: (iron(i_d, i_q, w)[0], np.zeros_like(i_d)),
        copper_factor=None,
        friction=None,
        missing=(),
    )
    point = load_points(drive, losses, np.array([300.0]), np.array([12.0]))
    i_d, i_q, omega_e = float(point.i_d[0]), float(point.i_q[0]), 600.0

    def loss(d, q, w):
        return float(iron(np.array(d), np.array(q), w)[0])

    period = 2.0 * math.pi / omega_e
    u = steady_voltages(drive, i_d, i_q, omega_e, loss)
    feed = Feed(*u, omega_e, ramp=10.0 * period)
    run = voltage_run(drive, feed, (0.0, 0.0), 25.0 * period, loss)
    last = int(np.searchsorted(run.time, 24.0 * period))
    shaft, taken = (w[-1] - w[last] for w in (run.shaft, run.supplied))
    assert shaft / taken == pytest.approx(float(point.efficiency[0]), rel=1e-4)
