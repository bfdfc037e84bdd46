"""Skewed rotors by order: factors where the current's turn does nothing, solved steps else."""

import cmath
import math
from functools import cache

import numpy as np
import pytest
from shipped import shipped, shipped_model

from lamwright.geometry.skew import continuous_skew_factor, skew_factor
from lamwright.postprocess.no_load import no_load
from lamwright.postprocess.skew_orders import (
    SkewedTorque,
    TurnedTorque,
    skew_turns,
    skewed,
    turned_torque,
)
from lamwright.postprocess.torque import waveform_positions
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.types import FloatArray

SLOT_PITCH = math.pi / 6.0  # rad el, 24 slots and 4 poles
POSITIONS = 18


def invented(slope: float = 0.0) -> TurnedTorque:
    """Orders 6 and 12 whose contents grow by `slope` rad^-1 of themselves as the part is ahead."""
    turn = skew_turns(SLOT_PITCH)
    angle = np.arange(POSITIONS) * math.pi / 3.0 / POSITIONS
    waves = [
        10.0 + (1.0 + slope * a) * (np.cos(6.0 * angle + 0.4) + 2.0 * np.cos(12.0 * angle - 1.0))
        for a in turn
    ]
    return turned_torque(turn, waves)


@pytest.mark.parametrize("steps", [1, 2, 3, 4, 0])
def test_without_the_currents_part_it_is_the_skew_factor(steps: int) -> None:
    """Contents that do not depend on the current angle: the factors of checks B3, exactly."""
    angle = 0.8 * SLOT_PITCH
    found = skewed(invented(), steps, angle, 24)
    assert found.order == (6, 12, 18, 24)
    factors = [
        skew_factor(m, steps, angle) if steps else continuous_skew_factor(m, angle) for m in (6, 12)
    ]
    assert found.amplitude[:2] == pytest.approx(np.abs(factors) * [1.0, 2.0], abs=1e-12)
    assert found.by_factor == pytest.approx(found.amplitude, abs=1e-12)
    assert found.mean == pytest.approx(10.0)


def test_what_a_slope_by_the_current_angle_leaves() -> None:
    """One slot pitch, continuous, order 12: the factor is 0, (1/A) int s a e^(j 12 a) da is not.

    Over a whole period A of the order it is s A / (2 pi) by parts: amplitude 2 s / 12.
    """
    found = skewed(invented(slope=0.5), 0, SLOT_PITCH, 12)
    assert found.by_factor[1] == pytest.approx(0.0, abs=1e-12)
    assert found.amplitude[1] == pytest.approx(2.0 * 0.5 / 12.0, rel=1e-9)


def test_a_skew_beyond_the_turns_is_refused() -> None:
    """No polynomial is trusted outside its points."""
    with pytest.raises(ValueError, match="wider than the turns"):
        skewed(invented(), 0, 1.2 * SLOT_PITCH, 12)


@cache
def demo_torque(turn: float) -> FloatArray:
    """Waveform of the coarse 24/4 demo with its current vector turned back."""
    model, one = shipped_model("demo_24s4p_arc", 2.5), shipped("demo_24s4p_arc", 2.5)
    current = complex(0.55, 0.8) * one.rated * cmath.exp(-1j * turn)
    points = [
        OperatingPoint(current.real, current.imag, x) for x in waveform_positions(2, POSITIONS)
    ]
    return np.array([s.torque for s in solve_chain(model, points)])


def stepped(steps: int) -> SkewedTorque:
    turn = skew_turns(SLOT_PITCH)
    return skewed(
        turned_torque(turn, [demo_torque(a) for a in turn.tolist()]), steps, SLOT_PITCH, 36
    )


@pytest.mark.slow
def test_interpolated_steps_are_the_solved_steps() -> None:
    """24/4 demo, three steps over one slot pitch, each solved at its own current and position.

    Contents of all orders within 2e-4 of the mean (measured 1e-4), and the mean itself.
    """
    found = stepped(3)
    ahead = np.array([-1.0, 0.0, 1.0]) * SLOT_PITCH / 3.0
    order = np.array((0, *found.order))
    contents = [np.fft.rfft(demo_torque(a))[: order.size] / POSITIONS for a in ahead.tolist()]
    solved = np.mean(np.array(contents) * np.exp(1j * np.outer(ahead, order)), axis=0)
    assert found.mean == pytest.approx(solved[0].real, rel=2e-4)
    assert found.amplitude == pytest.approx(2.0 * np.abs(solved[1:]), abs=4e-4 * found.mean)


@pytest.mark.slow
def test_one_slot_pitch_takes_the_slot_order_down() -> None:
    """24/4 demo under load: order 12, whose factor is 0, to what the current angle's slope leaves.

    From 3.5 to 1.2 % of the mean with three steps (measured): the first-order part of
    T_m(gamma - a), slope times the mean of a e^(j m a), is all of it but a tenth. Order 36, on
    which three steps agree, stays within 3 % of itself, as its factor 1 says.
    """
    plain, found = stepped(1), stepped(3)
    at = found.order.index(12)
    assert skew_factor(12, 3, SLOT_PITCH) == pytest.approx(0.0, abs=1e-12)
    assert found.amplitude[at] < 0.4 * plain.amplitude[at]
    step = SLOT_PITCH / 3.0
    contents = [np.fft.rfft(demo_torque(a))[2] / POSITIONS for a in (-step, step)]
    slope = (contents[1] - contents[0]) / (2.0 * step)
    ahead = np.array([-step, 0.0, step])
    left = 2.0 * abs(slope * np.mean(ahead * np.exp(12j * ahead)))
    assert found.amplitude[at] == pytest.approx(left, rel=0.1)
    last = found.order.index(36)
    assert skew_factor(36, 3, SLOT_PITCH) == pytest.approx(1.0)
    assert found.amplitude[last] == pytest.approx(plain.amplitude[last], rel=0.03)


@pytest.mark.slow
def test_without_current_solved_steps_obey_the_factors() -> None:
    """36/4 demo with magnets, no current: three steps over one slot pitch, each solved (checks B3).

    Nothing but the position differs from step to step, so the factors hold for the field itself:
    linkage orders 1, 17 and 19 keep 0.995492, 0.069280 and 0.064772 of themselves, the cogging
    torque's slot order 18 nothing. Each within 1 % of the unskewed amplitude: positions of the
    steps lie elsewhere between the circle's nodes. Measured 0.99549, 0.0696, 0.0653 and 2e-5.
    """
    model, one = shipped_model("demo_36s4p_magnet", 2.5), shipped("demo_36s4p_magnet", 2.5)
    pole_pairs, pitch = one.section.pole_pairs, math.pi / 9.0  # rad el
    first = waveform_positions(pole_pairs, POSITIONS)
    records = []
    for ahead in (-pitch / 3.0, 0.0, pitch / 3.0):
        points = [OperatingPoint(0.0, 0.0, x + ahead / pole_pairs) for x in first.tolist()]
        records.append(no_load(solve_chain(model, points), one.section.rotor_period))
    linkage = np.abs(np.fft.rfft([record.psi for record in records], axis=1))
    whole = np.abs(np.fft.rfft(np.mean([record.psi for record in records], axis=0)))
    for order, factor in ((1, 0.995492), (17, 0.069280), (19, 0.064772)):
        assert whole[order] == pytest.approx(
            factor * linkage[1, order], abs=0.01 * linkage[1, order]
        )
    slot = 3  # of 60 degrees: order 18
    torque = np.fft.rfft([record.cogging for record in records], axis=1)[:, slot]
    assert abs(torque.mean()) < 0.01 * abs(torque[1])
