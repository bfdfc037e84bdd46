"""How fine a machine's sector is meshed: settings, and the sizing of its edges.

Axes: n_edge edges of the outline of one wedge.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.section import CrossSection, Material, base_name, rotor_cell

from .mesh_fold import Fan, folded_points, on_ray
from .mesh_outline import WELD_TOL, ComplexArray, Outline
from .mesh_sizes import Across, SizeSources, Sizing, joined, narrow_places
from .types import IntArray

POSITIONS = 90  # circle edges per pole that put 30 positions in 60 el. degrees on vertices

CLEARANCE_LIMIT = 0.15  # times a magnet's thickness: air no wider beside it is its clearance
RIB_LIMIT = 1.2  # times the width of the nearest rib: iron no wider is meshed as part of it


@dataclass(frozen=True, slots=True)
class MeshSettings:
    """How fine one pole is meshed; lengths relative, so that a machine may have any size.

    Measured at rated current on three demo designs against scale 0.4, worst of four positions:
    torque within 0.10 %, linkages within 0.02 %, with 7 400 to 10 900 triangles. The percentages
    below are errors of the torque, worst position of the worst of the three.
    """

    scale: float = 1.0  # all sizes; 0.5 = twice as fine
    # On the turning circle.
    circle_step: float = 0.9  # side over the air gap; 1.8: 0.50 %
    least_circle_edges: int = 90  # per pole: 30 positions over 60 el. degrees are whole steps
    gap_layers: int = 2  # of elements on each side of the circle, at the least; 1: 0.14 %
    # Magnetic field.
    across_rib: float = 4.0  # elements across a rib; 2: no other error, 5 to 12 % fewer triangles
    # On the demo with 24 slots the next four changed the torque by less than 0.02 % from twice as
    # fine (4, 2.5, 2, 0.04), at a third of the triangles.
    across_iron: float = 1.5  # elements across flux carriers, teeth and tooth tips
    across_air: float = 1.0  # elements across a barrier
    across_clearance: float = 0.4  # elements across a magnet's clearance; 1: same within 0.01 %
    across_copper: float = 1.0  # elements across a slot: a quiet field
    coarsest: float = 0.08  # largest side over pole pitch (arc of the turning circle)
    corner: float = 0.25  # side at the corners of slot mouths over the air gap; 0.5: 0.20 %
    growth: float = 0.7  # change of side per distance; 0.35: same error within 0.01 %
    step_angle: float = math.pi / 6.0  # most that one step may turn along an arc
    # Whether an element that an arc turns over is first cut another way, `mesh_mend`: up to a third
    # fewer nodes of a mesh as coarse as its arcs allow. Finer ones hardly ever have such elements.
    mends: bool = False
    # Stress in the lamination (scale and across_rib hold too): where its adaptive loop begins.
    lamination_across: float = 4.0
    lamination_coarsest: float = 0.04
    lamination_growth: float = 0.35
    lamination_step_angle: float = math.pi / 6.0  # times scale


def circle_edges(section: CrossSection, settings: MeshSettings) -> int:
    """Edges on the sector's part of the turning circle.

    A multiple of twice the slots and of twice the poles, so that half a slot pitch and half a pole
    can be meshed and copied; of 90 a pole too where that is near (30 positions over 60 el. degrees
    are then whole steps).
    """
    poles = section.sector_poles
    step = settings.circle_step * section.gap
    pitch = math.pi * section.circle_radius / section.pole_pairs
    wanted = poles * (max(pitch / step, settings.least_circle_edges) / settings.scale)
    halves = math.lcm(2 * section.sector_slots, 2 * poles)
    common = math.lcm(POSITIONS * poles, halves)
    count = common * max(1, round(wanted / common))
    if not 0.75 * wanted <= count <= 1.5 * wanted:
        count = halves * max(1, round(wanted / halves))
    return count


def gaps_of(fan: Fan) -> tuple[int, ...]:
    """Numbers of the pieces that are the air gap."""
    names = [base_name(region.name) for region in fan.regions]
    return tuple(k for k, name in enumerate(names) if name.startswith("gap_"))


def section_sizing(
    section: CrossSection, fan: Fan, outline: Outline, n_circle: int, settings: MeshSettings
) -> Sizing:
    """Sizes for the magnetic field."""
    gaps = gaps_of(fan)
    circle = section.circle_radius
    pitch = math.pi * circle / section.pole_pairs
    step = section.sector_poles * pitch / n_circle
    coarsest = settings.scale * settings.coarsest * pitch
    sizes = np.full(len(outline.edges), coarsest)
    fixed: dict[int, int] = {}
    for signed in (signed for gap in gaps for signed in outline.loops[gap][0]):
        k = abs(signed) - 1
        edge = outline.edges[k]
        if edge.is_line:
            fixed[k] = max(settings.gap_layers, round(settings.gap_layers / settings.scale))
        elif abs(abs(edge.start) - circle) < WELD_TOL:
            share = abs(edge.sweep) * section.pole_pairs / math.pi / section.sector_poles
            fixed[k] = _whole(n_circle * share)
        else:
            sizes[k] = step * edge.radius / circle
    across = _across(section, fan, settings)
    for gap in gaps:
        across[gap] = None
    rays = _ray_edges(fan, outline)
    narrow = narrow_places(outline, across, _spacing(section), rays)
    least = settings.scale * settings.corner * section.gap
    narrow = SizeSources(narrow.points, np.maximum(narrow.sizes, 0.5 * least))
    corners = _gap_corners(outline, gaps, rays)
    return Sizing(
        edge_sizes=sizes,
        growth=settings.growth,
        step_angle=settings.step_angle,
        sources=joined(
            narrow,
            SizeSources(corners, np.full(corners.size, least)),
            _rib_sources(section, fan, settings),
        ),
        fixed=fixed,
        twins=side_twins(outline, fan.angle) if fan.has_twin_sides else (),
    )


def lamination_sizing(
    section: CrossSection, fan: Fan, outline: Outline, refine: SizeSources, settings: MeshSettings
) -> Sizing:
    """Sizes for stress in the rotor lamination."""
    pitch = math.pi * section.circle_radius / section.pole_pairs
    across = [Across(settings.lamination_across / settings.scale)] * len(outline.loops)
    narrow = narrow_places(outline, across, _spacing(section), _ray_edges(fan, outline))
    coarsest = settings.scale * settings.lamination_coarsest * pitch
    return Sizing(
        edge_sizes=np.full(len(outline.edges), coarsest),
        growth=settings.lamination_growth,
        step_angle=settings.scale * settings.lamination_step_angle,
        sources=joined(narrow, _rib_sources(section, fan, settings), refine),
        twins=side_twins(outline, fan.angle) if fan.has_twin_sides else (),
    )


def side_twins(outline: Outline, angle: float) -> tuple[tuple[int, int, bool], ...]:
    """Edges on the side at angle 0 with those on the side at `angle` that they match, turned.

    Raises:
        ValueError: where an edge has no match.
    """
    ends = outline.points[outline.ends]
    back = ends * np.exp(-1j * angle)
    lower, upper = (_along_ray(outline, ray).tolist() for ray in (0.0, angle))
    twins = [
        (k, j, is_reversed)
        for k in lower
        for j in upper
        for is_reversed in (False, True)
        if np.all(np.abs(ends[k] - (back[j, ::-1] if is_reversed else back[j])) < 2.0 * WELD_TOL)
    ]
    if not len(twins) == len(lower) == len(upper):
        raise ValueError("the two sides of the sector do not have the same edges")
    return tuple(twins)


def _across(section: CrossSection, fan: Fan, settings: MeshSettings) -> list[Across | None]:
    """Elements wanted across each piece."""
    scale, own = settings.scale, rotor_cell(section).ribs
    middles = np.array([0.5 * (r.start + r.end) for r in own], dtype=np.complex128)
    limits = np.array([RIB_LIMIT * rib.width for rib in own])
    ribs = SizeSources(folded_points(fan, middles), limits)
    iron = settings.across_iron / scale
    by_material: dict[Material, Across | None] = {
        "rotor_steel": Across(iron, settings.across_rib / scale, ribs),
        "stator_steel": Across(iron, settings.across_rib / scale, _bridges(section, fan)),
        "air": Across(
            settings.across_air / scale,
            settings.across_clearance / scale,
            _clearances(section, fan),
        ),
        "magnet": Across(iron),
        "copper": Across(settings.across_copper / scale),
        "shaft": None,
        "rivet": Across(settings.across_air / scale),
        "key": Across(settings.across_air / scale),
    }
    return [by_material[region.material] for region in fan.regions]


def _clearances(section: CrossSection, fan: Fan) -> SizeSources:
    """Corners of the magnets, with the width up to which air beside them is their clearance."""
    points: list[complex] = []
    limits: list[float] = []
    for region in section.rotor:
        if region.material == "magnet":
            points += [edge.start for edge in region.outer.edges]
            thickness = min(edge.length for edge in region.outer.edges)
            limits += [CLEARANCE_LIMIT * thickness] * len(region.outer.edges)
    corners = np.array(points, dtype=np.complex128)
    return SizeSources(folded_points(fan, corners), np.array(limits, dtype=np.float64))


def _bridges(section: CrossSection, fan: Fan) -> SizeSources:
    """The iron between bore and closed slots, meshed as a rib is; none where slots have mouths."""
    count = section.sector_slots if section.bridge else 0
    turns = np.exp(2j * math.pi * (np.arange(count) + 0.5) / section.slots)
    middles = (section.stator_bore_radius + 0.5 * section.bridge) * turns
    return SizeSources(folded_points(fan, middles), np.full(count, RIB_LIMIT * section.bridge))


def _spacing(section: CrossSection) -> float:
    """Distance in m between places on edges at which the width beside them is looked up."""
    pitch = math.pi * section.circle_radius / section.pole_pairs
    return min([0.01 * pitch, *(0.5 * rib.width for rib in rotor_cell(section).ribs)])


def _rib_sources(section: CrossSection, fan: Fan, settings: MeshSettings) -> SizeSources:
    """Sizes at both ends of each rib's thinnest place, which samples on edges would only near."""
    ribs = rotor_cell(section).ribs
    ends = np.array([p for rib in ribs for p in (rib.start, rib.end)], dtype=np.complex128)
    widths = np.repeat([rib.width for rib in ribs], 2)
    return SizeSources(folded_points(fan, ends), settings.scale * widths / settings.across_rib)


def _ray_edges(fan: Fan, outline: Outline) -> list[int]:
    """Edges on the two sides of the wedge."""
    return sorted({*_along_ray(outline, 0.0).tolist(), *_along_ray(outline, fan.angle).tolist()})


def _along_ray(outline: Outline, angle: float) -> IntArray:
    """Numbers of the edges on the side at `angle`; half a hole there only has its ends on it."""
    ends = outline.points[outline.ends]
    lines = np.array([edge.is_line for edge in outline.edges])
    return np.flatnonzero(lines & np.all(on_ray(ends, angle), axis=1))


def _gap_corners(outline: Outline, gaps: Sequence[int], rays: Sequence[int]) -> ComplexArray:
    """Points where an edge leaves the gap's wall: slot mouths, open barriers."""
    walls = {abs(s) - 1 for gap in gaps for s in outline.loops[gap][0]}
    wall_points = {int(p) for k in walls for p in outline.ends[k]}
    others = [k for k in range(len(outline.edges)) if k not in walls and k not in rays]
    leaving = {int(p) for k in others for p in outline.ends[k]} & wall_points
    return outline.points[sorted(leaving)]


def _whole(count: float) -> int:
    if abs(count - round(count)) > 1e-6:
        raise ValueError("an arc of the turning circle is not a whole number of steps")
    return round(count)
