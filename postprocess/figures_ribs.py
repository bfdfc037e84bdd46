"""Margin to yield and life of every rib, side by side."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from .figures import _figure, write_figure
from .figures_style import Style
from .rib_tables import RibRow, shown_ribs

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

MOST_DRAWN = 24  # ribs, most stressed first: more are named in the table alone
BAR = 0.6  # of a row
ROOM = 0.28  # inches of a row
FOOT, HEAD = 0.6, 0.6  # inches below and above all rows
FARTHEST = 100.0  # of the cycles that were tested, that the axis goes to
LIFE = ("life_2_3_percent_cycles", "life_50_percent_cycles", "life_97_7_percent_cycles")


@dataclass(frozen=True, slots=True, eq=False)
class RibsPicture:
    """What the picture shows."""

    name: str  # of the design
    rows: tuple[RibRow, ...]
    least_margin: float  # asked for
    tested_to: float | None  # cycles that the card's line was tested to; None without a life


def write_ribs_figure(folder: Path, shown: RibsPicture) -> tuple[Path, ...]:
    """Write the picture as PNG and SVG into an existing folder."""
    return write_figure(folder, "ribs", lambda style: ribs_figure(shown, style))


def ribs_figure(shown: RibsPicture, style: Style) -> Figure:
    """Margins as bars, lives as spans where there are any."""
    named = shown_ribs(shown.rows)[:MOST_DRAWN]
    height = FOOT + HEAD + ROOM * max(len(named), 3)
    figure = _figure((9.0, height), f"{shown.name}: ribs, most stressed first", style)
    low, tall = FOOT / height, 1.0 - (FOOT + HEAD) / height
    wide = 0.8 if shown.tested_to is None else 0.38
    draw_margins(figure.add_axes((0.16, low, wide, tall)), named, shown.least_margin, style)
    if shown.tested_to is not None:
        draw_lives(figure.add_axes((0.58, low, 0.38, tall)), named, shown.tested_to, style)
    return figure


def draw_margins(
    ax: Axes, named: Sequence[tuple[str, RibRow]], least_margin: float, style: Style
) -> None:
    """Draw the yield margin of each rib at overspeed, that asked for and yield itself."""
    margins = [row.values["yield_margin"] or 0.0 for _, row in named]
    most = 1.15 * max(*margins, least_margin)
    for at, margin in zip(_places(len(named)), margins, strict=True):
        colour = style.second if margin >= least_margin else style.accent
        ax.barh(at, margin, height=BAR, color=colour, zorder=2)
        ax.text(
            margin + 0.01 * most,
            at,
            f"{margin:.3g}",
            fontsize=style.text,
            color=style.ink,
            va="center",
            zorder=4,
        )
    ax.axvline(1.0, color=style.quiet, linewidth=style.hair, linestyle="--", zorder=3)
    ax.set_xlim(0.0, most)
    _line(ax, least_margin, f"asked {least_margin:.3g}", style)
    ax.set_xlabel("yield strength over peak stress at overspeed", fontsize=style.text)
    _rows(ax, [name for name, _ in named], style)


def draw_lives(
    ax: Axes, named: Sequence[tuple[str, RibRow]], tested_to: float, style: Style
) -> None:
    """Draw for each rib the starts until 2.3, 50 and 97.7 % are cracked, and where data end."""
    ax.set_xscale("log")
    spans = [tuple(row.values[key] for key in LIFE) for _, row in named]
    # Far beyond what was tested a place on the axis would say more than is known.
    last = FARTHEST * tested_to
    ends = [tested_to]
    for at, (low, median, high) in zip(_places(len(named)), spans, strict=True):
        if low is None or median is None or high is None or min(low / tested_to, high / last) > 1:
            ax.annotate(
                f"more than {tested_to:.2g}",
                (0.98, at),
                xycoords=("axes fraction", "data"),
                fontsize=style.text,
                fontstyle="italic",
                color=style.quiet,
                ha="right",
                va="center",
            )
            continue
        if low == 0.0:
            continue  # it bears no cycle: the caution says so
        ends.append(low)
        ax.plot([low, high], [at, at], color=style.second, linewidth=3.0, solid_capstyle="butt")
        ax.plot([median], [at], marker="o", markersize=5.0, color=style.ink, zorder=3)
    first = min(ends) / 3.0
    ax.axvspan(tested_to, last, color="#eef0f1", zorder=0)
    ax.set_xlim(first, last)
    _line(ax, tested_to, f"line tested to {tested_to:.2g}", style)
    ax.set_xlabel("starts until 2.3 %, half (dot), 97.7 % have cracked", fontsize=style.text)
    _rows(ax, [""] * len(named), style)


def _places(count: int) -> range:
    return range(count - 1, -1, -1)


def _line(ax: Axes, at: float, words: str, style: Style) -> None:
    """A limit across all rows, named above the frame towards the middle of it."""
    ax.axvline(at, color=style.accent, linewidth=1.0, zorder=3)
    share = ax.transAxes.inverted().transform(ax.transData.transform((at, 0.0)))[0]
    ax.annotate(
        words,
        (at, 1.0),
        xycoords=("data", "axes fraction"),
        xytext=(0.0, 4.0),
        textcoords="offset points",
        fontsize=style.text,
        color=style.accent,
        ha="left" if share < 0.3 else ("right" if share > 0.7 else "center"),
    )


def _rows(ax: Axes, names: Sequence[str], style: Style) -> None:
    ax.set_yticks(list(_places(len(names))), names, fontsize=style.text, color=style.ink)
    ax.set_ylim(-0.6, len(names) - 0.4)
    ax.xaxis.label.set_color(style.ink)
    for side in ("top", "right"):
        ax.spines[side].set_visible(False)
    for side in ("left", "bottom"):
        ax.spines[side].set(color=style.quiet, linewidth=style.hair)
    ax.tick_params(axis="x", which="both", labelsize=style.text, colors=style.ink)
    ax.tick_params(axis="y", length=0.0)
