"""Offsets and factors of a skewed rotor against check values B3."""

import math

import pytest

from lamwright.geometry.checks import check_design
from lamwright.geometry.skew import continuous_skew_factor, skew_factor, skew_offsets
from tests.outlines import plain_design


def skewed(steps, angle):
    design = plain_design()
    update = {"skew_steps": steps, "skew_angle_deg": angle}
    return design.model_copy(update={"rotor": design.rotor.model_copy(update=update)})


@pytest.mark.parametrize(
    ("order", "factor"), [(1, 0.995492), (17, 0.069280), (19, 0.064772), (18, 0.0)]
)
def test_factor_of_three_steps_over_one_slot_pitch(order, factor):
    """Check value B3: 36 slots, 4 poles, three steps; six digits, order 18 exactly 0."""
    slot_pitch_el = 2.0 * 2.0 * math.pi / 36.0
    assert abs(skew_factor(order, 3, slot_pitch_el)) == pytest.approx(factor, abs=5e-7)


@pytest.mark.parametrize(
    ("slots", "order", "factor"), [(24, 1, 0.988616), (24, 11, 0.0898742), (48, 23, 0.043354)]
)
def test_many_steps_are_a_continuous_skew(slots, order, factor):
    """Check value B3, sin(nu a/2) / (nu a/2); n steps differ by (nu a / n)^2 / 24 (derived)."""
    angle = 4.0 * math.pi / slots
    assert abs(skew_factor(order, 4000, angle)) == pytest.approx(factor, rel=1e-5)


B3 = {  # slots of a four-pole machine: order and factor of a skew by one slot pitch
    24: {1: 0.988616, 11: 0.0898742, 13: 0.0760474},
    36: {1: 0.994931, 17: 0.058525, 19: 0.052365},
    48: {1: 0.997147, 23: 0.043354, 25: 0.039886},
}


@pytest.mark.parametrize("slots", B3)
def test_continuous_skew_by_one_slot_pitch(slots):
    """All of check values B3, to the digits given; the slot order itself is gone: exactly 0."""
    angle = 4.0 * math.pi / slots
    for order, factor in B3[slots].items():
        assert abs(continuous_skew_factor(order, angle)) == pytest.approx(factor, rel=1e-5)
    assert continuous_skew_factor(slots // 2, angle) == pytest.approx(0.0, abs=1e-15)
    assert continuous_skew_factor(6, 0.0) == 1.0


@pytest.mark.parametrize("steps", [1, 2, 3, 5])
@pytest.mark.parametrize("order", [1, 6, 12, 18, 36])
def test_factor_is_the_mean_of_cosines_at_the_offsets(steps, order):
    """The steps' offsets themselves, each share a cosine: to rounding; they lie about 0."""
    design = skewed(steps, 10.0)
    offsets = skew_offsets(design)
    mean = sum(math.cos(order * 2.0 * offset) for offset in offsets) / steps
    assert skew_factor(order, steps, 2.0 * math.radians(10.0)) == pytest.approx(mean, abs=1e-12)
    assert sum(offsets) == pytest.approx(0.0, abs=1e-15)
    assert offsets[-1] - offsets[0] == pytest.approx(math.radians(10.0) * (1.0 - 1.0 / steps))


def test_a_whole_turn_between_steps_leaves_all():
    """Nu d = 2 pi k: all steps agree, up to the sign of the mean position."""
    assert abs(skew_factor(4, 3, 3.0 * 2.0 * math.pi / 4.0)) == pytest.approx(1.0, abs=1e-12)


@pytest.mark.parametrize(
    ("steps", "angle", "codes"),
    [
        (1, 5.0, ["skew_idle"]),
        (3, 0.0, ["skew_missing"]),
        (2, 90.0, ["skew_wide"]),
        (1, 0.0, []),
        (3, 15.0, []),
    ],
)
def test_keys_of_the_skew_are_checked(steps, angle, codes):
    """Codes are stable; a key that would do nothing is refused."""
    assert [finding.code for finding in check_design(skewed(steps, angle))] == codes
