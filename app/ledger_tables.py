"""The rows of a ledger as tables: the best of each goal, two beside each other, CSV."""

import re
from collections.abc import Sequence
from dataclasses import dataclass

from .ledger_rows import ERROR_ENDING, Columns, Row
from .ledger_study import KeptStudy

# Units by the endings of names, as UDUNITS reads them.
_UNITS = {
    "mm": "mm",
    "mm2": "mm2",
    "um": "um",
    "deg": "degree",
    "nm": "N m",
    "a": "A",
    "v": "V",
    "vs": "V s",
    "w": "W",
    "kw": "kW",
    "kg": "kg",
    "mpa": "MPa",
    "rpm": "1/min",
    "percent": "%",
    "ohm": "ohm",
    "mh": "mH",
    "t": "T",
    "c": "degC",
}
_BEFORE = ("number", "outcome", "passes", "origin")
_AFTER = ("stage", "reason", "seconds", "attempts", "effort", "tolerance", "version", "hash")
_NUMBER = re.compile(r"[-+]?\d[\d.]*(?:e[-+]?\d+)?", re.IGNORECASE)


@dataclass(frozen=True, slots=True)
class Best:
    """The row that is best by a goal."""

    figure: str
    sense: str  # most or least
    row: Row
    holds: bool  # every limit; else no row does, and this is the best of all


@dataclass(frozen=True, slots=True)
class Difference:
    """A name of two rows; None where a row has no such value."""

    name: str
    first: float | int | str | None
    second: float | int | str | None
    first_error: float | None
    second_error: float | None

    @property
    def is_beyond(self) -> bool | None:
        """Whether the two differ by more than the sum of their errors; None if it is unknown."""
        if self.first_error is None or self.second_error is None:
            return None
        if isinstance(self.first, str) or isinstance(self.second, str):
            return None
        if self.first is None or self.second is None:
            return None
        return abs(self.first - self.second) > self.first_error + self.second_error


def best_rows(study: KeptStudy, rows: Sequence[Row]) -> list[Best]:
    """The best row of each goal among those that hold every limit, or else among all."""
    found = []
    for figure, sense in study.goals:
        having = [row for row in rows if figure in row.figures]
        holding = [row for row in having if row.passes]
        if having:
            sign = -1.0 if sense == "most" else 1.0
            row = min(holding or having, key=lambda row: (sign * row.figures[figure], row.hash))
            found.append(Best(figure, sense, row, bool(holding)))
    return found


def reason_classes(rows: Sequence[Row]) -> list[str]:
    """Why each row has no figures, "" where it has: faults that differ by numbers are of one class.

    Place and remedy are left out, and the numbers where they differ within a class.
    """
    faults = ["" if row.outcome == "done" else _fault(row) for row in rows]
    classes = [_NUMBER.sub("..", fault) for fault in faults]
    words: dict[str, set[str]] = {}
    for name, fault in zip(classes, faults, strict=True):
        words.setdefault(name, set()).add(fault)
    return [min(words[name]) if len(words[name]) == 1 else name for name in classes]


def _fault(row: Row) -> str:
    fault = row.reason.split("; ")[0]
    return (fault.rpartition(": ")[2] or fault).strip() or row.outcome


def reasons(rows: Sequence[Row]) -> list[tuple[str, str, int]]:
    """Outcome, reason's class and number of the rows without figures, the most first."""
    counts: dict[tuple[str, str], int] = {}
    for row, reason in zip(rows, reason_classes(rows), strict=True):
        if reason:
            counts[row.outcome, reason] = counts.get((row.outcome, reason), 0) + 1
    told = [(outcome, reason, count) for (outcome, reason), count in counts.items()]
    return sorted(told, key=lambda one: (-one[2], one[0], one[1]))


def missed_limits(study: KeptStudy, row: Row) -> list[str]:
    """Figures of the study's limits that the row misses, or does not have."""
    missed = []
    for figure, least, most in study.limits:
        value = row.figures.get(figure)
        if value is None:
            missed.append(f"{figure} not known")
        elif (least is not None and value < least) or (most is not None and value > most):
            missed.append(figure)
    return missed


def differences(columns: Columns, first: Row, second: Row) -> list[Difference]:
    """Keys, then figures of two rows that have either."""
    found = [
        Difference(key, first.values.get(key), second.values.get(key), None, None)
        for key in columns.keys
    ]
    found += [
        Difference(
            name,
            first.figures.get(name),
            second.figures.get(name),
            first.errors.get(name),
            second.errors.get(name),
        )
        for name in columns.figures
    ]
    return [one for one in found if one.first is not None or one.second is not None]


def csv_of(columns: Columns, rows: Sequence[Row]) -> str:
    """Rows as comma-separated values: keys, figures each with its error, and what is told of them.

    Numbers have all digits that a reader needs to get the same number.
    """
    from lamwright.postprocess.files import csv_text

    figures = [
        name
        for figure in columns.figures
        for name in (figure, *([figure + ERROR_ENDING] if figure in columns.errors else []))
    ]
    names = [*_BEFORE, *columns.keys, *figures, *_AFTER]
    return csv_text(names, [[_cell(value_of(row, name)) for name in names] for row in rows])


def value_of(row: Row, name: str) -> float | int | str | bool | None:
    """The value of a row by a name as users call it; None where it has none."""
    if name in row.values:
        return row.values[name]
    if name in row.figures:
        return row.figures[name]
    figure = name.removesuffix(ERROR_ENDING)
    if figure != name and figure in row.errors:
        return row.errors[figure]
    value: float | int | str | bool | None = getattr(row, name, None)
    return value


def _cell(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return "true" if value else "false"
    return repr(value) if isinstance(value, float) else str(value)


def unit_of(name: str) -> str:
    """The unit in a key's or figure's name; "1" where it has none."""
    return _UNITS.get(name.rpartition("_")[2], "1") if "_" in name else "1"
