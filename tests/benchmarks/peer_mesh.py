"""Our mesh of one pole, rotor at shift 0, in the hands of the other library (NGSolve).

Nodes, second-order triangles and curved sides are the same; the two halves of the gap are joined
where they share the circle's nodes. The sides of the pole are identified node by node, for its
quasi-periodic space with factor -1.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from lamwright.solver.gap import circle_nodes
from lamwright.solver.types import FloatArray, IntArray, SectorMesh

SIDE_TOL = 1e-6  # of the outer radius, far below an element
OUTER, INNER_CENTRE = "outer", "centre"


@dataclass(frozen=True, slots=True, eq=False)
class JoinedMesh:
    """One pole in one piece; corners are numbered before middles.

    Axes: n_node nodes, n_elem elements.
    """

    nodes: FloatArray  # (n_node, 2), m
    elements: IntArray  # (n_elem, 6), corners, then middles of the sides 01, 12, 02
    n_corner: int
    region_of_elem: IntArray  # (n_elem,), index into region_names
    region_names: tuple[str, ...]
    number: IntArray  # (nodes of rotor, then of stator), their numbers here


def joined_mesh(sector: SectorMesh) -> JoinedMesh:
    """Rotor and stator in one mesh, the rotor's d axis at angle 0 of the stator's frame."""
    rotor, stator = sector.rotor, sector.stator
    n_rotor = rotor.nodes.shape[0]
    same = np.arange(n_rotor + stator.nodes.shape[0])
    rotor_node, rotor_place = circle_nodes(rotor.nodes, sector)
    stator_node, stator_place = circle_nodes(stator.nodes, sector)
    order, other = np.argsort(rotor_place), np.argsort(stator_place)
    same[rotor_node[order]] = n_rotor + stator_node[other]

    elements = same[np.concatenate([rotor.elements, stator.elements + n_rotor])]
    corners = np.unique(elements[:, :3])
    used = np.concatenate([corners, np.setdiff1d(elements, corners)])
    number = np.full(same.size, -1)
    number[used] = np.arange(used.size)
    return JoinedMesh(
        nodes=np.concatenate([rotor.nodes, stator.nodes])[used],
        elements=number[elements],
        n_corner=corners.size,
        region_of_elem=np.concatenate(
            [rotor.region_of_elem, stator.region_of_elem + len(rotor.region_names)]
        ),
        region_names=(*rotor.region_names, *stator.region_names),
        number=number[same],
    )


def netgen_mesh(mesh: JoinedMesh, pole_pairs: int) -> Any:
    """The same mesh as an object of the other library's mesher."""
    import netgen.meshing as nm

    made = nm.Mesh(dim=2)
    points = [made.Add(nm.MeshPoint(nm.Pnt(x, y, 0.0))) for x, y in mesh.nodes]
    for k, name in enumerate(mesh.region_names):
        made.Add(nm.FaceDescriptor(surfnr=k + 1, domin=k + 1, bc=k + 1))
        made.SetMaterial(k + 1, name)
    # There the middle of a side has the number of the corner that faces it.
    for six, region in zip(mesh.elements[:, [0, 1, 2, 4, 5, 3]], mesh.region_of_elem, strict=True):
        made.Add(nm.Element2D(int(region) + 1, [points[k] for k in six]))
    for first, last, middle in _outer_sides(mesh):
        made.Add(nm.Element1D([points[first], points[last], points[middle]], index=1))
    made.SetBCName(0, OUTER)
    for near, far in _side_pairs(mesh, pole_pairs):
        made.AddPointIdentification(points[near], points[far], 1, nm.IdentificationType.PERIODIC)
    return made


def centre_node(mesh: JoinedMesh) -> int | None:
    """The node in the shaft's centre, if there is one."""
    radius = np.hypot(*mesh.nodes.T)
    nearest = int(radius.argmin())
    return nearest if radius[nearest] < SIDE_TOL * radius.max() else None


def _outer_sides(mesh: JoinedMesh) -> list[tuple[int, int, int]]:
    """Corner, corner and middle of all sides on the outer circle."""
    radius = np.hypot(*mesh.nodes.T)
    is_outer = radius > (1.0 - SIDE_TOL) * radius.max()
    sides = []
    for first, last, middle in ((0, 1, 3), (1, 2, 4), (2, 0, 5)):
        three = mesh.elements[:, [first, last, middle]]
        sides += [tuple(row) for row in three[is_outer[three].all(axis=1)].tolist()]
    return sides


def _side_pairs(mesh: JoinedMesh, pole_pairs: int) -> list[tuple[int, int]]:
    """Corners on the side at angle 0 with their partners on the far side, the centre left out."""
    z = mesh.nodes[: mesh.n_corner] @ np.array([1.0, 1j])
    tol = SIDE_TOL * np.abs(z).max()
    back = z * np.exp(-1j * np.pi / pole_pairs)
    near, far = (np.flatnonzero((np.abs(w.imag) < tol) & (w.real > tol)) for w in (z, back))
    near, far = near[np.argsort(np.abs(z[near]))], far[np.argsort(np.abs(z[far]))]
    assert np.allclose(np.abs(z[near]), np.abs(z[far]), rtol=0.0, atol=tol)
    return list(zip(near.tolist(), far.tolist(), strict=True))
