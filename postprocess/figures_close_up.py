"""Close-ups of ribs: the square of each, its letter on the whole picture, its heading."""

from __future__ import annotations

from typing import TYPE_CHECKING

from .figures_style import Style

if TYPE_CHECKING:
    from matplotlib.axes import Axes


def frame_close_up(ax: Axes, middle: complex, half: float, letter: str, style: Style) -> None:
    """Mark on the whole picture what a close-up shows: `middle` and half its side in mm."""
    from matplotlib.patches import Rectangle
    from matplotlib.patheffects import Normal, Stroke

    corner = (middle.real - half, middle.imag - half)
    frame = Rectangle(corner, 2 * half, 2 * half, fill=False, zorder=7)
    frame.set(edgecolor=style.ink, linewidth=style.outline)
    ax.add_artist(frame)
    # Below, at the end towards the q axis: labels stand outside of the pole, peaks in the frame.
    inward = -1.0 if middle.real > 0.0 else 1.0
    ax.text(
        middle.real + inward * half,
        middle.imag - 1.15 * half,
        letter,
        fontsize=style.text,
        fontweight="bold",
        color=style.ink,
        ha="right" if inward > 0.0 else "left",
        va="top",
        path_effects=[Stroke(linewidth=2.0, foreground=style.paper), Normal()],
        zorder=9,
    )


def open_close_up(ax: Axes, middle: complex, half: float) -> None:
    """Axes in mm, equal both ways, of the square about `middle` with half its side."""
    ax.set_aspect("equal", adjustable="box")
    ax.set_xlim(middle.real - half, middle.real + half)
    ax.set_ylim(middle.imag - half, middle.imag + half)


def head_close_up(ax: Axes, heading: str, style: Style) -> None:
    """The heading, and a frame without scales."""
    ax.set_title(heading, fontsize=style.text, color=style.ink, loc="left", pad=4.0)
    ax.set_xticks([])
    ax.set_yticks([])
    for spine in ax.spines.values():
        spine.set(color=style.ink, linewidth=style.outline)
