"""The chapters of `map`, in the order of its results: one line for each."""

from .mapped import ChapterMaker

# Name of the phase that is shown and timed, and who writes it.
CHAPTERS: tuple[tuple[str, ChapterMaker], ...] = ()
