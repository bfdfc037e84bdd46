"""A user's drawing as a picture: what was recognised in it, or the place where it fails.

Lines and arcs are drawn where the drawing has them, in mm of its own coordinates; what was
recognised is filled in its place beneath them.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.curves import Edge, Path
from lamwright.geometry.drawn_rotor import RotorDrawing
from lamwright.geometry.drawn_stator import StatorDrawing
from lamwright.geometry.palette import FILLS
from lamwright.geometry.section import Material

from .figures_style import MM, Style, inked, sampled

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MARK_SHARE = 0.035  # radius of a mark over the drawing's size
CLOSE_SHARE = 0.04  # half the width of the close-up over the drawing's size
MARGIN = 0.04  # of the drawing's size
PART_FILLS: dict[str, Material] = {"opening": "air", "wedge": "air", "copper": "copper"}


def draw_lines(ax: Axes, edges: Sequence[Edge], style: Style) -> None:
    """Draw the lines and arcs of a drawing (m), equal axes in mm, with room around."""
    from matplotlib.patches import PathPatch

    ink = PathPatch(inked([(edge,) for edge in edges], [1.0], closed=False), fill=False)
    ink.set(edgecolor=style.ink, linewidth=style.outline, zorder=3)
    ax.add_artist(ink)
    middle, reach = extent(edges)
    room = MM * reach * (1.0 + 2.0 * MARGIN)
    ax.set_xlim(MM * middle.real - room, MM * middle.real + room)
    ax.set_ylim(MM * middle.imag - room, MM * middle.imag + room)
    ax.set_aspect("equal")
    _plain(ax, style)


def draw_mark(ax: Axes, place: complex, radius: float, style: Style) -> None:
    """Ring a place (m) by a circle of `radius` m with a cross in its middle."""
    at = MM * place
    turns = np.exp(1j * np.linspace(0.0, 2.0 * math.pi, 90))
    ring = at + MM * radius * turns
    ax.plot(ring.real, ring.imag, color=style.accent, linewidth=3.0 * style.outline, zorder=5)
    ax.plot([at.real], [at.imag], marker="+", color=style.accent, markersize=style.text, zorder=6)


def draw_close_up(ax: Axes, edges: Sequence[Edge], place: complex, style: Style) -> None:
    """Draw the surroundings of a place, with the ends of all pieces as dots."""
    draw_lines(ax, edges, style)
    _, reach = extent(edges)
    room = 2.0 * CLOSE_SHARE * reach
    near = [p for e in edges for p in (e.start, e.end) if abs(p - place) < 2.0 * room]
    dots = MM * np.array(near or [place])
    ax.plot(dots.real, dots.imag, ".", color=style.second, markersize=4.0, zorder=4)
    draw_mark(ax, place, 0.25 * room, style)
    ax.set_xlim(MM * (place.real - room), MM * (place.real + room))
    ax.set_ylim(MM * (place.imag - room), MM * (place.imag + room))


def draw_found_stator(ax: Axes, drawing: StatorDrawing, style: Style) -> None:
    """Fill iron and slots of a recognised stator in their place in the drawing."""
    turns = [
        cmath.exp(1j * (drawing.turn + 2.0 * math.pi * k / drawing.slots))
        for k in range(drawing.slots)
    ]
    _ring(ax, drawing.axis, (drawing.bore_radius, drawing.outer_radius), FILLS["stator_steel"])
    for part in drawing.slot.parts:
        for turn in turns:
            path = _placed(part.outer, turn, drawing.axis)
            _fill(ax, path, FILLS[PART_FILLS[part.kind]])
    first = 1.01 * drawing.outer_radius * turns[0]
    _say(ax, drawing.axis + first, "slot 0", style)
    _axis_cross(ax, drawing.axis, 0.05 * drawing.outer_radius, style)


def draw_found_rotor(ax: Axes, drawing: RotorDrawing, poles: int, style: Style) -> None:
    """Fill iron, bore and cavities of a recognised rotor in their place.

    Barriers of the first period bear their numbers, ribs a stroke at their thinnest place.
    """
    pitch = 2.0 * math.pi / poles
    for k in range(poles):
        pole = drawing.poles[k % len(drawing.poles)]
        turn = cmath.exp(1j * (drawing.q_axis + k * pitch))
        _fill(ax, _placed(pole.iron.outer, turn, drawing.axis), FILLS["rotor_steel"])
        _fill(ax, _placed(pole.shaft.outer, turn, drawing.axis), FILLS["air"])
        for part in pole.air:
            path = _placed(part.outer, turn, drawing.axis)
            _fill(ax, path, FILLS["air"])
            if k < len(drawing.poles):
                _say(ax, complex(sampled(path).mean()), _short(part.name), style)
        if k < len(drawing.poles):
            for rib in pole.ribs:
                ends = MM * (np.array([rib.start, rib.end]) * turn + drawing.axis)
                ax.plot(ends.real, ends.imag, color=style.accent, linewidth=1.5, zorder=5)
    tip = drawing.axis + 1.06 * drawing.rotor_radius * cmath.exp(1j * drawing.q_axis)
    along = MM * np.array([drawing.axis, tip])
    dashes = (9, 2.5, 1.5, 2.5)
    ax.plot(along.real, along.imag, color=style.quiet, dashes=dashes, linewidth=style.outline)
    _say(ax, tip, "q axis", style)


def extent(edges: Sequence[Edge]) -> tuple[complex, float]:
    """Middle of a drawing and half its greater side, m."""
    points = np.array([edge.point(k / 4) for edge in edges for k in range(5)])
    low = complex(points.real.min(), points.imag.min())
    high = complex(points.real.max(), points.imag.max())
    size = high - low
    return 0.5 * (low + high), 0.5 * max(size.real, size.imag)


def _short(name: str) -> str:
    """The name of a cavity as it fits into it: 1, 2 a, hole 1."""
    return name.removeprefix("barrier_").replace("_", " ")


def _placed(path: Path, turn: complex, shift: complex) -> Path:
    return Path(
        tuple(Edge(e.start * turn + shift, e.end * turn + shift, e.bulge) for e in path.edges)
    )


def _fill(ax: Axes, path: Path, colour: str) -> None:
    from matplotlib.patches import PathPatch

    patch = PathPatch(inked([path.edges], [1.0], closed=True), zorder=1)
    patch.set(facecolor=colour, edgecolor=colour, linewidth=0.2)
    ax.add_artist(patch)


def _ring(ax: Axes, axis: complex, radii: tuple[float, float], colour: str) -> None:
    from matplotlib.patches import Annulus

    low, high = radii
    centre = (MM * axis.real, MM * axis.imag)
    ring = Annulus(centre, MM * high, MM * (high - low))
    ring.set(facecolor=colour, edgecolor="none", zorder=0.5)
    ax.add_artist(ring)


def _say(ax: Axes, at: complex, text: str, style: Style) -> None:
    box = {"facecolor": style.paper, "edgecolor": "none", "pad": 0.6, "alpha": 0.8}
    x, y = MM * at.real, MM * at.imag
    ax.text(
        x,
        y,
        text,
        fontsize=style.small,
        color=style.ink,
        ha="center",
        va="center",
        zorder=7,
        bbox=box,
    )


def _axis_cross(ax: Axes, axis: complex, reach: float, style: Style) -> None:
    for way in (1.0, 1j):
        ends = MM * (axis + reach * way * np.array([-1.0, 1.0]))
        ax.plot(ends.real, ends.imag, color=style.quiet, linewidth=style.hair, zorder=4)


def _plain(ax: Axes, style: Style) -> None:
    ax.tick_params(labelsize=style.small, colors=style.quiet, width=style.hair, length=2.0)
    ax.set_xlabel("mm of the drawing", fontsize=style.small, color=style.quiet)
    for spine in ax.spines.values():
        spine.set(color=style.quiet, linewidth=style.hair)
