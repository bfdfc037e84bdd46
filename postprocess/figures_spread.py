"""The spread of a design: where its machines lie against the limits, and which source spreads."""

from __future__ import annotations

from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from .figures import _figure, write_figure
from .figures_style import Style
from .spread import variance_shares
from .spread_tables import SpreadReport

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

DRAWN = (0, 3, 1, 2)  # torque and margin first: what a designer is held to
BINS = 48
MOST_BARS = 9
LESS = "#b9c5ce"  # machines that hold, and bars of the lower limit
TINY = 1e-12


def write_spread(
    folder: Path, report: SpreadReport, style: Style | None = None
) -> tuple[Path, ...]:
    """Write the picture of a spread as PNG and SVG into an existing folder."""
    return write_figure(folder, "spread", partial(spread_figure, report), style)


def spread_figure(report: SpreadReport, style: Style) -> Figure:
    """Four histograms with limits above, the sources of each below."""
    figure = _figure((13.0, 7.4), f"{report.design_name}: spread of made machines", style)
    share = report.share
    figure.text(
        0.985,
        0.984,
        f"{100.0 * share.value:.1f} % of {share.samples} machines hold all limits"
        f" ({100.0 * share.low:.1f} to {100.0 * share.high:.1f} %, 95 % confidence)",
        fontsize=style.text,
        color=style.ink,
        ha="right",
        va="top",
    )
    for column, k in enumerate(DRAWN):
        left = 0.145 + 0.214 * column
        draw_histogram(figure.add_axes((left, 0.56, 0.19, 0.32)), report, k, style)
        ax = figure.add_axes((left, 0.085, 0.19, 0.345))
        draw_sources(ax, report, k, style)
        if column:
            ax.tick_params(labelleft=False, left=False)
    return figure


def draw_histogram(ax: Axes, report: SpreadReport, k: int, style: Style) -> None:
    """Draw how many machines have which value of figure `k`, its limit, and the checked ones."""
    figure, values = report.model.figures[k], report.values[:, k]
    counts, edges = np.histogram(values, bins=BINS)
    percent = 100.0 * counts / len(values)
    ax.bar(
        edges[:-1], percent, np.diff(edges), align="edge", color=LESS, edgecolor=style.quiet,
        linewidth=style.hair,
    )  # fmt: skip
    top = 1.3 * float(percent.max())
    ax.axvline(report.model.nominal[k], color=style.second, linewidth=1.0, label="as drawn")
    ax.plot(
        report.solved[:, k],
        np.full(len(report.solved), 0.94 * top),
        linestyle="none",
        marker="|",
        markersize=7.0,
        markeredgewidth=0.7,
        color=style.ink,
        label="solved in full",
    )
    if figure.limit is not None:
        _draw_limit(ax, report, k, style)
    ax.set_ylim(0.0, top)
    unit = f", {figure.unit}" if figure.unit else ""
    ax.set_xlabel(f"{figure.label}{unit}", fontsize=style.text, color=style.ink)
    if k == DRAWN[0]:
        ax.set_ylabel("machines, %", fontsize=style.text, color=style.ink)
    _plain(ax, style, ("bottom", "left"))
    ax.legend(
        loc="lower left",
        bbox_to_anchor=(-0.04, 1.0),
        ncols=3,
        frameon=False,
        fontsize=style.small,
        labelcolor=style.ink,
        handlelength=1.1,
        columnspacing=0.9,
        handletextpad=0.4,
    )


def _draw_limit(ax: Axes, report: SpreadReport, k: int, style: Style) -> None:
    """The limit as a line where it is near, as an arrow's words where it is far."""
    limit, values = report.model.figures[k].limit, report.values[:, k]
    assert limit is not None
    low, high = float(values.min()), float(values.max())
    width = high - low or abs(high) or 1.0
    if low - 1.2 * width <= limit <= high + 1.2 * width:
        ax.axvline(limit, color=style.accent, linewidth=1.2, label=f"limit {limit:g}")
        return
    is_left = limit < low
    ax.plot([], [], color=style.accent, linewidth=1.2, label=f"limit {limit:g} far off")
    ax.annotate(
        "",
        xy=(0.0 if is_left else 1.0, 0.8),
        xytext=(0.09 if is_left else 0.91, 0.8),
        xycoords="axes fraction",
        arrowprops={"arrowstyle": "->", "color": style.accent, "linewidth": 1.2},
    )


def draw_sources(ax: Axes, report: SpreadReport, k: int, style: Style) -> None:
    """Draw the change of figure `k` at both limits of each source, in % of its value as drawn."""
    model = report.model
    order = _order(report)
    height = np.arange(len(order))[::-1]
    scale = 100.0 / abs(float(model.nominal[k]))
    shares = 100.0 * variance_shares(model)[order, k] if order else np.zeros(0)
    ends = np.array([[model.effects[j].low[k], model.effects[j].high[k]] for j in order]) * scale
    ends = ends.reshape(len(order), 2)
    for column, colour, label in ((1, style.second, "at + limit"), (0, LESS, "at - limit")):
        ax.barh(
            height, ends[:, column], height=0.6 - 0.18 * column, color=colour,
            edgecolor=style.ink, linewidth=style.hair, label=label, zorder=2 + column,
        )  # fmt: skip
    reach = 1.5 * float(np.abs(ends).max(initial=0.0)) or 1.0
    for at, share in zip(height, shares, strict=True):
        if share >= 0.5:
            ax.text(
                0.99, at, f"{share:.0f} %", transform=ax.get_yaxis_transform(),
                fontsize=style.small, color=style.ink, ha="right", va="center",
            )  # fmt: skip
    ax.axvline(0.0, color=style.ink, linewidth=style.outline)
    ax.set_xlim(-reach, reach)
    ax.set_ylim(-0.7, len(order) - 0.3)
    ax.set_yticks(height, [_told(report, j) for j in order])
    label = model.figures[k].label.split(",")[0]
    ax.set_xlabel(f"change of {label}, %", fontsize=style.text, color=style.ink)
    ax.set_title("share of variance", fontsize=style.small, color=style.quiet, loc="right", pad=3.0)
    ax.grid(axis="x", color=style.quiet, alpha=0.22, linewidth=style.hair)
    ax.set_axisbelow(True)
    _plain(ax, style, ("bottom",))
    if k == DRAWN[0]:
        ax.legend(
            loc="lower left", bbox_to_anchor=(-0.05, 1.0), ncols=2, frameon=False,
            fontsize=style.small, labelcolor=style.ink, handlelength=1.1, columnspacing=0.9,
            borderaxespad=0.1,
        )  # fmt: skip


def _order(report: SpreadReport) -> list[int]:
    """Sources by their greatest share in any drawn figure's variance, at most `MOST_BARS`."""
    shares = variance_shares(report.model)[:, list(DRAWN)]
    if not shares.size:
        return []
    order = np.argsort(-shares.max(axis=1), kind="stable")
    return [int(k) for k in order[:MOST_BARS]]


def _told(report: SpreadReport, number: int) -> str:
    source = report.model.effects[number].source
    return f"{source.label}\n+-{source.limit:g} {source.unit}".rstrip()


def _plain(ax: Axes, style: Style, kept: tuple[str, ...]) -> None:
    ax.tick_params(labelsize=style.small, colors=style.ink, width=style.hair)
    for name, spine in ax.spines.items():
        spine.set_visible(name in kept)
        spine.set(color=style.quiet, linewidth=style.hair)
