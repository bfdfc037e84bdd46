"""Two outlines on each other: the second in the colour of its distance from the first."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.curves import Edge
from lamwright.geometry.outline_gaps import OutlineGaps
from lamwright.geometry.outline_places import place_text

from .figures import _figure, write_figure
from .figures_style import MM, Style, draw_scale, flux_colours, inked

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

UM = 1e6  # per m
LEAST_SCALE = 1.0  # um
LEAST_SHARE = 0.02  # of the largest distance, that is drawn in colour
DOT = 3.0  # points squared


def write_gaps(
    folder: Path, name: str, first: Sequence[Edge], second: Sequence[Edge], gaps: OutlineGaps
) -> tuple[Path, ...]:
    """Write the picture as PNG and SVG into an existing folder."""
    return write_figure(
        folder, "compare", lambda style: gaps_figure(name, first, second, gaps, style)
    )


def gaps_figure(
    name: str, first: Sequence[Edge], second: Sequence[Edge], gaps: OutlineGaps, style: Style
) -> Figure:
    """Both outlines, what of each is how far from the other, and the worst place."""
    figure = _figure((9.0, 7.8), f"{name}: distance of the outlines", style)
    limit = max(LEAST_SCALE, UM * gaps.largest[0])
    ax = figure.add_axes((0.02, 0.03, 0.8, 0.9))
    draw_gaps(ax, first, second, gaps, limit, style)
    scale = figure.add_axes((0.86, 0.2, 0.022, 0.6))
    draw_scale(scale, flux_colours(), (0.0, limit), "distance, um", style)
    return figure


def draw_gaps(
    ax: Axes,
    first: Sequence[Edge],
    second: Sequence[Edge],
    gaps: OutlineGaps,
    limit: float,
    style: Style,
) -> None:
    """Draw A as a thin line, B as a dashed one, distances as dots of their colour."""
    from matplotlib.patches import PathPatch

    for edges, dashes in ((first, "-"), (second, "--")):
        ink = PathPatch(inked([(edge,) for edge in edges], [1.0], closed=False), fill=False)
        ink.set(edgecolor=style.quiet, linewidth=style.hair, linestyle=dashes, zorder=2)
        ax.add_artist(ink)
    at = MM * np.concatenate([gaps.first, gaps.second])
    off = UM * np.concatenate([gaps.first_gap, gaps.second_gap])
    order = np.argsort(off)
    order = order[off[order] > LEAST_SHARE * limit]  # the rest is the lines' own
    ax.scatter(
        at.real[order],
        at.imag[order],
        c=off[order],
        s=DOT,
        cmap=flux_colours(),
        vmin=0.0,
        vmax=limit,
        linewidths=0.0,
        zorder=4,
        rasterized=True,
    )
    worst, place = gaps.largest
    ax.plot(
        [MM * place.real],
        [MM * place.imag],
        marker="o",
        markersize=12.0,
        fillstyle="none",
        color=style.accent,
        markeredgewidth=style.outline * 1.5,
        zorder=6,
    )
    least = "at least " if gaps.is_beyond else ""
    told = f"A full, B dashed; largest {least}{UM * worst:.4g} um at {place_text(place)}, ringed"
    ax.text(0.5, -0.005, told, transform=ax.transAxes, ha="center", va="top", fontsize=style.text)
    # Of drawings that tell no axis, the origin may lie anywhere.
    middle_x, middle_y = (0.5 * (v.max() + v.min()) for v in (at.real, at.imag))
    reach = 0.52 * float(max(np.ptp(at.real), np.ptp(at.imag)))
    ax.set_xlim(middle_x - reach, middle_x + reach)
    ax.set_ylim(middle_y - reach, middle_y + reach)
    ax.set_aspect("equal")
    ax.axis("off")
