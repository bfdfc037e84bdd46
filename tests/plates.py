"""Plates and spinning discs for checks of the stress solver against closed forms.

Regions are drawn with exact arcs, meshed by the tool's mesher, solved by the tool's solver. Places
are complex numbers in m.
"""

import cmath
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from lamwright.geometry.curves import Edge, Path, arc, circle, line, reversed_edge, reversed_path
from lamwright.geometry.design import MagnetisationCurve, Sourced, SteelCard
from lamwright.geometry.section import Region
from lamwright.solver.elastic import (
    ElasticBody,
    ElasticMaterial,
    Traction,
    centrifugal_force,
    edge_force,
    elastic_body,
    free_strain_force,
)
from lamwright.solver.isoparametric import boundary_edges
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.stiffness import displacement
from lamwright.solver.stress_recovery import recovered_stress, turned_stress
from lamwright.solver.supports import (
    Supports,
    coupled_sides,
    unsupported,
    with_coupled_sides,
    with_fixed,
    with_roller,
)
from lamwright.solver.types import FloatArray, IntArray, PlanarMesh

MPA = 1e6
STEEL = ElasticMaterial(youngs_modulus=210e9, poissons_ratio=0.3, density=7650.0)
SPEED = 18_000.0 * math.pi / 30.0  # rad/s
NODE_TOL = 1e-9  # m, of a place that is a node


def steel_card() -> SteelCard:
    """The same steel as a card; the rest of it invented."""

    def sourced(value: float) -> Sourced:
        return Sourced(value=value, source="check values, group C")

    return SteelCard(
        name="check values",
        density_kg_per_m3=sourced(STEEL.density),
        youngs_modulus_gpa=sourced(1e-9 * STEEL.youngs_modulus),
        poissons_ratio=sourced(STEEL.poissons_ratio),
        yield_strength_mpa=sourced(350.0),
        tensile_strength_mpa=sourced(480.0),
        magnetisation=MagnetisationCurve(
            b_t=(0.5, 1.0, 1.5), h_a_per_m=(80.0, 150.0, 1500.0), source="invented"
        ),
    )


Where = Callable[[np.ndarray], np.ndarray]  # places -> truth
Sizes = Callable[[Edge], float]


@dataclass(frozen=True, eq=False)
class Field:
    """A solved plate."""

    body: ElasticBody
    moved: FloatArray  # (n_node, 2), m
    stress: FloatArray  # (n_node, 3), Pa
    supports: Supports

    @property
    def places(self) -> np.ndarray:
        """Nodes as complex numbers in m."""
        return self.body.mesh.nodes @ np.array([1.0, 1.0j])

    def node(self, place: complex) -> int:
        """The node at a place."""
        away = np.abs(self.places - place)
        node = int(np.argmin(away))
        assert away[node] < NODE_TOL
        return node

    def polar(self, place: complex, centre: complex = 0.0) -> FloatArray:
        """Radial, hoop and shear stress (3,) in Pa at a node, about a centre."""
        return turned_stress(self.stress[self.node(place)], -cmath.phase(place - centre))

    def outward(self, place: complex) -> float:
        """Radial displacement in m at a node."""
        moved = complex(*self.moved[self.node(place)])
        return (moved * (place / abs(place)).conjugate()).real


def sector(inner: float, outer: float, angle: float, holes: Sequence[Path] = ()) -> Region:
    """A ring, or a disc for `inner` = 0, over the angles 0 to `angle` rad."""
    side = cmath.exp(1j * angle)
    rim = arc(complex(outer), outer * side, 0j, ccw=True)
    edges = [line(complex(inner), complex(outer)), rim, line(outer * side, inner * side)]
    if inner > 0.0:
        edges.append(reversed_edge(arc(complex(inner), inner * side, 0j, ccw=True)))
    return Region("plate", "rotor_steel", Path(tuple(edges)), tuple(holes))


def polygon(*corners: complex) -> Path:
    """A closed path of lines."""
    return Path(tuple(line(a, b) for a, b in zip(corners, (*corners[1:], corners[0]), strict=True)))


def round_hole(centre: complex, radius: float) -> Path:
    """A hole's path, clockwise, with nodes at its places of angle 0 and 180 degrees."""
    return reversed_path(circle(centre, radius))


def fine_arcs(fine: float, coarse: float, radius: float) -> Sizes:
    """Sides of `fine` m on arcs of at most `radius` m, of `coarse` m elsewhere."""
    return lambda edge: fine if edge.radius < radius * 1.001 else coarse


def spun(
    region: Region,
    angle: float,
    sizes: Sizes,
    speed: float = SPEED,
    material: ElasticMaterial = STEEL,
    heat: Callable[[FloatArray], FloatArray] | None = None,
) -> Field:
    """A sector of `angle` rad with coupled sides, spun and heated (nodes to free strain)."""
    mesh = mesh_regions([region], sizes, turn_sides=angle)
    return spun_mesh(mesh, angle, speed, material, heat)


def spun_mesh(
    mesh: PlanarMesh,
    angle: float,
    speed: float = SPEED,
    material: ElasticMaterial = STEEL,
    heat: Callable[[FloatArray], FloatArray] | None = None,
) -> Field:
    """The same on a mesh at hand."""
    body = elastic_body(mesh, material)
    sides = coupled_sides(mesh, angle)
    supports = with_coupled_sides(unsupported(mesh), mesh, sides)
    supports = with_fixed(supports, sides.first[:1], 1)
    force = centrifugal_force(body, speed)
    strain = None
    if heat is not None:
        strain = heat(mesh.nodes)[mesh.elements]
        force += free_strain_force(body, strain)
    moved = displacement(body, force, supports)
    coupled = np.isin(np.arange(len(mesh.nodes)), np.concatenate([sides.first, sides.second]))
    edges = boundary_edges(mesh)
    free = edges[~coupled[edges[:, 2]]]
    return Field(body, moved, recovered_stress(body, moved, free, sides, strain), supports)


def pulled(
    mesh: PlanarMesh,
    rollers: Sequence[tuple[Where, complex]],
    loads: Sequence[tuple[Where, Traction]],
    stretched: Sequence[tuple[Where, complex, float]] = (),
    extra: FloatArray | float = 0.0,
    pin: complex | None = None,
) -> Field:
    """A plate on rollers (where, normal) under tractions (where, traction).

    `stretched` sides (where, normal, value) are moved along their normal by a value in m; `extra`
    are more nodal forces in N/m; the node at `pin` is held along y.
    """
    supports = unsupported(mesh)
    for where, normal in rollers:
        supports = with_roller_or_fixed(supports, nodes_on(mesh, where), normal)
    for where, normal, value in stretched:
        supports = with_roller_or_fixed(supports, nodes_on(mesh, where), normal, value)
    body = elastic_body(mesh, STEEL)
    if pin is not None:
        held = nodes_on(mesh, lambda z: np.abs(z - pin) < NODE_TOL)
        supports = with_fixed(supports, held, 1)
    force = np.zeros((len(mesh.nodes), 2)) + extra
    free = boundary_edges(mesh)
    for where, traction in loads:
        chosen = edges_on(mesh, where)
        force += edge_force(mesh, chosen, traction)
        free = free[~np.isin(free[:, 2], chosen[:, 2])]
    for where, *_ in (*rollers, *stretched):
        free = free[~np.isin(free[:, 2], edges_on(mesh, where)[:, 2])]
    moved = displacement(body, force, supports)
    return Field(body, moved, recovered_stress(body, moved, free), supports)


def balanced_supports(reach: float) -> list[tuple[Where, complex]]:
    """Supports of three components at the places +-reach, which balanced loads leave unloaded."""
    return [
        (lambda z: np.abs(z + reach) < NODE_TOL, 1),
        (lambda z: (np.abs(np.abs(z.real) - reach) < NODE_TOL) & (np.abs(z.imag) < NODE_TOL), 1j),
    ]


def with_roller_or_fixed(
    supports: Supports, nodes: IntArray, normal: complex, value: float = 0.0
) -> Supports:
    """Rollers whose normals are along x or y, where frames stay: a corner may be on both."""
    axis = {1: 0, 1j: 1}.get(normal)
    if axis is None:
        return with_roller(supports, nodes, normal)
    return with_fixed(supports, nodes, axis, value)


def summed_fields(first: Field, second: Field, share: float) -> Field:
    """The first field plus `share` times the second on the same mesh (superposition)."""
    return replace(
        first,
        moved=first.moved + share * second.moved,
        stress=first.stress + share * second.stress,
    )


def nodes_on(mesh: PlanarMesh, where: Where) -> IntArray:
    """Nodes at the places for which `where` is true."""
    return np.flatnonzero(where(mesh.nodes @ np.array([1.0, 1.0j])))


def edges_on(mesh: PlanarMesh, where: Where) -> IntArray:
    """Boundary edges (n, 3) all of whose nodes are at places for which `where` is true."""
    edges = boundary_edges(mesh)
    return edges[np.all(where(mesh.nodes[edges] @ np.array([1.0, 1.0j])), axis=1)]


def at_x(x: float) -> Where:
    """The line at `x` in m."""
    return lambda z: np.abs(z.real - x) < NODE_TOL


def at_y(y: float) -> Where:
    """The line at `y` in m."""
    return lambda z: np.abs(z.imag - y) < NODE_TOL


def at_radius(radius: float) -> Where:
    """The circle of `radius` in m about the origin."""
    return lambda z: np.abs(np.abs(z) - radius) < NODE_TOL


def uniform(tx: float, ty: float) -> Traction:
    """A constant traction in Pa."""
    return lambda points, normals: np.broadcast_to(np.array([tx, ty]), points.shape)


def of_stress(stress: Callable[[np.ndarray], FloatArray]) -> Traction:
    """The traction of a stress field (places to (n, 3) in Pa) on any edge."""

    def traction(points: FloatArray, normals: FloatArray) -> FloatArray:
        s = stress(points @ np.array([1.0, 1.0j]))
        tx = s[:, 0] * normals[:, 0] + s[:, 2] * normals[:, 1]
        return np.stack([tx, s[:, 2] * normals[:, 0] + s[:, 1] * normals[:, 1]], axis=1)

    return traction
