"""Limits of sizes: ISO 286 fits and ISO 2768-1 general tolerances, as tables.

Source: ISO 286-1:2010 (standard tolerances and fundamental deviations) and ISO 2768-1:1989, both
from memory (m). A test holds the standard tolerances to the standard's own formula
i = 0.45 D^(1/3) + 0.001 D (um, D in mm, geometric mean of a range).
Holes of letters K to S follow from the shafts by the rule of the same fit: ES = -ei + delta,
delta = IT n - IT (n - 1).
"""

import re
from dataclasses import dataclass

from lamwright.geometry.errors import DesignError

UM = 1e-3  # mm
# Upper ends of the ranges of nominal sizes in mm.
RANGES = (3, 6, 10, 18, 30, 50, 80, 120, 180, 250, 315, 400, 500, 630, 800, 1000)
# um, for each range; grades 12 and up follow by ten times the grade five below.
GRADES: dict[int, tuple[float, ...]] = {
    3: (2, 2.5, 2.5, 3, 4, 4, 5, 6, 8, 10, 12, 13, 15, 16, 18, 21),
    4: (3, 4, 4, 5, 6, 7, 8, 10, 12, 14, 16, 18, 20, 22, 25, 28),
    5: (4, 5, 6, 8, 9, 11, 13, 15, 18, 20, 23, 25, 27, 32, 36, 40),
    6: (6, 8, 9, 11, 13, 16, 19, 22, 25, 29, 32, 36, 40, 44, 50, 56),
    7: (10, 12, 15, 18, 21, 25, 30, 35, 40, 46, 52, 57, 63, 70, 80, 90),
    8: (14, 18, 22, 27, 33, 39, 46, 54, 63, 72, 81, 89, 97, 110, 125, 140),
    9: (25, 30, 36, 43, 52, 62, 74, 87, 100, 115, 130, 140, 155, 175, 200, 230),
    10: (40, 48, 58, 70, 84, 100, 120, 140, 160, 185, 210, 230, 250, 280, 320, 360),
    11: (60, 75, 90, 110, 130, 160, 190, 220, 250, 290, 320, 360, 400, 440, 500, 560),
}
# um, magnitude of a shaft's deviation nearest to the nominal size, up to 500 mm.
CLEAR: dict[str, tuple[float, ...]] = {
    "d": (20, 30, 40, 50, 65, 80, 100, 120, 145, 170, 190, 210, 230),
    "e": (14, 20, 25, 32, 40, 50, 60, 72, 85, 100, 110, 125, 135),
    "f": (6, 10, 13, 16, 20, 25, 30, 36, 43, 50, 56, 62, 68),
    "g": (2, 4, 5, 6, 7, 9, 10, 12, 14, 15, 17, 18, 20),
}
TIGHT: dict[str, tuple[float, ...]] = {
    "k": (0, 1, 1, 1, 2, 2, 2, 3, 3, 4, 4, 4, 5),
    "m": (2, 4, 6, 7, 8, 9, 11, 13, 15, 17, 20, 21, 23),
    "n": (4, 8, 10, 12, 15, 17, 20, 23, 27, 31, 34, 37, 40),
    "p": (6, 12, 15, 18, 22, 26, 32, 37, 43, 50, 56, 62, 68),
}
LETTERS = (*CLEAR, "h", "js", *TIGHT)
SHIFTED_TO = {"K": 8, "M": 8, "N": 8, "P": 7}  # last grade to which delta is added
LAST_K = 7  # last grade of shafts k that lie off zero
_CLASS = re.compile(r"(js|JS|[d-hk-np]|[D-HK-NP])(\d{1,2})")

# ISO 2768-1: limits in mm to both sides by class; ranges end at 3, 6, 30, 120, 400, 1000, 2000 mm.
LINEAR_RANGES = (3, 6, 30, 120, 400, 1000, 2000)
LINEAR: dict[str, tuple[float | None, ...]] = {
    "f": (0.05, 0.05, 0.1, 0.15, 0.2, 0.3, 0.5),
    "m": (0.1, 0.1, 0.2, 0.3, 0.5, 0.8, 1.2),
    "c": (0.2, 0.3, 0.5, 0.8, 1.2, 2.0, 3.0),
    "v": (None, 0.5, 1.0, 1.5, 2.5, 4.0, 6.0),
}
LEAST_GENERAL = 0.5  # mm, below it ISO 2768-1 has no limits


@dataclass(frozen=True, slots=True)
class Limits:
    """Upper and lower limit deviation in mm."""

    upper: float
    lower: float


def standard_tolerance(nominal: float, grade: int) -> float:
    """Width in mm of grade `grade` at a nominal size in mm.

    Raises:
        DesignError: the size is over 1000 mm or the grade is none of 3 to 13.
    """
    number = _range_of(nominal)
    if grade in GRADES:
        return UM * GRADES[grade][number]
    if grade in (12, 13):
        # The preferred number series: each fifth grade is ten times as wide.
        return 10.0 * UM * GRADES[grade - 5][number]
    raise DesignError(f"IT{grade}: no such grade here; accepted 3 to 13")


def limits_of(nominal: float, fit: str) -> Limits:
    """Limit deviations of a tolerance class such as `H7` or `g6`.

    Args:
        nominal: size in mm.
        fit: letter and grade, a capital for holes.

    Raises:
        DesignError: the class is not one of those known, or the size is outside its table.
    """
    found = _CLASS.fullmatch(fit)
    if found is None:
        known = " ".join(LETTERS)
        raise DesignError(
            f"fit {fit!r}: no tolerance class; accepted a letter of {known} (capital for holes)"
            " and a grade, as H7"
        )
    letter, grade = found.group(1), int(found.group(2))
    width = standard_tolerance(nominal, grade)
    if letter in ("js", "JS"):
        return Limits(0.5 * width, -0.5 * width)
    if letter.islower():
        return _shaft(nominal, letter, grade, width)
    return _hole(nominal, letter, grade, width)


def general_limit(nominal: float, grade: str) -> float | None:
    """Limit in mm to both sides of a length without its own, by ISO 2768-1; None where it has none.

    Args:
        nominal: length in mm.
        grade: `f`, `m`, `c` or `v`.
    """
    if grade not in LINEAR or not LEAST_GENERAL <= nominal <= LINEAR_RANGES[-1]:
        return None
    number = next(k for k, end in enumerate(LINEAR_RANGES) if nominal <= end)
    return LINEAR[grade][number]


def _shaft(nominal: float, letter: str, grade: int, width: float) -> Limits:
    if letter == "h":
        return Limits(0.0, -width)
    if letter in CLEAR:
        upper = -UM * _deviation(nominal, CLEAR[letter])
        return Limits(upper, upper - width)
    is_zero = letter == "k" and grade > LAST_K
    lower = 0.0 if is_zero else UM * _deviation(nominal, TIGHT[letter])
    return Limits(lower + width, lower)


def _hole(nominal: float, letter: str, grade: int, width: float) -> Limits:
    low = letter.lower()
    if low == "h":
        return Limits(width, 0.0)
    if low in CLEAR:
        lower = UM * _deviation(nominal, CLEAR[low])
        return Limits(lower + width, lower)
    if letter in ("K", "N") and grade > SHIFTED_TO[letter]:
        return Limits(0.0, -width)
    upper = -UM * _deviation(nominal, TIGHT[low])
    if grade <= SHIFTED_TO[letter] and grade - 1 in GRADES and nominal > RANGES[0]:
        upper += width - standard_tolerance(nominal, grade - 1)
    return Limits(upper, upper - width)


def _deviation(nominal: float, table: tuple[float, ...]) -> float:
    number = _range_of(nominal)
    if number >= len(table):
        raise DesignError(f"size {nominal:g} mm: no deviation of that letter; accepted to 500 mm")
    return table[number]


def _range_of(nominal: float) -> int:
    for number, end in enumerate(RANGES):
        if nominal <= end:
            return number
    raise DesignError(f"size {nominal:g} mm: ISO 286 grades here end at 1000 mm")
