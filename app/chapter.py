"""What a chapter of a command's results is, and how one is made."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.table_errors import Columns

from .progress import Stopwatch

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


@dataclass(frozen=True, slots=True)
class Chapter:
    """What a chapter adds to the JSON; its tables and pictures it has written itself."""

    figures: "tuple[DataclassInstance, ...]"  # groups with fields made by `quantities.shown_as`
    cautions: tuple[str, ...] = ()
    not_given: tuple[str, ...] = ()  # figures that lack an input, each with what is missing
    errors: Mapping[str, float] = field(default_factory=dict)  # by the figures' keys, their units
    # By key, of figures that have no error and whose declaration does not say why.
    without_error: Mapping[str, str] = field(default_factory=dict)
    # Of each table the errors of its columns, see `postprocess.table_errors`.
    table_errors: Mapping[str, Columns] = field(default_factory=dict)


def made_chapter(watch: Stopwatch, name: str, write: Callable[[], Chapter]) -> Chapter:
    """What a chapter adds; one that cannot be is told as not given, the others stand."""
    with watch.phase(name):
        try:
            return write()
        except LamwrightError as error:
            return Chapter((), (), (f"{name}: {error}",))
