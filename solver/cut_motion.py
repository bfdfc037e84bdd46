"""How meshes follow a wear of the punch: every cut edge moves along its normal, out of the steel.

The motion of a node on an edge is the normal of the curved sides that meet there, so an offset is
exact on lines and arcs and needs no key of the design: drawn outlines move likewise. What lies on
the sides of a sector between two moved points moves in proportion; the rest of the outline stays,
and what lies inside follows by `mesh_motion`.
A rim that moves takes the inner circle of the gap with it and half of that the turning circle.
Axes: n_node nodes of a mesh, n_edge edges between steel and what is no steel, 2 directions.
"""

from dataclasses import dataclass

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.section import CrossSection, base_name, rotor_cell

from .design_motion import PartMotion, SizeMotion, size_motion
from .isoparametric import element_edges
from .types import FloatArray, IntArray, PlanarMesh, SectorMesh

ON_CIRCLE_TOL = 1e-8  # m, above rounding and far below an element
ON_SIDE_TOL = 1e-8  # m
# Slope along an edge at its start, end and middle by its three nodes, as in `adjoint_stress`.
_SLOPE: FloatArray = np.array([[-3.0, -1.0, 4.0], [1.0, 3.0, -4.0], [-1.0, 1.0, 0.0]])
_LEFT_OUT = 0.3  # cosine of half a corner's turn below which its point moves no farther


@dataclass(frozen=True, slots=True, eq=False)
class MachineMotion:
    """Motion of all meshes and radii for one cause, in m per unit of it."""

    rotor: FloatArray  # (n_node, 2)
    stator: FloatArray
    lamination: FloatArray
    sizes: SizeMotion


def cut_edges(mesh: PlanarMesh, angle: float | None = None) -> IntArray:
    """Nodes (n_edge, 3) of steel's edges, start, end, middle, steel on the left.

    Args:
        mesh: with regions of steel and others, or of steel alone.
        angle: of the sector in rad, whose sides are no edges; None for a whole circle.
    """
    steel = np.zeros(len(mesh.region_names), dtype=np.bool_)
    for k, name in enumerate(mesh.region_names):
        steel[k] = base_name(name) in ("rotor_iron", "stator_iron")
    edges = element_edges(mesh)[np.repeat(steel[mesh.region_of_elem], 3)]
    met = np.bincount(edges[:, 2], minlength=len(mesh.nodes))
    edges = edges[met[edges[:, 2]] == 1]
    if angle is not None:
        edges = edges[~_on_sides(mesh, angle)[edges[:, 2]]]
    return np.asarray(edges)


def outward_normals(mesh: PlanarMesh, edges: IntArray) -> FloatArray:
    """Motion (n_node, 2) of nodes on `edges` for an offset of 1 m into the steel; 0 elsewhere."""
    along = _SLOPE @ mesh.nodes[edges]
    along /= np.linalg.norm(along, axis=2, keepdims=True)
    left = np.stack([-along[..., 1], along[..., 0]], axis=2)  # into the steel
    total, count = np.zeros_like(mesh.nodes), np.zeros(len(mesh.nodes))
    np.add.at(total, edges, left)
    np.add.at(count, edges, 1.0)
    mean = total / np.maximum(count, 1.0)[:, None]
    # At a corner both sides move by 1: the point by 1 / cos of half the turn along the mean.
    square = np.maximum(np.sum(mean**2, axis=1, keepdims=True), _LEFT_OUT**2)
    return np.asarray(mean / square)


def cut_motion(
    section: CrossSection,
    sector: SectorMesh,
    parts: tuple[PartMotion, PartMotion],
    lamination: tuple[PlanarMesh, PartMotion],
) -> MachineMotion:
    """Steel of the rotor lamination recedes by 1 m on every cut edge: barriers, holes, rim, bore.

    Args:
        section: of the sector.
        sector: its meshes.
        parts: rotor and stator tied to their outlines.
        lamination: mesh of the rotor's steel for its stress, likewise.
    """
    sides = _sides(section)
    fixed = _circles(sector.rotor, {section.gap_ring_radius: -1.0, sector.circle_radius: -0.5})
    rotor = _followed(sector.rotor, parts[0], sides, steel=True, fixed=fixed)
    fixed = _circles(sector.stator, {sector.circle_radius: -0.5, section.stator_bore_radius: 0.0})
    stator = _followed(sector.stator, parts[1], sides, steel=False, fixed=fixed)
    mesh, part = lamination
    iron = _followed(mesh, part, _sides(rotor_cell(section)), steel=True, fixed={})
    return MachineMotion(rotor, stator, iron, SizeMotion(-1.0, 0.0, 0.0))


def bore_motion(
    section: CrossSection,
    sector: SectorMesh,
    parts: tuple[PartMotion, PartMotion],
    lamination: PlanarMesh,
) -> MachineMotion:
    """The stator's bore becomes larger by 1 m of radius: only the gap and the tooth tips change."""
    sides = _sides(section)
    fixed = _circles(sector.rotor, {section.gap_ring_radius: 0.0, sector.circle_radius: 0.5})
    rotor = _followed(sector.rotor, parts[0], sides, steel=False, fixed=fixed)
    fixed = _circles(sector.stator, {sector.circle_radius: 0.5, section.stator_bore_radius: 1.0})
    stator = _followed(sector.stator, parts[1], sides, steel=False, fixed=fixed)
    still = np.zeros_like(lamination.nodes)
    return MachineMotion(rotor, stator, still, SizeMotion(0.0, 1.0, 0.0))


def key_motion(
    design: MachineDesign,
    key: str,
    parts: tuple[PartMotion, PartMotion, PartMotion],
) -> MachineMotion:
    """A key of the design larger by 1 mm or degree; rotor, stator and lamination follow.

    Raises:
        ValueError: where the outline changes in kind on both sides of the key's value.
    """
    rotor, stator, iron = (part.extension.extended(part.velocity(design, key)) for part in parts)
    return MachineMotion(rotor, stator, iron, size_motion(design, key))


@dataclass(frozen=True, slots=True, eq=False)
class _Sides:
    angle: float | None  # of the sector in rad; None for a whole circle
    turns: FloatArray  # rad, where poles meet


def _sides(section: CrossSection) -> _Sides:
    turns = np.asarray(section.pole_angle * np.arange(section.sector_poles + 1), dtype=np.float64)
    return _Sides(None if section.is_full_circle else section.sector_angle, turns)


def _circles(mesh: PlanarMesh, shares: dict[float, float]) -> dict[int, FloatArray]:
    """Radial motions of the nodes on circles of given radii in m, by node."""
    radius = np.hypot(mesh.nodes[:, 0], mesh.nodes[:, 1])
    return {
        int(node): share * mesh.nodes[node] / radius[node]
        for at, share in shares.items()
        for node in np.flatnonzero(np.abs(radius - at) < ON_CIRCLE_TOL)
    }


def _followed(
    mesh: PlanarMesh,
    part: PartMotion,
    sides: "_Sides",
    *,
    steel: bool,
    fixed: dict[int, FloatArray],
) -> FloatArray:
    """Motion (n_node, 2) of a mesh whose steel's edges recede, or that has fixed motions alone."""
    edges = cut_edges(mesh, sides.angle)
    motion = outward_normals(mesh, edges) if steel else np.zeros_like(mesh.nodes)
    known = np.zeros(len(mesh.nodes), dtype=np.bool_)
    known[edges] = True
    for node, own in fixed.items():
        motion[node], known[node] = own, True
    _along_sides(mesh, sides.turns, part.on.node, motion, known)
    return part.extension.extended(motion[part.on.node])


def _along_sides(
    mesh: PlanarMesh,
    turns: FloatArray,
    on: IntArray,
    motion: FloatArray,
    known: "np.ndarray[tuple[int], np.dtype[np.bool_]]",
) -> None:
    """Nodes on lines from the axis, where poles meet, move along them alone, in proportion."""
    place = mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1]
    is_on = np.zeros(len(place), dtype=np.bool_)
    is_on[on] = True
    for turn in turns:
        local = place * np.exp(-1j * turn)
        side = np.flatnonzero(is_on & (np.abs(local.imag) < ON_SIDE_TOL) & (local.real > 0.0))
        direction = np.array([np.cos(turn), np.sin(turn)])
        own = side[known[side]]
        if not own.size:
            continue
        order = own[np.argsort(local.real[own])]
        outward = np.interp(local.real[side], local.real[order], motion[order] @ direction)
        inner = local.real[side] < local.real[order[0]]
        # Inside the bore the shaft's own sides shrink with its rim, to nothing at the axis.
        outward[inner] *= local.real[side][inner] / local.real[order[0]]
        motion[side] = outward[:, None] * direction


def _on_sides(mesh: PlanarMesh, angle: float) -> "np.ndarray[tuple[int], np.dtype[np.bool_]]":
    place = mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1]
    turned = place * np.exp(-1j * angle)
    return np.asarray(
        ((np.abs(place.imag) < ON_SIDE_TOL) & (place.real > 0.0))
        | ((np.abs(turned.imag) < ON_SIDE_TOL) & (turned.real > 0.0))
    )
