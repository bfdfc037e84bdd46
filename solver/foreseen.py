"""Fields over a grid of currents foreseen from those of the nodes before.

At a fixed rotor position the unknowns a(i_d, i_q) are a smooth function of the currents. With P_d
and P_q the extrapolations along one current from the m or n nodes before (polynomials of order
m - 1 and n - 1), (1 - P_d)(1 - P_q) a is small, of order h_d^m h_q^n times the mixed slope of that
order, so

    a ~ P_d a + P_q a - P_d P_q a

from the block of nodes before. With m = n = 2 and 1, whichever leaves the smaller residual, a
saturated machine takes 1.5 factorisations a point at 14 steps of current up to 1.25 x rated; from
the neighbour with a first-order guess it takes 3.6 (measured, demo_24s4p_arc). Tried without gain:
m = n = 3 (2.5), first corrections with the neighbour's factor (1.7).
Source: derived; a Boolean sum as in Gordon 1971 (from memory).
"""

from collections.abc import Mapping, Sequence

import numpy as np

from .types import FloatArray

Node = tuple[int, int]  # row (i_d) and column (i_q) of the grid
ORDERS = ((2, 2), (1, 1))  # (m, n) that are tried, where the nodes that they need are known
FALLBACK = ((0, 2), (2, 0), (0, 1), (1, 0))  # else the first of these
NEEDED = 2  # nodes back that any of them needs


def foreseen(
    known: Mapping[Node, FloatArray], node: Node, i_d: FloatArray, i_q: FloatArray
) -> list[FloatArray]:
    """Guesses of the unknowns at a node, none if no node before it is known.

    Args:
        known: unknowns (n_dof,) by node, all at one rotor position.
        node: row and column.
        i_d: (n_d,) currents of the rows in A, rising.
        i_q: (n_q,) currents of the columns in A, rising.
    """
    able = [orders for orders in ORDERS if _has_block(known, node, orders)]
    if not able:
        able = [orders for orders in FALLBACK if _has_block(known, node, orders)][:1]
    return [_extrapolated(known, node, orders, i_d, i_q) for orders in able]


def _block(node: Node, orders: tuple[int, int]) -> list[Node]:
    """The nodes before that an extrapolation needs, the node itself left out."""
    steps = [(k, n) for k in range(orders[0] + 1) for n in range(orders[1] + 1)]
    return [(node[0] - k, node[1] - n) for k, n in steps[1:]]


def _has_block(known: Mapping[Node, FloatArray], node: Node, orders: tuple[int, int]) -> bool:
    return all(before in known for before in _block(node, orders))


def _extrapolated(
    known: Mapping[Node, FloatArray],
    node: Node,
    orders: tuple[int, int],
    i_d: FloatArray,
    i_q: FloatArray,
) -> FloatArray:
    # Weights of 1 - P along each current: 1 at the node itself, less Lagrange's at those before.
    left_d = _left(i_d[node[0] - orders[0] : node[0] + 1][::-1])
    left_q = _left(i_q[node[1] - orders[1] : node[1] + 1][::-1])
    block = _block(node, orders)
    weights = [-left_d[node[0] - row] * left_q[node[1] - column] for row, column in block]
    guess: FloatArray = np.tensordot(weights, np.array([known[at] for at in block]), axes=1)
    return guess


def _left(currents: FloatArray) -> Sequence[float]:
    """Weights of 1 - P at the currents (order + 1,), the one to be foreseen first."""
    target, before = currents[0], currents[1:]
    weights = [1.0]
    for k, own in enumerate(before):
        others = np.delete(before, k)
        weights.append(-float(np.prod((target - others) / (own - others))))
    return weights if before.size else [1.0]
