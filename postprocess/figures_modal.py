"""Shapes of the lowest modes, and frequencies over speed with the lines of all orders."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from lamwright.solver.isoparametric import boundary_edges
from lamwright.solver.modal import Mode, Period
from lamwright.solver.types import FloatArray

from .figures import _figure
from .figures_labels import spread
from .figures_style import MM, ComplexArray, Style, pixels_per_point
from .modal_tables import Speeds
from .quantities import RPM
from .resonances import Driver, Lamination, driver, meetings

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

SHAPES = 4  # lowest modes of each lamination
GROWN = 0.07  # of the outer radius, the largest displacement drawn
ROOM = 1.13  # half the side of a drawing over the outer radius
LINES = 5  # modes of each lamination in the chart of frequencies
HEADROOM = 1.16  # of the chart over its highest mode, for two rows of numbers
MANY_EDGES = 4000  # beyond, lines of full width run together
RAISED = 0.85  # of the size of letters, that a mode's name stands above its line
PITCH = 1.35  # least distance of labels over the size of letters
DRIVEN: dict[Driver, str] = {
    "field": "modes that the gap's field can shake",
    "offset axis": "those it can with the axis off the middle",
    "neither": "those that it cannot",
}


def modal_figure(
    name: str, laminations: Sequence[Lamination], speeds: Speeds, style: Style
) -> Figure:
    """Four modes of the free rotor and of the stator, and both over speed."""
    figure = _figure((11.0, 9.6), f"{name}: lowest modes of the laminations", style)
    free, held, stator = laminations
    for row, lamination in enumerate((free, stator)):
        for k, mode in enumerate(lamination.modes[:SHAPES]):
            ax = figure.add_axes((0.012 + 0.247 * k, 0.705 - 0.275 * row, 0.235, 0.225))
            draw_mode(ax, lamination, mode, style)
    for lamination, left, is_named in (
        (free, 0.05, False),
        (held, 0.3, True),
        (stator, 0.68, True),
    ):
        ax = figure.add_axes((left, 0.055, 0.18, 0.285))
        draw_frequencies(ax, lamination, speeds, style, is_named=is_named)
    for k, (kind, text) in enumerate(DRIVEN.items()):
        figure.text(0.05 + 0.27 * k, 0.395, text, fontsize=style.text, color=_colours(style)[kind])
    return figure


def draw_mode(ax: Axes, lamination: Lamination, mode: Mode, style: Style) -> None:
    """Draw one mode of the whole lamination over it at rest; equal axes in mm."""
    from matplotlib.collections import LineCollection

    at_rest, moved = mode_lines(lamination.period, mode)
    thin = 0.5 if len(moved) > MANY_EDGES else 1.0
    for lines, colour, width in (
        (at_rest, style.quiet, 0.6 * style.hair),
        (moved, style.accent, thin * style.outline),
    ):
        pairs = np.stack([lines.real, lines.imag], axis=-1)
        ax.add_collection(
            LineCollection(list(pairs), colors=colour, linewidths=width, rasterized=True)
        )
    half = ROOM * MM * float(np.hypot(*lamination.period.body.mesh.nodes.T).max())
    ax.set_xlim(-half, half)
    ax.set_ylim(-half, half)
    ax.set_aspect("equal")
    ax.axis("off")
    two = ", two alike" if mode.is_pair else ""
    ax.set_title(
        f"{lamination.name}: {mode.frequency:.0f} Hz{two}\n{waves_text(mode)}",
        fontsize=style.text,
        color=style.ink,
        pad=1.0,
    )


def waves_text(mode: Mode) -> str:
    """How many waves round the outer edge, in words of the trade."""
    share = f"{100.0 * mode.wave_share:.0f} % of the edge's motion"
    return f"{_count(mode)}, {share}"


def _count(mode: Mode) -> str:
    return {0: "no wave", 1: "1 wave"}.get(mode.waves, f"{mode.waves} waves")


def mode_lines(period: Period, mode: Mode) -> tuple[ComplexArray, ComplexArray]:
    """Edges (n_edge, 3) in mm of the whole body at rest and as it moves most, start to end."""
    mesh, sides = period.body.mesh, period.sides
    edges = boundary_edges(mesh)
    is_side = np.isin(edges[:, 2], np.concatenate([sides.first, sides.second]))
    edges = edges[~is_side][:, [0, 2, 1]]
    place = mesh.nodes @ [1.0, 1j]
    square = np.sum(mode.shape**2)  # its phase is that of the instant of most motion
    instant = np.exp(-0.5j * np.angle(square)) if abs(square) > 0.0 else 1.0
    angle = 2.0 * math.pi / period.periods
    at_rest: list[ComplexArray] = []
    moved: list[ComplexArray] = []
    for k in range(period.periods):
        now = (mode.shape * instant * np.exp(1j * mode.index * angle * k)).real
        turn = np.exp(1j * angle * k)
        at_rest.append((place * turn)[edges])
        moved.append(((now @ [1.0, 1j]) * turn)[edges])
    rest, by = np.concatenate(at_rest), np.concatenate(moved)
    grown = rest + GROWN * np.abs(place).max() / np.abs(by).max() * by
    return np.asarray(MM * rest), np.asarray(MM * grown, dtype=np.complex128)


def draw_frequencies(
    ax: Axes, lamination: Lamination, speeds: Speeds, style: Style, *, is_named: bool
) -> None:
    """Draw modes as level lines and orders as rays over speed in 1/min; circles where they meet.

    Orders have their names beside the axes if `is_named`.
    """
    modes = lamination.modes[:LINES]
    top = 1e-3 * HEADROOM * max(mode.frequency for mode in modes)
    end = RPM * speeds.overspeed
    ax.set_xlim(0.0, end)
    ax.set_ylim(0.0, top)
    colours = _colours(style)
    for mode in modes:
        colour = colours[driver(mode, lamination.sectors)]
        ax.axhline(1e-3 * mode.frequency, color=colour, linewidth=0.9, zorder=3)
    for order in lamination.orders:
        height = 1e-3 * order.times * end / 60.0
        ax.plot([0.0, end], [0.0, height], color=style.quiet, linewidth=style.hair)
    for speed, text in ((speeds.rated, "rated"), (speeds.maximum, "maximum")):
        ax.axvline(RPM * speed, color=style.ink, linewidth=style.hair, dashes=(2, 2))
        ax.text(
            RPM * speed,
            1.01,
            text,
            transform=ax.get_xaxis_transform(),
            ha="center",
            va="bottom",
            fontsize=style.small,
            color=style.ink,
        )
    for meeting in meetings((lamination,), speeds.overspeed):
        if meeting.number <= LINES:
            ax.plot(
                RPM * meeting.speed,
                1e-3 * meeting.mode.frequency,
                "o",
                color=colours[driver(meeting.mode, lamination.sectors)],
                markersize=3.2,
                zorder=7,
            )
    if is_named:
        _name_orders(ax, lamination, top, end, style)
    _name_modes(ax, lamination, modes, style)
    ax.set_title(lamination.name, fontsize=style.text, color=style.ink, pad=14.0)
    ax.set_xlabel("speed in 1/min", fontsize=style.text, color=style.ink)
    ax.set_ylabel("frequency in kHz", fontsize=style.text, color=style.ink)
    ax.tick_params(labelsize=style.text, colors=style.ink, width=style.hair)
    ax.locator_params(axis="x", nbins=5)
    for spine in ax.spines.values():
        spine.set(color=style.ink, linewidth=style.hair)


def _colours(style: Style) -> dict[Driver, str]:
    return {"field": style.accent, "offset axis": style.second, "neither": style.quiet}


def _name_orders(ax: Axes, lamination: Lamination, top: float, end: float, style: Style) -> None:
    """Names right of the axes where the rays leave them; above the axes those that leave there."""
    rays = [(order, 1e-3 * order.times * end / 60.0) for order in lamination.orders]
    beside = [(order, height) for order, height in rays if height <= top]
    heights = _spread(ax, np.array([height for _, height in beside]), style)
    for (order, height), at in zip(beside, heights, strict=True):
        _leader(ax, f"{order.times}: {order.name}", height, float(at), style)
    above = [(order, end * top / height) for order, height in rays if height > top]
    for k, (order, x) in enumerate(above):  # their numbers just inside, in two rows
        at = (0.985 - 0.045 * (k % 2)) * top
        ax.text(
            x * at / top,
            at,
            f"{order.times} ",
            fontsize=style.small,
            color=style.quiet,
            ha="right",
            va="top",
            zorder=6,
        )


def _leader(ax: Axes, text: str, height: float, at: float, style: Style) -> None:
    across = ax.get_yaxis_transform()
    ax.plot(
        [1.0, 1.02, 1.04], [height, at, at], transform=across, color=style.quiet,
        linewidth=style.hair, clip_on=False,
    )  # fmt: skip
    ax.text(1.05, at, text, transform=across, fontsize=style.small, color=style.ink, va="center")


def _name_modes(ax: Axes, lamination: Lamination, modes: Sequence[Mode], style: Style) -> None:
    """Waves of each mode inside, at the left above its line, pushed apart where they are near.

    Above it, as meetings at low speeds lie on the line.
    """
    low, high = ax.get_ylim()
    per_point = (high - low) / ax.get_window_extent().height * pixels_per_point(ax)
    lines = np.array([1e-3 * mode.frequency for mode in modes])
    heights = _spread(ax, lines + RAISED * style.small * per_point, style)
    for mode, at in zip(modes, heights, strict=True):
        ax.text(
            0.02 * ax.get_xlim()[1],
            float(at),
            _count(mode),
            fontsize=style.small,
            color=_colours(style)[driver(mode, lamination.sectors)],
            va="center",
            zorder=6,
            bbox={"facecolor": style.paper, "edgecolor": "none", "pad": 0.0},
        )


def _spread(ax: Axes, wanted: FloatArray, style: Style) -> FloatArray:
    """Heights of labels, apart by the size of letters."""
    low, high = ax.get_ylim()
    per_point = (high - low) / ax.get_window_extent().height * pixels_per_point(ax)
    pitch = PITCH * style.small * per_point
    return spread(wanted, pitch, low + 0.5 * pitch, high)
