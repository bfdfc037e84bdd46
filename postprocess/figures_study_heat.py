"""A figure over two keys as a map of cells: colours, values, what is not possible."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np

from .figures_study_marks import frame
from .figures_style import Style, pixels_per_point
from .studied import IntArray, Studied, StudyAxis, best_of, cells_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.colors import LinearSegmentedColormap

HATCHES = ("////", "....", "xxxx", "\\\\\\\\", "++++", "----")  # of reasons, in their order
ROOM = 1.1  # of a cell's width to its text's
DARK = 0.45  # of the scale, above which letters are white


def sides_of(studied: Studied) -> tuple[StudyAxis, StudyAxis]:
    """The keys along x and y: texts along x, where they have room; else the key of more values."""
    one, other = studied.keys
    sizes = [(bool(key.texts), np.unique(key.values).size) for key in (one, other)]
    return (one, other) if sizes[0] >= sizes[1] else (other, one)


def value_colours(figure: StudyAxis) -> LinearSegmentedColormap:
    """The scale of a figure: straw through teal to night blue, lightness falling all the way.

    Dark is better, and more where neither goal nor limit says what is. Blue against yellow reads
    with each kind of colour-blindness.
    """
    from matplotlib.colors import LinearSegmentedColormap

    stops = ["#fcf7dc", "#e3e2b0", "#a9cda0", "#6ab19a", "#3c8f92", "#2a6a82", "#27466b", "#1f2347"]
    if is_less_better(figure):
        stops.reverse()
    return LinearSegmentedColormap.from_list("lamwright_values", stops, N=512)


def is_less_better(figure: StudyAxis) -> bool:
    """Whether goal or limit ask for little."""
    if figure.sense is not None:
        return figure.sense == "least"
    return figure.most is not None and figure.least is None


def draw_heat(
    ax: Axes, studied: Studied, figure: StudyAxis, hatches: Mapping[str, str], style: Style
) -> None:
    """Draw a cell for each pair of key values.

    Args:
        ax: axes with the size at which they will be shown.
        studied: a study of two keys, see `studied.is_grid`.
        figure: what the colours show.
        hatches: by the class of reason why a design has no figures.
        style: sizes and colours.
    """
    from matplotlib.patches import Rectangle

    keys = sides_of(studied)
    first, second, cells = cells_of(keys)
    values = np.where(cells >= 0, figure.values[cells], np.nan)
    low, high = np.nanmin(values), np.nanmax(values)
    ax.imshow(
        values, cmap=value_colours(figure), aspect="auto", origin="lower", vmin=low, vmax=high
    )
    decimals = _decimals(low, high)
    texts = {}
    for (row, column), k in np.ndenumerate(cells):
        if k < 0 or not np.isfinite(figure.values[k]):
            box = Rectangle((column - 0.5, row - 0.5), 1.0, 1.0, zorder=2)
            hatch = hatches.get(studied.reasons[k], "") if k >= 0 else ""
            box.set(facecolor="#f1f2f3", edgecolor="#8d979f", hatch=hatch, linewidth=0.0)
            ax.add_artist(box)
        else:
            texts[row, column] = f"{figure.values[k]:.{decimals}f}"
    _frame_passing(ax, studied, cells, style)
    _write_values(ax, studied, figure, cells, texts, (low, high), style)
    for target, key, at in (
        (ax.xaxis, keys[0], first),
        (ax.yaxis, keys[1], second),
    ):
        step = max(1, int(np.ceil(at.size / 14)))
        names = [key.texts[int(v)] if key.texts else f"{v:.4g}" for v in at]
        target.set_ticks(range(0, at.size, step), names[::step])
    ax.set_xlabel(keys[0].title, fontsize=style.text, color=style.ink)
    ax.set_ylabel(keys[1].title, fontsize=style.text, color=style.ink)
    if keys[1].texts:
        ax.tick_params(axis="y", labelrotation=90.0)
    frame(ax, style)


def _decimals(low: float, high: float) -> int:
    """Behind the point: three digits in all, four where the values lie close together."""
    largest = max(abs(low), abs(high))
    if largest == 0.0:
        return 0
    digits = 4 if high - low < 0.2 * largest else 3
    return max(0, digits - 1 - math.floor(math.log10(largest)))


def _frame_passing(ax: Axes, studied: Studied, cells: IntArray, style: Style) -> None:
    """A line around the cells whose designs hold every limit, as around a field on a map."""
    holds = np.pad((cells >= 0) & studied.passes[cells], 1)
    for (row, column), inside in np.ndenumerate(holds):
        if not inside:
            continue
        x, y = column - 1.5, row - 1.5  # lower left corner, the pad taken off
        for beside, line in (
            (holds[row - 1, column], ([x, x + 1], [y, y])),
            (holds[row + 1, column], ([x, x + 1], [y + 1, y + 1])),
            (holds[row, column - 1], ([x, x], [y, y + 1])),
            (holds[row, column + 1], ([x + 1, x + 1], [y, y + 1])),
        ):
            if not beside:
                ax.plot(*line, color=style.paper, linewidth=3.2, zorder=4)
                ax.plot(*line, color=style.accent, linewidth=1.8, zorder=5)


def _write_values(
    ax: Axes,
    studied: Studied,
    figure: StudyAxis,
    cells: IntArray,
    texts: Mapping[tuple[int, int], str],
    span: tuple[float, float],
    style: Style,
) -> None:
    """Values in the cells where the widest finds room; the best design's in a box."""
    if not texts:
        return
    longest = max(texts.values(), key=len)
    ink = ax.text(0, 0, longest, fontsize=style.small)
    box, frame_box = ink.get_window_extent(), ax.get_window_extent()
    ink.remove()
    rows, columns = cells.shape
    points = pixels_per_point(ax)
    has_room = ROOM * box.width < frame_box.width / columns
    has_room = has_room and 1.5 * style.small * points < frame_box.height / rows
    best = best_of(figure, studied.passes) if figure.sense is not None else None
    for (row, column), text in texts.items():
        k = cells[row, column]
        share = (figure.values[k] - span[0]) / ((span[1] - span[0]) or 1.0)
        share = 1.0 - share if is_less_better(figure) else share
        colour = style.paper if share > DARK else style.ink
        if k == best:
            ax.text(
                column,
                row,
                text if has_room else "\N{BLACK STAR}",
                fontsize=style.small,
                fontweight="bold",
                color=style.accent,
                ha="center",
                va="center",
                zorder=6,
                bbox={"boxstyle": "round,pad=0.12", "facecolor": style.paper, "linewidth": 0.0},
            )
        elif has_room:
            ax.text(
                column,
                row,
                text,
                fontsize=style.small,
                color=colour,
                ha="center",
                va="center",
                zorder=6,
            )
