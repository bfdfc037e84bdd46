"""Rings of triangles that fill one half of the air gap, without a general mesher.

Between two rings of nodes at any angles runs one layer of triangles, zipped from side to side by
the shorter diagonal. The rings between are staggered by half a step: triangles are then nearly
isosceles, with twice the least angle of right ones, and stay good when the gap is sheared.
Where the inner arc is much finer than the outer one (a thin rib beside a wide gap), the rings
between have steps between theirs, in like ratios from ring to ring: a jump by 7 at once left
angles of 7 degrees.
Source: derived.
Axes: n_ring nodes of a ring, by growing angle.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from .mesh_outline import ComplexArray
from .types import FloatArray, IntArray

MOST_JUMP = 4.0  # ratio of steps that one layer takes with angles over 12 degrees


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
    jumps = _jumps(np.angle(points[inner]), angles)
    rings, fresh = [inner], []
    free = points.size
    for layer in range(1, first.size - 1):
        radius = abs(points[first[layer]])
        parts = _parts(jumps, 1.0 - layer / (first.size - 1))
        between = _between(angles, parts, stagger=layer % 2 == 1)
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


def _jumps(inner: FloatArray, outer: FloatArray) -> FloatArray:
    """Each step (n_ring - 1,) of the outer arc over the finest one that it has inside."""
    first = np.clip(np.searchsorted(inner, outer[:-1], "right") - 1, 0, inner.size - 2)
    last = np.clip(np.searchsorted(inner, outer[1:], "left"), 1, inner.size - 1)
    steps = np.diff(inner)
    finest = [steps[a:b].min() for a, b in zip(first.tolist(), last.tolist(), strict=True)]
    return np.asarray(np.diff(outer) / np.array(finest))


def _parts(jumps: FloatArray, share: float) -> IntArray:
    """Into how many parts a ring between takes each step of the outer arc.

    Args:
        jumps: see `_jumps`.
        share: of the way from the outer arc (0) to the inner one (1).
    """
    parts = np.where(jumps < MOST_JUMP, 1.0, np.round(jumps**share))
    return np.asarray(parts, dtype=np.int64)


def _between(outer: FloatArray, parts: IntArray, *, stagger: bool) -> FloatArray:
    """Angles of a ring's nodes, sides left out: at the parts' middles, or at their ends."""
    begin, step = np.repeat(outer[:-1], parts), np.repeat(np.diff(outer) / parts, parts)
    number = np.arange(begin.size) - np.repeat(np.cumsum(parts) - parts, parts)
    return np.asarray(begin + (number + 0.5) * step if stagger else (begin + number * step)[1:])


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
