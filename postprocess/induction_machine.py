"""The induction machine in the same frame, an estimate: a squirrel cage by its equivalent circuit.

Method: T circuit of one phase with a saturable magnetising inductance; slot, harmonic and end
leakage and the cage's resistance by handbook formulas (Pyrhonen, Jokinen, Hrabovcova, 2nd ed.
2014, ch. 4, 5 and 7, from memory). With peak currents and slip frequency w_r = s w:

    (R_r + j w_r L_rs) I_r = j w_r L_m I_m      I_s = I_m + I_r      T = 3/2 p R_r |I_r|^2 / w_r

so that at a given |I_s| and |I_m| the slip frequency follows in closed form (derived):

    w_r^2 = R_r^2 (g^2 - 1) / (L_r^2 - g^2 L_rs^2),   g = |I_s| / |I_m|,   L_r = L_m + L_rs

The cage is what common practice would cut into the same disc: teeth that together are as wide as
the stator's and a yoke as deep, so that both carry the stator's flux densities; slots take the
rest. Its assumptions are `ASSUMPTIONS`; nothing is claimed beyond them.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.rotor_frame import rotor_frame
from lamwright.geometry.slot_dimensions import SlotDimensions, slot_dimensions
from lamwright.geometry.winding import (
    MU_0,
    WindingTable,
    end_winding_inductance,
    phase_resistance,
    winding_factor,
    winding_table,
)
from lamwright.solver.types import FloatArray

MM = 1e-3  # m
# Die-cast aluminium: common practice, no source.
RHO_ALUMINIUM, ALPHA_ALUMINIUM = 1.0 / 32e6, 4.0e-3  # Ohm m at 20 C, 1/K
BARS_PER_SLOT = 0.8  # of the stator; the nearest even number is taken
MOUTH_WIDTH, MOUTH_DEPTH = 1.0 * MM, 0.5 * MM  # of the rotor's slots
LEAST_BAR = 2.0 * MM  # depth of a bar, and width of a slot at its bottom over its mouth's
SHARES = np.linspace(0.05, 0.99, 941)  # of the stator current, tried as magnetising current
HALVINGS = 14  # of the current: 6e-5 of it
MOST_ORDER = 600  # of the harmonic leakage: beyond it lies less than 1 % of it

ASSUMPTIONS = (
    "squirrel cage of die-cast aluminium, 32 MS/m at 20 C, at the winding's temperature",
    "an even number of bars near 0.8 of the stator's slots, in slots with mouths of 1 by 0.5 mm",
    "rotor teeth together as wide as the stator's and a yoke as deep: bars fill what is left",
    "end rings at the bars' current density, of the bars' mean radius",
    "magnetising inductance from fields of a round solid rotor in the same stator, less leakage by"
    " formula; rotor slots count by Carter's factor, their teeth's own saturation does not, which"
    " is in its favour",
    "no skew, no skin effect, no iron and stray loss; ring leakage left out",
    "fed by a converter at rated speed: the slip of most torque at rated current within the supply"
    " voltage",
)


@dataclass(frozen=True, slots=True)
class Cage:
    """A squirrel cage; lengths in m."""

    bars: int
    bar_area: float  # m^2, of one
    bar_depth: float
    slot_width: float  # mean
    ring_radius: float  # mean
    temperature_c: float

    @property
    def resistivity(self) -> float:
        """Of bars and rings in Ohm m."""
        return RHO_ALUMINIUM * (1.0 + ALPHA_ALUMINIUM * (self.temperature_c - 20.0))


@dataclass(frozen=True, slots=True, eq=False)
class Circuit:
    """One phase of the machine, the rotor referred to the stator."""

    pole_pairs: int
    stator_resistance: float  # Ohm
    stator_leakage: float  # H, slots, harmonics and end winding
    rotor_resistance: float
    rotor_leakage: float
    magnetising_current: FloatArray  # (n,) A peak, rising from above 0
    magnetising_linkage: FloatArray  # (n,) V s peak


@dataclass(frozen=True, slots=True)
class InductionPoint:
    """Steady state at one stator current; all estimates."""

    torque: float  # N m, of the gap
    slip: float
    magnetising_current: float  # A peak
    line_voltage: float  # V rms
    power_factor: float
    stator_copper_loss: float  # W
    rotor_copper_loss: float  # W


def cage_of(design: MachineDesign) -> Cage | str:
    """The cage that the design's rotor disc would hold, or why there is none."""
    slots, pole_pairs = design.stator.slots, design.pole_pairs
    if slots % (6 * pole_pairs):
        return "its stator is not wound with whole slots per pole and phase"
    if design.stator.slot_mouth == "closed":
        return "its stator slots are closed, for which the leakage formula has no value"
    frame, size = rotor_frame(design), slot_dimensions(design)
    teeth = slots * size.tooth_width  # all together
    bars = 2 * round(0.5 * BARS_PER_SLOT * slots)
    # Below this radius slots would be narrower than twice their mouth.
    narrowest = (teeth + bars * 2.0 * MOUTH_WIDTH) / (2.0 * math.pi)
    deepest = frame.rotor_radius - max(frame.shaft_radius + size.yoke_depth, narrowest)
    depth = deepest - MOUTH_DEPTH
    if depth < LEAST_BAR:
        return "teeth and yoke as of the stator leave no room for bars"
    outer = frame.rotor_radius - MOUTH_DEPTH
    inner = outer - depth
    area = math.pi * (outer**2 - inner**2) - teeth * depth
    return Cage(
        bars=bars,
        bar_area=area / bars,
        bar_depth=depth,
        slot_width=area / (bars * depth),
        ring_radius=0.5 * (outer + inner),
        temperature_c=design.winding.temperature_c,
    )


def referred_resistance(
    cage: Cage, pole_pairs: int, stack_length: float, effective_turns: float
) -> float:
    """Resistance of bars and both rings in Ohm, referred to a stator phase.

    12 (N k_w)^2 / N_r (R_bar + R_segment / (2 sin^2(pi p / N_r))): derived from equal mmf and equal
    loss; a ring's current is a bar's over 2 sin(pi p / N_r), and so is its area.

    Args:
        cage: bars and rings.
        pole_pairs: of the machine.
        stack_length: in m.
        effective_turns: N k_w of a stator phase.
    """
    half = math.sin(math.pi * pole_pairs / cage.bars)
    ring_area = cage.bar_area / (2.0 * half)
    bar = cage.resistivity * stack_length / cage.bar_area
    segment = cage.resistivity * 2.0 * math.pi * cage.ring_radius / (cage.bars * ring_area)
    return referral(cage.bars, effective_turns) * (bar + segment / (2.0 * half**2))


def referral(bars: int, effective_turns: float) -> float:
    """A phase's impedance over a bar's."""
    return 12.0 * effective_turns**2 / bars


def stator_slot_permeance(size: SlotDimensions) -> float:
    """Leakage permeance coefficient of a slot full of one phase (checks B4): wedge and mouth in it.

    h/(3b) + h_w/b_w + h_t ln(b_t/b_0)/(b_t - b_0) + h_0/b_0, widths that vary by their mean.
    """
    bore = abs(size.entry)
    bottom = 2.0 * size.flank.half_width(size.bottom_radius)
    top, tip = 2.0 * size.copper_half_width, 2.0 * size.taper_half_width
    mouth = 2.0 * size.opening_half_width
    found = (size.bottom_radius - size.copper_height) / (1.5 * (bottom + top))
    found += (size.copper_height - size.taper_height) / (0.5 * (top + tip))
    found += (size.mouth_height - bore) / mouth if size.mouth_height > bore else 0.0
    if size.taper_height > size.mouth_height and tip > mouth:
        found += (size.taper_height - size.mouth_height) * math.log(tip / mouth) / (tip - mouth)
    return found


def harmonic_leakage(table: WindingTable) -> float:
    """Harmonic leakage over magnetising inductance: sum of (k_nu / (nu k_1))^2, whole q.

    Full pitch: pi^2/9 - 1 = 0.0966 for one slot per pole and phase, 0.0284 for two.
    """
    first = winding_factor(table, 1.0)
    orders = [nu for nu in range(5, MOST_ORDER, 2) if nu % 3]
    return sum((winding_factor(table, nu) / (nu * first)) ** 2 for nu in orders)


def cage_harmonic_leakage(bars: int, pole_pairs: int) -> float:
    """Harmonic leakage of a cage over magnetising inductance, 1/eta^2 - 1."""
    angle = math.pi * pole_pairs / bars
    return (angle / math.sin(angle)) ** 2 - 1.0


def mouth_carter(cage: Cage, rotor_radius: float, gap: float) -> float:
    """Carter's factor of the rotor's slots, by its usual short form (checks A4)."""
    ratio = MOUTH_WIDTH / gap
    pitch = 2.0 * math.pi * rotor_radius / cage.bars
    return pitch / (pitch - gap * ratio**2 / (5.0 + ratio))


def circuit_of(
    design: MachineDesign, cage: Cage, current: Sequence[float], linkage: Sequence[float]
) -> Circuit:
    """The equivalent circuit.

    Args:
        design: stator, winding and gap.
        cage: in the rotor.
        current: (n,) A peak, rising from above 0, in the stator round a solid rotor.
        linkage: (n,) V s peak of a phase there, without end winding, means over positions.
    """
    table, p, frame = winding_table(design), design.pole_pairs, rotor_frame(design)
    turns, length = table.turns_per_phase, MM * design.stator.stack_length_mm
    effective = turns * winding_factor(table, 1.0)
    q = design.stator.slots / (6 * p)
    slots = (
        2.0 * MU_0 * length * turns**2 * stator_slot_permeance(slot_dimensions(design)) / (p * q)
    )
    spread = harmonic_leakage(table)
    i_s, psi = np.asarray(current), np.asarray(linkage)
    psi_m = (psi - slots * i_s) / (1.0 + spread)
    unsaturated = float(psi_m[0] / i_s[0])
    bar = cage.bar_depth / (3.0 * cage.slot_width) + MOUTH_DEPTH / MOUTH_WIDTH
    return Circuit(
        pole_pairs=p,
        stator_resistance=phase_resistance(design),
        stator_leakage=slots + spread * unsaturated + end_winding_inductance(design),
        rotor_resistance=referred_resistance(cage, p, length, effective),
        rotor_leakage=referral(cage.bars, effective) * MU_0 * length * bar
        + cage_harmonic_leakage(cage.bars, p) * unsaturated,
        # The rotor's mouths ask for more current at the same flux.
        magnetising_current=i_s * mouth_carter(cage, frame.rotor_radius, MM * design.rotor.gap_mm),
        magnetising_linkage=psi_m,
    )


def induction_point(
    circuit: Circuit, current: float, omega_mech: float, most_voltage: float
) -> InductionPoint | None:
    """The slip of most torque at a peak stator current, None where the supply allows none.

    Args:
        circuit: of the machine.
        current: A peak.
        omega_mech: rad/s, of the shaft.
        most_voltage: V rms between lines.
    """
    found = [
        point
        for share in SHARES
        if (point := point_at(circuit, current, float(share) * current, omega_mech)) is not None
        and point.line_voltage <= most_voltage
    ]
    return max(found, key=lambda point: point.torque, default=None)


def torque_at_loss(
    circuit: Circuit, most: float, loss: float, limits: tuple[float, float]
) -> float:
    """Torque in N m where stator and cage together lose what is given, less if the supply is short.

    Args:
        circuit: of the machine.
        most: A peak, at which it loses more.
        loss: W.
        limits: shaft's rad/s, and V rms between lines.
    """
    low, high, torque = 0.0, most, 0.0
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        point = induction_point(circuit, middle, *limits)
        if point is not None and point.stator_copper_loss + point.rotor_copper_loss <= loss:
            low, torque = middle, point.torque
        else:
            high = middle
    return torque


def point_at(
    circuit: Circuit, current: float, magnetising: float, omega_mech: float
) -> InductionPoint | None:
    """Steady state with a magnetising current (A peak) at a stator current; None if it has none."""
    known = np.append(0.0, circuit.magnetising_current)
    psi_m = float(np.interp(magnetising, known, np.append(0.0, circuit.magnetising_linkage)))
    l_m, g = psi_m / magnetising, current / magnetising
    l_r = l_m + circuit.rotor_leakage
    room = l_r**2 - (g * circuit.rotor_leakage) ** 2
    if room <= 0.0 or magnetising > known[-1]:
        return None
    omega_r = circuit.rotor_resistance * math.sqrt((g**2 - 1.0) / room)
    rotor = 1j * omega_r * l_m * magnetising
    rotor /= complex(circuit.rotor_resistance, omega_r * circuit.rotor_leakage)
    stator = magnetising + rotor
    omega = circuit.pole_pairs * omega_mech + omega_r
    voltage = circuit.stator_resistance * stator
    voltage += 1j * omega * (circuit.stator_leakage * stator + psi_m)
    rotor_loss = 1.5 * circuit.rotor_resistance * abs(rotor) ** 2
    return InductionPoint(
        torque=circuit.pole_pairs * rotor_loss / omega_r,
        slip=omega_r / omega,
        magnetising_current=magnetising,
        line_voltage=math.sqrt(1.5) * abs(voltage),
        power_factor=(voltage * stator.conjugate()).real / (abs(voltage) * abs(stator)),
        stator_copper_loss=1.5 * circuit.stator_resistance * current**2,
        rotor_copper_loss=rotor_loss,
    )
