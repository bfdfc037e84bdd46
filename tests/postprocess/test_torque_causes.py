"""Orders in words, and the published ripple rule from the orders alone."""

from fractions import Fraction

import pytest
from shipped import shipped

from lamwright.geometry.rotor_places import RotorPlaces
from lamwright.postprocess.torque_causes import (
    Slotting,
    order_cause,
    pair_text,
    slotting,
    wave_text,
)
from lamwright.postprocess.torque_pairs import WavePair

DEMO = Slotting(Fraction(12), 16)


def test_slot_orders_have_the_working_waves_factor() -> None:
    """24/4, checks B1: orders 11 and 13 have 0.96593 as 1 has, 5 and 7 0.25882; n_s = 12."""
    winding = shipped("demo_24s4p_arc", 2.5).winding
    by = slotting(winding, RotorPlaces(16, 0.01))
    assert by == DEMO
    for order in (6, 12, 18, 24):
        cause = order_cause(winding, by, order)
        assert (cause.below, cause.above) == (order - 1, order + 1)
        assert cause.is_slot == (order % 12 == 0)
        factor = 0.965926 if cause.is_slot else 0.258819
        assert cause.factor_below == pytest.approx(factor, abs=1e-6)
        assert cause.factor_above == pytest.approx(factor, abs=1e-6)


@pytest.mark.parametrize("slots", [12, 18, 24])
def test_published_rule_follows_from_the_orders(slots: int) -> None:
    """Checks B5: of n_r = n_s - 6 .. n_s + 6 the ends meet slot order n_s at n_s and n_s +- 2 only.

    Even n_r, as both halves of a pole are alike.
    """
    winding = shipped("demo_24s4p_arc", 2.5).winding
    met = [
        places - slots
        for places in range(slots - 6, slots + 7, 2)
        if order_cause(winding, Slotting(Fraction(slots), places), slots).is_ends
    ]
    # Six places have orders 11 and 13 too, as multiples; they are not near 12.
    assert [distance for distance in met if abs(distance) <= 4] == [-2, 0, 2]


@pytest.mark.parametrize(
    ("space", "time", "text"),
    [
        (1.0, 1.0, "working wave"),
        (5.0, -1.0, "winding order -5"),
        (11.0, -1.0, "winding order -11 (slots)"),
        (13.0, 1.0, "winding order 13 (slots)"),
        (11.0, 11.0, "rotor order 11"),
        (17.0, 17.0, "rotor order 17 (barrier ends)"),
        (1.0, 13.0, "rotor order 13 moved by -12 (slots)"),
        (1.0, -11.0, "rotor order 11 moved by -12 (slots)"),
        (7.0, 1.0, "winding order 7"),
        (1.0, 7.0, "rotor order 7 moved by -6"),
    ],
)
def test_waves_in_words(space: float, time: float, text: str) -> None:
    """Moved by k - 1 by the rotor and nu - k by what stands still, n_s = 12, n_r = 16: by hand."""
    assert wave_text(space, time, DEMO) == text


def test_a_pair_names_both() -> None:
    """The slower wave first."""
    pair = WavePair(12, 11.0, -1.0, 11.0, 0.4, 0.7, 1.3, -0.6)
    assert pair_text(pair, DEMO) == "winding order -11 (slots) with rotor order 11"


def test_half_slots_of_a_pole_pair() -> None:
    """Tooth coils, 12 slots and 10 poles: n_s = 12/5, so 12 is five times it, 6 is not."""
    by = Slotting(Fraction(12, 5))
    assert wave_text(13.0, 1.0, by) == "winding order 13 (slots)"
    assert wave_text(7.0, 1.0, by) == "winding order 7"
