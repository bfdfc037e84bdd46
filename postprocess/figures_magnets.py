"""Magnets in pictures: an arrow along each remanence, and their names."""

from __future__ import annotations

import cmath
from typing import TYPE_CHECKING

from lamwright.geometry.section import CrossSection, Region, base_name, pole_of

from .figures_labels import Callout
from .figures_style import MM, Style

if TYPE_CHECKING:
    from matplotlib.axes import Axes

ARROW = 0.7  # of a magnet's extent along its remanence


def draw_arrows(ax: Axes, section: CrossSection, turns: list[complex], style: Style) -> None:
    """Draw the direction of every magnet's remanence, once for each turn of the sector.

    From sector to sector the magnetisation changes its sign where the sector has an odd number of
    poles.
    """
    for k, turn in enumerate(turns):
        sign = -1.0 if k * section.sector_poles % 2 else 1.0
        for region in section.rotor:
            if region.material == "magnet":
                along = sign * ARROW * MM * _extent(region) * region.magnetisation * turn
                tail = MM * _middle(region) * turn - 0.5 * along
                ax.annotate(
                    "",
                    xy=((tail + along).real, (tail + along).imag),
                    xytext=(tail.real, tail.imag),
                    arrowprops={
                        "arrowstyle": "-|>,head_width=0.12,head_length=0.24",
                        "color": style.paper,
                        "linewidth": style.outline,
                        "shrinkA": 0.0,
                        "shrinkB": 0.0,
                    },
                    zorder=4,
                )


def magnet_callouts(section: CrossSection, turn: complex) -> list[Callout]:
    """A name for the magnets of each barrier of an upright sector's first pole, right one of two.

    Anchors in m, as those of the rotor's other parts.
    """
    right: dict[int, complex] = {}
    for region in section.rotor:
        if region.material == "magnet" and pole_of(region.name) == 1:
            number = int(base_name(region.name).split("_")[1])
            at = _beside_arrow(region) * turn
            if number not in right or at.real > right[number].real:
                right[number] = at
    return [Callout(f"magnet {number}", at, "right") for number, at in sorted(right.items())]


def _middle(region: Region) -> complex:
    corners = [edge.start for edge in region.outer.edges]
    return sum(corners) / len(corners)


def _beside_arrow(region: Region) -> complex:
    """A point of the block clear of its arrow, on the clockwise side."""
    middle = _middle(region)
    sides = [0.5 * (edge.start + edge.end) for edge in region.outer.edges]
    across = region.magnetisation.conjugate()
    ends = [side for side in sides if abs(((side - middle) * across).real) < abs(side - middle) / 2]
    return middle + 0.6 * (min(ends, key=lambda z: cmath.phase(z)) - middle)


def _extent(region: Region) -> float:
    """Extent of a block along its remanence in m."""
    along = [(edge.start * region.magnetisation.conjugate()).real for edge in region.outer.edges]
    return max(along) - min(along)
