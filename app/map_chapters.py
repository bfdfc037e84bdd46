"""The chapters of `map`, in the order of its results: one line for each."""

from .control_chapter import control_chapter
from .envelope_chapter import envelope_chapter
from .loss_chapter import loss_chapter
from .mapped import ChapterMaker
from .ripple_chapter import ripple_chapter
from .yardstick_chapter import yardstick_chapter

# Name of the phase that is shown and timed, and who writes it.
CHAPTERS: tuple[tuple[str, ChapterMaker], ...] = (
    ("control", control_chapter),
    ("envelope and efficiency", envelope_chapter),
    ("ripple and forces", ripple_chapter),
    ("losses", loss_chapter),
    ("yardsticks", yardstick_chapter),
)
