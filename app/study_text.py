"""The design file of a study's point: the base's text with other values, comments and order kept.

What the base states is changed in place; what it leaves out is put below the header of its table.
Every change is read back, so that a text of unusual layout is refused instead of misread.
"""

import re
import tomllib
from collections.abc import Mapping, Sequence
from typing import Any

from lamwright.geometry.design import BarrierDesign
from lamwright.geometry.design_keys import key_name, key_steps
from lamwright.geometry.errors import DesignError
from lamwright.geometry.key_lines import KeyPath, key_lines, toml_read
from lamwright.geometry.restated import restated

from .study import Value

_HEADER = re.compile(r"\s*\[")
_BARRIER = re.compile(r"\s*\[\[\s*rotor\s*\.\s*barrier\s*\]\]")


def with_values(text: str, values: Mapping[str, Value]) -> str:
    """The TOML `text` of a design with other values, stated there or not.

    Args:
        text: valid TOML.
        values: by keys as messages write them, without `[*]`.

    Raises:
        DesignError: a value cannot be put into this text; one line.
    """
    if not values:
        return text
    lines = key_lines(text)
    old = {key: value for key, value in values.items() if key_steps(key) in lines}
    changed = restated(text, old)
    for key, value in values.items():
        if key not in old:
            changed = _inserted(changed, key, value)
    return changed


def with_barriers(text: str, barriers: Sequence[BarrierDesign], why: str) -> str:
    """The TOML `text` of a design with other tables [[rotor.barrier]], below a comment.

    Raises:
        DesignError: the text states its barriers in another way than by these tables.
    """
    kept: list[str] = []
    above: list[str] = []  # comments that may belong to the next header
    at, inside = -1, False
    for row in text.split("\n"):
        if _HEADER.match(row):
            was_inside, inside = inside, _BARRIER.match(row) is not None
            kept += above if was_inside and not inside else []
            at = len(kept) if inside and at < 0 else at
        if not inside:
            kept.append(row)
        above = [*above, row] if row.lstrip().startswith("#") else []
    tables = [_table_text(barrier) for barrier in barriers]
    new = [f"# {why}", *(row for table in tables for row in (*table, ""))]
    changed = "\n".join((*kept[:at], *new, *kept[at:]))
    _raise_unless(changed, text, barriers)
    return changed


def _table_text(barrier: BarrierDesign) -> list[str]:
    stated = barrier.model_dump(exclude_defaults=True, exclude_none=True)
    return ["[[rotor.barrier]]", *(f"{key} = {toml_text(item)}" for key, item in stated.items())]


def _raise_unless(changed: str, text: str, barriers: Sequence[BarrierDesign]) -> None:
    """Refuse a text that does not hold the barriers, or in which anything else has changed."""
    fault = "rotor.barrier: cannot be laid out anew in this text; accepted [[rotor.barrier]] tables"
    try:
        data, before = toml_read(changed), toml_read(text)
        found, others = len(data["rotor"]["barrier"]), _without_barriers(data)
        if others != _without_barriers(before) or "barrier" not in before["rotor"]:
            raise DesignError(fault)
    except (tomllib.TOMLDecodeError, KeyError):
        raise DesignError(fault) from None
    if found != len(barriers):
        raise DesignError(fault)


def _without_barriers(data: Mapping[str, Any]) -> dict[str, Any]:
    rotor = {key: value for key, value in data["rotor"].items() if key != "barrier"}
    return {**data, "rotor": rotor}


def _inserted(text: str, key: str, value: Value) -> str:
    """The text with a key that it has not got, below its table's header."""
    *table, name = key_steps(key)
    rows, line = text.split("\n"), f"{key_name(key)} = {toml_text(value)}"
    header = _header_row(text, tuple(table))
    if header is not None:
        rows.insert(header + 1, line)
    elif len(table) == 1:
        rows += [f"[{table[0]}]", line, ""]
    else:
        raise DesignError(f"{key}: its table is not in the base design; accepted with it there")
    changed = "\n".join(rows)
    part: object = _parsed(changed, key)
    for step in (*table, name):
        part = part[step]  # type: ignore[index]
    if part != value:
        raise DesignError(f"{key}: cannot be put into the base design; accepted it stated there")
    return changed


def _parsed(text: str, key: str) -> object:
    try:
        return toml_read(text)
    except tomllib.TOMLDecodeError:
        text = f"{key}: cannot be put into the base design; accepted it stated there"
        raise DesignError(text) from None


def _header_row(text: str, table: KeyPath) -> int | None:
    """Number from 0 of a table's header row, None where there is none."""
    line = key_lines(text).get(table)
    if line is None or not _HEADER.match(text.split("\n")[line - 1]):
        return None
    return line - 1


def toml_text(value: object) -> str:
    """A number or text as TOML writes it; numbers with nine digits, as `restated` does."""
    if isinstance(value, str):
        escaped = value.replace("\\", "\\\\").replace('"', '\\"')
        return f'"{escaped}"'
    return f"{value:.9g}"
