"""The stack from the side, with its length and the parts of a stepped skew, beside its table."""

import math

from lamwright.geometry.skew import skew_offsets

from .sheet_details import scale_text
from .sheet_dimensions import across, extension, number
from .sheet_ink import CENTRE, TEXT, WIDE, Ink, Picture, Word, rectangle, segment
from .sheet_job import MM, SheetJob

SCALES = (5.0, 2.0, 1.0, 0.5, 0.2, 0.1, 0.05)
MOST = complex(78.0, 27.0)  # mm of paper, length and diameter
BESIDE = 12.0  # mm from the table


def stack_picture(job: SheetJob, table: Picture, radius: float) -> Picture:
    """The table with the stack's side view on its right.

    Args:
        job: for length and skew.
        table: the stack's.
        radius: of the lamination, m.
    """
    length, size = job.design.stator.stack_length_mm, 2.0 * radius / MM
    fitting = (s for s in SCALES if s * length <= MOST.real and s * size <= MOST.imag)
    scale = next(fitting, SCALES[-1])
    high = table.box[1]
    corner = complex(high.real + BESIDE, high.imag - 7.0 - scale * size)
    end = corner + complex(scale * length, scale * size)
    middle = 0.5 * (corner.imag + end.imag)
    level = corner.imag - 8.0
    ends = (complex(corner.real, level), complex(end.real, level))
    inks: list[Ink] = [
        Word(f"Stack ({scale_text(scale)})", complex(corner.real, high.imag - 1.0 - TEXT)),
        rectangle(corner, end, WIDE),
        segment(complex(corner.real - 4.0, middle), complex(end.real + 4.0, middle), CENTRE),
        extension(corner, ends[0]),
        extension(complex(end.real, corner.imag), ends[1]),
        *across(*ends, number(length)),
        *_parts(job, corner, end, scale * radius / MM),
    ]
    return table + Picture(tuple(inks))


def _parts(job: SheetJob, low: complex, high: complex, radius: float) -> list[Ink]:
    """Borders of the skew's parts, and where the first q axis meets the surface of each."""
    offsets = skew_offsets(job.design) if job.part == "rotor" else (0.0,)
    if len(offsets) == 1:
        return []
    step = (high.real - low.real) / len(offsets)
    middle = 0.5 * (low.imag + high.imag)
    inks: list[Ink] = []
    for k, offset in enumerate(offsets):
        x = low.real + k * step
        if k:
            inks.append(segment(complex(x, low.imag), complex(x, high.imag), WIDE))
        y = middle + radius * math.sin(offset)
        inks.append(segment(complex(x + 0.5, y), complex(x + step - 0.5, y)))
    first = complex(high.real + 5.0, middle + radius * math.sin(offsets[-1]) - 1.25)
    return [*inks, Word("q1", first)]
