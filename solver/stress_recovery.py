"""Stress at the nodes from the displacement, and how far it is from the elements' own.

Inside, the stress at a node is the mean of its elements' stresses there. On a free edge only the
stress along the edge is not zero, and it follows from the strain along the edge alone,
sigma_t = E (epsilon_t - epsilon_free): exact, and much nearer to the truth than the mean,
because it takes no derivative across the edge. Measured at a hole under tension (Kirsch) with 24
elements round it: 0.4 % instead of 2.9 %; patch fits through the three inner points erred by
3.0 % (linear, element by element) and 5.5 % (quadratic, by patches of inner vertices).
Source: derived (plane stress, zero traction); the error indicator is that of Zienkiewicz and
Zhu, Int. J. Numer. Methods Eng. 24 (1987), from memory.
Axes: n_node, n_elem, n_edge, 3 stresses xx yy xy, 6 nodes.
"""

import numpy as np

from .elastic import ElasticBody, inner_stress, node_stress, summed
from .isoparametric import shape, six_points
from .supports import CoupledSides
from .types import FloatArray, IntArray, PlanarMesh


def turned_stress(stress: FloatArray, angle: float) -> FloatArray:
    """Stresses (..., 3) of the same states turned by `angle` in rad with their bodies."""
    c, s = np.cos(angle), np.sin(angle)
    turn = np.array(
        [[c * c, s * s, -2 * s * c], [s * s, c * c, 2 * s * c], [s * c, -s * c, c * c - s * s]]
    )
    return np.asarray(stress @ turn.T)


def recovered_stress(
    body: ElasticBody,
    moved: FloatArray,
    free_edges: IntArray,
    sides: CoupledSides | None = None,
    free_strain: FloatArray | None = None,
) -> FloatArray:
    """Stress (n_node, 3) in Pa at the nodes.

    Elements of unlike materials are averaged too: take the stress on the line between two parts
    from `elastic.node_stress`.

    Args:
        body: the body.
        moved: (n_node, 2), displacement in m.
        free_edges: (n_edge, 3), nodes of boundary edges without traction.
        sides: coupled sides, whose partner nodes see the elements of both.
        free_strain: (n_elem, 6), as in `elastic.free_strain_force`.
    """
    mesh = body.mesh
    values = node_stress(body, moved, free_strain)
    stress = _node_means(mesh, mesh.elements, values, sides)
    if len(free_edges):
        along = _surface_stress(body, moved, free_edges, free_strain)
        on_edge = np.unique(free_edges)
        stress[on_edge] = _node_means(mesh, free_edges, along, sides)[on_edge]
    return stress


def _node_means(
    mesh: PlanarMesh, nodes: IntArray, values: FloatArray, sides: CoupledSides | None
) -> FloatArray:
    """Means (n_node, 3) of the `values` (n, m, 3) that belong to `nodes` (n, m)."""
    n_node = len(mesh.nodes)
    count = np.bincount(nodes.ravel(), minlength=n_node)
    total = summed(nodes, values, n_node)
    if sides is not None:
        both = total[sides.first] + turned_stress(total[sides.second], -sides.angle)
        total[sides.first], total[sides.second] = both, turned_stress(both, sides.angle)
        count[sides.first] += count[sides.second]
        count[sides.second] = count[sides.first]
    return np.asarray(total / np.maximum(count, 1)[:, None])


def _surface_stress(
    body: ElasticBody, moved: FloatArray, edges: IntArray, free_strain: FloatArray | None
) -> FloatArray:
    """Stress (n_edge, 3 nodes, 3) at the start, end and middle of free edges."""
    mesh = body.mesh
    slope = np.array([[-3.0, -1.0, 4.0], [1.0, 3.0, -4.0], [-1.0, 1.0, 0.0]])  # (place, node)
    along, moves = slope @ mesh.nodes[edges], slope @ moved[edges]
    length2 = np.sum(along**2, axis=2)
    strain = np.sum(along * moves, axis=2) / length2
    element, place = _owner(mesh, edges)
    if free_strain is not None:
        strain -= free_strain[element[:, None], place]
    stress = body.youngs_modulus[element][:, None] * strain
    tx2, ty2, txy = along[..., 0] ** 2, along[..., 1] ** 2, along[..., 0] * along[..., 1]
    return np.asarray(np.stack([tx2, ty2, txy], axis=2) * (stress / length2)[..., None])


def _owner(mesh: PlanarMesh, edges: IntArray) -> tuple[IntArray, IntArray]:
    """The element (n_edge,) of boundary edges and the edges' nodes (n_edge, 3) within it."""
    element_of_middle = np.zeros(len(mesh.nodes), dtype=np.int64)
    element_of_middle[mesh.elements[:, 3:]] = np.arange(len(mesh.elements))[:, None]
    element = element_of_middle[edges[:, 2]]
    same = mesh.elements[element][:, None, :] == edges[:, :, None]
    return element, np.argmax(same, axis=2)


def stress_defect(
    body: ElasticBody,
    moved: FloatArray,
    nodal: FloatArray,
    free_strain: FloatArray | None = None,
) -> FloatArray:
    """Energy norm (n_elem,) in sqrt(N) of recovered minus element stress, per metre of thickness.

    sqrt(int (sigma* - sigma) D^-1 (sigma* - sigma) dA), `nodal` (n_node, 3) being sigma*.
    """
    places, _ = six_points()
    own = inner_stress(body, moved, free_strain)
    star = np.einsum("pi,ike->pke", shape(places), nodal[body.mesh.elements].transpose(1, 2, 0))
    sx, sy, txy = (star[:, k] - own[..., k].T for k in range(3))  # (n_point, n_elem) each
    nu = body.poissons_ratio
    # s D^-1 s = (sx^2 + sy^2 - 2 nu sx sy + 2 (1 + nu) t^2) / E, plane stress, derived.
    density = sx * sx + sy * sy - 2.0 * nu * sx * sy + 2.0 * (1.0 + nu) * txy * txy
    energy = np.sum(body.quad.weight.T * density, axis=0) / body.youngs_modulus
    return np.asarray(np.sqrt(energy))
