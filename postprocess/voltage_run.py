"""A run in time on given voltages: the map as a machine, to hold the steady tables against.

    u = R i_t + e,   e = d psi/dt + j omega_e psi,   i_t = i + G e      dq of the rotor, peak values

psi = psi(i) + L_w i with end winding. The state is the current that makes the field; its slope is
(incremental inductances + L_w)^-1 d psi/dt, the same equation without an inverse map. G is the
conductance of the iron loss beside the machine's emf, P_iron / (3/2 omega_e^2 |psi|^2): common
practice, no source; 0 without iron loss. The rotor turns at a constant speed, or by its inertia
under a constant load, p/J (T - T_load) = d omega_e/dt, while the supply's voltage turns at omega_s:
d delta/dt = omega_s - omega_e, delta how far it has moved in the rotor's frame.

At constant speed and voltage the machine always settles: the matrix of small swings
-R L^-1 - omega_e j has the trace -R (1/l_dd + 1/l_qq) < 0 and a positive determinant (derived). It
swings at about omega_e, and slowly dies down where the resistance is small; a voltage that is
switched on at once would swing the linkage to twice its end. Hence the voltage rises over a ramp.
With the speed free it may not settle at all: `small_swings` tells.

Integrated by the explicit rule of order 8 of Prince & Dormand (1981; SciPy's DOP853) with its step
chosen for `TOLERANCE`; work and losses are integrated along as states.
Axes: n times.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.types import FloatArray

from .coenergy_surface import coenergy, linkages
from .surface_pieces import surface_pieces
from .terminals import Terminals

TOLERANCE = 1e-7  # relative, of the state
SMALLEST = 1e-7  # A and J, absolute
SAMPLES = 48  # kept of an electrical period
SWING = 1e-5  # A, rad and rad/s over 1, of the differences in `small_swings`

# i_d and i_q in A, omega_e in rad/s -> iron loss in W
IronLoss = Callable[[float, float, float], float]


@dataclass(frozen=True, slots=True)
class Feed:
    """What drives a run: the voltage in the rotor's frame, and how the rotor turns."""

    u_d: float  # V, after the ramp
    u_q: float
    omega_e: float  # rad/s, electrical, of supply and, at first, rotor
    ramp: float = 0.0  # s, over which the voltage comes from `from_d`, `from_q`
    from_d: float = 0.0  # V
    from_q: float = 0.0
    inertia: float = math.inf  # kg m^2; infinite: constant speed
    load: float = 0.0  # N m, of a rotor that turns by its inertia


@dataclass(frozen=True, slots=True, eq=False)
class VoltageRun:
    """What a run did; all (n,)."""

    time: FloatArray  # s
    i_d: FloatArray  # A, of the field
    i_q: FloatArray
    torque: FloatArray  # N m, of the field
    omega_e: FloatArray  # rad/s
    stored: FloatArray  # J, of the field and the end winding
    supplied: FloatArray  # J since the start, from the supply
    copper: FloatArray  # J since the start
    iron: FloatArray  # J since the start
    shaft: FloatArray  # J since the start, torque of the field times speed


def steady_voltages(
    drive: Terminals, i_d: float, i_q: float, omega_e: float, iron_loss: IronLoss | None = None
) -> tuple[float, float]:
    """u_d and u_q in V that hold currents in A steady at a speed in rad/s, iron loss counted in."""
    psi = _full_linkage(drive, i_d, i_q)
    emf = 1j * omega_e * psi
    g_iron = _conductance(iron_loss, i_d, i_q, omega_e, psi)
    u = drive.resistance * (complex(i_d, i_q) + g_iron * emf) + emf
    return u.real, u.imag


def voltage_run(
    drive: Terminals,
    feed: Feed,
    start: tuple[float, float],
    duration: float,
    iron_loss: IronLoss | None = None,
) -> VoltageRun:
    """The run from currents (i_d, i_q) in A over a duration in s.

    Raises:
        LamwrightError: the currents leave the map.
    """
    from scipy.integrate import solve_ivp  # 0.3 s to import

    first = np.array([*start, feed.omega_e, 0.0, 0.0, 0.0, 0.0, 0.0])
    period = 2.0 * math.pi / feed.omega_e
    count = max(2, round(SAMPLES * duration / period) + 1)
    rates = _rates(drive, feed, iron_loss)
    try:
        done = solve_ivp(
            rates,
            (0.0, duration),
            first,
            method="DOP853",
            t_eval=np.linspace(0.0, duration, count),
            rtol=TOLERANCE,
            atol=SMALLEST,
        )
    except ValueError as error:
        raise LamwrightError(f"voltage run: {error}; let the voltage rise slower") from None
    i_d, i_q, omega_e, _, supplied, copper, iron, shaft = done.y
    psi_d, psi_q = linkages(drive.surface, i_d, i_q)
    return VoltageRun(
        time=done.t,
        i_d=i_d,
        i_q=i_q,
        torque=1.5 * drive.surface.pole_pairs * (psi_d * i_q - psi_q * i_d),
        omega_e=omega_e,
        stored=stored_energy(drive, i_d, i_q),
        supplied=supplied,
        copper=copper,
        iron=iron,
        shaft=shaft,
    )


def stored_energy(drive: Terminals, i_d: FloatArray, i_q: FloatArray) -> FloatArray:
    """Field energy in J of machine and end winding; W = 3/2 (psi_d i_d + psi_q i_q) - W'."""
    psi_d, psi_q = linkages(drive.surface, i_d, i_q)
    field = 1.5 * (psi_d * i_d + psi_q * i_q) - coenergy(drive.surface, i_d, i_q)
    return np.asarray(field + 0.75 * drive.end_inductance * (i_d**2 + i_q**2))


def energy_gap(run: VoltageRun, since: float) -> float:
    """What the balance of energies lacks from a time in s to the end, of what was supplied.

    Electrical in = shaft + copper + iron + change of stored energy.
    """
    k = int(np.searchsorted(run.time, since))

    def change(energy: FloatArray) -> float:
        return float(energy[-1] - energy[k])

    spent = sum(change(energy) for energy in (run.shaft, run.copper, run.iron, run.stored))
    return (change(run.supplied) - spent) / change(run.supplied)


def small_swings(
    drive: Terminals, i_d: float, i_q: float, omega_e: float, inertia: float = math.inf
) -> tuple[complex, ...]:
    """Eigenvalues in 1/s of small swings about a steady point, the least damped first.

    Args:
        drive: that runs.
        i_d: A; i_q likewise.
        i_q: see i_d.
        omega_e: rad/s, electrical.
        inertia: kg m^2 of a rotor whose speed is free, on a supply of constant voltage and
            frequency; infinite for a constant speed.
    """
    u_d, u_q = steady_voltages(drive, i_d, i_q, omega_e)
    feed = Feed(u_d, u_q, omega_e, inertia=inertia, load=_torque(drive, i_d, i_q))
    rates = _rates(drive, feed, None)
    at = np.array([i_d, i_q, omega_e, 0.0, 0.0, 0.0, 0.0, 0.0])
    size = 2 if math.isinf(inertia) else 4
    columns = []
    for k in range(size):
        # Central differences: the error is of the square of the step.
        step = SWING * max(1.0, abs(float(at[k])))
        change = np.zeros(at.size)
        change[k] = step
        columns.append((rates(0.0, at + change) - rates(0.0, at - change))[:size] / (2.0 * step))
    values = np.linalg.eigvals(np.column_stack(columns))
    return tuple(complex(v) for v in sorted(values, key=lambda v: (-v.real, -v.imag)))


def _rates(
    drive: Terminals, feed: Feed, iron_loss: IronLoss | None
) -> Callable[[float, FloatArray], FloatArray]:
    """Time and state -> slope of the state."""
    u_first, u_last = complex(feed.from_d, feed.from_q), complex(feed.u_d, feed.u_q)
    pole_pairs, r, l_w = drive.surface.pole_pairs, drive.resistance, drive.end_inductance
    at = surface_pieces(drive.surface)

    def rates(time: float, state: FloatArray) -> FloatArray:
        i_d, i_q, omega_e, delta = (float(x) for x in state[:4])
        rise = 1.0 if time >= feed.ramp else time / feed.ramp
        u = (u_first + rise * (u_last - u_first)) * complex(math.cos(delta), math.sin(delta))
        psi_d, psi_q, l_dd, l_dq, l_qq = at(i_d, i_q)
        i = complex(i_d, i_q)
        psi = complex(psi_d, psi_q) + l_w * i
        g_iron = _conductance(iron_loss, i_d, i_q, omega_e, psi)
        emf = (u - r * i) / (1.0 + r * g_iron)
        turned = emf - 1j * omega_e * psi  # d psi/dt
        l_dd, l_qq = l_dd + l_w, l_qq + l_w
        det = l_dd * l_qq - l_dq**2
        terminal = i + g_iron * emf
        made = 1.5 * pole_pairs * (psi.conjugate() * i).imag
        return np.array(
            [
                (l_qq * turned.real - l_dq * turned.imag) / det,
                (l_dd * turned.imag - l_dq * turned.real) / det,
                pole_pairs * (made - feed.load) / feed.inertia,
                feed.omega_e - omega_e,
                1.5 * (u * terminal.conjugate()).real,
                1.5 * r * abs(terminal) ** 2,
                1.5 * g_iron * abs(emf) ** 2,
                made * omega_e / pole_pairs,
            ]
        )

    return rates


def _full_linkage(drive: Terminals, i_d: float, i_q: float) -> complex:
    psi_d, psi_q = linkages(drive.surface, np.array(i_d), np.array(i_q))
    return complex(float(psi_d), float(psi_q)) + drive.end_inductance * complex(i_d, i_q)


def _torque(drive: Terminals, i_d: float, i_q: float) -> float:
    psi = _full_linkage(drive, i_d, i_q)
    return 1.5 * drive.surface.pole_pairs * (psi.conjugate() * complex(i_d, i_q)).imag


def _conductance(
    iron_loss: IronLoss | None, i_d: float, i_q: float, omega_e: float, psi: complex
) -> float:
    """Of the iron loss beside the emf, in S."""
    emf = omega_e * abs(psi)
    if iron_loss is None or emf == 0.0:
        return 0.0
    return iron_loss(i_d, i_q, omega_e) / (1.5 * emf**2)
