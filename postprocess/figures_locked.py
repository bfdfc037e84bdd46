"""Torque and terminal inductance of a locked rotor over its angle, measured values beside."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.solver.types import FloatArray

from .figures import SETTINGS, _figure, _save
from .figures_style import Style, stress_colours
from .locked import DEGREE, MM, LockedCurves, at_angles
from .locked_measured import NO_CURRENT, Comparison

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Colour = str | tuple[float, float, float, float]
Dashes = str | tuple[float, tuple[float, ...]]

FINE = 721  # points of a drawn curve: 4 an electrical degree at most
PALEST = 0.3  # of the colour scale, for the least current
HEADROOM = 0.08  # share of the range left free above and below
MEASURED_LABEL = {
    "o": "measured",
    "D": "measured incremental",
    "s": "measured without current",
}  # by mark
TORQUE, APPARENT, INCREMENTAL = (
    "measured_torque_nm",
    "measured_inductance_apparent_mh",
    "measured_inductance_incremental_mh",
)


def write_locked(
    folder: Path,
    curves: LockedCurves,
    comparisons: Sequence[Comparison] = (),
    style: Style | None = None,
) -> tuple[Path, ...]:
    """Write the curves as PNG and SVG into an existing folder."""
    import matplotlib

    style = style or Style()
    # Users' settings must not change a figure, nor a figure theirs.
    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(SETTINGS)
        title = f"{curves.design_name}: locked rotor, direct current, feed {curves.feed.name}"
        figure = _figure((9.0, 7.4), title, style)
        end = MM * curves.terminal_end_inductance
        figure.text(
            0.985,
            0.982,
            f"~{end:.3g} mH of every inductance by formula, for the end winding",
            fontsize=style.text,
            color=style.quiet,
            ha="right",
            va="top",
        )
        above = figure.add_axes((0.085, 0.57, 0.885, 0.34))
        draw_locked_torque(above, curves, comparisons, style)
        below = figure.add_axes((0.085, 0.075, 0.885, 0.39))
        draw_locked_inductance(below, curves, comparisons, style)
        return _save(figure, folder / "locked", style)


def draw_locked_torque(
    ax: Axes, curves: LockedCurves, comparisons: Sequence[Comparison], style: Style
) -> None:
    """Draw the torque of each current over the angle, measured values as rings."""
    for k, (current, colour) in enumerate(zip(curves.currents, _colours(curves), strict=True)):
        _draw_curve(ax, curves, curves.torque[k], colour, "-", f"{current:g} A")
        _draw_measured(ax, curves, comparisons, TORQUE, float(current), colour, "o", 1.0)
    ax.axhline(0.0, color=style.quiet, linewidth=style.hair, zorder=1)
    _dress(ax, curves, "torque in N m", style)
    _legend(ax, style)


def draw_locked_inductance(
    ax: Axes, curves: LockedCurves, comparisons: Sequence[Comparison], style: Style
) -> None:
    """Draw terminal inductances over the angle, the end winding's estimate in them."""
    end, colours = curves.terminal_end_inductance, _colours(curves)
    for k, (current, colour) in enumerate(zip(curves.currents, colours, strict=True)):
        is_last = k == len(colours) - 1
        names = ("apparent", "incremental") if is_last else (None, None)
        _draw_curve(ax, curves, MM * (curves.apparent[k] + end), colour, "-", names[0])
        _draw_curve(ax, curves, MM * (curves.slope[k] + end), colour, (0, (5, 2)), names[1])
        _draw_measured(ax, curves, comparisons, APPARENT, float(current), colour, "o", MM)
        _draw_measured(ax, curves, comparisons, INCREMENTAL, float(current), colour, "D", MM)
    bare = MM * (curves.bare_slope + end)
    _draw_curve(ax, curves, bare, style.accent, (0, (1, 1.5)), "without current")
    _draw_measured(ax, curves, comparisons, NO_CURRENT, 0.0, style.accent, "s", MM)
    _dress(ax, curves, "terminal inductance in mH", style)
    ax.set_ylim(0.0, None)
    ax.set_xlabel("d axis ahead of the current's axis in mechanical degrees", fontsize=style.text)
    ax.xaxis.label.set_color(style.ink)
    _legend(ax, style)


def _colours(curves: LockedCurves) -> list[tuple[float, float, float, float]]:
    """A colour for each current, darker for more."""
    scale, count = stress_colours(), len(curves.currents)
    return [scale(1.0 - (1.0 - PALEST) * k / max(1, count - 1)) for k in range(count)][::-1]


def _draw_curve(
    ax: Axes,
    curves: LockedCurves,
    values: FloatArray,
    colour: Colour,
    dashes: Dashes,
    label: str | None,
) -> None:
    fine = np.linspace(0.0, curves.period, FINE)
    ax.plot(
        fine / DEGREE,
        at_angles(curves, values, fine.tolist()),
        color=colour,
        linestyle=dashes,
        linewidth=1.2,
        label=label,
        zorder=3,
    )


def _draw_measured(
    ax: Axes,
    curves: LockedCurves,
    comparisons: Sequence[Comparison],
    column: str,
    current: float,
    colour: Colour,
    marker: str,
    scale: float,
) -> None:
    """Measured values, their angles brought into the drawn period."""
    for one in comparisons:
        if one.measured.column == column and one.measured.current == current:
            ax.plot(
                np.mod(one.measured.angle, curves.period) / DEGREE,
                scale * one.measured.value,
                linestyle="none",
                marker=marker,
                markersize=4.2,
                markerfacecolor="none",
                markeredgecolor=colour,
                markeredgewidth=0.9,
                label=None if MEASURED_LABEL[marker] in _labels(ax) else MEASURED_LABEL[marker],
                zorder=4,
                clip_on=False,
            )


def _labels(ax: Axes) -> list[str]:
    """Names given to curves so far: each kind of mark is named once."""
    return ax.get_legend_handles_labels()[1]


def _dress(ax: Axes, curves: LockedCurves, label: str, style: Style) -> None:
    period = curves.period / DEGREE
    ax.set_xlim(0.0, period)
    ax.set_xticks(np.linspace(0.0, period, 13))
    ax.margins(y=HEADROOM)
    ax.set_ylabel(label, fontsize=style.text, color=style.ink)
    ax.tick_params(labelsize=style.text, colors=style.ink, width=style.hair)
    ax.grid(color=style.quiet, alpha=0.22, linewidth=style.hair)
    ax.set_axisbelow(True)
    for name, spine in ax.spines.items():
        spine.set_visible(name in ("left", "bottom"))
        spine.set(color=style.quiet, linewidth=style.hair)


def _legend(ax: Axes, style: Style) -> None:
    """Names in one line above the axes, where nothing can be under them."""
    ax.legend(
        loc="lower left",
        bbox_to_anchor=(-0.01, 1.0),
        ncols=7,
        frameon=False,
        fontsize=style.text,
        labelcolor=style.ink,
        borderaxespad=0.2,
        handletextpad=0.6,
        columnspacing=1.4,
    )
