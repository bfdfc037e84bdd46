"""What is wrong with a study's tables: keys, values, figures and the size of its grid."""

import difflib
from collections.abc import Iterator

from lamwright.geometry.design_faults import shown
from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import DesignError
from lamwright.geometry.key_lines import KeyPath

from .study import Study
from .study_figures import known_figures, quick_figures
from .study_keys import EACH, LAYOUT, KeyKind, key_kind, keys_meant
from .study_layout import layout_fault
from .study_points import counted
from .study_tables import GoalTable, LimitTable, StudyTables, VaryTable

ROUNDING = 1e-9  # of a range: 3.3 - 3.2 is a little less than 0.1

Faults = Iterator[tuple[KeyPath, str]]  # where, and the line's text


def table_faults(tables: StudyTables, machine: Machine) -> Faults:
    """All faults of keys, values, limits and goals.

    Args:
        tables: of the study.
        machine: its base.
    """
    yield from _key_faults(tables, machine)
    yield from _figure_faults(tables)
    yield from _goal_faults(tables)


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
    if vary.step is not None and vary.step > (vary.most - vary.least) * (1.0 + ROUNDING):
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


def _goal_faults(tables: StudyTables) -> Faults:
    """Two goals on one figure."""
    names = [goal.figure for goal in tables.goal]
    for k, name in enumerate(names):
        if name in names[:k]:
            told = f"goal[{k + 1}].figure = {shown(name)}"
            yield ("goal", k, "figure"), f"{told}: stands twice; accepted each figure once"


def grid_faults(study: Study) -> Faults:
    """Whether all points of a grid can be listed and are not too many."""
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
