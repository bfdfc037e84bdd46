"""Numbers as a drive's program holds them: floating point, or fixed point with a base value.

In fixed point qN a value is count / 2^N of its base, 0 < N < 32, in the smallest of int8_t, int16_t
and int32_t that holds it. The base of a quantity is chosen so that its greatest amount is the
greatest count, 2^N - 1.
"""

import re
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.types import FloatArray

LEAST_BITS, MOST_BITS = 7, 31  # below q7 a current would be a hundredth off
FLOAT_DIGITS = 9  # give every float back to the last bit


@dataclass(frozen=True, slots=True)
class NumberFormat:
    """How numbers stand in the header; no bits mean floating point."""

    text: str
    bits: int

    @property
    def c_type(self) -> str:
        """The C type of a number."""
        if not self.bits:
            return "float"
        return "int8_t" if self.bits <= 7 else "int16_t" if self.bits <= 15 else "int32_t"


def number_format(text: str) -> NumberFormat:
    """The format named by `--c-format`.

    Raises:
        LamwrightError: no such format.
    """
    if text == "float":
        return NumberFormat(text, 0)
    found = re.fullmatch(r"q([0-9]{1,2})", text)
    if found and LEAST_BITS <= int(found[1]) <= MOST_BITS:
        return NumberFormat(text, int(found[1]))
    raise LamwrightError(
        f"--c-format {text}: no such number format; accepted float, or q{LEAST_BITS} to"
        f" q{MOST_BITS} as q15 and q31"
    )


def table_size(text: str) -> tuple[int, int]:
    """Torques and speeds of `--table-size`, as 16x16.

    Raises:
        LamwrightError: not two whole numbers from 2 to 256.
    """
    found = re.fullmatch(r"([0-9]{1,4})x([0-9]{1,4})", text)
    if found and all(2 <= int(count) <= 256 for count in found.groups()):
        return int(found[1]), int(found[2])
    raise LamwrightError(
        f"--table-size {text}: not two whole numbers; accepted torques x speeds from 2x2 to"
        " 256x256, as 16x16"
    )


def base_of(form: NumberFormat, *values: FloatArray) -> float:
    """The base value of a quantity: what 2^N counts stand for; 1 in floating point."""
    if not form.bits:
        return 1.0
    most = max(float(np.abs(np.nan_to_num(array)).max(initial=0.0)) for array in values)
    # Nine digits stand in the header, so the base is what they say, and not less.
    base = (most if most > 0.0 else 1.0) * 2.0**form.bits / (2.0**form.bits - 1.0)
    return float(f"{base * (1.0 + 1e-9):.{FLOAT_DIGITS}e}")


def held(form: NumberFormat, values: FloatArray, base: float) -> FloatArray:
    """The values as the drive holds them, rounded."""
    if not form.bits:
        return values.astype(np.float32).astype(np.float64)
    return counts(form, values, base) * base / 2.0**form.bits


def counts(form: NumberFormat, values: FloatArray, base: float) -> FloatArray:
    """The counts of fixed point, whole numbers."""
    return np.rint(values / base * 2.0**form.bits)


def written(form: NumberFormat, values: FloatArray, base: float) -> list[str]:
    """Each value as a C constant."""
    if form.bits:
        return [str(int(count)) for count in counts(form, values, base).ravel()]
    return [f"{value:.{FLOAT_DIGITS - 1}e}f" for value in values.ravel()]
