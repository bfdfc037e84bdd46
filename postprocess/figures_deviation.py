"""The deviation of a measured outline from the designed one: in colour, and exaggerated.

Blue is less steel than designed, red more, grey next to none, so that a thin rib shows in blue on
both of its sides. Drawn in the rotor's frame, first d axis to the right.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.supplier_outline import SupplierOutline, WorstPlace

from .figures import _figure, write_figure
from .figures_style import MM, Style, draw_scale, inked

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.colors import LinearSegmentedColormap
    from matplotlib.figure import Figure

UM = 1e6  # per m
LEAST_SCALE = 1.0  # um, of the colours: exact drawings are grey, not a carpet of rounding
LEAST_PLACE = 5e-9  # m
DRAWN_SHARE = 0.035  # of the rim's radius, that the largest deviation is drawn with
LINE = 2.6  # points
MOST_RIBS = 40  # bars; more are in the table alone


def write_deviation(folder: Path, name: str, found: SupplierOutline) -> tuple[Path, ...]:
    """Write the picture as PNG and SVG into an existing folder."""
    return write_figure(folder, "deviation", lambda style: deviation_figure(name, found, style))


def deviation_figure(name: str, found: SupplierOutline, style: Style) -> Figure:
    """The whole outline in colour, exaggerated beside its design, and the worst places."""
    figure = _figure((11.4, 7.6), f"{name}: {found.source.file} against the design", style)
    limit = scale_limit(found)
    ax = figure.add_axes((0.015, 0.03, 0.6, 0.9))
    draw_deviation(ax, found, limit, style)
    scale = figure.add_axes((0.635, 0.3, 0.018, 0.5))
    label = "more steel than designed, um"
    draw_scale(scale, deviation_colours(), (-limit, limit), label, style)
    draw_places(figure.add_axes((0.735, 0.5, 0.25, 0.43)), found, style)
    draw_rib_bars(figure.add_axes((0.79, 0.075, 0.19, 0.36)), found, style)
    return figure


def scale_limit(found: SupplierOutline) -> float:
    """End of the colour scale in um: the largest deviation, to one digit."""
    most = UM * float(np.abs(found.deviation).max())
    if most <= LEAST_SCALE:
        return LEAST_SCALE
    step = 10.0 ** math.floor(math.log10(most))
    return step * math.ceil(most / step)


def deviation_colours() -> LinearSegmentedColormap:
    """Blue through grey to red, both ends equally dark."""
    from matplotlib.colors import LinearSegmentedColormap

    stops = ["#1f4e9c", "#6d9bd1", "#c9ccd0", "#e08f6c", "#a8281e"]
    return LinearSegmentedColormap.from_list("lamwright_deviation", stops, N=256)


def draw_deviation(ax: Axes, found: SupplierOutline, limit: float, style: Style) -> None:
    """Draw design, deviation in colour, and the outline with its deviation exaggerated."""
    from matplotlib.collections import LineCollection
    from matplotlib.patches import PathPatch

    ideal = found.ideal
    thin = PathPatch(inked([c.path.edges for c in ideal.contours], [1.0], closed=True), fill=False)
    thin.set(edgecolor=style.quiet, linewidth=style.hair, zorder=2)
    ax.add_artist(thin)
    gain = _gain(found)
    colours = deviation_colours()
    for number in range(len(ideal.contours)):
        own = found.contour_of == number
        at, off = found.at[own], found.deviation[own]
        loop, gaps = np.append(at, at[0]), np.append(off, off[0])
        ahead = np.gradient(loop)
        outward = -1j * ahead / np.maximum(np.abs(ahead), 1e-12)
        shown = MM * (loop + (gain - 1.0) * gaps * outward)
        spots = np.column_stack([shown.real, shown.imag])
        pieces = np.stack([spots[:-1], spots[1:]], axis=1)
        middle = UM * 0.5 * (gaps[:-1] + gaps[1:])
        lines = LineCollection(list(pieces), cmap=colours, linewidths=LINE, zorder=4)
        lines.set_array(middle)
        lines.set_clim(-limit, limit)
        lines.set_capstyle("round")
        ax.add_collection(lines)
    _number_places(ax, found, style)
    _name_poles(ax, found, style)
    reach = 1.13 * MM * ideal.rim
    ax.set_xlim(-reach, reach)
    ax.set_ylim(-reach, reach)
    ax.set_aspect("equal")
    ax.axis("off")
    told = f"deviation drawn {gain:.0f} times as large, design as a thin line"
    ax.text(0.5, -0.006, told, transform=ax.transAxes, ha="center", va="top", fontsize=style.text)


def draw_places(ax: Axes, found: SupplierOutline, style: Style) -> None:
    """List the worst places by their numbers, then the diameters."""
    ax.axis("off")
    places = _shown_places(found)
    lines = ["worst places, um"] if places else ["nowhere off by 0.01 um"]
    for number, place in enumerate(places, start=1):
        where, radius, angle = (part.strip() for part in place.text.split(", "))
        lines.append(f"{number}  {UM * place.deviation:+.2f}   {where}, {radius},")
        lines.append(f"     {angle}")
    for word, ring in (("rim", found.rim), ("bore", found.bore)):
        if ring is not None:
            change = round(2.0 * UM * (ring.radius - ring.designed), 1) + 0.0  # no -0.0
            lines.append("")
            lines.append(f"{word} diameter {2.0 * MM * ring.radius:.4f} mm, {change:+.1f} um;")
            lines.append(
                f"  {UM * abs(ring.centre):.1f} um off the axis, "
                f"{UM * ring.unroundness:.1f} um out of round"
            )
    lines += ["", f"noise of the points {UM * found.noise:.2g} um"]
    if found.strays:  # first, for they are not on the map
        where, radius, angle = (part.strip() for part in found.strays[0].text.split(", "))
        told = f"NOT AS DRAWN, {UM * found.strays[0].deviation:+.0f} um at {where},"
        lines = [told, f"  {radius}, {angle}", "", "else:", *lines]
    ax.text(
        0.0,
        1.0,
        "\n".join(lines),
        transform=ax.transAxes,
        va="top",
        fontsize=style.text,
        color=style.ink,
        linespacing=1.3,
    )


def draw_rib_bars(ax: Axes, found: SupplierOutline, style: Style) -> None:
    """Draw how much each rib is wider than designed, those that are most off first."""
    order = sorted(found.ribs, key=lambda rib: -abs(rib.difference))[:MOST_RIBS]
    shown = order[:10]
    colours = deviation_colours()  # as on the map: blue is less steel
    for at, rib in enumerate(shown):
        colour = colours(0.9 if rib.difference >= 0.0 else 0.1)
        ax.barh(-at, UM * rib.difference, height=0.6, color=colour, zorder=2)
        ax.plot(
            [UM * (rib.difference - rib.error), UM * (rib.difference + rib.error)],
            [-at, -at],
            color=style.ink,
            linewidth=style.outline,
            zorder=3,
        )
    most = max([LEAST_SCALE, *(UM * (abs(rib.difference) + rib.error) for rib in shown)])
    ax.set_xlim(-1.1 * most, 1.1 * most)
    ax.axvline(0.0, color=style.quiet, linewidth=style.hair)
    ax.set_yticks([-at for at in range(len(shown))])
    names = [
        f"{rib.pole} {rib.name.replace('tangential', 'tang').replace('_', ' ')}" for rib in shown
    ]
    ax.set_yticklabels(names, fontsize=style.small)
    ax.tick_params(labelsize=style.small, colors=style.ink, width=style.hair)
    ax.set_xlabel("rib wider than designed, um", fontsize=style.text)
    ax.set_title(
        "ribs most off (pole, name)", fontsize=style.text, color=style.ink, loc="left", pad=4.0
    )
    for spine in ax.spines.values():
        spine.set(color=style.quiet, linewidth=style.hair)


def _shown_places(found: SupplierOutline) -> list[WorstPlace]:
    """Those that are more than rounding."""
    return [place for place in found.worst if abs(place.deviation) >= LEAST_PLACE]


def _gain(found: SupplierOutline) -> float:
    """How many times deviations are drawn: a round number, 1 where there are next to none."""
    most = max(float(np.abs(found.deviation).max()), LEAST_SCALE / UM)
    wanted = DRAWN_SHARE * found.ideal.rim / most
    step = 10.0 ** math.floor(math.log10(wanted))
    return max(1.0, step * max(s for s in (1.0, 2.0, 5.0) if s * step <= wanted))


def _number_places(ax: Axes, found: SupplierOutline, style: Style) -> None:
    from matplotlib.patheffects import Normal, Stroke

    for number, place in enumerate(_shown_places(found), start=1):
        inward = MM * place.at * (1.0 - 0.05)
        ax.plot(
            [MM * place.at.real, inward.real],
            [MM * place.at.imag, inward.imag],
            color=style.ink,
            linewidth=style.outline,
            zorder=6,
        )
        ax.text(
            inward.real,
            inward.imag,
            str(number),
            fontsize=style.text,
            fontweight="bold",
            color=style.ink,
            ha="center",
            va="center",
            path_effects=[Stroke(linewidth=3.0, foreground=style.paper), Normal()],
            zorder=7,
        )


def _name_poles(ax: Axes, found: SupplierOutline, style: Style) -> None:
    ideal = found.ideal
    angles = (np.arange(ideal.poles) + 0.5) * ideal.pitch
    for pole, at in enumerate(1.08 * MM * ideal.rim * np.exp(1j * angles), start=1):
        weight = "bold" if pole in found.poles_analysed else "normal"
        ax.text(
            at.real,
            at.imag,
            f"pole {pole}",
            fontsize=style.text,
            fontweight=weight,
            color=style.ink,
            ha="center",
            va="center",
            rotation=math.degrees(np.angle(at)) + (90.0 if at.imag < -1e-9 else -90.0),
        )
