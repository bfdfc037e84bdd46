"""The frame of a sector's picture: its axes and their letters, where it is cut, how far it reaches.

A shaft is shown no further in than a quarter of what lies outside it, where that makes the sector
larger: the picture is broken off there along a wavy line, as draughtsmen do.
"""

from __future__ import annotations

import cmath
import math
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.section import CrossSection

from .figures_style import MM, ComplexArray, Style

if TYPE_CHECKING:
    from matplotlib.axes import Axes

AXIS_OVERHANG = 1.05  # how far a d or q axis line reaches, over the stator's radius
LETTER_ROOM = 1.13  # how far its letters reach
LETTER_WIDTH = 0.06  # half of what they take sideways, over the same
LETTER_ORDER = 8.5  # of drawing: above leaders, which may not strike the letters through
SHAFT_SHOWN = 0.25  # depth of a broken-off shaft over the height from bore to stator's outside
LEAST_BROKEN = 0.15  # of the radius of the outside: less would only blunt the tip
WIDEST_BROKEN = 0.6 * math.pi  # rad; a wider sector would gain nothing
WAVES, WAVE_HEIGHT = 3, 0.02  # of the broken line, the height over its radius


def break_radius(section: CrossSection) -> float:
    """Radius in m within which a large shaft is left out; 0 where all of it is shown."""
    if section.sector_angle > WIDEST_BROKEN:
        return 0.0
    shown = SHAFT_SHOWN * (section.stator_outer_radius - section.shaft_radius)
    radius = section.shaft_radius - shown
    return radius if radius > LEAST_BROKEN * section.stator_outer_radius else 0.0


def break_off(ax: Axes, section: CrossSection, style: Style) -> None:
    """Cover what an upright sector has within its break radius, and draw the broken line."""
    radius = MM * break_radius(section)
    if radius == 0.0:
        return
    share = np.linspace(0.0, 1.0, 200)
    waved = radius * (1.0 + WAVE_HEIGHT * np.sin(2.0 * math.pi * WAVES * share))
    line = waved * np.exp(1j * (0.5 * math.pi + section.sector_angle * (share - 0.5)))
    beside = 1.03  # the cover hides the ends of outlines too
    cover = np.concatenate([line, [line[-1].real * beside, line[0].real * beside]])
    ax.fill(cover.real, cover.imag, facecolor=style.paper, edgecolor="none", zorder=4)
    ax.plot(line.real, line.imag, color=style.quiet, linewidth=style.hair, zorder=5)


def draw_axes_lines(ax: Axes, section: CrossSection, turn: complex, style: Style) -> None:
    """Draw all d and q axes of a sector whose first d axis points along `turn`."""
    half = math.pi / (2 * section.pole_pairs)
    count = 2 * section.sector_poles + (not section.is_full_circle)
    for k in range(count):
        name = "q axis" if k % 2 else "d axis"
        along = turn * cmath.exp(1j * k * half)
        start = MM * break_radius(section) * along
        tip = AXIS_OVERHANG * MM * section.stator_outer_radius * along
        ax.plot(
            [start.real, tip.real],
            [start.imag, tip.imag],
            color=style.quiet,
            linewidth=style.outline,
            dashes=(9, 2.5, 1.5, 2.5),
            zorder=5,
        )
        write_axis_name(ax, tip * 1.012, name, section, style)


def write_axis_name(ax: Axes, at: complex, name: str, section: CrossSection, style: Style) -> None:
    """Write the name of a d or q axis at its tip in mm, clear of the stator."""
    along = at / abs(at)
    is_above = section.sector_poles == 1 or along.imag > 0.5
    level = "bottom" if is_above else "top" if along.imag < -0.5 else "center"
    side = "center" if is_above or along.imag < -0.5 else "left" if along.real > 0.0 else "right"
    ax.text(
        at.real,
        at.imag,
        name,
        fontsize=style.text,
        fontstyle="italic",
        color=style.quiet,
        ha=side,
        va=level,
        zorder=LETTER_ORDER,
        bbox={"facecolor": style.paper, "edgecolor": "none", "pad": 1.0},
    )


def draw_cut(
    ax: Axes, section: CrossSection, turn: complex, span: tuple[float, float], style: Style
) -> None:
    """Draw both sides of a sector from one radius to another (m), where the picture is cut."""
    for angle in () if section.is_full_circle else (0.0, section.sector_angle):
        ends = MM * np.array(span) * turn * cmath.exp(1j * angle)
        ax.plot(ends.real, ends.imag, color=style.quiet, linewidth=style.hair, zorder=3)


def pole_silhouette(section: CrossSection, inner: float = 0.0) -> ComplexArray:
    """A line (n,) in mm around an upright sector and the letters of its axes.

    Args:
        section: the machine.
        inner: radius in m at which the sector is broken off.
    """
    half = 0.5 * section.sector_angle
    outer = MM * section.stator_outer_radius
    share = np.linspace(0.0, 1.0, 120)
    along = np.exp(1j * (math.pi / 2 - half + 2 * half * share))
    arc, low = outer * along, MM * inner * (1.0 - WAVE_HEIGHT) * along - 0.03j * outer
    right, left = LETTER_ROOM * arc[0], LETTER_ROOM * arc[-1]
    top = np.array([arc[60] * LETTER_ROOM])
    return np.concatenate(
        [
            low[0] + (right - low[0]) * share,
            arc,
            top,
            arc[60:],
            left + (low[-1] - left) * share,
            _letters(section),
        ]
    )


def _letters(section: CrossSection) -> ComplexArray:
    """Corners in mm of the axes' letters around a sector of several poles; `write_axis_name`."""
    if section.sector_poles == 1:
        return np.zeros(0, dtype=np.complex128)
    count, outer = 2 * section.sector_poles, MM * section.stator_outer_radius
    angles = 0.5 * math.pi + section.sector_angle * (np.arange(count + 1) / count - 0.5)
    along = np.exp(1j * angles)
    out = np.where(np.abs(along.imag) > 0.5, 0.0, np.sign(along.real))
    return np.concatenate(
        [LETTER_ROOM * outer * along + LETTER_WIDTH * outer * (out + k) for k in (-1.0, 1.0)]
    )
