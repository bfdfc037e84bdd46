"""Values of a nodal field at any points of a mesh of curved second-order triangles.

The element's map is inverted by Newton's method, from the element's middle, in every element
whose bounding box holds the point; the element that holds it best is taken, so a point that lies
beyond a curved edge by the edge's own error still gets a value.
Axes: n_node, n_point points, n_value values per node.
"""

import numpy as np

from .isoparametric import shape, shape_slope
from .types import FloatArray, IntArray, PlanarMesh

NEWTON_STEPS = 8  # quadratic from the middle of a valid element: 4 to 5 suffice
OUTSIDE_TOL = 0.02  # of an element, how far outside its best element a point may lie
BOX_MARGIN = 0.05  # of the box; a curved side bulges past its corners


def values_at(mesh: PlanarMesh, values: FloatArray, points: FloatArray) -> FloatArray:
    """Values (n_point, n_value) at `points` (n_point, 2) in m of a field (n_node, n_value).

    Raises:
        ValueError: where a point lies outside the mesh.
    """
    element, place = locate(mesh, points)
    return np.asarray(np.einsum("pi,piv->pv", shape(place), values[mesh.elements[element]]))


def locate(mesh: PlanarMesh, points: FloatArray) -> tuple[IntArray, FloatArray]:
    """The element (n_point,) of each point and the place (n_point, 2) within it.

    Raises:
        ValueError: where a point lies outside the mesh.
    """
    point, element = _candidates(mesh, points)
    place = _inverted(mesh.nodes[mesh.elements[element]], points[point])
    # How far outside the reference triangle: 0 inside.
    outside = np.maximum(-np.minimum(place.min(axis=1), 1.0 - place.sum(axis=1)), 0.0)
    order = np.lexsort((outside, point))
    found, first = np.unique(point[order], return_index=True)
    best = order[first]
    if len(found) < len(points) or np.any(outside[best] > OUTSIDE_TOL):
        raise ValueError("a point lies outside the mesh")
    return element[best], place[best]


def _candidates(mesh: PlanarMesh, points: FloatArray) -> tuple[IntArray, IntArray]:
    """Pairs of a point and an element whose box holds it."""
    corners = mesh.nodes[mesh.elements]
    low, high = corners.min(axis=1), corners.max(axis=1)
    margin = BOX_MARGIN * (high - low).max(axis=1, keepdims=True)
    low, high = low - margin, high + margin
    inside = np.ones((len(points), len(low)), dtype=np.bool_)
    for k in (0, 1):
        at = points[:, k, None]
        inside &= (at >= low[:, k]) & (at <= high[:, k])
    point, element = np.nonzero(inside)
    return point, element


def _inverted(corners: FloatArray, points: FloatArray) -> FloatArray:
    """Places (n, 2) in the reference triangles of elements with nodes (n, 6, 2)."""
    place = np.full(points.shape, 1.0 / 3.0)
    for _ in range(NEWTON_STEPS):
        miss = points - np.einsum("pi,pid->pd", shape(place), corners)
        jacobian = np.einsum("pki,pid->pdk", shape_slope(place), corners)
        place += np.linalg.solve(jacobian, miss[..., None])[..., 0]
        # A point far outside may run away; it is no candidate then.
        place = np.clip(place, -2.0, 3.0)
    return place
