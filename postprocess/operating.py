"""The operating point: current angle of most torque, saliency, terminal voltage, power factor.

dq, amplitude-invariant, peak values: i_d = I cos gamma, i_q = I sin gamma, motoring positive.
Linkages from the field hold no end winding; resistance and end-winding leakage come by formula
(`geometry.winding`), so voltage and power factor are estimates. The winding is taken as
star-connected: the line voltage is sqrt(3) times the phase voltage. Iron loss is left out.

Search for the angle. In a linear machine T = T_45 sin 2 gamma exactly (checks A7). With saturation
psi_d ~ a i_d / (b + i_d), the usual hyperbola, and little psi_q, sin 2 gamma / T is a straight line
in cos gamma. So that is what is interpolated, by the polynomial in cos gamma with the values and
slopes of the two best angles, and sin 2 gamma over it is maximised: a linear machine and a
hyperbola are met from one angle, other saturated ones to some hundredths of a degree from two or
three (tests/postprocess).
"""

import cmath
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.errors import LamwrightError, NotConverged
from lamwright.solver.types import FloatArray, IntArray

DEGREE = math.pi / 180.0
GRID = 0.005 * DEGREE  # of the search for the maximum
MOST_CANCELLED = 6  # slot harmonics that a mean must be free of


@dataclass(frozen=True, slots=True)
class AngleSettings:
    """How the current angle of most torque is searched, rad."""

    # Unsaturated machines end at 45, strongly saturated ones between 55 and 70.
    first: float = 56.0 * DEGREE
    least: float = 5.0 * DEGREE
    most: float = 88.0 * DEGREE
    apart: float = 0.05 * DEGREE  # angles nearer to each other than this count once
    # Of two angles nearer than this only one torque counts beside both slopes: their difference
    # would be that of the fields' errors, of some 1e-5.
    close: float = 1.5 * DEGREE
    reach: float = 8.0 * DEGREE  # how far beyond the tried angles the interpolation is trusted
    # A second prediction that moves less is within 0.03 degree of the maximum of the torque given
    # (saturated machines of tests/postprocess).
    settled: float = 3.0 * DEGREE
    # Of a mean over `search_positions` against one over 30 positions: 0.13, 0.23 and 0.28 degree
    # on the shipped designs; 0.3 costs 2 (0.3 deg)^2 = 5.5e-5 of the torque.
    tolerance: float = 0.3 * DEGREE
    least_angles: int = 2  # 1 where `first` is known to be near
    most_angles: int = 10


@dataclass(frozen=True, slots=True)
class AngleSearch:
    """The best angle and what was tried on the way."""

    gamma: float  # rad
    tried: tuple[float, ...]  # rad
    torques: tuple[float, ...]  # N m, at the tried angles
    slopes: tuple[float, ...]  # N m/rad, at the tried angles


@dataclass(frozen=True, slots=True)
class TurnedLinkage:
    """Linkages, and what they change as the current angle grows at constant current."""

    psi_d: float  # V s
    psi_q: float  # V s
    slope_d: float  # V s/rad, d psi_d / d gamma
    slope_q: float  # V s/rad


@dataclass(frozen=True, slots=True)
class TerminalState:
    """Steady state at the terminals of a star-connected winding; estimates, see the file head."""

    line_voltage: float  # V rms between lines
    power_factor: float  # of the fundamental, 0 to 1 motoring
    input_power: float  # W, shaft power and copper loss, without iron and friction loss
    copper_loss: float  # W, DC resistance


def slot_order(pole_pairs: int, slots: int) -> int:
    """Electrical order of the first slot harmonic of the torque, a multiple of 6.

    The slots meet the rotor's poles alike lcm(slots, poles) times a turn; with q whole slots per
    pole and phase that is 6 q a period. A multiple of 6 for every balanced winding, as slots then
    hold 3 more often than pole pairs do. Source: derived.
    """
    return math.lcm(slots, 2 * pole_pairs) // pole_pairs


def search_positions(pole_pairs: int, slots: int) -> FloatArray:
    """Mechanical positions in rad whose mean is free of the slot ripple, fewest that do it.

    M = n + 1 positions over 60 electrical degrees (3 at least), n = `slot_order` / 6, the number q
    of slots per pole and phase where that is whole: the slot harmonics have orders 6 n k, the mean
    lets through orders 6 M k, and n and M have no common divisor, so the first slot harmonic that
    gets through is the Mth. Where n is over 6, fewer do: the 7th or 8th is small enough. Source:
    derived.
    """
    n = slot_order(pole_pairs, slots) // 6
    count = max(3, n + 1) if n <= MOST_CANCELLED else 7 if n % 7 else 8
    return np.linspace(0.0, math.pi / 3.0 / pole_pairs, count, endpoint=False)


def dq_currents(amplitude: float, gamma: float) -> tuple[float, float]:
    """i_d and i_q in A of a peak phase current at the current angle gamma in rad."""
    return amplitude * math.cos(gamma), amplitude * math.sin(gamma)


def mean_linkage_torque(
    pole_pairs: int, i_d: float, i_q: float, psi_d: Sequence[float], psi_q: Sequence[float]
) -> float:
    """Mean torque in N m from the linkages in V s at several positions."""
    # T = 3/2 p (psi_d i_q - psi_q i_d), derived: power balance
    return 1.5 * pole_pairs * (float(np.mean(psi_d)) * i_q - float(np.mean(psi_q)) * i_d)


def mean_linkage_slope(
    pole_pairs: int, amplitude: float, gamma: float, mean: TurnedLinkage
) -> tuple[float, float]:
    """Mean torque in N m and its slope to the current angle in N m/rad, at constant current.

    Args:
        pole_pairs: of the machine.
        amplitude: peak phase current in A.
        gamma: current angle in rad.
        mean: linkages and their slopes to the angle, means over positions.
    """
    i_d, i_q = dq_currents(amplitude, gamma)
    torque = mean_linkage_torque(pole_pairs, i_d, i_q, [mean.psi_d], [mean.psi_q])
    # d i_d/d gamma = -i_q, d i_q/d gamma = i_d; derived
    change = mean.slope_d * i_q - mean.slope_q * i_d + mean.psi_d * i_d + mean.psi_q * i_q
    return torque, 1.5 * pole_pairs * change


# Angles tried in rad, torques and slopes there, settings -> angle of most torque.
Predict = Callable[[Sequence[float], Sequence[tuple[float, float]], AngleSettings], float]


def best_angle(
    torque_of: Callable[[float], tuple[float, float]],
    settings: AngleSettings | None = None,
    predict: Predict | None = None,
) -> AngleSearch:
    """The current angle of most torque at constant current.

    Args:
        torque_of: current angle in rad -> mean torque in N m and its slope in N m/rad.
        settings: first angle, bounds and tolerance.
        predict: another prediction than that of the file's head.

    Raises:
        NotConverged: the prediction still moves after `most_angles` angles, or rests at a bound.
        LamwrightError: no motoring torque: the rotor has no saliency along its d axis.
    """
    use, forecast = settings or AngleSettings(), predict or _predicted
    tried: list[float] = []
    values: list[tuple[float, float]] = []
    predicted = use.first
    while len(tried) < use.most_angles:
        tried.append(predicted)
        values.append(torque_of(predicted))
        torque = values[-1][0]
        if torque <= 0.0:
            tell = f"torque {torque:.3g} N m at {predicted / DEGREE:.0f} el deg"
            raise LamwrightError(f"the rotor has no saliency along its d axis: {tell}")
        predicted = forecast(tried, values, use)
        if len(tried) >= use.least_angles and abs(predicted - tried[-1]) < use.settled:
            if use.least + use.tolerance < predicted < use.most - use.tolerance:
                torques, slopes = zip(*values, strict=True)
                return AngleSearch(predicted, tuple(tried), torques, slopes)
            break
    text = f"no current angle of most torque found after {len(tried)} angles"
    raise NotConverged(text, tuple(torque for torque, _ in values))


def chosen_angles(
    tried: Sequence[float], values: Sequence[tuple[float, float]], use: AngleSettings
) -> list[int]:
    """Numbers of the one or two best angles tried."""
    best = sorted(range(len(tried)), key=lambda k: -values[k][0])
    # Of two angles side by side the curvature between them would be their rounding's.
    others = [k for k in best if abs(tried[k] - tried[best[0]]) > use.apart]
    return [best[0], *others[:1]]


def _predicted(
    tried: Sequence[float], values: Sequence[tuple[float, float]], use: AngleSettings
) -> float:
    """Maximum of the interpolated torque through the one or two best angles."""
    chosen = chosen_angles(tried, values, use)
    gamma = np.array([tried[k] for k in chosen])
    torque, slope = np.array([values[k] for k in chosen]).T
    law = _inverse_law(gamma, torque, slope, kept_conditions(gamma, use))
    low, high = uphill(tried, values, chosen, use)
    grid = np.arange(low, high, GRID)
    inverse_at = law(np.cos(grid))
    grid, inverse_at = grid[inverse_at > 0.0], inverse_at[inverse_at > 0.0]
    return float(grid[np.argmax(np.sin(2.0 * grid) / inverse_at)])


def uphill(
    tried: Sequence[float],
    values: Sequence[tuple[float, float]],
    chosen: Sequence[int],
    use: AngleSettings,
    reaches: float = 1.0,
) -> tuple[float, float]:
    """Where the maximum may lie: on the side of each angle on which its torque grows.

    Args:
        tried: angles in rad.
        values: torques and slopes there.
        chosen: numbers of those that are interpolated.
        use: bounds, and how far beyond the chosen ones.
        reaches: so many times as far.
    """
    gamma = [tried[k] for k in chosen]
    low = max(use.least, min(gamma) - reaches * use.reach)
    high = min(use.most, max(gamma) + reaches * use.reach)
    rising = [g for g, (_, slope) in zip(tried, values, strict=True) if slope > 0.0]
    falling = [g for g, (_, slope) in zip(tried, values, strict=True) if slope <= 0.0]
    if rising and falling and max(rising) > min(falling):
        return low, high  # a minimum between them
    low, high = max([low, *rising]), min([high, *falling])
    return low, max(high, low + GRID)


def kept_conditions(gamma: FloatArray, use: AngleSettings) -> IntArray:
    """Numbers of the conditions that count, of the torques and then the slopes at the angles.

    With 56.0 and 56.2 degrees about the maximum all four predicted 48 degrees, and 4.7 % of the
    torque were lost.
    """
    count = gamma.size
    is_close = count == 2 and abs(float(gamma[1] - gamma[0])) < use.close
    return np.array([0, 2, 3]) if is_close else np.arange(2 * count)


def _inverse_law(
    gamma: FloatArray, torque: FloatArray, slope: FloatArray, kept: IntArray
) -> np.polynomial.Polynomial:
    """Polynomial in cos gamma with the values and slopes of sin 2 gamma / T that are `kept`."""
    x, middle = np.cos(gamma), float(np.mean(np.cos(gamma)))
    double = np.sin(2.0 * gamma)
    value = double / torque
    change = (2.0 * np.cos(2.0 * gamma) - double * slope / torque) / torque  # d/d gamma
    power = np.arange(kept.size)
    at = (x - middle)[:, None]
    rows = [at**power, power * at ** np.maximum(power - 1, 0)]
    right = np.concatenate([value, change / -np.sin(gamma)])
    coefficients = np.linalg.solve(np.concatenate(rows)[kept], right[kept])
    # The domain moves the origin to the middle; its half-width of 1 scales nothing.
    return np.polynomial.Polynomial(coefficients, domain=[middle - 1.0, middle + 1.0])


def saliency_ratio(i_d: float, i_q: float, psi_d: float, psi_q: float) -> float:
    """Apparent saliency psi_d i_q / (psi_q i_d) at the currents and linkages given."""
    return psi_d * i_q / (psi_q * i_d)


def copper_loss(amplitude: float, resistance: float) -> float:
    """Copper loss in W of three phases at a peak phase current in A, DC resistance in Ohm."""
    return 1.5 * resistance * amplitude**2


def terminal_state(
    *,
    i_d: float,
    i_q: float,
    psi_d: float,
    psi_q: float,
    omega_e: float,
    resistance: float,
    end_inductance: float,
) -> TerminalState:
    """Steady state at the terminals.

    Args:
        i_d: A, peak; i_q likewise.
        i_q: see i_d.
        psi_d: V s, without end winding; psi_q likewise.
        psi_q: see psi_d.
        omega_e: electrical angular frequency in rad/s, not 0.
        resistance: of a phase in Ohm.
        end_inductance: end-winding leakage of a phase in H.

    Returns:
        Voltage, power factor and powers. Source: derived, u = R i + j omega_e psi in dq.
    """
    current = complex(i_d, i_q)
    psi = complex(psi_d, psi_q) + end_inductance * current
    voltage = resistance * current + 1j * omega_e * psi  # V, peak of the phase voltage
    power = 1.5 * (voltage * current.conjugate()).real  # W
    return TerminalState(
        line_voltage=math.sqrt(1.5) * abs(voltage),  # sqrt(3) for the line, 1/sqrt(2) for rms
        power_factor=math.cos(cmath.phase(voltage / current)),
        input_power=power,
        copper_loss=copper_loss(abs(current), resistance),
    )
