"""A sheet as PDF at true scale, its font embedded (TrueType), text as text.

Arcs become cubic curves, one for 30 degrees: 4e-7 of the radius off, 0.04 um of paper at 100 mm.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.curves import Point
from lamwright.geometry.whole_file import whole_file

from .figures_style import MM as MM_PER_M
from .figures_style import inked
from .sheet_font import font_path, size_of
from .sheet_ink import Fill, Picture, Stroke, Word

if TYPE_CHECKING:
    from matplotlib.figure import Figure
    from matplotlib.transforms import Transform

INCH = 25.4  # mm
POINT = INCH / 72.0  # mm
SETTINGS = {"pdf.fonttype": 42, "pdf.compression": 6, "text.parse_math": False}
NO_METADATA = {"CreationDate": None, "Creator": None, "Producer": None}


def write_pdf(picture: Picture, size: Point, path: Path, title: str) -> None:
    """Write a sheet of `size` (x + iy, mm) as PDF; the same picture gives the same bytes."""
    import matplotlib
    from matplotlib.backends.backend_pdf import FigureCanvasPdf
    from matplotlib.figure import Figure

    # Users' settings must not change a drawing, nor a drawing theirs.
    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(SETTINGS)
        figure = Figure(figsize=(size.real / INCH, size.imag / INCH), facecolor="white")
        FigureCanvasPdf(figure)
        _draw(figure, picture)
        with whole_file(path) as file:
            figure.savefig(file, format="pdf", metadata={**NO_METADATA, "Title": title})


def _draw(figure: Figure, picture: Picture) -> None:
    from matplotlib.transforms import Affine2D

    on_paper = Affine2D().scale(1.0 / INCH) + figure.dpi_scale_trans
    # One path for each pen: a path of its own for each stroke took four times as long.
    pens = dict.fromkeys(stroke.pen for stroke in picture.strokes)
    for pen in pens:
        _trace(figure, [one for one in picture.strokes if one.pen == pen], on_paper)
    _fill(figure, [ink for ink in picture.inks if isinstance(ink, Fill)], on_paper)
    for word in picture.words:
        _write(figure, word, on_paper)


def _trace(figure: Figure, strokes: Sequence[Stroke], on_paper: Transform) -> None:
    from matplotlib.patches import PathPatch
    from matplotlib.path import Path as InkPath

    closed = [one.edges for one in strokes if one.edges[-1].end == one.edges[0].start]
    loose = [one.edges for one in strokes if one.edges[-1].end != one.edges[0].start]
    parts = [
        inked(chains, [1.0 / MM_PER_M], closed=is_closed)
        for chains, is_closed in ((closed, True), (loose, False))
        if chains
    ]
    pen = strokes[0].pen
    patch = PathPatch(InkPath.make_compound_path(*parts), fill=False, transform=on_paper)
    patch.set(edgecolor="black", linewidth=pen.width / POINT)
    patch.set(joinstyle="round", capstyle="butt")
    if pen.dashes:
        # Dashes count in widths of the line.
        patch.set_linestyle((0.0, tuple(dash / pen.width for dash in pen.dashes)))
    figure.add_artist(patch)


def _fill(figure: Figure, fills: Sequence[Fill], on_paper: Transform) -> None:
    from matplotlib.patches import PathPatch
    from matplotlib.path import Path as InkPath

    if not fills:
        return
    loops = [[(p.real, p.imag) for p in (*one.points, one.points[0])] for one in fills]
    shape = InkPath.make_compound_path(*(InkPath(loop, closed=True) for loop in loops))
    figure.add_artist(PathPatch(shape, facecolor="black", linewidth=0.0, transform=on_paper))


def _write(figure: Figure, word: Word, on_paper: Transform) -> None:
    from matplotlib.font_manager import FontProperties

    font = FontProperties(fname=font_path(word.is_bold), size=size_of(word.height) / POINT)
    start = word.start
    figure.text(
        start.real,
        start.imag,
        word.text,
        transform=on_paper,
        fontproperties=font,
        fontfeatures=("-kern", "-liga"),
        rotation=math.degrees(word.angle),
        rotation_mode="anchor",
        va="baseline",
        ha="left",
        color="black",
    )
