"""The figures of one assessed design: composed here, drawn in `figures_*`, saved whole or not.

Each figure is written as PNG and as SVG (letters as text, fields rasterised, lines as lines).
Files hold no date and no random name: the same results give the same bytes. Nothing is taken from
a user's matplotlib settings, and none are changed.
Cost measured for the shipped 24-slot design (7 400 field and 1 600 stress elements), processor
time, the machine's two cores overbooked three times: section 0.37 s, flux 0.48, stress 0.51,
torque 0.46, a third of it letters and a fifth PNG compression; once a process 0.7 s more to load
matplotlib.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.curves import Edge
from lamwright.geometry.drawn_rotor import RotorDrawing
from lamwright.geometry.drawn_stator import StatorDrawing
from lamwright.geometry.section import CrossSection
from lamwright.geometry.whole_file import whole_file
from lamwright.geometry.winding import WindingTable
from lamwright.solver.types import FieldSolution, SectorMesh, StressSolution

from .figures_drawing import (
    MARK_SHARE,
    draw_close_up,
    draw_found_rotor,
    draw_found_stator,
    draw_lines,
    draw_mark,
    extent,
)
from .figures_field import draw_flux
from .figures_plastic import draw_plastic, draw_plastic_rib, worst_ribs
from .figures_section import draw_key, draw_lamination, draw_section
from .figures_stress import LETTERS, close_ups, draw_rib, draw_stress
from .figures_style import Style
from .figures_torque import draw_spectrum, draw_torque
from .plastic_ribs import PlasticStudy
from .ribs import RibReport
from .torque import TorqueWaveform

if TYPE_CHECKING:
    from matplotlib.figure import Figure

SVG_DPI = 120.0  # of rasterised fields in an SVG, whose borders are lines: 0.2 s less than at 200
PNG_EFFORT = 2  # of 9: half the time of the usual 6 for a tenth more bytes
SETTINGS = {
    "svg.hashsalt": "lamwright",
    "svg.fonttype": "none",
    "text.hinting": "none",  # at 200 dpi as sharp, and letters take a third less time
}
NO_METADATA = dict.fromkeys(("Creator", "Date", "Format", "Type"))

Composer = Callable[[Style], "Figure"]  # a figure but for its style


@dataclass(frozen=True, slots=True, eq=False)
class Pictured:
    """What the figures of one design show."""

    name: str  # of the design
    section: CrossSection
    winding: WindingTable
    sector: SectorMesh
    solution: FieldSolution
    waveform: TorqueWaveform
    stress: StressSolution
    ribs: RibReport


def write_figures(
    folder: str | Path,
    results: Pictured,
    style: Style | None = None,
    names: Iterable[str] | None = None,
) -> tuple[Path, ...]:
    """Write figures of a design into `folder`, each as PNG and SVG.

    Args:
        folder: existing; files of the same names are replaced, each by one rename.
        results: what to draw.
        style: sizes and colours; the house's own by default.
        names: which of `FIGURES`; all by default.

    Returns:
        The files written, PNG before SVG.
    """
    written: list[Path] = []
    for name in FIGURES if names is None else names:
        written += write_figure(Path(folder), name, partial(FIGURES[name], results), style)
    return tuple(written)


def write_figure(
    folder: Path, name: str, compose: Composer, style: Style | None = None
) -> tuple[Path, Path]:
    """Write one figure into `folder` as PNG and SVG; the files written.

    Args:
        folder: existing.
        name: of the files, without ending.
        compose: draws the figure.
        style: sizes and colours; the house's own by default.
    """
    import matplotlib

    style = style or Style()
    # Users' settings must not change a figure, nor a figure theirs.
    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(SETTINGS)
        return _save(compose(style), folder / name, style)


def section_figure(name: str, section: CrossSection, style: Style) -> Figure:
    """The sector with its trade names, the whole lamination, dimensions and materials."""
    part = "one pole" if section.sector_poles == 1 else f"{section.sector_poles} poles"
    figure = _figure((11.0, 6.6), f"{name}: cross-section of {part}", style)
    draw_section(figure.add_axes((0.01, 0.02, 0.74, 0.91)), section, style)
    draw_lamination(figure.add_axes((0.77, 0.5, 0.22, 0.43)), section, style)
    draw_key(figure.add_axes((0.785, 0.03, 0.195, 0.43)), section, style)
    return figure


def flux_figure(
    name: str,
    section: CrossSection,
    winding: WindingTable,
    sector: SectorMesh,
    solution: FieldSolution,
    style: Style,
) -> Figure:
    """Flux density and flux lines of the sector."""
    figure = _figure((9.0, 6.8), f"{name}: flux density and flux lines", style)
    ax = figure.add_axes((0.015, 0.02, 0.845, 0.91))
    scale_ax = figure.add_axes((0.885, 0.12, 0.024, 0.72))
    draw_flux(ax, scale_ax, section, sector, solution, winding, style)
    return figure


def stress_figure(
    name: str, section: CrossSection, stress: StressSolution, ribs: RibReport, style: Style
) -> Figure:
    """Stress of the rotor's own period, with the most stressed ribs close up."""
    figure = _figure((11.0, 6.6), f"{name}: stress of the rotor lamination", style)
    ax = figure.add_axes((0.01, 0.02, 0.62, 0.91))
    scale_ax = figure.add_axes((0.925, 0.12, 0.02, 0.72))
    draw_stress(ax, scale_ax, section, stress, ribs, style)
    for k, (row, letter) in enumerate(zip(close_ups(ribs), LETTERS, strict=False)):
        close = figure.add_axes((0.66, 0.505 - 0.475 * k, 0.225, 0.375))
        draw_rib(close, section, stress, row, letter, style)
    return figure


def plastic_figure(name: str, section: CrossSection, study: PlasticStudy, style: Style) -> Figure:
    """Plastic zones after an overspeed test, with the ribs that yielded most close up."""
    figure = _figure((11.0, 6.6), f"{name}: plastic zones of the rotor lamination", style)
    ax = figure.add_axes((0.01, 0.02, 0.62, 0.91))
    scale_ax = figure.add_axes((0.925, 0.12, 0.02, 0.72))
    draw_plastic(ax, scale_ax, section, study, style)
    for k, (row, letter) in enumerate(zip(worst_ribs(study.report), LETTERS, strict=False)):
        close = figure.add_axes((0.66, 0.505 - 0.475 * k, 0.225, 0.375))
        draw_plastic_rib(close, section, study, row, letter, style)
    return figure


def torque_figure(
    name: str, section: CrossSection, waveform: TorqueWaveform, style: Style
) -> Figure:
    """Torque over 60 electrical degrees and its spectrum by order."""
    figure = _figure((9.0, 6.4), f"{name}: torque over 60 electrical degrees", style)
    draw_torque(figure.add_axes((0.08, 0.545, 0.765, 0.335)), waveform, style)
    below = figure.add_axes((0.08, 0.08, 0.765, 0.335))
    draw_spectrum(below, waveform, section.slots, style)
    return figure


def found_stator_figure(
    title: str, edges: Sequence[Edge], drawing: StatorDrawing, style: Style
) -> Figure:
    """A user's drawing (m) over the stator that was recognised in it."""
    figure = _figure((8.0, 8.2), title, style)
    ax = figure.add_axes((0.07, 0.055, 0.91, 0.9))
    draw_lines(ax, edges, style)
    draw_found_stator(ax, drawing, style)
    return figure


def found_rotor_figure(
    title: str, edges: Sequence[Edge], drawing: RotorDrawing, poles: int, style: Style
) -> Figure:
    """A user's drawing (m) over the rotor that was recognised in it."""
    figure = _figure((8.0, 8.2), title, style)
    ax = figure.add_axes((0.07, 0.055, 0.91, 0.9))
    draw_lines(ax, edges, style)
    draw_found_rotor(ax, drawing, poles, style)
    return figure


def fault_figure(title: str, edges: Sequence[Edge], place: complex, style: Style) -> Figure:
    """A user's drawing (m) with the place marked where it fails, and its surroundings."""
    figure = _figure((12.0, 6.4), title, style)
    whole = figure.add_axes((0.045, 0.075, 0.44, 0.84))
    draw_lines(whole, edges, style)
    draw_mark(whole, place, MARK_SHARE * extent(edges)[1], style)
    close = figure.add_axes((0.545, 0.075, 0.44, 0.84))
    draw_close_up(close, edges, place, style)
    return figure


# File names without ending, and who composes them. A run draws each as soon as it can.
COMPOSERS: dict[str, Callable[..., Figure]] = {
    "section": section_figure,
    "flux": flux_figure,
    "stress": stress_figure,
    "torque": torque_figure,
}
FIGURES: dict[str, Callable[[Pictured, Style], Figure]] = {
    "section": lambda r, style: section_figure(r.name, r.section, style),
    "flux": lambda r, style: flux_figure(r.name, r.section, r.winding, r.sector, r.solution, style),
    "stress": lambda r, style: stress_figure(r.name, r.section, r.stress, r.ribs, style),
    "torque": lambda r, style: torque_figure(r.name, r.section, r.waveform, style),
}


def _figure(size: tuple[float, float], title: str, style: Style) -> Figure:
    """An empty sheet of `size` inches with its title."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(figsize=size, dpi=style.dpi, facecolor=style.paper)
    FigureCanvasAgg(figure)
    figure.text(
        0.015,
        0.985,
        title,
        fontsize=style.title,
        fontweight="bold",
        color=style.ink,
        va="top",
    )
    return figure


def _save(figure: Figure, stem: Path, style: Style) -> tuple[Path, Path]:
    """Write one figure twice; each file appears whole, by a rename."""
    png, svg = stem.with_suffix(".png"), stem.with_suffix(".svg")
    with whole_file(png) as path:
        _write_png(figure, path, style)
    with whole_file(svg) as path:
        figure.savefig(path, format="svg", dpi=SVG_DPI, metadata=NO_METADATA)
    return png, svg


def _write_png(figure: Figure, path: Path, style: Style) -> None:
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from PIL import Image

    canvas = FigureCanvasAgg(figure)
    canvas.draw()
    # No transparency: three colours take two thirds of the time and space of four.
    size = canvas.get_width_height()
    image = Image.frombuffer("RGBA", size, canvas.buffer_rgba(), "raw", "RGBA", 0, 1).convert("RGB")
    dots = (style.dpi, style.dpi)
    image.save(path, format="png", compress_level=PNG_EFFORT, dpi=dots)
