"""Efficiency over torque and speed, at the currents that lose least or at the least current.

Power balance of a point (derived):

    P_in = T omega + 3/2 R k |i_t|^2 + P_stator,     P_shaft = T omega - P_rotor - P_friction

T is the field's torque, P_stator and P_rotor the iron losses, k the AC copper's factor. The
stator's iron loss is fed from the terminals, by a conductance beside the emf as in `voltage_run`:
i_t = i + P_stator / (3/2 |omega_e psi|^2) j omega_e psi. The rotor's comes from harmonics that
stand still or nearly so in the stator, hence from the shaft; so do friction and windage. Limits are
those of the envelope: current i, voltage R i + j omega_e psi.

Search. At each shaft torque and speed the current angle runs over grids that zoom in; on a ray the
current follows from the torque by a root in a bracket, the drag from the best point of the grid
before. Angles within both limits are ranked by what shall be least, others by how far they are
outside, so that a grid finds the narrow way near the envelope. The last grid's step is 0.02 degree.
Axes: n points of torque and speed, n_angle.
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import numpy as np

from lamwright.solver.types import FloatArray

from .brackets import roots
from .terminals import Terminals, shaft_torque, square_voltage, terminal_linkages
from .within_limits import angle_range, currents_at

FIRST_ANGLES, LATER_ANGLES, ZOOMS = 19, 13, 3  # 90 degrees to 2 x 5 / 6^3 / 2
DRAG_ROUNDS = 3  # at the angle found; the drag changes by some 1 % of its change each time
TORQUE_TOL = 1e-9  # of the current that makes a torque
AT_LIMIT = 1e-3  # relative, of the voltage over its limit: what the last grid can miss
OUTSIDE = 1e12  # W, far above any loss: the rank of what is outside

Aim = Literal["loss", "current"]
# i_d and i_q in A, omega_e in rad/s -> iron loss of the stator and of the rotor in W
IronLosses = Callable[[FloatArray, FloatArray, FloatArray], tuple[FloatArray, FloatArray]]


@dataclass(frozen=True, slots=True, eq=False)
class KnownLosses:
    """What is known of a machine's losses beside the DC copper's; the rest is in `missing`."""

    iron: IronLosses | None
    copper_factor: Callable[[FloatArray], FloatArray] | None  # omega_e in rad/s -> AC over DC
    friction: Callable[[FloatArray], FloatArray] | None  # speed in rad/s -> W, with windage
    missing: tuple[str, ...]  # trade names of the losses left out


@dataclass(frozen=True, slots=True, eq=False)
class LoadPoints:
    """Points of operation and what they lose; all (n,), NaN where a point is out of reach."""

    speed: FloatArray  # rad/s, mechanical
    torque: FloatArray  # N m, at the shaft
    i_d: FloatArray  # A, of the field
    i_q: FloatArray
    field_torque: FloatArray  # N m
    copper: FloatArray  # W
    stator_iron: FloatArray  # W, 0 where not given; likewise below
    rotor_iron: FloatArray
    friction: FloatArray
    input: FloatArray  # W
    efficiency: FloatArray  # shaft power over input


def load_points(
    drive: Terminals,
    losses: KnownLosses,
    speed: FloatArray,
    torque: FloatArray,
    aim: Aim = "loss",
) -> LoadPoints:
    """The points of least loss, or of least current, at shaft torques and speeds.

    Args:
        drive: the machine and its limits.
        losses: what is known of them.
        speed: (n,), rad/s, above 0.
        torque: (n,), N m at the shaft, above 0.
        aim: what is least.
    """
    omega_e = drive.surface.pole_pairs * speed
    friction = losses.friction(speed) if losses.friction else np.zeros(speed.shape)
    drag = friction / speed
    first, last = angle_range(drive)
    low, high = np.full(speed.shape, first), np.full(speed.shape, last)
    row, gamma = np.arange(speed.size), low
    for zoom in range(ZOOMS + 1):
        count = LATER_ANGLES if zoom else FIRST_ANGLES
        angles = low[:, None] + (high - low)[:, None] * np.linspace(0.0, 1.0, count)
        wanted = (torque + drag)[:, None]
        rank, rotor = _ranked(drive, losses, wanted, angles, omega_e[:, None], aim)
        k = np.argmin(rank, axis=1)
        gamma = angles[row, k]
        low, high = angles[row, np.maximum(k - 1, 0)], angles[row, np.minimum(k + 1, count - 1)]
        drag = (friction + rotor[row, k]) / speed
    for _ in range(DRAG_ROUNDS):
        _, rotor = _ranked(drive, losses, torque + drag, gamma, omega_e, aim)
        drag = (friction + rotor) / speed
    current = current_of_torque(drive, torque + drag, gamma)
    is_made = np.isfinite(current)
    over = _over_voltage(drive, np.where(is_made, current, 0.0), gamma, omega_e)
    is_reached = is_made & (over <= AT_LIMIT)
    i_d, i_q = currents_at(drive, np.where(is_reached, current, np.nan), gamma)
    return at_currents(drive, losses, speed, i_d, i_q)


def at_currents(
    drive: Terminals, losses: KnownLosses, speed: FloatArray, i_d: FloatArray, i_q: FloatArray
) -> LoadPoints:
    """The power balance at currents in A, NaN where they are; all (n,)."""
    is_known = np.isfinite(i_d)
    d, q = (np.where(is_known, i, 0.0) for i in (i_d, i_q))
    omega_e = drive.surface.pole_pairs * speed
    made = shaft_torque(drive, d, q)
    copper, stator, rotor = _field_losses(drive, losses, d, q, omega_e)
    friction = losses.friction(speed) if losses.friction else np.zeros(speed.shape)
    drawn = made * speed + copper + stator
    torque = made - (rotor + friction) / speed

    def shown(values: FloatArray) -> FloatArray:
        return np.where(is_known, values, np.nan)

    return LoadPoints(
        speed=speed,
        torque=shown(torque),
        i_d=i_d,
        i_q=i_q,
        field_torque=shown(made),
        copper=shown(copper),
        stator_iron=shown(stator),
        rotor_iron=shown(rotor),
        friction=shown(friction),
        input=shown(drawn),
        efficiency=shown(torque * speed / np.where(drawn > 0.0, drawn, np.nan)),
    )


def current_of_torque(drive: Terminals, torque: FloatArray, gamma: FloatArray) -> FloatArray:
    """Current in A within its limit that makes the field torque in N m; NaN where none does."""
    torque, gamma = np.broadcast_arrays(torque, gamma)
    none, most = np.zeros(gamma.shape), np.full(gamma.shape, drive.current_limit)

    def excess(current: FloatArray) -> FloatArray:
        return shaft_torque(drive, *currents_at(drive, current, gamma)) - torque

    return roots(excess, none, most, TORQUE_TOL)


def _ranked(
    drive: Terminals,
    losses: KnownLosses,
    torque: FloatArray,
    gamma: FloatArray,
    omega_e: FloatArray,
    aim: Aim,
) -> tuple[FloatArray, FloatArray]:
    """What shall be least at angles where the field makes a torque, and the rotor's iron loss."""
    found = current_of_torque(drive, torque, gamma)
    is_made = np.isfinite(found)
    current = np.where(is_made, found, drive.current_limit)
    i_d, i_q = currents_at(drive, current, gamma)
    lack = np.where(is_made, 0.0, 1.0 - shaft_torque(drive, i_d, i_q) / torque)
    over = np.maximum(_over_voltage(drive, current, gamma, omega_e), 0.0) + lack
    copper, stator, rotor = _field_losses(drive, losses, i_d, i_q, omega_e)
    value = copper + stator + rotor if aim == "loss" else current
    return np.where(is_made & (over <= 0.0), value, OUTSIDE * (1.0 + over)), rotor


def _over_voltage(
    drive: Terminals, current: FloatArray, gamma: FloatArray, omega_e: FloatArray
) -> FloatArray:
    """How far the voltage is over its limit, relative; below 0 where it is kept."""
    i_d, i_q = currents_at(drive, current, gamma)
    return np.sqrt(square_voltage(drive, i_d, i_q, omega_e)) / drive.voltage_limit - 1.0


def _field_losses(
    drive: Terminals, losses: KnownLosses, i_d: FloatArray, i_q: FloatArray, omega_e: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Copper loss and iron losses of stator and rotor in W."""
    stator = rotor = np.zeros(i_d.shape)
    t_d, t_q = i_d, i_q
    if losses.iron is not None:
        i_d, i_q, omega = np.broadcast_arrays(i_d, i_q, omega_e)
        stator, rotor = losses.iron(i_d, i_q, omega)
        psi_d, psi_q = terminal_linkages(drive, i_d, i_q)
        emf_d, emf_q = -omega * psi_q, omega * psi_d
        square = emf_d**2 + emf_q**2
        g_iron = np.divide(stator, 1.5 * square, out=np.zeros_like(square), where=square > 0.0)
        t_d, t_q = i_d + g_iron * emf_d, i_q + g_iron * emf_q
    factor = losses.copper_factor(omega_e) if losses.copper_factor else 1.0
    return 1.5 * drive.resistance * factor * (t_d**2 + t_q**2), stator, rotor
