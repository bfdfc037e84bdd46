"""Every triangle cut into four, nested, on the true arcs, with the exact interpolation.

The old nodes keep their numbers; each edge gets two new nodes, at its quarters, and each element
three. A second-order field is carried over exactly in the reference triangle, so what the finer
mesh adds is the error of the coarse field and of its parabolic arcs, nothing else.
Axes: n_node nodes, n_edge edges, n_elem elements of the coarse mesh.
"""

from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
from scipy.sparse import csr_matrix

from lamwright.geometry.section import CrossSection, Region

from .isoparametric import element_edges
from .refine import Circles, circle_of_middles, circles_of, put_on_circles
from .types import FloatArray, IntArray, PlanarMesh, SectorMesh

SparseRows: TypeAlias = "csr_matrix[np.float64]"

# A field at a quarter of an edge from its near end, far end, middle: N(1/4) of three nodes.
_QUARTER = np.array([0.375, -0.125, 0.75])
# Half-way between the middles 3 4, 4 5 and 5 3: the shape functions there.
_INSIDE: FloatArray = np.array(
    [
        [-0.125, 0.0, -0.125, 0.5, 0.5, 0.25],
        [-0.125, -0.125, 0.0, 0.25, 0.5, 0.5],
        [0.0, -0.125, -0.125, 0.5, 0.25, 0.5],
    ]
)


@dataclass(frozen=True, slots=True, eq=False)
class Quartered:
    """The finer mesh and how nodal values get there."""

    mesh: PlanarMesh  # elements 4 e .. 4 e + 3 are those of the coarse element e
    carry: SparseRows  # (n_node of the finer mesh, n_node), second-order interpolation


def quartered(mesh: PlanarMesh, circles: Circles) -> Quartered:
    """The mesh with every triangle cut into four.

    Args:
        mesh: its nodes stay, with their numbers.
        circles: where edges of the outline or between regions must stay.
    """
    n_node, elements = len(mesh.nodes), mesh.elements
    edges = element_edges(mesh)  # (3 n_elem, 3)
    middles, first = np.unique(edges[:, 2], return_index=True)
    ends = np.sort(edges[first, :2], axis=1)  # (n_edge, 2)
    inside = n_node + 2 * len(middles) + np.arange(3 * len(elements)).reshape(-1, 3)
    carry = _carry(n_node, elements, ends, middles)
    nodes = np.asarray(carry @ mesh.nodes)
    on_circle = np.repeat(circle_of_middles(mesh, circles)[middles], 2)
    pairs = np.stack([ends.ravel(), np.repeat(middles, 2)], axis=1)  # end and middle of a half
    halves = slice(n_node, n_node + 2 * len(middles))
    put_on_circles(nodes[halves], mesh.nodes[pairs], on_circle, circles)
    return Quartered(
        mesh=PlanarMesh(
            nodes=nodes,
            elements=_children(elements, _halves(edges, ends, middles, n_node), inside),
            region_of_elem=np.repeat(mesh.region_of_elem, 4),
            region_names=mesh.region_names,
        ),
        carry=carry,
    )


def quartered_sector(
    sector: SectorMesh, section: CrossSection
) -> tuple[SectorMesh, Quartered, Quartered]:
    """Both parts of a sector quartered; the turning circle gets twice the edges.

    Returns:
        The sector, and rotor and stator with their interpolations.
    """
    rotor = quartered(sector.rotor, _circles(section.rotor))
    stator = quartered(sector.stator, _circles(section.stator))
    fine = SectorMesh(
        rotor=rotor.mesh,
        stator=stator.mesh,
        pole_pairs=sector.pole_pairs,
        circle_radius=sector.circle_radius,
        n_circle=2 * sector.n_circle,
        sector_poles=sector.sector_poles,
    )
    return fine, rotor, stator


def _circles(regions: tuple[Region, ...]) -> Circles:
    paths = [path for region in regions for path in (region.outer, *region.holes)]
    return circles_of(edge for path in paths for edge in path.edges)


def _halves(edges: IntArray, ends: IntArray, middles: IntArray, n_node: int) -> IntArray:
    """Quarter nodes (n_elem, 3, 2) of each element's edges, near the edge's start and its end."""
    place = np.zeros(n_node, dtype=np.int64)
    place[middles] = np.arange(len(middles))
    number = place[edges[:, 2]]
    low_first = (edges[:, 0] == ends[number, 0])[:, None]
    both = n_node + 2 * number[:, None] + np.array([0, 1])
    return np.asarray(np.where(low_first, both, both[:, ::-1]).reshape(-1, 3, 2))


def _children(elements: IntArray, halves: IntArray, inside: IntArray) -> IntArray:
    """Nodes (4 n_elem, 6) of all children, those of a parent together."""
    c0, c1, c2, m01, m12, m02 = elements.T
    (a0, a1), (b1, b2), (d2, d0) = halves.transpose(1, 2, 0)  # edges 01, 12, 20
    i0, i1, i2 = inside.T
    children = [
        [c0, m01, m02, a0, i2, d0],
        [m01, c1, m12, a1, b1, i0],
        [m02, m12, c2, i1, b2, d2],
        [m01, m12, m02, i0, i1, i2],
    ]
    return np.array(children).transpose(2, 0, 1).reshape(-1, 6)


def _carry(n_node: int, elements: IntArray, ends: IntArray, middles: IntArray) -> SparseRows:
    """Interpolation matrix: old nodes, quarters of the edges, insides of the elements."""
    n_edge, n_elem = len(middles), len(elements)
    low = np.column_stack([ends, middles])
    high = low[:, [1, 0, 2]]
    columns = [
        np.arange(n_node),
        np.stack([low, high], axis=1).ravel(),
        np.repeat(elements, 3, axis=0).ravel(),
    ]
    weights = [np.ones(n_node), np.tile(_QUARTER, 2 * n_edge), np.tile(_INSIDE.ravel(), n_elem)]
    counts = [np.ones(n_node, dtype=int), np.full(2 * n_edge, 3), np.full(3 * n_elem, 6)]
    starts = np.concatenate([[0], np.cumsum(np.concatenate(counts))])
    shape = (n_node + 2 * n_edge + 3 * n_elem, n_node)
    return csr_matrix((np.concatenate(weights), np.concatenate(columns), starts), shape=shape)
