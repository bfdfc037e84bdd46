r"""The winding: which conductors lie in which slot, its factors, resistance, end leakage.

Distributed three-phase windings with a whole number q of slots per pole and phase, in 60 degree
phase belts; counter-clockwise the belts follow as A -C B -A C -B, so that currents a, b, c in
this order of time turn the field counter-clockwise.

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

Axes of arrays: slots, layers (0 at the slot bottom), 3 phases.
"""

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from .design import MachineDesign
from .errors import Finding, GeometryError

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
    slots, poles, winding = design.stator.slots, design.rotor.poles, design.winding
    if poles % 2 or slots % (3 * poles):
        remedy = f"accepted multiples of {3 * poles} for {poles} poles (poles must be even)"
        fault = "slots per pole and phase are not a whole number"
        return (Finding("winding_slots", "stator.slots", slots, fault, remedy),)
    findings = []
    pitch, span = slots // poles, winding.coil_span_slots
    if winding.layers == 1 and span != pitch:
        fault = "a single-layer winding has full-pitch coils"
        findings.append(
            Finding("winding_span", "winding.coil_span_slots", span, fault, f"accepted {pitch}")
        )
    elif span >= 2 * pitch:
        remedy = f"accepted 1 to {2 * pitch - 1}, full pitch is {pitch}"
        fault = "the coil spans a whole period or more"
        findings.append(Finding("winding_span", "winding.coil_span_slots", span, fault, remedy))
    groups = poles * winding.layers // 2
    if groups % winding.parallel_paths:
        accepted = ", ".join(str(n) for n in range(1, groups + 1) if groups % n == 0)
        fault = f"the {groups} coil groups of a phase cannot be shared out equally"
        findings.append(
            Finding(
                "winding_paths",
                "winding.parallel_paths",
                winding.parallel_paths,
                fault,
                f"accepted {accepted}",
            )
        )
    return tuple(findings)


def winding_table(design: MachineDesign) -> WindingTable:
    """The conductors of every coil side, and where phase A's axis lies.

    A coil goes from slot k (for two layers its layer 1, towards the bore) to slot k + span
    (layer 0). Coils are placed so that axis_a is 0, or half a slot pitch where the sum of q and
    span is odd. Lap and concentric end connections of a single layer give the same table.

    Raises:
        GeometryError: for a winding that cannot be wound, with all findings.
    """
    findings = winding_findings(design)
    if findings:
        raise GeometryError(findings)
    slots, poles, winding = design.stator.slots, design.rotor.poles, design.winding
    q, span = slots // (3 * poles), winding.coil_span_slots
    # Axis of a group whose first coil starts in slot k: (k + (q + span) / 2) slot pitches.
    first = -((q + span) // 2)
    conductors = np.zeros((slots, winding.layers, 3))
    share = winding.turns_per_coil / winding.parallel_paths
    # One coil group per pole and phase; a single layer has room for one per pole pair only.
    for group in range(0, poles, 3 - winding.layers):
        sign = -1.0 if group % 2 else 1.0
        for phase in range(3):
            for k in range(q):
                start = first + 3 * q * group + 2 * q * phase + k
                conductors[start % slots, -1, phase] -= sign * share
                conductors[(start + span) % slots, 0, phase] += sign * share
    conductors.flags.writeable = False
    return WindingTable(
        slots=slots,
        poles=poles,
        layers=winding.layers,
        conductors=conductors,
        axis_a=((q + span) % 2) * math.pi / slots,
        turns_per_phase=0.5 * float(np.abs(conductors[..., 0]).sum()),
    )


def winding_factor(table: WindingTable, order: int) -> float:
    """Magnitude of the winding factor of phase A, from the star of slots.

    Args:
        table: the winding.
        order: of the harmonic relative to the working one (electrical), as 1, 5, 7.

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
    memory; forms differ by book), lambda_w 0.2 to 0.35 for distributed windings.
    """
    winding = design.winding
    n = winding_table(design).turns_per_phase
    l_w = 1e-3 * winding.end_turn_length_mm  # m
    lambda_w = winding.end_permeance_coefficient
    return 2.0 / design.pole_pairs * MU_0 * n**2 * l_w * lambda_w
