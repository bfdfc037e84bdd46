"""A report as PDF: A4 pages with embedded letters, the same bytes for the same report.

Pictures are placed as PNG at what they were drawn with, 200 dpi and more at this width.
"""

from collections.abc import Callable, Sequence
from functools import cache
from io import BytesIO
from pathlib import Path
from typing import TYPE_CHECKING
from xml.sax.saxutils import escape

from .report import Block, Cell, Grid, Lines, Listing, Mark, Paragraph, Picture, Report

if TYPE_CHECKING:
    from reportlab.lib.styles import ParagraphStyle
    from reportlab.pdfgen.canvas import Canvas
    from reportlab.platypus import Flowable

MARGIN_MM = (14.0, 16.0)  # at the sides; above and below
MOST_PICTURE_MM = 215.0  # height that leaves room for the caption on a page
MOST_KEPT_ROWS = 24  # of a table that is kept on one page, as in `report.html.j2`
COLOURS: dict[Mark, str] = {"": "#17212b", "good": "#0b6b3a", "bad": "#b3261e", "wary": "#8a5300"}
LONGEST_LINE = 100  # characters of a listing that fit the width


def report_pdf(report: Report, folder: str | Path) -> bytes:
    """The report as PDF.

    Args:
        report: what it says.
        folder: with the pictures it names, as PNG.
    """
    from reportlab.lib.pagesizes import A4
    from reportlab.lib.units import mm
    from reportlab.platypus import KeepTogether, SimpleDocTemplate, Spacer
    from reportlab.platypus import Paragraph as Text

    _load_letters()
    side, above = (share * mm for share in MARGIN_MM)
    stream = BytesIO()
    document = SimpleDocTemplate(
        stream,
        pagesize=A4,
        leftMargin=side,
        rightMargin=side,
        topMargin=above,
        bottomMargin=above,
        title=report.title,
        invariant=1,  # no time stamp, no random identifier
    )
    style = _styles()
    flow: list[Flowable] = [
        Text(escape(report.title), style["title"]),
        Text(escape(report.subtitle), style["note"]),
        Spacer(0.0, 3 * mm),
        _outcome(report, document.width),
    ]
    for section in report.sections:
        before: list[Flowable] = [Text(escape(section.title), style["heading"])]
        for block in section.blocks:
            parts = _set(block, Path(folder), document.width)
            # A heading stays with what follows it, a picture with its caption, a table with its
            # note.
            is_short = isinstance(block, Grid) and len(block.rows) <= MOST_KEPT_ROWS
            is_whole = is_short or isinstance(block, Picture)
            flow += [KeepTogether([*before, *parts])] if is_whole else [*before, *parts]
            before = []
    page = _footed(report.closing)
    document.build(flow, onFirstPage=page, onLaterPages=page)
    return stream.getvalue()


@cache
def _load_letters() -> None:
    """The letters that matplotlib brings: they have the signs that names and units need."""
    from reportlab.pdfbase import pdfmetrics
    from reportlab.pdfbase.ttfonts import TTFont

    from .sheet_font import font_path

    fonts = Path(font_path()).parent
    for name in ("DejaVuSans", "DejaVuSans-Bold", "DejaVuSansMono"):
        pdfmetrics.registerFont(TTFont(name, str(fonts / f"{name}.ttf")))


@cache
def _styles() -> "dict[str, ParagraphStyle]":
    from reportlab.lib.styles import ParagraphStyle

    ink = COLOURS[""]
    plain = ParagraphStyle(
        "plain", fontName="DejaVuSans", fontSize=8.5, leading=12, textColor=ink, spaceAfter=3
    )
    bold = ParagraphStyle("bold", plain, fontName="DejaVuSans-Bold")
    return {
        "plain": plain,
        "note": ParagraphStyle("note", plain, fontSize=7.5, leading=10, textColor="#55616d"),
        "title": ParagraphStyle("title", bold, fontSize=15, leading=19),
        "outcome": ParagraphStyle("outcome", bold, fontSize=11, leading=14, spaceAfter=0),
        "heading": ParagraphStyle(
            "heading", bold, fontSize=11, leading=14, spaceBefore=12, spaceAfter=4, keepWithNext=1
        ),
        "small": ParagraphStyle("small", bold, spaceBefore=4, keepWithNext=1),
        "item": ParagraphStyle("item", plain, leftIndent=10, bulletIndent=2, spaceAfter=1),
        "cell": ParagraphStyle("cell", plain, fontSize=7.5, leading=9.5, spaceAfter=0),
        "number": ParagraphStyle(
            "number", plain, fontSize=7.5, leading=9.5, spaceAfter=0, alignment=2
        ),
        "listing": ParagraphStyle(
            "listing", plain, fontName="DejaVuSansMono", fontSize=6.5, leading=8.2
        ),
    }


def _outcome(report: Report, width: float) -> "Flowable":
    from reportlab.platypus import Paragraph as Text
    from reportlab.platypus import Table

    colour = COLOURS[report.mark]
    text = Text(f'<font color="{colour}">{escape(report.outcome)}</font>', _styles()["outcome"])
    return Table(
        [[text]],
        colWidths=[width],
        style=[
            ("BOX", (0, 0), (-1, -1), 1.2, colour),
            ("LINEBEFORE", (0, 0), (0, -1), 5.0, colour),
            ("LEFTPADDING", (0, 0), (-1, -1), 10),
        ],
    )


def _set(block: Block, folder: Path, width: float) -> "list[Flowable]":
    from reportlab.platypus import Paragraph as Text
    from reportlab.platypus import Preformatted

    style = _styles()
    if isinstance(block, Paragraph):
        return [Text(escape(block.text), style["plain"])]
    if isinstance(block, Lines):
        return [Text(escape(item), style["item"], bulletText="\u2022") for item in block.items]
    if isinstance(block, Listing):
        return [
            Text(escape(block.title), style["small"]),
            Preformatted(block.text, style["listing"], maxLineLength=LONGEST_LINE),
        ]
    if isinstance(block, Grid):
        note = [Text(escape(block.note), style["note"])] if block.note else []
        return [_table(block, width), *note]
    return _figure(block, folder, width)


def _table(grid: Grid, width: float) -> "Flowable":
    from reportlab.pdfbase.pdfmetrics import stringWidth
    from reportlab.platypus import Paragraph as Text
    from reportlab.platypus import Table

    style = _styles()
    right = [bool(grid.rows) and cell.is_number for cell in (grid.rows[0] if grid.rows else ())]
    right += [False] * (len(grid.columns) - len(right))

    def lettering(cell: Cell) -> "Flowable":
        colour, text = COLOURS[cell.mark], escape(cell.text)
        strong = f'<font name="DejaVuSans-Bold" color="{colour}">{text}</font>'
        return Text(strong if cell.mark else text, style["number" if cell.is_number else "cell"])

    def headed(column: str, is_number: bool) -> "Flowable":
        strong = f'<font name="DejaVuSans-Bold">{escape(column)}</font>'
        return Text(strong, style["number" if is_number else "cell"])

    def wanted(heads: Sequence[str], cells: Sequence[Cell]) -> float:
        texts = [*heads, *(cell.text for cell in cells)]
        return 14.0 + max(float(stringWidth(text, "DejaVuSans-Bold", 7.5)) for text in texts)

    head = [headed(column, r) for column, r in zip(grid.columns, right, strict=True)]
    columns: list[Sequence[Cell]] = list(zip(*grid.rows, strict=True))
    columns = columns or [()] * len(grid.columns)
    by_column = list(zip(grid.columns, columns, strict=True))
    widths = [wanted([column], cells) for column, cells in by_column]
    if sum(widths) > width:  # then heads may break between words
        widths = [wanted(column.split(), cells) for column, cells in by_column]
    return Table(
        [head, *([lettering(cell) for cell in row] for row in grid.rows)],
        colWidths=_fitted(widths, width),
        repeatRows=1,
        hAlign="LEFT",
        spaceBefore=6,  # from a table above, which would look like the same one
        spaceAfter=2,
        style=[
            ("BACKGROUND", (0, 0), (-1, 0), "#f1f4f6"),
            ("LINEBELOW", (0, 0), (-1, -1), 0.4, "#b9c1c8"),
            ("VALIGN", (0, 0), (-1, -1), "TOP"),
            ("TOPPADDING", (0, 0), (-1, -1), 1.5),
            ("BOTTOMPADDING", (0, 0), (-1, -1), 2.0),
        ],
    )


def _fitted(wanted: list[float], width: float) -> list[float]:
    """Column widths that fill no more than the page: the widest give way first."""
    limit = max(wanted, default=0.0)
    while sum(min(one, limit) for one in wanted) > width:
        limit *= 0.98
    return [min(one, limit) for one in wanted]


def _figure(picture: Picture, folder: Path, width: float) -> "list[Flowable]":
    from reportlab.lib.units import mm
    from reportlab.lib.utils import ImageReader
    from reportlab.platypus import Image, Spacer
    from reportlab.platypus import Paragraph as Text

    path = folder / f"{picture.name}.png"
    across, up = ImageReader(str(path)).getSize()
    scale = min(width / across, MOST_PICTURE_MM * mm / up)
    drawn = Image(str(path), width=scale * across, height=scale * up)
    note = Text(escape(picture.caption), _styles()["note"])
    return [Spacer(0.0, 2 * mm), drawn, note]


def _footed(closing: str) -> "Callable[[Canvas, object], None]":
    def foot(canvas: "Canvas", document: object) -> None:
        from reportlab.lib.pagesizes import A4
        from reportlab.lib.units import mm
        from reportlab.lib.utils import simpleSplit

        canvas.saveState()
        canvas.setFont("DejaVuSans", 6)
        canvas.setFillColor("#55616d")
        side = MARGIN_MM[0] * mm
        number = f"page {canvas.getPageNumber()}"
        for k, line in enumerate(simpleSplit(closing, "DejaVuSans", 6, A4[0] - 2 * side - 40)):
            canvas.drawString(side, 9 * mm - 7 * k, line)
        canvas.drawRightString(A4[0] - side, 9 * mm, number)
        canvas.restoreState()

    return foot
