"""Limits of sizes against the standard's own formulas and well-known fits."""

import math

import pytest

from lamwright.geometry.errors import DesignError
from lamwright.postprocess.sheet_fits import GRADES, RANGES, general_limit, limits_of

# ISO 286-1: tolerance units i from grade 5 to 11.
UNITS = {5: 7.0, 6: 10.0, 7: 16.0, 8: 25.0, 9: 40.0, 10: 64.0, 11: 100.0}
ROUNDED = 0.1  # share by which the standard's rounding leaves its formula


@pytest.mark.parametrize("grade", UNITS)
def test_grades_follow_the_formula(grade):
    """IT = units times i = 0.45 D^(1/3) + 0.001 D up to 500 mm, I = 0.004 D + 2.1 above (um).

    D is the geometric mean of a range. Up to 3 mm the standard rounds to 10, by up to 16 %.
    """
    for low, high, value in zip(RANGES, RANGES[1:], GRADES[grade][1:], strict=False):
        middle = math.sqrt(low * high)
        unit = 0.45 * middle ** (1 / 3) + 0.001 * middle if high <= 500 else 0.004 * middle + 2.1
        assert value == pytest.approx(UNITS[grade] * unit, rel=ROUNDED)


@pytest.mark.parametrize(
    ("nominal", "fit", "upper", "lower"),
    [
        (26.0, "H7", 0.021, 0.0),
        (25.0, "g6", -0.007, -0.020),
        (25.0, "G6", 0.020, 0.007),
        (50.0, "f7", -0.025, -0.050),
        (50.0, "K7", 0.007, -0.018),
        (40.0, "N7", -0.008, -0.033),
        (25.0, "P7", -0.014, -0.035),
        (80.0, "h8", 0.0, -0.046),
        (100.0, "p6", 0.059, 0.037),
        (8.0, "JS9", 0.018, -0.018),
        (100.0, "H12", 0.35, 0.0),
        (60.0, "k9", 0.074, 0.0),
        (60.0, "N9", 0.0, -0.074),
    ],
)
def test_known_fits(nominal, fit, upper, lower):
    """Deviations as every fits table prints them, from memory; +-0 by the table's own digits."""
    limits = limits_of(nominal, fit)
    assert (limits.upper, limits.lower) == pytest.approx((upper, lower), abs=1e-9)


def test_general_tolerances():
    """ISO 2768-1, class m: 0.1 from 0.5 to 6 mm, 0.2 to 30, 0.3 to 120; none below 0.5 mm."""
    assert [general_limit(size, "m") for size in (0.5, 6.0, 6.1, 30.0, 81.2)] == [
        0.1, 0.1, 0.2, 0.2, 0.3,
    ]  # fmt: skip
    assert general_limit(0.45, "m") is None
    assert general_limit(2.0, "v") is None


@pytest.mark.parametrize(
    ("nominal", "fit", "message"),
    [
        (26.0, "H", "fit 'H': no tolerance class"),
        (26.0, "H2", "IT2: no such grade here; accepted 3 to 13"),
        (1200.0, "H7", "grades here end at 1000 mm"),
        (600.0, "g6", "accepted to 500 mm"),
    ],
)
def test_unknown_classes_are_refused(nominal, fit, message):
    """One line with what is accepted."""
    with pytest.raises(DesignError, match=message):
        limits_of(nominal, fit)
