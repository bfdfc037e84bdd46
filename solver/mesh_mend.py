"""Elements that a curved edge turns over, mended by cutting them and their neighbours another way.

A triangle with two sides on one smooth edge has no angle left between them once they are curved,
and a flat one on a hollow edge is pierced by it. Finer steps on the edge mend both as well, at the
price of more nodes all around (a stator's slots: up to half of all, measured).
Axes: n_node nodes, n_step straight steps between nodes on edges, n_elem triangles.
"""

from collections.abc import Iterator

import numpy as np
import numpy.typing as npt

from .mesh_checks import least_jacobian_share
from .mesh_outline import ComplexArray
from .mesh_steps import counter_clockwise
from .types import IntArray

# Sides turned for one bad element: an ear upon an ear beside a corner takes as many.
MOST_TURNS = 4

Triangle = tuple[int, int, int]  # node numbers, counter-clockwise
Side = frozenset[int]


def mended(
    nodes: ComplexArray,
    corners: IntArray,
    region: IntArray,
    sides: tuple[IntArray, ComplexArray],
    bad: npt.NDArray[np.bool_],
    least: float,
) -> IntArray:
    """The triangles with the bad ones cut another way, where all new ones are good.

    A way leads from the bad one across inner sides to some beyond; these sides are turned, the last
    one first: ears that lie one upon the other would only change places else. Areas add up to the
    same, so that good triangles cover theirs once, whatever lay between.

    Args:
        nodes: (n_node,) in m.
        corners: (n_elem, 3) triangles, either way round.
        region: (n_elem,) region numbers.
        sides: triangle sides (n_side, 2) on edges and their true middles (n_side,) in m.
        bad: (n_elem,) which to mend.
        least: share of the Jacobian of a good one, see `least_jacobian_share`.

    Returns:
        (n_elem, 3) with the regions as they were; bad ones that cannot be mended so are left.
    """
    mesh = _Triangles(nodes, corners, region, sides)
    for element in np.flatnonzero(bad).tolist():
        if mesh.share(mesh.at(element)) >= least:
            continue  # a neighbour's new cut has mended it
        for way in sorted(mesh.ways([element], []), key=lambda one: len(one[1])):
            found = _turned(way[1], {at: mesh.at(at) for at in way[0]})
            if found and all(mesh.share(triangle) >= least for triangle in found.values()):
                mesh.corners[list(found)] = list(found.values())
                break
    return mesh.corners


def _turned(sides: list[Side], triangles: dict[int, Triangle]) -> dict[int, Triangle]:
    """Triangles with the other two corners of two joined instead of their common side.

    Empty where a way about a node leads onto itself: two triangles then have all corners in common,
    or more than two share a side.
    """
    for side in reversed(sides):
        sharing = [at for at, triangle in triangles.items() if side <= set(triangle)]
        if len(sharing) != 2 or set(triangles[sharing[0]]) == set(triangles[sharing[1]]):
            return {}
        one, other = sharing
        k = next(k for k in range(3) if triangles[one][k] not in side)
        b, a, c = (triangles[one][(k + j) % 3] for j in range(3))
        (d,) = set(triangles[other]) - side
        triangles = {**triangles, one: (b, a, d), other: (b, d, c)}
    return triangles


class _Triangles:
    """Triangles, and the sides of theirs that are on edges."""

    def __init__(
        self,
        nodes: ComplexArray,
        corners: IntArray,
        region: IntArray,
        sides: tuple[IntArray, ComplexArray],
    ) -> None:
        """As `mended` takes them."""
        self.corners = counter_clockwise(nodes, corners)
        self._nodes = nodes
        self._region = region
        self._middle = {
            frozenset(side): middle
            for side, middle in zip(sides[0].tolist(), sides[1].tolist(), strict=True)
        }

    def at(self, element: int) -> Triangle:
        a, b, c = self.corners[element].tolist()
        return a, b, c

    def ways(
        self, elements: list[int], sides: list[Side]
    ) -> Iterator[tuple[list[int], list[Side]]]:
        """Ways on from the last element, across sides on no edge: elements, and sides between."""
        if len(sides) == MOST_TURNS:
            return
        corners = self.at(elements[-1])
        for side in (frozenset(corners) - {corner} for corner in corners):
            if side in self._middle:
                continue
            beside = np.isin(self.corners, list(side)).sum(axis=1) == 2
            beside &= self._region == self._region[elements[-1]]
            beside[elements] = False
            for beyond in np.flatnonzero(beside).tolist():
                way = [*elements, beyond], [*sides, side]
                yield way
                yield from self.ways(*way)

    def share(self, triangle: Triangle) -> float:
        """The least share of the Jacobian of the curved element."""
        at = [complex(self._nodes[k]) for k in triangle]
        middles = [
            self._middle.get(frozenset((triangle[j], triangle[k])), 0.5 * (at[j] + at[k]))
            for j, k in ((0, 1), (1, 2), (0, 2))
        ]
        z = np.array([at + middles])
        return float(least_jacobian_share(np.stack([z.real, z.imag], axis=-1))[0])
