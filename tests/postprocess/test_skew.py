"""Means over the steps of a skewed rotor: theory on made-up fields, and a machine's own fields."""

import math

import numpy as np
import pytest

from lamwright.geometry.skew import skew_factor
from lamwright.postprocess.skew import mean_change, mean_solution, step_point, turned_back
from lamwright.postprocess.torque import spectrum, torque_waveform, waveform_positions
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.estimate_step import Change
from lamwright.solver.integrals import phase_currents
from lamwright.solver.types import FieldSolution, NewtonReport
from tests.shipped import shipped_model

POLE_PAIRS = 2
STEPS = 3
SLOT_PITCH = 2.0 * math.pi / 36.0
OFFSETS = [(k - 1) * SLOT_PITCH / STEPS for k in range(STEPS)]
CURRENT = (5.0, 7.0)


def made_up(point, torque, psi=(0.0, 0.0)):
    empty = np.zeros(0)
    report = NewtonReport(0, (0.0,), 0.0)
    return FieldSolution(
        point.i_d,
        point.i_q,
        point.position,
        empty,
        empty,
        np.zeros(3),
        *psi,
        torque,
        0.0,
        0.0,
        report,
    )


def test_ripple_orders_keep_the_skew_factor():
    """Torque of each step a harmonic of its own position: the mean keeps k_skew of it (B3).

    Orders of 6: 12 and 24 by their factors, 18 is gone, the mean stays; all to rounding.
    """
    orders = {0: 10.0, 12: 1.5, 18: 2.0, 24: 0.7}
    waveform = []
    for position in waveform_positions(POLE_PAIRS).tolist():
        rotor = OperatingPoint(*CURRENT, position)
        points = [step_point(rotor, offset, POLE_PAIRS) for offset in OFFSETS]
        steps = [
            made_up(p, sum(t * math.cos(nu * POLE_PAIRS * p.position) for nu, t in orders.items()))
            for p in points
        ]
        waveform.append(mean_solution(steps, OFFSETS, rotor, POLE_PAIRS))
    found = torque_waveform(waveform, POLE_PAIRS)
    assert found.mean == pytest.approx(10.0, rel=1e-12)
    assert (found.i_d, found.i_q) == CURRENT
    parts = dict(zip(spectrum(found).order, spectrum(found).amplitude, strict=True))
    for order in (12, 18, 24):
        factor = abs(skew_factor(order, STEPS, POLE_PAIRS * SLOT_PITCH))
        assert parts[order] == pytest.approx(factor * orders[order], abs=1e-12)


def test_all_steps_carry_the_same_phase_currents():
    """Turned back in its own dq frame, each step's current is that of the phases; to rounding."""
    rotor = OperatingPoint(*CURRENT, 0.3)
    phases = phase_currents(*CURRENT, POLE_PAIRS * rotor.position)
    for offset in OFFSETS:
        point = step_point(rotor, offset, POLE_PAIRS)
        own = phase_currents(point.i_d, point.i_q, POLE_PAIRS * point.position)
        assert own == pytest.approx(phases, abs=1e-13)


def test_steps_without_offset_change_nothing():
    """A skew of zero: the mean of equal fields is the field, and one step is handed through."""
    rotor = OperatingPoint(*CURRENT, 0.3)
    assert step_point(rotor, 0.0, POLE_PAIRS) == rotor
    field = made_up(rotor, 3.0, (0.4, 0.1))
    assert mean_solution([field], [0.0], rotor, POLE_PAIRS) is field
    same = mean_solution([field] * STEPS, [0.0] * STEPS, rotor, POLE_PAIRS)
    assert (same.psi_d, same.psi_q, same.torque) == pytest.approx((0.4, 0.1, 3.0), rel=1e-15)


def test_linkages_of_an_unsaturated_round_machine_keep_the_factor_of_order_1():
    """psi_step = L i_step with one L: all steps agree. A magnet's linkage keeps k_skew (B3)."""
    rotor = OperatingPoint(*CURRENT, 0.1)
    points = [step_point(rotor, offset, POLE_PAIRS) for offset in OFFSETS]
    round_one = [made_up(p, 0.0, (0.02 * p.i_d, 0.02 * p.i_q)) for p in points]
    whole = mean_solution(round_one, OFFSETS, rotor, POLE_PAIRS)
    assert (whole.psi_d, whole.psi_q) == pytest.approx((0.1, 0.14), rel=1e-12)
    magnet = mean_solution(
        [made_up(p, 0.0, (0.3, 0.0)) for p in points], OFFSETS, rotor, POLE_PAIRS
    )
    factor = skew_factor(1, STEPS, POLE_PAIRS * SLOT_PITCH)
    assert factor == pytest.approx(0.995492, abs=5e-7)
    assert (magnet.psi_d, magnet.psi_q) == pytest.approx((0.3 * factor, 0.0), abs=1e-12)


def test_changes_are_averaged_in_the_rotor_s_frame():
    """As linkages are: changes equal in the rotor's frame stay what they are."""
    steps = [Change(0.5, *turned_back(0.01, -0.02, POLE_PAIRS * offset), 7) for offset in OFFSETS]
    mean = mean_change(steps, OFFSETS, POLE_PAIRS)
    assert (mean.torque, mean.psi_d, mean.psi_q) == pytest.approx((0.5, 0.01, -0.02), rel=1e-12)


def test_phase_linkages_and_power_balance_of_a_machine_s_own_fields():
    """36/4 machine, two steps: dq of the mean phase linkages is the mean in the rotor's frame.

    Linear in both, so to rounding. Torque and linkages balance over 60 degrees: 0.5 %, as without
    skew (test_field), from 10 positions on a coarse mesh.
    """
    model = shipped_model("demo_36s4p_straight", 1.6)
    pole_pairs, offsets = model.sector.pole_pairs, (-0.5 * SLOT_PITCH, 0.5 * SLOT_PITCH)
    positions = np.linspace(0.0, math.pi / 3.0 / pole_pairs, 10, endpoint=False)
    rotor = [OperatingPoint(*CURRENT, float(position)) for position in positions]
    by_step = [
        solve_chain(model, [step_point(p, offset, pole_pairs) for p in rotor]) for offset in offsets
    ]
    whole = [
        mean_solution(steps, offsets, point, pole_pairs)
        for steps, point in zip(zip(*by_step, strict=True), rotor, strict=True)
    ]
    for field in whole:
        a, b, c = field.psi_abc
        vector = 2.0 / 3.0 * (a + b * np.exp(2j * np.pi / 3.0) + c * np.exp(-2j * np.pi / 3.0))
        vector *= np.exp(-1j * pole_pairs * field.position)
        assert (vector.real, vector.imag) == pytest.approx((field.psi_d, field.psi_q), rel=1e-9)
    found = torque_waveform(whole, pole_pairs)
    assert found.mean == pytest.approx(found.mean_linkage, rel=5e-3)
