"""The envelope over speed, and efficiency over torque and speed."""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.solver.types import FloatArray

from .efficiency import LoadPoints
from .envelope import REGION_NAMES, Corner, Envelope, Region
from .figures import _figure, write_figure
from .figures_style import Style, draw_scale
from .quantities import RPM

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.colors import LinearSegmentedColormap
    from matplotlib.figure import Figure

LINE = math.sqrt(1.5)  # rms between lines over the peak of a phase, in star
DEGREE = math.pi / 180.0
HEADROOM = 1.12  # of the greatest value
BANDS = {Region.CURRENT: "#ffffff", Region.BOTH: "#eef3f6", Region.VOLTAGE: "#f7efe0"}
# In percent: closer towards the top, where a designer looks.
LEVELS = (50.0, 60.0, 70.0, 75.0, 80.0, 84.0, 86.0, 88.0, 90.0, 91.0, 92.0, 93.0, 94.0, 95.0)
TOP_LEVELS = (96.0, 97.0, 98.0, 99.0)
EDGE = 0.98  # of the last speed
NAMED_LEVELS = 9  # highest ones, with numbers; the others crowd at low speed


@dataclass(frozen=True, slots=True, eq=False)
class EfficiencySheet:
    """Points of load over speeds and shares of the most torque; arrays of them (n, m) by rows."""

    speed: FloatArray  # (n,), rad/s
    torque: FloatArray  # (n, m), N m at the shaft
    points: LoadPoints  # n m of them
    missing: tuple[str, ...]  # losses that are not in it
    has_best: bool  # without iron loss the best point lies wherever the others let it


def write_envelope(
    folder: Path, name: str, found: Envelope, corner: Corner | None, supply: float
) -> None:
    """Write the envelope as PNG and SVG; `supply` in V, peak of a phase."""
    write_figure(
        folder, "envelope", lambda style: envelope_figure(name, found, corner, supply, style)
    )


def write_efficiency(folder: Path, name: str, sheet: EfficiencySheet) -> None:
    """Write the efficiency as PNG and SVG."""
    write_figure(folder, "efficiency", lambda style: efficiency_figure(name, sheet, style))


def envelope_figure(
    name: str, found: Envelope, corner: Corner | None, supply: float, style: Style
) -> Figure:
    """Torque, power, voltage, current, power factor and current angle over speed."""
    figure = _figure((11.0, 7.4), f"{name}: envelope of torque over speed", style)
    figure.text(
        0.985,
        0.982,
        "without iron and friction loss; resistance and end winding by formula",
        fontsize=style.text,
        color=style.quiet,
        ha="right",
        va="top",
    )
    panels: tuple[tuple[str, FloatArray, float | None], ...] = (
        ("torque of the field in N m", found.torque, None),
        ("power of the field in kW", 1e-3 * found.power, None),
        ("voltage between lines in V rms", LINE * found.voltage, LINE * supply),
        ("phase current in A peak", found.current, None),
        ("power factor", found.power_factor, None),
        ("current angle in el. degrees", found.gamma / DEGREE, None),
    )
    for k, (label, values, limit) in enumerate(panels):
        column, row = k % 2, k // 2
        ax = figure.add_axes((0.06 + 0.5 * column, 0.67 - 0.3 * row, 0.42, 0.235))
        draw_over_speed(ax, found, values, label, style)
        if limit is not None:
            ax.axhline(limit, color=style.accent, linewidth=1.0, dashes=(6, 2))
            ax.set_ylim(0.0, HEADROOM * limit)
            _beside(ax, limit, f"supply {limit:.0f} V", style)
        if corner is not None and 0.0 < corner.speed < found.speed[-1]:
            _mark_corner(ax, corner, k, style)
        if row == 0:
            _name_regions(ax, found, style)
        if row < 2:
            ax.tick_params(labelbottom=False)
        else:
            ax.set_xlabel("speed in 1/min", fontsize=style.text, color=style.ink)
    return figure


def draw_over_speed(
    ax: Axes, found: Envelope, values: FloatArray, label: str, style: Style
) -> None:
    """Draw one quantity over the speed in 1/min, the regions behind it.

    Args:
        ax: where to draw.
        found: whose speeds and regions these are.
        values: (n,), NaN where nothing is reached: left empty.
        label: with its unit.
        style: sizes and colours.
    """
    for region, low, high in region_spans(found):
        if region in BANDS:
            ax.axvspan(RPM * low, RPM * high, color=BANDS[region], linewidth=0, zorder=0)
    ax.plot(RPM * found.speed, values, color=style.ink, linewidth=1.4, zorder=3)
    ax.set_xlim(0.0, RPM * float(found.speed[-1]))
    top = float(np.nanmax(values, initial=0.0))
    ax.set_ylim(min(0.0, HEADROOM * float(np.nanmin(values, initial=0.0))), HEADROOM * top or 1.0)
    ax.set_ylabel(label, fontsize=style.text, color=style.ink)
    _plain(ax, style)


def region_spans(found: Envelope) -> list[tuple[Region, float, float]]:
    """Runs of speeds in rad/s with one region, each to the middle between it and the next."""
    change = np.flatnonzero(np.diff(found.region)) + 1
    edges = [0, *change.tolist(), found.speed.size]
    middles = 0.5 * (found.speed[1:] + found.speed[:-1])
    spans = []
    for first, end in itertools.pairwise(edges):
        low = float(found.speed[0] if first == 0 else middles[first - 1])
        high = float(found.speed[-1] if end == found.speed.size else middles[end - 1])
        spans.append((Region(int(found.region[first])), low, high))
    return spans


def efficiency_figure(name: str, sheet: EfficiencySheet, style: Style) -> Figure:
    """Efficiency over torque and speed; the title says which losses it leaves out."""
    figure = _figure((9.6, 6.4), f"{name}: efficiency at the currents of least loss", style)
    left_out = ", ".join(sheet.missing)
    figure.text(
        0.015,
        0.945,
        f"left out, not given: {left_out}" if left_out else "all losses in",
        fontsize=style.text,
        color=style.accent if left_out else style.quiet,
        va="top",
    )
    ax = figure.add_axes((0.075, 0.085, 0.79, 0.815))
    scale_ax = figure.add_axes((0.9, 0.085, 0.022, 0.815))
    draw_efficiency(ax, scale_ax, sheet, style)
    return figure


def draw_efficiency(ax: Axes, scale_ax: Axes, sheet: EfficiencySheet, style: Style) -> None:
    """Draw lines of equal efficiency in percent over torque and speed, and where it is best."""
    percent = 100.0 * sheet.points.efficiency.reshape(sheet.torque.shape)
    speed = np.broadcast_to(RPM * sheet.speed[:, None], sheet.torque.shape)
    colours = efficiency_colours()
    best = float(np.nanmax(percent))
    levels = [level for level in LEVELS + TOP_LEVELS if level < best]
    low = levels[0] if levels else 0.0
    known = np.ma.masked_invalid(percent)
    ax.contourf(
        speed,
        sheet.torque,
        known,
        levels=np.linspace(low, best, 64),
        cmap=colours,
        extend="min",
    )
    lines = ax.contour(
        speed, sheet.torque, known, levels=levels, colors=style.ink, linewidths=style.hair
    )
    named = ax.clabel(lines, levels=levels[-NAMED_LEVELS:], fmt="%g", fontsize=style.small)
    for text in named:
        # A number at the last speed would be cut by the frame.
        if text.get_position()[0] > EDGE * speed.max():
            text.remove()
    ax.plot(RPM * sheet.speed, sheet.torque[:, -1], color=style.ink, linewidth=1.4)
    if sheet.has_best:
        at = np.unravel_index(np.nanargmax(percent), percent.shape)
        _mark_best(ax, (float(speed[at]), float(sheet.torque[at])), best, style)
    ax.set_xlim(0.0, RPM * float(sheet.speed[-1]))
    ax.set_ylim(0.0, HEADROOM * float(np.nanmax(sheet.torque)))
    ax.set_xlabel("speed in 1/min", fontsize=style.text, color=style.ink)
    ax.set_ylabel("torque at the shaft in N m", fontsize=style.text, color=style.ink)
    _plain(ax, style)
    draw_scale(scale_ax, colours, (low, best), "efficiency in %", style)


def _mark_best(ax: Axes, at: tuple[float, float], percent: float, style: Style) -> None:
    """A cross at speed in 1/min and torque in N m, its numbers in the corner that is empty."""
    x, y = at
    ax.plot([x], [y], "+", color=style.accent, markersize=9, markeredgewidth=1.4)
    ax.annotate(
        f"{percent:.1f} % at {y:.3g} N m, {x:.0f}/min",
        (x, y),
        xytext=(0.98, 0.97),
        textcoords="axes fraction",
        ha="right",
        va="top",
        fontsize=style.text,
        color=style.accent,
        arrowprops={"arrowstyle": "-", "color": style.accent, "linewidth": style.hair},
    )


def efficiency_colours() -> LinearSegmentedColormap:
    """The scale of efficiency: dusk through stone to sage, lightness rising all the way."""
    from matplotlib.colors import LinearSegmentedColormap

    stops = ["#5b4a63", "#8d6f73", "#b99d86", "#d6c79f", "#dfe3b8", "#eef6dc"]
    return LinearSegmentedColormap.from_list("lamwright_efficiency", stops, N=512)


def _name_regions(ax: Axes, found: Envelope, style: Style) -> None:
    """Names of the regions above the axes, each over its own speeds."""
    top = float(found.speed[-1])
    for region, low, high in region_spans(found):
        width = (high - low) / top
        name = REGION_NAMES[region]
        if width < 0.012 * len(name):
            name = name.replace("current and voltage limit", "both limits").replace(
                "most torque per volt", "per volt"
            )
        ax.text(
            0.5 * (low + high) / top,
            1.02,
            name if width >= 0.012 * len(name) else "",
            transform=ax.transAxes,
            fontsize=style.small,
            color=style.quiet,
            ha="center",
            va="bottom",
        )


def _mark_corner(ax: Axes, corner: Corner, panel: int, style: Style) -> None:
    """A line at base speed in every panel; its numbers beside it in the first two."""
    x = RPM * corner.speed
    ax.axvline(x, color=style.second, linewidth=0.8, dashes=(4, 2), zorder=2)
    texts = {
        0: f"base speed {x:.0f}/min, {corner.torque:.3g} N m",
        1: f"{1e-3 * corner.torque * corner.speed:.3g} kW at base speed",
    }
    if panel in texts:
        is_left = x < 0.5 * ax.get_xlim()[1]
        ax.annotate(
            texts[panel],
            (x, 0.06),
            xycoords=("data", "axes fraction"),
            xytext=(4 if is_left else -4, 0),
            textcoords="offset points",
            fontsize=style.small,
            color=style.second,
            ha="left" if is_left else "right",
        )


def _beside(ax: Axes, value: float, text: str, style: Style) -> None:
    """A text above a line at `value`, at the right end."""
    ax.annotate(
        text,
        (1.0, value),
        xycoords=("axes fraction", "data"),
        xytext=(-2, 2),
        textcoords="offset points",
        fontsize=style.small,
        color=style.accent,
        ha="right",
    )


def _plain(ax: Axes, style: Style) -> None:
    ax.tick_params(labelsize=style.text, colors=style.ink, width=style.hair)
    ax.grid(color=style.quiet, alpha=0.18, linewidth=style.hair)
    ax.set_axisbelow(True)
    for name, spine in ax.spines.items():
        spine.set_visible(name in ("left", "bottom"))
        spine.set(color=style.quiet, linewidth=style.hair)
