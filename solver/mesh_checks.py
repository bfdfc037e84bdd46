"""Checks of a curved second-order triangle mesh: Jacobians, areas, angles.

Axes: n_elem elements, 6 nodes of a triangle (solver/types.py has their order).
"""

import numpy as np

from .types import FloatArray, PlanarMesh

# Barycentric coordinates of the six nodes, in the order of solver/types.py.
NODE_PLACES = np.array(
    [[1, 0, 0], [0, 1, 0], [0, 0, 1], [0.5, 0.5, 0], [0, 0.5, 0.5], [0.5, 0, 0.5]]
)


def jacobian_at(nodes: FloatArray, places: FloatArray) -> FloatArray:
    """Jacobian determinant (twice the area density) of second-order triangles.

    Args:
        nodes: (n_elem, 6, 2) in m.
        places: (n_place, 3) barycentric coordinates.

    Returns:
        (n_elem, n_place) in m^2.
    """
    slope = np.array([_shape_slopes(*place) for place in places])  # (n_place, 6, 2)
    jac = np.einsum("eid,pij->epdj", nodes, slope, optimize=True)
    return np.asarray(jac[..., 0, 0] * jac[..., 1, 1] - jac[..., 0, 1] * jac[..., 1, 0])


def _shape_slopes(l0: float, l1: float, l2: float) -> FloatArray:
    """Derivatives (6, 2) of the six shape functions by (l1, l2), with l0 = 1 - l1 - l2."""
    return np.array(
        [
            [1 - 4 * l0, 1 - 4 * l0],
            [4 * l1 - 1, 0.0],
            [0.0, 4 * l2 - 1],
            [4 * (l0 - l1), -4 * l1],
            [4 * l2, 4 * l1],
            [-4 * l2, 4 * (l0 - l2)],
        ]
    )


def least_jacobian_share(nodes: FloatArray) -> FloatArray:
    """Lower bound of the Jacobian inside each element over its mean; positive = valid.

    The determinant is a quadratic; its Bernstein coefficients bound it from below everywhere
    (derived), so a positive value proves the element valid, not only at sampled points.
    """
    at = jacobian_at(nodes, NODE_PLACES)
    corner, middle = at[:, :3], at[:, 3:]
    pairs = 0.5 * (corner[:, [0, 1, 0]] + corner[:, [1, 2, 2]])
    bernstein = np.concatenate([corner, 2.0 * middle - pairs], axis=1)
    return np.asarray(bernstein.min(axis=1) / np.abs(bernstein.mean(axis=1)))


def element_areas(mesh: PlanarMesh) -> FloatArray:
    """Areas (n_elem,) in m^2 of the curved elements, exact for second-order edges."""
    # The determinant is quadratic: the rule of the edge middles integrates it exactly.
    at = jacobian_at(mesh.nodes[mesh.elements], NODE_PLACES[3:])
    return np.asarray(at.sum(axis=1) / 6.0)


def least_angles(mesh: PlanarMesh) -> FloatArray:
    """Least corner angle (n_elem,) in rad of each triangle drawn with straight sides."""
    corner = mesh.nodes[mesh.elements[:, :3]]
    side = np.roll(corner, -1, axis=1) - corner
    side /= np.linalg.norm(side, axis=2, keepdims=True)
    cosine = -np.einsum("ekd,ekd->ek", side, np.roll(side, 1, axis=1))
    return np.asarray(np.arccos(np.clip(cosine, -1.0, 1.0)).min(axis=1))
