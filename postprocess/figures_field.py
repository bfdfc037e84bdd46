"""Flux density and flux lines over a sector, rotor and stator where they truly stand.

The stator's sector is drawn in its own frame, upright. The rotor stands turned by its angle, so
two copies of its sector fill the stator's: the second with the potential's sign changed where the
sector has an odd number of poles, which is what antiperiodicity means. Its gap is sheared as in the
solution, so both meshes meet edge on edge on the turning circle and flux lines run through it
unbroken.

|B| is taken in each element for itself: it jumps where materials meet, and between elements by
as much as the solution does.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.section import CrossSection, Region
from lamwright.geometry.winding import WindingTable
from lamwright.solver.gap import rotor_place, sheared
from lamwright.solver.integrals import phase_currents
from lamwright.solver.isoparametric import NODE_PLACES, gradients_at, shape
from lamwright.solver.types import FieldSolution, FloatArray, IntArray, SectorMesh

from .figures_labels import RULER_FOOT, draw_note, draw_ruler, place_callouts
from .figures_section import bare
from .figures_sector import draw_cut, pole_silhouette, write_axis_name
from .figures_style import (
    MM,
    QUARTERS,
    ComplexArray,
    Style,
    draw_scale,
    flux_colours,
    inked,
    mm_per_point,
    sampled,
    upright,
    visible_edges,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.patches import PathPatch

FEWEST_LINES = 22  # flux lines over the sector; the step is a round flux that gives at least these
COARSE = 0.025  # of the stator's radius: a longer side would show as a bend in the lines
PHASES = "ABC"
NO_CURRENT = 0.02  # of the largest ampere-conductors: a side with less is marked as idle


@dataclass(frozen=True, slots=True, eq=False)
class PolePart:
    """A mesh where it stands in the picture."""

    nodes: FloatArray  # (n_node, 2), mm
    elements: IntArray  # (n_elem, 6)
    potential: FloatArray  # (n_node,), Wb/m
    flux_density: FloatArray  # (n_elem, 3), T at the corners


def draw_flux(
    ax: Axes,
    scale_ax: Axes,
    section: CrossSection,
    sector: SectorMesh,
    solution: FieldSolution,
    winding: WindingTable,
    style: Style,
) -> None:
    """Draw |B| in T, flux lines and slot currents of a sector of the stator, and the scale.

    Args:
        ax: the drawing, equal axes in mm; the field is rasterised in a vector file.
        scale_ax: the colour scale.
        section: exact outlines.
        sector: the meshes of the solution.
        solution: one operating point at one position.
        winding: conductors, and the axis of phase A.
        style: sizes and colours.
    """
    angle = winding.axis_a + solution.position
    parts = pole_parts(section, sector, solution, angle)
    top = _round_up(max(float(part.flux_density.max()) for part in parts))
    turn = upright(section)
    place_callouts(ax, pole_silhouette(section), [], style, RULER_FOOT)
    clip = _sector_clip(ax, section, turn)
    _draw_density(ax, parts, top, clip)
    _draw_lines(ax, parts, section, clip, style)
    _draw_outlines(ax, section, turn, angle, clip, style)
    _draw_currents(ax, section, solution, winding, turn, style)
    _draw_rotor_axes(ax, section, turn, angle, style)
    draw_ruler(ax, style)
    draw_note(ax, _notes(solution, line_step(parts, section.stack_length)), style)
    bare(ax)
    draw_scale(scale_ax, flux_colours(), (0.0, top), "flux density |B| in T", style)


def pole_parts(
    section: CrossSection, sector: SectorMesh, solution: FieldSolution, angle: float
) -> list[PolePart]:
    """The stator and as many copies of the rotor's sector as the picture shows."""
    pole = section.sector_angle
    turn = upright(section)
    place = rotor_place(sector, angle)
    nodes = sheared(sector.rotor.nodes, place.rest, section.gap_ring_radius, section.circle_radius)
    parts = [_part(sector.stator.nodes, sector.stator.elements, solution.a_stator, turn)]
    if section.is_full_circle:
        whole = _part(nodes, sector.rotor.elements, solution.a_rotor, turn * cmath.exp(1j * angle))
        return [*parts, whole]
    first = math.floor(-angle / pole + 1e-9)
    # Angles from the middle of the sector, where no node is near the cut of the complex plane.
    lead = np.angle(_complex(nodes) * cmath.exp(-0.5j * pole))[sector.rotor.elements[:, :3]]
    for copy in (first, first + 1):
        start = angle + copy * pole
        ahead = start + 0.5 * pole + lead
        inside = (ahead.max(axis=1) > 0.0) & (ahead.min(axis=1) < pole)
        if np.any(inside):
            potential = (sector.side_sign if copy % 2 else 1.0) * solution.a_rotor
            shown = sector.rotor.elements[inside]
            parts.append(_part(nodes, shown, potential, turn * cmath.exp(1j * start)))
    return parts


def _complex(nodes: FloatArray) -> ComplexArray:
    return np.asarray(nodes[:, 0] + 1j * nodes[:, 1])


def _part(nodes: FloatArray, elements: IntArray, potential: FloatArray, turn: complex) -> PolePart:
    grad, _ = gradients_at(nodes[elements], NODE_PLACES[:3])
    slope = np.einsum("epdi,ei->epd", grad, potential[elements])  # B turned by 90 degrees, T
    at = MM * turn * (_complex(nodes))
    return PolePart(
        nodes=np.stack([at.real, at.imag], axis=1),
        elements=elements,
        potential=potential,
        flux_density=np.hypot(slope[..., 0], slope[..., 1]),
    )


def _round_up(value: float) -> float:
    """The next tenth, so that the scale ends on a number that can be read."""
    return max(0.1, math.ceil(10.0 * value - 1e-9) / 10.0)


def _sector_clip(ax: Axes, section: CrossSection, turn: complex) -> PathPatch:
    from matplotlib.patches import PathPatch
    from matplotlib.path import Path as InkPath

    outer = 1.001 * MM * section.stator_outer_radius
    pole = section.sector_angle
    arc = outer * np.exp(1j * np.linspace(0.0, pole, 91 * section.sector_poles)) * turn
    points = np.concatenate([[0j], arc, [0j]])
    patch = PathPatch(InkPath(np.stack([points.real, points.imag], axis=1)))
    patch.set_transform(ax.transData)
    return patch


def _draw_density(ax: Axes, parts: Sequence[PolePart], top: float, clip: PathPatch) -> None:
    for part in parts:
        corners = part.nodes[part.elements[:, :3]].reshape(-1, 2)
        mesh = ax.tripcolor(
            corners[:, 0],
            corners[:, 1],
            np.arange(len(corners)).reshape(-1, 3),
            part.flux_density.ravel(),
            shading="gouraud",
            cmap=flux_colours(),
            vmin=0.0,
            vmax=top,
            rasterized=True,
            zorder=1,
        )
        mesh.set_clip_path(clip)


def _draw_lines(
    ax: Axes, parts: Sequence[PolePart], section: CrossSection, clip: PathPatch, style: Style
) -> None:
    from matplotlib.tri import Triangulation

    coarse = COARSE * MM * section.stator_outer_radius
    step = line_step(parts, section.stack_length) / section.stack_length
    for part in parts:
        nodes, potential, triangles = contour_triangles(part, coarse)
        low, high = float(part.potential.min()), float(part.potential.max())
        levels = step * (np.arange(math.floor(low / step), math.ceil(high / step) + 1) + 0.5)
        lines = ax.tricontour(
            Triangulation(nodes[:, 0], nodes[:, 1], triangles),
            potential,
            levels=levels,
            colors=style.ink,
            linewidths=style.hair,
            linestyles="solid",
            zorder=2,
        )
        lines.set_clip_path(clip)


def contour_triangles(part: PolePart, coarse: float) -> tuple[FloatArray, FloatArray, IntArray]:
    """Straight triangles to draw flux lines in: 4 an element, 16 where one side is over `coarse`.

    Returns:
        nodes (n, 2) in mm; potential (n,) in Wb/m; triangles (m, 3).
    """
    corner = part.nodes[part.elements[:, :3]]
    side = np.linalg.norm(corner - np.roll(corner, 1, axis=1), axis=2).max(axis=1)
    large = part.elements[side > coarse]
    places, pieces = lattice(4)
    weights = shape(places)  # (n_place, 6)
    nodes = (weights @ part.nodes[large]).reshape(-1, 2)
    potential = (part.potential[large] @ weights.T).ravel()
    offset = len(part.nodes) + len(places) * np.arange(len(large))
    fine = (pieces + offset[:, None, None]).reshape(-1, 3)
    quarters = part.elements[side <= coarse][:, QUARTERS].reshape(-1, 3)
    return (
        np.concatenate([part.nodes, nodes]),
        np.concatenate([part.potential, potential]),
        np.concatenate([quarters, fine]),
    )


def lattice(count: int) -> tuple[FloatArray, IntArray]:
    """Places (n, 2) that part the sides of the reference triangle in `count`; triangles (m, 3)."""
    row = [k * (count + 1) - k * (k - 1) // 2 for k in range(count + 1)]  # first place of a row
    places = [(i / count, j / count) for j in range(count + 1) for i in range(count + 1 - j)]
    upward = [(i, j) for j in range(count) for i in range(count - j)]
    downward = [(i, j) for j in range(count - 1) for i in range(count - 1 - j)]
    pieces = [(row[j] + i, row[j] + i + 1, row[j + 1] + i) for i, j in upward]
    pieces += [(row[j] + i + 1, row[j + 1] + i + 1, row[j + 1] + i) for i, j in downward]
    return np.array(places), np.array(pieces)


def line_step(parts: Sequence[PolePart], stack_length: float) -> float:
    """A round flux in Wb between two flux lines that gives `FEWEST_LINES` or up to 2.5 times."""
    low = min(float(part.potential.min()) for part in parts)
    high = max(float(part.potential.max()) for part in parts)
    widest = max((high - low) * stack_length / FEWEST_LINES, 1e-12)
    decade = 10.0 ** math.floor(math.log10(widest))
    return max(step * decade for step in (1.0, 2.0, 5.0) if step * decade <= widest)


def _draw_outlines(
    ax: Axes, section: CrossSection, turn: complex, angle: float, clip: PathPatch, style: Style
) -> None:
    from matplotlib.patches import PathPatch

    pole = section.sector_angle
    turns = [turn * cmath.exp(1j * (angle + k * pole)) for k in range(section.sectors)]
    for regions, at in ((section.stator, [turn]), (section.rotor, turns)):
        lines = PathPatch(inked(visible_edges(regions, section), at, closed=False), fill=False)
        lines.set(edgecolor=style.ink, linewidth=style.outline, zorder=3)
        ax.add_artist(lines)
        lines.set_clip_path(clip)
    draw_cut(ax, section, turn, (0.0, section.stator_outer_radius), style)


def _draw_currents(
    ax: Axes,
    section: CrossSection,
    solution: FieldSolution,
    winding: WindingTable,
    turn: complex,
    style: Style,
) -> None:
    """Phase, and a dot (towards the reader) or cross (away) for the current of each coil side."""
    from matplotlib.patheffects import Normal, Stroke

    theta_e = section.pole_pairs * solution.position
    i_abc = phase_currents(solution.i_d, solution.i_q, theta_e)
    amperes = winding.conductors @ i_abc  # (slots, layers)
    most = float(np.abs(amperes).max())
    copper = [region for region in section.stator if region.material == "copper"]
    per_point = mm_per_point(ax)
    pitch = 2.0 * math.pi / section.slots
    for region in copper:
        _, slot, _, layer = region.name.split("_")
        side = winding.conductors[int(slot), int(layer)]
        phase = int(np.argmax(np.abs(side)))
        sign = "+" if side[phase] > 0 else "\N{MINUS SIGN}"
        value = float(amperes[int(slot), int(layer)])
        middle, room = _slot_room(region, (int(slot) + 0.5) * pitch)
        size = min(7.0, 0.42 * room / per_point)
        apart = 0.62j * size * per_point
        at = MM * middle * turn
        if section.sector_poles > 1:  # slots stand at all angles: side by side across the slot
            apart = 0.8j * size * per_point * at / abs(at)
        _mark(ax, at - apart, value if abs(value) > NO_CURRENT * most else 0.0, size, style)
        ax.text(
            (at + apart).real,
            (at + apart).imag,
            sign + PHASES[phase],
            fontsize=size,
            color=style.ink,
            ha="center",
            va="center_baseline",
            path_effects=[Stroke(linewidth=2.0, foreground=style.paper), Normal()],
            zorder=6,
        )


def _slot_room(region: Region, angle: float) -> tuple[complex, float]:
    """Middle in m of a copper region and its width in mm there, the slot's axis at `angle`."""
    points = sampled(region.outer) * cmath.exp(-1j * angle)
    middle = 0.5 * (points.real.min() + points.real.max())
    across = points.imag
    # The sides of tooth coils lie beside the centre line.
    off = 0.5 * float(across.min() + across.max())
    if abs(off) < 0.05 * float(np.ptp(across)):
        off = 0.0
    width = 2.0 * MM * float(np.abs(across - off).mean())
    return complex((middle + 1j * off) * cmath.exp(1j * angle)), width


def _mark(ax: Axes, at: complex, value: float, size: float, style: Style) -> None:
    ax.plot(
        [at.real],
        [at.imag],
        "o",
        markersize=size,
        markerfacecolor=style.paper,
        markeredgecolor=style.ink,
        markeredgewidth=0.6,
        zorder=5,
    )
    if value > 0.0:
        ax.plot([at.real], [at.imag], "o", color=style.ink, markersize=0.32 * size, zorder=6)
    elif value < 0.0:
        ax.plot(
            [at.real],
            [at.imag],
            "x",
            color=style.ink,
            markersize=0.55 * size,
            markeredgewidth=0.8,
            zorder=6,
        )


def _draw_rotor_axes(
    ax: Axes, section: CrossSection, turn: complex, angle: float, style: Style
) -> None:
    """The rotor's d and q axes within the stator's sector, named beyond the stator."""
    half = 0.5 * math.pi / section.pole_pairs
    outer = MM * section.stator_outer_radius
    spans = ((0.0, MM * section.rotor_radius, (9, 2.5, 1.5, 2.5)), (outer, 1.05 * outer, (1, 0)))
    first = math.ceil(-angle / half - 1e-9)
    last = math.floor(2.0 * section.sector_poles - angle / half + 1e-9)
    if section.is_full_circle:  # the last is the first
        last = first + 2 * section.poles - 1
    for k in range(first, last + 1):
        along = turn * cmath.exp(1j * (angle + k * half))
        for start, end, dashes in spans:
            ends = np.array([start, end]) * along
            ax.plot(
                ends.real,
                ends.imag,
                color=style.quiet,
                linewidth=style.outline,
                dashes=dashes,
                zorder=4,
            )
        name = "q axis" if k % 2 else "d axis"
        write_axis_name(ax, 1.06 * outer * along, name, section, style)


def _notes(solution: FieldSolution, step: float) -> list[str]:
    position = math.degrees(solution.position)
    return [
        f"i_d {solution.i_d:.2f} A, i_q {solution.i_q:.2f} A, d axis {position:.2f}\N{DEGREE SIGN}"
        " (mechanical) ahead of phase A's axis",
        f"{1e3 * step:g} mWb between flux lines; current towards the reader: dot, away: cross",
    ]
