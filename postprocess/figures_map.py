"""The flux map drawn: linkages over the currents, torque and ripple on the plane of currents."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.solver.types import FloatArray

from .coenergy_surface import CoenergySurface, linkages, torque
from .figures import SETTINGS, _figure, _save
from .figures_style import Style
from .flux_map import FluxMap, mean_linkages, ripple
from .map_figures import MapFigures

if TYPE_CHECKING:
    from matplotlib.axes import Axes

LINES = 5  # of a fan, evenly over the other current
FINE = 241  # points of a line
SHADES = ("#9fb3c1", "#17212b")  # of the first and the last line of a fan
MOST_RIPPLE = 45.0  # %; beyond it, beside the axes, torque is small and ripple says little
RIPPLE_LEVELS = (2.0, 5.0, 10.0, 20.0, 40.0)  # %


@dataclass(frozen=True, slots=True, eq=False)
class DrawnMap:
    """What the figure of a map shows."""

    design_name: str
    flux_map: FluxMap
    surface: CoenergySurface
    figures: MapFigures
    most_current: float  # A peak, of the supply


def write_map_figure(folder: Path, drawn: DrawnMap, style: Style | None = None) -> tuple[Path, ...]:
    """Write the figure of a map as PNG and SVG into an existing folder."""
    import matplotlib

    style = style or Style()
    # Users' settings must not change a figure, nor a figure theirs.
    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(SETTINGS)
        figure = _figure((11.0, 8.2), f"{drawn.design_name}: flux map", style)
        figure.text(
            0.985,
            0.985,
            f"means over {drawn.flux_map.position.size} positions, without end winding;"
            " dots: computed, lines: surface of the coenergy",
            fontsize=style.text,
            color=style.quiet,
            ha="right",
            va="top",
        )
        places = [(0.06, 0.555), (0.56, 0.555), (0.06, 0.06), (0.56, 0.06)]
        axes = [figure.add_axes((x, y, 0.375, 0.375)) for x, y in places]
        draw_linkage(axes[0], drawn, "d", style)
        draw_linkage(axes[1], drawn, "q", style)
        draw_torque_plane(axes[2], drawn, style)
        draw_ripple_plane(axes[3], drawn, style)
        return _save(figure, folder / "map", style)


def draw_linkage(ax: Axes, drawn: DrawnMap, axis: str, style: Style) -> None:
    """Draw psi_d over i_d, or psi_q over i_q, a line for each of some currents of the other axis.

    The fan between the lines is the cross-saturation.

    Args:
        ax: where to draw.
        drawn: map and surface.
        axis: `d` or `q`.
        style: sizes and colours.
    """
    from matplotlib.colors import LinearSegmentedColormap

    is_d = axis == "d"
    m = drawn.flux_map
    own, other = (m.i_d, m.i_q) if is_d else (m.i_q, m.i_d)
    nodes = mean_linkages(m)[0] if is_d else mean_linkages(m)[1].T
    shades = LinearSegmentedColormap.from_list("lamwright_fan", SHADES)
    fine = np.linspace(own[0], own[-1], FINE)
    chosen = np.unique(np.round(np.linspace(0, other.size - 1, LINES)).astype(int))
    ends = []
    for k in chosen:
        held = np.full(FINE, other[k])
        line = (
            linkages(drawn.surface, fine, held)[0]
            if is_d
            else linkages(drawn.surface, held, fine)[1]
        )
        colour = shades(k / (other.size - 1))
        ax.plot(fine, line, color=colour, linewidth=style.outline * 1.4)
        ax.plot(own, nodes[:, k], ".", color=colour, markersize=3.0)
        ends.append(float(line[-1]))
    reach = own[-1] - own[0]
    low, high = ax.get_ylim()
    for k, at in zip(chosen, _apart(ends, 0.037 * (high - low)), strict=True):
        label = (
            f"{other[k]:.3g} A"
            if k != chosen[0]
            else f"i_{'q' if is_d else 'd'} = {other[k]:.3g} A"
        )
        ax.text(
            own[-1] + 0.012 * reach, at, label, fontsize=style.small, color=style.ink, va="center"
        )
    ax.set_xlim(own[0], own[-1])
    _dress(ax, f"i_{axis}, A peak", f"psi_{axis}, V s peak", style)


def draw_torque_plane(ax: Axes, drawn: DrawnMap, style: Style) -> None:
    """Draw lines of equal mean torque on the plane of currents, with the two currents' circles."""
    from matplotlib.ticker import MaxNLocator

    i_d, i_q = _plane(drawn.flux_map)
    values = torque(drawn.surface, i_d, i_q)
    levels = MaxNLocator(12).tick_values(float(values.min()), float(values.max()))
    lines = ax.contour(
        i_d,
        i_q,
        values,
        levels=[level for level in levels if level != 0.0],
        colors=style.second,
        linewidths=style.outline,
        negative_linestyles="dashed",
    )
    ax.clabel(lines, fontsize=style.small, fmt="%g")
    _circles(ax, drawn, style, are_named=True)
    f = drawn.figures
    ax.plot([f.i_d], [f.i_q], "o", color=style.accent, markersize=4.0)
    ax.annotate(
        f"{f.torque:.3g} N m at {f.gamma * 180.0 / np.pi:.1f} deg",
        (f.i_d, f.i_q),
        xytext=(6.0, -2.0),
        textcoords="offset points",
        fontsize=style.small,
        color=style.accent,
        bbox={"facecolor": style.paper, "edgecolor": "none", "pad": 0.6, "alpha": 0.85},
        va="top",
    )
    ax.set_title("mean torque, N m", fontsize=style.text, color=style.ink, loc="left")
    _dress(ax, "i_d, A peak", "i_q, A peak", style)


def draw_ripple_plane(ax: Axes, drawn: DrawnMap, style: Style) -> None:
    """Draw lines of equal torque ripple on the plane of currents, straight between the nodes."""
    m = drawn.flux_map
    percent = 100.0 * ripple(m)
    percent = np.where(percent > MOST_RIPPLE, np.nan, percent)
    lines = ax.contour(
        m.i_d,
        m.i_q,
        np.ma.masked_invalid(percent).T,
        levels=_levels(percent),
        colors=style.second,
        linewidths=style.outline,
    )
    ax.clabel(lines, fontsize=style.small, fmt="%g")
    _circles(ax, drawn, style, are_named=False)
    ax.plot([drawn.figures.i_d], [drawn.figures.i_q], "o", color=style.accent, markersize=4.0)
    title = "torque ripple, (greatest - least) / mean in %"
    ax.set_title(title, fontsize=style.text, color=style.ink, loc="left")
    ax.set_xlim(m.i_d[0], m.i_d[-1])
    ax.set_ylim(m.i_q[0], m.i_q[-1])
    _dress(ax, "i_d, A peak", "i_q, A peak", style)


def _levels(percent: FloatArray) -> list[float]:
    """Round levels between the least and the greatest ripple."""
    seen = percent[np.isfinite(percent)]
    if not seen.size:
        return list(RIPPLE_LEVELS)
    low, high = float(seen.min()), float(seen.max())
    step = next(s for s in (0.5, 1.0, 2.0, 5.0, 10.0) if (high - low) / s <= 10.0 or s == 10.0)
    return [step * k for k in range(1, int(high / step) + 2)]


def _plane(flux_map: FluxMap) -> tuple[FloatArray, FloatArray]:
    d = np.linspace(flux_map.i_d[0], flux_map.i_d[-1], FINE)
    q = np.linspace(flux_map.i_q[0], flux_map.i_q[-1], FINE)
    i_d, i_q = np.meshgrid(d, q)
    return i_d, i_q


def _circles(ax: Axes, drawn: DrawnMap, style: Style, *, are_named: bool) -> None:
    """Circles of the rated and of the supply's most current, if wanted named at the d axis."""
    low, high = drawn.flux_map.i_q[0], drawn.flux_map.i_q[-1]
    angle = np.linspace(-0.5 * np.pi if low < 0.0 else 0.0, 0.5 * np.pi, FINE)
    angles = (0.14, 0.05)  # rad, of their names: one above the other
    named = {drawn.figures.current: "rated", drawn.most_current: "most"}
    if drawn.figures.current == drawn.most_current:
        named = {drawn.most_current: "rated and most"}
    for k, (current, name) in enumerate(named.items()):
        ax.plot(
            current * np.cos(angle),
            current * np.sin(angle),
            color=style.quiet,
            linewidth=style.outline,
            linestyle=(0, (4, 2)),
        )
        if not are_named:
            continue
        ax.annotate(
            f"{name}, {current:.3g} A",
            (current * np.cos(angles[k]), current * np.sin(angles[k])),
            xytext=(-3.0, 0.0),
            textcoords="offset points",
            fontsize=style.small,
            color=style.quiet,
            ha="right",
            bbox={"facecolor": style.paper, "edgecolor": "none", "pad": 0.6, "alpha": 0.85},
        )
    ax.set_ylim(low, high)


def _apart(values: list[float], least: float) -> list[float]:
    """The values moved as little as makes them `least` apart, in their order."""
    order = np.argsort(values)
    moved = np.array(values)[order]
    for _ in range(100):
        close = np.diff(moved) < least
        if not close.any():
            break
        for k in np.flatnonzero(close):
            push = 0.5 * (least - (moved[k + 1] - moved[k])) * 1.01
            moved[k] -= push
            moved[k + 1] += push
    back = np.empty_like(moved)
    back[order] = moved
    return [float(value) for value in back]


def _dress(ax: Axes, x: str, y: str, style: Style) -> None:
    ax.set_xlabel(x, fontsize=style.text, color=style.ink)
    ax.set_ylabel(y, fontsize=style.text, color=style.ink)
    ax.tick_params(labelsize=style.small, colors=style.ink, width=style.hair)
    ax.grid(color=style.quiet, alpha=0.22, linewidth=style.hair)
    ax.set_axisbelow(True)
    for name, spine in ax.spines.items():
        spine.set_visible(name in ("bottom", "left"))
        spine.set(color=style.quiet, linewidth=style.hair)
