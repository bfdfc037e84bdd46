"""A design file with some values changed: comments, order and layout stay as they are."""

import re
from collections.abc import Mapping

from .design_keys import key_name, key_steps
from .errors import DesignError
from .key_lines import key_lines, line_of, toml_read

_NUMBER = r"[+-]?[0-9][0-9_]*(?:\.[0-9_]+)?(?:[eE][+-]?[0-9]+)?"
_STRING = r'"(?:\\.|[^"\\])*"|' r"'[^']*'"


def restated(text: str, values: Mapping[str, float | str]) -> str:
    """The TOML `text` of a design with other numbers or file names at `values`.

    Args:
        text: valid TOML.
        values: by keys as messages write them, each stated in the text.

    Raises:
        DesignError: a value is stated in a way that cannot be changed in place; one line.
    """
    lines, rows = key_lines(text), text.split("\n")
    for key, value in values.items():
        at = line_of(lines, key_steps(key)) - 1
        old = _STRING if isinstance(value, str) else _NUMBER
        new = f'"{value}"' if isinstance(value, str) else f"{value:.9g}"
        pattern = rf"((?:^|[\s{{,.]){re.escape(key_name(key))}\s*=\s*)(?:{old})"
        found = re.search(pattern, rows[at])
        if found is None:
            raise DesignError(
                f"line {at + 1}: {key}: cannot be changed in place; accepted key = value"
            )
        rows[at] = rows[at][: found.start()] + found[1] + new + rows[at][found.end() :]
    changed = "\n".join(rows)
    data = toml_read(changed)
    for key, value in values.items():
        if _stated(data, key) != (value if isinstance(value, str) else float(f"{value:.9g}")):
            raise DesignError(f"{key}: cannot be changed in place; accepted one key = value a line")
    return changed


def _stated(data: object, key: str) -> object:
    for step in key_steps(key):
        data = data[step]  # type: ignore[index]
    return data
