"""Cogging: its period is solved, its mean is zero, harmonics come back."""

import math

import numpy as np
import pytest
from shipped import shipped, shipped_model

from lamwright.postprocess.cogging import cogging, cogging_per_turn, cogging_positions
from lamwright.solver.chains import OperatingPoint, solve_chain


@pytest.mark.parametrize(
    ("slots", "poles", "period", "count"),
    [(36, 4, 1, 36), (12, 10, 1, 60), (27, 6, 1, 54), (24, 4, 2, 24)],
)
def test_periods_of_a_turn(slots, poles, period, count):
    """Least common multiple, by hand."""
    assert cogging_per_turn(slots, poles, period) == count


def test_harmonics_come_back():
    """Orders 36 and 72 with 0.3 and 0.1 N m, exact; peak to peak of their sum by brute force."""
    angle = cogging_positions(36)
    wave = lambda x: 0.3 * np.sin(36.0 * x + 0.2) + 0.1 * np.cos(72.0 * x)  # noqa: E731
    found = cogging(36, angle.tolist(), wave(angle).tolist())
    assert found.order == tuple(range(36, 36 * 8 + 1, 36))
    assert found.amplitude == pytest.approx([0.3, 0.1, *[0.0] * 6], abs=1e-12)
    assert found.peak_to_peak == pytest.approx(
        float(np.ptp(wave(np.linspace(0, 1, 20001)))), rel=1e-3
    )


def test_magnets_of_the_demo():
    """36/4 demo, solved: the next period is the same within 2 % of the crest, the mean below 2 %.

    Positions lie between the circle's nodes; a mesh 2.5 times as coarse as usual.
    """
    model, one = shipped_model("demo_36s4p_magnet", 2.5), shipped("demo_36s4p_magnet", 2.5)
    per_turn = cogging_per_turn(one.section.slots, one.section.poles, one.section.rotor_period)
    assert per_turn == 36
    first = cogging_positions(per_turn, 6)
    positions = [*first.tolist(), *(first[:3] + 2.0 * math.pi / per_turn).tolist()]
    fields = solve_chain(model, [OperatingPoint(0.0, 0.0, x) for x in positions])
    torque = np.array([field.torque for field in fields])
    found = cogging(per_turn, first.tolist(), torque[:6].tolist())
    crest = 0.5 * found.peak_to_peak
    assert crest > 0.0
    assert torque[6:] == pytest.approx(torque[:3], abs=0.02 * crest)
    assert abs(torque[:6].mean()) < 0.02 * crest
