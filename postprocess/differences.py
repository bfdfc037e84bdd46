"""Figures of two results side by side: what differs, and whether by more than the meshes' errors.

Two error bars add up: both figures may be off by theirs, in opposite directions.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields

from .magnet_figures import MagnetFigures
from .quantities import OutlineFigures, Shown
from .verdict import MagneticFigures, StressFigures, TerminalFigures

ROUNDING = 1e-9  # relative: less is none
# Of the run, not of the machine.
GROUPS = (MagneticFigures, TerminalFigures, StressFigures, OutlineFigures, MagnetFigures)


@dataclass(frozen=True, slots=True)
class Pair:
    """Two numbers of the same thing; None where one side has none."""

    key: str
    first: float | None
    second: float | None

    @property
    def change(self) -> float | None:
        """Second less first."""
        if self.first is None or self.second is None:
            return None
        return self.second - self.first

    @property
    def differs(self) -> bool:
        """Whether they are not the same, to rounding."""
        if self.first is None or self.second is None:
            return self.first is not self.second
        return abs(self.second - self.first) > ROUNDING * max(abs(self.first), abs(self.second))


@dataclass(frozen=True, slots=True)
class FigureDifference(Pair):
    """One figure of two results, in its unit."""

    label: str
    unit: str
    bar: float | None  # sum of both error bars, None where neither has one

    @property
    def is_beyond(self) -> bool | None:
        """Whether they differ by more than the error bars; None where there is none."""
        if self.bar is None or self.change is None:
            return None
        return abs(self.change) > self.bar


def shown_figures() -> dict[str, Shown]:
    """Label and unit of every figure that a verdict may have of its machine, by key."""
    return {
        shown.key: shown
        for group in GROUPS
        for item in fields(group)
        if isinstance(shown := item.metadata.get("shown"), Shown)
    }


def figure_differences(
    first: Mapping[str, object], second: Mapping[str, object]
) -> tuple[FigureDifference, ...]:
    """All figures of two verdicts as their records (`verdict.json`) have them, in order."""
    found = []
    for key, shown in shown_figures().items():
        a, b = _number(first, key), _number(second, key)
        if a is None and b is None:
            continue
        bars = [_number(record, f"{key}_error") for record in (first, second)]
        known = [bar for bar in bars if bar is not None]
        bar = sum(known) if known else None
        found.append(FigureDifference(key, a, b, shown.label, shown.unit, bar))
    return tuple(found)


def difference_rows(
    differences: Sequence[FigureDifference], names: tuple[str, str]
) -> list[dict[str, object]]:
    """The differences as records, with the names of the two results in the keys."""
    return [
        {
            "figure": one.key,
            "unit": one.unit,
            names[0]: one.first,
            names[1]: one.second,
            "change": one.change,
            "error_bars": one.bar,
            "beyond_error_bars": one.is_beyond,
        }
        for one in differences
    ]


def _number(record: Mapping[str, object], key: str) -> float | None:
    value = record.get(key)
    is_number = isinstance(value, int | float) and not isinstance(value, bool)
    return float(value) if is_number and isinstance(value, int | float) else None
