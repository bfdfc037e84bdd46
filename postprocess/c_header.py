"""The drive's tables as one C header: ISO C99, no code, no warnings.

Names begin with the design's, brought to letters and digits; text that comes from a design cannot
end a comment. Nodes that do not exist are marked, their numbers zero.
"""

import re
import textwrap
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .brackets import BoolArray
from .c_numbers import FLOAT_DIGITS, NumberFormat, base_of, written

LINE = 96  # columns
LONGEST_NAME = 30  # letters of the design's name before a constant's own: 63 count in C99


@dataclass(frozen=True, slots=True, eq=False)
class CArray:
    """One array of the header."""

    name: str
    quantity: str  # whose base it shares
    values: FloatArray | BoolArray  # (n,) or (n, m); truth is written as 0 and 1
    meaning: str


@dataclass(frozen=True, slots=True, eq=False)
class CHeader:
    """What the header holds."""

    design_name: str
    text: tuple[str, ...]  # paragraphs of the comment at its head
    constants: tuple[tuple[str, str, str], ...]  # name, value as C, meaning
    units: dict[str, str]  # of each quantity
    arrays: tuple[CArray, ...]


def c_name(design_name: str) -> str:
    """The design's name as the beginning of C names: letters, digits, underscores."""
    plain = unicodedata.normalize("NFKD", design_name).encode("ascii", "ignore").decode()
    words = re.findall(r"[A-Za-z0-9]+", plain)
    name = "_".join(words).lower()[:LONGEST_NAME].rstrip("_") or "machine"
    return f"m_{name}" if name[0].isdigit() else name


def c_header_text(header: CHeader, form: NumberFormat) -> str:
    """The header file.

    Args:
        header: its constants and arrays.
        form: of the numbers.
    """
    name = c_name(header.design_name)
    upper = name.upper()
    bases = quantity_bases(header, form)
    lines = [*_comment(header, form), f"#ifndef {upper}_CONTROL_H", f"#define {upper}_CONTROL_H"]
    if form.bits or any(array.values.dtype == np.bool_ for array in header.arrays):
        lines += ["", "#include <stdint.h>"]
    lines.append("")
    for key, value, meaning in header.constants:
        lines.append(f"#define {upper}_{key} {value} /* {_safe(meaning)} */")
    for quantity, base in bases.items():
        if form.bits:
            meaning = f"{header.units[quantity]} that 2^{form.bits} counts stand for"
            lines.append(
                f"#define {upper}_{quantity.upper()}_BASE {base:.{FLOAT_DIGITS}e} /* {meaning} */"
            )
    for array in header.arrays:
        lines += ["", *_array_lines(name, array, header, form, bases)]
    return "\n".join([*lines, "", f"#endif /* {upper}_CONTROL_H */", ""])


def quantity_bases(header: CHeader, form: NumberFormat) -> dict[str, float]:
    """The base value of each quantity, from all its arrays."""
    groups: dict[str, list[FloatArray]] = {}
    for array in header.arrays:
        if array.values.dtype != np.bool_:
            groups.setdefault(array.quantity, []).append(np.asarray(array.values, dtype=float))
    return {quantity: base_of(form, *values) for quantity, values in groups.items()}


def _comment(header: CHeader, form: NumberFormat) -> list[str]:
    kind = (
        f"Numbers: {form.text}, {form.c_type}; value = count * BASE / 2^{form.bits}, the BASE of"
        " each quantity below."
        if form.bits
        else "Numbers: float, in the units given."
    )
    lines = ["/*"]
    for paragraph in (*header.text, kind):
        wrapped = textwrap.wrap(_safe(paragraph), LINE - 3, break_on_hyphens=False)
        lines += [f" * {line}" for line in wrapped] + [" *"]
    lines[-1] = " */"
    return lines


def _array_lines(
    name: str, array: CArray, header: CHeader, form: NumberFormat, bases: dict[str, float]
) -> list[str]:
    values = array.values
    size = "".join(f"[{count}]" for count in values.shape)
    if values.dtype == np.bool_:
        c_type, unit = "uint8_t", "0 or 1"
        texts = [str(int(value)) for value in values.ravel()]
    else:
        c_type, unit = form.c_type, header.units[array.quantity]
        whole = np.nan_to_num(np.asarray(values, dtype=float))
        texts = written(form, whole, bases[array.quantity])
        unit = f"{unit} / {array.quantity.upper()}_BASE * 2^{form.bits}" if form.bits else unit
    head = f"static const {c_type} {name}_{array.name}{size} = {{"
    rows: Sequence[Sequence[str]]
    if values.ndim == 1:
        body = _rows(texts, "    ")
    else:
        rows = [texts[k : k + values.shape[1]] for k in range(0, len(texts), values.shape[1])]
        body = [line for row in rows for line in ("    {", *_rows(row, "        "), "    },")]
    said = textwrap.wrap(_safe(f"{array.meaning}; {unit}"), LINE - 6, break_on_hyphens=False)
    said = [f"/* {said[0]}", *(f"   {line}" for line in said[1:])]
    said[-1] += " */"
    return [*said, head, *body, "};"]


def _rows(texts: Sequence[str], indent: str) -> list[str]:
    return textwrap.wrap(
        ", ".join(texts),
        LINE,
        initial_indent=indent,
        subsequent_indent=indent,
        break_on_hyphens=False,
    )


def _safe(text: str) -> str:
    """The text as part of a C comment: printable, and without a comment's beginning or end."""
    plain = unicodedata.normalize("NFKD", text).encode("ascii", "replace").decode()
    plain = re.sub(r"[^ -~]", " ", plain).replace("\\", "/")
    # ?? might begin a trigraph, of which a compiler warns.
    return re.sub(r"\?(?=\?)", "? ", plain.replace("*/", "* /").replace("/*", "/ *"))
