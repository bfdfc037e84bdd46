"""Windage and friction by formula: units, powers and the joints of their laws."""

import numpy as np
import pytest

from lamwright.postprocess.windage import (
    Turning,
    air_density,
    air_viscosity,
    bearing_loss,
    gap_coefficient,
    windage_loss,
)

ROTOR = Turning(radius=40e-3, gap=0.5e-3, length=0.1, shaft_radius=13e-3, air_temperature_c=60.0)


def test_air():
    """Textbook values at 20 C: 1.204 kg/m^3 and 18.1 uPa s."""
    assert air_density(20.0) == pytest.approx(1.204, rel=1e-3)
    assert air_viscosity(20.0) == pytest.approx(18.1e-6, rel=5e-3)


def test_laws_of_the_gap_meet():
    """The published coefficients jump by up to 7 % at their joints, no more."""
    for joint in (64.0, 500.0, 1e4):
        low, high = gap_coefficient(joint * np.array([1.0 - 1e-9, 1.0 + 1e-9]), 0.0125)
        assert low == pytest.approx(high, rel=0.07)


def test_slow_turning_is_near_couettes_flow():
    """Closed form of a thin gap: 2 pi mu omega^2 R^3 L / g; the fitted law is within a factor 2."""
    mu, omega = air_viscosity(60.0), 10.0
    exact = 2.0 * np.pi * mu * omega**2 * ROTOR.radius**3 * ROTOR.length / ROTOR.gap
    reynolds = air_density(60.0) * omega * ROTOR.radius * ROTOR.gap / mu
    c = gap_coefficient(np.array([reynolds]), ROTOR.gap / ROTOR.radius)[0]
    power = 0.5 * c * np.pi * air_density(60.0) * omega**3 * ROTOR.radius**4 * ROTOR.length
    assert 0.5 < power / exact < 2.0


def test_loss_over_speed():
    """Nothing at rest; steeper than the square, flatter than the cube; the same both ways."""
    speed = np.array([0.0, 100.0, 200.0, 400.0, 800.0])
    loss = windage_loss(ROTOR, speed)
    assert loss[0] == pytest.approx(0.0, abs=1e-9)
    powers = np.diff(np.log(loss[1:])) / np.log(2.0)
    assert np.all((powers > 2.0) & (powers < 3.0))
    assert windage_loss(ROTOR, -speed) == pytest.approx(loss)


def test_bearing_loss():
    """A torque of 0.02 N m at 1500 1/min takes pi W."""
    assert bearing_loss(0.02, np.array([50.0 * np.pi])) == pytest.approx(np.pi)
