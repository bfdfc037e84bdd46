"""The i_d-i_q plane as a drive engineer draws it: torque, both limits, both curves."""

from __future__ import annotations

import math
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.solver.types import FloatArray

from .control import Control
from .figures import _figure, write_figure
from .figures_style import Style
from .quantities import RPM
from .terminals import Terminals, has_both_signs, reach_d, shaft_torque, square_voltage

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

PICTURE = "control_plane"  # of the files, without ending
GRID = 241  # points of each axis that contours are drawn through
BELOW = 0.45  # of the current limit that is shown below i_q = 0, where magnets make it differ
TORQUE_LINES = 8
SPEED_RATIOS = (1.0, 1.5, 2.0, 3.0, 5.0, 8.0)  # of base speed, whose voltage limits are drawn
LAST_APART = 1.15  # over the last of them: from there on the greatest speed is drawn too


def write_control(
    folder: Path, design_name: str, control: Control, most_omega_e: float
) -> tuple[Path, Path]:
    """Write the plane as PNG and SVG into an existing folder; speeds up to one in rad/s."""
    compose = partial(control_figure, design_name, control, most_omega_e)
    return write_figure(folder, PICTURE, compose)


def control_figure(design_name: str, control: Control, most_omega_e: float, style: Style) -> Figure:
    """The plane with its key."""
    figure = _figure((9.4, 6.6), f"{design_name}: currents for torque and speed", style)
    ax = figure.add_axes((0.075, 0.085, 0.6, 0.81))
    draw_control_plane(ax, control, most_omega_e, style)
    handles, labels = ax.get_legend_handles_labels()
    figure.legend(
        handles,
        labels,
        loc="upper left",
        bbox_to_anchor=(0.735, 0.905),
        frameon=False,
        fontsize=style.text,
        labelcolor=style.ink,
        handlelength=2.6,
        labelspacing=0.9,
    )
    return figure


def draw_control_plane(ax: Axes, control: Control, most_omega_e: float, style: Style) -> None:
    """Draw torque lines, current circle, voltage limits and both curves.

    Args:
        ax: where to draw.
        control: of the drive.
        most_omega_e: electrical rad/s, the greatest speed whose voltage limit may be drawn.
        style: sizes and colours.
    """
    drive = control.drive
    i_d, i_q = _window(drive)
    ax.set_aspect("equal")
    ax.set_xlim(min(i_d[0], i_d[-1]), max(i_d[0], i_d[-1]))
    ax.set_ylim(i_q[0], i_q[-1])
    _draw_torque(ax, drive, i_d, i_q, style)
    _draw_voltage(ax, control, (i_d, i_q), most_omega_e, style)
    angle = np.linspace(-0.5 * math.pi, 0.5 * math.pi, 361)
    ax.plot(
        drive.side * drive.current_limit * np.cos(angle),
        drive.current_limit * np.sin(angle),
        color=style.accent,
        linewidth=1.5,
        label=f"current limit {drive.current_limit:g} A",
    )
    for curve, dashes, name in (
        (control.per_ampere, (), "most torque per ampere"),
        (control.per_volt, (5, 2), "most torque per volt,\nno resistance"),
    ):
        ax.plot(
            curve.i_d,
            curve.i_q,
            color=style.ink,
            linewidth=2.0,
            dashes=dashes or (None, None),
            label=name,
        )
    ax.set_xlabel("i_d in A, peak", fontsize=style.text, color=style.ink)
    ax.set_ylabel("i_q in A, peak", fontsize=style.text, color=style.ink)
    ax.tick_params(labelsize=style.text, colors=style.ink, width=style.hair)
    if drive.side < 0:  # beside i_d = 0, as everywhere; the names of torques take the other side
        ax.yaxis.tick_right()
        ax.yaxis.set_label_position("right")
    if i_q[0] < 0.0:
        ax.axhline(0.0, color=style.quiet, linewidth=style.hair)
    for spine in ax.spines.values():
        spine.set(color=style.quiet, linewidth=style.hair)


def _window(drive: Terminals) -> tuple[FloatArray, FloatArray]:
    """Currents of both axes in A (GRID,), i_d from zero outwards."""
    low, high = drive.surface.i_q_range
    first = 0.0
    if has_both_signs(drive):
        first = max(low, -BELOW * drive.current_limit)
        if drive.side < 0:
            first, high = low, min(high, BELOW * drive.current_limit)
    return drive.side * np.linspace(0.0, reach_d(drive), GRID), np.linspace(first, high, GRID)


def _draw_torque(
    ax: Axes, drive: Terminals, i_d: FloatArray, i_q: FloatArray, style: Style
) -> None:
    """Lines of equal torque, named outside the frame where they leave it."""
    found = shaft_torque(drive, i_d, i_q[:, None])
    levels = _levels(float(found.max()))
    ax.contour(i_d, i_q, found, levels, colors=style.quiet, linewidths=0.8)
    ax.plot([], [], color=style.quiet, linewidth=0.8, label="equal torque")
    side, far = drive.side, -1 if drive.side > 0 else 0  # the far end of i_q
    upright, across = found[:, -1], found[far, :]
    write = partial(ax.text, fontsize=style.small, color=style.quiet)
    for level in levels:
        name = f"{level:g} N m"
        at = _crossing(i_q, upright, level)
        if at is not None:
            place = (i_d[-1] + 0.01 * i_d[-1], at)
            write(*place, name, ha="left" if side > 0 else "right", va="center")
            continue
        at = _crossing(i_d, across, level)
        if at is not None and side > 0:
            place = (at, i_q[far] + 0.012 * (i_q[-1] - i_q[0]))
            write(*place, name, ha="left", va="bottom", rotation=45.0)


def _crossing(axis: FloatArray, values: FloatArray, level: float) -> float | None:
    """Where values along an edge pass a level, nearest to the edge's end; None if nowhere."""
    passed = np.flatnonzero((values[:-1] - level) * (values[1:] - level) <= 0.0)
    if passed.size == 0:
        return None
    k = int(passed[-1])
    share = (level - values[k]) / (values[k + 1] - values[k])
    return float(axis[k] + share * (axis[k + 1] - axis[k]))


def _draw_voltage(
    ax: Axes,
    control: Control,
    window: tuple[FloatArray, FloatArray],
    most_omega_e: float,
    style: Style,
) -> None:
    """Voltage limits at some speeds, each named where the curves and other names are far."""
    drive = control.drive
    i_d, i_q = window
    base = base_speed(control)
    speeds = [ratio * base for ratio in SPEED_RATIOS if 0.0 < ratio * base <= most_omega_e]
    if not speeds or most_omega_e > LAST_APART * speeds[-1]:
        speeds.append(most_omega_e)
    kept_off = _kept_off(control, i_d, i_q)
    for omega_e in speeds:
        share = square_voltage(drive, i_d, i_q[:, None], omega_e) / drive.voltage_limit**2
        contours = ax.contour(
            i_d, i_q, share, [1.0], colors=style.second, linewidths=1.0, linestyles="dashed"
        )
        pieces = contours.allsegs[0]
        if not pieces:
            continue
        line = max(pieces, key=len)
        off = np.linalg.norm(line[:, None, :] - kept_off, axis=-1).min(axis=1)
        place = line[int(np.argmax(off))]
        # A name is long: the next one keeps off all of it.
        kept_off = np.concatenate([kept_off, [place]])
        name = f"{omega_e / drive.surface.pole_pairs * RPM:.0f} rpm"
        for label in ax.clabel(contours, fmt=name, fontsize=style.small, manual=[place]):
            label.set_bbox({"facecolor": style.paper, "edgecolor": "none", "pad": 0.6})
    ax.plot(
        [],
        [],
        color=style.second,
        linewidth=1.0,
        linestyle="dashed",
        label=f"voltage limit {drive.voltage_limit * math.sqrt(1.5):.0f} V rms"
        "\nbetween lines by speed,\nthe first at base speed",
    )


def base_speed(control: Control) -> float:
    """Electrical rad/s at which most torque per ampere at the current limit needs the voltage.

    |R i + j omega psi|^2 = U^2 solved for omega (derived); 0 where R i alone exceeds it.
    """
    drive, curve = control.drive, control.per_ampere
    i_d, i_q = float(curve.i_d[-1]), float(curve.i_q[-1])
    psi_d, psi_q = float(curve.psi_d[-1]), float(curve.psi_q[-1])
    square = psi_d**2 + psi_q**2
    half = drive.resistance * (psi_d * i_q - psi_q * i_d)
    rest = (drive.resistance * math.hypot(i_d, i_q)) ** 2 - drive.voltage_limit**2
    if rest > 0.0:
        return 0.0
    return (-half + math.sqrt(half**2 - square * rest)) / square


def _kept_off(control: Control, i_d: FloatArray, i_q: FloatArray) -> FloatArray:
    """Points (n, 2) that names shall stay away from: curves, current circle, frame."""
    angle = np.linspace(-0.5 * math.pi, 0.5 * math.pi, 91)
    limit = control.drive.side * control.drive.current_limit
    frame = np.concatenate(
        [
            np.stack(np.broadcast_arrays(i_d[::6, None], i_q[[0, -1]]), -1).reshape(-1, 2),
            np.stack(np.broadcast_arrays(i_d[[0, -1], None], i_q[::6]), -1).reshape(-1, 2),
        ]
    )
    curves = (control.per_ampere, control.per_volt)
    lines = [np.stack([curve.i_d, curve.i_q], -1) for curve in curves]
    circle = np.stack([limit * np.cos(angle), abs(limit) * np.sin(angle)], -1)
    return np.concatenate([frame, *lines, circle])


def _levels(top: float) -> FloatArray:
    """Round torques in equal steps up to the greatest."""
    rough = top / TORQUE_LINES
    power = 10.0 ** math.floor(math.log10(rough))
    step = next(power * k for k in (1.0, 2.0, 2.5, 5.0, 10.0) if power * k >= rough)
    levels: FloatArray = step * np.arange(1.0, math.floor(top / step) + 1.0)
    return levels
