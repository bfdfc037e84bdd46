"""Which keys a study may vary, and what values they take: from the design's own tables.

Keys of a design file stand as its messages write them, `rotor.barrier[1].depth_mm`; with
`rotor.barrier[*]` a key is that of every barrier. Those of `layout` have all barriers of the pole
laid out anew, see `study_layout`.
"""

import difflib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_faults import shown
from lamwright.geometry.design_keys import key_steps, stated
from lamwright.geometry.errors import DesignError

Schema = Mapping[str, Any]
EACH = "[*]"
LAYOUT = "layout."


@dataclass(frozen=True, slots=True)
class KeyKind:
    """What values a key takes."""

    is_number: bool
    whole: bool = False
    choices: tuple[float | int | str, ...] = ()  # none: any
    low: float | None = None
    high: float | None = None


LAYOUT_KINDS: Mapping[str, KeyKind] = {
    "layout.barriers": KeyKind(True, whole=True, low=1, high=6),
    "layout.end_angle_deg": KeyKind(True, low=1.0, high=90.0),
    "layout.places": KeyKind(True, whole=True, low=4, high=60),
    "layout.first_place": KeyKind(True, low=0.3, high=1.5),
    "layout.insulation_ratio": KeyKind(True, low=0.1, high=0.7),
    "layout.rib_factor": KeyKind(True, low=0.5, high=10.0),
    "layout.rib_margin": KeyKind(True, low=0.5, high=10.0),
}


def key_kind(base: MachineDesign, key: str) -> KeyKind:
    """What values a key takes.

    Args:
        base: design of the study.
        key: as the study states it.

    Raises:
        DesignError: there is no such key to vary; fault and remedy.
    """
    if key.startswith(LAYOUT):
        if key not in LAYOUT_KINDS:
            raise DesignError(_unknown(key, list(LAYOUT_KINDS)))
        return LAYOUT_KINDS[key]
    root, node, gone = _schema(), _schema(), ""
    for step in key_steps(key.replace(EACH, "[1]")):
        if isinstance(step, int):
            node = _item(root, node, base, gone, step)
            gone += f"[{step + 1}]"
            continue
        names = node.get("properties", {})
        if step not in names:
            here = f"{gone}." if gone else ""
            known = [here + name for name in names]
            raise DesignError(_unknown(here + step, known or [gone]))
        node, gone = _resolved(root, names[step]), f"{gone}.{step}" if gone else step
    return _kind(node, gone)


def keys_meant(base: MachineDesign, key: str) -> tuple[str, ...]:
    """The keys of the design that a study's key stands for: several where it has `[*]`."""
    if EACH not in key:
        return (key,)
    array = key.split(EACH)[0]
    items = stated(base, array)
    count = len(items) if isinstance(items, tuple) else 0
    return tuple(key.replace(EACH, f"[{k + 1}]") for k in range(count))


@lru_cache(maxsize=1)
def _schema() -> Schema:
    return MachineDesign.model_json_schema()


def _item(root: Schema, node: Schema, base: MachineDesign, array: str, place: int) -> Schema:
    items = stated(base, array) if node.get("type") == "array" else None
    if not isinstance(items, tuple):
        raise DesignError(f"{array} is no array; accepted {array} without a number")
    if not 0 <= place < len(items):
        raise DesignError(f"the base has {len(items)} of {array}; accepted 1 to {len(items)}")
    return _resolved(root, node["items"])


def _kind(node: Schema, key: str) -> KeyKind:
    if "properties" in node:
        near = ", ".join(f"{key}.{name}" for name in node["properties"])
        raise DesignError(f"a table; accepted one of its keys, {near}")
    if node.get("type") == "array":
        raise DesignError(f"an array; accepted one of its keys, {key}[1] and so on")
    is_number = node.get("type") in ("number", "integer")
    return KeyKind(
        is_number,
        whole=node.get("type") == "integer",
        choices=tuple(node.get("enum", ())),
        low=node.get("minimum", node.get("exclusiveMinimum")),
        high=node.get("maximum", node.get("exclusiveMaximum")),
    )


def _unknown(key: str, known: list[str]) -> str:
    near = difflib.get_close_matches(key, known, n=1, cutoff=0.5)
    if near:
        return f"no such key; did you mean {shown(near[0])}?"
    return f"no such key; accepted {', '.join(known)}"


def _resolved(root: Schema, node: Schema) -> Schema:
    """Follow references; of a key that may be absent, take what it is when present."""
    if "anyOf" in node:
        node = next(option for option in node["anyOf"] if option.get("type") != "null")
    if "allOf" in node:
        node = node["allOf"][0]
    if "$ref" in node:
        name: str = node["$ref"].rsplit("/", 1)[-1]
        node = root["$defs"][name]
    return node
