"""A design beside its yardsticks as bars: torque, saliency, copper losses at one current."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from .figures import SETTINGS, _figure, _save
from .figures_style import Style
from .yardsticks import Yardsticks

if TYPE_CHECKING:
    from matplotlib.axes import Axes

HEADROOM = 1.16  # of the tallest bar, for the number on it
PALE = "#b9c5ce"
WIDTH = 0.58  # of a bar, whose neighbours are 1 apart

Bar = tuple[str, Sequence[float], str]  # name, parts from the bottom up, colour


def write_yardsticks(
    folder: Path, found: Yardsticks, style: Style | None = None
) -> tuple[Path, ...]:
    """Write the bars as PNG and SVG into an existing folder."""
    import matplotlib

    style = style or Style()
    # Users' settings must not change a figure, nor a figure theirs.
    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(SETTINGS)
        figure = _figure((9.0, 3.9), f"{found.design_name}: beside its yardsticks", style)
        figure.text(
            0.985,
            0.975,
            f"at {found.design.current:.4g} A peak, each at its own best angle or slip",
            fontsize=style.text,
            color=style.quiet,
            ha="right",
            va="top",
        )
        panels = (
            ("torque in N m", _torques(found, style)),
            ("saliency", _saliencies(found, style)),
            ("copper and cage loss in W, estimates", _losses(found, style)),
        )
        for k, (label, bars) in enumerate(panels):
            ax = figure.add_axes((0.07 + 0.325 * k, 0.16, 0.25, 0.68))
            draw_yardsticks(ax, bars, label, style)
        return _save(figure, folder / "yardsticks", style)


def draw_yardsticks(ax: Axes, bars: Sequence[Bar], label: str, style: Style) -> None:
    """Draw bars with their sums on top; a second part is paler and hatched."""
    for k, (_, parts, colour) in enumerate(bars):
        bottom = 0.0
        for part, (value, fill) in enumerate(zip(parts, (colour, PALE), strict=False)):
            ax.bar(
                k,
                value,
                WIDTH,
                bottom=bottom,
                color=fill,
                edgecolor=style.ink,
                linewidth=style.hair,
                hatch="////" if part else None,
            )
            bottom += value
        ax.text(
            k,
            bottom,
            f"{bottom:.3g}",
            fontsize=style.text,
            color=style.ink,
            ha="center",
            va="bottom",
        )
    ax.set_xticks(range(len(bars)), [name for name, _, _ in bars])
    ax.set_xlim(-0.6, max(1, len(bars) - 1) + 0.6)
    ax.set_ylim(0.0, HEADROOM * max(sum(parts) for _, parts, _ in bars))
    ax.set_title(label, fontsize=style.text, color=style.ink, loc="left")
    ax.tick_params(labelsize=style.text, colors=style.ink, width=style.hair)
    ax.grid(axis="y", color=style.quiet, alpha=0.22, linewidth=style.hair)
    ax.set_axisbelow(True)
    for name, spine in ax.spines.items():
        spine.set_visible(name in ("left", "bottom"))
        spine.set(color=style.quiet, linewidth=style.hair)


def _torques(found: Yardsticks, style: Style) -> list[Bar]:
    bars: list[Bar] = [("design", (found.design.torque,), style.ink)]
    bars += [("ideal\nrotor", (one.torque,), style.second) for one in found.ideal]
    bars += [("induction,\nestimate", (one.torque,), PALE) for one in found.induction]
    return bars


def _saliencies(found: Yardsticks, style: Style) -> list[Bar]:
    bars: list[Bar] = [("design", (found.design.saliency,), style.ink)]
    return bars + [("ideal\nrotor", (one.saliency,), style.second) for one in found.ideal]


def _losses(found: Yardsticks, style: Style) -> list[Bar]:
    bars: list[Bar] = [("design,\nstator", (found.design.copper_loss,), style.ink)]
    return bars + [
        ("induction,\nstator and cage", (one.stator_loss, one.rotor_loss), style.ink)
        for one in found.induction
    ]
