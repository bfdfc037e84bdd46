"""Envelope and runs in time on maps of solved fields: a linear steel, and the 24/4 demo."""

import functools
import math

import numpy as np
import pytest
from scipy.interpolate import RectBivariateSpline
from shipped import shipped, shipped_model

from lamwright.geometry.winding import end_winding_inductance, phase_resistance
from lamwright.postprocess.coenergy_surface import coenergy_surface, linkages
from lamwright.postprocess.control_curves import most_per_ampere
from lamwright.postprocess.envelope import Region, corner, envelope
from lamwright.postprocess.flux_map import FluxMap, mean_torque
from lamwright.postprocess.operating import search_positions
from lamwright.postprocess.terminals import Terminals, terminals, voltages
from lamwright.postprocess.voltage_run import Feed, energy_gap, small_swings, voltage_run
from lamwright.postprocess.within_limits import most_power_factor
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.field import MagneticModel, magnetic_model
from lamwright.solver.steel import linear_law

NAME, COARSE = "demo_24s4p_arc", 2.0
PROMISED = 2e-3  # of point 2 of the closed forms
ROOM = 0.6  # of the rated current, so that swings stay inside the map
SETTLED = 5e-3  # of a run's currents and torque, and of its energies

pytestmark = pytest.mark.slow


def solved_map(model: MagneticModel, currents, positions) -> FluxMap:
    """The map of a machine without magnets over equal currents on both axes."""
    found = np.zeros((4, currents.size, currents.size, positions.size))
    for k, position in enumerate(positions):
        for n, i_d in enumerate(currents):
            points = [OperatingPoint(float(i_d), float(i_q), float(position)) for i_q in currents]
            for m, field in enumerate(solve_chain(model, points)):
                found[:, n, m, k] = field.psi_d, field.psi_q, field.torque, field.coenergy
    return FluxMap(model.sector.pole_pairs, currents, currents, positions, *found)


def drive_of(flux_map: FluxMap, *, share=1.0, resistance=None, end_inductance=None) -> Terminals:
    """The demo at its supply and a share of its current; resistance and end winding its own."""
    design = shipped(NAME).machine.design
    return terminals(
        coenergy_surface(flux_map),
        resistance=phase_resistance(design) if resistance is None else resistance,
        end_inductance=end_winding_inductance(design) if end_inductance is None else end_inductance,
        current_limit=share * design.duty.rated_current_a,
        line_voltage=design.duty.supply_voltage_v,
    )


@functools.cache
def linear_machine() -> tuple[Terminals, float, float]:
    """The demo on linear steel, without resistance; its L_d and L_q in H.

    Relative permeability 3000 in the stator, 70 in the rotor: more lets the ribs carry the q flux
    and takes the saliency away (1.3 at 1500, 2.9 at 70). The inductances are of two currents that
    are none of the map's, each on one axis.
    """
    one, laws = shipped(NAME, COARSE), (linear_law(70.0), linear_law(3000.0))
    settings = shipped_model(NAME, COARSE).settings
    model = magnetic_model(one.sector, one.section, one.winding, *laws, settings)
    positions = search_positions(one.section.pole_pairs, one.section.slots)
    drive = drive_of(
        solved_map(model, 1.25 * one.rated * np.linspace(0.0, 1.0, 4), positions),
        resistance=0.0,
        end_inductance=0.0,
    )
    along_d = solve_chain(model, [OperatingPoint(1.7, 0.0, float(x)) for x in positions])
    along_q = solve_chain(model, [OperatingPoint(0.0, 2.3, float(x)) for x in positions])
    l_d = float(np.mean([field.psi_d for field in along_d])) / 1.7
    return drive, l_d, float(np.mean([field.psi_q for field in along_q])) / 2.3


def test_map_of_a_linear_steel_has_constant_inductances():
    """psi_d = L_d i_d and psi_q = L_q i_q over the map; the mirror image leaves no l_dq."""
    drive, l_d, l_q = linear_machine()
    i_d, i_q = np.meshgrid([1.0, 5.0, 13.0], [1.0, 7.0, 14.0])
    psi_d, psi_q = linkages(drive.surface, i_d, i_q)
    assert psi_d == pytest.approx(l_d * i_d, rel=PROMISED)
    assert psi_q == pytest.approx(l_q * i_q, rel=PROMISED)
    assert l_d > 2.5 * l_q


def test_map_of_a_linear_steel_is_the_closed_form_machine():
    """Each of these to 0.2 % (Betz et al. 1993, from memory).

    Most torque per ampere at 45 degrees, power factor (xi - 1)/(xi + 1) at tan gamma = sqrt xi,
    corner U / (L_q I sqrt((xi^2 + 1)/2)), most torque per volt at tan gamma = xi with the torque
    3/2 p (U/omega)^2 (1/L_q - 1/L_d)/2.
    """
    drive, l_d, l_q = linear_machine()
    xi, current, volts = l_d / l_q, drive.current_limit, drive.voltage_limit
    pole_pairs = drive.surface.pole_pairs
    best = most_per_ampere(drive, np.array([0.3, 1.0]) * current)
    assert best.gamma == pytest.approx([math.pi / 4.0] * 2, rel=PROMISED)
    factor, gamma = most_power_factor(drive, current)
    assert factor == pytest.approx((xi - 1.0) / (xi + 1.0), rel=PROMISED)
    assert math.tan(gamma) == pytest.approx(math.sqrt(xi), rel=PROMISED)
    omega_corner = volts / (l_q * current * math.sqrt((xi**2 + 1.0) / 2.0))
    found = corner(drive)
    assert pole_pairs * found.speed == pytest.approx(omega_corner, rel=PROMISED)
    torque = 0.75 * pole_pairs * (l_d - l_q) * current**2
    assert found.torque == pytest.approx(torque, rel=PROMISED)
    omega = 1.5 * volts / (l_q * current)
    far = envelope(drive, np.array([omega / pole_pairs]))
    assert far.region[0] == Region.VOLTAGE
    assert math.tan(far.gamma[0]) == pytest.approx(xi, rel=PROMISED)
    most = 0.75 * pole_pairs * (volts / omega) ** 2 * (1.0 / l_q - 1.0 / l_d)
    assert far.torque[0] == pytest.approx(most, rel=PROMISED)


@functools.cache
def demo_map() -> FluxMap:
    """The saturated demo on 7 x 7 currents at 4 positions of a coarse mesh."""
    one = shipped(NAME, COARSE)
    positions = np.linspace(0.0, math.pi / 3.0 / one.section.pole_pairs, 4, endpoint=False)
    currents = 1.25 * one.rated * np.linspace(0.0, 1.0, 7)
    return solved_map(shipped_model(NAME, COARSE), currents, positions)


@pytest.mark.parametrize("rpm", [1500.0, 4500.0], ids=["below the corner", "beyond it"])
@pytest.mark.parametrize("share", [0.0, 0.75], ids=["from zero", "from three quarters"])
def test_demo_settles_where_the_envelope_says(rpm, share):
    """From zero with the voltage rising over 20 periods, or from 3/4 of the currents at once.

    The run lasts 7 of the damping's time constants beyond the ramp: e^-7 = 1e-3 of a swing is left.
    """
    drive = drive_of(demo_map(), share=ROOM)
    table = envelope(drive, np.array([rpm * math.pi / 30.0]))
    i_d, i_q = float(table.i_d[0]), float(table.i_q[0])
    omega_e = drive.surface.pole_pairs * rpm * math.pi / 30.0
    u_d, u_q = (float(u) for u in voltages(drive, table.i_d[0], table.i_q[0], omega_e))
    period = 2.0 * math.pi / omega_e
    ramp = 20.0 * period if share == 0.0 else 0.0
    duration = ramp - 7.0 / small_swings(drive, i_d, i_q, omega_e)[0].real
    start = (share * i_d, share * i_q)
    run = voltage_run(drive, Feed(u_d, u_q, omega_e, ramp), start, duration)
    assert run.i_d[-1] == pytest.approx(i_d, rel=SETTLED)
    assert run.i_q[-1] == pytest.approx(i_q, rel=SETTLED)
    assert run.torque[-1] == pytest.approx(float(table.torque[0]), rel=SETTLED)


def test_energies_of_the_demo_close_with_maxwell_s_torque():
    """Shaft work by the field's stress (interpolated), all else by the surface, while it swings.

    Electrical in = shaft + copper + change of what is stored, to 0.5 % of what goes in; with the
    surface's own torque to 1e-6.
    """
    flux_map = demo_map()
    drive = drive_of(flux_map, share=ROOM)
    omega_e = 2.0 * math.pi * 50.0
    i = most_per_ampere(drive, np.array([drive.current_limit]))
    u_d, u_q = (float(u[0]) for u in voltages(drive, i.i_d, i.i_q, omega_e))
    start = (0.75 * float(i.i_d[0]), 0.75 * float(i.i_q[0]))
    run = voltage_run(drive, Feed(u_d, u_q, omega_e), start, 1.3 * 0.02)
    since = int(np.searchsorted(run.time, 0.3 * 0.02))
    assert abs(energy_gap(run, 0.3 * 0.02)) < 1e-6
    stress = RectBivariateSpline(flux_map.i_d, flux_map.i_q, mean_torque(flux_map))
    power = stress.ev(run.i_d, run.i_q) * omega_e / drive.surface.pole_pairs
    shaft = np.trapezoid(power[since:], run.time[since:])
    supplied, copper, stored = (w[-1] - w[since] for w in (run.supplied, run.copper, run.stored))
    assert np.ptp(run.stored[since:]) > 0.01 * supplied
    assert shaft + copper + stored == pytest.approx(supplied, rel=SETTLED)
