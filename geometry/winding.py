r"""The winding: which conductors lie in which slot, its factors, resistance, end leakage.

Balanced three-phase windings of like coils, whole or fractional q of slots per pole and phase,
tooth coils included, in 60 degree phase belts of the star of slots (`star_of_slots`); counted in
electrical degrees counter-clockwise the belts follow as A -C B -A C -B, so that currents a, b, c
in this order of time turn the working field counter-clockwise.

Signs (derived). A positive conductor carries a positive phase current along +z, out of the plane.
Ampere's law round a counter-clockwise loop, out through the gap at theta_1 and back at theta_2,
gives H_r(theta_1) g - H_r(theta_2) g = current between them; hence with K the ampere-conductors
per radian and F = g H_r the mmf that drives flux out of the rotor,

    dF / d theta = -K.

So F ~ cos(p (theta - axis_a)) needs K ~ +sin(p (theta - axis_a)): phase A's positive conductors
lie a quarter period counter-clockwise of axis_a, its negative ones as far clockwise. With
B_r = (1/r) dA_z / d theta the potential of that field is A_z ~ +sin(p (theta - axis_a)), positive
where the conductors are positive: psi_a = stack length * sum(conductors * mean A_z) > 0 for
i_a > 0, and B_r > 0 at axis_a: flux leaves the rotor there.
The axes of phases B and C lie 120 and 240 electrical degrees counter-clockwise of axis_a.

Axes of arrays: slots, layers (0 at the slot bottom; of tooth coils in two layers, which lie side
by side, the clockwise half of the slot), 3 phases.
"""

import math
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from .design import MachineDesign
from .errors import Finding, GeometryError
from .star_of_slots import (
    CoilStar,
    coil_star,
    is_balanced,
    most_span,
    nearest_poles,
    nearest_slots,
)

MU_0 = 4e-7 * math.pi  # V s/(A m)
RHO_COPPER = 0.017241e-6  # Ohm m at 20 C, IEC 60028:1925, 1/58
ALPHA_COPPER = 3.93e-3  # 1/K at 20 C, the same

Conductors = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class WindingTable:
    """Signed series conductors of every coil side, divided by the parallel paths.

    Ampere-conductors of the sides are `conductors @ i_abc`; a phase's linkage is the stack length
    times the sum over all sides of `conductors * mean A_z of the side`, without end winding.
    """

    slots: int
    poles: int
    layers: int
    conductors: Conductors  # (slots, layers, 3)
    axis_a: float  # mechanical rad, phase A's magnetic axis in the stator's frame
    turns_per_phase: float  # in series


def winding_findings(design: MachineDesign) -> tuple[Finding, ...]:
    """What keeps the winding of the design from being wound; empty where it can be."""
    pair = _pair_findings(design)
    if pair:
        return pair
    return (*_span_findings(design), *_path_findings(design))


def winding_table(design: MachineDesign) -> WindingTable:
    """The conductors of every coil side, and where phase A's axis lies.

    A coil goes from slot k (for two layers its layer 1, towards the bore, of tooth coils towards
    their tooth) to slot k + span (layer 0). Coils are placed so that axis_a is 0 where it can be
    (half a slot pitch where q is whole and the sum of q and span odd). Lap and concentric end
    connections of a single layer give the same table.

    Raises:
        GeometryError: for a winding that cannot be wound, with all findings.
    """
    findings = winding_findings(design)
    if findings:
        raise GeometryError(findings)
    slots, poles, winding = design.stator.slots, design.rotor.poles, design.winding
    star = _star(design)
    conductors = np.zeros((slots, winding.layers, 3))
    share = winding.turns_per_coil / winding.parallel_paths
    for coil in star.coils:
        end = (coil.start + winding.coil_span_slots) % slots
        conductors[coil.start, -1, coil.phase] -= coil.sign * share
        conductors[end, 0, coil.phase] += coil.sign * share
    conductors.flags.writeable = False
    return WindingTable(
        slots=slots,
        poles=poles,
        layers=winding.layers,
        conductors=conductors,
        axis_a=star.axis_a,
        turns_per_phase=0.5 * float(np.abs(conductors[..., 0]).sum()),
    )


def winding_factor(table: WindingTable, order: float) -> float:
    """Magnitude of the winding factor of phase A, from the star of slots.

    Args:
        table: the winding.
        order: of the harmonic relative to the working one (electrical), as 1, 5, 7; fractional
            windings have others too, every whole number over the pole pairs.

    Returns:
        |sum of the sides' phasors| / sum of their magnitudes, 0 to 1. Source: definition
        (Pyrhonen, Jokinen, Hrabovcova, 2nd ed. 2014, ch. 2, from memory).
    """
    theta = (np.arange(table.slots) + 0.5) * 2.0 * math.pi / table.slots
    phasors = np.exp(0.5j * order * table.poles * theta)
    sides = table.conductors[..., 0]
    return float(abs(phasors @ sides.sum(axis=1)) / np.abs(sides).sum())


def copper_resistivity(temperature_c: float) -> float:
    """Resistivity of annealed copper in Ohm m, linear in temperature from 20 C (IEC 60028)."""
    return RHO_COPPER * (1.0 + ALPHA_COPPER * (temperature_c - 20.0))


def phase_resistance(design: MachineDesign) -> float:
    """DC resistance of one phase in Ohm at the winding's temperature, both end turns included.

    R = rho 2 N (L + l_end) / (a A), N series turns, a parallel paths; source: derived from the
    length of the wire.
    """
    winding = design.winding
    n = winding_table(design).turns_per_phase
    mean_half_turn = 1e-3 * (design.stator.stack_length_mm + winding.end_turn_length_mm)  # m
    copper = winding.parallel_paths * 1e-6 * winding.conductor_area_mm2  # m^2
    return copper_resistivity(winding.temperature_c) * 2.0 * n * mean_half_turn / copper


def end_winding_inductance(design: MachineDesign) -> float:
    """Leakage inductance of the end winding of one phase in H: an estimate, +-30 %.

    L_w = (2/p) mu0 N^2 l_w lambda_w (Pyrhonen, Jokinen, Hrabovcova, 2nd ed. 2014, ch. 4, from
    memory; forms differ by book), lambda_w 0.2 to 0.35 for distributed windings. It takes the
    coils under a pole pair as one bundle. The ends of tooth coils do not overlap: there every one
    of a phase's n_c coils is a bundle of its own, 2/n_c instead of 2/p (derived).
    """
    winding = design.winding
    n = winding_table(design).turns_per_phase
    l_w = 1e-3 * winding.end_turn_length_mm  # m
    lambda_w = winding.end_permeance_coefficient
    coils = design.stator.slots * winding.layers // 6  # of a phase
    bundles = coils if winding.coil_span_slots == 1 else design.pole_pairs
    return 2.0 / bundles * MU_0 * n**2 * l_w * lambda_w


def _star(design: MachineDesign) -> CoilStar:
    winding = design.winding
    return coil_star(
        design.stator.slots, design.rotor.poles, winding.layers, winding.coil_span_slots
    )


def _pair_findings(design: MachineDesign) -> tuple[Finding, ...]:
    """Whether the slots can be shared out to three like phases."""
    slots, poles, layers = design.stator.slots, design.rotor.poles, design.winding.layers
    if poles % 2:
        fault, remedy = "poles come in pairs", f"accepted {poles - 1} or {poles + 1}"
        return (Finding("poles_odd", "rotor.poles", poles, fault, remedy),)
    if is_balanced(slots, poles, layers):
        return ()
    if is_balanced(slots, poles):
        fault = f"a single layer with {poles} poles needs an even number of slots"
    else:
        fault = f"{poles} poles give no three like phases"
    remedy = f"accepted {_either(nearest_slots(slots, poles, layers))}"
    others = nearest_poles(slots, poles, layers)
    if others:
        remedy += f", or {_either(others)} poles"
    return (Finding("winding_slots", "stator.slots", slots, fault, remedy),)


def _span_findings(design: MachineDesign) -> tuple[Finding, ...]:
    slots, poles, winding = design.stator.slots, design.rotor.poles, design.winding
    span, most, pitch = winding.coil_span_slots, most_span(slots, poles), slots / poles
    is_single = winding.layers == 1
    if is_single and slots % (3 * poles) == 0:
        accepted = "" if span == pitch else f"{pitch:g}"
        fault = "a single-layer winding has full-pitch coils"
    elif span > most:
        fault = "the coil spans a whole period or more"
        accepted = f"1 to {most}, full pitch is {pitch:.4g}"
        if is_single:
            accepted = f"odd numbers {accepted}"
    else:
        fault = "a single layer with fractional slots per pole and phase has coils of odd span"
        nearest = (n for n in (span - 1, span + 1) if n <= most)
        accepted = _either(nearest) if is_single and span % 2 == 0 else ""
    if not accepted:
        return ()
    key = "winding.coil_span_slots"
    return (Finding("winding_span", key, span, fault, f"accepted {accepted}"),)


def _path_findings(design: MachineDesign) -> tuple[Finding, ...]:
    paths, groups = design.winding.parallel_paths, _star(design).alike
    if groups % paths == 0:
        return ()
    accepted = ", ".join(str(n) for n in range(1, groups + 1) if groups % n == 0)
    fault = f"the {groups} like coil groups of a phase cannot be shared out equally"
    key = "winding.parallel_paths"
    return (Finding("winding_paths", key, paths, fault, f"accepted {accepted}"),)


def _either(numbers: Iterable[int]) -> str:
    return " or ".join(str(n) for n in numbers)
