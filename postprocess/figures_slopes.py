"""The tornado: what a small step of each key does to the figures, the strongest on top."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from .figures import SETTINGS, _figure, _save
from .figures_style import Style
from .slopes import ANGLE_STEP, LENGTH_STEP, SHAPE_FIGURES, KeySlope, SlopeTable

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MOST_BARS = 18  # keys drawn; the table holds all
PANELS = ("torque", "saliency", "rib_peak")
HEADROOM = 1.32  # of the longest bar, for the number at its end
ROUNDING = 1e-9  # %, below it a change is none
LESS = "#b9c5ce"  # bars of a step down


def write_slopes(folder: Path, table: SlopeTable, style: Style | None = None) -> tuple[Path, ...]:
    """Write the tornado of a design as PNG and SVG into an existing folder."""
    import matplotlib

    style = style or Style()
    # Users' settings must not change a figure, nor a figure theirs.
    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(SETTINGS)
        figure = _figure((11.0, 6.6), f"{table.design_name}: what each key is worth", style)
        figure.text(
            0.985,
            0.982,
            f"change per {LENGTH_STEP:g} mm or {ANGLE_STEP:g} degree at {table.i_d:.2f} A d,"
            f" {table.i_q:.2f} A q",
            fontsize=style.text,
            color=style.quiet,
            ha="right",
            va="top",
        )
        for k, name in enumerate(PANELS):
            ax = figure.add_axes((0.235 + 0.257 * k, 0.085, 0.235, 0.79))
            draw_tornado(ax, table, name, style)
            if k:
                ax.tick_params(labelleft=False)
        return _save(figure, folder / "slopes", style)


def draw_tornado(ax: Axes, table: SlopeTable, figure: str, style: Style) -> None:
    """Draw the change of one figure in percent, a bar each way for each key.

    Args:
        ax: where to draw.
        table: keys in the order of its rows, from the top; those of no effect are left out.
        figure: field of `ShapeFigures`.
        style: sizes and colours.
    """
    rows = shown_rows(table)
    percent = np.array([row.percent(figure, table.figures) for row in rows])
    height = np.arange(len(rows))[::-1]
    for sign, colour, label in ((1.0, style.second, "step up"), (-1.0, LESS, "step down")):
        ax.barh(
            height,
            sign * percent,
            height=0.62,
            color=colour,
            edgecolor=style.ink,
            linewidth=style.hair,
            label=label,
        )
    reach = HEADROOM * float(np.abs(percent).max(initial=0.0)) or 1.0
    for at, value in zip(height, percent, strict=True):
        ax.text(
            value + np.copysign(0.02 * reach, value),
            at,
            f"{value:+.2g}" if abs(value) > ROUNDING else "0",
            fontsize=style.small,
            color=style.ink,
            ha="left" if value >= 0.0 else "right",
            va="center",
        )
    ax.axvline(0.0, color=style.ink, linewidth=style.outline)
    ax.set_xlim(-reach, reach)
    ax.set_ylim(-0.7, len(rows) - 0.3)
    ax.set_yticks(height, [key_label(row) for row in rows])
    ax.set_xlabel(f"{SHAPE_FIGURES[figure].label}, change in %", fontsize=style.text)
    ax.xaxis.label.set_color(style.ink)
    ax.tick_params(labelsize=style.small, colors=style.ink, width=style.hair)
    ax.grid(axis="x", color=style.quiet, alpha=0.22, linewidth=style.hair)
    ax.set_axisbelow(True)
    for name, spine in ax.spines.items():
        spine.set_visible(name == "bottom")
        spine.set(color=style.quiet, linewidth=style.hair)
    ax.legend(
        loc="lower left",
        bbox_to_anchor=(-0.02, 1.0),
        ncols=2,
        frameon=False,
        fontsize=style.text,
        labelcolor=style.ink,
        borderaxespad=0.2,
        handletextpad=0.6,
    )


def shown_rows(table: SlopeTable) -> list[KeySlope]:
    """The rows that are drawn: the first ones that change any of the panels' figures."""
    moving = [row for row in table.rows if any(getattr(row.change, name) for name in PANELS)]
    return moving[:MOST_BARS]


def key_label(row: KeySlope) -> str:
    """A key beside its bars, without unit, with its value: `barrier 2 thickness = 4.6 mm`."""
    table, _, name = row.key.rpartition(".")
    plain = name.removesuffix(f"_{row.unit}").replace("_", " ")
    number = table.partition("[")[2].rstrip("]")
    owner = f"barrier {number}" if number else table
    return f"{owner} {plain} = {row.value:g} {row.unit}"
