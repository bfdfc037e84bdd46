"""The search for the current angle with magnets, on torques in closed form."""

import math
from collections.abc import Callable

import pytest

from lamwright.postprocess.magnet_angle import best_magnet_angle, motoring_base

DEGREE = math.pi / 180.0


def linear(reluctance: float, magnet: float) -> Callable[[float], tuple[float, float]]:
    """T = reluctance sin 2 gamma + magnet cos gamma, and its slope."""

    def torque(gamma: float) -> tuple[float, float]:
        value = reluctance * math.sin(2.0 * gamma) + magnet * math.cos(gamma)
        slope = 2.0 * reluctance * math.cos(2.0 * gamma) - magnet * math.sin(gamma)
        return value, slope

    return torque


def exact(reluctance: float, magnet: float) -> float:
    """dT/dgamma = 0: 4 a s^2 + b s - 2 a = 0 for s = sin gamma."""
    a, b = reluctance, magnet
    return math.asin((-b + math.sqrt(b * b + 32.0 * a * a)) / (8.0 * a))


@pytest.mark.parametrize(("reluctance", "magnet"), [(10.0, 0.0), (10.0, 3.0), (10.0, 30.0)])
@pytest.mark.parametrize("turn", [0.0, math.pi])
def test_linear_machine_is_met(reluctance: float, magnet: float, turn: float) -> None:
    """Within the grid of 0.005 degrees, inward and outward magnets, in two to five angles."""
    torque = linear(reluctance, magnet)
    base = motoring_base(1.0 if turn else -1.0)
    found = best_magnet_angle(lambda gamma: torque(gamma - turn), base)
    assert found.gamma - turn == pytest.approx(exact(reluctance, magnet), abs=0.006 * DEGREE)
    assert len(found.tried) <= 5


def test_reversed_saliency_needs_negative_angles() -> None:
    """L_d < L_q as in a machine of magnets: a = -5, b = 20 has its best angle at -21 degrees."""
    found = best_magnet_angle(linear(-5.0, 20.0), 0.0)
    s = math.sin(found.gamma)  # 4 a s^2 + b s - 2 a = 0
    assert -20.0 * s * s + 20.0 * s + 10.0 == pytest.approx(0.0, abs=5e-3)
    assert found.gamma < -20.0 * DEGREE


def test_saturated_machine() -> None:
    """psi_d = c i_d / (k + |i_d|), psi_q = L i_q - psi_m: within 0.1 degree of a fine scan."""
    current, c, k, inductance, psi_m = 30.0, 1.2, 12.0, 5e-3, 0.15

    def value(gamma: float) -> float:
        i_d, i_q = current * math.cos(gamma), current * math.sin(gamma)
        return c * i_d / (k + abs(i_d)) * i_q - (inductance * i_q - psi_m) * i_d

    def torque(gamma: float) -> tuple[float, float]:
        step = 1e-5
        return value(gamma), (value(gamma + step) - value(gamma - step)) / (2.0 * step)

    best = max((0.01 * DEGREE * n for n in range(8500)), key=value)
    assert best_magnet_angle(torque, 0.0).gamma == pytest.approx(best, abs=0.1 * DEGREE)
