"""Figures: numbers that leave the program, with key, label, unit and factor from SI.

A figure is declared once, as a field of a dataclass with this metadata; tables, screen and report
read it there. Keys end in the unit.
"""

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, fields
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


RPM = 30.0 / math.pi  # 1/min per rad/s
DIGITS = 4  # significant, where people read; files hold all of them
# Between these a number of so many digits has no exponent, and digits behind the point.
PLAIN_FROM, PLAIN_BELOW = 1e-4, 999.5
ERROR_DIGITS, ERROR_PLAIN_BELOW = 2, 1e5  # of error bars, likewise

# Why a figure has no numerical error.
STATED = "stated by the design file"
CARD = "stated by a card of steel or magnets"
COUNT = "a count"
FORMULA = "by formula from what design file and cards state: no mesh in it"
CHECK = "itself a measure of an error"
OUTLINE = "of exact lines and arcs: to rounding"


@dataclass(frozen=True, slots=True)
class Shown:
    """How a field leaves the program: `value * scale` in `unit`."""

    key: str
    label: str
    unit: str
    scale: float = 1.0
    is_estimate: bool = False
    exact: str = ""  # why it has no numerical error; empty where it may have one


@dataclass(frozen=True, slots=True)
class Figure:
    """One figure as shown: value in its unit."""

    key: str
    label: str
    value: float
    unit: str
    is_estimate: bool
    exact: str = ""


def shown_as(
    key: str, label: str, unit: str, scale: float = 1.0, exact: str = ""
) -> Mapping[str, Shown]:
    """Metadata of a field that leaves the program as a figure; `exact` as in `Shown`."""
    return {"shown": Shown(key, label, unit, scale, exact=exact)}


def shown_estimate(
    key: str, label: str, unit: str, scale: float = 1.0, exact: str = ""
) -> Mapping[str, Shown]:
    """The same for a figure that rests on a formula instead of a field."""
    return {"shown": Shown(key, label, unit, scale, is_estimate=True, exact=exact)}


def figures_of(group: "DataclassInstance") -> Iterator[Figure]:
    """The figures of a group in their units, in order.

    Raises:
        ArithmeticError: a figure is not a finite number; such a figure is never passed on.
    """
    for item in fields(group):
        shown: Shown = item.metadata["shown"]
        value: float = getattr(group, item.name)
        if not math.isfinite(value):
            raise ArithmeticError(f"{shown.key} = {value}: not a finite number")
        # Counts stay whole numbers.
        scaled = value if shown.scale == 1.0 else value * shown.scale
        yield Figure(shown.key, shown.label, scaled, shown.unit, shown.is_estimate, shown.exact)


def number(value: float) -> str:
    """A number with four significant digits, without exponent where it can be read so."""
    if PLAIN_FROM <= abs(value) < PLAIN_BELOW:
        return f"{value:#.{DIGITS}g}"
    if value == 0.0 or not PLAIN_FROM <= abs(value) < 1e7:
        return f"{value:.{DIGITS}g}"
    decimals = DIGITS - 1 - math.floor(math.log10(abs(value)))
    return f"{value:.{max(0, decimals)}f}"


def error_number(value: float) -> str:
    """An error with two significant digits, plain where that can be read: 190, not 1.9e+02."""
    text = f"{value:.{ERROR_DIGITS}g}"
    return f"{float(text):.0f}" if 0.0 < abs(value) < ERROR_PLAIN_BELOW and "e+" in text else text


def valued(figure: Figure) -> str:
    """A figure with its unit, marked where it is an estimate."""
    about = "~ " if figure.is_estimate else ""
    return f"{about}{number(figure.value)} {figure.unit}".rstrip()


def scaled_by_key(group: "DataclassInstance", values: Mapping[str, float]) -> dict[str, float]:
    """Values in SI of some of the group's fields, by their figures' keys and in their units."""
    shown: dict[str, Shown] = {item.name: item.metadata["shown"] for item in fields(group)}
    return {shown[name].key: shown[name].scale * value for name, value in values.items()}


@dataclass(frozen=True, slots=True, kw_only=True)
class OutlineFigures:
    """The punch outline as read back from the DXF, against the outline analysed."""

    area: float = field(
        metadata=shown_as(
            "lamination_area_mm2", "area of the lamination", "mm2", 1e6, exact=OUTLINE
        )
    )
    perimeter: float = field(
        metadata=shown_as(
            "lamination_perimeter_mm", "cut length of the lamination", "mm", 1e3, exact=OUTLINE
        )
    )
    area_difference: float = field(
        metadata=shown_as(
            "dxf_area_difference_relative", "area read back, relative difference", "", exact=CHECK
        )
    )
    perimeter_difference: float = field(
        metadata=shown_as(
            "dxf_perimeter_difference_relative", "cut length read back, difference", "", exact=CHECK
        )
    )
    vertex_difference: float = field(
        metadata=shown_as(
            "dxf_vertex_difference_um",
            "vertices read back, greatest distance",
            "um",
            1e6,
            exact=CHECK,
        )
    )
