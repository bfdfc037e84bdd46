"""Notes added to a first design's file once its stress is known."""

from collections.abc import Sequence
from dataclasses import replace

from .first_text import DesignTable


def checked_tables(tables: Sequence[DesignTable], margin: float) -> tuple[DesignTable, ...]:
    """The tables with the yield margin that the stress solution has found.

    Args:
        tables: of the first design.
        margin: yield strength over the greatest stress at overspeed.
    """
    told = f"At overspeed. The stress solution of this design has {margin:.2f}."
    return tuple(
        replace(
            table,
            lines=tuple(
                replace(line, why=told) if line.key == "least_yield_margin" else line
                for line in table.lines
            ),
        )
        for table in tables
    )
