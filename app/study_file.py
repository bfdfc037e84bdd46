"""Study files: TOML in, a checked study out, every fault at once in one line each.

A fault is as of a design file: `ends.toml:7: vary[1].key = "rotor.gap": no such key; did you mean
"rotor.gap_mm"?`. The base design is read here, with its cards, so a study that is read can run.
"""

import difflib
import os
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from lamwright.geometry.design_faults import shown
from lamwright.geometry.design_file import Machine, faults_at, read_machine, read_tables
from lamwright.geometry.design_keys import stated
from lamwright.geometry.errors import DesignError
from lamwright.geometry.key_lines import KeyPath
from lamwright.geometry.restated import restated

from .study import Sampling, Study, StudyError, StudyGoal, StudyKey, StudyLimit
from .study_faults import Faults, grid_faults, table_faults
from .study_keys import KeyKind, key_kind
from .study_tables import StudyTables, VaryTable

QUICK_SECONDS, FULL_SECONDS = 60.0, 1800.0  # that one design may take, unless stated
CARD_KEYS = ("steel.rotor_card", "steel.stator_card", "magnet.card")
DRAWING_KEYS = ("stator.outline_dxf", "rotor.outline_dxf")


def read_study(path: Path, *, is_searched: bool = False) -> Study:
    """The study in the TOML file `path`, with all that its designs need.

    Args:
        path: study file.
        is_searched: whether its points are asked for one by one: then they need not be countable.

    Raises:
        DesignError: the study, its base or a card cannot be read or used; one line a fault.
    """
    try:
        tables, text = read_tables(path, StudyTables)
    except DesignError as error:
        raise StudyError(str(error)) from None
    if found := [*_base_faults(path, tables)]:
        raise _faults(path, text, found)
    base_path = path.parent / tables.base
    machine = read_machine(base_path)
    if found := [*table_faults(tables, machine)]:
        raise _faults(path, text, found)
    keys = tuple(_study_key(vary, key_kind(machine.design, vary.key)) for vary in tables.vary)
    named = _files_named(machine, keys)
    base_text = base_path.read_text(encoding="utf-8-sig").replace("\r\n", "\n")
    study = Study(
        name=tables.name,
        note=tables.note,
        path=path,
        base_name=base_path.name,
        base_text=restated(base_text, named.stated),
        cards={name: file.read_text(encoding="utf-8-sig") for name, file in named.cards.items()},
        drawings={name: file.read_bytes() for name, file in named.drawings.items()},
        keys=keys,
        effort=tables.effort,
        tolerance=tables.tolerance,
        limits=tuple(StudyLimit(one.figure, one.least, one.most) for one in tables.limit),
        goals=tuple(StudyGoal(one.figure, one.sense) for one in tables.goal),
        sampling=Sampling(tables.sample.kind, tables.sample.designs, tables.sample.seed),
        most_designs=tables.most_designs,
        seconds=tables.most_seconds
        or (QUICK_SECONDS if tables.effort == "quick" else FULL_SECONDS),
        errors=tables.errors and tables.effort == "quick",
    )
    if not is_searched and (found := [*grid_faults(study)]):
        raise _faults(path, text, found)
    return study


def _faults(path: Path, text: str, found: Sequence[tuple[KeyPath, str]]) -> StudyError:
    return StudyError(str(faults_at(path, text, found)))


def _base_faults(path: Path, tables: StudyTables) -> Faults:
    """Whether the base design is there."""
    base = path.parent / tables.base
    told = f"base = {shown(tables.base)}"
    if base.is_dir():
        yield ("base",), f"{told}: this is a folder; accepted a design file"
    elif not base.is_file():
        names = [item.name for item in base.parent.glob("*.toml")] if base.parent.is_dir() else []
        near = difflib.get_close_matches(base.name, names, n=1)
        remedy = "accepted a design file's name, counted from the study's folder"
        if near:
            meant = Path(tables.base).with_name(near[0]).as_posix()
            remedy = f"did you mean {shown(meant)}?"
        yield ("base",), f"{told}: no such file; {remedy}"


def _study_key(vary: VaryTable, kind: KeyKind) -> StudyKey:
    if vary.values is not None:
        values = tuple(_as_key_takes(value, kind) for value in vary.values)
        numbers = [float(value) for value in values if not isinstance(value, str)]
        low, high = (min(numbers), max(numbers)) if kind.is_number else (None, None)
        return StudyKey(vary.key, choices=values, low=low, high=high, whole=kind.whole)
    assert vary.least is not None
    assert vary.most is not None
    is_normal = vary.distribution == "normal"
    middle, room = 0.5 * (vary.least + vary.most), vary.most - vary.least
    return StudyKey(
        vary.key,
        low=vary.least,
        high=vary.most,
        step=vary.step or (1.0 if kind.whole else None),
        whole=kind.whole,
        distribution=vary.distribution,
        mean=(middle if vary.mean is None else vary.mean) if is_normal else None,
        deviation=(vary.deviation or 0.25 * room) if is_normal else None,
    )


def _as_key_takes(value: float | str, kind: KeyKind) -> float | int | str:
    if isinstance(value, str):
        return value
    return round(value) if kind.whole else float(value)


@dataclass(frozen=True, slots=True)
class _Named:
    """Files that the designs of a study name, by the names that the tasks use."""

    stated: Mapping[str, str]  # names to be put into the base, by key
    cards: Mapping[str, Path]
    drawings: Mapping[str, Path]


def _files_named(machine: Machine, keys: tuple[StudyKey, ...]) -> _Named:
    """All files, those of the base and those that a key chooses among."""
    folder = machine.path.parent
    stated_names: dict[str, str] = {}
    files: dict[str, dict[str, Path]] = {"cards": {}, "drawings": {}}
    for kind, names in (("cards", CARD_KEYS), ("drawings", DRAWING_KEYS)):
        for key in names:
            own = stated(machine.design, key)
            choices = next((one.choices for one in keys if one.key == key), None)
            for name in (own, *(choices or ())):
                if not isinstance(name, str):
                    continue
                path = folder / name
                if not path.is_file():
                    raise DesignError(f"{key} = {shown(name)}: no such file; accepted one")
                if Path(name).is_absolute():
                    name = Path(os.path.relpath(path, folder)).as_posix()
                    stated_names[key] = name
                files[kind][name] = path
    return _Named(stated_names, files["cards"], files["drawings"])
