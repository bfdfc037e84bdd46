"""Which slot and pole numbers can be wound, against the closed form and by counting phasors."""

import cmath
import math
from collections import Counter

import pytest

from lamwright.geometry.star_of_slots import (
    coil_star,
    is_balanced,
    most_span,
    nearest_poles,
    nearest_slots,
)

PAIRS = [(slots, poles) for slots in range(3, 73) for poles in range(2, 21, 2)]


@pytest.mark.parametrize("layers", [1, 2])
def test_every_pair_is_wound_alike_or_refused(layers):
    """Three like phases exist iff slots / (3 gcd(slots, p)) is whole (Bianchi, Dai Pre 2006).

    From memory; one layer needs an even number of slots besides, two sides to a coil. For every
    pair that is wound the phasors of A, B, C, counted on a dial of 2 slots' marks, are the same
    but for 120 and 240 degrees, exactly; A's lie within 30 degrees of their mean; and the most
    parallel paths are as many as share out every phasor equally.
    """
    for slots, poles in PAIRS:
        p = poles // 2
        closed_form = (slots / (3 * math.gcd(slots, p))).is_integer()
        closed_form = closed_form and (layers == 2 or slots % 2 == 0)
        assert is_balanced(slots, poles, layers) == closed_form, (slots, poles)
        if not closed_form:
            continue
        span = round(slots / poles) or 1
        if layers == 1 and slots % (3 * poles):
            span -= 1 - span % 2
            span = max(span, 1)
        star = coil_star(slots, poles, layers, span)
        dials = [Counter(), Counter(), Counter()]
        for coil in star.coils:
            mark = 2 * p * coil.start + (slots if coil.sign < 0 else 0)
            dials[coil.phase][mark % (2 * slots)] += 1
        for phase in (1, 2):
            # 120 electrical degrees are 2 slots / 3 marks.
            turned = {(3 * m + 2 * slots * phase) % (6 * slots): n for m, n in dials[0].items()}
            assert turned == {3 * m % (6 * slots): n for m, n in dials[phase].items()}
        middle = sum(n * cmath.exp(1j * math.pi * m / slots) for m, n in dials[0].items())
        for mark in dials[0]:
            off = cmath.phase(cmath.exp(1j * math.pi * mark / slots) / middle)
            assert abs(off) < math.pi / 6 + 1e-9, (slots, poles)
        assert math.gcd(*dials[0].values()) == star.alike, (slots, poles)


def test_handbook_pairs():
    """Pairs named in check values B2, slots per pole and phase beside those that cannot be."""
    wound = "24/4 36/4 48/4 36/6 54/6 48/8 27/6 18/4 30/8 33/4 12/10 9/8 24/10"
    refused = "15/6 20/4 12/6 10/4 24/18"
    for text in wound.split():
        assert is_balanced(*map(int, text.split("/"))), text
    for text in refused.split():
        assert not is_balanced(*map(int, text.split("/"))), text


def test_nearest_are_wound_and_nothing_nearer_is():
    """All pairs: the neighbours named can be wound, and no number between them can."""
    for layers in (1, 2):
        for slots, poles in PAIRS:
            near = nearest_slots(slots, poles, layers)
            assert all(is_balanced(n, poles, layers) for n in near)
            between = set(range(min((*near, slots)) + 1, max((*near, slots)))) - {slots, *near}
            assert not any(is_balanced(n, poles, layers) for n in between)
            near = nearest_poles(slots, poles, layers)
            assert all(is_balanced(slots, n, layers) for n in near)
            between = set(range(min((*near, poles)) + 2, max((*near, poles)), 2)) - {poles, *near}
            assert not any(is_balanced(slots, n, layers) for n in between)


def test_longest_span_is_under_two_pole_pitches():
    """By hand: 24/4 has 6 slots to a pole, 9/8 1.125, 3/8 0.375 (a tooth coil all the same)."""
    assert [most_span(24, 4), most_span(9, 8), most_span(3, 8), most_span(12, 10)] == [11, 2, 1, 2]
