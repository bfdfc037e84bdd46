"""A design file as text: every key with the reason for its value in a comment above it."""

import json
import textwrap
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

WIDTH = 96  # of a comment's lines

Single = str | int | float
Value = Single | tuple[str, ...] | tuple[float, ...] | Mapping[str, Single]
Data = dict[str, object]


@dataclass(frozen=True, slots=True)
class Line:
    """One key, its value and why it has it; no comment where the reason is empty."""

    key: str
    value: Value
    why: str = ""


@dataclass(frozen=True, slots=True)
class DesignTable:
    """One table of a design file; `header` is empty for the keys before all tables."""

    header: str  # as "stator"; "rotor.barrier" is an array of tables
    lines: tuple[Line, ...]
    about: str = ""  # a comment above the table

    def value(self, key: str) -> Value | None:
        """The value of a key, None where the table has not got it."""
        return next((line.value for line in self.lines if line.key == key), None)


ARRAYS = ("rotor.barrier",)


def design_text(tables: Sequence[DesignTable], head: str) -> str:
    """The tables as a TOML file with a comment at its head."""
    parts = [_comment(head)]
    for table in tables:
        rows = [_comment(table.about)] if table.about else []
        if table.header:
            brackets = "[[{}]]" if table.header in ARRAYS else "[{}]"
            rows.append(brackets.format(table.header))
        for line in table.lines:
            if line.why:
                rows.append(_comment(line.why))
            rows.append(f"{line.key} = {toml_value(line.value)}")
        parts.append("\n".join(rows))
    return "\n\n".join(parts) + "\n"


def design_data(tables: Iterable[DesignTable]) -> Data:
    """The tables as the reader of design files would see them, arrays as tuples."""
    data: Data = {}
    for table in tables:
        values: Data = {line.key: line.value for line in table.lines}
        names = table.header.split(".") if table.header else []
        inner = data
        for name in names[:-1]:
            nested = inner.setdefault(name, {})
            assert isinstance(nested, dict)
            inner = nested
        if not names:
            inner.update(values)
        elif table.header in ARRAYS:
            before = inner.get(names[-1], ())
            assert isinstance(before, tuple)
            inner[names[-1]] = (*before, values)
        else:
            inner[names[-1]] = values
    return data


def toml_value(value: Value) -> str:
    """A value as TOML writes it."""
    if isinstance(value, tuple):
        return f"[{', '.join(toml_value(item) for item in value)}]"
    if isinstance(value, Mapping):
        return f"{{ {', '.join(f'{key} = {toml_value(item)}' for key, item in value.items())} }}"
    if isinstance(value, str):
        return json.dumps(value)  # TOML's basic strings have the same escapes
    return repr(value)


def _comment(text: str) -> str:
    rows = []
    for paragraph in text.split("\n"):
        rows += textwrap.wrap(paragraph, WIDTH, break_long_words=False, break_on_hyphens=False)
    return "\n".join(f"# {row}" for row in rows)
