"""The chapters of `ribs`, in the order of its results: one line for each."""

from .elastic_chapter import elastic_chapter
from .fit_chapter import fit_chapter
from .life_chapter import life_chapter
from .modal_chapter import modal_chapter
from .plastic_chapter import plastic_chapter
from .ribbed import RibChapterMaker

# Name of the phase that is shown and timed, and who writes it.
CHAPTERS: tuple[tuple[str, RibChapterMaker], ...] = (
    ("elastic", elastic_chapter),
    ("fit", fit_chapter),
    ("plastic", plastic_chapter),
    ("life", life_chapter),
    ("modes", modal_chapter),
)
