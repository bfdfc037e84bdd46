"""The small picture of a flux map that a notebook shows."""

from __future__ import annotations

from io import BytesIO
from typing import TYPE_CHECKING

import numpy as np

from .figures import SETTINGS, _figure
from .figures_map import _dress
from .figures_style import Style
from .flux_map import FluxMap, mean_linkages, mean_torque

if TYPE_CHECKING:
    from matplotlib.axes import Axes

DPI = 110.0
LEVELS = 10  # lines of equal torque, about
EDGE = 0.045  # of the axes: a number nearer to their edge would be cut by it


def flux_map_png(flux_map: FluxMap, style: Style | None = None) -> bytes:
    """Linkages and mean torque of a map of at least 2 x 2 currents, as a PNG.

    Users' settings do not change it, nor does it change theirs.
    """
    import matplotlib

    style = style or Style()
    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(SETTINGS)
        figure = _figure((7.0, 3.0), "", style)
        draw_linkage_ends(figure.add_axes((0.085, 0.16, 0.36, 0.72)), flux_map, style)
        draw_mean_torque(figure.add_axes((0.585, 0.16, 0.36, 0.72)), flux_map, style)
        file = BytesIO()
        figure.savefig(file, format="png", dpi=DPI, metadata={"Software": None})
    return file.getvalue()


def draw_linkage_ends(ax: Axes, flux_map: FluxMap, style: Style) -> None:
    """Draw psi_d over i_d and psi_q over i_q, each at the least and the most of the other."""
    psi_d, psi_q = mean_linkages(flux_map)
    for name, own, values, other, colour in (
        ("d", flux_map.i_d, psi_d, flux_map.i_q, style.ink),
        ("q", flux_map.i_q, psi_q.T, flux_map.i_d, style.accent),
    ):
        across = "q" if name == "d" else "d"
        least = int(np.argmin(np.abs(other)))
        for column, dashes in ((least, "-"), (other.size - 1, "--")):
            label = f"psi_{name}, i_{across} = {other[column]:.3g} A"
            ax.plot(own, values[:, column], dashes, color=colour, linewidth=1.2, label=label)
    ax.legend(fontsize=style.small, frameon=False, handlelength=2.2)
    ax.set_title("flux linkages", fontsize=style.text, color=style.ink, loc="left")
    _dress(ax, "own current, A peak", "V s peak", style)


def draw_mean_torque(ax: Axes, flux_map: FluxMap, style: Style) -> None:
    """Draw lines of equal mean torque on the plane of currents; dots are what was computed."""
    from matplotlib.ticker import MaxNLocator

    values = mean_torque(flux_map).T
    low, high = float(values.min()), float(values.max())
    if high > low:
        # Without the line of no torque: it runs along the axes of currents.
        levels = [level for level in MaxNLocator(LEVELS).tick_values(low, high) if level != 0.0]
        lines = ax.contour(
            flux_map.i_d,
            flux_map.i_q,
            values,
            levels=levels,
            colors=style.second,
            linewidths=style.outline,
            negative_linestyles="dashed",
        )
        for text in ax.clabel(lines, fontsize=style.small, fmt="%g"):
            at = ax.transAxes.inverted().transform(ax.transData.transform(text.get_position()))
            text.set_visible(bool(np.all(np.abs(at - 0.5) < 0.5 - EDGE)))
    i_d, i_q = np.meshgrid(flux_map.i_d, flux_map.i_q)
    ax.plot(i_d.ravel(), i_q.ravel(), ".", color=style.quiet, markersize=1.5)
    ax.set_title("mean torque, N m", fontsize=style.text, color=style.ink, loc="left")
    _dress(ax, "i_d, A peak", "i_q, A peak", style)
