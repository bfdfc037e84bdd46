"""The induction machine of comparison: circuit, cage and leakage against closed forms."""

import dataclasses
import math

import numpy as np
import pytest
from shipped import shipped

from lamwright.geometry.slot_dimensions import Flank, slot_dimensions
from lamwright.geometry.winding import winding_factor, winding_table
from lamwright.postprocess.induction_machine import (
    Cage,
    Circuit,
    cage_harmonic_leakage,
    cage_of,
    circuit_of,
    harmonic_leakage,
    induction_point,
    mouth_carter,
    point_at,
    referred_resistance,
    stator_slot_permeance,
    torque_at_loss,
)

DEMO = "demo_24s4p_arc"
CIRCUIT = Circuit(
    pole_pairs=2,
    stator_resistance=0.8,
    stator_leakage=4e-3,
    rotor_resistance=0.6,
    rotor_leakage=5e-3,
    magnetising_current=np.array([2.0, 4.0, 8.0, 16.0]),
    magnetising_linkage=np.array([0.2, 0.38, 0.55, 0.65]),
)
CAGE = Cage(28, 60e-6, 15e-3, 4e-3, 33e-3, 100.0)
OMEGA = 157.0  # rad/s


@pytest.mark.parametrize("magnetising", [1.5, 4.0, 7.0])
def test_point_fulfils_the_circuit(magnetising: float) -> None:
    """Solved anew from its slip as a network of impedances; and no power is lost. Exact.

    Z = R_s + j w L_ss + (j w L_m || (R_r / s + j w L_rs)); P_in = losses + T w_mech.
    """
    point = point_at(CIRCUIT, 12.0, magnetising, OMEGA)
    omega = 2.0 * OMEGA / (1.0 - point.slip)
    psi = np.interp(magnetising, [0, 2, 4, 8, 16], [0, 0.2, 0.38, 0.55, 0.65])
    x_m = 1j * omega * psi / magnetising
    rotor = complex(0.6 / point.slip, omega * 5e-3)
    z = complex(0.8, omega * 4e-3) + x_m * rotor / (x_m + rotor)
    voltage = 12.0 * z
    assert point.line_voltage == pytest.approx(math.sqrt(1.5) * abs(voltage), rel=1e-9)
    assert point.power_factor == pytest.approx(z.real / abs(z), rel=1e-9)
    assert abs(12.0 * rotor / (x_m + rotor)) == pytest.approx(magnetising, rel=1e-9)
    power = 1.5 * 12.0**2 * z.real
    spent = point.stator_copper_loss + point.rotor_copper_loss + point.torque * OMEGA
    assert spent == pytest.approx(power, rel=1e-9)


def test_best_point_is_the_best_of_all_slips_within_the_supply() -> None:
    """Linear machine: most torque at I_m = I_s / sqrt 2 without rotor leakage (derived).

    T = 3/2 p L_m I_m sqrt(I_s^2 - I_m^2). A lower supply takes flux, more slip, less torque.
    """
    linear = Circuit(2, 0.8, 4e-3, 0.6, 0.0, np.array([20.0]), np.array([2.0]))
    free = induction_point(linear, 12.0, OMEGA, 1e9)
    assert free.torque == pytest.approx(1.5 * 2 * 0.1 * 12.0**2 / 2.0, rel=1e-5)
    assert free.magnetising_current == pytest.approx(12.0 / math.sqrt(2.0), rel=1e-2)
    held = induction_point(linear, 12.0, OMEGA, 0.6 * free.line_voltage)
    assert held.line_voltage <= 0.6 * free.line_voltage
    assert held.torque < free.torque
    assert held.slip > free.slip
    assert induction_point(linear, 12.0, OMEGA, 1.0) is None


def test_referred_resistance_loses_what_bars_and_rings_lose() -> None:
    """Bars of currents cos(2 pi p k / N_r), ring segments by Kirchhoff's law; rel 1e-12.

    The bar's current for a phase current of 1 A is 6 N k_w / N_r (equal fundamental mmf).
    """
    p, length, turns = 2, 0.1, 130.0
    k = np.arange(CAGE.bars)
    bar = 6.0 * turns / CAGE.bars * np.cos(2.0 * math.pi * p * k / CAGE.bars)
    ring = np.cumsum(bar)
    ring -= ring.mean()  # what flows round a ring without a bar is zero by symmetry
    half = math.sin(math.pi * p / CAGE.bars)
    segment = 2.0 * math.pi * CAGE.ring_radius / CAGE.bars / (CAGE.bar_area / (2.0 * half))
    loss = CAGE.resistivity * (
        length / CAGE.bar_area * np.sum(bar**2) + 2.0 * segment * np.sum(ring**2)
    )
    assert 1.5 * referred_resistance(CAGE, p, length, turns) == pytest.approx(loss, rel=1e-12)


@pytest.mark.parametrize(
    ("name", "span", "value"), [(DEMO, 6, 0.0284), ("demo_36s4p_straight", 9, 0.0141)]
)
def test_harmonic_leakage_of_known_windings(name: str, span: int, value: float) -> None:
    """Full pitch: 0.0284 for two slots per pole and phase, 0.0141 for three (closed sums).

    To 2 %: what lies beyond the last order, and the printed digits.
    """
    design = shipped(name).machine.design
    winding = design.winding.model_copy(update={"layers": 1, "coil_span_slots": span})
    table = winding_table(design.model_copy(update={"winding": winding}))
    assert harmonic_leakage(table) == pytest.approx(value, rel=2e-2)


def test_cage_leakage_and_carter_are_their_tables() -> None:
    """(a / sin a)^2 - 1 is a^2/3 for many bars; Carter's short form at s/g = 2.5: 0.8333 g."""
    assert cage_harmonic_leakage(200, 2) == pytest.approx((math.pi / 100) ** 2 / 3.0, rel=1e-3)
    pitch = 2.0 * math.pi * 40e-3 / 28
    expected = pitch / (pitch - 0.4e-3 * 2.5**2 / 7.5)
    assert mouth_carter(CAGE, 40e-3, 0.4e-3) == pytest.approx(expected, rel=1e-12)


def test_slot_permeance_is_the_handbook_value() -> None:
    """Checks B4, with wedge taper: 18 by 6 mm, taper 1, mouth 0.8 deep and 2.5 wide: 1.57013."""
    mm = 1e-3
    size = dataclasses.replace(
        slot_dimensions(shipped(DEMO).machine.design),
        flank=Flank(0.0, 3.0 * mm),
        entry=complex(40.0 * mm, 0.0),
        mouth_height=40.8 * mm,
        opening_half_width=1.25 * mm,
        taper_height=41.8 * mm,
        taper_half_width=3.0 * mm,
        copper_height=41.8 * mm,
        copper_half_width=3.0 * mm,
        bottom_radius=59.8 * mm,
    )
    assert stator_slot_permeance(size) == pytest.approx(1.57013, abs=6e-6)


def test_cage_fills_what_teeth_and_yoke_leave() -> None:
    """Areas add up to the disc; tooth-coil and closed-slot stators have no cage, and say so."""
    design = shipped(DEMO).machine.design
    cage, size = cage_of(design), slot_dimensions(design)
    assert isinstance(cage, Cage)
    assert cage.bars == 20
    outer = 0.5e-3 * design.stator.bore_diameter_mm - 1e-3 * design.rotor.gap_mm - 0.5e-3
    ring = math.pi * (outer**2 - (outer - cage.bar_depth) ** 2)
    teeth = 24 * size.tooth_width * cage.bar_depth
    assert cage.bars * cage.bar_area + teeth == pytest.approx(ring, rel=1e-12)
    nine = design.model_copy(update={"stator": design.stator.model_copy(update={"slots": 18})})
    assert "whole slots per pole and phase" in str(cage_of(nine))
    shaft = design.rotor.model_copy(update={"shaft_diameter_mm": 60.0})
    assert "no room for bars" in str(cage_of(design.model_copy(update={"rotor": shaft})))


def test_circuit_takes_leakage_out_of_the_solved_linkage() -> None:
    """L_m (1 + spread) + slots = psi / i; what was taken out stands in the stator's leakage."""
    design = shipped(DEMO).machine.design
    cage = cage_of(design)
    circuit = circuit_of(design, cage, [1.0, 10.0], [0.1, 0.5])
    l_m = circuit.magnetising_linkage[0] / 1.0
    table = winding_table(design)
    slots = 2.0 * 4e-7 * math.pi * 0.1 * table.turns_per_phase**2
    slots *= stator_slot_permeance(slot_dimensions(design)) / (2 * 2)
    assert l_m * (1.0 + harmonic_leakage(table)) + slots == pytest.approx(0.1, rel=1e-12)
    assert circuit.stator_leakage > slots
    assert circuit.magnetising_current[0] > 1.0
    assert winding_factor(table, 1.0) < 1.0


def test_torque_at_a_loss_is_found_by_its_current() -> None:
    """Linear machine: losses and torque go with the current's square, so T falls with the loss."""
    linear = Circuit(2, 0.8, 4e-3, 0.6, 5e-3, np.array([20.0]), np.array([2.0]))
    limits = (OMEGA, 1e9)
    full = induction_point(linear, 12.0, *limits)
    loss = full.stator_copper_loss + full.rotor_copper_loss
    half = torque_at_loss(linear, 12.0, 0.5 * loss, limits)
    assert half == pytest.approx(0.5 * full.torque, rel=1e-3)
    # A supply of 1 V holds the current, not the loss.
    assert torque_at_loss(linear, 12.0, loss, (OMEGA, 1.0)) < 1e-3 * full.torque
