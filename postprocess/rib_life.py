"""How many starts a rib lasts: cycles from rest to speed and back, by local stress.

The stress of a place in a cycle goes from 0 to s, elastic from the field; its sign is that of the
mean of the two principal stresses. Above yield Neuber's rule gives the real local stress,

    sigma eps = s^2 / E,  eps = sigma/E + (sigma/K')^(1/n')        (Ramberg & Osgood)

and back to rest the same with the curve doubled (Masing): dsigma deps = ds^2 / E, deps =
dsigma/E + 2 (dsigma/2K')^(1/n'). Without K', n' the steel flows at its yield strength. The
amplitude is sigma_a = E deps/2, the mean stress sigma_m that of the loop, below 0 counted as 0:
pressure helps, and is not relied on. Mean stress counts by the card's choice,

    Goodman sigma_a / (1 - sigma_m/R_m),  Smith, Watson & Topper sqrt(sigma_max sigma_a),
    Morrow sigma_a / (1 - sigma_m/sigma_f'),

which over the factors of cut edge, surface and size is sigma_f' (2 N)^b (Basquin). Beyond yield the
plastic term of a strain-life line is left out: the life comes out too short. Ramberg and Osgood's
curve has flowed before yield, so that the mean stress drops there (demo card: 380 to 326 MPa); no
place beyond yield is taken for better than one at yield. Scatter: log10 N is
normal with the card's standard deviation; 2.3 and 97.7 % are two of it. Starts to different speeds
add by Miner's rule. Residual stress of an overspeed test is not counted.
Sources: in DEVELOPERS, from memory.
Axes: n_zone zones: the ribs, then the rest of the iron.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from lamwright.geometry.design import SteelCard
from lamwright.geometry.design_fatigue import FatigueData
from lamwright.geometry.section import CrossSection
from lamwright.solver.rib_zones import zone_of_node
from lamwright.solver.types import FloatArray, StressSolution

from .quantities import scaled_by_key, shown_as

MPA = 1e6  # Pa per MPa
LONGEST = 600.0  # natural logarithm of a life that counts as endless: numbers end at 709
DEVIATIONS = 2.0  # from the median to 2.3 and to 97.7 %


@dataclass(frozen=True, slots=True)
class CyclicCurve:
    """Elastic-plastic strain of a settled cycle; flat at `strength` where `exponent` is 0."""

    youngs_modulus: float  # Pa
    strength: float  # Pa, K'; the yield strength where it is flat
    exponent: float  # n'


@dataclass(frozen=True, slots=True)
class LocalCycle:
    """A settled loop from rest to speed and back."""

    maximum: float  # Pa
    strain: float  # at the maximum
    amplitude: float  # Pa, E times half the range of strain
    swing: float  # Pa, half the range of real stress; the amplitude where nothing flows back
    mean: float  # Pa, with its sign


def neuber(pseudo: float, curve: CyclicCurve, branch: float = 1.0) -> tuple[float, float]:
    """Real stress in Pa and strain where the elastic one would be `pseudo` in Pa, above 0.

    Args:
        pseudo: elastic local stress, or its range where `branch` is 2.
        curve: of the steel.
        branch: 1 from the virgin state, 2 for the way back (Masing).
    """
    product = pseudo**2 / curve.youngs_modulus
    if curve.exponent == 0.0:
        stress = min(pseudo, branch * curve.strength)
        return stress, product / stress
    from scipy.optimize import brentq

    def excess(stress: float) -> float:
        return stress * _strain(stress, curve, branch) / product - 1.0

    stress = float(brentq(excess, 1e-9 * pseudo, pseudo, xtol=1e-12 * pseudo, rtol=1e-14))
    return stress, _strain(stress, curve, branch)


def _strain(stress: float, curve: CyclicCurve, branch: float) -> float:
    plastic: float = branch * (stress / (branch * curve.strength)) ** (1.0 / curve.exponent)
    return stress / curve.youngs_modulus + plastic


def local_cycle(pseudo: float, yield_strength: float, curve: CyclicCurve) -> LocalCycle:
    """The loop of a place whose elastic stress goes from 0 to `pseudo` in Pa and back."""
    young, size = curve.youngs_modulus, abs(pseudo)
    if size <= yield_strength:
        return LocalCycle(pseudo, pseudo / young, 0.5 * size, 0.5 * size, 0.5 * pseudo)
    top, strain = neuber(size, curve)
    fall, width = neuber(size, curve, branch=2.0)
    sign = math.copysign(1.0, pseudo)
    swing = 0.5 * fall
    return LocalCycle(sign * top, sign * strain, 0.5 * young * width, swing, sign * (top - swing))


def reversed_amplitude(cycle: LocalCycle, data: FatigueData, tensile_strength: float) -> float:
    """Amplitude in Pa that without mean stress does the same, before the factors; may be infinite.

    Args:
        cycle: of the place.
        data: the card's.
        tensile_strength: Pa.
    """
    mean = max(cycle.mean, 0.0)
    if data.method == "smith-watson-topper":
        return math.sqrt((mean + cycle.swing) * cycle.amplitude)
    limit = tensile_strength if data.method == "goodman" else MPA * data.strength_coefficient_mpa
    return cycle.amplitude / (1.0 - mean / limit) if mean < limit else math.inf


def median_life(amplitude: float, data: FatigueData) -> float:
    """Cycles that half of the places with this reversed amplitude in Pa bear (Basquin)."""
    if amplitude == 0.0:
        return math.inf
    lowered = data.cut_edge_factor * data.surface_factor * data.size_factor
    ratio = amplitude / (lowered * MPA * data.strength_coefficient_mpa)
    if ratio == math.inf:
        return 0.0
    exponent = math.log(ratio) / data.strength_exponent
    return 0.5 * math.exp(exponent) if exponent < LONGEST else math.inf


@dataclass(frozen=True, slots=True, kw_only=True)
class RibLife:
    """Starts that one rib lasts."""

    maximum: float = field(
        metadata=shown_as("start_stop_stress_mpa", "local stress at maximum speed", "MPa", 1e-6)
    )
    amplitude: float = field(
        metadata=shown_as("life_amplitude_mpa", "amplitude without mean stress", "MPa", 1e-6)
    )
    median: float = field(metadata=shown_as("life_50_percent_cycles", "starts, half cracked", ""))
    low: float = field(metadata=shown_as("life_2_3_percent_cycles", "starts, 2.3 % cracked", ""))
    high: float = field(metadata=shown_as("life_97_7_percent_cycles", "starts, 97.7 % cracked", ""))


def zone_stress(section: CrossSection, solution: StressSolution) -> FloatArray:
    """Most tension and most pressure (n_zone, 2) in Pa, von Mises with its sign, of each zone."""
    zone = zone_of_node(section, solution.mesh)
    sign = np.where(solution.stress[:, 0] + solution.stress[:, 1] < 0.0, -1.0, 1.0)
    signed = sign * solution.von_mises
    zones = [signed[zone == k] for k in range(int(zone.max()) + 1)]
    return np.array([[max(z.max(), 0.0), min(z.min(), 0.0)] for z in zones])


def cyclic_curve(card: SteelCard, data: FatigueData) -> CyclicCurve:
    """The card's cyclic curve; flat at its yield strength without one."""
    young = 1e9 * card.youngs_modulus_gpa.value
    if data.cyclic_strength_mpa is None or data.cyclic_exponent is None:
        return CyclicCurve(young, MPA * card.yield_strength_mpa.value, 0.0)
    return CyclicCurve(young, MPA * data.cyclic_strength_mpa, data.cyclic_exponent)


def zone_lives(
    stress: FloatArray,
    card: SteelCard,
    data: FatigueData,
    speeds: Sequence[tuple[float, float]],
) -> tuple[RibLife, ...]:
    """The life of each zone.

    Args:
        stress: (n_zone, 2), from `zone_stress`.
        card: the steel.
        data: its fatigue data.
        speeds: squares of speeds over that of `stress`, each with its share of the starts; the
            first is that which local stress and amplitude are told of.
    """
    curve = cyclic_curve(card, data)
    return tuple(_life(pair.tolist(), card, data, curve, speeds) for pair in stress)


def life_errors(life: RibLife, share: float, data: FatigueData) -> dict[str, float]:
    """Errors of a rib's life by key, in the figures' units.

    Args:
        life: of the rib.
        share: relative error of its elastic peak.
        data: the card's.
    """
    steep = share / abs(data.strength_exponent)
    return scaled_by_key(
        life,
        {
            "maximum": share * abs(life.maximum),
            "amplitude": share * life.amplitude,
            "median": steep * life.median,
            "low": steep * life.low,
            "high": steep * life.high,
        },
    )


def _life(
    pair: Sequence[float],
    card: SteelCard,
    data: FatigueData,
    curve: CyclicCurve,
    speeds: Sequence[tuple[float, float]],
) -> RibLife:
    flow, tensile = MPA * card.yield_strength_mpa.value, MPA * card.tensile_strength_mpa.value

    def told(pseudo: float) -> tuple[float, LocalCycle]:
        cycle = local_cycle(pseudo, flow, curve)
        amplitude = reversed_amplitude(cycle, data, tensile)
        if abs(pseudo) > flow:
            at_yield = local_cycle(math.copysign(flow, pseudo), flow, curve)
            amplitude = max(amplitude, reversed_amplitude(at_yield, data, tensile))
        return amplitude, cycle

    def worst(factor: float) -> tuple[float, LocalCycle]:
        return max((told(factor * value) for value in pair), key=lambda one: one[0])

    damage = sum(share / median_life(worst(f)[0], data) for f, share in speeds if share > 0.0)
    median = 1.0 / damage if damage > 0.0 else math.inf
    amplitude, cycle = worst(speeds[0][0])
    spread = 10.0 ** (DEVIATIONS * data.scatter_log10_life)
    return RibLife(
        maximum=cycle.maximum,
        amplitude=amplitude,
        median=median,
        low=median / spread,
        high=median * spread,
    )
