"""Where a machine loses: loss density over the section, and losses as bars and by order."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.section import CrossSection, Region
from lamwright.solver.types import FloatArray

from .figures import _figure, write_figure
from .figures_labels import RULER_FOOT, draw_note, draw_ruler, place_callouts
from .figures_section import bare
from .figures_sector import (
    break_off,
    break_radius,
    draw_axes_lines,
    draw_cut,
    pole_silhouette,
)
from .figures_style import (
    MM,
    Style,
    draw_scale,
    flux_colours,
    inked,
    region_ink,
    upright,
    visible_edges,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

SHOWN_SHARE = 0.995  # of the steel's area that the scale holds; tooth tips and rims lie above
NOT_STEEL = "#eef0f1"
PART_COLOURS = ("#7b8794", "#cb7a43", "#2f6f8f")  # rotor, teeth, yoke
LEAST_SHARE = 1e-3  # of the greatest order: smaller ones are not drawn


@dataclass(frozen=True, slots=True, eq=False)
class DensityPart:
    """Loss density of the elements of one part's steel."""

    corners: FloatArray  # (n_elem, 3, 2), m, in the part's own frame
    area: FloatArray  # (n_elem,), m^2
    loss: FloatArray  # (n_elem,), W/kg


@dataclass(frozen=True, slots=True, eq=False)
class LossPicture:
    """What the pictures of losses show."""

    name: str  # of the design
    condition: str  # current and speed
    section: CrossSection
    density: tuple[DensityPart, ...]  # none where iron loss is not given
    bars: tuple[tuple[str, float], ...]  # name and W
    missing: tuple[str, ...]  # losses that are not given
    order: FloatArray  # (n_order,), electrical
    of_order: FloatArray  # (3, n_order), W, rotor, teeth, yoke


def write_loss_figures(folder: Path, shown: LossPicture) -> tuple[Path, ...]:
    """Write the pictures as PNG and SVG into an existing folder."""
    written = write_figure(folder, "losses", lambda style: losses_figure(shown, style))
    if not shown.density:
        return written
    return (
        *written,
        *write_figure(folder, "loss_density", lambda style: density_figure(shown, style)),
    )


def density_figure(shown: LossPicture, style: Style) -> Figure:
    """Iron loss per kilogram over a sector of rotor and stator."""
    figure = _figure((9.0, 6.8), f"{shown.name}: iron loss over the section", style)
    ax = figure.add_axes((0.015, 0.02, 0.845, 0.91))
    scale_ax = figure.add_axes((0.885, 0.12, 0.024, 0.72))
    draw_loss_density(ax, scale_ax, shown, style)
    return figure


def losses_figure(shown: LossPicture, style: Style) -> Figure:
    """All losses as bars, and the iron loss by order."""
    figure = _figure((9.0, 5.6), f"{shown.name}: losses, estimates", style)
    figure.text(
        0.985, 0.975, shown.condition, fontsize=style.text, color=style.quiet, ha="right", va="top"
    )
    lower = 0.55 if shown.of_order.size else 0.12
    draw_bars(figure.add_axes((0.2, lower, 0.72, 0.88 - lower)), shown.bars, shown.missing, style)
    if shown.of_order.size:
        draw_orders(figure.add_axes((0.08, 0.1, 0.9, 0.3)), shown.order, shown.of_order, style)
    return figure


def draw_loss_density(ax: Axes, scale_ax: Axes, shown: LossPicture, style: Style) -> None:
    """Draw the loss density in W/kg, the rotor's d axis on the sector's side, and its scale."""
    from matplotlib.patches import PathPatch

    section = shown.section
    turn = upright(section)
    loss = np.concatenate([part.loss for part in shown.density])
    area = np.concatenate([part.area for part in shown.density])
    top = _top(loss, area)
    place_callouts(ax, pole_silhouette(section, break_radius(section)), [], style, RULER_FOOT)
    others: list[Region] = [
        region
        for region in (*section.stator, *section.rotor)
        if region.material in ("copper", "shaft", "magnet", "key", "rivet")
    ]
    ax.add_patch(
        PathPatch(region_ink(others, [turn]), facecolor=NOT_STEEL, edgecolor="none", zorder=1)
    )
    for part in shown.density:
        z = MM * turn * (part.corners[..., 0] + 1j * part.corners[..., 1]).ravel()
        ax.tripcolor(
            z.real,
            z.imag,
            np.arange(z.size).reshape(-1, 3),
            facecolors=part.loss,
            cmap=flux_colours(),
            vmin=0.0,
            vmax=top,
            rasterized=True,
            zorder=2,
        )
    for regions in (section.stator, section.rotor):
        lines = PathPatch(inked(visible_edges(regions, section), [turn], closed=False), fill=False)
        lines.set(edgecolor=style.ink, linewidth=style.outline, zorder=3)
        ax.add_artist(lines)
    draw_cut(ax, section, turn, (break_radius(section), section.stator_outer_radius), style)
    draw_axes_lines(ax, section, turn, style)
    break_off(ax, section, style)
    draw_ruler(ax, style)
    draw_note(ax, (shown.condition, f"greatest {loss.max():.3g} W/kg, above the scale"), style)
    bare(ax)
    draw_scale(scale_ax, flux_colours(), (0.0, top), "iron loss in W/kg", style)


def _top(loss: FloatArray, area: FloatArray) -> float:
    """A round density above which `SHOWN_SHARE` of the steel does not go."""
    rank = np.argsort(loss)
    share = np.cumsum(area[rank]) / area.sum()
    value = float(loss[rank][np.searchsorted(share, SHOWN_SHARE)])
    decade = 10.0 ** np.floor(np.log10(max(value, 1e-9)))
    return float(np.ceil(2.0 * value / decade) / 2.0 * decade)


def draw_bars(
    ax: Axes, bars: Sequence[tuple[str, float]], missing: Sequence[str], style: Style
) -> None:
    """Draw losses as bars with their numbers; those not given stand named without a bar."""
    names = [name for name, _ in bars] + list(missing)
    place = np.arange(len(names))[::-1]
    most = max((value for _, value in bars), default=1.0)
    for at, (_, value) in zip(place, bars, strict=False):
        ax.barh(at, value, height=0.62, color=style.second, zorder=2)
        ax.text(
            value + 0.01 * most,
            at,
            f"{value:.4g} W",
            fontsize=style.text,
            color=style.ink,
            va="center",
        )
    for at in place[len(bars) :]:
        ax.text(
            0.01 * most,
            at,
            "not given",
            fontsize=style.text,
            fontstyle="italic",
            color=style.quiet,
            va="center",
        )
    ax.set_yticks(place, names, fontsize=style.text, color=style.ink)
    ax.set_ylim(-0.6, len(names) - 0.4)
    ax.set_xlim(0.0, 1.14 * most)
    ax.set_xlabel("loss in W", fontsize=style.text, color=style.ink)
    _plain(ax, style)
    ax.tick_params(axis="y", length=0.0)


def draw_orders(ax: Axes, order: FloatArray, of_order: FloatArray, style: Style) -> None:
    """Draw the iron loss by electrical order, stacked by part, on a logarithmic scale below."""
    from matplotlib.ticker import MultipleLocator

    total = of_order.sum(axis=0)
    kept = total > LEAST_SHARE * total.max(initial=0.0)
    ax.set_yscale("log")
    width = 0.26
    low = LEAST_SHARE * float(total.max(initial=1.0))
    pitch = _pitch(order[kept])
    names = ("rotor", "teeth", "yoke")
    # Rotor and stator see different orders where the slots per pole and phase are whole.
    beside = (0.0, -0.5, 0.5)
    for k, (name, colour) in enumerate(zip(names, PART_COLOURS, strict=True)):
        ax.bar(
            order[kept] + beside[k] * width * pitch,
            np.maximum(of_order[k, kept], low),
            bottom=0.0,
            width=width * pitch,
            color=colour,
            label=name,
            zorder=2,
        )
    last = float(order[kept].max(initial=1.0))
    ax.xaxis.set_major_locator(MultipleLocator(6.0 if last > 24.0 else 2.0))
    ax.set_xlim(0.0, last + 1.0)
    ax.set_ylim(low, 3.0 * float(total.max(initial=1.0)))
    ax.set_xlabel("electrical order", fontsize=style.text, color=style.ink)
    ax.set_ylabel("iron loss in W", fontsize=style.text, color=style.ink)
    ax.legend(
        loc="lower left",
        bbox_to_anchor=(-0.01, 1.0),
        ncols=3,
        frameon=False,
        fontsize=style.text,
        labelcolor=style.ink,
        borderaxespad=0.2,
    )
    _plain(ax, style)


def _pitch(order: FloatArray) -> float:
    """Least distance of orders, but enough for a bar to be seen."""
    return max(0.6, float(np.diff(order).min(initial=2.0)))


def _plain(ax: Axes, style: Style) -> None:
    for side in ("top", "right"):
        ax.spines[side].set_visible(False)
    for side in ("left", "bottom"):
        ax.spines[side].set(color=style.ink, linewidth=style.hair)
    ax.tick_params(labelsize=style.text, colors=style.ink, width=style.hair, which="both")
