"""The rows of a ledger as tables: the best of each goal, two beside each other, CSV."""

import re
from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from .ledger import Ledger
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


def ranked(rows: Sequence[Row], figure: str, sense: str) -> list[Row]:
    """Those with the figure, the best first, but those that hold every limit before all others."""
    sign = -1.0 if sense == "most" else 1.0
    having = [row for row in rows if figure in row.figures]
    having.sort(key=lambda row: (row.passes is not True, sign * row.figures[figure], row.hash))
    return having


def best_of(ledger: Ledger) -> list[Best]:
    """The first of `ranked` for each goal, found by SQL: no row but the best is read."""
    found = []
    for figure, sense in ledger.study.goals:
        row = ledger.best(figure, sense)
        if row is not None:
            found.append(Best(figure, sense, row, bool(row.passes)))
    return found


def reason_classes(rows: Sequence[Row]) -> list[str]:
    """Why each row has no figures, "" where it has: faults that differ by numbers are of one class.

    Place and remedy are left out, and the numbers where they differ within a class.
    """
    classes = _classes({(row.outcome, row.reason) for row in rows})
    return [classes[row.outcome, row.reason] for row in rows]


def _classes(reasons: Iterable[tuple[str, str]]) -> dict[tuple[str, str], str]:
    """The class of each outcome and reason."""
    faults = {one: "" if one[0] == "done" else _fault(*one) for one in reasons}
    names = {fault: _NUMBER.sub("..", fault) for fault in set(faults.values())}
    words: dict[str, list[str]] = {}
    for fault, name in names.items():
        words.setdefault(name, []).append(fault)
    alone = {name: found[0] if len(found) == 1 else name for name, found in words.items()}
    return {one: alone[names[fault]] for one, fault in faults.items()}


def _fault(outcome: str, reason: str) -> str:
    fault = reason.split("; ")[0]
    return (fault.rpartition(": ")[2] or fault).strip() or outcome


def reasons(rows: Sequence[Row]) -> list[tuple[str, str, int]]:
    """Outcome, reason's class and number of the rows without figures, the most first."""
    counts = Counter((row.outcome, row.reason) for row in rows)
    return told_reasons([(*one, count) for one, count in counts.items()])


def told_reasons(counted: Sequence[tuple[str, str, int]]) -> list[tuple[str, str, int]]:
    """Outcome, reason's class and number from outcome, reason and number, the most first."""
    classes = _classes((outcome, reason) for outcome, reason, _ in counted)
    counts: Counter[tuple[str, str]] = Counter()
    for outcome, reason, count in counted:
        if told := classes[outcome, reason]:
            counts[outcome, told] += count
    found = [(outcome, reason, count) for (outcome, reason), count in counts.items()]
    return sorted(found, key=lambda one: (-one[2], one[0], one[1]))


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
