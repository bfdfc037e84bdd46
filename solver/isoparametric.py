"""Second-order triangles with curved edges: shape functions, map, quadrature, edges.

Reference triangle (0, 0), (1, 0), (0, 1); nodes in the order of `types`: corners 0 1 2, then
middles of the edges 01, 12, 02. The map is of second order too, so that an arc is met with an
error of fourth order in the edge's length (derived).
Axes: n_node, n_elem, n_point places in the reference triangle, 2 directions, 6 nodes.
"""

import numpy as np

from .types import FloatArray, IntArray, PlanarMesh, Quadrature

# Places of an element's own nodes in the reference triangle.
NODE_PLACES: FloatArray = np.array(
    [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0], [0.5, 0.0], [0.5, 0.5], [0.0, 0.5]]
)
# The nodes of an element's three edges: start, end, middle, the element on the left.
EDGE_NODES: IntArray = np.array([[0, 1, 3], [1, 2, 4], [2, 0, 5]])


def _symmetric_points(inner: float, weight: float) -> tuple[list[list[float]], list[float]]:
    """Three points (inner, inner), (1 - 2 inner, inner), ... of equal weight."""
    outer = 1.0 - 2.0 * inner
    return [[inner, inner], [outer, inner], [inner, outer]], [0.5 * weight] * 3


def six_points() -> tuple[FloatArray, FloatArray]:
    """Places (6, 2) and weights (6,) of the rule exact to degree 4; weights sum to 1/2.

    Source: Dunavant, Int. J. Numer. Methods Eng. 21 (1985), from memory; a test integrates
    every monomial of degree 4.
    """
    near, near_weight = _symmetric_points(0.445948490915965, 0.223381589678011)
    far, far_weight = _symmetric_points(0.091576213509771, 0.109951743655322)
    return np.array(near + far), np.array(near_weight + far_weight)


def shape(places: FloatArray) -> FloatArray:
    """Shape functions (n_point, 6) at places (n_point, 2) of the reference triangle."""
    l1, l2 = places[:, 0], places[:, 1]
    l0 = 1.0 - l1 - l2
    corners = [v * (2.0 * v - 1.0) for v in (l0, l1, l2)]
    return np.stack([*corners, 4.0 * l0 * l1, 4.0 * l1 * l2, 4.0 * l0 * l2], axis=1)


def shape_slope(places: FloatArray) -> FloatArray:
    """Derivatives (n_point, 2, 6) of the shape functions by the two reference coordinates."""
    l1, l2 = places[:, 0], places[:, 1]
    l0 = 1.0 - l1 - l2
    zero = np.zeros_like(l0)
    by_first = [1.0 - 4.0 * l0, 4.0 * l1 - 1.0, zero, 4.0 * (l0 - l1), 4.0 * l2, -4.0 * l2]
    by_second = [1.0 - 4.0 * l0, zero, 4.0 * l2 - 1.0, -4.0 * l1, 4.0 * l1, 4.0 * (l0 - l2)]
    return np.stack([np.stack(by_first, axis=1), np.stack(by_second, axis=1)], axis=1)


def linear_shape(places: FloatArray) -> FloatArray:
    """First-order shape functions (n_point, 3) of the corners alone."""
    l1, l2 = places[:, 0], places[:, 1]
    return np.stack([1.0 - l1 - l2, l1, l2], axis=1)


def linear_shape_slope(places: FloatArray) -> FloatArray:
    """Their derivatives (n_point, 2, 3), the same at all places."""
    return np.tile([[-1.0, 1.0, 0.0], [-1.0, 0.0, 1.0]], (places.shape[0], 1, 1))


def points_at(mesh: PlanarMesh, places: FloatArray) -> FloatArray:
    """Positions (n_elem, n_point, 2) in m of reference places (n_point, 2) in each element."""
    return np.asarray(shape(places) @ mesh.nodes[mesh.elements])


def gradients_at(corners: FloatArray, places: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Physical gradients of the shape functions and the determinant of the map.

    In memory the elements come last, which makes every product a run of long loops: 1.4 ms for
    2 000 elements at six places, a fifth of what batched small matrix products take (measured).

    Args:
        corners: (n_elem, 6, 2), positions of the elements' nodes in m.
        places: (n_point, 2) in the reference triangle.

    Returns:
        gradients (n_elem, n_point, 2, 6) in 1/m; determinants (n_elem, n_point) in m^2.
    """
    slope = shape_slope(places)  # (n_point, 2, 6)
    x, y = np.ascontiguousarray(corners.transpose(2, 1, 0))  # (6, n_elem) each
    (x_1, x_2), (y_1, y_2) = (np.moveaxis(slope @ c, 1, 0) for c in (x, y))  # (n_point, n_elem)
    determinant = x_1 * y_2 - x_2 * y_1
    first, second = np.moveaxis(slope, 1, 0)[..., None]  # (n_point, 6, 1) each
    grad = np.empty((len(places), 2, 6, len(corners)))
    grad[:, 0] = first * (y_2 / determinant)[:, None] - second * (y_1 / determinant)[:, None]
    grad[:, 1] = second * (x_1 / determinant)[:, None] - first * (x_2 / determinant)[:, None]
    return grad.transpose(3, 0, 1, 2), determinant.T


def quadrature(mesh: PlanarMesh) -> Quadrature:
    """Gradients and weights of all elements at the six points."""
    places, weights = six_points()
    grad, determinant = gradients_at(mesh.nodes[mesh.elements], places)
    return Quadrature(grad=grad, weight=weights * determinant)


def element_edges(mesh: PlanarMesh) -> IntArray:
    """Nodes (3 n_elem, 3) of every element's edges: start, end, middle; element on the left."""
    return np.asarray(mesh.elements[:, EDGE_NODES].reshape(-1, 3))


def boundary_edges(mesh: PlanarMesh) -> IntArray:
    """Nodes (n_edge, 3) of the edges that have one element: start, end, middle, body on the left.

    A middle node belongs to one edge only, so an edge is on the boundary when its middle
    node is met once.
    """
    edges = element_edges(mesh)
    met = np.bincount(edges[:, 2], minlength=len(mesh.nodes))
    return np.asarray(edges[met[edges[:, 2]] == 1])
