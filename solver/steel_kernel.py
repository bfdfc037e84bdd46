"""Element kernel of the steel through the reference triangle: what Newton's iteration runs.

The gradients of the shape functions are grad N_i = J s_i with slopes s_i that all elements share.
With the metric M = w J^T J of a point, w its weight, and g = sum a_i s_i (derived):

    u = M g,  |B|^2 = g . u / w,  r_i = s_i . nu u,  K_ij = s_i . (nu M + 2 nu' u u^T / w) s_j

Sums over nodes are products with small constant matrices, which BLAS takes, and a point has four
numbers instead of thirteen: residual 0.58, tangent 0.22 of the time that `kernel` takes with the
gradients of every element (4 000 elements, 120 interleaved turns). Twins: `kernel`, and `forms`
for reading.

Axes: n_elem elements, the last in memory, n_qp quadrature points, n_local nodes of a triangle,
n_packed entries of the lower triangle of an element matrix, 2 directions of the reference triangle.
"""

from dataclasses import dataclass

import numpy as np

from .kernel import packed_indices, reference_slopes
from .types import FloatArray, MagnetisationInverse, Quadrature, ReluctivityLaw

TINY_H = 1e-30  # A/m, keeps 0/0 out


@dataclass(frozen=True, slots=True, eq=False)
class Metric:
    """The map of a set of elements, as far as a law of |B| needs it."""

    slopes: FloatArray  # (2 n_qp, n_local), of the shape functions
    products: FloatArray  # (n_packed, 3 n_qp), of slopes, with the entries 11, 12, 22 of a matrix
    weighted: FloatArray  # (3, n_qp, n_elem), entries 11, 12, 22 of M
    per_weight: FloatArray  # (n_qp, n_elem), 1/w in 1/m^2

    def __call__(self, vector: FloatArray) -> FloatArray:
        """M times vectors (n_qp, 2, n_elem)."""
        m_11, m_12, m_22 = self.weighted
        v_1, v_2 = vector[:, 0], vector[:, 1]
        product = np.empty_like(vector)
        np.multiply(m_11, v_1, out=product[:, 0])
        product[:, 0] += m_12 * v_2
        np.multiply(m_12, v_1, out=product[:, 1])
        product[:, 1] += m_22 * v_2
        return product

    def integrals(self, flow: FloatArray) -> FloatArray:
        """Sums over the points of s_i . flow, (n_local, n_elem), for flows (n_qp, 2, n_elem)."""
        product: FloatArray = self.slopes.T @ flow.reshape(self.slopes.shape[0], -1)
        return product


@dataclass(frozen=True, slots=True, eq=False)
class SteelState:
    """Field and material state at the quadrature points for one vector potential."""

    gradient: FloatArray  # (n_qp, 2, n_elem), g in Wb/m
    flow: FloatArray  # (n_qp, 2, n_elem), u in Wb/m
    b2: FloatArray  # (n_qp, n_elem), |B|^2 in T^2
    nu: FloatArray  # (n_qp, n_elem), m/H
    dnu: FloatArray  # (n_qp, n_elem), m/(H T^2)


def metric_of(quad: Quadrature) -> Metric:
    """The metric of elements with these gradients, which may stand in any frame."""
    grad = quad.grad.transpose(1, 2, 3, 0)  # (n_qp, 2, n_local, n_elem)
    n_qp, _, n_local, _ = grad.shape
    slopes = reference_slopes(n_qp, n_local)
    jacobian = np.einsum("qdie,qik->qdke", grad, np.linalg.pinv(slopes))
    x_1, x_2, y_1, y_2 = (jacobian[:, d, k] for d in (0, 1) for k in (0, 1))
    weight = quad.weight.T
    weighted = (x_1 * x_1 + y_1 * y_1, x_1 * x_2 + y_1 * y_2, x_2 * x_2 + y_2 * y_2)
    rows, columns = packed_indices(n_local)
    (first_i, second_i), (first_j, second_j) = (
        slopes[:, :, index].transpose(1, 2, 0) for index in (rows, columns)
    )  # (n_packed, n_qp) each
    mixed = first_i * second_j + second_i * first_j
    products = np.stack([first_i * first_j, mixed, second_i * second_j], axis=2)
    return Metric(
        slopes=slopes.reshape(2 * n_qp, n_local),
        products=products.reshape(rows.size, 3 * n_qp),
        weighted=np.stack([weight * entry for entry in weighted]),
        per_weight=1.0 / weight,
    )


def steel_state(metric: Metric, a_elem: FloatArray, law: ReluctivityLaw) -> SteelState:
    """Field and reluctivity at the quadrature points.

    Args:
        metric: of the elements.
        a_elem: (n_local, n_elem), nodal vector potential in Wb/m.
        law: |B|^2 in T^2 -> nu in m/H and nu' in m/(H T^2).
    """
    n_qp, n_elem = metric.per_weight.shape
    return _state(metric, (metric.slopes @ a_elem).reshape(n_qp, 2, n_elem), law)


def steel_residual(metric: Metric, state: SteelState) -> FloatArray:
    """Element residuals, (n_local, n_elem) in A."""
    return metric.integrals(state.nu[:, None] * state.flow)


def steel_tangent(metric: Metric, state: SteelState) -> FloatArray:
    """Lower triangles of the element tangents, (n_packed, n_elem) in m/H, row by row."""
    n_qp, n_elem = state.nu.shape
    u_1, u_2 = state.flow[:, 0], state.flow[:, 1]
    # nu' < 0 at low B in real steel, yet the tangent stays positive definite because
    # nu + 2 nu' |B|^2 = d|H|/d|B| > 0.
    bend = 2.0 * state.dnu * metric.per_weight
    tensor = np.empty((n_qp, 3, n_elem))
    np.multiply(state.nu[:, None], metric.weighted.transpose(1, 0, 2), out=tensor)
    along = bend * u_1
    tensor[:, 0] += along * u_1
    tensor[:, 1] += along * u_2
    bend *= u_2
    bend *= u_2
    tensor[:, 2] += bend
    packed: FloatArray = metric.products @ tensor.reshape(3 * n_qp, n_elem)
    return packed


def looked_ahead(
    metric: Metric,
    linear: SteelState,
    state: SteelState,
    law: ReluctivityLaw,
    inverse: MagnetisationInverse,
) -> tuple[SteelState, FloatArray]:
    """Where to linearise the steel next, and what that changes of the residual.

    A Newton step from the linearisation at `linear` ends with the flux density B of `state`, and
    with H_lin, what the linearised steel has of it there. In steel that its magnetomotive force
    saturates H_lin is the better known of the two, in steel that carries a given flux B is. Half
    way between B and B(H_lin) is a better point than either: from a first-order start 4 to 5
    steps instead of 6 to 7; B(H_lin) alone does not converge (measured). Source: own.

    Args:
        metric: of the elements.
        linear: the linearisation point of the step just taken.
        state: where it led.
        law: |B|^2 in T^2 -> nu in m/H and nu' in m/(H T^2).
        inverse: |H| in A/m -> |B| in T.

    Returns:
        The new linearisation point, and the element residuals (n_local, n_elem) in A of the steel
        linearised there less those of the steel, both at the B of `state`.
    """
    h = _linearised(metric, linear, state.gradient)
    size = np.sqrt(_dot(h, metric(h)) * metric.per_weight)
    between = h
    between *= (inverse(size) / np.maximum(size, TINY_H))[:, None]
    between += state.gradient
    between *= 0.5
    ahead = _state(metric, between, law)
    change = _linearised(metric, ahead, state.gradient)
    change -= state.nu[:, None] * state.gradient
    return ahead, metric.integrals(metric(change))


def _state(metric: Metric, gradient: FloatArray, law: ReluctivityLaw) -> SteelState:
    flow = metric(gradient)
    b2 = _dot(gradient, flow)
    b2 *= metric.per_weight
    return SteelState(gradient, flow, b2, *law(b2))


def _linearised(metric: Metric, at: SteelState, gradient: FloatArray) -> FloatArray:
    """H(B_at) + dH/dB (B - B_at), (n_qp, 2, n_elem), turned and by the reference as g is."""
    along = _dot(at.flow, gradient - at.gradient)
    along *= metric.per_weight
    along *= 2.0 * at.dnu
    h = at.nu[:, None] * gradient
    h += along[:, None] * at.gradient
    return h


def _dot(first: FloatArray, second: FloatArray) -> FloatArray:
    """Products over the 2 directions, (n_qp, n_elem)."""
    product: FloatArray = first[:, 0] * second[:, 0]
    product += first[:, 1] * second[:, 1]
    return product
