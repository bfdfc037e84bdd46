"""What a validation found, in a designer's words: key, value, fault, and what is accepted.

The accepted type and range are read from the tables of `design`, so that they are stated once.
"""

import difflib
import math
from collections.abc import Mapping
from typing import Any

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails

from .design_slots import KEYS_OF_SHAPE
from .key_lines import KeyPath

Schema = Mapping[str, Any]

_LONGEST_VALUE = 60  # characters of a value shown; a fault stays on one line of a terminal


def faults(error: ValidationError, model: type[BaseModel]) -> list[tuple[KeyPath, str]]:
    """Key path and text of each fault, in the order of the tables.

    A misspelt key is one fault, not two: the missing key it stands for is not listed again.
    """
    root = model.model_json_schema()
    details = error.errors(include_url=False)
    unknown = {d["loc"]: _meant(root, d["loc"]) for d in details if d["type"] == "extra_forbidden"}
    missing = {d["loc"] for d in details if d["type"] == "missing"}
    replaced = {(*loc[:-1], meant) for loc, meant in unknown.items() if meant}
    found = []
    for detail in details:
        loc = detail["loc"]
        if detail["type"] == KEYS_OF_SHAPE:
            for key, text in detail["ctx"]["found"]:
                found.append(((*loc, key), f"{key_text((*loc, key))}: {text}"))
        elif loc in unknown:
            found.append((loc, _unknown_text(root, detail, unknown[loc])))
        elif not (loc in missing and loc in replaced) and not _is_miscount(detail):
            found.append((_place(detail), _text(root, detail)))
    return found


def key_text(path: KeyPath) -> str:
    """A key path as a user writes it: dotted, tables of an array counted from 1."""
    text = ""
    for part in path:
        if isinstance(part, int):
            text += f"[{part + 1}]"
        else:
            text += ("." if text else "") + (part if _is_bare(part) else shown(part))
    return text


def shown(value: object) -> str:
    """A value as TOML writes it, on one line and not too long."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        safe = "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in value)
        return f'"{_clipped(safe)}"'
    if isinstance(value, int) and abs(value) >= 10**_LONGEST_VALUE:
        return f"a number of over {_LONGEST_VALUE} digits"  # str() may refuse it altogether
    return _clipped(str(value))


def _clipped(text: str) -> str:
    return text if len(text) <= _LONGEST_VALUE else text[: _LONGEST_VALUE - 3] + "..."


def _is_bare(key: str) -> bool:
    return key.isascii() and key.replace("_", "").replace("-", "").isalnum()


def _is_miscount(detail: ErrorDetails) -> bool:
    """Whether an array seems short only because its faulty items were not counted."""
    return detail["type"] == "too_short" and detail["ctx"]["min_length"] <= len(detail["input"])


def _place(detail: ErrorDetails) -> KeyPath:
    """Where to point: at the first table too many, else at the key."""
    loc = detail["loc"]
    return (*loc, detail["ctx"]["max_length"]) if detail["type"] == "too_long" else loc


def _text(root: Schema, detail: ErrorDetails) -> str:
    loc, value = detail["loc"], detail["input"]
    accepted = f"accepted {_accepted(root, _node(root, loc), loc)}"
    key = key_text(loc)
    if detail["type"] == "missing":
        return f"{key}: missing; {accepted}"
    if detail["type"] in ("too_long", "too_short") and isinstance(value, tuple):
        amount = "too many" if detail["type"] == "too_long" else "too few"
        return f"{key} has {len(value)}: {amount}; {accepted}"
    equals = "" if isinstance(value, tuple | Mapping) else f" = {shown(value)}"
    return f"{key}{equals}: {_fault(detail)}; {accepted}"


def _fault(detail: ErrorDetails) -> str:
    kind, value = detail["type"], detail["input"]
    if kind == "finite_number":
        is_nan = isinstance(value, float) and math.isnan(value)
        return "not a number" if is_nan else "not a finite number"
    if kind in ("greater_than", "greater_than_equal"):
        return "too small"
    if kind in ("less_than", "less_than_equal"):
        return "too large"
    if kind == "string_too_short":
        return "too short"
    if kind == "literal_error" and isinstance(value, str | int) and not isinstance(value, bool):
        return "not one of the choices"
    return f"this is {_kind(value)}"


def _kind(value: object) -> str:
    if isinstance(value, bool):
        return "true or false"
    if isinstance(value, str):
        return "text"
    if isinstance(value, int):
        return "a whole number"
    if isinstance(value, float):
        return "a number with a decimal point"
    if isinstance(value, tuple):
        return "an array"
    return "a single table" if isinstance(value, Mapping) else "a date or time"


def _unknown_text(root: Schema, detail: ErrorDetails, meant: str | None) -> str:
    """An unknown key, with the nearest valid one, the table it belongs in, or all valid ones."""
    *table, key = detail["loc"]
    start = f"{key_text(detail['loc'])}: unknown key"
    if meant:
        return f"{start}; did you mean {meant}?"
    siblings = _keys(root, tuple(table))
    homes = [home for home in _homes(root) if key in _keys(root, home)]
    if homes:
        return f"{start}; {key} belongs in {_header(root, homes[0]) or 'the top of the file'}"
    return f"{start}; accepted {', '.join(siblings)}"


def _meant(root: Schema, loc: KeyPath) -> str | None:
    near = difflib.get_close_matches(str(loc[-1]), _keys(root, loc[:-1]), n=1, cutoff=0.6)
    return near[0] if near else None


def _homes(root: Schema) -> list[KeyPath]:
    """The top of the file, its tables, and the tables of arrays in them."""
    homes: list[KeyPath] = [()]
    for home in homes:
        for key in _keys(root, home):
            node = _node(root, (*home, key))
            if "properties" in node:
                homes.append((*home, key))
            elif "properties" in _resolved(root, node.get("items", {})):
                homes.append((*home, key, 0))
    return homes


def _header(root: Schema, path: KeyPath) -> str:
    """The header of the table at `path`, as the file writes it."""
    name = ".".join(part for part in path if isinstance(part, str))
    if not path:
        return ""
    return f"[[{name}]]" if isinstance(path[-1], int) else f"[{name}]"


def _keys(root: Schema, table: KeyPath) -> list[str]:
    return list(_node(root, table).get("properties", {}))


def _node(root: Schema, loc: KeyPath) -> Schema:
    """The schema of the key at `loc`."""
    node = root
    for part in loc:
        node = node["items"] if isinstance(part, int) else node["properties"][part]
        node = _resolved(root, node)
    return node


def _resolved(root: Schema, node: Schema) -> Schema:
    """Follow a reference; of a key that may be absent, take what it is when present."""
    if "anyOf" in node:
        node = next(option for option in node["anyOf"] if option.get("type") != "null")
    if "$ref" in node:
        node = root["$defs"][node["$ref"].rsplit("/", 1)[-1]]
    return node


def _accepted(root: Schema, node: Schema, loc: KeyPath) -> str:
    if "enum" in node:
        return " or ".join(shown(choice) for choice in node["enum"])
    kind = node.get("type")
    if kind == "object":
        return f"one table {_header(root, loc)}"
    if kind == "array":
        items = _resolved(root, node["items"])
        header = _header(root, (*loc, 0))
        of = f"tables {header}" if "properties" in items else f"numbers{_span(items)}"
        least, most = node.get("minItems", 0), node.get("maxItems")
        return f"{least} to {most} {of}" if most else f"at least {least} {of}"
    if kind == "string":
        least = node.get("minLength", 0)
        return f"text of at least {least} characters" if least else "text in quotes"
    return f"a {'whole ' if kind == 'integer' else ''}number{_span(node)}"


def _span(node: Schema) -> str:
    """The range of a number in words, empty where there is none."""
    least, most = node.get("minimum"), node.get("maximum")
    if least is not None and most is not None:
        return f" from {least:g} to {most:g}"
    words = (
        ("exclusiveMinimum", "above"),
        ("minimum", "from"),
        ("exclusiveMaximum", "below"),
        ("maximum", "up to"),
    )
    spans = [f"{word} {node[key]:g}" for key, word in words if key in node]
    return " " + ", ".join(spans) if spans else ""
