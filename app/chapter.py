"""What a chapter of a command's results is, and how one is made."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from lamwright.geometry.errors import LamwrightError

from .progress import Stopwatch

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


@dataclass(frozen=True, slots=True)
class Chapter:
    """What a chapter adds to the JSON; its tables and pictures it has written itself."""

    figures: "tuple[DataclassInstance, ...]"  # groups with fields made by `quantities.shown_as`
    cautions: tuple[str, ...] = ()
    not_given: tuple[str, ...] = ()  # figures that lack an input, each with what is missing


def made_chapter(watch: Stopwatch, name: str, write: Callable[[], Chapter]) -> Chapter:
    """What a chapter adds; one that cannot be is told as not given, the others stand."""
    with watch.phase(name):
        try:
            return write()
        except LamwrightError as error:
            return Chapter((), (), (f"{name}: {error}",))
