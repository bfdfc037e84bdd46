"""The flux map as a drive meets it: end winding and resistance added, and the drive's two limits.

Linkages hold the end winding's leakage here: psi = psi of the map + L_w i. It adds nothing to the
torque. Steady voltage of a phase, dq, amplitude-invariant, peak: u = R i + j omega_e psi (derived).
Resistance and end winding are formulas (`geometry.winding`), so voltages are estimates.

`side` is the sign of i_d when motoring forwards. It is 1 but for outward magnets, whose torque
wants i_d and i_q negative; the map is then read by the mirror symmetry about the q axis.
Any shape of currents that broadcast.
"""

import math
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.types import FloatArray

from .coenergy_surface import CoenergySurface, incremental, linkages, torque

SIDE_ANGLES = 181  # tried over the half turn to see which sign of i_d motors


@dataclass(frozen=True, slots=True, eq=False)
class Terminals:
    """A flux map with what stands between it and its supply."""

    surface: CoenergySurface
    resistance: float  # Ohm, of a phase
    end_inductance: float  # H, of a phase
    current_limit: float  # A, peak
    voltage_limit: float  # V, peak of a phase
    side: int  # sign of i_d when motoring forwards


def terminals(
    surface: CoenergySurface,
    *,
    resistance: float,
    end_inductance: float,
    current_limit: float,
    line_voltage: float,
) -> Terminals:
    """The map behind its terminals.

    Args:
        surface: the map's.
        resistance: of a phase in Ohm.
        end_inductance: of a phase in H.
        current_limit: A, peak.
        line_voltage: V rms between the lines of a star-connected winding, the supply's most.

    Raises:
        LamwrightError: the current limit lies outside the map, or no current within it motors.
    """
    reach = min(surface.i_d_range[1], surface.i_q_range[1])
    if not 0.0 < current_limit <= reach * (1.0 + 1e-9):
        raise LamwrightError(
            f"current limit {current_limit:g} A: outside the flux map, which ends at {reach:g} A;"
            f" accepted up to {reach:g} A, or map larger currents"
        )
    side = _side(surface, min(current_limit, reach))
    phase_voltage = math.sqrt(2.0 / 3.0) * line_voltage
    return Terminals(surface, resistance, end_inductance, current_limit, phase_voltage, side)


def _side(surface: CoenergySurface, amplitude: float) -> int:
    """The sign of i_d that gives the most torque."""
    gamma = np.linspace(-0.5 * math.pi, 0.5 * math.pi, SIDE_ANGLES)
    # Without magnets the signs of i_q are alike, and i_d > 0 motors by the choice of the d axis.
    has_magnets = surface.i_q_range[0] <= -amplitude and not surface.even_q
    if not has_magnets:
        gamma = gamma[gamma >= 0.0]
    found = torque(surface, amplitude * np.cos(gamma), amplitude * np.sin(gamma))
    forward, backward = float(found.max()), float(-found.min())
    if has_magnets and surface.even_d and backward > forward * (1.0 + 1e-6):
        return -1
    if forward <= 0.0:
        raise LamwrightError(
            f"no current angle gives motoring torque at {amplitude:g} A:"
            " the rotor has no saliency along its d axis"
        )
    return 1


def reach_d(drive: Terminals) -> float:
    """Greatest amount of i_d in A on the motoring side."""
    low, high = drive.surface.i_d_range
    return high if drive.side > 0 else -low


def has_both_signs(drive: Terminals) -> bool:
    """Whether the two signs of i_q differ and both are mapped, as magnets ask for."""
    return drive.surface.i_q_range[0] < 0.0 and not drive.surface.even_q


def terminal_linkages(
    drive: Terminals, i_d: FloatArray, i_q: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """psi_d and psi_q in V s, end winding included."""
    psi_d, psi_q = linkages(drive.surface, i_d, i_q)
    return psi_d + drive.end_inductance * i_d, psi_q + drive.end_inductance * i_q


def shaft_torque(drive: Terminals, i_d: FloatArray, i_q: FloatArray) -> FloatArray:
    """Mean torque in N m at the gap; iron and friction losses are not taken off."""
    return torque(drive.surface, i_d, i_q)


def torque_slopes(
    drive: Terminals, i_d: FloatArray, i_q: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """dT/di_d and dT/di_q in N m/A."""
    psi_d, psi_q = linkages(drive.surface, i_d, i_q)
    l_dd, l_dq, l_qq = incremental(drive.surface, i_d, i_q)
    # of T = 3/2 p (psi_d i_q - psi_q i_d), derived
    factor = 1.5 * drive.surface.pole_pairs
    along_d = factor * (l_dd * i_q - psi_q - l_dq * i_d)
    along_q = factor * (psi_d + l_dq * i_q - l_qq * i_d)
    return along_d, along_q


def voltages(
    drive: Terminals, i_d: FloatArray, i_q: FloatArray, omega_e: FloatArray | float
) -> tuple[FloatArray, FloatArray]:
    """u_d and u_q in V, peak of a phase, at the electrical frequency in rad/s."""
    psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
    return drive.resistance * i_d - omega_e * psi_q, drive.resistance * i_q + omega_e * psi_d


def square_voltage(
    drive: Terminals, i_d: FloatArray, i_q: FloatArray, omega_e: FloatArray | float
) -> FloatArray:
    """u_d^2 + u_q^2 in V^2."""
    u_d, u_q = voltages(drive, i_d, i_q, omega_e)
    return u_d**2 + u_q**2


def square_voltage_slopes(
    drive: Terminals, i_d: FloatArray, i_q: FloatArray, omega_e: FloatArray | float
) -> tuple[FloatArray, FloatArray]:
    """Slopes of u_d^2 + u_q^2 to i_d and i_q in V^2/A."""
    u_d, u_q = voltages(drive, i_d, i_q, omega_e)
    l_dd, l_dq, l_qq = incremental(drive.surface, i_d, i_q)
    l_dd, l_qq = l_dd + drive.end_inductance, l_qq + drive.end_inductance
    resistance = drive.resistance
    along_d = 2.0 * (u_d * (resistance - omega_e * l_dq) + u_q * omega_e * l_dd)
    along_q = 2.0 * (-u_d * omega_e * l_qq + u_q * (resistance + omega_e * l_dq))
    return along_d, along_q


def square_linkage(drive: Terminals, i_d: FloatArray, i_q: FloatArray) -> FloatArray:
    """psi_d^2 + psi_q^2 in (V s)^2, end winding included."""
    psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
    return psi_d**2 + psi_q**2


def square_linkage_slopes(
    drive: Terminals, i_d: FloatArray, i_q: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Slopes of psi_d^2 + psi_q^2 to i_d and i_q in (V s)^2/A."""
    psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
    l_dd, l_dq, l_qq = incremental(drive.surface, i_d, i_q)
    l_dd, l_qq = l_dd + drive.end_inductance, l_qq + drive.end_inductance
    return 2.0 * (psi_d * l_dd + psi_q * l_dq), 2.0 * (psi_d * l_dq + psi_q * l_qq)
