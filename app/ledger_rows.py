"""Rows of a ledger: a value for each, and how they lie in its table.

Keys, figures and their errors are columns made as their names turn up, `key:rotor.gap_mm`,
`figure:torque_nm`, `error:torque_nm`: a condition on 100 000 rows then takes hundredths of a
second, where reading each row's JSON takes whole ones.
"""

import difflib
from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Literal

FIXED = (  # columns that every row has, in the order of the fields of `Row`
    "number",
    "hash",
    "outcome",
    "reason",
    "stage",
    "passes",
    "seconds",
    "tolerance",
    "effort",
    "version",
    "origin",
    "attempts",
)
_PASSES = FIXED.index("passes")
_NUMBERS = ("number", "seconds", "attempts")
KEY, FIGURE, ERROR = "key:", "figure:", "error:"
ERROR_ENDING = "_error"  # of an error's name for users, as in `verdict.json`

Kind = Literal["number", "text", "flag", "any"]


@dataclass(frozen=True, slots=True)
class Row:
    """What is kept of one design, without its file."""

    number: int  # from 1, in the order of finishing
    hash: str
    outcome: str  # done, rejected or failed
    reason: str  # one line; empty where done
    stage: str  # of the evaluation, the last that was entered
    passes: bool | None  # all limits; None where that is not known
    seconds: float
    tolerance: str
    effort: str
    version: str
    origin: str  # sweep, search, polish
    attempts: int
    values: Mapping[str, float | int | str] = field(default_factory=dict)  # by key
    figures: Mapping[str, float] = field(default_factory=dict)  # in the unit of the name
    errors: Mapping[str, float] = field(default_factory=dict)  # by figure, in its unit


@dataclass(frozen=True, slots=True)
class Columns:
    """Names of the columns that came up, and how a user calls them."""

    keys: tuple[str, ...]
    figures: tuple[str, ...]
    errors: tuple[str, ...]

    def with_figures(self, chosen: Collection[str] | None) -> "Columns":
        """The same with some of the figures and errors alone; None for all."""
        if chosen is None:
            return self
        figures = tuple(name for name in self.figures if name in chosen)
        return Columns(self.keys, figures, tuple(name for name in self.errors if name in chosen))

    @property
    def names(self) -> tuple[str, ...]:
        """All, as a user calls them: keys, figures, their errors, what each row has."""
        errors = (f"{name}{ERROR_ENDING}" for name in self.errors)
        return (*self.keys, *self.figures, *errors, *FIXED)

    @property
    def select(self) -> str:
        """All columns for a select, in the order that `rows_of` reads."""
        return ", ".join(
            [
                *FIXED,
                *(quoted(KEY + name) for name in self.keys),
                *(quoted(FIGURE + name) for name in self.figures),
                *(quoted(ERROR + name) for name in self.errors),
            ]
        )

    def found(self, name: str) -> tuple[str, Kind] | None:
        """The column of a name in SQL and what it holds, or None."""
        if name in self.keys:
            return quoted(KEY + name), "any"
        if name in self.figures:
            return quoted(FIGURE + name), "number"
        if name.removesuffix(ERROR_ENDING) in self.errors and name.endswith(ERROR_ENDING):
            return quoted(ERROR + name.removesuffix(ERROR_ENDING)), "number"
        if name in FIXED:
            kind: Kind = "flag" if name == "passes" else "text"
            return name, "number" if name in _NUMBERS else kind
        return None

    def nearest(self, name: str) -> str:
        """What a name that does not exist may have meant, as the end of a line."""
        near = difflib.get_close_matches(name, self.names, n=1, cutoff=0.5)
        if near:
            return f"did you mean {near[0]}?"
        inside = [known for known in self.names if name and name in known]
        return f"accepted {', '.join((inside or list(self.names))[:12])}"


def columns_of(names: Iterable[str]) -> Columns:
    """The columns among the names of the table's."""
    known = list(names)

    def ending(start: str) -> tuple[str, ...]:
        return tuple(name.removeprefix(start) for name in known if name.startswith(start))

    return Columns(ending(KEY), ending(FIGURE), ending(ERROR))


def rows_of(columns: Columns, records: Iterable[Sequence[Any]]) -> list[Row]:
    """Rows from records in the order of `Columns.select`."""
    fixed = len(FIXED)
    first, second = fixed + len(columns.keys), fixed + len(columns.keys) + len(columns.figures)
    keys, figures, errors = columns.keys, columns.figures, columns.errors
    before, after = _PASSES, _PASSES + 1
    rows = []
    for record in records:
        flag = record[before]
        given = (
            *record[:before],
            flag if flag is None else flag != 0,
            *record[after:fixed],
            _given(keys, record[fixed:first]),
            _given(figures, record[first:second]),
            _given(errors, record[second:]),
        )
        rows.append(Row(*given))
    return rows


def _given(names: Sequence[str], values: Sequence[Any]) -> dict[str, Any]:
    made = dict(zip(names, values, strict=True))
    return {n: v for n, v in made.items() if v is not None} if None in values else made


def quoted(name: str) -> str:
    """A column's name as SQL takes it."""
    return '"' + name.replace('"', '""') + '"'
