"""A task: all that one evaluation needs, small and complete, so that any process can do it."""

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from functools import lru_cache
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine
from lamwright.geometry.design_keys import replaced
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.first_rotor import with_barriers as with_tables
from lamwright.geometry.key_lines import toml_read

from .study import Effort, Study, StudyLimit, Values
from .study_keys import LAYOUT, keys_meant
from .study_layout import laid_out_barriers
from .study_machine import machine_of
from .study_text import with_barriers, with_values
from .version import version

if TYPE_CHECKING:
    from lamwright.solver.tolerance import ToleranceName

_UNTOLD = ("name", "note")  # of a design: no figure depends on them


@dataclass(frozen=True, slots=True)
class Task:
    """One design of a study with the text of all files it names.

    Two tasks of one `hash` have the same evaluation: it covers design, cards, drawings, effort,
    tolerance and the program's version.
    """

    hash: str
    values: Values
    design_name: str  # of the file, for messages
    design_text: str
    cards: Mapping[str, str]
    drawings: Mapping[str, bytes] = field(default_factory=dict)
    effort: Effort = "quick"
    tolerance: "ToleranceName" = "coarse"
    limits: tuple[StudyLimit, ...] = ()
    errors: bool = False  # whether quick figures get error bars
    fault: str = ""  # why the values give no design at all; the text is then the base's


def task_of(study: Study, values: Values) -> Task:
    """The task of one point of a study.

    Values that give no design make a task with a fault: its evaluation says so.
    """
    task = Task(
        hash="",
        values=dict(values),
        design_name=study.base_name,
        design_text=study.base_text,
        cards=study.cards,
        drawings=study.drawings,
        effort=study.effort,
        tolerance=study.tolerance,
        limits=study.limits,
        errors=study.errors,
    )
    try:
        task = replace(task, design_text=_text(study, values))
    except LamwrightError as error:
        task = replace(task, fault=" ".join(str(error).split("\n")))
    return replace(task, hash=_hash(task))


def _text(study: Study, values: Values) -> str:
    """The point's design file."""
    layout = {key: value for key, value in values.items() if key.startswith(LAYOUT)}
    base = machine_of_study(study).design
    later = {
        key: value
        for key, value in values.items()
        if layout and key not in layout and key.startswith("rotor.barrier")
    }
    first = {key: value for key, value in values.items() if key not in (*layout, *later)}
    stated = {key: value for name, value in first.items() for key in keys_meant(base, name)}
    text = with_values(study.base_text, stated)
    if not layout:
        return text
    machine = machine_of_study(study)
    if any(isinstance(value, str) for value in stated.values()):  # another card, maybe
        machine = machine_of(study.base_name, text, study.cards, study.drawings)
    design = machine.design
    for key, value in stated.items():
        if not isinstance(value, str):
            design = replaced(design, key, value)
    barriers = laid_out_barriers(design, machine.rotor_steel, layout)
    told = ", ".join(f"{key} = {value}" for key, value in layout.items())
    text = with_barriers(text, barriers, f"Laid out by the rules of `start`: {told}")
    design = design.model_copy(update={"rotor": with_tables(design.rotor, barriers)})
    stated = {key: value for name, value in later.items() for key in keys_meant(design, name)}
    return with_values(text, stated)


def machine_of_study(study: Study) -> Machine:
    """The machine of a study's base design."""
    return _base(
        study.base_name,
        study.base_text,
        tuple(study.cards.items()),
        tuple(study.drawings.items()),
    )


@lru_cache(maxsize=2)
def _base(
    name: str,
    text: str,
    cards: tuple[tuple[str, str], ...],
    drawings: tuple[tuple[str, bytes], ...],
) -> Machine:
    return machine_of(name, text, dict(cards), dict(drawings))


def _hash(task: Task) -> str:
    """SHA-256 in hex of all that an evaluation depends on, for any layout of the same values."""
    read = toml_read(task.design_text)
    design = {key: value for key, value in read.items() if key not in _UNTOLD}
    cards = [_card(text) for _, text in sorted(task.cards.items())]
    drawings = [hashlib.sha256(item).hexdigest() for _, item in sorted(task.drawings.items())]
    stated = [_canonical(design), cards, drawings, task.effort, version()]
    if task.effort == "full":
        stated.append(task.tolerance)
    elif task.errors:
        stated.append("errors")
    if task.fault:
        stated.append([task.fault, sorted(task.values.items())])
    return hashlib.sha256(json.dumps(stated, sort_keys=True).encode()).hexdigest()


@lru_cache(maxsize=16)
def _card(text: str) -> object:
    return _canonical(toml_read(text))


def _canonical(value: object) -> object:
    """Numbers as real ones, so that 40 and 40.0 are the same."""
    if isinstance(value, dict):
        return {key: _canonical(item) for key, item in value.items()}
    if isinstance(value, list):
        return [_canonical(item) for item in value]
    if isinstance(value, int | float) and not isinstance(value, bool):
        return float(value)
    return str(value)
