"""Style and palette of every figure, and the way from exact outlines to what is inked.

Figures are drawn in mm, upright: the middle of the drawn pole points up. Colour scales were chosen
by lightness first, as the palette was, so that they still tell apart when printed in grey; the test
of figures holds them to that.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from lamwright.geometry.curves import Edge, Path
from lamwright.geometry.palette import ACCENT, INK, PAPER, QUIET
from lamwright.geometry.section import CrossSection, Region

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.colors import LinearSegmentedColormap
    from matplotlib.path import Path as InkPath

ComplexArray = npt.NDArray[np.complex128]
IntArray = npt.NDArray[np.int64]

MM = 1e3  # mm per m
SIDE_TOL = 1e-9  # m, far below a punch's 1e-5: a point this near a line or circle is on it
# A second-order triangle as four: corners and middles in the order of `solver.types`.
QUARTERS: IntArray = np.array([[0, 3, 5], [3, 1, 4], [5, 4, 2], [3, 4, 5]])
WIDEST_BEZIER = math.pi / 6  # rad, one cubic per 30 degrees: 4e-7 of the radius off a true arc


@dataclass(frozen=True, slots=True)
class Style:
    """Sizes in points (1/72 inch) and colours of a figure's lines and letters."""

    ink: str = INK
    quiet: str = QUIET
    accent: str = ACCENT
    second: str = "#2f6f8f"  # a second curve
    paper: str = PAPER
    text: float = 8.0
    small: float = 7.0
    title: float = 10.0
    outline: float = 0.7
    hair: float = 0.45
    dpi: float = 200.0  # pixels per inch of a PNG and of the rasterised part of an SVG


def flux_colours() -> LinearSegmentedColormap:
    """The scale of flux density: paper through sand to plum, lightness falling all the way."""
    from matplotlib.colors import LinearSegmentedColormap

    stops = ["#fdfcf7", "#f6e7b4", "#efc36d", "#e08f4c", "#c25c4d", "#8f3b5e", "#57295c"]
    return LinearSegmentedColormap.from_list("lamwright_flux", stops, N=512)


def stress_colours() -> LinearSegmentedColormap:
    """The scale of stress: paper through sage to deep blue, lightness falling all the way."""
    from matplotlib.colors import LinearSegmentedColormap

    # Quick at its low end: a rib's peak sets the scale, carriers see a tenth of it.
    stops = ["#fbfcf8", "#d5e8cf", "#98cdb9", "#58a9b0", "#3a7ea6", "#3a5291", "#352a68"]
    at = [0.0, 0.06, 0.18, 0.36, 0.58, 0.8, 1.0]
    paired = list(zip(at, stops, strict=True))
    return LinearSegmentedColormap.from_list("lamwright_stress", paired, N=512)


def upright(section: CrossSection) -> complex:
    """The turn (unit complex number) that makes the middle of the sector point up."""
    return cmath.exp(1j * (math.pi / 2 - 0.5 * section.sector_angle))


def _bezier(edge: Edge) -> tuple[list[complex], int]:
    """Points after the start, and how many of them a curve command takes (1 or 3)."""
    if edge.is_line:
        return [edge.end], 1
    pieces = max(1, math.ceil(abs(edge.sweep) / WIDEST_BEZIER))
    # Cubic of an arc of angle phi: handles of length 4/3 tan(phi/4) r along the tangents;
    # common practice, no source. 4/3 tan(phi/4) keeps the sign of the sweep.
    handle = 4.0 / 3.0 * math.tan(edge.sweep / pieces / 4.0)
    centre, points = edge.centre, []
    for piece in range(pieces):
        first = edge.point(piece / pieces)
        last = edge.end if piece == pieces - 1 else edge.point((piece + 1) / pieces)
        points += [
            first + 1j * handle * (first - centre),
            last - 1j * handle * (last - centre),
            last,
        ]
    return points, 3


def inked(chains: Iterable[Sequence[Edge]], turns: Sequence[complex], closed: bool) -> InkPath:
    """A drawable path in mm of chains of edges, repeated once for each turn.

    Args:
        chains: each a run of edges that follow one another.
        turns: complex factors of modulus 1.
        closed: whether each chain returns to its start.
    """
    from matplotlib.path import Path as InkPath

    points: list[complex] = []
    codes: list[int] = []
    for chain in chains:
        points.append(chain[0].start)
        codes.append(int(InkPath.MOVETO))
        for edge in chain:
            added, kind = _bezier(edge)
            points += added
            codes += [int(InkPath.LINETO if kind == 1 else InkPath.CURVE4)] * len(added)
        if closed:
            points.append(chain[0].start)
            codes.append(int(InkPath.CLOSEPOLY))
    at = np.concatenate([MM * np.array(points) * turn for turn in turns])
    return InkPath(np.column_stack([at.real, at.imag]), np.tile(codes, len(turns)))


def region_ink(regions: Iterable[Region], turns: Sequence[complex]) -> InkPath:
    """Fillable path in mm of whole regions, holes left out."""
    paths = [path for region in regions for path in (region.outer, *region.holes)]
    return inked([path.edges for path in paths], turns, closed=True)


def sampled(path: Path, step: float = math.pi / 36) -> ComplexArray:
    """Points (n,) in m on a closed path, arcs cut so that no piece turns more than `step` rad."""
    points: list[complex] = []
    for edge in path.edges:
        pieces = 1 if edge.is_line else max(1, math.ceil(abs(edge.sweep) / step))
        points += [edge.point(piece / pieces) for piece in range(pieces)]
    return np.array(points)


def visible_edges(regions: Iterable[Region], section: CrossSection) -> list[list[Edge]]:
    """Chains of edges where one material or winding layer ends; cuts between poles are left out."""
    owners: dict[tuple[complex, complex, float], set[str]] = {}
    edges: dict[tuple[complex, complex, float], Edge] = {}
    for region in regions:
        owner = region.name if region.material == "copper" else region.material
        for path in (region.outer, *region.holes):
            for edge in path.edges:
                key = _key(edge)
                owners.setdefault(key, set()).add(owner)
                edges.setdefault(key, edge)
    shown = [edge for key, edge in edges.items() if _is_seen(edge, owners[key], section)]
    return _chained(shown)


def _key(edge: Edge) -> tuple[complex, complex, float]:
    """The same for an edge and its reverse; 1 nm is far below any drawn length."""
    ends = [complex(round(p.real, 9), round(p.imag, 9)) for p in (edge.start, edge.end)]
    swap = (ends[1].real, ends[1].imag) < (ends[0].real, ends[0].imag)
    bulge = round(-edge.bulge if swap else edge.bulge, 6)
    return (ends[1], ends[0], bulge) if swap else (ends[0], ends[1], bulge)


def _is_seen(edge: Edge, owners: set[str], section: CrossSection) -> bool:
    """Two owners meet, or the machine ends; sides of a pole and air within air have one owner."""
    outer = section.stator_outer_radius
    is_outer = all(abs(abs(point) - outer) < SIDE_TOL for point in (edge.start, edge.end))
    return len(owners) > 1 or is_outer


def _chained(edges: Sequence[Edge]) -> list[list[Edge]]:
    """Runs of edges in which each starts where the one before ends."""
    chains: list[list[Edge]] = []
    for edge in edges:
        if chains and abs(chains[-1][-1].end - edge.start) < SIDE_TOL:
            chains[-1].append(edge)
        else:
            chains.append([edge])
    return chains


def pixels_per_point(ax: Axes) -> float:
    """Pixels of the figure that `ax` is part of, for 1/72 inch."""
    figure = ax.get_figure(root=True)
    assert figure is not None
    return figure.dpi / 72.0


def mm_per_point(ax: Axes) -> float:
    """Data units of equal axes on 1/72 inch of paper."""
    low, high = ax.get_xlim()
    return (high - low) / ax.get_window_extent().width * pixels_per_point(ax)


def draw_scale(
    ax: Axes,
    colours: LinearSegmentedColormap,
    limits: tuple[float, float],
    label: str,
    style: Style,
) -> None:
    """Draw a colour scale over `limits` into narrow upright axes; `label` holds the unit."""
    ax.imshow(
        np.linspace(0.0, 1.0, 256)[:, None],
        cmap=colours,
        aspect="auto",
        origin="lower",
        extent=(0.0, 1.0, *limits),
        interpolation="nearest",
    )
    ax.set_xticks([])
    ax.yaxis.tick_right()
    ax.yaxis.set_label_position("right")
    ax.set_ylabel(label, fontsize=style.text, color=style.ink)
    ax.tick_params(labelsize=style.text, colors=style.ink, width=style.hair)
    for spine in ax.spines.values():
        spine.set(color=style.ink, linewidth=style.hair)
