"""Pairs of waves: the law of their torque, and that they make the whole of each order."""

import math
from functools import cache

import numpy as np
import pytest
from shipped import shipped, shipped_model

from lamwright.postprocess.gap_waves import GapWaves, field_on_circle, gap_waves
from lamwright.postprocess.torque import (
    TorqueWaveform,
    spectrum,
    torque_waveform,
    waveform_positions,
)
from lamwright.postprocess.torque_pairs import (
    largest_pairs,
    pair_torques,
    torque_at_positions,
    torque_of_waves,
    torque_orders,
)
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.gap_circle import circle_field, circle_reader
from lamwright.solver.steel import MU_0

RADIUS, STACK = 0.04, 0.1  # m


def invented_waves(radius: float = RADIUS) -> GapWaves:
    """Working wave on both sides, winding orders -11 and 13, rotor orders 11 and 13; p = 2.

    Amplitudes on the circle of `radius`: waves born outside grow with r^n, inside with r^-n.
    """
    stator = {(2, 1): 1.0, (22, -1): 0.02 - 0.01j, (26, 1): 0.01j}
    rotor = {(2, 1): 0.7 - 0.3j, (22, 11): 0.015 + 0.02j, (26, 13): 0.01}
    n_time, n_space = 96, 40
    born = np.zeros((2, n_time, n_space), dtype=complex)
    for side, (content, sense) in enumerate(((stator, 1), (rotor, -1))):
        for (n, k), value in content.items():
            born[side, k % n_time, n - 1] = value * (radius / RADIUS) ** (sense * n)
    return GapWaves(2, 24, radius, STACK, 6, born[0], born[1])


@pytest.mark.parametrize("radius", [0.98 * RADIUS, RADIUS, 1.01 * RADIUS])
def test_torque_is_maxwells_stress_on_any_circle(radius: float) -> None:
    """T = L r^2 / mu0 int B_r B_theta d theta by brute force, equal at all radii; exact."""
    radial, tangential = field_on_circle(invented_waves(radius), 256)
    by_stress = 2.0 * math.pi * STACK * radius**2 / MU_0 * np.mean(radial * tangential, axis=1)
    assert torque_at_positions(invented_waves()) == pytest.approx(by_stress, rel=1e-9)


def test_orders_are_the_differences_of_time_orders() -> None:
    """-11 (time 1) with rotor order 11, 13 with 13: both order 12; by hand, and nothing else."""
    waves = invented_waves()
    sampled = np.fft.fft(torque_at_positions(waves)) / 96
    for order in range(0, 48, 6):
        assert torque_of_waves(waves, order) == pytest.approx(sampled[order], abs=1e-9)
    factor = 4.0 * math.pi * STACK / (1j * MU_0)
    lower = -factor * 22**2 * (0.02 - 0.01j) * (0.015 - 0.02j)
    upper = -factor * 26**2 * 0.01j * 0.01
    assert torque_of_waves(waves, 12) == pytest.approx(lower + upper, rel=1e-12)
    assert torque_orders(waves, (6, 18)) == pytest.approx(0.0, abs=1e-12)
    first, second = largest_pairs(waves, 12)
    assert (first.space, first.slow, first.fast) == (11.0, -1.0, 11.0)
    assert (second.space, second.slow, second.fast) == (13.0, 1.0, 13.0)
    assert first.amplitude == pytest.approx(2.0 * abs(lower), rel=1e-12)
    assert first.share + second.share == pytest.approx(1.0, rel=1e-12)
    assert (first.back, first.forth) == pytest.approx((0.0, first.share))


@cache
def demo_waves(scale: float) -> tuple[GapWaves, TorqueWaveform]:
    model, one = shipped_model("demo_24s4p_arc", scale), shipped("demo_24s4p_arc", scale)
    reader = circle_reader(model)
    points = [
        OperatingPoint(0.5 * one.rated, 0.8 * one.rated, x) for x in waveform_positions(2, 12)
    ]
    solved = solve_chain(model, points)
    waves = gap_waves(reader, [circle_field(reader, s) for s in solved], one.section)
    return waves, torque_waveform(solved, 2)


def test_pairs_make_the_whole_of_every_order() -> None:
    """24/4 demo, solved: the sum over all pairs is the Maxwell torque, order by order.

    Against the stress averaged over the gap: 0.1 % of the mean (two circles, checks A8.6, half).
    """
    waves, waveform = demo_waves(1.0)
    found = spectrum(waveform)
    assert found.order == (6, 12, 18, 24)
    for order, amplitude in zip(found.order, found.amplitude, strict=True):
        assert torque_of_waves(waves, order) == pytest.approx(pair_torques(waves, order).sum())
        assert torque_orders(waves, [order])[0] == pytest.approx(
            amplitude, abs=1e-3 * waveform.mean
        )
    assert torque_of_waves(waves, 0).real == pytest.approx(waveform.mean, rel=1e-3)
    pairs = largest_pairs(waves, 12, most=10_000, least_share=0.0)
    assert sum(pair.share for pair in pairs) == pytest.approx(1.0, rel=1e-9)


def test_slot_order_of_the_demo_is_of_the_winding_orders_beside_it() -> None:
    """24/4, n_s = 12: winding orders -11 and 13 (checks B1, B5: the slot orders) make order 12.

    The two largest of all pairs are these orders at time order 1 with what stands on the rotor.
    """
    waves, _ = demo_waves(1.0)
    first = largest_pairs(waves, 12)[:2]
    assert {(pair.space, pair.slow, pair.fast) for pair in first} == {
        (11.0, -1.0, 11.0),
        (13.0, 1.0, 13.0),
    }
