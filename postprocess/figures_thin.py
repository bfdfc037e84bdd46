"""The thinnest ribs: width, margin and price of each group, side by side."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from .figures import _figure, write_figure
from .figures_ribs import BAR, FOOT, HEAD, ROOM, _line, _places, _rows
from .figures_style import Style
from .thin_ribs import ThinRib

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

MM = 1e3  # mm per m
WAS = "#b9c5ce"  # bars of the design as stated


def write_thin_figure(
    folder: Path, name: str, ribs: Sequence[ThinRib], asked: float
) -> tuple[Path, ...]:
    """Write the picture of the design `name` as PNG and SVG into an existing folder."""
    return write_figure(folder, "thin", lambda style: thin_figure(name, ribs, asked, style))


def thin_figure(name: str, ribs: Sequence[ThinRib], asked: float, style: Style) -> Figure:
    """Widths, margins, and prices where they are given."""
    height = FOOT + HEAD + ROOM * max(len(ribs), 3) + 0.15
    figure = _figure((11.0, height), f"{name}: thinnest ribs that hold, grey as stated", style)
    low, tall = FOOT / height, 1.0 - (FOOT + HEAD + 0.15) / height
    has_prices = any(rib.price is not None for rib in ribs)
    wide = 0.25 if has_prices else 0.39
    draw_widths(figure.add_axes((0.16, low, wide, tall)), ribs, style)
    left = 0.16 + wide + 0.03
    draw_thin_margins(figure.add_axes((left, low, wide, tall)), ribs, asked, style)
    if has_prices:
        draw_prices(figure.add_axes((left + wide + 0.03, low, 0.25, tall)), ribs, style)
    return figure


def draw_widths(ax: Axes, ribs: Sequence[ThinRib], style: Style) -> None:
    """Draw the widths before and after, and the floor."""
    before, after = ([MM * getattr(rib, key) for rib in ribs] for key in ("width_before", "width"))
    for at, was, now in zip(_places(len(ribs)), before, after, strict=True):
        _pair(ax, at, (was, now), max(*before, *after), f"{now:.3f}", style)
    _line(ax, MM * ribs[0].floor, f"floor {MM * ribs[0].floor:.3g}", style)
    ax.set_xlabel("width, mm", fontsize=style.text)
    _rows(ax, [rib.group.label for rib in ribs], style)


def draw_thin_margins(ax: Axes, ribs: Sequence[ThinRib], asked: float, style: Style) -> None:
    """Draw the yield margins at overspeed before and after, and that asked for."""
    before, after = ([getattr(rib, key) for rib in ribs] for key in ("margin_before", "margin"))
    for at, was, now in zip(_places(len(ribs)), before, after, strict=True):
        _pair(ax, at, (was, now), max(*before, *after), f"{now:.3g}", style)
    _line(ax, asked, f"asked {asked:.3g}", style)
    ax.set_xlabel("yield margin at overspeed", fontsize=style.text)
    _rows(ax, [""] * len(ribs), style)


def draw_prices(ax: Axes, ribs: Sequence[ThinRib], style: Style) -> None:
    """Draw what 0.1 mm more of each rib changes of the mean torque."""
    prices = [rib.price or 0.0 for rib in ribs]
    most = max(map(abs, prices)) or 1.0
    for at, rib in zip(_places(len(ribs)), ribs, strict=True):
        price = rib.price
        if price is not None:
            ax.barh(at, price, height=BAR, color=style.second, zorder=2)
        words, end = "not given" if price is None else f"{price:+.2g}", price or 0.0
        side = 1.0 if end > 0.0 else -1.0
        ax.text(
            end + 0.02 * side * most,
            at,
            words,
            fontsize=style.text,
            color=style.ink,
            va="center",
            ha="left" if side > 0.0 else "right",
        )
    room = 1.35 * most
    ax.set_xlim(-room if min(prices) < 0.0 else -0.05 * most, room if max(prices) > 0.0 else 0.0)
    ax.axvline(0.0, color=style.quiet, linewidth=style.hair)
    ax.set_xlabel("change of mean torque per +0.1 mm, N m", fontsize=style.text)
    _rows(ax, [""] * len(ribs), style)


def _pair(
    ax: Axes, at: int, values: tuple[float, float], most: float, words: str, style: Style
) -> None:
    """The value before in grey, the one found before it and in words."""
    ax.barh(at, values[0], height=BAR, color=WAS, zorder=1)
    ax.barh(at, values[1], height=0.5 * BAR, color=style.second, zorder=2)
    ax.text(
        max(values) + 0.015 * most,
        at,
        words,
        fontsize=style.text,
        color=style.ink,
        va="center",
        zorder=4,
    )
    ax.set_xlim(0.0, 1.2 * most)
