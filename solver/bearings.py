"""Where a lamination bears: on its shaft all round the bore, under its magnets' outer faces.

A contact is a node of the lamination with the direction in which a force would push it away:
outward at the bore; at a magnet across its barrier toward the rim. A magnet is rigid and slides on
the wall without friction along it, tilts and moves until its centrifugal load, through its centre
of mass, is balanced. What of that load lies along the wall nothing frictionless would hold: glue
or friction has to, and it is put on the wall as a shear of even size; `grip` tells how much of the
pressure that is. Source: derived, statics of a rigid body.
Axes: n contacts, k rigid motions.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.curves import Path, area
from lamwright.geometry.errors import NotConverged
from lamwright.geometry.section import CrossSection, Region

from .isoparametric import boundary_edges
from .supports import ComplexArray
from .types import FloatArray, IntArray, PlanarMesh

ON_TOL = 1e-8  # m, of a node on an edge: far above rounding, far below any edge of a mesh
EDGE_SHARES = np.array([1.0, 1.0, 4.0]) / 6.0  # of an edge's length: start, end, middle


@dataclass(frozen=True, slots=True, eq=False)
class Seat:
    """One magnet on its wall, per unit of speed squared where loads are concerned."""

    name: str
    nodes: IntArray  # (n,), of the lamination
    across: complex  # unit vector toward the rim, square to the block's face
    gap: FloatArray  # (n,), m, from the face to the wall where the block is drawn
    motion: FloatArray  # (n, 2), opening by a unit shift across and a unit turn
    load: FloatArray  # (2,), what the contact forces are in these motions, times 1/speed^2
    shear: FloatArray  # (n,), along 1j * across, N/m times 1/speed^2
    pull: complex  # the whole load, N/m times 1/speed^2

    @property
    def grip(self) -> float:
        """Shear over pressure: the friction, or share held by glue, that it needs."""
        along = self.pull / self.across
        return abs(along.imag) / along.real


def bore_rim(section: CrossSection, mesh: PlanarMesh) -> tuple[IntArray, FloatArray]:
    """Edges of the bore (n_edge, 3: start, end, middle), and their angles (n_edge, 3).

    The angles are those of start, middle and end counter-clockwise, rising, within the sector.
    """
    edges = boundary_edges(mesh)
    place = mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1]
    on_bore = np.abs(np.abs(place) - section.shaft_radius) < ON_TOL
    edges = edges[np.all(on_bore[edges], axis=1)]
    z = place[edges]
    middle = np.angle(z[:, 2]) % (2.0 * math.pi)
    half = np.abs(np.angle(z[:, 1] / z[:, 0])) / 2.0
    return edges, np.column_stack([middle - half, middle, middle + half])


def edge_lengths(mesh: PlanarMesh, edges: IntArray) -> FloatArray:
    """Lengths (n_edge,) in m of straight or round edges, by the circle through their nodes."""
    z = mesh.nodes[edges] @ np.array([1.0, 1.0j])
    bend = np.abs(np.angle((z[:, 1] - z[:, 2]) / (z[:, 2] - z[:, 0])))
    return np.asarray(np.abs(z[:, 1] - z[:, 0]) / np.sinc(bend / math.pi))


def magnet_seats(mesh: PlanarMesh, magnets: Sequence[Region], density: float) -> tuple[Seat, ...]:
    """The magnets on their walls.

    Args:
        mesh: the lamination that holds them.
        magnets: their regions.
        density: in kg/m^3, over a metre of sheets.

    Raises:
        NotConverged: where a magnet cannot rest on its wall.
    """
    edges = boundary_edges(mesh)
    return tuple(_seat(mesh, edges, magnet, density) for magnet in magnets)


def _seat(mesh: PlanarMesh, edges: IntArray, magnet: Region, density: float) -> Seat:
    middle = _middle(magnet.outer)
    across = magnet.magnetisation / abs(magnet.magnetisation)
    if (across / middle).real < 0.0:
        across = -across
    corners = [(edge.start - middle) / across for edge in magnet.outer.edges]
    face, half_width = max(c.real for c in corners), max(c.imag for c in corners)
    z = (mesh.nodes @ np.array([1.0, 1.0j]) - middle) / across
    wall = _wall(edges, z, face, half_width)
    nodes = np.unique(wall)
    nodes = nodes[np.abs(z[nodes].imag) <= half_width + ON_TOL]
    pull = density * area(magnet.outer) * middle
    push, slide = (pull / across).real, (pull / across).imag
    if len(nodes) < 2 or not push > 0.0:
        raise NotConverged(
            f"{magnet.name}: no wall toward the rim bears it: its load is in no figure"
        )
    share = np.zeros(len(mesh.nodes))
    np.add.at(share, wall, edge_lengths(mesh, wall)[:, None] * EDGE_SHARES)
    shear = slide * share[nodes] / share[nodes].sum()
    height, place = z[nodes].real, z[nodes].imag
    # Moments about the centre of mass; the shear acts on the wall, beyond the face.
    turn = float(shear @ height)
    if not place.min() < turn / push < place.max():
        raise NotConverged(
            f"{magnet.name}: its centrifugal load passes beside the wall that it bears on, so it"
            " would tip over: its load is in no figure"
        )
    return Seat(
        name=magnet.name,
        nodes=nodes,
        across=across,
        gap=height - face,
        motion=-np.column_stack([np.ones_like(place), place]),
        load=-np.array([push, turn]),
        shear=shear,
        pull=pull,
    )


def _wall(edges: IntArray, z: ComplexArray, face: float, half_width: float) -> IntArray:
    """Edges (n, 3) of the wall that a block's outer face looks at.

    The iron is on the left of an edge: one that looks at the block runs against the block's width.
    """
    start, end, middle = (z[edges[:, k]] for k in range(3))
    inside = (np.minimum(start.imag, end.imag) < half_width) & (
        np.maximum(start.imag, end.imag) > -half_width
    )
    looks = inside & (end.imag < start.imag) & (middle.real > face - ON_TOL)
    chosen = np.flatnonzero(looks)
    over = chosen[(start.imag[chosen] >= 0.0) & (end.imag[chosen] <= 0.0)]
    if not over.size:
        return edges[:0]
    reached = np.zeros(len(z), dtype=np.bool_)
    reached[edges[over[np.argmin(middle.real[over])]]] = True
    count = -1
    while count != np.count_nonzero(reached):
        count = int(np.count_nonzero(reached))
        reached[edges[chosen[np.any(reached[edges[chosen]], axis=1)]]] = True
    return edges[chosen[np.all(reached[edges[chosen]], axis=1)]]


def _middle(path: Path) -> complex:
    """Centre of area in m of a path of lines."""
    total, moment = 0.0, 0j
    for edge in path.edges:
        cross = (edge.start.conjugate() * edge.end).imag
        total += cross
        moment += cross * (edge.start + edge.end)
    return moment / (3.0 * total)
