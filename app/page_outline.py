"""A design's text to its outline at once: findings with lines and keys, or the drawing.

Measured on demo_24s4p_arc, one core: see app/README.md, "The page". What takes long, the search for
what would fit in place of a value that does not, is only made where it is asked for.
"""

import math
import re
import time
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.design_keys import key_steps
from lamwright.geometry.errors import DesignError, GeometryError, LamwrightError
from lamwright.geometry.key_lines import key_lines, line_of
from lamwright.geometry.key_ranges import key_range
from lamwright.geometry.section import CrossSection

from .page_drawing import Record, drawing_record
from .page_folder import Folder
from .page_handles import handle_records, handles, unit_of
from .study import Value
from .study_text import with_values

_LINE = re.compile(r"(?P<file>[^\n]*?):(?P<line>\d+): (?P<said>.*)")
_KEY = re.compile(r"(?P<key>[\w.\[\]]+?)(?: = |: )")


@dataclass(frozen=True, slots=True)
class Found:
    """A fault of a text."""

    text: str
    line: int | None = None
    key: str | None = None


@dataclass(frozen=True, slots=True)
class Outlined:
    """A text, and the machine that it states or why it states none."""

    text: str
    found: tuple[Found, ...] = ()
    machine: Machine | None = None
    section: CrossSection | None = None


def outlined(
    folder: Folder,
    path: str,
    text: str,
    changes: Mapping[str, Value] | None = None,
    *,
    remedies: bool = False,
) -> Outlined:
    """The outline of a design's text with some values changed.

    Args:
        folder: that the design and its cards lie in.
        path: name of the design there.
        text: of the design.
        changes: values by keys as messages write them.
        remedies: say what would fit in place of what does not.

    Raises:
        Outside: a name leads out of the folder.
    """
    if changes:
        try:
            text = with_values(text, changes)
        except (DesignError, ValueError, KeyError, IndexError, TypeError) as error:
            return Outlined(text, (_put_in_place(error, changes),))
    try:
        machine = folder.machine(path, text)
    except DesignError as error:
        return Outlined(text, tuple(_of_lines(str(error), folder.design_file(path).name)))
    try:
        section = cross_section(machine.design, remedies=remedies)
        return Outlined(text, (), machine, section)
    except GeometryError as error:
        told = [(one.key, one.text) for one in error.findings]
        return Outlined(text, _at_keys(text, told), machine)


def outline_record(one: Outlined) -> Record:
    """An outline as the page gets it."""
    machine, section = one.machine, one.section
    return {
        "ok": section is not None,
        "hash": None if machine is None else design_hash(machine.design, machine.cards),
        "name": "" if machine is None else machine.design.name,
        "text": one.text,
        "findings": [{"line": f.line, "key": f.key, "text": f.text} for f in one.found],
        "keys": key_records(one.text),
        "drawing": None if machine is None or section is None else _drawn(machine.design, section),
    }


def timed_outline(
    folder: Folder, path: str, text: str, changes: Mapping[str, Value], *, remedies: bool
) -> Record:
    """The same from a text, with the time it took in ms."""
    began = time.perf_counter()
    record = outline_record(outlined(folder, path, text, changes, remedies=remedies))
    return {**record, "ms": round(1e3 * (time.perf_counter() - began), 2)}


def range_record(folder: Folder, path: str, text: str, key: str) -> Record:
    """How far a key may move, all others as they stand.

    Raises:
        LamwrightError: the design has faults, or no such number.
    """
    one = outlined(folder, path, text)
    if one.machine is None or one.section is None:
        raise LamwrightError(one.found[0].text if one.found else f"{path}: has faults")
    design = one.machine.design
    if not _is_movable(design, one.section, key):
        raise LamwrightError(f"{key[:80]}: no key that can be moved on the drawing")
    found = key_range(design, key)
    return {
        "key": key,
        "value": found.value,
        "unit": unit_of(key),
        "least": {"value": found.least.value, "why": found.least.text},
        "most": {"value": found.most.value, "why": found.most.text},
    }


def key_records(text: str) -> list[Record]:
    """Every number that a text states, with its key, unit and line; none if it is not TOML.

    Neither infinite ones nor those that are none: JSON cannot say them.
    """
    try:
        lines = key_lines(text)
        numbers = list(_numbers("", tomllib.loads(text)))
    except (ValueError, RecursionError):
        return []
    return [
        {"key": key, "value": value, "unit": unit_of(key), "line": line_of(lines, key_steps(key))}
        for key, value in numbers
        if abs(value) < math.inf
    ]


def _is_movable(design: MachineDesign, section: CrossSection, key: str) -> bool:
    if any(handle.key == key for handle in handles(design, section)):
        return True
    from lamwright.solver.design_motion import shape_keys

    return key in shape_keys(design)


def _drawn(design: MachineDesign, section: CrossSection) -> Record:
    return {**drawing_record(section), "handles": handle_records(design, section)}


def _numbers(path: str, value: object) -> Iterator[tuple[str, float | int]]:
    """Keys as messages write them; numbers of plain lists are left out, no text changes them."""
    if isinstance(value, dict):
        for name, item in value.items():
            yield from _numbers(f"{path}.{name}" if path else str(name), item)
    elif isinstance(value, list) and all(isinstance(item, dict) for item in value):
        for number, item in enumerate(value, start=1):
            yield from _numbers(f"{path}[{number}]", item)
    elif isinstance(value, int | float) and not isinstance(value, bool):
        yield path, value


def _put_in_place(error: Exception, changes: Mapping[str, Value]) -> Found:
    key = next(iter(changes))
    said = str(error) if isinstance(error, LamwrightError) else f"{key}: no such key in this text"
    return Found(" ".join(said.split())[:400], None, key)


def _of_lines(said: str, file: str) -> Iterator[Found]:
    """Findings of an error's lines; those of other files, as of cards, have no line here."""
    for row in said.split("\n"):
        placed = _LINE.fullmatch(row)
        if placed is None or placed["file"] != file:
            yield Found(row)
            continue
        key = _KEY.match(placed["said"])
        yield Found(placed["said"], int(placed["line"]), key["key"] if key else None)


def _at_keys(text: str, told: list[tuple[str, str]]) -> tuple[Found, ...]:
    lines = key_lines(text)
    return tuple(Found(said, line_of(lines, key_steps(key)), key) for key, said in told)
