"""From node places on edges to straight steps, and from triangles to second-order elements.

Axes: n_node nodes, n_step steps between neighbouring nodes on edges, n_elem elements.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from .mesh_outline import ComplexArray, Outline
from .mesh_sizes import points_at
from .types import FloatArray, IntArray, PlanarMesh


@dataclass(frozen=True, slots=True, eq=False)
class Steps:
    """Straight steps between nodes on the edges; the outline's points are the first nodes."""

    nodes: ComplexArray  # (n_node,), m
    steps: IntArray  # (n_step, 2), node numbers
    middles: ComplexArray  # (n_step,), the true middle on the edge
    edge_of_step: IntArray  # (n_step,)
    chains: tuple[IntArray, ...]  # nodes of each edge from its start to its end
    first: IntArray  # (n_edge + 1,), first step of each edge

    def loop(self, edges: Sequence[int]) -> list[int]:
        """Signed step numbers (from 1) of a loop of signed edge numbers (from 1)."""
        signed: list[int] = []
        for edge in edges:
            low, high = self.first[abs(edge) - 1], self.first[abs(edge)]
            numbers = range(int(low) + 1, int(high) + 1)
            signed += numbers if edge > 0 else [-n for n in reversed(numbers)]
        return signed

    def chain(self, edge: int) -> IntArray:
        """Nodes along a signed edge (from 1)."""
        nodes = self.chains[abs(edge) - 1]
        return nodes if edge > 0 else nodes[::-1]


def steps_of(outline: Outline, shares: Sequence[FloatArray]) -> Steps:
    """Number the nodes and the steps of all edges."""
    nodes, steps, middles, chains = [outline.points], [], [], []
    n_node = outline.points.size
    for k, (edge, share) in enumerate(zip(outline.edges, shares, strict=True)):
        inner = np.arange(n_node, n_node + share.size - 2)
        chain = np.concatenate([outline.ends[k, :1], inner, outline.ends[k, 1:]])
        chains.append(chain)
        nodes.append(points_at(edge, share[1:-1]))
        steps.append(np.column_stack([chain[:-1], chain[1:]]))
        middles.append(points_at(edge, 0.5 * (share[1:] + share[:-1])))
        n_node += inner.size
    counts = [len(s) for s in steps]
    return Steps(
        nodes=np.concatenate(nodes),
        steps=np.concatenate(steps),
        middles=np.concatenate(middles),
        edge_of_step=np.repeat(np.arange(len(counts)), counts),
        chains=tuple(chains),
        first=np.concatenate([[0], np.cumsum(counts)]),
    )


def second_order(
    nodes: ComplexArray,
    corners: IntArray,
    sides: tuple[IntArray, ComplexArray],
    region: IntArray,
    names: tuple[str, ...],
) -> PlanarMesh:
    """Second-order elements of triangles.

    Args:
        nodes: (n_node,) corner nodes in m; unused ones are dropped.
        corners: (n_elem, 3) triangles, either way round.
        sides: triangle sides (n_side, 2) that are curved and their true middles (n_side,) in m.
        region: (n_elem,) region numbers.
        names: of the regions.
    """
    corners = counter_clockwise(nodes, corners)
    curved, middle_of_curved = sides
    triples = np.sort(corners[:, [[0, 1], [1, 2], [0, 2]]].reshape(-1, 2), axis=1)
    code, back = np.unique(triples[:, 0] * nodes.size + triples[:, 1], return_inverse=True)
    middles = 0.5 * (nodes[code // nodes.size] + nodes[code % nodes.size])
    low, high = np.sort(curved, axis=1).T
    middles[np.searchsorted(code, low * nodes.size + high)] = middle_of_curved
    used, corners_used = np.unique(corners, return_inverse=True)
    every = np.concatenate([nodes[used], middles])
    elements = np.concatenate(
        [corners_used.reshape(-1, 3), used.size + back.reshape(-1, 3)], axis=1
    )
    return PlanarMesh(np.column_stack([every.real, every.imag]), elements, region, names)


def counter_clockwise(nodes: ComplexArray, corners: IntArray) -> IntArray:
    """Triangles (n_elem, 3) of either sense, all counter-clockwise."""
    a, b, c = (nodes[corners[:, k]] for k in range(3))
    turned = ((b - a).conj() * (c - a)).imag < 0.0
    return np.where(turned[:, None], corners[:, [0, 2, 1]], corners)


def read_only(mesh: PlanarMesh) -> PlanarMesh:
    """The same mesh with its arrays locked."""
    for array in (mesh.nodes, mesh.elements, mesh.region_of_elem):
        array.setflags(write=False)
    return mesh
