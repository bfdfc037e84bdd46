"""Windage of a rotor and friction of its bearings: estimates by formula.

Windage is that of a smooth cylinder turning in an annular gap, friction coefficients of Bilgen &
Boulos (J. Fluids Engineering 95, 1973, from memory), with both end faces as discs in free air
(von Karman and Goldstein, by Schlichting, Boundary-Layer Theory, from memory). Slots, barrier ends
and notches stir more, common practice 1 to 2.5 times; fans and coolants are in no figure. +-50 %.

Air at 1.013 bar, ideal gas, viscosity by Sutherland (Phil. Mag. 36, 1893, from memory).
"""

import math
from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

PRESSURE = 101325.0  # Pa
GAS_CONSTANT = 287.05  # J/(kg K), dry air
KELVIN = 273.15  # K at 0 C

# Couette Reynolds numbers up to which C = a (g/R)^0.3 Re^-b holds: laminar, two transitions,
# turbulent.
_GAP_LAWS = ((64.0, 10.0, 1.0), (500.0, 2.0, 0.6), (1e4, 1.03, 0.5), (math.inf, 0.065, 0.2))
_DISC_TURBULENT = 3e5  # Reynolds number of a disc's rim


@dataclass(frozen=True, slots=True)
class Turning:
    """A rotor in its gap, SI."""

    radius: float
    gap: float
    length: float
    shaft_radius: float
    air_temperature_c: float


def air_density(temperature_c: float) -> float:
    """Density of dry air in kg/m^3."""
    return PRESSURE / (GAS_CONSTANT * (temperature_c + KELVIN))


def air_viscosity(temperature_c: float) -> float:
    """Dynamic viscosity of air in Pa s."""
    kelvin = temperature_c + KELVIN
    return 1.716e-5 * math.pow(kelvin / KELVIN, 1.5) * (KELVIN + 110.4) / (kelvin + 110.4)


def gap_coefficient(reynolds: FloatArray, gap_ratio: float) -> FloatArray:
    """Torque coefficient C of the gap; P = C pi rho omega^3 R^4 L / 2.

    Args:
        reynolds: Couette Reynolds number rho omega R g / mu, above 0.
        gap_ratio: gap over radius.
    """
    found = np.zeros_like(reynolds)
    least = 0.0
    for most, factor, power in _GAP_LAWS:
        here = (reynolds > least) & (reynolds <= most)
        found[here] = factor * gap_ratio**0.3 * reynolds[here] ** -power
        least = most
    return found


def windage_loss(rotor: Turning, speed: FloatArray) -> FloatArray:
    """Windage of cylinder and end faces in W (n,) at mechanical speeds (n,) in rad/s from 0."""
    rho, mu = air_density(rotor.air_temperature_c), air_viscosity(rotor.air_temperature_c)
    omega = np.maximum(np.abs(np.asarray(speed, dtype=np.float64)), 1e-9)
    gap = gap_coefficient(rho * omega * rotor.radius * rotor.gap / mu, rotor.gap / rotor.radius)
    barrel = 0.5 * gap * math.pi * rho * omega**3 * rotor.radius**4 * rotor.length
    rim = rho * omega * rotor.radius**2 / mu
    disc = np.where(rim < _DISC_TURBULENT, 3.87 / rim**0.5, 0.146 / rim**0.2)
    faces = 0.5 * disc * rho * omega**3 * (rotor.radius**5 - rotor.shaft_radius**5)
    loss: FloatArray = barrel + faces
    return loss


def bearing_loss(torque: float, speed: FloatArray) -> FloatArray:
    """Loss in W of a friction torque in N m that is the same at every speed, rad/s."""
    loss: FloatArray = torque * np.abs(speed)
    return loss
