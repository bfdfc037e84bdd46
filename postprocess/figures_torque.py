"""Torque over 60 electrical degrees, and its harmonics by order."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from .figures_labels import spread
from .figures_style import Style, pixels_per_point
from .operating import slot_order
from .torque import (
    PERIOD_EL,
    TorqueWaveform,
    coenergy_torque,
    interpolant,
    ripple,
    spectrum,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes

HEADROOM = 0.12  # share of the range left free above and below a curve
NUMBER_PITCH = 1.7  # least distance of numbers beside a curve over the size of letters


def draw_torque(ax: Axes, waveform: TorqueWaveform, style: Style) -> None:
    """Draw one period of torque by both formulas, with mean, crests and ripple.

    The curve is the trigonometric interpolant whose crests the ripple is taken from; dots are
    the computed positions. The numbers stand right of the axes at the heights they name.
    """
    angle = np.degrees(waveform.angle_el)
    curve = interpolant(waveform.torque)
    fine = angle[0] + np.degrees(PERIOD_EL) * np.arange(len(curve) + 1) / len(curve)
    low, high = float(curve.min()), float(curve.max())
    ax.axhspan(low, high, color=style.ink, alpha=0.055, linewidth=0, zorder=0)
    ax.plot(
        fine,
        np.append(curve, curve[0]),
        color=style.ink,
        linewidth=1.4,
        label="Maxwell stress",
        zorder=3,
    )
    ax.plot(angle, waveform.torque, "o", color=style.ink, markersize=2.6, zorder=4, clip_on=False)
    ax.plot(
        angle,
        coenergy_torque(waveform),
        linestyle="none",
        marker="D",
        markersize=4.6,
        markerfacecolor="none",
        markeredgecolor=style.accent,
        markeredgewidth=0.8,
        label="linkages and coenergy",
        zorder=5,
        clip_on=False,
    )
    ax.axhline(waveform.mean, color=style.second, linewidth=1.0, dashes=(6, 2), zorder=2)
    margin = HEADROOM * (max(high, waveform.mean) - min(low, waveform.mean) or abs(high) or 1.0)
    ax.set_ylim(low - margin, high + margin)
    ax.set_xlim(fine[0], fine[-1])
    ax.set_xticks(fine[0] + np.arange(0.0, 61.0, 10.0))
    ax.set_xlabel("rotor position in electrical degrees", fontsize=style.text)
    ax.set_ylabel("torque in N m", fontsize=style.text)
    _numbers(ax, waveform, (low, high), style)
    _legend(ax, style)
    _plain(ax, style)


def _legend(ax: Axes, style: Style, columns: int = 2) -> None:
    """Names of curves or bars in one line above the axes, where nothing can be under them."""
    ax.legend(
        loc="lower left",
        bbox_to_anchor=(-0.01, 1.0),
        ncols=columns,
        frameon=False,
        fontsize=style.text,
        labelcolor=style.ink,
        borderaxespad=0.2,
        handletextpad=0.6,
    )


def _numbers(ax: Axes, waveform: TorqueWaveform, crests: tuple[float, float], style: Style) -> None:
    """Max, mean, min beside the axes, pushed apart where they are near, and the ripple above."""
    low, high = crests
    top = max(abs(low), abs(high))
    rows = [
        (low, f"min {torque_text(low, top)}", style.ink),
        (waveform.mean, f"mean {torque_text(waveform.mean, top)}", style.second),
        (high, f"max {torque_text(high, top)}", style.ink),
    ]
    bottom, top = ax.get_ylim()
    per_point = (top - bottom) / ax.get_window_extent().height
    per_point *= pixels_per_point(ax)
    wanted = np.array([value for value, _, _ in rows])
    heights = spread(wanted, NUMBER_PITCH * style.text * per_point, bottom, top)
    across = ax.get_yaxis_transform()
    for (value, text, colour), height in zip(rows, heights, strict=True):
        ax.plot(
            [1.0, 1.015, 1.03],
            [value, height, height],
            transform=across,
            color=colour,
            linewidth=style.hair,
            clip_on=False,
        )
        ax.text(
            1.037, height, text, transform=across, color=colour, fontsize=style.text, va="center"
        )
    ax.text(
        1.0,
        1.03,
        f"ripple {100.0 * ripple(waveform):.1f} % of mean, peak to peak;"
        f" mean by linkages {torque_text(waveform.mean_linkage, top)}",
        transform=ax.transAxes,
        fontsize=style.text,
        color=style.ink,
        ha="right",
        va="bottom",
    )


def draw_spectrum(ax: Axes, waveform: TorqueWaveform, slots: int, style: Style) -> None:
    """Draw the torque harmonics as bars with their amplitude on top.

    Args:
        ax: where to draw.
        waveform: one period of torque.
        slots: of the stator; orders that its slots cause are filled dark.
        style: sizes and colours.
    """
    found = spectrum(waveform)
    first = slot_order(waveform.pole_pairs, slots)
    is_slot = [order % first == 0 for order in found.order]
    for wanted, colour, name in (
        (True, style.ink, f"slot harmonics (multiples of {first})"),
        (False, "#b9c5ce", "others"),
    ):
        rows = [k for k, flag in enumerate(is_slot) if flag is wanted]
        ax.bar(
            [found.order[k] for k in rows],
            found.amplitude[rows],
            width=3.4,
            color=colour,
            edgecolor=style.ink,
            linewidth=style.hair,
            label=name,
        )
    top = float(found.amplitude.max()) or 1.0
    for order, amplitude in zip(found.order, found.amplitude, strict=True):
        ax.text(
            order,
            amplitude + 0.025 * top,
            _number(float(amplitude), top),
            fontsize=style.small,
            color=style.ink,
            ha="center",
            va="bottom",
        )
    ax.set_ylim(0.0, 1.18 * top)
    ax.set_xlim(found.order[0] - 4.5, found.order[-1] + 4.5)
    ax.set_xticks(found.order)
    ax.set_xlabel("electrical order", fontsize=style.text)
    ax.set_ylabel("amplitude in N m", fontsize=style.text)
    _legend(ax, style)
    _share_axis(ax, waveform, style)
    _plain(ax, style)


def _share_axis(ax: Axes, waveform: TorqueWaveform, style: Style) -> None:
    """A second scale on the right: the same amplitudes in percent of the mean torque."""
    per_cent = 100.0 / abs(waveform.mean) if waveform.mean else math.nan
    if not math.isfinite(per_cent):
        return

    def share(amplitude: npt.ArrayLike) -> npt.ArrayLike:
        return np.multiply(amplitude, per_cent)

    def amplitude(share: npt.ArrayLike) -> npt.ArrayLike:
        return np.divide(share, per_cent)

    twin = ax.secondary_yaxis("right", functions=(share, amplitude))
    twin.set_ylabel("amplitude in % of mean", fontsize=style.text, color=style.ink)
    twin.tick_params(labelsize=style.text, colors=style.ink, width=style.hair)
    twin.spines["right"].set(color=style.quiet, linewidth=style.hair)


def torque_text(value: float, top: float) -> str:
    """A torque with its unit and as many places as give `top` four figures."""
    return f"{value:.{_places(top, 4)}f} N m"


def _number(value: float, top: float) -> str:
    """As many places as give the largest bar three figures."""
    return f"{value:.{_places(top, 3)}f}"


def _places(top: float, figures: int) -> int:
    return max(0, figures - 1 - math.floor(math.log10(top))) if top > 0.0 else 0


def _plain(ax: Axes, style: Style) -> None:
    ax.tick_params(labelsize=style.text, colors=style.ink, width=style.hair)
    ax.xaxis.label.set_color(style.ink)
    ax.yaxis.label.set_color(style.ink)
    ax.grid(axis="y", color=style.quiet, alpha=0.22, linewidth=style.hair)
    ax.set_axisbelow(True)
    for name, spine in ax.spines.items():
        spine.set_visible(name in ("left", "bottom"))
        spine.set(color=style.quiet, linewidth=style.hair)
