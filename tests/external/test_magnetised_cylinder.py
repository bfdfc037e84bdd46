"""Slotless machines with parallel magnetised magnets, in closed form.

Source: derived, separation of variables. One pole pair, all potentials proportional to sin theta,
magnets magnetised along the rotor's d axis (angle 0), H = 0 beyond the bore b. In a ring
A = (C r + E / r) sin theta, so with continuous A and H_theta = -(C - E/r^2 - B_r)/(mu_0 mu_r)
sin theta, and for a winding of N turns spread as a sine the linkage is pi L N (C b + E / b) / 2.
For a solid cylinder of radius a the inside is uniform (C alone).
"""

import math

import numpy as np
import pytest
from annulus import Ring, RingMachine, ring_section, sheet_model

from lamwright.postprocess.demagnetisation import magnet_states, opposing_angle
from lamwright.solver.field import FieldSettings, MagneticModel, solve_point
from lamwright.solver.integrals import flux_density
from lamwright.solver.magnet import MagnetLaw
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.steel import MU_0, linear_law

TURNS, STACK = 100, 0.1  # series turns a phase; m
RADIUS, BORE = 0.030, 0.036  # m
OPEN_STATOR = linear_law(1e9)  # "H = 0 beyond the bore", as in test_hague_1929
LAW = MagnetLaw(remanence=0.42, recoil_permeability=1.06, knee_field=200e3)  # invented ferrite
NEWTON = NewtonSettings(tolerance=1e-9)


def ring_machine(inner: tuple[Ring, ...] = ()) -> RingMachine:
    return RingMachine(
        pole_pairs=1,
        rotor=(*inner, Ring("magnet", RADIUS, 12)),
        bore=BORE,
        stator=(Ring("stator_iron", 1.2 * BORE, 3),),
        stack_length=STACK,
        n_circle=48,
    )


def model_of(machine: RingMachine, law: MagnetLaw = LAW, shaft: float = 1.0) -> MagneticModel:
    settings = FieldSettings(shaft_relative_permeability=shaft, magnet=law, newton=NEWTON)
    return sheet_model(machine, linear_law(1.0), OPEN_STATOR, TURNS, settings)


def cylinder_coefficient(law: MagnetLaw) -> float:
    """D of the gap's A = D (r + b^2/r) sin theta, in T."""
    a2, b2 = RADIUS**2, BORE**2
    return law.remanence * a2 / (a2 + b2 + law.recoil_permeability * (b2 - a2))


@pytest.mark.parametrize("angle_deg", [0.0, 41.3])
def test_no_load_linkage_of_a_magnetised_cylinder(angle_deg: float) -> None:
    """psi_d = pi L N D b within 1e-6 (0.5 % asked), psi_q = 0, no cogging, at any angle."""
    solution = solve_point(model_of(ring_machine()), 0.0, 0.0, math.radians(angle_deg))
    exact = math.pi * STACK * TURNS * cylinder_coefficient(LAW) * BORE
    assert solution.psi_d == pytest.approx(exact, rel=1e-6)
    assert abs(solution.psi_q) < 1e-6 * exact
    assert abs(solution.torque) < 1e-6 * exact * 10.0  # of the torque at 10 A


def test_torque_is_linkage_times_current() -> None:
    """T = 3/2 p psi_d i_q of a rotor without saliency, by Maxwell's stress within 1e-6."""
    model = model_of(ring_machine())
    linkage = solve_point(model, 0.0, 0.0, 0.3).psi_d
    assert solve_point(model, 0.0, 10.0, 0.3).torque == pytest.approx(
        1.5 * linkage * 10.0, rel=1e-6
    )


def test_energies_sum_to_the_currents() -> None:
    """W + W' = sum psi_k i_k and dW'/di_d = 3/2 psi_d, exact for the discrete field (1e-6)."""
    model, step = model_of(ring_machine()), 0.1
    low, mid, high = (solve_point(model, i, 4.0, 0.3) for i in (3.0 - step, 3.0, 3.0 + step))
    currents = 1.5 * (mid.psi_d * 3.0 + mid.psi_q * 4.0)
    assert mid.energy + mid.coenergy == pytest.approx(currents, rel=1e-6)
    assert (high.coenergy - low.coenergy) / (2.0 * step) == pytest.approx(1.5 * mid.psi_d, rel=1e-6)


@pytest.mark.parametrize("core", [1.0, 5.0, 1e5])
def test_no_load_linkage_of_a_ring_magnet(core: float) -> None:
    """A ring on a core of relative permeability `core`, within 1e-6: four conditions, solved."""
    c, a, b, mu = 0.018, RADIUS, BORE, LAW.recoil_permeability
    # Unknowns: core F (A = F r), ring C, E, gap D (A = D (r + b^2 / r)).
    conditions = np.array(
        [
            [c, -c, -1.0 / c, 0.0],
            [0.0, a, 1.0 / a, -(a + b**2 / a)],
            [1.0 / core, -1.0 / mu, 1.0 / (mu * c**2), 0.0],
            [0.0, 1.0 / mu, -1.0 / (mu * a**2), -(1.0 - b**2 / a**2)],
        ]
    )
    magnet = LAW.remanence / mu
    gap = np.linalg.solve(conditions, [0.0, 0.0, -magnet, magnet])[3]
    machine = ring_machine((Ring("shaft", c, 8),))
    solution = solve_point(model_of(machine, shaft=core), 0.0, 0.0, 0.2)
    assert solution.psi_d == pytest.approx(math.pi * STACK * TURNS * gap * BORE, rel=1e-6)


def test_no_remanence_is_a_linear_material() -> None:
    """Without remanence a magnet is a shaft of its permeability: all figures to 1e-10."""
    law = MagnetLaw(0.0, 3.0, 1.0)
    magnet = solve_point(model_of(ring_machine(), law), 5.0, 3.0, 0.2)
    plain = RingMachine(
        pole_pairs=1,
        rotor=(Ring("shaft", RADIUS, 12),),
        bore=BORE,
        stator=(Ring("stator_iron", 1.2 * BORE, 3),),
        stack_length=STACK,
        n_circle=48,
    )
    settings = FieldSettings(shaft_relative_permeability=3.0, newton=NEWTON)
    air = solve_point(
        sheet_model(plain, linear_law(1.0), OPEN_STATOR, TURNS, settings), 5.0, 3.0, 0.2
    )
    assert magnet.psi_d == pytest.approx(air.psi_d, rel=1e-10)
    assert magnet.psi_q == pytest.approx(air.psi_q, rel=1e-10)
    assert magnet.coenergy == pytest.approx(air.coenergy, rel=1e-10)
    assert magnet.torque == pytest.approx(air.torque, abs=1e-10 * air.coenergy)


def test_demagnetisation_of_a_cylinder() -> None:
    """The field in the cylinder is uniform, so it passes the knee as a whole at one current.

    A sheet of 3/2 (N/2) i amperes a radian on the bore and the magnet give
    C = D (1 + b^2/a^2) + K (derived below); B = C within 1e-4, and 0.1 % less or more current
    than that of the knee leaves nothing or all of the area below it.
    """
    mu, a2, b2 = LAW.recoil_permeability, RADIUS**2, BORE**2
    # Gap A = D r + E / r with the sheet J = 3/4 N i: D - E/b^2 = mu_0 J / b; cylinder C r.
    sheet = MU_0 * 0.75 * TURNS / BORE  # T per A of i_d
    conditions = np.array(
        [[1.0, -1.0, -1.0 / a2], [1.0 / mu, -1.0, 1.0 / a2], [0.0, 1.0, -1.0 / b2]]
    )
    own = np.linalg.solve(conditions, [0.0, LAW.remanence / mu, 0.0])[0]
    slope = np.linalg.solve(conditions, [0.0, 0.0, sheet])[0]
    at_knee = (LAW.knee - own) / slope  # A of i_d
    machine = ring_machine()
    model, regions = model_of(machine), ring_section(machine).rotor
    no_load = solve_point(model, 0.0, 0.0, 0.2)
    assert math.cos(opposing_angle(no_load.psi_d, no_load.psi_q)) == pytest.approx(-1.0)
    assert at_knee < 0.0
    for share, current in ((0.0, 0.999 * at_knee), (1.0, 1.001 * at_knee)):
        solution = solve_point(model, current, 0.0, 0.2)
        (state,) = magnet_states(model.sector.rotor, regions, solution.a_rotor, LAW)
        assert state.share_below == share
        assert state.flux_low == pytest.approx(own + slope * current, abs=1e-4 * own)
        assert state.area == pytest.approx(0.5 * math.pi * a2, rel=1e-5)


def test_field_in_the_cylinder_is_uniform() -> None:
    """B = D (1 + b^2/a^2) along the magnetisation everywhere, within 1e-5."""
    model = model_of(ring_machine())
    solution = solve_point(model, 0.0, 0.0, 0.2)
    rotor = model.sector.rotor
    b = flux_density(rotor, solution.a_rotor)[rotor.elements_of("magnet")]
    exact = cylinder_coefficient(LAW) * (1.0 + BORE**2 / RADIUS**2)
    assert b[:, 0] == pytest.approx(exact, rel=1e-5)
    assert np.abs(b[:, 1]).max() < 1e-5 * exact
