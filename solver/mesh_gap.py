"""Rings of triangles that fill one half of the air gap, without a general mesher.

Between two rings of nodes at any angles runs one layer of triangles, zipped from side to side by
the shorter diagonal. The rings between are staggered by half a step: triangles are then nearly
isosceles, with twice the least angle of right ones, and stay good when the gap is sheared.
Source: derived.
Axes: n_ring nodes of a ring, by growing angle.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from .mesh_outline import ComplexArray
from .types import FloatArray, IntArray


@dataclass(frozen=True, slots=True, eq=False)
class Rings:
    """Triangles of half a gap, and the nodes that they need beside the given ones."""

    nodes: ComplexArray  # (n_new,), m, numbered from the first free number
    corners: IntArray  # (n_elem, 3), counter-clockwise
    steps: IntArray  # (n_step, 2), sides along the new rings
    middles: ComplexArray  # (n_step,), their true middles on the ring


def fill_rings(
    points: ComplexArray, inner: IntArray, outer: IntArray, sides: tuple[IntArray, IntArray]
) -> Rings:
    """Fill the area between two arcs about the origin.

    Args:
        points: (n_node,) all nodes so far, in m.
        inner: nodes of the inner arc by growing angle.
        outer: nodes of the outer arc by growing angle.
        sides: nodes on the side at the least and at the greatest angle, inner and outer arc
            included, by growing radius; both have one node more than there are layers.
    """
    first, last = sides
    angles = np.angle(points[outer])
    rings, fresh = [inner], []
    free = points.size
    for layer in range(1, first.size - 1):
        radius = abs(points[first[layer]])
        stagger = layer % 2 == 1
        between = 0.5 * (angles[1:] + angles[:-1]) if stagger else angles[1:-1]
        fresh.append(radius * np.exp(1j * between))
        inside = np.arange(free, free + between.size)
        rings.append(np.concatenate([first[layer : layer + 1], inside, last[layer : layer + 1]]))
        free += between.size
    rings.append(outer)
    new = np.concatenate([points[:0], *fresh])
    every = np.concatenate([points, new])
    corners = np.concatenate(
        [_zip(np.angle(every[a]), np.angle(every[b]), a, b) for a, b in pairwise(rings)]
    )
    steps = np.concatenate(
        [np.zeros((0, 2), dtype=np.int64), *(np.column_stack([r[:-1], r[1:]]) for r in rings[1:-1])]
    )
    chord = 0.5 * (every[steps[:, 0]] + every[steps[:, 1]])
    middles = chord / np.abs(chord) * np.abs(every[steps[:, 0]])
    return Rings(new, corners, steps, middles)


def _zip(low: FloatArray, high: FloatArray, a: IntArray, b: IntArray) -> IntArray:
    """One layer of triangles between ring `a` (angles `low`) and the ring `b` outside it."""
    i, j = 0, 0
    made = []
    while i < a.size - 1 or j < b.size - 1:
        if j == b.size - 1:
            step_inside = True
        elif i == a.size - 1:
            step_inside = False
        else:
            step_inside = abs(low[i + 1] - high[j]) <= abs(high[j + 1] - low[i])
        if step_inside:
            made.append((a[i], b[j], a[i + 1]))
            i += 1
        else:
            made.append((a[i], b[j], b[j + 1]))
            j += 1
    return np.array(made, dtype=np.int64)
