"""The pictures of a study, composed: parallel axes, front with rotors, main effects, heat map."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from functools import partial
from itertools import combinations
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.section import CrossSection

from .figures import _figure, write_figure
from .figures_study_effects import BAR_TOLD, draw_effect, effects_span, share_told
from .figures_study_front import draw_front, draw_rotor, limits_told
from .figures_study_heat import HATCHES, draw_heat, value_colours
from .figures_study_marks import DASHES, FAILED, limit_text, measured, wrapped
from .figures_study_parallel import draw_parallel, parallel_axes
from .figures_style import Style, draw_scale
from .studied import (
    BoolArray,
    Studied,
    StudyAxis,
    best_first,
    best_of,
    cells_of,
    effect_of,
    front_of,
    is_grid,
)

if TYPE_CHECKING:
    from matplotlib.figure import Figure

WIDE = 11.0  # inches, of every picture
ROTORS = 6  # along a front
MOST_KEYS, MOST_ROWS = 5, 4  # of main effects
MOST_MAPS = 4
MOST_PAIRS = 3  # of goals whose fronts are drawn

NOT_COMPUTED = "not computed"

Sections = Mapping[int, CrossSection]  # by the design's index


def rotors_shown(studied: Studied) -> tuple[int, ...]:
    """Indices of the designs whose rotors `write_study_figures` can show, at the most."""
    found: list[int] = []
    for first, second in _pairs(studied):
        found += best_first(first, second, _counted(studied), ROTORS)
    return tuple(dict.fromkeys(found))


def write_study_figures(
    folder: Path, studied: Studied, sections: Sections, style: Style | None = None
) -> tuple[Path, ...]:
    """Write what can be shown of a study as PNG and SVG into an existing folder.

    Args:
        folder: existing.
        studied: all designs.
        sections: of designs along the fronts, see `rotors_shown`; those that lack are left out.
        style: sizes and colours; the house's own by default.
    """
    composers = {}
    if any(np.isfinite(axis.values).any() for axis in studied.figures):
        composers["study_parallel"] = partial(parallel_figure, studied)
        composers["study_effects"] = partial(effects_figure, studied)
        if is_grid(studied.keys):
            composers["study_heat"] = partial(heat_figure, studied)
        for k, pair in enumerate(_pairs(studied)):
            if front_of(*pair, _counted(studied)).size:
                name = f"study_front_{k + 1}" if k else "study_front"
                composers[name] = partial(front_figure, studied, pair, sections)
    written: list[Path] = []
    for name, compose in composers.items():
        written += write_figure(folder, name, compose, style)
    return tuple(written)


def parallel_figure(studied: Studied, style: Style) -> Figure:
    """All designs across keys, figures and goals."""
    figure = _figure((WIDE, 5.4), f"{studied.name}: every design across keys and figures", style)
    ax = figure.add_axes((0.03, 0.10, 0.95, 0.71))
    draw_parallel(ax, studied, parallel_axes(studied), style)
    lines = [(style.second, "-", 1.2, "holds every limit"), (FAILED, "-", 1.2, "misses a limit")]
    bests: dict[int, list[str]] = {}
    for goal in studied.goals:
        best = best_of(goal, studied.passes)
        if best is not None:
            bests.setdefault(best, []).append(f"{goal.sense} {goal.label}")
    for (best, goals), dash in zip(bests.items(), DASHES, strict=False):
        told = f"{', '.join(goals)}: design {studied.numbers[best]}"
        lines.append((style.accent, dash, 1.8, told))
    _legend(figure, lines, _counts(studied), style)
    return figure


def front_figure(
    studied: Studied, goals: tuple[StudyAxis, StudyAxis], sections: Sections, style: Style
) -> Figure:
    """The front of two goals, and rotors along it below."""
    among = _counted(studied)
    front = front_of(*goals, among)
    shown = [k for k in best_first(*goals, among, ROTORS) if k in sections]
    shown.sort(key=lambda k: float(goals[0].values[k]))  # as they lie above
    height = 5.2 + (1.95 if shown else 0.0)
    words = "" if studied.passes.any() else ", none holds every limit"
    title = f"{studied.name}: front of {goals[0].label} and {goals[1].label}{words}"
    figure = _figure((WIDE, height), title, style)
    top = 0.62 / height
    low = (0.55 + (1.95 if shown else 0.0) + 0.2) / height
    ax = figure.add_axes((0.075, low, 0.90, 1.0 - top - low))
    rest = [int(k) for k in front if int(k) not in shown]
    draw_front(ax, studied, goals, front, np.array([*shown, *rest], dtype=np.int64), style)
    ax.legend(
        loc="lower left",
        bbox_to_anchor=(0.0, 1.0),
        ncols=4,
        frameon=False,
        fontsize=style.small,
        handletextpad=0.3,
        columnspacing=1.4,
        borderaxespad=0.1,
    )
    figure.text(
        0.975,
        1.0 - 0.42 / height,
        limits_told(studied),
        fontsize=style.small,
        color=style.quiet,
        ha="right",
        va="top",
    )
    wide = 0.96 / ROTORS
    left = 0.5 - 0.5 * wide * len(shown)
    for place, k in enumerate(shown):
        x = left + wide * place
        rotor = figure.add_axes((x, 0.62 / height, 0.95 * wide, 1.35 / height))
        draw_rotor(rotor, sections[k], style)
        beaten = "" if k in front else ", not on the front"
        told = [
            f"design {studied.numbers[k]}{beaten}",
            ", ".join(measured(goal, k) for goal in goals),
        ]
        keys = ", ".join(f"{key.label} {measured(key, k)}" for key in studied.keys[:3])
        figure.text(
            x + 0.475 * wide,
            0.58 / height,
            "\n".join([*told, wrapped(keys, 34)]),
            fontsize=style.small,
            color=style.ink,
            ha="center",
            va="top",
            linespacing=1.3,
        )
    return figure


def effects_figure(studied: Studied, style: Style) -> Figure:
    """Main effects of the keys on the goals and limited figures."""
    keys = [key for key in studied.keys if np.unique(key.values).size > 1][:MOST_KEYS]
    rows = [axis for axis in studied.figures if np.isfinite(axis.values).any()][:MOST_ROWS]
    height = 0.75 + 1.75 * len(rows)
    figure = _figure((WIDE, height), f"{studied.name}: main effects", style)
    figure.text(
        0.015, 1.0 - 0.36 / height, BAR_TOLD, fontsize=style.small, color=style.quiet, va="top"
    )
    wide = 0.90 / max(len(keys), 1)
    for r, axis in enumerate(rows):
        effects = [effect_of(key, axis) for key in keys]
        span = effects_span(axis, effects)
        for c, (key, effect) in enumerate(zip(keys, effects, strict=True)):
            box = (
                0.085 + wide * c,
                (0.5 + 1.75 * (len(rows) - 1 - r)) / height,
                wide - 0.035,
                1.22 / height,
            )
            ax = figure.add_axes(box)
            draw_effect(ax, key, axis, effect, span, style)
            if c:
                ax.tick_params(labelleft=False)
            else:
                ax.set_ylabel(wrapped(axis.title, 22), fontsize=style.text, color=style.ink)
            if r < len(rows) - 1:
                ax.set_xlabel("")
            ax.set_title(
                share_told(effect, axis),
                fontsize=style.small,
                color=style.quiet,
                loc="right",
                pad=3.0,
            )
    return figure


def heat_figure(studied: Studied, style: Style) -> Figure:
    """Maps of the goals and limited figures over the two keys of a grid."""
    maps = [axis for axis in studied.figures if np.isfinite(axis.values).any()][:MOST_MAPS]
    columns = 1 if len(maps) == 1 else 2
    rows = -(-len(maps) // columns)
    reasons = _most_told(studied.reasons)
    hatches = {reason: HATCHES[min(k, len(HATCHES) - 1)] for k, reason in enumerate(reasons)}
    if np.any(cells_of(studied.keys)[2] < 0):
        reasons.append(NOT_COMPUTED)
        hatches[NOT_COMPUTED] = ""
    foot = 0.30 + 0.24 * len(_hatch_rows(reasons))
    height = 0.5 + foot + 2.9 * rows
    first, second = studied.keys
    title = f"{studied.name}: figures over {first.label} and {second.label}"
    figure = _figure((WIDE, height), title, style)
    best = "white box: best that holds every limit" if studied.passes.any() else "white box: best"
    told = (
        f"red line: holds every limit; {best}; dark: better"
        if studied.passes.any()
        else (f"no design holds every limit; {best}; dark: better")
    )
    figure.text(
        0.985,
        1.0 - 0.14 / height,
        told,
        fontsize=style.small,
        color=style.quiet,
        ha="right",
        va="top",
    )
    for k, axis in enumerate(maps):
        x = 0.065 + k % columns * 0.495
        y = (foot + 0.55 + 2.9 * (rows - 1 - k // columns)) / height
        wide = 0.39 if columns == 2 else 0.86
        tall = 2.1 / height
        ax = figure.add_axes((x, y, wide, tall))
        draw_heat(ax, studied, axis, hatches, style)
        goal = f", goal: {axis.sense}" if axis.sense else ""
        dark = "" if goal or limit_text(axis) else ", dark: more"
        limit = f", {limit_text(axis)}" if limit_text(axis) else ""
        ax.set_title(
            f"{axis.title}{goal}{limit}{dark}",
            fontsize=style.text,
            fontweight="bold",
            loc="left",
            color=style.ink,
            pad=4.0,
        )
        values = axis.values[np.isfinite(axis.values)]
        scale = figure.add_axes((x + wide + 0.006, y, 0.012, tall))
        ends = (float(values.min()), float(values.max()))
        if ends[0] == ends[1]:
            ends = (ends[0] - 0.5, ends[1] + 0.5)
        draw_scale(scale, value_colours(axis), ends, "", style)  # its unit is in the title
    _draw_hatches(figure, hatches, foot / height, height, style)
    return figure


def _pairs(studied: Studied) -> list[tuple[StudyAxis, StudyAxis]]:
    return list(combinations(studied.goals, 2))[:MOST_PAIRS]


def _counted(studied: Studied) -> BoolArray:
    """Designs that a front is taken of: those that pass, or all where none does."""
    return studied.passes if studied.passes.any() else np.ones_like(studied.passes)


def _counts(studied: Studied) -> str:
    without = sum(1 for reason in studied.reasons if reason)
    passing = int(studied.passes.sum())
    told = f"{passing} of {studied.numbers.size} designs hold every limit"
    return f"{told}; {without} without figures are not drawn" if without else told


def _legend(
    figure: Figure, lines: Sequence[tuple[str, str, float, str]], told: str, style: Style
) -> None:
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    marks = [Line2D([], [], color=c, linestyle=d, linewidth=w, label=t) for c, d, w, t in lines]
    forbidden = Patch(facecolor=style.accent, alpha=0.35, label="forbidden by a limit")
    figure.legend(
        handles=[*marks, forbidden],
        loc="lower left",
        bbox_to_anchor=(0.01, 0.0),
        ncols=4,
        frameon=False,
        fontsize=style.small,
        handlelength=2.2,
        columnspacing=1.6,
    )
    figure.text(0.985, 0.985, told, fontsize=style.small, color=style.quiet, ha="right", va="top")


def _most_told(reasons: Sequence[str]) -> list[str]:
    """Classes of reasons, the most frequent first."""
    counts = {reason: reasons.count(reason) for reason in dict.fromkeys(reasons) if reason}
    return sorted(counts, key=lambda reason: (-counts[reason], reason))


def _hatch_rows(reasons: Sequence[str]) -> list[Sequence[str]]:
    return [reasons[k : k + 2] for k in range(0, len(reasons), 2)]


def _draw_hatches(
    figure: Figure, hatches: Mapping[str, str], foot: float, height: float, style: Style
) -> None:
    from matplotlib.patches import Patch

    if not hatches:
        return
    handles = [
        Patch(facecolor="#f1f2f3", edgecolor="#8d979f", hatch=hatch, label=reason[:95])
        for reason, hatch in hatches.items()
    ]
    figure.legend(
        handles=handles,
        loc="lower left",
        bbox_to_anchor=(0.05, 0.06 / height),
        ncols=2,
        frameon=False,
        fontsize=style.small,
        handlelength=2.6,
        handleheight=1.3,
    )
