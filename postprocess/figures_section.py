"""The cross-section as a picture: its sector with the trade's names, and the whole lamination.

Lines and arcs are those of `CrossSection`, not of a mesh. Rotor names stand on the right of the
sector, stator names on the left. Each part of the rotor's own period is named once; of mirror
images the right one.
"""

from __future__ import annotations

import cmath
import math
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.palette import DRAWN_AS, FILLS, MATERIAL_NAMES
from lamwright.geometry.section import (
    CrossSection,
    Material,
    Region,
    Rib,
    base_name,
    pole_of,
    rotor_cell,
)

from .figures_details import detail_callouts, unlike_poles
from .figures_labels import RULER_FOOT, Callout, FloatArray, Side, draw_ruler, place_callouts
from .figures_magnets import draw_arrows, magnet_callouts
from .figures_sector import break_off, break_radius, draw_axes_lines, pole_silhouette
from .figures_style import (
    MM,
    ComplexArray,
    Style,
    inked,
    region_ink,
    sampled,
    upright,
    visible_edges,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes

LEAST_OPENING = 1e-5  # m, less is no space worth a name
SAME_WIDTH = 1e-6  # m, ribs this near in width are told once


def draw_section(ax: Axes, section: CrossSection, style: Style) -> None:
    """Draw the sector, upright, equal axes in mm, with trade names on leader lines.

    Sets the limits of `ax` so that the names find room beside the pole; the names stand for the
    size that `ax` has at the call.

    Raises:
        ValueError: if the axes are too low for the number of names.
    """
    turn = upright(section)
    draw_materials(ax, section, [turn], style)
    draw_arrows(ax, section, [turn], style)
    break_off(ax, section, style)
    draw_axes_lines(ax, section, turn, style)
    callouts = section_callouts(section, turn)
    place_callouts(ax, pole_silhouette(section, break_radius(section)), callouts, style, RULER_FOOT)
    draw_ruler(ax, style)
    bare(ax)


def draw_lamination(ax: Axes, section: CrossSection, style: Style) -> None:
    """Draw all poles of rotor and stator, equal axes in mm, without names."""
    count = section.sectors
    turns = [upright(section) * cmath.exp(2j * math.pi * k / count) for k in range(count)]
    draw_materials(ax, section, turns, style, line_share=0.5)
    draw_arrows(ax, section, turns, style)
    rim = 1.02 * MM * section.stator_outer_radius * np.exp(1j * np.linspace(0, 2 * np.pi, 180))
    place_callouts(ax, rim, [], style)
    bare(ax)


def draw_key(ax: Axes, section: CrossSection, style: Style) -> None:
    """Write the main dimensions, and the materials beside a patch of their fill."""
    from matplotlib.patches import Rectangle

    ax.set_xlim(0.0, 1.0)
    ax.set_ylim(0.0, 1.0)
    ax.set_axis_off()
    rows = _dimensions(section)
    used = {region.material for region in (*section.rotor, *section.stator)}
    alike: dict[Material, list[str]] = {}
    for material, name in MATERIAL_NAMES.items():
        if material in used:
            alike.setdefault(DRAWN_AS.get(material, material), []).append(name)
    names = [(material, ", ".join(words)) for material, words in alike.items()]
    step = 1.0 / (len(rows) + len(names) + 1)
    for k, (name, value) in enumerate(rows):
        y = 1.0 - (k + 0.5) * step
        ax.text(0.0, y, name, fontsize=style.text, color=style.quiet, va="center")
        ax.text(1.0, y, value, fontsize=style.text, color=style.ink, va="center", ha="right")
    for k, (material, name) in enumerate(names):
        y = 1.0 - (len(rows) + 1.5 + k) * step
        patch = Rectangle((0.0, y - 0.36 * step), 0.16, 0.72 * step)
        patch.set(facecolor=FILLS[material], edgecolor=style.ink, linewidth=style.hair)
        ax.add_artist(patch)
        ax.text(0.22, y, name, fontsize=style.text, color=style.ink, va="center")


def draw_materials(
    ax: Axes,
    section: CrossSection,
    turns: list[complex],
    style: Style,
    line_share: float = 1.0,
) -> None:
    """Fill the regions by material and ink every border between materials, once for each turn."""
    from matplotlib.patches import PathPatch

    regions = (*section.rotor, *section.stator)
    for material in FILLS:
        own = [r for r in regions if DRAWN_AS.get(r.material, r.material) == material]
        if material == "air" or not own:
            continue
        patch = PathPatch(region_ink(own, turns), zorder=1)
        # An edge in the fill's own colour closes the seams between poles.
        patch.set(facecolor=FILLS[material], edgecolor=FILLS[material], linewidth=0.3)
        ax.add_artist(patch)
    lines = PathPatch(inked(visible_edges(regions, section), turns, closed=False), fill=False)
    lines.set(edgecolor=style.ink, linewidth=line_share * style.outline, zorder=3)
    lines.set(joinstyle="round", capstyle="round")
    ax.add_artist(lines)


def section_callouts(section: CrossSection, turn: complex) -> list[Callout]:
    """Names of all parts of an upright sector, each with the point it names, in mm."""
    found = _rotor_callouts(section, turn) + _stator_callouts(section, turn)
    return [Callout(c.text, MM * c.anchor, c.side) for c in found]


def _rotor_callouts(section: CrossSection, turn: complex) -> list[Callout]:
    found: list[Callout] = []
    anchors: list[complex] = []
    cell = rotor_cell(section)
    named = unlike_poles(cell)
    outlines = {
        key: outline for key, outline in _barrier_outlines(cell, turn).items() if key[0] in named
    }
    for (pole, number), outline in outlines.items():
        anchors.append(_arm_point(outline))
        text = f"flux barrier {number}{pole_words(pole)}"
        found.append(Callout(text, anchors[-1], _side(pole, anchors[-1])))
    first = {number: outline for (pole, number), outline in outlines.items() if pole == 1}
    found.append(Callout("flux carrier", _carrier_point(section, turn, first, anchors), "right"))
    found += magnet_callouts(cell, turn) + detail_callouts(cell, turn)
    for rib in _right_hand(tuple(rib for rib in cell.ribs if pole_of(rib.name) in named), turn):
        pole = pole_of(rib.name)
        text = f"{rib.kind} rib {rib.barrier}{pole_words(pole)}, {MM * rib.width:.2f} mm"
        middle = 0.5 * (rib.start + rib.end) * turn
        found.append(Callout(text, middle, _side(pole, middle)))
    return found


def _side(pole: int, anchor: complex) -> Side:
    """Where a rotor's name stands: right, but on its own side for a later pole of the period."""
    return "left" if pole > 1 and anchor.real < 0.0 else "right"


def pole_words(pole: int) -> str:
    """What a name has after it in a pole that is not the first of the rotor's period."""
    return f", pole {pole}" if pole > 1 else ""


def _stator_callouts(section: CrossSection, turn: complex) -> list[Callout]:
    count = section.sector_slots
    pitch = 2.0 * math.pi / section.slots
    copper = [region for region in section.stator if region.material == "copper"]
    reach = [abs(sampled(region.outer)) for region in copper]
    bottom, top = max(r.max() for r in reach), min(r.min() for r in reach)
    # Left of the middle, clear of the column of labels.
    slot = (2 * count) // 3 if section.sector_poles == 1 else count // 2
    slot = min(slot, count - 2)  # tooth and gap are named one slot further, inside the sector

    def at(radius: float, pitches: float) -> complex:
        return radius * cmath.exp(1j * pitch * pitches) * turn

    beside = cmath.exp(0.2j * math.pi / section.pole_pairs)
    parts = [
        ("stator yoke", at(0.5 * (bottom + section.stator_outer_radius), slot + 0.6)),
        ("tooth", at(0.5 * (bottom + top), slot + 1)),
        *_mouth_parts(section, top, at(1.0, slot + 0.5)),
        (f"air gap, {MM * section.gap:.2f} mm", at(section.circle_radius, slot + 1.2)),
        (f"shaft bore, {_diameter(section.shaft_radius)}", section.shaft_radius * 1j * beside),
    ]
    layers = sorted((r for r in copper if r.name.startswith(f"slot_{slot}_")), key=_layer)
    names = ["slot"] if len(layers) == 1 else ["slot, bottom layer", "slot, top layer"]
    for region, name in zip(layers, names, strict=True):
        outline = sampled(region.outer)
        span, middle = abs(outline), at(1.0, slot + 0.5)
        off = (outline * turn / middle).imag
        centre = 0.5 * complex(span.min() + span.max(), off.min() + off.max())
        if abs(centre.imag) > 0.05 * np.ptp(off):  # of the slot's other side
            parts.append((f"coil side, layer {_layer(region)}", centre * middle))
        else:
            parts.append((name, 0.5 * (span.min() + span.max()) * middle))
    return [Callout(name, point, "left") for name, point in parts]


def _mouth_parts(
    section: CrossSection, copper: float, middle: complex
) -> list[tuple[str, complex]]:
    """What lies between the bore and the copper, on the slot's centre line; nothing if they touch.

    Args:
        section: the machine.
        copper: radius in m at which copper begins.
        middle: unit vector along the centre line.
    """
    bore = section.stator_bore_radius
    if section.bridge > 0.0:
        text = f"bridge, {MM * section.bridge:.2f} mm"
        return [(text, (bore + 0.5 * section.bridge) * middle)]
    if copper - bore < LEAST_OPENING:
        return []
    return [("slot opening", 0.5 * (bore + copper) * middle)]


def _diameter(radius: float) -> str:
    return f"\N{LATIN CAPITAL LETTER O WITH STROKE} {2 * MM * radius:.2f} mm"


def _layer(region: Region) -> int:
    return int(region.name.rsplit("_", 1)[1])


def _barrier_outlines(
    section: CrossSection, turn: complex
) -> dict[tuple[int, int], list[ComplexArray]]:
    """Turned outlines (n,) in m of the cavities of each barrier, by its pole and its number."""
    outlines: dict[tuple[int, int], list[ComplexArray]] = {}
    for region in section.rotor:
        name = base_name(region.name)
        if name.startswith("barrier_"):
            key = pole_of(region.name), int(name.split("_")[1])
            outlines.setdefault(key, []).append(sampled(region.outer) * turn)
    return dict(sorted(outlines.items()))


def _arm_point(outlines: list[ComplexArray]) -> complex:
    """A point deep inside the right half of a barrier, two thirds of the way to its end."""
    outline = max(outlines, key=lambda points: float(points.real.max()))
    low, high = float(outline.real.min()), float(outline.real.max())
    right = max(0.0, low) if high > 0.0 else low
    wanted = right + 0.66 * (high - right)
    crossings = _crossings(outline, wanted)
    return complex(wanted, 0.5 * float(crossings[-2] + crossings[-1]))


def _crossings(outline: ComplexArray, x: float) -> FloatArray:
    """Heights, rising, at which a closed outline (n,) meets the upright line at x."""
    after = np.roll(outline, -1)
    meets = (outline.real < x) != (after.real < x)
    start, end = outline[meets], after[meets]
    share = (x - start.real) / (end.real - start.real)
    return np.sort(start.imag + share * (end.imag - start.imag))


def _carrier_point(
    section: CrossSection,
    turn: complex,
    outlines: dict[int, list[ComplexArray]],
    anchors: list[complex],
) -> complex:
    """The middle of the carrier under barrier 1, or between it and the bore if it is alone."""
    inner = anchors[0]
    edge = np.concatenate(outlines[1])
    if len(anchors) > 1:
        near = np.concatenate(outlines[2])
        inner = 0.5 * (anchors[0] + anchors[1])
        a = edge[np.argmin(abs(edge - inner))]
        b = near[np.argmin(abs(near - a))]
        return complex(0.5 * (a + b))
    a = edge[np.argmin(abs(edge))]
    return complex(0.5 * (a + section.shaft_radius * a / abs(a)))


def _right_hand(ribs: tuple[Rib, ...], turn: complex) -> list[Rib]:
    """One rib of each kind, barrier, pole and width: the one furthest to the right."""
    best: dict[tuple[str, int, int, int], Rib] = {}
    for rib in ribs:
        width = round(rib.width / SAME_WIDTH)  # halves may be unlike
        key = (rib.kind, rib.barrier, pole_of(rib.name), width)
        if key not in best or _x(rib, turn) > _x(best[key], turn):
            best[key] = rib
    return list(best.values())


def _x(rib: Rib, turn: complex) -> float:
    return ((rib.start + rib.end) * turn).real


def _dimensions(section: CrossSection) -> list[tuple[str, str]]:
    diameters = (
        ("stator outer", section.stator_outer_radius),
        ("stator bore", section.stator_bore_radius),
        ("rotor", section.rotor_radius),
        ("shaft bore", section.shaft_radius),
    )
    rows = [
        ("poles, slots", f"{2 * section.pole_pairs}, {section.slots}"),
        ("stack length", f"{MM * section.stack_length:.1f} mm"),
    ]
    return rows + [(name, _diameter(radius)) for name, radius in diameters]


def bare(ax: Axes) -> None:
    """Take frame and ticks away: a drawing with a ruler needs none."""
    for spine in ax.spines.values():
        spine.set_visible(False)
    ax.set_xticks([])
    ax.set_yticks([])
