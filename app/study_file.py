"""Study files: TOML in, a checked study out, every fault at once in one line each.

A fault is as of a design file: `ends.toml:7: vary[1].key = "rotor.gap": no such key; did you mean
"rotor.gap_mm"?`. The base design is read here, with its cards, so a study that is read can run.
"""

import difflib
import os
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

from lamwright.geometry.design_faults import shown
from lamwright.geometry.design_file import Machine, faults_at, read_machine, read_tables
from lamwright.geometry.design_keys import stated
from lamwright.geometry.errors import DesignError
from lamwright.geometry.key_lines import KeyPath
from lamwright.geometry.restated import restated

from .study import Sampling, Study, StudyGoal, StudyKey, StudyLimit
from .study_figures import known_figures, quick_figures
from .study_keys import EACH, LAYOUT, KeyKind, key_kind, keys_meant
from .study_layout import layout_fault
from .study_points import counted
from .study_tables import GoalTable, LimitTable, StudyTables, VaryTable

Faults = Iterator[tuple[KeyPath, str]]

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
    tables, text = read_tables(path, StudyTables)
    if found := [*_base_faults(path, tables)]:
        raise faults_at(path, text, found)
    base_path = path.parent / tables.base
    machine = read_machine(base_path)
    found = [*_key_faults(tables, machine), *_figure_faults(tables), *_name_faults(tables)]
    if found:
        raise faults_at(path, text, found)
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
    )
    if not is_searched and (found := [*_grid_faults(study)]):
        raise faults_at(path, text, found)
    return study


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


def _key_faults(tables: StudyTables, machine: Machine) -> Faults:
    """Keys that are not there, or that do not go together."""
    names = [vary.key for vary in tables.vary]
    has_layout = any(name.startswith(LAYOUT) for name in names)
    for k, vary in enumerate(tables.vary):
        at, told = ("vary", k, "key"), f"vary[{k + 1}].key = {shown(vary.key)}"
        if vary.key in names[:k]:
            yield at, f"{told}: stands twice; accepted each key once"
            continue
        try:
            kind = key_kind(machine.design, vary.key)
        except DesignError as error:
            yield at, f"{told}: {error}"
            continue
        if not keys_meant(machine.design, vary.key):
            yield at, f"{told}: the base has none; accepted with one of them in the base"
        elif vary.key.startswith(LAYOUT) and (fault := layout_fault(machine.design)):
            yield at, f"{told}: {fault}"
        elif has_layout and vary.key.startswith("rotor.barrier") and EACH not in vary.key:
            yield at, f"{told}: barriers are laid out anew; accepted rotor.barrier[*] or no layout"
        elif vary.key == "layout.places" and "layout.end_angle_deg" in names:
            yield at, f"{told}: layout.end_angle_deg says where barriers end; accepted one of both"
        else:
            yield from _value_faults(k, vary, kind)


def _value_faults(k: int, vary: VaryTable, kind: KeyKind) -> Faults:
    """Values and ranges that the key cannot take."""
    here, told = ("vary", k), f"vary[{k + 1}]"
    if vary.values is not None:
        others = [key for key in ("least", "most", "step", "mean", "deviation") if _has(vary, key)]
        if others:
            yield (*here, others[0]), f"{told}.{others[0]}: beside values; accepted one of both"
        if len(set(vary.values)) < len(vary.values):
            yield (*here, "values"), f"{told}.values: one stands twice; accepted each value once"
        for value in vary.values:
            if fault := _unfit(value, kind):
                yield (*here, "values"), f"{told}.values = {shown(value)}: {fault}"
        return
    if not kind.is_number:
        remedy = _one_of(kind) or "text in quotes"
        yield here, f"{told}: {vary.key} takes text; accepted values = [...] with {remedy}"
        return
    missing = [key for key in ("least", "most") if not _has(vary, key)]
    if missing or vary.least is None or vary.most is None:
        remedy = "accepted values, or least and most with or without step"
        yield here, f"{told}.{missing[0]}: missing; {remedy}"
        return
    if vary.least >= vary.most:
        fault = f"empty range, least is {vary.least:g}; accepted above {vary.least:g}"
        yield (*here, "most"), f"{told}.most = {vary.most:g}: {fault}"
        return
    for key, value in (("least", vary.least), ("most", vary.most)):
        if fault := _unfit(value, kind):
            yield (*here, key), f"{told}.{key} = {value:g}: {fault}"
    yield from _step_faults(k, vary, kind)


def _step_faults(k: int, vary: VaryTable, kind: KeyKind) -> Faults:
    here, told = ("vary", k), f"vary[{k + 1}]"
    assert vary.least is not None
    assert vary.most is not None
    if vary.step is not None and vary.step > vary.most - vary.least:
        room = vary.most - vary.least
        yield (*here, "step"), f"{told}.step = {vary.step:g}: too large; accepted up to {room:g}"
    if vary.step is not None and kind.whole and vary.step != round(vary.step):
        fault = f"{vary.key} takes whole numbers; accepted 1 or more, whole"
        yield (*here, "step"), f"{told}.step = {vary.step:g}: {fault}"
    if vary.distribution == "even":
        for key in ("mean", "deviation"):
            if _has(vary, key):
                remedy = 'accepted with distribution = "normal"'
                yield (*here, key), f"{told}.{key}: of no use; {remedy}"


def _has(vary: VaryTable, key: str) -> bool:
    return getattr(vary, key) is not None


def _unfit(value: float | str, kind: KeyKind) -> str:
    """Why a key does not take a value; empty where it does."""
    if isinstance(value, str) == kind.is_number:
        wanted = "numbers" if kind.is_number else "text"
        return f"not what the key takes; accepted {wanted}"
    if kind.choices and value not in kind.choices:
        return f"not one of the choices; accepted {_one_of(kind)}"
    if isinstance(value, str):
        return ""
    if kind.whole and value != round(value):
        return "not a whole number; accepted whole numbers"
    low, high = kind.low, kind.high
    span = f"{'' if low is None else f'{low:g}'} to {'' if high is None else f'{high:g}'}".strip()
    if (low is not None and value < low) or (high is not None and value > high):
        return f"out of range; accepted {span}"
    return ""


def _one_of(kind: KeyKind) -> str:
    return " or ".join(shown(choice) for choice in kind.choices)


def _figure_faults(tables: StudyTables) -> Faults:
    """Limits and goals on figures that the study does not compute."""
    known = known_figures()
    computed = known if tables.effort == "full" else quick_figures()
    rows: list[tuple[str, int, GoalTable | LimitTable]] = [
        *(("limit", k, one) for k, one in enumerate(tables.limit)),
        *(("goal", k, one) for k, one in enumerate(tables.goal)),
    ]
    for name, k, one in rows:
        at, told = (name, k, "figure"), f"{name}[{k + 1}].figure = {shown(one.figure)}"
        if one.figure not in known:
            near = difflib.get_close_matches(one.figure, known, n=1, cutoff=0.5)
            remedy = f"did you mean {shown(near[0])}?" if near else f"accepted {', '.join(known)}"
            yield at, f"{told}: no such figure; {remedy}"
        elif one.figure not in computed:
            yield at, f'{told}: not computed by effort = "quick"; accepted effort = "full"'
    for k, limit in enumerate(tables.limit):
        if limit.least is None and limit.most is None:
            yield ("limit", k), f"limit[{k + 1}]: neither least nor most; accepted one or both"
        elif limit.least is not None and limit.most is not None and limit.least > limit.most:
            fault = f"no figure is within, least is {limit.least:g}"
            remedy = f"accepted {limit.least:g} or more"
            yield ("limit", k, "most"), f"limit[{k + 1}].most = {limit.most:g}: {fault}; {remedy}"


def _name_faults(tables: StudyTables) -> Faults:
    """Two goals on one figure."""
    names = [goal.figure for goal in tables.goal]
    for k, name in enumerate(names):
        if name in names[:k]:
            told = f"goal[{k + 1}].figure = {shown(name)}"
            yield ("goal", k, "figure"), f"{told}: stands twice; accepted each figure once"


def _grid_faults(study: Study) -> Faults:
    """Whether all points can be listed and are not too many."""
    if study.sampling.kind != "grid":
        return
    endless = [k for k, key in enumerate(study.keys) if key.values is None]
    for k in endless:
        remedy = 'accepted with a step, or sample.kind = "sobol" or "halton"'
        yield ("vary", k), f"vary[{k + 1}].step: missing, a full grid needs it; {remedy}"
    count = 0 if endless else counted(study)
    if count > study.most_designs:
        sizes = " x ".join(str(len(key.values or ())) for key in study.keys)
        remedy = "accepted fewer values, a larger most_designs, or sample.kind"
        many = f"{sizes} = {count}" if len(study.keys) > 1 else f"{count}"
        fault = f"the grid has {many} designs; {remedy}"
        yield ("most_designs",), f"most_designs = {study.most_designs}: {fault}"


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
