"""Main effects: a figure over each key, mean and spread of the designs that share a value."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from .figures_study_marks import frame, tick_texts
from .figures_style import Style
from .studied import Effect, StudyAxis

if TYPE_CHECKING:
    from matplotlib.axes import Axes

FEW = 60  # designs, whose points lie above the curve; more would hide it
POINT = "#8d979f"
BAR_TOLD = (
    "line: mean of the designs at this value, or in this eighth of many; bar: one standard "
    "deviation of them, by the other keys; grey: the designs, with their error bars where known"
)


def draw_effect(
    ax: Axes,
    key: StudyAxis,
    figure: StudyAxis,
    effect: Effect,
    span: tuple[float, float],
    style: Style,
) -> None:
    """Draw the designs as points, their means with bars, and the figure's limits; y over `span`."""
    is_few = key.values.size <= FEW
    ax.errorbar(
        effect.at,
        effect.mean,
        yerr=effect.deviation,
        color=style.second,
        linewidth=1.4,
        marker="o",
        markersize=4.0,
        elinewidth=1.0,
        capsize=2.5,
        zorder=3,
    )
    ax.errorbar(
        key.values,
        figure.values,
        yerr=None if figure.errors is None or not is_few else np.nan_to_num(figure.errors),
        elinewidth=1.0,
        linestyle="none",
        marker="o",
        markersize=2.6 if is_few else 1.8,
        color=POINT,
        markeredgewidth=0.0,
        zorder=4 if is_few else 2,
    )
    ax.margins(x=0.08)
    low, high = span
    for limit, is_least in ((figure.least, True), (figure.most, False)):
        if limit is not None and low < limit < high:
            ends = (low, limit) if is_least else (limit, high)
            area = ax.axhspan(*ends, zorder=0, linewidth=0)
            area.set(facecolor="none", edgecolor=style.accent, hatch="///", alpha=0.22)
            ax.axhline(limit, color=style.accent, linewidth=1.0, zorder=1)
    ax.set_ylim(low, high)
    tick_texts(ax, key, "x")
    ax.set_xlabel(key.title, fontsize=style.text, color=style.ink)
    ax.grid(axis="y", color=style.quiet, alpha=0.15, linewidth=style.hair)
    frame(ax, style)


def effects_span(figure: StudyAxis, effects: Sequence[Effect]) -> tuple[float, float]:
    """Least and greatest of what curves of effects draw, with some room."""
    ends = [figure.values[np.isfinite(figure.values)]]
    ends += [one.mean + sign * one.deviation for one in effects for sign in (-1.0, 1.0)]
    drawn = np.concatenate(ends)
    low, high = float(drawn.min()), float(drawn.max())
    room = 0.07 * (high - low) or 0.5
    return low - room, high + room


def share_told(effect: Effect, figure: StudyAxis) -> str:
    """How far the means of an effect reach, in the figure's unit."""
    if not effect.mean.size:
        return "no designs"
    reach = float(np.ptp(effect.mean))
    return f"means reach over {reach:.3g} {figure.unit}".rstrip()
