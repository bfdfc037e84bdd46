"""A study as parallel axes: a line for each design across keys, figures and goals."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from lamwright.solver.types import FloatArray

from .figures_study_marks import DASHES, FAILED, limit_text, shown, wrapped
from .figures_style import Style
from .studied import Studied, StudyAxis, best_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MOST_AXES = 10
MOST_LINES = 1000  # drawn as lines in an SVG; more are an image there
TICKS = 5
EDGE = 0.03  # of an axis' height beyond its least and greatest value
BAR = 0.035  # half width of a limit's bar, axes being 1 apart


def parallel_axes(studied: Studied) -> tuple[StudyAxis, ...]:
    """Keys, then limits and others, then goals, as many as fit; what does not vary is left out."""
    varying = [axis for axis in (*studied.keys, *studied.figures) if _span(axis)[1] > 0.0]
    kept = [axis for axis in varying if axis.sense is not None]
    for axis in varying:
        if axis.sense is None and len(kept) < MOST_AXES:
            kept.append(axis)
    order = [axis for axis in varying if any(axis is one for one in kept)]
    keys = [axis for axis in order if axis.is_key]
    others = [axis for axis in order if not axis.is_key and axis.sense is None]
    return (*keys, *others, *(axis for axis in order if axis.sense is not None))


def draw_parallel(ax: Axes, studied: Studied, axes: Sequence[StudyAxis], style: Style) -> None:
    """Draw the lines: grey where a limit is missed, blue where all hold, the best of each goal red.

    Better is up on the axis of a goal. A red bar covers what a limit forbids.
    """
    heights = np.column_stack([_heights(axis) for axis in axes])
    places = np.arange(len(axes))
    bests = dict.fromkeys(best_of(goal, studied.passes) for goal in studied.goals)
    for passing, colour, order in ((False, FAILED, 2), (True, style.second, 3)):
        lines = heights[studied.passes == passing]
        strong = float(np.clip(25.0 / max(1, len(lines)), 0.12, 0.9))
        drawn = ax.plot(places, lines.T, color=colour, linewidth=0.9, alpha=strong, zorder=order)
        for line in drawn:
            line.set_rasterized(len(lines) > MOST_LINES)
    for best, dash in zip(bests, DASHES, strict=False):
        if best is not None:
            ax.plot(
                places,
                heights[best],
                color=style.accent,
                linewidth=1.8,
                linestyle=dash,
                marker="o",
                markersize=3.0,
                zorder=5,
            )
    for place, axis in enumerate(axes):
        _draw_axis(ax, place, axis, style)
    ax.set_xlim(-0.45, len(axes) - 0.55)
    ax.set_ylim(-0.02, 1.02)
    ax.set_axis_off()


def _draw_axis(ax: Axes, place: int, axis: StudyAxis, style: Style) -> None:
    from matplotlib.patches import Rectangle
    from matplotlib.patheffects import Normal, Stroke

    ax.plot([place, place], [0.0, 1.0], color=style.ink, linewidth=style.outline, zorder=6)
    for low, high in _forbidden(axis):
        bar = Rectangle((place - BAR, low), 2.0 * BAR, high - low, zorder=6)
        bar.set(facecolor=style.accent, edgecolor=style.accent, alpha=0.35, linewidth=style.hair)
        ax.add_artist(bar)
    _write_limits(ax, place, axis, style)
    halo = [Stroke(linewidth=2.2, foreground=style.paper), Normal()]
    for value, text in _ticks(axis):
        height = float(_height(axis, np.array([value]))[0])
        ax.plot([place - 0.02, place], [height] * 2, color=style.ink, linewidth=style.hair)
        ax.text(
            place - 0.035,
            height,
            text,
            fontsize=style.small,
            color=style.ink,
            ha="right",
            va="center",
            zorder=8,
            path_effects=halo,
        )
    goal = "" if axis.sense is None else f"\ngoal: {axis.sense}, up"
    limit = f"\n{limit_text(axis)}" if limit_text(axis) else ""
    ax.text(
        place,
        1.03,
        wrapped(axis.title, 17) + goal + limit,
        fontsize=style.text,
        fontweight="bold" if axis.sense else "normal",
        color=style.ink,
        ha="center",
        va="bottom",
    )


def _write_limits(ax: Axes, place: int, axis: StudyAxis, style: Style) -> None:
    """Limits within the axis, on its right."""
    for limit in (axis.least, axis.most):
        if limit is not None:
            height = float(_height(axis, np.array([limit]))[0])
            if 0.0 <= height <= 1.0:
                ax.text(
                    place + 1.6 * BAR,
                    height,
                    shown(limit),
                    fontsize=style.small,
                    fontweight="bold",
                    color=style.accent,
                    va="center",
                    zorder=8,
                )


def _ticks(axis: StudyAxis) -> list[tuple[float, str]]:
    from matplotlib.ticker import MaxNLocator

    if axis.texts:
        return [(float(k), text) for k, text in enumerate(axis.texts)]
    low, size = _span(axis)
    values = np.unique(axis.values[np.isfinite(axis.values)])
    if not (axis.is_key and values.size <= 8):
        locator = MaxNLocator(TICKS, steps=[1, 2, 2.5, 5, 10])
        values = np.array(locator.tick_values(low, low + size), dtype=float)
    inside = (values >= low - 1e-9 * size) & (values <= low + size * (1.0 + 1e-9))
    return [(float(value), shown(value)) for value in values[inside]]


def _forbidden(axis: StudyAxis) -> list[tuple[float, float]]:
    """Runs of heights that the limits forbid."""
    runs = []
    for limit, side in ((axis.least, 0.0), (axis.most, 1.0)):
        if limit is not None:
            at = float(np.clip(_height(axis, np.array([limit]))[0], 0.0, 1.0))
            end = 1.0 - side if axis.sense == "least" else side
            if at != end:
                runs.append((min(at, end), max(at, end)))
    return runs


def _heights(axis: StudyAxis) -> FloatArray:
    return _height(axis, axis.values)


def _height(axis: StudyAxis, values: FloatArray) -> FloatArray:
    low, size = _span(axis)
    share = EDGE + (1.0 - 2.0 * EDGE) * (values - low) / size
    return np.asarray(1.0 - share if axis.sense == "least" else share)


def _span(axis: StudyAxis) -> tuple[float, float]:
    """Least value and range; limits that are near belong to it."""
    finite = axis.values[np.isfinite(axis.values)]
    if not finite.size:
        return 0.0, 0.0
    low, high = float(finite.min()), float(finite.max())
    size = high - low
    for limit in (axis.least, axis.most):
        if limit is not None and low - 0.3 * size <= limit <= high + 0.3 * size:
            low, high = min(low, limit), max(high, limit)
    return low, high - low
