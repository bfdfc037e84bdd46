"""Labels beside a drawing, tied to it by leader lines that neither overlap nor cross.

Idea: labels stand in one column on each side, wherever the drawing's silhouette leaves a column
free, below its shoulders and above them. The drawing is made as large as the labels allow. In a
free run of a column the heights nearest to the anchors that keep a least distance are an isotonic
regression, solved by pooling neighbours (Kruskal 1964; from memory); then any two leaders that
cross swap their heights. A swap shortens the two leaders together (triangle inequality), so this
ends. Cost: n^2 per round, n below 30.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np
import numpy.typing as npt

from .figures_style import ComplexArray, Style, mm_per_point, pixels_per_point

if TYPE_CHECKING:
    from matplotlib.axes import Axes

FloatArray = npt.NDArray[np.float64]
Side = Literal["left", "right"]
SIDES: tuple[Side, Side] = ("left", "right")

LINE_PITCH = 1.5  # distance of label lines over the size of letters
STUB = 9.0  # points, the level part of a leader beside its label
CLEARANCE = 7.0  # points between the drawing and a column's leaders
LEADER_CLEARANCE = 4.0  # points between a leader and where another one begins
RULER_FOOT = 24.0  # points that a ruler takes along the lower edge
HALO = 1.3  # points of paper left and right of a leader, so that it reads on dark fills


@dataclass(frozen=True, slots=True)
class Callout:
    """A label, the point it names (mm, drawing axes) and the column it stands in."""

    text: str
    anchor: complex
    side: Side
    is_accent: bool = False


def spread(wanted: FloatArray, pitch: float, low: float, high: float) -> FloatArray:
    """Heights (n,) rising by `pitch` at least within `low` to `high`, nearest to `wanted` (n,).

    Raises:
        ValueError: if `low` to `high` cannot hold that many.
    """
    count = len(wanted)
    if high - low < pitch * (count - 1):
        raise ValueError(f"{count} labels of pitch {pitch:g} do not fit between {low:g}, {high:g}")
    steps = pitch * np.arange(count)
    pools: list[tuple[float, int]] = []
    for value in wanted - steps:
        mean, size = float(value), 1
        while pools and pools[-1][0] > mean:
            before, held = pools.pop()
            mean, size = (before * held + mean * size) / (held + size), held + size
        pools.append((mean, size))
    level = np.repeat([mean for mean, _ in pools], [size for _, size in pools])
    return np.asarray(np.clip(level, low, high - pitch * (count - 1)) + steps)


def _cross(a: complex, b: complex, c: complex, d: complex) -> bool:
    """Whether the segments ab and cd cross."""

    def side(p: complex, q: complex, r: complex) -> float:
        return ((q - p).conjugate() * (r - p)).imag

    return side(a, b, c) * side(a, b, d) < 0 and side(c, d, a) * side(c, d, b) < 0


def _distance(points: ComplexArray, start: complex, end: complex) -> FloatArray:
    """Distance (n,) of points (n,) from the line between two points."""
    chord = end - start
    share = np.clip(((points - start) * np.conj(chord)).real / abs(chord) ** 2, 0.0, 1.0)
    return np.asarray(np.abs(points - start - share * chord))


def uncrossed(anchors: Sequence[complex], heights: FloatArray, x: float) -> FloatArray:
    """Heights (n,) reordered until no two lines from x + i height to the anchors cross."""
    heights = heights.copy()
    done = False
    while not done:
        done = True
        for i in range(len(anchors)):
            for j in range(i):
                ends = complex(x, heights[i]), complex(x, heights[j])
                if _cross(ends[0], anchors[i], ends[1], anchors[j]):
                    heights[[i, j]] = heights[[j, i]]
                    done = False
    return heights


@dataclass(frozen=True, slots=True)
class _View:
    """Where the drawing lies in its axes; lengths in mm."""

    centre: complex  # what is in the middle of the axes
    per_point: float  # mm per point
    half_width: float
    half_height: float
    knees: dict[Side, float]  # x at which the leaders of a column begin
    runs: dict[Side, list[tuple[float, float]]]  # heights at which a column is free


def place_callouts(
    ax: Axes, silhouette: ComplexArray, callouts: Sequence[Callout], style: Style, foot: float = 0.0
) -> None:
    """Set equal limits of `ax` around a drawing and put the labels beside it.

    Args:
        ax: axes in mm, with the size at which they will be shown.
        silhouette: (n,) points of a closed line around the drawing, close together, mm.
        callouts: the labels; none is well too.
        style: sizes and colours.
        foot: points to be left free along the lower edge.

    Raises:
        ValueError: if a column has more labels than the axes' height can hold.
    """
    texts = _text_widths(ax, callouts, style)
    frame = ax.get_window_extent()
    size = complex(frame.width, frame.height) / pixels_per_point(ax)  # points
    wide = np.ptp(silhouette.real) / size.real, np.ptp(silhouette.imag) / (size.imag - foot)
    per_point = float(max(wide))
    for _ in range(60):
        view = _view(size, per_point, silhouette, texts, foot)
        columns = [_placed(view, [c for c in callouts if c.side == s], s, style) for s in SIDES]
        if None not in columns:
            break
        per_point *= 1.03
    else:
        raise ValueError(f"{len(callouts)} labels do not fit beside the drawing")
    ax.set_aspect("equal", adjustable="box")
    ax.set_xlim(view.centre.real - view.half_width, view.centre.real + view.half_width)
    ax.set_ylim(view.centre.imag - view.half_height, view.centre.imag + view.half_height)
    for column in columns:
        for callout, knee in column or ():
            _draw(ax, callout, knee, STUB * view.per_point, style)


def draw_ruler(ax: Axes, style: Style) -> None:
    """Draw a scale in mm into the lower left corner of equal axes, `RULER_FOOT` points high."""
    left, right = ax.get_xlim()
    low = ax.get_ylim()[0]
    per_point = mm_per_point(ax)
    decade = 10.0 ** math.floor(math.log10(0.2 * (right - left)))
    length = max(step * decade for step in (1, 2, 5) if step * decade <= 0.2 * (right - left))
    start, base, tick = left + 4.0 * per_point, low + 5.0 * per_point, 4.0 * per_point
    for k in range(6):
        x = start + length * k / 5
        ax.plot([x, x], [base, base + tick], color=style.quiet, linewidth=style.outline)
    ax.plot([start, start + length], [base, base], color=style.quiet, linewidth=style.outline)
    for x, text in ((start, "0"), (start + length, f"{length:g} mm")):
        ax.text(
            x,
            base + 1.4 * tick,
            text,
            fontsize=style.small,
            color=style.quiet,
            va="bottom",
            ha="center",
        )


def draw_note(ax: Axes, lines: Sequence[str], style: Style) -> None:
    """Write remarks at the foot of the drawing, on the right; two lines fit beside a ruler."""
    ax.text(
        0.995,
        0.005,
        "\n".join(lines),
        transform=ax.transAxes,
        fontsize=style.small,
        color=style.quiet,
        ha="right",
        va="bottom",
        linespacing=1.35,
    )


def _text_widths(ax: Axes, callouts: Sequence[Callout], style: Style) -> dict[Side, float]:
    """Width of the widest label of each column in points."""
    widest: dict[Side, float] = dict.fromkeys(SIDES, 0.0)
    for callout in callouts:
        ink = ax.text(0, 0, callout.text, fontsize=style.text, fontweight=_weight(callout))
        width = ink.get_window_extent().width / pixels_per_point(ax)
        widest[callout.side] = max(widest[callout.side], width)
        ink.remove()
    return widest


def _view(
    size: complex,
    per_point: float,
    silhouette: ComplexArray,
    texts: dict[Side, float],
    foot: float,
) -> _View:
    """The view at a scale: the drawing is moved away from the column with the longer labels."""
    left, right = float(silhouette.real.min()), float(silhouette.real.max())
    low, high = float(silhouette.imag.min()), float(silhouette.imag.max())
    half_width, half_height = 0.5 * per_point * size.real, 0.5 * per_point * size.imag
    slack = half_width - 0.5 * (right - left)
    shift = 0.5 * per_point * (texts["right"] - texts["left"])
    centre = complex(
        0.5 * (left + right) + min(max(shift, -slack), slack),
        0.5 * (low + high - per_point * foot),
    )
    knees: dict[Side, float] = {}
    runs: dict[Side, list[tuple[float, float]]] = {}
    for side in SIDES:
        sign = -1.0 if side == "left" else 1.0
        room = half_width - per_point * (texts[side] + 1.4 * STUB)
        knees[side] = centre.real + sign * room
        inside = sign * (knees[side] - silhouette.real) > CLEARANCE * per_point
        taken = silhouette.imag[~inside]
        bottom, top = centre.imag - half_height + per_point * foot, centre.imag + half_height
        runs[side] = [(bottom, top)]
        if taken.size:
            gap = CLEARANCE * per_point
            runs[side] = [(bottom, float(taken.min()) - gap), (float(taken.max()) + gap, top)]
    return _View(centre, per_point, half_width, half_height, knees, runs)


def _placed(
    view: _View, column: Sequence[Callout], side: Side, style: Style
) -> list[tuple[Callout, complex]] | None:
    """Labels of a column and where their leaders begin; None if they find no place.

    An anchor may lie beyond the beginnings of the leaders, as long as no leader meets letters.
    """
    column = sorted(column, key=lambda c: c.anchor.imag)
    pitch = LINE_PITCH * style.text * view.per_point
    runs, knee = view.runs[side], view.knees[side]
    if sum(_places(run, pitch) for run in runs) < len(column):
        return None
    anchors = [callout.anchor for callout in column]
    heights = _heights(np.array([a.imag for a in anchors]), runs, pitch)
    heights = uncrossed(anchors, heights, knee)
    sign = -1.0 if side == "left" else 1.0
    start = sign * (knee + 0.8 * sign * STUB * view.per_point)
    half = 0.6 * style.text * view.per_point
    knees = knee + 1j * heights
    for k, (anchor, height) in enumerate(zip(anchors, heights, strict=True)):
        others = np.delete(knees, k)
        if np.any(_distance(others, knees[k], anchor) < LEADER_CLEARANCE * view.per_point):
            return None
        beyond = sign * anchor.real - start
        if beyond <= 0.0:
            continue
        # Where the leader passes the inner end of the letters; from there on it is among them.
        entry = anchor.imag + (height - anchor.imag) * beyond / (sign * (anchor.real - knee))
        low, high = min(entry, anchor.imag) - half, max(entry, anchor.imag) + half
        if np.any((heights > low) & (heights < high)):
            return None
    return [(c, complex(knee, h)) for c, h in zip(column, heights, strict=True)]


def _places(run: tuple[float, float], pitch: float) -> int:
    return max(0, math.floor((run[1] - run[0]) / pitch))


def _heights(wanted: FloatArray, runs: Sequence[tuple[float, float]], pitch: float) -> FloatArray:
    """Heights (n,) for rising anchors, each in a free run, with the least total way to them."""
    count, best, least = len(wanted), wanted, math.inf
    for below in range(count + 1):
        parts = [wanted[:below], wanted[below:]] if len(runs) == 2 else [wanted]
        if any(len(p) > _places(run, pitch) for p, run in zip(parts, runs, strict=True)):
            continue
        pairs = zip(parts, runs, strict=True)
        placed = [spread(p, pitch, r[0] + pitch / 2, r[1] - pitch / 2) for p, r in pairs if p.size]
        heights = np.concatenate(placed) if placed else wanted
        way = float(np.sum(np.abs(heights - wanted)))
        if way < least:
            best, least = heights, way
    return best


def _draw(ax: Axes, callout: Callout, knee: complex, stub: float, style: Style) -> None:
    from matplotlib.patheffects import Normal, Stroke

    out = -stub if callout.side == "left" else stub
    colour = style.accent if callout.is_accent else style.ink
    line = [knee + out, knee, callout.anchor]
    halo = [Stroke(linewidth=style.hair + 2.0 * HALO, foreground=style.paper, alpha=0.75), Normal()]
    ax.plot(
        [point.real for point in line],
        [point.imag for point in line],
        color=colour,
        linewidth=style.hair,
        solid_joinstyle="round",
        path_effects=halo,
        zorder=8,
    )
    ax.plot(
        [callout.anchor.real],
        [callout.anchor.imag],
        marker="o",
        markersize=3.2,
        markerfacecolor=colour,
        markeredgecolor=style.paper,
        markeredgewidth=0.5,
        zorder=9,
    )
    ax.text(
        knee.real + 1.25 * out,
        knee.imag,
        callout.text,
        fontsize=style.text,
        fontweight=_weight(callout),
        color=colour,
        ha="right" if callout.side == "left" else "left",
        va="center",
        zorder=10,
    )


def _weight(callout: Callout) -> str:
    """An accent is bold too, so that it is one in grey print."""
    return "bold" if callout.is_accent else "normal"
