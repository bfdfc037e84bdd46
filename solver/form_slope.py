"""How integrals over curved elements change when the elements' nodes move.

With the map's motion v = sum_i dx_i N_i, at points that stay at their places in the reference
triangle and with nodal values that stay (derived):

    d(grad u) = -(grad v)^T grad u,   d(dS) = div v dS,   d x = v.

Hence for b = int nu(|g|^2) g . l dS with g = grad a, l = grad lambda the slope by node i is

    G_i = sum_q w [ f grad N_i - (p . grad N_i) g - (h . grad N_i) l ],
    f = nu g . l,  p = nu l + 2 nu' (g . l) g,  h = nu g,

exactly the derivative of the sum over quadrature points, not only of the integral. A twin in
plain differences is in tests/solver/test_form_slope.py.
Axes: n_elem elements, n_qp quadrature points, 2 directions, 6 nodes.
"""

import numpy as np

from .isoparametric import shape
from .kernel import flux_state, quadrature, quadrature_rule
from .types import FloatArray, IntArray, ReluctivityLaw


def form_slope(
    nodes: FloatArray,
    elements: IntArray,
    n_qp: int,
    fields: tuple[FloatArray, FloatArray],
    law: ReluctivityLaw,
) -> FloatArray:
    """Slope (n_elem, 6, 2) in A Wb/m^2 of int nu grad a . grad lambda by the nodes' places.

    Args:
        nodes: (n_node, 2) in m.
        elements: (n_elem, 6).
        n_qp: points an element, those of the residual.
        fields: nodal a and lambda of the elements, (n_elem, 6) each.
        law: of the elements.
    """
    quad = quadrature(nodes, elements, n_qp)
    state = flux_state(quad, fields[0], law)
    grad = quad.grad.transpose(1, 2, 3, 0)  # (n_qp, 2, 6, n_elem)
    g = state.grad_a.transpose(1, 2, 0)  # (n_qp, 2, n_elem)
    l = np.einsum("qdie,ie->qde", grad, fields[1].T)  # noqa: E741  # the symbol of the head
    nu, dnu, weight = state.nu.T, state.dnu.T, quad.weight.T
    along = np.sum(g * l, axis=1)
    p = nu[:, None] * l + (2.0 * dnu * along)[:, None] * g
    h = nu[:, None] * g
    pull = -p[:, :, None] * g[:, None] - h[:, :, None] * l[:, None]  # (n_qp, 2, 2, n_elem)
    for d in (0, 1):
        pull[:, d, d] += nu * along
    return np.asarray(np.einsum("qe,qdke,qdie->eik", weight, pull, grad, optimize=True))


def flow_slope(
    nodes: FloatArray, elements: IntArray, n_qp: int, values: FloatArray, along: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Of int c . grad lambda dS with a constant c: its slope by nodes, and by c.

    By node i it is sum_q w [ (c . grad lambda) grad N_i - (c . grad N_i) grad lambda ], from the
    same rules; by c it is int grad lambda dS.

    Args:
        nodes: (n_node, 2) in m.
        elements: (n_elem, 6).
        n_qp: points an element.
        values: nodal lambda, (n_elem, 6).
        along: c, (2,).

    Returns:
        (n_elem, 6, 2) and (2,).
    """
    quad = quadrature(nodes, elements, n_qp)
    grad = np.einsum("eqdi,ei->eqd", quad.grad, values)
    spread = np.einsum("eq,eqk,k,eqdi->eid", quad.weight, grad, along, quad.grad, optimize=True)
    turned = np.einsum("eq,eqd,k,eqki->eid", quad.weight, grad, along, quad.grad, optimize=True)
    return np.asarray(spread - turned), np.asarray(np.einsum("eq,eqd->d", quad.weight, grad))


def mean_slope(nodes: FloatArray, elements: IntArray, values: FloatArray) -> FloatArray:
    """Slope (n_elem, 6, 2) in 1/m of the mean of a field over elements by their nodes' places.

    Args:
        nodes: (n_node, 2) in m.
        elements: (n_elem, 6), all of the area over which the mean is taken.
        values: (n_elem, 6), nodal values.
    """
    quad = quadrature(nodes, elements, 6)
    at_qp = values @ shape(quadrature_rule(6)[0]).T  # (n_elem, n_qp)
    area = float(quad.weight.sum())
    mean = float(np.sum(quad.weight * at_qp)) / area
    return np.asarray(np.einsum("eq,eqdi->eid", quad.weight * (at_qp - mean) / area, quad.grad))


def summed_slope(n_node: int, elements: IntArray, slope: FloatArray) -> FloatArray:
    """Slopes (n_node, 2) by all nodes from those of elements (n_elem, 6, 2)."""
    flat = elements.ravel()
    sums = [np.bincount(flat, slope[..., k].ravel(), n_node) for k in (0, 1)]
    return np.stack(sums, axis=1)
