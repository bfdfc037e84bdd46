"""What a user asks of the drive's tables."""

from dataclasses import dataclass

from lamwright.postprocess.c_numbers import NumberFormat, number_format, table_size

DEFAULT_SIZE, DEFAULT_FORMAT = "16x16", "float"
FLOATING = NumberFormat(DEFAULT_FORMAT, 0)


@dataclass(frozen=True, slots=True)
class ControlWishes:
    """Size of the tables, torques by speeds, and how the C header holds numbers."""

    table_size: tuple[int, int] = (16, 16)
    number_format: NumberFormat = FLOATING


def control_wishes(size: str, form: str) -> ControlWishes:
    """The wishes of `--table-size` and `--c-format`.

    Raises:
        LamwrightError: an option says something else.
    """
    return ControlWishes(table_size(size), number_format(form))
