"""Paper, frame with its zones (ISO 5457, m) and title block (ISO 7200, m)."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from lamwright.geometry.curves import Point
from lamwright.geometry.errors import DesignError

from .sheet_font import width_of
from .sheet_ink import (
    FRAME,
    NARROW,
    RULE,
    TITLE,
    WIDE,
    Ink,
    Picture,
    Stroke,
    Word,
    polyline,
    rectangle,
    ring,
    segment,
)
from .sheet_job import SheetJob

BORDER = 10.0  # mm
FILING = 20.0  # mm, border on the left, for filing
ZONE = 50.0  # mm
STRIP = 5.0  # mm, of the zones' letters
BLOCK_WIDTH = 180.0  # mm
BLOCK_HEIGHT = 58.0
LABEL = 1.8  # mm, height of a field's name
INSET = 1.2  # mm
ELLIPSIS = "..."
ZONE_LETTERS = "ABCDEFGHJK"


@dataclass(frozen=True, slots=True)
class Paper:
    """A sheet size in mm; A4 stands upright."""

    name: str
    width: float
    height: float

    @property
    def size(self) -> Point:
        """As x + iy."""
        return complex(self.width, self.height)

    @property
    def low(self) -> Point:
        """Lower left corner of the drawing space."""
        return complex(FILING, BORDER)

    @property
    def high(self) -> Point:
        """Upper right corner of the drawing space."""
        return complex(self.width - BORDER, self.height - BORDER)


PAPERS = (Paper("A4", 210.0, 297.0), Paper("A3", 420.0, 297.0), Paper("A2", 594.0, 420.0))


@dataclass(frozen=True, slots=True)
class Field:
    """A cell of the title block: corner and size in mm from the block's lower left."""

    x: float
    y: float
    width: float
    height: float
    label: str
    value: str
    letter: float = 2.5


def papers(wanted: str) -> tuple[Paper, ...]:
    """The papers to try, the smallest first.

    Raises:
        DesignError: the wanted one is not known.
    """
    if not wanted:
        return PAPERS
    found = tuple(paper for paper in PAPERS if paper.name == wanted.upper())
    if not found:
        names = ", ".join(paper.name for paper in PAPERS)
        raise DesignError(f"paper {wanted!r}: not known; accepted {names}")
    return found


def frame(paper: Paper) -> Picture:
    """Frame, centring marks and zones of a paper."""
    inks: list[Ink] = [rectangle(paper.low, paper.high, FRAME)]
    if paper.name == "A4":
        return Picture(tuple(inks))
    low, high = paper.low, paper.high
    inks.append(rectangle(low - STRIP * (1 + 1j), high + STRIP * (1 + 1j)))
    middle = 0.5 * paper.size
    for start, end in (
        (complex(middle.real, high.imag + STRIP), complex(middle.real, high.imag - STRIP)),
        (complex(middle.real, low.imag - STRIP), complex(middle.real, low.imag + STRIP)),
        (complex(low.real - STRIP, middle.imag), complex(low.real + STRIP, middle.imag)),
        (complex(high.real + STRIP, middle.imag), complex(high.real - STRIP, middle.imag)),
    ):
        inks.append(segment(start, end, FRAME))
    return Picture((*inks, *_zones(paper, middle)))


def _zones(paper: Paper, middle: Point) -> list[Ink]:
    """Zones from the centre outward: numbers from the left, letters from above."""
    inks: list[Ink] = []
    low, high = paper.low, paper.high
    columns = _cuts(low.real, high.real, middle.real)
    rows = _cuts(low.imag, high.imag, middle.imag)
    for k, (first, last) in enumerate(pairwise(columns)):
        for y in (high.imag, low.imag - STRIP):
            if k:
                inks.append(segment(complex(first, y), complex(first, y + STRIP)))
            at = complex(_clear(0.5 * (first + last), middle.real), y + 1.0)
            inks.append(Word(str(k + 1), at, 2.5, "middle"))
    for k, (last, first) in enumerate(zip(rows[::-1], rows[-2::-1], strict=False)):
        for x in (low.real - STRIP, high.real):
            if k:
                inks.append(segment(complex(x, last), complex(x + STRIP, last)))
            at = complex(x + 0.5 * STRIP, _clear(0.5 * (first + last) - 1.25, middle.imag))
            inks.append(Word(ZONE_LETTERS[k], at, 2.5, "middle"))
    return inks


def _clear(place: float, middle: float) -> float:
    """Off a centring mark."""
    return place if abs(place - middle) > 3.0 else middle + 4.0


def _cuts(low: float, high: float, middle: float) -> list[float]:
    before, after = int((middle - low) / ZONE), int((high - middle) / ZONE)
    inner = [middle + k * ZONE for k in range(-before, after + 1)]
    # A rest narrower than half a zone joins its neighbour.
    inner = [cut for cut in inner if cut - low > 0.5 * ZONE or cut == low]
    return [low, *(cut for cut in inner if high - cut > 0.5 * ZONE and cut != low), high]


def title_block(job: SheetJob, scales: Sequence[str], paper: Paper) -> Picture:
    """The title block, its lower left corner at 0."""
    fields = _fields(job, scales, paper)
    inks: list[Ink] = [rectangle(0j, complex(BLOCK_WIDTH, BLOCK_HEIGHT), WIDE)]
    for one in fields:
        corner = complex(one.x, one.y)
        if one.label:  # one without shares the cell of another
            inks.append(rectangle(corner, corner + complex(one.width, one.height), NARROW))
        inks += _written(one)
    return Picture((*inks, *_projection(complex(164.0, 51.0))))


def _fields(job: SheetJob, scales: Sequence[str], paper: Paper) -> list[Field]:
    asked = job.options
    sheet = f"{job.design.rotor.sheet_thickness_mm:g} mm"
    general = asked.general_tolerance
    general = f"ISO 2768-{general}" if general in ("f", "m", "c", "v") else general
    hash_text = job.design_hash
    return [
        Field(0, 44, 58, 14, "Material (steel card)", job.steel.name),
        Field(58, 44, 26, 14, "Sheet thickness", sheet),
        Field(84, 44, 40, 14, "General tolerances", general),
        Field(124, 44, 24, 14, "Scale", scales[0], TITLE),
        Field(148, 44, 32, 14, "First-angle projection", ""),
        Field(0, 33, 45, 11, "Created by", asked.creator),
        Field(45, 33, 45, 11, "Approved by", asked.approved_by),
        Field(90, 33, 50, 11, "Document type", "Part drawing"),
        Field(140, 33, 40, 11, "Document status", asked.status),
        Field(0, 10, 58, 23, "Legal owner", asked.owner, TITLE),
        Field(58, 10, 77, 23, "Title, supplementary title", "", TITLE),
        Field(135, 21, 45, 12, "Identification number", asked.part_number, TITLE),
        Field(135, 10, 15, 11, "Rev.", asked.revision, TITLE),
        Field(150, 10, 30, 11, "Date of issue", asked.date),
        Field(0, 0, 135, 10, "Design hash (SHA-256)", hash_text, 1.8),
        Field(135, 0, 15, 10, "Format", paper.name),
        Field(150, 0, 15, 10, "Lang.", "en"),
        Field(165, 0, 15, 10, "Sheet", "1/1"),
        Field(58, 10, 77, 23, "", job.title, TITLE),
        Field(58, 10, 77, 13, "", job.design.name),
    ]


def _written(field: Field) -> list[Ink]:
    """A field's name and its value, in the greatest letters that fit."""
    x, top = field.x + INSET, field.y + field.height
    inks: list[Ink] = []
    if field.label:
        inks.append(Word(field.label, complex(x, top - INSET - LABEL), LABEL))
    if field.value:
        lift = 2.2 if field.height > 8 else 1.5
        room = field.width - 2.0 * INSET
        text, height = fitted(field.value, room, field.letter)
        y = field.y + lift
        if field.height >= 20:
            y = top - 12.0
        inks.append(Word(text, complex(x, y), height))
    return inks


def fitted(text: str, room: float, height: float) -> tuple[str, float]:
    """A text as it fits into `room` mm: smaller letters first, then cut short."""
    for letter in (height, 2.5, LABEL):
        if letter <= height and width_of(text, letter) <= room:
            return text, letter
    while text and width_of(text + ELLIPSIS, LABEL) > room:
        text = text[:-1]
    return text + ELLIPSIS, LABEL


def _projection(at: Point) -> list[Ink]:
    """The symbol of first-angle projection (ISO 128, m): a cone left of its end's view."""
    left, right = at - 9.0, at + 5.0
    cone = (left + 2.0j, left + 8.0 + 3.5j, left + 8.0 - 3.5j, left - 2.0j)
    shift = -1.5j
    marks: list[Stroke] = [
        polyline([p + shift for p in cone], RULE, is_closed=True),
        ring(right + shift + 1.0, 3.5, RULE),
        ring(right + shift + 1.0, 2.0, RULE),
        segment(left - 1.5 + shift, left + 9.5 + shift),
        segment(right - 4.0 + shift, right + 6.0 + shift),
        segment(right + 1.0 - 4.5j + shift, right + 1.0 + 4.5j + shift),
    ]
    return list(marks)
