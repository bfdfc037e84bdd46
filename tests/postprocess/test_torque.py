"""Torque waveforms: closed forms of synthetic waveforms, and the energy identities."""

import math

import numpy as np
import pytest

from lamwright.postprocess.torque import (
    TorqueWaveform,
    coenergy_difference,
    coenergy_torque,
    interpolant,
    linkage_torque,
    ripple,
    ripple_of_samples,
    spectrum,
    torque_waveform,
    waveform_positions,
)
from lamwright.solver.types import FieldSolution, FloatArray, NewtonReport

POLE_PAIRS = 2
I_D, I_Q = 6.0, 9.0  # A


def waveform(torque: FloatArray, start_el: float = 0.0) -> TorqueWaveform:
    """A waveform with the given torque and no linkages."""
    count = len(torque)
    zero = np.zeros(count)
    angle = start_el + np.arange(count) * math.pi / 3.0 / count
    return TorqueWaveform(POLE_PAIRS, I_D, I_Q, angle, torque, zero, zero, zero)


def machine(position: float) -> FieldSolution:
    """A machine with linear, rotating, 12th-order-modulated inductances: exact in closed form.

    L(theta_e) in dq = [[l_d, m(theta_e)], [m, l_q]], linear, so W' = 1.5 (psi_d i_d + psi_q i_q)
    / 2 and T = 1.5 p (psi_d i_q - psi_q i_d) + p dW'/d theta_e at constant dq currents (derived).
    """
    theta_e = POLE_PAIRS * position
    l_d, l_q, m_12 = 0.06, 0.012, 0.002  # H
    l_dq = m_12 * math.cos(12.0 * theta_e)
    slope = -12.0 * m_12 * math.sin(12.0 * theta_e)  # H per electrical rad
    psi_d, psi_q = l_d * I_D + l_dq * I_Q, l_q * I_Q + l_dq * I_D
    coenergy = 0.75 * (psi_d * I_D + psi_q * I_Q)
    torque = 1.5 * POLE_PAIRS * (psi_d * I_Q - psi_q * I_D + slope * I_D * I_Q)
    none = np.zeros(0)
    return FieldSolution(
        i_d=I_D,
        i_q=I_Q,
        position=position,
        a_rotor=none,
        a_stator=none,
        psi_abc=np.zeros(3),
        psi_d=psi_d,
        psi_q=psi_q,
        torque=torque,
        energy=coenergy,
        coenergy=coenergy,
        newton=NewtonReport(1, (1.0, 0.0), 0.0),
    )


def test_mean_of_maxwell_is_mean_of_linkages():
    """A8.1: equal means over 60 el; at one position they differ. Exact for a linear machine."""
    w = torque_waveform([machine(p) for p in waveform_positions(POLE_PAIRS)], POLE_PAIRS)
    assert w.mean == pytest.approx(w.mean_linkage, rel=1e-12)
    assert w.mean == pytest.approx(1.5 * POLE_PAIRS * (0.06 - 0.012) * I_D * I_Q, rel=1e-12)
    assert np.max(np.abs(w.torque - linkage_torque(w))) > 0.1 * w.mean


@pytest.mark.parametrize("count", [29, 30])
def test_coenergy_torque_holds_at_every_position(count):
    """A8.2 in dq: T = 1.5 p (psi_d i_q - psi_q i_d) + dW'/d theta; order 12 is resolved exactly."""
    w = torque_waveform([machine(p) for p in waveform_positions(POLE_PAIRS, count)], POLE_PAIRS)
    assert coenergy_torque(w) == pytest.approx(w.torque, rel=1e-11)
    assert coenergy_difference(w) < 1e-11


def test_coenergy_difference_sees_a_wrong_torque():
    """A torque 1 % too large at one position must show as 1 % of the mean, roughly its share."""
    solutions = [machine(p) for p in waveform_positions(POLE_PAIRS)]
    w = torque_waveform(solutions, POLE_PAIRS)
    wrong = w.torque.copy()
    wrong[4] += 0.01 * w.mean
    planted = TorqueWaveform(POLE_PAIRS, I_D, I_Q, w.angle_el, wrong, w.psi_d, w.psi_q, w.coenergy)
    assert coenergy_difference(planted) == pytest.approx(0.01, rel=1e-3)


@pytest.mark.parametrize("shift", [0.0, 0.13, 0.5, 0.77])
@pytest.mark.parametrize("order", [6, 12, 24, 60])
def test_ripple_of_one_harmonic_does_not_depend_on_the_first_position(order, shift):
    """A wave mean + a cos(n theta) has ripple 2 a / mean (closed form).

    32 points per position leave at most 1 - cos(pi / 96) = 0.05 % of order 60's crests.
    """
    angle = (np.arange(30) + shift) * math.pi / 3.0 / 30.0
    w = waveform(8.0 + 0.5 * np.cos(order * angle + 0.3), start_el=angle[0])
    assert ripple(w) == pytest.approx(2.0 * 0.5 / 8.0, rel=6e-4)
    assert ripple_of_samples(w) <= ripple(w)


def test_samples_alone_miss_the_crests():
    """At 3 positions per period the samples of a sine span 1.5 of 2 amplitudes at worst (exact)."""
    angle = np.arange(30) * math.pi / 3.0 / 30.0
    w = waveform(8.0 + 0.5 * np.cos(60.0 * angle), start_el=0.0)
    assert ripple_of_samples(w) == pytest.approx(0.5 * 1.5 / 8.0, rel=1e-12)


def test_spectrum_returns_what_was_put_in():
    """Amplitudes and phases of three orders, the highest at the limit of three samples; exact."""
    parts = {6: (0.31, 0.4), 24: (0.87, -1.1), 60: (0.05, 2.0)}
    angle = 0.02 + np.arange(30) * math.pi / 3.0 / 30.0
    torque = 7.0 + sum(a * np.cos(n * angle + ph) for n, (a, ph) in parts.items())
    found = spectrum(waveform(torque, start_el=0.02))
    assert found.order == tuple(range(6, 61, 6))
    for k, order in enumerate(found.order):
        amplitude, phase = parts.get(order, (0.0, 0.0))
        assert found.amplitude[k] == pytest.approx(amplitude, abs=1e-13)
        if amplitude:
            turn = (found.phase[k] - phase) / (2.0 * math.pi)
            assert turn == pytest.approx(round(turn), abs=1e-12)


@pytest.mark.parametrize("count", [9, 10])
def test_interpolant_passes_through_the_samples(count):
    """Any samples, odd or even count: exact at the samples by construction."""
    values = np.random.default_rng(3).normal(size=count)
    assert interpolant(values, 16)[::16] == pytest.approx(values, abs=1e-13)


def test_waveform_refuses_positions_that_are_not_a_period():
    """Half a period would make a wrong mean without a sign of it."""
    positions = waveform_positions(POLE_PAIRS)[:15]
    with pytest.raises(ValueError, match="not equally spaced over 60 electrical degrees"):
        torque_waveform([machine(p) for p in positions], POLE_PAIRS)
