"""Runs in time on given voltages: closed form, steady table, energies, what swings."""

import dataclasses
import math

import numpy as np
import pytest
from flux_laws import F1_RATED, F1_RESISTANCE, f1_map, linear_map
from scipy.linalg import expm

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.coenergy_surface import coenergy_surface, incremental, linkages
from lamwright.postprocess.envelope import envelope
from lamwright.postprocess.surface_pieces import surface_pieces
from lamwright.postprocess.terminals import terminals, voltages
from lamwright.postprocess.voltage_run import (
    Feed,
    energy_gap,
    small_swings,
    steady_voltages,
    voltage_run,
)

L_D, L_Q, L_W, RESISTANCE = 0.1, 0.02, 0.002, 1.2
OMEGA_F1 = 2.0 * math.pi * 105.8  # rad/s, of the plate
PERIOD = 2.0 * math.pi / OMEGA_F1
SETTLED = 5e-3  # what is promised; measured 1e-7


def linear():
    currents = np.linspace(0.0, 40.0, 4)
    return terminals(
        coenergy_surface(linear_map(2, L_D, L_Q, currents, currents)),
        resistance=RESISTANCE,
        end_inductance=L_W,
        current_limit=20.0,
        line_voltage=400.0,
    )


@pytest.fixture(scope="module")
def f1():
    currents = np.linspace(0.0, 40.0, 15)
    return terminals(
        coenergy_surface(f1_map(currents, currents)),
        resistance=F1_RESISTANCE,
        end_inductance=0.0,
        current_limit=F1_RATED,
        line_voltage=370.0,
    )


def linear_swings(omega):
    """di/dt = M i + L^-1 u of the linear machine, from the voltage equation (derived)."""
    l_d, l_q = L_D + L_W, L_Q + L_W
    return np.array(
        [[-RESISTANCE / l_d, omega * l_q / l_d], [-omega * l_d / l_q, -RESISTANCE / l_q]]
    )


def test_pieces_are_the_surface(f1):
    """Twin: linkages and incremental inductances of the tensor splines, all quadrants, to rounding.

    The greatest slope is 0.13 H.
    """
    pieces = surface_pieces(f1.surface)
    for i_d, i_q in np.random.default_rng(1).uniform(-40.0, 40.0, (40, 2)):
        whole = [*linkages(f1.surface, i_d, i_q), *incremental(f1.surface, i_d, i_q)]
        assert pieces(float(i_d), float(i_q)) == pytest.approx(whole, rel=1e-9, abs=1e-12)
    with pytest.raises(ValueError, match="i_q: currents outside the map, -40 to 40 A"):
        pieces(1.0, 40.1)


def test_linear_machine_follows_the_closed_form():
    """i(t) = i_end + expm(M t) (i_0 - i_end) at constant speed; 3 periods, 1e-5 of 12 A."""
    drive, omega = linear(), 300.0
    i_end, i_start = np.array([8.0, 9.0]), np.array([6.0, 7.5])
    u = steady_voltages(drive, *i_end, omega)
    run = voltage_run(drive, Feed(*u, omega), tuple(i_start), 6.0 * math.pi / omega)
    exact = [i_end + expm(linear_swings(omega) * t) @ (i_start - i_end) for t in run.time]
    assert np.column_stack([run.i_d, run.i_q]) == pytest.approx(np.array(exact), abs=1e-4)


def test_swings_of_a_linear_machine():
    """Eigenvalues of M above; differences are exact for a linear machine, to rounding."""
    exact = sorted(np.linalg.eigvals(linear_swings(300.0)), key=lambda v: -v.imag)
    found = sorted(small_swings(linear(), 8.0, 9.0, 300.0), key=lambda v: -v.imag)
    assert found == pytest.approx(exact, rel=1e-6)
    assert found[0].real < 0.0


@pytest.mark.parametrize(
    ("start", "ramp"),
    [((0.0, 0.0), 12.0), ((9.0, 14.0), 0.0)],
    ids=["from zero, the voltage rising over 12 periods", "from other currents, at once"],
)
def test_f1_settles_where_the_steady_table_says(f1, start, ramp):
    """The envelope's currents at the plate's frequency, fed by their voltages; 30 periods.

    Swings die down with 80/s there: 30 periods leave e^-22 of them.
    """
    table = envelope(f1, np.array([OMEGA_F1 / 2.0]))
    i_d, i_q = float(table.i_d[0]), float(table.i_q[0])
    u_d, u_q = (float(u) for u in voltages(f1, i_d, i_q, OMEGA_F1))
    run = voltage_run(f1, Feed(u_d, u_q, OMEGA_F1, ramp * PERIOD), start, 30.0 * PERIOD)
    assert abs(run.i_d[0] - i_d) > 0.1 * i_d
    assert run.i_d[-1] == pytest.approx(i_d, rel=SETTLED)
    assert run.i_q[-1] == pytest.approx(i_q, rel=SETTLED)
    assert run.torque[-1] == pytest.approx(float(table.torque[0]), rel=SETTLED)
    # It stands still: over the last period nothing moves any more.
    last = run.time >= 29.0 * PERIOD
    assert np.ptp(run.torque[last]) < SETTLED * run.torque[-1]


@pytest.mark.parametrize("loss_share", [0.0, 0.03])
def test_energies_close_over_a_period_while_currents_swing(f1, loss_share):
    """Electrical in = shaft + copper + iron + change of what is stored, over a period.

    The surface's torque and energy are of one function and the integrals run along with the
    currents, so only the step's tolerance is left: 1e-6, promised 0.5 %. Iron loss: a share of
    3/2 omega |psi| |i|, invented.
    """

    def iron_loss(i_d, i_q, omega_e):
        return loss_share * 1.5 * omega_e * 0.45 * math.hypot(i_d, i_q)

    u = steady_voltages(f1, 11.77, 18.49, OMEGA_F1, iron_loss)
    feed = Feed(*u, OMEGA_F1)
    run = voltage_run(f1, feed, (9.0, 14.0), 1.3 * PERIOD, iron_loss)
    since = int(np.searchsorted(run.time, 0.3 * PERIOD))
    # What is stored changes by more than the balance may miss.
    moved = abs(run.stored[-1] - run.stored[since])
    assert moved > 0.01 * (run.supplied[-1] - run.supplied[since])
    assert abs(energy_gap(run, 0.3 * PERIOD)) < 1e-6
    assert abs(energy_gap(run, 0.0)) < 1e-6
    assert (run.iron[-1] > 0.01 * run.supplied[-1]) == (loss_share > 0.0)


def test_iron_loss_moves_the_voltage_as_its_branch_says(f1):
    """The steady state with iron loss takes T omega + copper + iron; the run ends there."""

    def iron_loss(i_d, i_q, omega_e):
        return 75.0 * ((i_d / 11.77) ** 2 + (i_q / 18.49) ** 2)  # invented; 150 W at the end

    u = steady_voltages(f1, 11.77, 18.49, OMEGA_F1, iron_loss)
    feed = Feed(*u, OMEGA_F1, ramp=12.0 * PERIOD)
    run = voltage_run(f1, feed, (0.0, 0.0), 30.0 * PERIOD, iron_loss)
    assert (run.i_d[-1], run.i_q[-1]) == pytest.approx((11.77, 18.49), rel=1e-5)
    last = np.searchsorted(run.time, 29.0 * PERIOD)
    span = run.time[-1] - run.time[last]
    assert (run.iron[-1] - run.iron[last]) / span == pytest.approx(150.0, rel=1e-5)
    assert abs(energy_gap(run, 29.0 * PERIOD)) < 1e-6


def test_free_speed_grows_or_dies_as_the_eigenvalue_says(f1):
    """On a supply of constant frequency the law F1 swings up at 0.02 kg m^2 and 0.54 Ohm.

    The envelope of a small swing goes as e^(real part t): its peaks in two windows of five swings
    each, compared to 5 %; a first step of 0.1 A keeps it small.
    """
    i_d, i_q, inertia = 11.77, 18.49, 0.02
    u = steady_voltages(f1, i_d, i_q, OMEGA_F1)
    load = (
        1.5
        * 2
        * float(linkages(f1.surface, i_d, i_q)[0] * i_q - linkages(f1.surface, i_d, i_q)[1] * i_d)
    )
    slowest = small_swings(f1, i_d, i_q, OMEGA_F1, inertia)[0]
    assert slowest.real > 0.0
    assert small_swings(f1, i_d, i_q, OMEGA_F1)[0].real < 0.0  # the same at constant speed
    swing = 2.0 * math.pi / abs(slowest.imag)
    feed = Feed(*u, OMEGA_F1, inertia=inertia, load=load)
    run = voltage_run(f1, feed, (i_d, i_q + 0.1), 20.0 * swing)
    off = np.abs(run.omega_e - OMEGA_F1)
    early = off[(run.time > 5.0 * swing) & (run.time < 10.0 * swing)].max()
    late = off[(run.time > 15.0 * swing)].max()
    assert late / early == pytest.approx(math.exp(slowest.real * 10.0 * swing), rel=0.05)


def test_a_voltage_at_once_leaves_the_map_in_one_line(f1):
    """From zero current the linkage swings to twice its end, far beyond the map's 40 A."""
    u = steady_voltages(f1, 11.77, 18.49, OMEGA_F1)
    pattern = r"^voltage run: i_[dq]: currents outside the map, .* A; let the voltage rise slower$"
    with pytest.raises(LamwrightError, match=pattern):
        voltage_run(f1, Feed(*u, OMEGA_F1), (0.0, 0.0), PERIOD)


def test_a_stiffer_winding_settles_slower(f1):
    """Damping is in the resistance: half of it halves the real part (trace of the matrix)."""
    half = dataclasses.replace(f1, resistance=0.5 * F1_RESISTANCE)
    full = small_swings(f1, 11.77, 18.49, OMEGA_F1)[0].real
    assert small_swings(half, 11.77, 18.49, OMEGA_F1)[0].real == pytest.approx(0.5 * full, rel=1e-6)
