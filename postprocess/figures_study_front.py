"""The front of two goals: every design, those that no other beats, limits, rotors along it."""

from __future__ import annotations

import cmath
import math
from typing import TYPE_CHECKING, Literal

import numpy as np

from lamwright.geometry.palette import FILLS
from lamwright.geometry.section import CrossSection
from lamwright.solver.types import FloatArray

from .figures_study_marks import FAILED, frame, limit_text
from .figures_style import MM, Style, inked, region_ink, upright, visible_edges
from .studied import IntArray, Studied, StudyAxis, front_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MOST_NUMBERED = 14  # members of a front that get their number
NEAR = 13.0  # points between two numbers, at the least


def draw_front(
    ax: Axes,
    studied: Studied,
    goals: tuple[StudyAxis, StudyAxis],
    front: IntArray,
    numbered: IntArray,
    style: Style,
) -> None:
    """Draw all designs over two goals, the front as a line with error bars, and limits.

    Args:
        ax: axes with the size at which they will be shown.
        studied: all designs.
        goals: of x and y.
        front: members, from the best by the first goal on.
        numbered: members that are to be numbered, the most important first.
        style: sizes and colours.
    """
    first, second = goals
    beaten = studied.passes & ~np.isin(np.arange(studied.passes.size), front)
    ax.plot(
        first.values[~studied.passes],
        second.values[~studied.passes],
        linestyle="none",
        marker="x",
        markersize=3.5,
        color=FAILED,
        zorder=2,
        label="misses a limit",
    )
    ax.plot(
        first.values[beaten],
        second.values[beaten],
        linestyle="none",
        marker="o",
        markersize=3.5,
        markerfacecolor=style.paper,
        markeredgecolor=style.second,
        zorder=3,
        label="holds every limit",
    )
    x, y = first.values[front], second.values[front]
    if not studied.passes.all():
        free = front_of(first, second, np.ones_like(studied.passes))
        _draw_steps(ax, goals, free, style.quiet, ":", "front without limits")
    if front.size:
        _draw_steps(ax, goals, front, style.second, "-", "")
        ax.errorbar(
            x,
            y,
            xerr=_errors(first, front),
            yerr=_errors(second, front),
            linestyle="none",
            marker="o",
            markersize=5.0,
            color=style.second,
            ecolor=style.ink,
            elinewidth=style.outline,
            capsize=1.5,
            zorder=4,
            label="front: no design better in both",
        )
    ax.margins(0.07)
    ax.set_xlabel(f"{first.title} (goal: {first.sense})", fontsize=style.text, color=style.ink)
    ax.set_ylabel(f"{second.title} (goal: {second.sense})", fontsize=style.text, color=style.ink)
    _draw_limits(ax, goals, style)
    _number(ax, goals, studied, numbered, style)
    frame(ax, style)


def _draw_steps(
    ax: Axes,
    goals: tuple[StudyAxis, StudyAxis],
    front: IntArray,
    colour: str,
    dash: str,
    label: str,
) -> None:
    """What a front reaches: at each value of the first goal the best of the second, as steps."""
    x, y = (goal.values[front] for goal in goals)
    where: Literal["pre", "post"] = "pre" if goals[0].sense == "most" else "post"
    order = np.argsort(x, kind="stable")
    ax.step(
        x[order],
        y[order],
        where=where,
        color=colour,
        linestyle=dash,
        linewidth=1.0,
        zorder=3,
        label=label or None,
    )


def _errors(axis: StudyAxis, chosen: IntArray) -> FloatArray | None:
    return None if axis.errors is None else np.nan_to_num(axis.errors[chosen])


def _draw_limits(ax: Axes, goals: tuple[StudyAxis, StudyAxis], style: Style) -> None:
    """A line at each limit of the two figures, hatched on the forbidden side."""
    for axis, is_x in zip(goals, (True, False), strict=True):
        low, high = ax.get_xlim() if is_x else ax.get_ylim()
        span = ax.axvspan if is_x else ax.axhspan
        for limit, is_least in ((axis.least, True), (axis.most, False)):
            if limit is None or not low < limit < high:
                continue
            ends = (low, limit) if is_least else (limit, high)
            area = span(*ends, zorder=0, linewidth=0)
            area.set(facecolor="none", edgecolor=style.accent, hatch="///", alpha=0.22)
            line = ax.axvline if is_x else ax.axhline
            line(limit, color=style.accent, linewidth=1.0, zorder=1)
        if is_x:
            ax.set_xlim(low, high)
        else:
            ax.set_ylim(low, high)


def limits_told(studied: Studied) -> str:
    """All limits of the study in a line."""
    told = [f"{axis.title} {limit_text(axis)}" for axis in studied.figures if limit_text(axis)]
    return "limits: " + "; ".join(told) if told else "no limits but those of the design file"


def _number(
    ax: Axes,
    goals: tuple[StudyAxis, StudyAxis],
    studied: Studied,
    numbered: IntArray,
    style: Style,
) -> None:
    """Numbers of designs beside their points, where they find room; the first come first."""
    from matplotlib.patheffects import Normal, Stroke

    taken: list[tuple[float, float]] = []
    scale = ax.figure.dpi / 72.0  # pixels per point
    for k in numbered[:MOST_NUMBERED]:
        point = (goals[0].values[k], goals[1].values[k])
        x, y = (float(part) / scale for part in ax.transData.transform(point))
        if any(abs(x - p) < NEAR and abs(y - q) < NEAR for p, q in taken):
            continue
        taken.append((x, y))
        left = ax.get_xlim()[0] + 0.88 * np.ptp(ax.get_xlim()) < point[0]
        ax.annotate(
            str(studied.numbers[k]),
            point,
            xytext=(-5.0 if left else 5.0, 4.0),
            textcoords="offset points",
            fontsize=style.small,
            fontweight="bold",
            color=style.ink,
            ha="right" if left else "left",
            zorder=6,
            path_effects=[Stroke(linewidth=2.2, foreground=style.paper), Normal()],
        )


def draw_rotor(ax: Axes, section: CrossSection, style: Style) -> None:
    """Draw the sector's rotor alone, upright, filled and outlined; equal axes in mm."""
    from matplotlib.patches import PathPatch, Wedge

    turn = upright(section)
    for region in section.rotor:
        if region.material not in ("air", "shaft"):
            patch = PathPatch(region_ink([region], [turn]), zorder=1)
            patch.set(facecolor=FILLS.get(region.material, FILLS["shaft"]), linewidth=0.0)
            ax.add_artist(patch)
    lines = PathPatch(
        inked(visible_edges(section.rotor, section), [turn], closed=False), fill=False
    )
    lines.set(edgecolor=style.ink, linewidth=style.hair, zorder=2)
    ax.add_artist(lines)
    radius, inner = MM * section.rotor_radius, MM * section.shaft_radius
    half = 0.5 * section.sector_angle
    angles = (90.0 - math.degrees(half), 90.0 + math.degrees(half))
    rim = Wedge((0.0, 0.0), radius, *angles, width=radius - inner, fill=False, zorder=3)
    rim.set(edgecolor=style.ink, linewidth=style.hair)
    ax.add_artist(rim)
    ends = [r * cmath.exp(1j * (math.pi / 2 + s * half)) for r in (radius, inner) for s in (1, -1)]
    wide = max(abs(end.real) for end in ends) if half < math.pi / 2 else radius
    low = min(end.imag for end in ends) if half < math.pi else -radius
    ax.set_xlim(-1.03 * wide, 1.03 * wide)
    ax.set_ylim(low - 0.02 * radius, 1.02 * radius)
    ax.set_aspect("equal", adjustable="box", anchor="S")
    ax.set_axis_off()
