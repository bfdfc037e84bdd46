"""The sliding circle: how the rotor's mesh meets the stator's at any angle.

The circle in the middle of the gap carries n_ring = 2 n_circle equally spaced nodes a sector
(vertices even, middles odd), the same in both meshes. A rotor turned by a whole number of edges
meets the stator node on node: the rotor's node j is the stator's node j + 2 shift, and each time
it passes the end of a sector with an odd number of poles its potential changes sign. The rest of
the angle, at most half an edge, is taken by shearing the elements between rim and circle, so that
any angle is exact in its geometry and the meshes always conform.
"""

import math
from dataclasses import dataclass

import numpy as np

from .types import FloatArray, IntArray, SectorMesh

REST_DIGITS = 9  # of an edge; what lies below is rounding of the angle, and no other position
ON_CIRCLE_TOL = 1e-6  # of the radius, far below an element's height


@dataclass(frozen=True, slots=True)
class RotorPlace:
    """Where the rotor stands: `shift` whole edges ahead, and `rest` rad beyond."""

    shift: int
    rest: float


def rotor_place(sector: SectorMesh, angle: float) -> RotorPlace:
    """The place of a rotor whose d axis stands at `angle` rad in the stator's frame."""
    edge = sector.sector_angle / sector.n_circle
    shift = round(angle / edge)
    share = round(angle / edge - shift, REST_DIGITS)
    return RotorPlace(shift, share * edge)


def places_per_edge(sector: SectorMesh) -> int:
    """Nodes of the circle an edge: its first corner, and its middle where elements have one."""
    return int(sector.rotor.elements.shape[1]) // 3


def circle_nodes(nodes: FloatArray, sector: SectorMesh) -> tuple[IntArray, IntArray]:
    """The mesh's nodes on the circle and their places on it.

    Args:
        nodes: (n_node, 2) of the rotor's or the stator's mesh, in its own frame.
        sector: for radius, pole pairs and number of edges.

    Returns:
        indices of the nodes, and their numbers 0 .. n_ring along the circle; of a whole circle
        0 .. n_ring - 1.

    Raises:
        ValueError: when the nodes are not equally spaced as the sector says.
    """
    radius = np.hypot(nodes[:, 0], nodes[:, 1])
    found = np.flatnonzero(np.abs(radius / sector.circle_radius - 1.0) < ON_CIRCLE_TOL)
    n_ring = places_per_edge(sector) * sector.n_circle
    spacing = sector.sector_angle / n_ring
    # Half a space ahead, so that neither side of a half-circle pole falls on the angle's jump.
    ahead = np.arctan2(nodes[found, 1], nodes[found, 0]) + 0.5 * spacing
    exact = np.mod(ahead, 2.0 * math.pi) / spacing - 0.5
    number = np.rint(exact).astype(np.int64)
    count = n_ring if sector.is_full_circle else n_ring + 1
    is_regular = np.array_equal(np.sort(number), np.arange(count))
    if not is_regular or np.abs(exact - number).max() > 1e-4:
        raise ValueError(f"circle: {found.size} nodes, expected {count} equally spaced")
    return found, number


def turned(
    number: IntArray, ahead: int, n_ring: int, side_sign: float = -1.0
) -> tuple[IntArray, FloatArray]:
    """Stator's number of the rotor's circle nodes and the sign of their potential.

    Args:
        number: places along the rotor's circle, from its d axis.
        ahead: places by which the rotor stands ahead.
        n_ring: places a sector.
        side_sign: of the potential from one sector to the next.
    """
    lap, place = np.divmod(number + ahead, n_ring)
    return place, np.where(lap % 2 == 0, 1.0, side_sign)


def sheared(nodes: FloatArray, rest: float, rim_radius: float, circle_radius: float) -> FloatArray:
    """Rotor nodes, in the rotor's frame, when the circle stays behind by `rest` rad.

    Nodes up to the rim stay; between rim and circle the angle falls linearly with the radius.
    """
    share = (np.hypot(nodes[:, 0], nodes[:, 1]) - rim_radius) / (circle_radius - rim_radius)
    angle = -rest * np.clip(share, 0.0, 1.0)
    cos, sin = np.cos(angle), np.sin(angle)
    x, y = nodes.T
    return np.stack([x * cos - y * sin, x * sin + y * cos], axis=-1)
