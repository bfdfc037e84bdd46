"""Von Mises stress of the rotor's own period, one pole where all are alike.

Each rib's peak stands beside it with its value, and ribs are drawn close up.

A rib half a millimetre wide is a few pixels of the whole pole, so the most stressed rib, and the
most stressed one of the other kind where there is one, are drawn again at a scale that shows what
happens in them. Stress is that recovered at the nodes; curved elements are drawn as four.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.section import CrossSection, Rib, base_name, pole_of, rotor_cell
from lamwright.solver.isoparametric import boundary_edges
from lamwright.solver.types import IntArray, StressSolution

from .figures_close_up import frame_close_up, head_close_up, open_close_up
from .figures_labels import RULER_FOOT, Callout, Side, draw_note, draw_ruler, place_callouts
from .figures_section import bare, pole_words
from .figures_sector import draw_cut
from .figures_style import (
    MM,
    QUARTERS,
    ComplexArray,
    Style,
    draw_scale,
    inked,
    stress_colours,
    upright,
    visible_edges,
)
from .ribs import RibReport, RibStress

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MPA = 1e-6  # MPa per Pa
RPM = 30.0 / math.pi  # 1/min per rad/s
EXAGGERATION = 0.025  # largest drawn displacement over the rotor's radius
MOST_NAMED = 24  # ribs of a rotor that all have their names beside them
CLOSE_UP = 2.6  # half the side of a close-up over the rib's width
LEAST_CLOSE_UP = 1.0  # mm, half the side of a close-up at least
PEAK_INSIDE = 1.25  # half the side of a close-up over the way from the rib's middle to its peak
LETTERS = "ab"


def close_ups(report: RibReport) -> tuple[RibStress, ...]:
    """The most stressed rib, and that of the other kind, else of another barrier, if any."""
    ranked = sorted(report.ribs, key=lambda row: row.peak, reverse=True)
    first = ranked[0].rib
    kind = [row for row in ranked if row.rib.kind != first.kind]
    barrier = [row for row in ranked if row.rib.barrier != first.barrier]
    return (ranked[0], *(kind or barrier)[:1])


def draw_stress(
    ax: Axes,
    scale_ax: Axes,
    section: CrossSection,
    solution: StressSolution,
    report: RibReport,
    style: Style,
) -> None:
    """Draw von Mises stress in MPa of one rotor pole with each rib's peak, and the scale.

    Args:
        ax: the drawing, equal axes in mm; the field is rasterised in a vector file.
        scale_ax: the colour scale.
        section: exact outlines.
        solution: stress and displacement.
        report: the ribs of that solution.
        style: sizes and colours.
    """
    section = rotor_cell(section)
    turn = upright(section)
    place_callouts(ax, rotor_silhouette(section), _rib_callouts(report, turn), style, RULER_FOOT)
    shown = np.arange(len(solution.mesh.elements))
    _draw_field(ax, solution, shown, turn, style)
    draw_outline(ax, section, turn, style)
    factor = _draw_deformed(ax, section, solution, turn, style)
    for row, letter in zip(close_ups(report), LETTERS, strict=False):
        _draw_frame(ax, row, letter, turn, style)
    draw_ruler(ax, style)
    notes = (
        f"{RPM * report.speed:.0f} 1/min; peak {mpa(report.peak)}"
        f" \N{PLUS-MINUS SIGN} {100.0 * report.peak_error / report.peak:.1f} %,"
        f" yield strength {mpa(report.yield_strength)}",
        f"thin red line: deformed outline, displacement times {factor:g}",
    )
    draw_note(ax, notes, style)
    bare(ax)
    draw_scale(
        scale_ax, stress_colours(), (0.0, stress_limit(solution)), "von Mises stress in MPa", style
    )


def draw_rib(
    ax: Axes,
    section: CrossSection,
    solution: StressSolution,
    row: RibStress,
    letter: str,
    style: Style,
) -> None:
    """Draw one rib close up: stress, width in mm, where its peak is; equal axes in mm."""
    from matplotlib.patheffects import Normal, Stroke

    section = rotor_cell(section)
    turn = upright(section)
    middle = MM * turn * 0.5 * (row.rib.start + row.rib.end)
    half = _half_side(row)
    open_close_up(ax, middle, half)
    at = MM * turn * _places(solution)[solution.mesh.elements]
    near = np.abs(at - middle).min(axis=1) < 2.0 * half
    _draw_field(ax, solution, np.flatnonzero(near), turn, style)
    draw_outline(ax, section, turn, style)
    _draw_width(ax, row, turn, style)
    peak = MM * turn * row.peak_at
    ax.plot(
        [peak.real],
        [peak.imag],
        marker="o",
        markersize=7.0,
        markerfacecolor="none",
        markeredgecolor=style.accent,
        markeredgewidth=1.4,
        path_effects=[Stroke(linewidth=3.2, foreground=style.paper), Normal()],
        zorder=9,
    )
    head_close_up(
        ax,
        f"{letter}: {rib_name(row.rib, section.ribs)}, yield margin {row.yield_margin:.2f}\n"
        f"peak {mpa(row.peak)}, mean tension {mpa(row.mean_tension)}",
        style,
    )


def stress_limit(solution: StressSolution) -> float:
    """Upper end of the colour scale in MPa, a round number that covers the peak."""
    peak = MPA * solution.peak
    step = 10.0 ** math.floor(math.log10(peak)) / 10.0 if peak > 0.0 else 1.0
    return step * math.ceil(peak / step - 1e-9)


def mpa(stress: float) -> str:
    """A stress in MPa as it stands on the figure: three figures, whole numbers above 100."""
    value = MPA * stress
    return f"{value:.0f} MPa" if abs(value) >= 99.95 else f"{value:#.3g} MPa"


def rib_name(rib: Rib, ribs: Sequence[Rib]) -> str:
    """A rib as the trade calls it, with its side where there are two, its letter among several."""
    side = rib.name.rsplit("_", 1)[1]
    words = pole_words(pole_of(rib.name))
    return numbered_rib(rib, ribs) + (f", {side}" if len(side) > 1 else "") + words


def numbered_rib(rib: Rib, ribs: Sequence[Rib]) -> str:
    """Kind and barrier of a rib; radial ribs of one barrier are told apart by their letters."""
    stem, letter = rib.name.rsplit("_", 1)
    is_one_of_many = sum(other.name.startswith(f"{stem}_") for other in ribs) > 1
    mark = letter if rib.kind == "radial" and is_one_of_many else ""
    return f"{rib.kind} rib {rib.barrier}{mark}"


def rotor_silhouette(section: CrossSection) -> ComplexArray:
    """A line (n,) in mm around the upright rotor's sector and its deformed outline."""
    half = 0.5 * section.sector_angle
    share = np.linspace(0.0, 1.0, 90)
    arc = np.exp(1j * (math.pi / 2 - half + 2 * half * share))
    inner = MM * section.shaft_radius * arc
    outer = (1.0 + EXAGGERATION) * MM * section.rotor_radius * arc
    right = inner[0] + (outer[0] - inner[0]) * share
    left = outer[-1] + (inner[-1] - outer[-1]) * share
    return np.concatenate([right, outer, left, inner[::-1]])


def _rib_callouts(report: RibReport, turn: complex) -> list[Callout]:
    """Each rib's peak on its own side; ribs on the q axis go where there is more room."""
    most = max(row.peak for row in report.ribs)
    rows = [(row, MM * turn * row.peak_at, row.rib) for row in _named(report.ribs)]
    ribs = [row.rib for row in report.ribs]
    found: list[Callout] = []
    middle = []
    for row, anchor, rib in rows:
        words = pole_words(pole_of(rib.name))
        text = f"{numbered_rib(rib, ribs)}{words}: {mpa(row.peak)}"
        at = (turn * (rib.start + rib.end)).real
        if abs(at) < rib.width:
            middle.append((text, anchor, row.peak == most))
            continue
        found.append(Callout(text, anchor, "right" if at > 0 else "left", row.peak == most))
    for text, anchor, is_most in middle:
        count = {side: sum(c.side == side for c in found) for side in ("left", "right")}
        side: Side = "right" if count["right"] <= count["left"] else "left"
        found.append(Callout(text, anchor, side, is_most))
    return found


def _named(rows: Sequence[RibStress]) -> list[RibStress]:
    """All ribs, or of each rib of a pole the most stressed in any, where names would not fit."""
    if len(rows) <= MOST_NAMED:
        return list(rows)
    best: dict[str, RibStress] = {}
    for row in rows:
        name = base_name(row.rib.name)
        if name not in best or row.peak > best[name].peak:
            best[name] = row
    return list(best.values())


def _places(solution: StressSolution) -> ComplexArray:
    nodes = solution.mesh.nodes
    return np.asarray(nodes[:, 0] + 1j * nodes[:, 1])


def _draw_field(
    ax: Axes, solution: StressSolution, shown: IntArray, turn: complex, style: Style
) -> None:
    at = MM * turn * _places(solution)
    ax.tripcolor(
        at.real,
        at.imag,
        solution.mesh.elements[shown][:, QUARTERS].reshape(-1, 3),
        MPA * solution.von_mises,
        shading="gouraud",
        cmap=stress_colours(),
        vmin=0.0,
        vmax=stress_limit(solution),
        rasterized=True,
        zorder=1,
    )


def draw_outline(ax: Axes, section: CrossSection, turn: complex, style: Style) -> None:
    """Draw the rotor's exact outline, turned upright."""
    from matplotlib.patches import PathPatch

    chains = visible_edges(section.rotor, section)
    lines = PathPatch(inked(chains, [turn], closed=False), fill=False)
    lines.set(edgecolor=style.ink, linewidth=style.outline, zorder=3)
    ax.add_artist(lines)
    draw_cut(ax, section, turn, (section.shaft_radius, section.rotor_radius), style)


def _draw_deformed(
    ax: Axes, section: CrossSection, solution: StressSolution, turn: complex, style: Style
) -> float:
    """The free outline moved by a round multiple of the displacement, which is returned."""
    moved = solution.displacement[:, 0] + 1j * solution.displacement[:, 1]
    largest = float(np.abs(moved).max())
    if largest == 0.0:
        return 0.0
    raw = EXAGGERATION * section.rotor_radius / largest
    decade = 10.0 ** math.floor(math.log10(raw))
    factor = max(step * decade for step in (1.0, 2.0, 5.0) if step * decade <= raw)
    place = _places(solution)
    edges = boundary_edges(solution.mesh)
    if not section.is_full_circle:  # the cut sides are no outline
        lead = np.angle(place[edges[:, 2]])
        edges = edges[(lead > 1e-6) & (lead < section.sector_angle - 1e-6)]
    # The edge's own second-order curve at five places; nodes start, end, middle.
    t = np.linspace(0.0, 1.0, 5)
    shape = np.stack([(1 - t) * (1 - 2 * t), t * (2 * t - 1), 4 * t * (1 - t)])
    at = MM * turn * (place + factor * moved)[edges] @ shape
    for chain in _chains(edges):
        line = at[chain].ravel()
        ax.plot(line.real, line.imag, color=style.accent, linewidth=style.hair, zorder=4)
    return factor


def _chains(edges: IntArray) -> list[list[int]]:
    """Rows of `edges` (n, 3) in runs in which each starts where the one before ends."""
    row_from = {int(start): row for row, start in enumerate(edges[:, 0])}
    ends = set(edges[:, 1].tolist())
    heads = [row for row, start in enumerate(edges[:, 0]) if int(start) not in ends]
    chains: list[list[int]] = []
    left = set(range(len(edges)))
    # Open runs from their heads first; what is left then are loops, to begin anywhere.
    for head in (*heads, *range(len(edges))):
        chain: list[int] = []
        row: int | None = head
        while row is not None and row in left:
            left.remove(row)
            chain.append(row)
            row = row_from.get(int(edges[row, 1]))
        if chain:
            chains.append(chain)
    return chains


def _half_side(row: RibStress) -> float:
    """Half the side of a rib's close-up in mm; the peak is always well inside."""
    away = abs(row.peak_at - 0.5 * (row.rib.start + row.rib.end))
    return max(CLOSE_UP * MM * row.rib.width, PEAK_INSIDE * MM * away, LEAST_CLOSE_UP)


def _draw_frame(ax: Axes, row: RibStress, letter: str, turn: complex, style: Style) -> None:
    middle = MM * turn * 0.5 * (row.rib.start + row.rib.end)
    frame_close_up(ax, middle, _half_side(row), letter, style)


def _draw_width(ax: Axes, row: RibStress, turn: complex, style: Style) -> None:
    """The rib's width between two arrows that point at its faces from outside."""
    from matplotlib.patheffects import Normal, Stroke

    start, end = MM * turn * row.rib.start, MM * turn * row.rib.end
    out = (end - start) / abs(end - start)
    reach = 0.3 * _half_side(row)
    for face, tail in ((start, start - reach * out), (end, end + reach * out)):
        ax.annotate(
            "",
            xy=(face.real, face.imag),
            xytext=(tail.real, tail.imag),
            arrowprops={
                "arrowstyle": "-|>",
                "color": style.ink,
                "linewidth": style.outline,
                "shrinkA": 0.0,
                "shrinkB": 0.0,
                "mutation_scale": 7.0,
            },
            zorder=8,
        )
    words = ax.text(
        0.0,
        0.0,
        f"{MM * row.rib.width:.2f} mm",
        fontsize=style.text,
        color=style.ink,
        ha="center",
        va="center",
        path_effects=[Stroke(linewidth=2.5, foreground=style.paper), Normal()],
        zorder=9,
    )
    extent = words.get_window_extent().transformed(ax.transData.inverted())
    room = 0.5 * (abs(out.real) * extent.width + abs(out.imag) * extent.height)
    at = start - (reach + room + 0.05 * _half_side(row)) * out
    words.set_position((at.real, at.imag))
