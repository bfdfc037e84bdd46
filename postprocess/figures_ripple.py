"""Pictures of torque orders with and without skew, of force orders and of the force on a tooth."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from .figures import _figure
from .figures_style import Style
from .figures_torque import _legend, _plain
from .force_orders import ForceOrder, ToothForces
from .skew_orders import SkewedTorque
from .torque import TorqueSpectrum
from .torque_causes import Slotting, pair_text
from .torque_pairs import WavePair

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

DEGREE = math.pi / 180.0
BAR = 5.0  # of 6 orders, that the bars of one order take
TOLD = 6  # orders whose causes are written out
PAIRS_TOLD = 2  # of each
BUBBLE = 620.0  # points^2, area of the largest circle
NUMBERED = 12  # circles with their stress beside them
MOST_TICKS = 14  # space orders, for a tick at each
HALO = 1.6  # points of paper round a number, so that it reads on circles and lines
PALE = "#b9c5ce"


@dataclass(frozen=True, slots=True, eq=False)
class RipplePictured:
    """What the picture of torque orders shows."""

    name: str  # of the design
    spectrum: TorqueSpectrum  # without skew
    mean: float  # N m, without skew
    skews: tuple[SkewedTorque, ...]  # the design's own first
    pairs: tuple[tuple[WavePair, ...], ...]  # of each order
    by: Slotting


@dataclass(frozen=True, slots=True, eq=False)
class ForcesPictured:
    """What the picture of forces shows."""

    name: str
    orders: tuple[ForceOrder, ...]  # the mean first
    teeth: ToothForces
    frequency: float  # Hz, electrical, at rated speed


def ripple_figure(shown: RipplePictured, style: Style) -> Figure:
    """Torque orders without skew, with the design's and with the slot order's period; causes."""
    figure = _figure((11.0, 6.8), f"{shown.name}: torque by order, and what makes it", style)
    draw_skewed(figure.add_axes((0.075, 0.5, 0.91, 0.39)), shown, style)
    draw_causes(figure.add_axes((0.075, 0.02, 0.91, 0.385)), shown, style)
    return figure


def forces_figure(shown: ForcesPictured, style: Style) -> Figure:
    """Waves of radial stress on the bore, and the force on a tooth over a period."""
    figure = _figure((11.0, 6.4), f"{shown.name}: forces of the gap's field on the stator", style)
    draw_force_orders(figure.add_axes((0.06, 0.09, 0.41, 0.79)), shown, style)
    draw_tooth(figure.add_axes((0.61, 0.09, 0.37, 0.79)), shown.teeth, style)
    return figure


def draw_skewed(ax: Axes, shown: RipplePictured, style: Style) -> None:
    """Draw the orders' amplitudes as bars side by side: no skew, the design's, the slots'."""
    orders = np.array(shown.spectrum.order)
    own, continuous = shown.skews[0], shown.skews[-1]
    skew = f"{continuous.angle_el / DEGREE:.3g}"
    rows = [(shown.spectrum.amplitude, style.ink, "no skew")]
    if own.steps > 1:
        name = f"this rotor: {own.angle_el / DEGREE:.3g} el. degrees in {own.steps} steps"
        rows.append((own.amplitude, style.accent, name))
    three = next(s for s in shown.skews[1:] if s.steps == 3)
    if (own.steps, own.angle_el) != (three.steps, three.angle_el):
        name = f"slot order's period, {skew} el. degrees, in 3 steps"
        rows.append((three.amplitude, style.second, name))
    rows.append((continuous.amplitude, PALE, f"{skew} el. degrees, continuous"))
    width = BAR / len(rows)
    for k, (amplitude, colour, name) in enumerate(rows):
        ax.bar(
            orders + (k - 0.5 * (len(rows) - 1)) * width,
            100.0 * amplitude / abs(shown.mean),
            width=width,
            color=colour,
            edgecolor=style.ink,
            linewidth=style.hair,
            label=name,
        )
    ax.set_xticks(orders)
    ax.set_xlim(orders[0] - 4.5, orders[-1] + 4.5)
    ax.margins(y=0.08)
    ax.set_xlabel("electrical order", fontsize=style.text)
    mean = f"{shown.mean:.4g} N m"
    ax.set_ylabel(f"amplitude in % of the mean torque\nwithout skew, {mean}", fontsize=style.text)
    _legend(ax, style, len(rows))
    _plain(ax, style)


def draw_causes(ax: Axes, shown: RipplePictured, style: Style) -> None:
    """Write out the strongest pairs of waves of the largest orders, with their shares."""
    ax.set_axis_off()
    largest = np.argsort(shown.spectrum.amplitude)[::-1][:TOLD]
    lines: list[tuple[str, str, str]] = []
    for k in sorted(largest.tolist()):
        order, percent = shown.spectrum.order[k], 100.0 * shown.spectrum.amplitude[k]
        told = sorted(shown.pairs[k], key=lambda pair: -pair.share)[:PAIRS_TOLD]
        head = f"order {order}:  {percent / abs(shown.mean):.2f} % of the mean"
        for pair in told:
            lines.append((head, f"{100.0 * pair.share:+.0f} %", pair_text(pair, shown.by)))
            head = ""
    ax.text(
        0.0,
        1.0,
        "strongest pairs of waves, share of the order in phase with it; all pairs sum to 100 %",
        fontsize=style.text,
        color=style.quiet,
        va="top",
    )
    step = 0.92 / max(1, TOLD * PAIRS_TOLD)
    for row, (head, share, text) in enumerate(lines):
        height = 0.91 - row * step
        ax.text(0.0, height, head, fontsize=style.text, color=style.ink, va="top")
        ax.text(0.27, height, share, fontsize=style.text, color=style.accent, va="top", ha="right")
        ax.text(0.29, height, text, fontsize=style.text, color=style.ink, va="top")
    ax.set_xlim(0.0, 1.0)
    ax.set_ylim(0.0, 1.0)


def draw_force_orders(ax: Axes, shown: ForcesPictured, style: Style) -> None:
    """Draw waves of radial stress as circles over space order and time order.

    The mean is left out; the area is the amplitude. The scale on the right is the frequency at
    rated speed.
    """
    from matplotlib.patheffects import withStroke

    waves = [order for order in shown.orders if (order.space, order.time) != (0, 0.0)]
    top = max((wave.radial for wave in waves), default=1.0)
    for sense, colour, name in (
        (1.0, style.second, "with the rotor"),
        (-1.0, style.accent, "against it"),
        (0.0, PALE, "standing"),
    ):
        own = [wave for wave in waves if _sense(wave) == sense]
        ax.scatter(
            [wave.space for wave in own],
            [wave.time for wave in own],
            s=[BUBBLE * wave.radial / top for wave in own],
            color=colour,
            edgecolor=style.ink,
            linewidth=style.hair,
            alpha=0.85,
            zorder=3,
        )
        # One size in the key, whatever the first circle's is.
        ax.scatter([], [], s=36.0, color=colour, edgecolor=style.ink, linewidth=0.45, label=name)
    for wave in sorted(waves, key=lambda w: -w.radial)[:NUMBERED]:
        radius = 0.5 * math.sqrt(BUBBLE * wave.radial / top)
        ax.annotate(
            f"{1e-3 * wave.radial:.3g}",
            (wave.space, wave.time),
            xytext=(radius + 1.5, 0.0),
            textcoords="offset points",
            fontsize=style.small,
            color=style.ink,
            va="center",
            zorder=4,
            path_effects=[withStroke(linewidth=HALO, foreground=style.paper)],
        )
    reach = 1.12 * max((abs(wave.time) for wave in waves), default=1.0)
    ax.set_ylim(-reach, reach)
    widest = max((wave.space for wave in waves), default=1)
    ax.set_xlim(-0.05 * widest, 1.14 * widest)
    orders = sorted({wave.space for wave in waves})
    if len(orders) <= MOST_TICKS:
        ax.set_xticks(orders)
    ax.axhline(0.0, color=style.quiet, linewidth=style.hair)
    ax.set_xlabel("space order: waves round the bore", fontsize=style.text)
    ax.set_ylabel("time order, electrical; below 0 against the rotor", fontsize=style.text)

    def hertz(order: npt.ArrayLike) -> npt.ArrayLike:
        return np.multiply(order, shown.frequency)

    def order(hertz: npt.ArrayLike) -> npt.ArrayLike:
        return np.divide(hertz, shown.frequency)

    twin = ax.secondary_yaxis("right", functions=(hertz, order))
    twin.set_ylabel("frequency at rated speed in Hz", fontsize=style.text, color=style.ink)
    twin.tick_params(labelsize=style.text, colors=style.ink, width=style.hair)
    twin.spines["right"].set(color=style.quiet, linewidth=style.hair)
    twin.yaxis.set_major_formatter(lambda value, _: f"{abs(value):g}")
    ax.text(
        0.0,
        1.062,
        "amplitude of the radial stress in kPa: numbers, and area of the circles",
        transform=ax.transAxes,
        fontsize=style.text,
        color=style.ink,
        va="bottom",
    )
    _legend(ax, style, 3)
    _plain(ax, style)
    ax.grid(axis="x", color=style.quiet, alpha=0.22, linewidth=style.hair)


def _sense(wave: ForceOrder) -> float:
    """1 with the rotor, -1 against it, 0 where it stands or only breathes."""
    return math.copysign(1.0, wave.time) if wave.time and wave.space else 0.0


def draw_tooth(ax: Axes, teeth: ToothForces, style: Style) -> None:
    """Draw pull and sideways force on the tooth at angle 0 over a period."""
    angle = teeth.angle_el / DEGREE
    end = angle[-1] + angle[1] - angle[0]
    for force, colour, name in (
        (teeth.pull[:, 0], style.ink, "towards the shaft"),
        (teeth.tangential[:, 0], style.accent, "sideways, counter-clockwise"),
    ):
        closed = np.append(force, force[0])
        ax.plot(np.append(angle, end), closed, color=colour, linewidth=1.3, label=name)
    ax.axhline(0.0, color=style.quiet, linewidth=style.hair)
    ax.set_xlim(0.0, end)
    ax.set_xticks(np.arange(0.0, end + 1.0, 60.0))
    ax.margins(y=0.08)
    ax.set_xlabel("rotor position in electrical degrees", fontsize=style.text)
    ax.set_ylabel("force on a tooth, whole stack, in N", fontsize=style.text)
    _legend(ax, style)
    _plain(ax, style)
