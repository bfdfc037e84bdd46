"""Plane stress of a sheet on curved second-order triangles: material, loads, stresses.

    sigma = D (B u - epsilon_free),  f = int N^T rho omega^2 r dA + int N^T traction ds
                                         + int B^T D epsilon_free dA

per metre of thickness. Source: displacement method, textbook matter; the law is that of plane
stress (e.g. Timoshenko & Goodier). `stiffness` solves K u = f. Loads are nodal forces and simply
add: `centrifugal_force`, `edge_force`, `free_strain_force`.
Axes: n_node, n_elem, n_qp, 2 directions, 3 strains xx yy xy (xy engineering), 6 nodes.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from .isoparametric import NODE_PLACES, gradients_at, points_at, quadrature, shape, six_points
from .types import FloatArray, IntArray, PlanarMesh, Quadrature

# Positions and outward unit normals, both (n, 2), -> tractions (n, 2) in Pa.
Traction = Callable[[FloatArray, FloatArray], FloatArray]


@dataclass(frozen=True, slots=True)
class ElasticMaterial:
    """An isotropic linear elastic material (SI)."""

    youngs_modulus: float  # Pa
    poissons_ratio: float
    density: float  # kg/m^3


@dataclass(frozen=True, slots=True, eq=False)
class ElasticBody:
    """A mesh with what its elements are made of, and its gradients."""

    mesh: PlanarMesh
    quad: Quadrature  # at the six points
    node_grad: FloatArray  # (n_elem, 6, 2, 6), 1/m, gradients at the elements' own nodes
    youngs_modulus: FloatArray  # (n_elem,), Pa
    poissons_ratio: FloatArray  # (n_elem,)
    density: FloatArray  # (n_elem,), kg/m^3


def elastic_body(
    mesh: PlanarMesh, material: ElasticMaterial | Sequence[ElasticMaterial]
) -> ElasticBody:
    """The mesh made of one material, or of one material per entry of `mesh.region_names`."""
    if isinstance(material, ElasticMaterial):
        material = [material] * len(mesh.region_names)
    region = mesh.region_of_elem
    return ElasticBody(
        mesh=mesh,
        quad=quadrature(mesh),
        node_grad=gradients_at(mesh.nodes[mesh.elements], NODE_PLACES)[0],
        youngs_modulus=np.array([m.youngs_modulus for m in material])[region],
        poissons_ratio=np.array([m.poissons_ratio for m in material])[region],
        density=np.array([m.density for m in material])[region],
    )


def summed(nodes: IntArray, values: FloatArray, n_node: int) -> FloatArray:
    """Sums (n_node, k) of the `values` (..., k) that belong to `nodes` (...)."""
    out = np.empty((n_node, values.shape[-1]))
    for k in range(out.shape[1]):
        out[:, k] = np.bincount(nodes.ravel(), values[..., k].ravel(), n_node)
    return out


def centrifugal_force(body: ElasticBody, speed: float, centre: complex = 0j) -> FloatArray:
    """Nodal forces (n_node, 2) in N/m of rho omega^2 r at `speed` in rad/s, r from `centre`."""
    places, _ = six_points()
    radius = points_at(body.mesh, places) - [centre.real, centre.imag]  # (n_elem, n_qp, 2), m
    pull = (body.density[:, None] * body.quad.weight)[..., None] * speed**2 * radius
    force = np.einsum("qi,eqd->eid", shape(places), pull)
    return summed(body.mesh.elements, force, len(body.mesh.nodes))


def mass_centre(body: ElasticBody) -> complex:
    """Centre of mass in m."""
    mass = body.density[:, None] * body.quad.weight
    x, y = np.einsum("eq,eqd->d", mass, points_at(body.mesh, six_points()[0])) / mass.sum()
    return complex(x, y)


def without_rigid_motion(body: ElasticBody, moved: FloatArray) -> FloatArray:
    """Displacement (n_node, 2) in m less its mean shift and turn, each weighted by mass."""
    shapes = shape(six_points()[0])
    mass = body.density[:, None] * body.quad.weight  # (n_elem, n_qp)
    at = points_at(body.mesh, six_points()[0]) @ [1.0, 1.0j]  # (n_elem, n_qp)
    u = np.einsum("qi,ei->eq", shapes, (moved @ [1.0, 1.0j])[body.mesh.elements])
    centre, shift = (np.sum(mass * value) / mass.sum() for value in (at, u))
    arm = at - centre
    turn = np.sum(mass * (arm.conj() * u).imag) / np.sum(mass * np.abs(arm) ** 2)
    left = (moved - 1j * turn * body.mesh.nodes) @ [1.0, 1.0j] - shift + 1j * turn * centre
    return np.stack([left.real, left.imag], axis=1)


def free_strain_force(body: ElasticBody, free_strain: FloatArray) -> FloatArray:
    """Nodal forces (n_node, 2) in N/m of an isotropic free strain (heat, or an oversize part).

    `free_strain` (n_elem, 6) is given at the nodes of each element, so it may jump between them.
    """
    at_qp = free_strain @ shape(six_points()[0]).T  # (n_elem, n_qp)
    # D (1, 1, 0) = E / (1 - nu) (1, 1, 0), derived.
    pressure = (body.youngs_modulus / (1.0 - body.poissons_ratio))[:, None] * at_qp
    force = np.einsum("eq,eqdi->eid", body.quad.weight * pressure, body.quad.grad)
    return summed(body.mesh.elements, force, len(body.mesh.nodes))


def edge_force(mesh: PlanarMesh, edges: IntArray, traction: Traction) -> FloatArray:
    """Nodal forces (n_node, 2) in N/m of a traction on `edges` (n_edge, 3): start, end, middle.

    Three Gauss points; the body is on the left of an edge, so its normal points to the right.
    """
    xi, weight = np.polynomial.legendre.leggauss(3)
    s = 0.5 * (xi + 1.0)
    n = np.stack([(1 - s) * (1 - 2 * s), s * (2 * s - 1), 4 * s * (1 - s)], axis=1)
    dn = np.stack([4 * s - 3, 4 * s - 1, 4 - 8 * s], axis=1)
    points, tangent = n @ mesh.nodes[edges], dn @ mesh.nodes[edges]  # (n_edge, 3, 2)
    length = np.hypot(tangent[..., 0], tangent[..., 1])  # m per unit of s
    normal = np.stack([tangent[..., 1], -tangent[..., 0]], axis=-1) / length[..., None]
    value = traction(points.reshape(-1, 2), normal.reshape(-1, 2)).reshape(points.shape)
    force = np.einsum("q,eq,qi,eqd->eid", 0.5 * weight, length, n, value)
    return summed(edges, force, len(mesh.nodes))


def stress_of_strain(body: ElasticBody, strain: FloatArray) -> FloatArray:
    """Stresses (n_elem, n_point, 3) in Pa of strains (n_elem, n_point, 3), plane stress."""
    nu = body.poissons_ratio[:, None]
    c = body.youngs_modulus[:, None] / (1.0 - nu**2)
    exx, eyy, gxy = (strain[..., k] for k in range(3))
    return _stacked(c * (exx + nu * eyy), c * (eyy + nu * exx), 0.5 * c * (1.0 - nu) * gxy)


def node_stress(
    body: ElasticBody, moved: FloatArray, free_strain: FloatArray | None = None
) -> FloatArray:
    """Stresses (n_elem, 6, 3) in Pa of each element at its own nodes."""
    return _stress(body, moved, body.node_grad, free_strain)


def inner_stress(
    body: ElasticBody, moved: FloatArray, free_strain: FloatArray | None = None
) -> FloatArray:
    """Stresses (n_elem, 6, 3) in Pa of each element at the six quadrature points."""
    at_qp = None if free_strain is None else free_strain @ shape(six_points()[0]).T
    return _stress(body, moved, body.quad.grad, at_qp)


def _stress(
    body: ElasticBody, moved: FloatArray, grad: FloatArray, free_strain: FloatArray | None
) -> FloatArray:
    """Stresses (n_elem, n_point, 3) from gradients and free strains (n_elem, n_point)."""
    ux, uy = np.ascontiguousarray(moved[body.mesh.elements].transpose(2, 1, 0))  # (6, n_elem)
    by_x, by_y = np.moveaxis(grad, 0, -1).transpose(1, 0, 2, 3)  # (n_point, 6, n_elem) each
    ux_x, uy_y = np.einsum("pie,ie->ep", by_x, ux), np.einsum("pie,ie->ep", by_y, uy)
    slide = np.einsum("pie,ie->ep", by_y, ux) + np.einsum("pie,ie->ep", by_x, uy)
    free = 0.0 if free_strain is None else free_strain
    return stress_of_strain(body, _stacked(ux_x - free, uy_y - free, slide))


def _stacked(xx: FloatArray, yy: FloatArray, xy: FloatArray) -> FloatArray:
    """Three components (n_elem, n_point) as one array (n_elem, n_point, 3), elements last."""
    return np.stack([xx.T, yy.T, xy.T]).transpose(2, 1, 0)


def von_mises(stress: FloatArray) -> FloatArray:
    """Equivalent stress (...) in Pa of plane stresses (..., 3): sqrt(sx^2 - sx sy + sy^2 + 3 t^2).

    Source: von Mises 1913, plane stress form, textbook matter.
    """
    sx, sy, txy = stress[..., 0], stress[..., 1], stress[..., 2]
    return np.sqrt(sx * sx - sx * sy + sy * sy + 3.0 * txy * txy)
