"""Tables and notes of a sheet."""

import math
from collections.abc import Iterator, Sequence

from lamwright.geometry.curves import area

from .sheet_details import RibKind, detail_scale, scale_text
from .sheet_dimensions import number, with_limit
from .sheet_font import width_of
from .sheet_ink import NARROW, RULE, TEXT, Ink, Picture, Word, rectangle, segment
from .sheet_job import MM, SheetJob, SheetOptions
from .sheet_measures import PoleMeasure

ROW = 4.6  # mm
PAD = 1.4  # mm on either side of a cell's text
LINE = 4.2  # mm between lines of a note
NOTE_INDENT = 5.0
GRAMS = 1e3
CAUTION = (
    "CAUTION: ROTORS BURST. This drawing supports, and never replaces, a qualified engineer's"
    " judgement, the supplier's material certificate, an overspeed test in containment, and local"
    " codes and standards. Cut edges are sharp."
)
INVENTED = "INVENTED DEMONSTRATION DATA: not a product, not for production."


def table(title: str, header: Sequence[str], rows: Sequence[Sequence[str]]) -> Picture:
    """A ruled table with its title above, lower left corner at 0."""
    columns = list(zip(header, *rows, strict=True))
    widths = [max(width_of(text, TEXT) for text in column) + 2.0 * PAD for column in columns]
    total, top = sum(widths), ROW * (len(rows) + 1)
    inks: list[Ink] = [rectangle(0j, complex(total, top), RULE)]
    inks.append(segment(1j * (top - ROW), complex(total, top - ROW), RULE))
    for k in range(1, len(rows)):
        inks.append(segment(1j * k * ROW, complex(total, k * ROW), NARROW))
    x = 0.0
    for column, width in zip(columns, widths, strict=True):
        if x:
            inks.append(segment(complex(x, 0.0), complex(x, top), NARROW))
        for k, text in enumerate(column):
            at = complex(x + 0.5 * width, top - (k + 1) * ROW + 1.05)
            inks.append(Word(text, at, TEXT, "middle"))
        x += width
    inks.append(Word(title, complex(0.0, top + 1.6), TEXT, is_bold=True))
    return Picture(tuple(inks))


def rib_table(kinds: Sequence[RibKind], limit: float) -> Picture:
    """Every different rib: letter, how many, width with limits, corners."""
    rows = [
        (
            kind.letter,
            kind.kind,
            ", ".join(str(number_of) for number_of in kind.barriers),
            str(kind.count),
            with_limit(kind.width / MM, limit),
            ", ".join(number(radius / MM) for radius in kind.radii) or "-",
            scale_text(detail_scale(kind)),
        )
        for kind in kinds
    ]
    header = ("Det.", "Rib", "Barrier", "Count", "Least width", "Radii R", "Scale")
    return table("RIBS", header, rows)


def barrier_table(poles: Sequence[PoleMeasure], limit: float, rim: float) -> Picture:
    """Every barrier on the q axis, and its ends."""
    rows = []
    several = len(poles) > 1
    for pole in poles:
        for cut in pole.cuts:
            ends = [r for r in pole.ribs if r.kind == "tangential" and r.barrier == cut.barrier]
            angles = sorted({number(math.degrees(abs(r.end_angle)), 2) for r in ends})
            rows.append(
                (
                    *((_poles(pole.numbers),) if several else ()),
                    str(cut.barrier),
                    number(cut.beside / MM),
                    number(cut.outer / MM),
                    with_limit(cut.thickness / MM, limit),
                    f"({number((rim - cut.outer) / MM)})",
                    " / ".join(angles) or "-",
                )
            )
    header = (
        *(("Poles",) if several else ()),
        "No.",
        "Off q axis",
        "From axis",
        "Along q axis",
        "(Depth)",
        "End angle \u00b0",
    )
    return table("BARRIERS ON THE Q AXIS, from the rim", header, rows)


def radial_table(poles: Sequence[PoleMeasure]) -> Picture | None:
    """Where radial ribs stand, those left and right of the q axis as one; None without any."""
    rows: dict[tuple[str, ...], int] = {}
    for pole in poles:
        for rib in pole.ribs:
            if rib.kind != "radial":
                continue
            row = (
                *((_poles(pole.numbers),) if len(poles) > 1 else ()),
                str(rib.barrier),
                _off_q(rib.centre.real / MM, pole.is_symmetric),
                number(rib.centre.imag / MM),
                number(math.degrees(rib.tilt), 2),
            )
            rows[row] = rows.get(row, 0) + len(pole.numbers)
    if not rows:
        return None
    head = (*(("Poles",) if len(poles) > 1 else ()), "Barrier", "Off q axis", "Along q from axis")
    lines = [(*row, str(count)) for row, count in rows.items()]
    return table("RADIAL RIBS, middle of each", (*head, "Tilt \u00b0", "Count"), lines)


def _off_q(off: float, is_symmetric: bool) -> str:
    """Distance from the q axis in mm; with its side where the halves of a pole differ."""
    side = "" if is_symmetric or abs(off) < 5e-4 else (" right" if off > 0.0 else " left")
    return f"{number(abs(off))}{side}"


def _poles(numbers: Sequence[int]) -> str:
    if len(numbers) > 3:
        return f"{numbers[0]}, {numbers[1]}, .. {numbers[-1]}"
    return ", ".join(str(one) for one in numbers)


def stack_table(job: SheetJob) -> Picture:
    """Stack, sheets, skew and masses."""
    rotor, length = job.design.rotor, job.design.stator.stack_length_mm
    sheet = sum(area(contour.path) for contour in job.contours)
    density = job.steel.density_kg_per_m3.value
    steel = length * MM * rotor.stacking_factor
    sheets = round(steel / (rotor.sheet_thickness_mm * MM))
    rows = [
        ("Stack length, mm", number(length)),
        ("Sheet thickness, mm", number(rotor.sheet_thickness_mm)),
        ("Stacking factor", number(rotor.stacking_factor)),
        ("Sheets, about", str(sheets)),
        *(
            ()
            if job.part == "stator"
            else (("Skew", _skew(rotor.skew_steps, rotor.skew_angle_deg)),)
        ),
        ("Area of a sheet, mm\u00b2", number(sheet / MM**2, 1)),
        ("Mass of a sheet, g", f"{GRAMS * sheet * rotor.sheet_thickness_mm * MM * density:.3g}"),
        ("Steel of the stack, kg", f"{sheet * steel * density:.4g}"),
    ]
    return table("STACK", ("Item", "Value"), rows)


def _skew(steps: int, angle: float) -> str:
    if steps == 1:
        return "none"
    return f"{steps} equal parts, {number(angle / steps)}\u00b0 from each to the next"


def notes(job: SheetJob, width: float) -> Picture:
    """The rotor's notes and the order's remarks, numbered."""
    return numbered((*_notes(job), *job.options.remarks), width)


def numbered(texts: Sequence[str], width: float) -> Picture:
    """Numbered notes, wrapped to `width` mm, their lower left corner at 0."""
    lines: list[tuple[str, str]] = []
    for k, text in enumerate(texts, start=1):
        for j, line in enumerate(wrapped(text, width - NOTE_INDENT, TEXT)):
            lines.append((f"{k}" if j == 0 else "", line))
    height = LINE * len(lines)
    inks: list[Ink] = [Word("NOTES", complex(0.0, height + 1.6), TEXT, is_bold=True)]
    for k, (count, line) in enumerate(lines):
        y = height - (k + 1) * LINE + 1.2
        if count:
            inks.append(Word(count, complex(0.0, y)))
        inks.append(Word(line, complex(NOTE_INDENT, y)))
    return Picture(tuple(inks))


def _notes(job: SheetJob) -> Iterator[str]:
    asked = job.options
    yield "Dimensions in mm, after cutting, at 20 \u00b0C. Tolerancing ISO 8015, fits ISO 286."
    limit = number(job.width_limit)
    yield (
        f"Boxed dimensions are theoretically exact: contours of barriers have a line profile"
        f" of {limit} to datum A (\u00b1{number(0.5 * job.width_limit)} either side)."
    )
    yield (
        "End angles go to the centre of a round end or corner radius nearest to the rim, or to"
        ' the middle of an end along the rim. "Off q axis": measured at this distance from the'
        " q axis, where a rib stands on it."
    )
    if not asked.outer_fit:
        yield (
            "Fit of the outer diameter: not given; agree before tooling, as it makes the air gap of"
            f" {number(job.design.rotor.gap_mm)} mm."
        )
    yield from sheet_notes(asked)
    poles = job.section.poles
    yield (
        f"{poles} poles, q axes {number(360.0 / poles)}\u00b0 apart. The DXF of the same design"
        " hash is the exact contour, also where nothing is dimensioned here."
    )


def sheet_notes(asked: SheetOptions) -> Iterator[str]:
    """On burr and rolling direction, of any sheet."""
    side = {"near": "the side seen", "far": "the side not seen"}.get(asked.burr_side, "not given")
    burr = f"{number(asked.burr_mm)} mm at most" if asked.burr_mm is not None else "not given"
    yield f"Burr side: {side}, all sheets the same way round. Burr height: {burr}."
    yield f"Rolling direction: {asked.rolling_direction or 'not given; agree before tooling'}."


def caution(job: SheetJob, width: float, first: str = CAUTION) -> Picture:
    """The cautions in a frame, their lower left corner at 0."""
    texts = [first]
    if "invented" in job.design.note.lower():
        texts.insert(0, INVENTED)
    if job.options.warning:
        texts.insert(0, job.options.warning)
    lines = [line for text in texts for line in wrapped(text, width - 4.0, TEXT, is_bold=True)]
    height = LINE * len(lines) + 2.0
    inks: list[Ink] = [rectangle(0j, complex(width, height), RULE)]
    for k, line in enumerate(lines):
        inks.append(Word(line, complex(2.0, height - 1.0 - (k + 1) * LINE + 1.2), is_bold=True))
    return Picture(tuple(inks))


def wrapped(text: str, width: float, height: float, is_bold: bool = False) -> list[str]:
    """A text in lines no wider than `width` mm."""
    lines: list[str] = []
    for word in text.split():
        longer = f"{lines[-1]} {word}" if lines else word
        if lines and width_of(longer, height, is_bold) <= width:
            lines[-1] = longer
        else:
            lines.append(word)
    return lines
