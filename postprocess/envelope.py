"""The envelope: the most torque over speed that current and supply allow, and its landmarks.

At low speed the current limit rules, at the angle of most torque per ampere; from the base speed
on both limits do; where the most torque per volt takes less than the current limit, the voltage
alone. Resistance and end-winding leakage are in (`terminals`); iron and friction loss are not:
torque is that of the field, power is torque times speed. Where nothing is reached there is NaN.
Axes: n speeds.
"""

import math
from dataclasses import dataclass, replace
from enum import IntEnum

import numpy as np

from lamwright.solver.types import FloatArray, IntArray

from .control_curves import most_per_ampere
from .terminals import Terminals, shaft_torque, voltages
from .within_limits import currents_at, most_torque_within

AT_LIMIT = 1e-4  # relative: nearer to a limit than this, the limit rules


class Region(IntEnum):
    """Which limits rule."""

    NONE = 0  # nothing is reached
    CURRENT = 1
    BOTH = 2
    VOLTAGE = 3


REGION_NAMES = {
    Region.NONE: "not reached",
    Region.CURRENT: "current limit",
    Region.BOTH: "current and voltage limit",
    Region.VOLTAGE: "most torque per volt",
}


@dataclass(frozen=True, slots=True, eq=False)
class Envelope:
    """The most torque over speed and what goes with it; all (n,)."""

    speed: FloatArray  # mechanical rad/s
    torque: FloatArray  # N m, of the field; negative generating
    power: FloatArray  # W, torque times speed
    current: FloatArray  # A, peak
    gamma: FloatArray  # rad
    i_d: FloatArray  # A
    i_q: FloatArray  # A
    voltage: FloatArray  # V, peak of a phase
    power_factor: FloatArray  # of the fundamental
    region: IntArray  # of `Region`


@dataclass(frozen=True, slots=True)
class Corner:
    """Base speed: up to it the current limit alone rules."""

    speed: float  # rad/s
    torque: float  # N m
    gamma: float  # rad


def envelope(drive: Terminals, speed: FloatArray, is_generating: bool = False) -> Envelope:
    """The envelope at speeds (n,) in rad/s, mechanical, not negative.

    Generating is motoring with -R: turning i_d round turns torque and power round, and the voltage
    of R i - j omega psi is that of -R i + j omega psi (derived).
    """
    within = replace(drive, resistance=-drive.resistance) if is_generating else drive
    omega_e = drive.surface.pole_pairs * speed
    current, angle = most_torque_within(within, omega_e)
    is_known = ~np.isnan(current)
    i_d, i_q = currents_at(drive, *(np.where(is_known, x, 0.0) for x in (current, angle)))
    u_d, u_q = voltages(within, i_d, i_q, omega_e)
    volts, amps = np.hypot(u_d, u_q), np.hypot(i_d, i_q)
    # Without voltage there is no power; its factor is then that of a resistance.
    factor = np.divide(
        u_d * i_d + u_q * i_q, volts * amps, out=np.ones_like(volts), where=volts * amps > 0.0
    )
    at_current = amps > (1.0 - AT_LIMIT) * drive.current_limit
    at_voltage = volts > (1.0 - AT_LIMIT) * drive.voltage_limit
    region = np.where(at_voltage, np.where(at_current, Region.BOTH, Region.VOLTAGE), Region.CURRENT)
    sign = -1.0 if is_generating else 1.0
    torque = sign * shaft_torque(drive, i_d, i_q)

    def shown(values: FloatArray) -> FloatArray:
        return np.where(is_known, values, np.nan)

    return Envelope(
        speed=speed,
        torque=shown(torque),
        power=shown(torque * speed + 0.0),  # no -0 at standstill
        current=current,
        gamma=shown(np.arctan2(i_q, sign * i_d)),
        i_d=shown(sign * i_d),
        i_q=shown(i_q),
        voltage=shown(volts),
        power_factor=shown(sign * factor),
        region=np.where(is_known, region, Region.NONE),
    )


def corner(drive: Terminals) -> Corner | None:
    """Where the current limit at most torque per ampere meets the voltage limit.

    None where the supply does not drive that current even at standstill. Source: derived,
    |R i + j omega psi|^2 = U^2 is a quadratic in omega.
    """
    current = np.array([drive.current_limit])
    best = most_per_ampere(drive, current)
    psi_d, psi_q = best.psi_d, best.psi_q
    a = float((psi_d**2 + psi_q**2)[0])
    b = drive.resistance * float((psi_d * best.i_q - psi_q * best.i_d)[0])
    c = (drive.resistance * drive.current_limit) ** 2 - drive.voltage_limit**2
    if c >= 0.0:
        return None
    omega_e = (-b + math.sqrt(b**2 - a * c)) / a
    return Corner(omega_e / drive.surface.pole_pairs, float(best.torque[0]), float(best.gamma[0]))
