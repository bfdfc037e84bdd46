"""The pressure of the shaft's fit round the bore."""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from lamwright.solver.types import FloatArray

from .figures import _figure, write_figure
from .figures_style import Style
from .fit_study import FitStudy, PressedState
from .quantities import RPM

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

PICTURE = "fit_pressure"
MPA = 1e-6
HEADROOM = 1.12
KEYWAY_DEG = 4.1  # a step wider than an edge of the bore is no iron


def write_fit(folder: Path, design_name: str, study: FitStudy) -> tuple[Path, Path]:
    """Write the picture as PNG and SVG into an existing folder."""
    return write_figure(folder, PICTURE, partial(fit_figure, design_name, study))


def fit_figure(design_name: str, study: FitStudy, style: Style) -> Figure:
    """Pressure over the angle with its key."""
    figure = _figure((8.6, 4.6), f"{design_name}: pressure between shaft and lamination", style)
    ax = figure.add_axes((0.085, 0.125, 0.635, 0.74))
    section = study.section
    span, pole = (math.degrees(angle) for angle in (section.sector_angle, section.pole_angle))
    draw_pressure(ax, study.states, span, pole, style)
    figure.legend(
        *ax.get_legend_handles_labels(),
        loc="upper left",
        bbox_to_anchor=(0.735, 0.875),
        frameon=False,
        fontsize=style.text,
        labelcolor=style.ink,
        handlelength=2.6,
        labelspacing=0.9,
    )
    return figure


def draw_pressure(
    ax: Axes,
    states: Sequence[PressedState],
    span_deg: float,
    pole_angle_deg: float,
    style: Style,
) -> None:
    """Draw the pressure of each state; a dot on the axis where the contact is open.

    Args:
        ax: where to draw.
        states: cold ones are drawn in one colour, hot ones in another, dashed the faster.
        span_deg: angle of the rotor's own period.
        pole_angle_deg: of one pole; its q axes are marked.
        style: sizes and colours.
    """
    for state in states:
        angle, pressure, is_open = _round_the_bore(state, span_deg)
        speed = RPM * state.report.speed
        line = {"rest": "-", "maximum speed": "--", "overspeed": ":"}[state.name.split(" at ")[1]]
        colour = style.accent if state.is_hot else style.ink
        heat = "hot" if state.is_hot else "cold"
        ax.plot(
            angle,
            pressure,
            line,
            color=colour,
            linewidth=1.3,
            label=f"{heat}, {speed:.0f} rpm" if speed else f"{heat}, at rest",
        )
        ax.plot(angle[is_open], pressure[is_open], ".", color=colour, markersize=3.0)
    top = HEADROOM * max(MPA * float(state.stress.pressure.max()) for state in states)
    ax.set_xlim(0.0, span_deg)
    ax.set_ylim(0.0, top if top > 0.0 else 1.0)
    for k in range(round(span_deg / pole_angle_deg)):
        place = (k + 0.5) * pole_angle_deg
        ax.axvline(place, color=style.quiet, linewidth=style.hair, zorder=0)
        ax.annotate(
            "q axis",
            (place, 1.0),
            (3.0, -3.0),
            xycoords=("data", "axes fraction"),
            textcoords="offset points",
            va="top",
            fontsize=style.small,
            color=style.quiet,
        )
    ax.set_xlabel("angle from the d axis, mechanical degrees", fontsize=style.text, color=style.ink)
    ax.set_ylabel("pressure, MPa", fontsize=style.text, color=style.ink)
    ax.tick_params(labelsize=style.small, colors=style.quiet)
    for side in ("top", "right"):
        ax.spines[side].set_visible(False)


def _round_the_bore(
    state: PressedState, span_deg: float
) -> tuple[FloatArray, FloatArray, npt.NDArray[np.bool_]]:
    """Angles in degrees over the whole period, pressure in MPa, where open; cut at keyways."""
    angle = np.degrees(state.stress.angle)
    order = np.argsort(angle)
    angle = np.append(angle[order], span_deg + angle[order[0]])
    order = np.append(order, order[0])
    pressure, is_open = MPA * state.stress.pressure[order], ~state.stress.closed[order]
    cuts = np.flatnonzero(np.diff(angle) > KEYWAY_DEG) + 1
    return (
        np.insert(angle, cuts, np.nan),
        np.insert(pressure, cuts, np.nan),
        np.insert(is_open, cuts, False),
    )
