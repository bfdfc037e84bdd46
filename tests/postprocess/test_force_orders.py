"""Stress waves and tooth forces: products of two invented waves, brute force, solved machines."""

import math
from functools import cache

import numpy as np
import pytest
from shipped import shipped, shipped_model

from lamwright.postprocess.force_orders import (
    force_orders,
    stress_on_rotor,
    tooth_forces,
    tooth_orders,
)
from lamwright.postprocess.gap_waves import GapWaves, field_on_circle, gap_waves
from lamwright.postprocess.magnetic_pull import pull_of_waves
from lamwright.postprocess.torque import waveform_positions
from lamwright.postprocess.torque_pairs import torque_at_positions
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.gap_circle import circle_field, circle_reader
from lamwright.solver.steel import MU_0

RADIUS, STACK, SLOTS = 0.04, 0.1, 24
B_1, B_11 = 0.8, 0.1  # T


def invented_waves(second: int = 22) -> GapWaves:
    """B_r = B_1 cos(2 theta - theta_e) + B_11 cos(second theta + theta_e), B_theta = 0; p = 2."""
    born = np.zeros((24, 40), dtype=complex)
    # B_r = (1/R) dA/d theta, A_n = 2 alpha_n where both sides bear the same
    born[1, 1] = 0.25 * B_1 * RADIUS / 2j
    born[-1, second - 1] = 0.25 * B_11 * RADIUS / (1j * second)
    return GapWaves(2, SLOTS, RADIUS, STACK, 6, born, born)


def test_invented_field_is_the_one_meant() -> None:
    """At position 0 both crests lie at angle 0: B_1 + B_11, and no tangential field."""
    radial, tangential = field_on_circle(invented_waves(), 160)
    angle = 2.0 * math.pi / 160 * np.arange(160)
    expected = B_1 * np.cos(2.0 * angle) + B_11 * np.cos(22.0 * angle)
    assert radial[0] == pytest.approx(expected, abs=1e-12)
    assert np.abs(tangential).max() < 1e-12


def test_products_of_two_waves() -> None:
    """(B_1 cos x + B_11 cos y)^2 / (2 mu0): orders 4, 44, 20 and 24 by hand; exact.

    Order 20 stands at time -2 (against the rotor), 24 at time 0.
    """
    waves = invented_waves()
    found = force_orders(waves, stress_on_rotor(waves), 60, 11.0, 1e-6)
    unit = 1.0 / (2.0 * MU_0)
    assert found[0].space == found[0].time == 0
    assert {(f.space, f.time): f.radial / unit for f in found} == pytest.approx(
        {
            (0, 0.0): 0.5 * (B_1**2 + B_11**2),
            (4, 2.0): 0.5 * B_1**2,
            (20, -2.0): B_1 * B_11,
            (24, 0.0): B_1 * B_11,
            (44, -2.0): 0.5 * B_11**2,
        },
        rel=1e-9,
    )
    assert max(f.tangential for f in found) < 1e-9 * unit


def test_tooth_force_is_the_integral_over_its_pitch() -> None:
    """Brute force over a tooth pitch: 1e-5 at 4 000 points; no field along the circle, no more."""
    waves = invented_waves()
    forces = tooth_forces(waves, stress_on_rotor(waves))
    for tooth, row in ((0, 0), (5, 7), (23, 11)):
        middle, half = 2.0 * math.pi * tooth / SLOTS, math.pi / SLOTS
        angle = middle + half * (2.0 * (np.arange(4000) + 0.5) / 4000 - 1.0)
        theta_e = 2.0 * math.pi * row / 24
        radial = B_1 * np.cos(2.0 * angle - theta_e) + B_11 * np.cos(22.0 * angle + theta_e)
        stress = radial**2 / (2.0 * MU_0)
        force = np.mean(stress) * 2.0 * half * RADIUS * STACK
        assert forces.pull[row, tooth] == pytest.approx(force, rel=1e-5)
        assert forces.tangential[row, tooth] == pytest.approx(0.0, abs=1e-9 * force)
        assert forces.angle_el[row] == pytest.approx(theta_e)


def test_neighbouring_orders_pull_the_rotor() -> None:
    """Orders 2 and 3: the stress turned to x and y sums to the pull of the waves; exact.

    And by hand: |F| = pi R L B_1 B_3 / (2 mu0) (int of cos 2x cos 3x cos x is pi / 2).
    """
    waves = invented_waves(second=3)
    stress = stress_on_rotor(waves)
    toward = np.exp(2j * math.pi / stress.shape[1] * np.arange(stress.shape[1]))
    on_rotor = 2.0 * math.pi * RADIUS * STACK * np.mean(stress * toward, axis=1)
    pull = pull_of_waves(waves.stator_at_positions(), waves.rotor_at_positions(), RADIUS, STACK)
    assert on_rotor == pytest.approx(pull, rel=1e-9)
    by_hand = math.pi * RADIUS * STACK * B_1 * B_11 / (2.0 * MU_0)
    assert np.abs(pull) == pytest.approx(by_hand, rel=1e-9)


@cache
def demo_waves() -> GapWaves:
    model, one = shipped_model("demo_24s4p_arc", 2.5), shipped("demo_24s4p_arc", 2.5)
    reader = circle_reader(model)
    points = [OperatingPoint(7.0, 9.0, x) for x in waveform_positions(2, 6)]
    fields = [circle_field(reader, s) for s in solve_chain(model, points)]
    return gap_waves(reader, fields, one.section)


def test_like_poles_leave_multiples_of_the_poles() -> None:
    """24/4 demo: space orders 0, 4, 8 ..., even time orders, 6 apart at each space order.

    From one field wave to another 6 orders in space or time: r - 4 = k - 2 + 6 s (derived).
    """
    waves = demo_waves()
    found = force_orders(waves, stress_on_rotor(waves), 48, 17.0)
    assert len(found) > 20
    assert {order.space % 4 for order in found} == {0}
    assert {round(order.time) % 2 for order in found} == {0}
    for order in found:
        assert (order.space / 2 - order.time) % 6 == pytest.approx(0.0)


def test_teeth_of_the_demo_carry_the_torque_one_after_the_other() -> None:
    """All teeth alike, each later by its angle; their sideways forces times the radius are T."""
    waves = demo_waves()
    forces = tooth_forces(waves, stress_on_rotor(waves))
    moved = np.roll(forces.pull[:, 2], -6)  # two slots are 60 degrees: 6 positions
    assert moved == pytest.approx(forces.pull[:, 0], rel=1e-9)
    torque = -forces.tangential.sum(axis=1) * waves.radius
    assert torque == pytest.approx(torque_at_positions(waves), rel=1e-9)
    orders, pull, sideways = tooth_orders(forces, waves.sixths)
    assert pull[0] == pytest.approx(forces.pull.mean(axis=0).max())
    assert orders[np.argmax(pull[1:]) + 1] == 2.0  # twice a period a pole passes
    assert sideways[0] == pytest.approx(np.abs(forces.tangential.mean(axis=0)).max())
