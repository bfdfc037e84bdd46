"""Views, details and tables of a drawing on the smallest paper that has room for them all.

The paper is one of A4 to A2; scales are those of ISO 5455 (m).
"""

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass

from lamwright.geometry.errors import LamwrightError

from .sheet_details import scale_text
from .sheet_frame import BLOCK_HEIGHT, BLOCK_WIDTH, Paper, frame, papers, title_block
from .sheet_ink import Picture
from .sheet_job import SheetJob
from .sheet_labels import NoRoomError
from .sheet_layout import Area, Blocks, arranged

SCALES = (20.0, 10.0, 5.0, 2.0, 1.0, 0.5, 0.2, 0.1)  # ISO 5455
LEAST_WHOLE = 65.0  # mm of paper, of the whole lamination's diameter
MOST_WHOLE = 200.0  # mm of paper, beyond which a larger view shows no more

Scales = tuple[float, float]  # of pole or slot, and of the whole lamination


@dataclass(frozen=True, slots=True)
class Sheet:
    """A composed drawing."""

    paper: Paper
    picture: Picture
    whole_scale: float
    pole_scale: float  # or that of a slot


def fitted(
    job: SheetJob,
    name: str,
    scales_on: Callable[[Paper, bool], Iterable[Scales]],
    views_at: Callable[[Scales], Sequence[Picture]],
    rest: tuple[Sequence[Picture], Sequence[Picture]],
) -> Sheet:
    """The drawing on the smallest paper that has room.

    Args:
        job: for paper and title block.
        name: of the drawing, where it fails.
        scales_on: what to try on a paper, the best first; small scales too where it is the last.
        views_at: at these scales.
        rest: details and tables.

    Raises:
        LamwrightError: none has room.
    """
    sizes = papers(job.options.paper)
    for is_last in (False, True):
        # With views smaller than wished for, at least on the largest paper.
        for paper in reversed(sizes) if is_last else sizes:
            for scales in scales_on(paper, is_last):
                try:
                    views = views_at(scales)
                except NoRoomError:
                    continue
                picture = _on_paper(job, Blocks(views, *rest), paper, scales[1])
                if picture is not None:
                    return Sheet(paper, picture, scales[1], scales[0])
    names = " or ".join(paper.name for paper in sizes)
    raise LamwrightError(f"{name}: not all views fit on {names}; ask for a larger paper")


def whole_scales(size: float, most: float, paper: Paper, is_last: bool) -> Iterator[float]:
    """Scales of the whole lamination, the largest first.

    Args:
        size: its diameter in mm.
        most: scale of the views of its parts, which it does not pass.
        paper: of the drawing.
        is_last: small ones too.
    """
    for scale in SCALES:
        on_sheet = scale * size
        if scale > most or on_sheet > min(shorter_side(paper), MOST_WHOLE):
            continue
        if on_sheet >= LEAST_WHOLE or is_last:
            yield scale


def shorter_side(paper: Paper) -> float:
    """Of the room within the frame, mm."""
    room = paper.high - paper.low
    return min(room.real, room.imag)


def _on_paper(job: SheetJob, blocks: Blocks, paper: Paper, scale: float) -> Picture | None:
    """All blocks on a paper with its frame and title block, None where one finds no room."""
    corner = complex(paper.high.real - BLOCK_WIDTH, paper.low.imag)
    title = Area(corner, corner + complex(BLOCK_WIDTH, BLOCK_HEIGHT))
    found = arranged(blocks, Area(paper.low, paper.high), title)
    if found is None:
        return None
    picture = frame(paper) + title_block(job, [scale_text(scale)], paper).moved(corner)
    for one in found:
        picture = picture + one
    return picture
