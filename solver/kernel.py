"""Element kernel of the magnetic energy. Readable twin: `forms.residual_and_tangent`.

    r_i  = int nu grad A . grad N_i                                    [A]
    K_ij = int nu grad N_i . grad N_j
           + 2 nu' (grad A . grad N_i)(grad A . grad N_j)              [m/H]

nu = nu(|B|^2), nu' = d nu / d |B|^2, |B| = |grad A| in the plane. Source: derived, first
and second variation of W(A) = 1/2 int int_0^{|B|^2} nu(s) ds dS.

Axes: n_elem elements, n_qp quadrature points, 2 directions, 6 nodes of a triangle, 21 entries of
the lower triangle of an element matrix. In memory the elements come last: then every product is
a run of long contiguous loops, 0.4 ms for the tangents of 5 000 elements where batched 6 x 6
matrix products take 2.0 ms (measured). Shapes in docstrings are the logical ones.
"""

from dataclasses import dataclass
from functools import cache

import numpy as np

from .isoparametric import linear_shape, linear_shape_slope, shape, shape_slope, six_points
from .types import FloatArray, IntArray, Quadrature, ReluctivityLaw

# One point is exact for degree 1, three for degree 2 (Strang & Fix 1973), six for degree 4.
_POINTS = {
    1: (np.full((1, 2), 1.0 / 3.0), np.full(1, 0.5)),
    3: (np.array([[1, 1], [4, 1], [1, 4]]) / 6.0, np.full(3, 1.0 / 6.0)),
    6: six_points(),
}


@dataclass(frozen=True, slots=True, eq=False)
class FluxState:
    """Field and material state at the quadrature points for one vector potential."""

    grad_a: FloatArray  # (n_elem, n_qp, 2), B turned by 90 degrees, T
    nu: FloatArray  # (n_elem, n_qp), m/H
    dnu: FloatArray  # (n_elem, n_qp), m/(H T^2)


@cache
def packed_indices(n_local: int) -> tuple[IntArray, IntArray]:
    """Rows and columns of the lower triangle of an element matrix, row by row."""
    rows, columns = np.tril_indices(n_local)
    return rows, columns


PACKED_ROWS, PACKED_COLUMNS = packed_indices(6)


def quadrature_rule(n_qp: int) -> tuple[FloatArray, FloatArray]:
    """Points (n_qp, 2) and weights (n_qp,) on the triangle (0,0) (1,0) (0,1)."""
    return _POINTS[n_qp]


def quadrature(nodes: FloatArray, elements: IntArray, n_qp: int = 3) -> Quadrature:
    """Gradients and weights of curved triangles.

    Args:
        nodes: (n_node, 2) in m.
        elements: (n_elem, 6), counter-clockwise, middles not necessarily on the chords.
        n_qp: 3 or 6 points an element.

    Returns:
        `grad` (n_elem, n_qp, 2, 6) in 1/m and `weight` (n_elem, n_qp) in m^2.
    """
    points, share = _POINTS[n_qp]
    n_local = elements.shape[1]
    dn = reference_slopes(n_qp, n_local)  # d N_i / d (xi, eta)
    x, y = nodes[elements.T].transpose(2, 0, 1)  # (n_local, n_elem) each
    (x_xi, x_eta), (y_xi, y_eta) = (np.einsum("qki,ie->kqe", dn, c) for c in (x, y))
    det = x_xi * y_eta - x_eta * y_xi  # (n_qp, n_elem), twice the local area
    dn_xi, dn_eta = dn.transpose(1, 0, 2)[..., None]  # (n_qp, n_local, 1) each
    grad = np.empty((points.shape[0], 2, n_local, elements.shape[0]))
    grad[:, 0] = (dn_xi * y_eta[:, None] - dn_eta * y_xi[:, None]) / det[:, None]
    grad[:, 1] = (dn_eta * x_xi[:, None] - dn_xi * x_eta[:, None]) / det[:, None]
    return Quadrature(grad=grad.transpose(3, 0, 1, 2), weight=(share[:, None] * det).T)


def reference_slopes(n_qp: int, n_local: int) -> FloatArray:
    """Slopes (n_qp, 2, n_local) of the shape functions at the points, on the reference triangle."""
    points, _ = _POINTS[n_qp]
    return shape_slope(points) if n_local == 6 else linear_shape_slope(points)


def shape_integrals(nodes: FloatArray, elements: IntArray) -> FloatArray:
    """Integrals of the shape functions over each element, (n_elem, 6) in m^2."""
    integrals: FloatArray = quadrature(nodes, elements, 6).weight @ _shape_of(elements, 6)
    return integrals


def quadrature_places(nodes: FloatArray, elements: IntArray, n_qp: int = 3) -> FloatArray:
    """Positions of the quadrature points, (n_elem, n_qp, 2) in m."""
    places: FloatArray = _shape_of(elements, n_qp) @ nodes[elements]
    return places


def _shape_of(elements: IntArray, n_qp: int) -> FloatArray:
    points, _ = _POINTS[n_qp]
    return shape(points) if elements.shape[1] == 6 else linear_shape(points)


def flux_state(quad: Quadrature, a_elem: FloatArray, law: ReluctivityLaw) -> FluxState:
    """Field and reluctivity at the quadrature points.

    Args:
        quad: of the elements.
        a_elem: (n_elem, 6), nodal vector potential in Wb/m.
        law: |B|^2 in T^2 -> nu in m/H and nu' in m/(H T^2).
    """
    grad = quad.grad.transpose(1, 2, 3, 0)
    grad_a = np.einsum("qdie,ie->qde", grad, a_elem.T)
    nu, dnu = law(grad_a[:, 0] ** 2 + grad_a[:, 1] ** 2)
    return FluxState(grad_a.transpose(2, 0, 1), nu.T, dnu.T)


def element_residual(quad: Quadrature, state: FluxState) -> FloatArray:
    """Element residuals, (n_elem, 6) in A."""
    return weighted(quad, state.nu[..., None] * state.grad_a)


def weighted(quad: Quadrature, h: FloatArray) -> FloatArray:
    """Integrals of h . grad N_i over the elements, (n_elem, n_node) in A.

    Args:
        quad: of the elements.
        h: (n_elem, n_qp, 2), field strength turned by 90 degrees in A/m.
    """
    h_weighted = quad.weight.T[:, None] * h.transpose(1, 2, 0)  # A m
    integrals: FloatArray = np.einsum("qdie,qde->ie", quad.grad.transpose(1, 2, 3, 0), h_weighted).T
    return integrals


def packed_tangent(quad: Quadrature, state: FluxState) -> FloatArray:
    """Lower triangles of the element tangents, (21, n_elem) in m/H, row by row."""
    g_x, g_y = state.grad_a.transpose(2, 1, 0)
    # dH/dB = nu I + 2 nu' g g^T; nu' < 0 at low B in real steel, yet it stays positive definite
    # because nu + 2 nu' |B|^2 = d|H|/d|B| > 0.
    weight = quad.weight.T
    iso, aniso = weight * state.nu.T, 2.0 * weight * state.dnu.T
    return packed_products(
        quad, iso + aniso * g_x * g_x, aniso * g_x * g_y, iso + aniso * g_y * g_y
    )


def packed_products(
    quad: Quadrature, d_xx: FloatArray, d_xy: FloatArray, d_yy: FloatArray
) -> FloatArray:
    """Lower triangles (21, n_elem) of the sums over points of grad N_i . D grad N_j, row by row.

    Args:
        quad: of the elements.
        d_xx: (n_qp, n_elem), entry of the symmetric D, the point's weight in it; as the others.
        d_xy: see d_xx.
        d_yy: see d_xx.
    """
    grad = quad.grad.transpose(1, 2, 3, 0)
    n_qp, _, n_local, n_elem = grad.shape
    packed = np.empty((n_local * (n_local + 1) // 2, n_elem))
    stiff = np.empty((n_qp, 2, n_elem))  # of one node: stays in the cache, a sixth less time
    for i in range(n_local):
        g_x, g_y = grad[:, 0, i], grad[:, 1, i]
        stiff[:, 0] = d_xx * g_x + d_xy * g_y
        stiff[:, 1] = d_xy * g_x + d_yy * g_y
        row = packed[i * (i + 1) // 2 : (i + 1) * (i + 2) // 2]
        np.einsum("qde,qdje->je", stiff, grad[:, :, : i + 1], out=row)
    return packed


def residual_and_tangent(
    quad: Quadrature, a_elem: FloatArray, law: ReluctivityLaw
) -> tuple[FloatArray, FloatArray]:
    """Element residuals and tangents at the vector potential `a_elem`.

    Args:
        quad: of the elements.
        a_elem: (n_elem, 6), nodal vector potential in Wb/m.
        law: |B|^2 in T^2 -> nu in m/H and nu' in m/(H T^2).

    Returns:
        residual (n_elem, 6) in A; tangent (n_elem, 6, 6) in m/H, symmetric.
    """
    state = flux_state(quad, a_elem, law)
    packed = packed_tangent(quad, state)
    n_local = a_elem.shape[1]
    rows, columns = packed_indices(n_local)
    tangent = np.empty((a_elem.shape[0], n_local, n_local))
    tangent[:, rows, columns] = packed.T
    tangent[:, columns, rows] = packed.T
    return element_residual(quad, state), tangent
