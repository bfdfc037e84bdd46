"""Which part of a lamination belongs to which rib.

A rib's zone is what lies nearer to it than to any other rib and within its reach. The reach ends
where the outline's edges that bound the rib at its thinnest place end: a tangential rib takes the
round end of its barrier, a radial rib its straight sides and their fillets. The rest of the iron
(carriers, bore) is a zone of its own, numbered after the ribs.
Source: derived; a choice of names, no physics hangs on it.
Axes: n_rib ribs, n_point points.
"""

import numpy as np

from lamwright.geometry.curves import Edge, Path, Point
from lamwright.geometry.section import CrossSection, Rib, base_name, rotor_cell

from .supports import ComplexArray
from .types import FloatArray, IntArray, PlanarMesh

ON_EDGE_TOL = 1e-8  # m, far above rounding and far below any rib


def zone_of_node(section: CrossSection, mesh: PlanarMesh) -> IntArray:
    """Number (n_node,) of the rib that a node belongs to, n_rib for the rest of the iron.

    Ribs are those of the rotor's own period, as `section.ribs` has them first.
    """
    return zone_of_place(section, mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1])


def zone_of_place(section: CrossSection, place: ComplexArray) -> IntArray:
    """The same for places (n_point,) in m in the iron."""
    section = rotor_cell(section)
    away = np.stack([distance_to(rib, place) for rib in section.ribs])
    nearest = np.argmin(away, axis=0)
    reach = np.array([rib_reach(section, rib) for rib in section.ribs])
    inside = away[nearest, np.arange(len(place))] <= reach[nearest]
    return np.asarray(np.where(inside, nearest, len(section.ribs)))


def distance_to(rib: Rib, place: ComplexArray) -> FloatArray:
    """Distance (n_point,) in m from points to the line between a rib's ends."""
    chord = rib.end - rib.start
    share = ((place - rib.start) * np.conj(chord)).real / abs(chord) ** 2
    return np.asarray(np.abs(place - rib.start - np.clip(share, 0.0, 1.0) * chord))


def rib_reach(section: CrossSection, rib: Rib) -> float:
    """How far a rib's zone goes from the line between its ends, in m; at least its width."""
    paths = [r.outer for r in section.rotor if base_name(r.name).startswith("barrier_")]
    ends = [_reach_on(path, point) for path in paths for point in (rib.start, rib.end)]
    return max(rib.width, *ends)


def _reach_on(path: Path, point: Point) -> float:
    """Distance in m from a point of the path to the far end of its edge and adjoining fillets."""
    reach = 0.0
    for k, edge in enumerate(path.edges):
        if not _is_on(edge, point):
            continue
        reach = max(reach, abs(edge.start - point), abs(edge.end - point))
        if edge.is_line:
            around = (path.edges[k - 1], path.edges[(k + 1) % len(path.edges)])
            tips = [tip for fillet in around for tip in (fillet.start, fillet.end)]
            # The wide arcs of a barrier adjoin no straight side of a rib: fillets come between.
            reach = max(reach, *(abs(tip - point) for tip in tips))
    return reach


def _is_on(edge: Edge, point: Point) -> bool:
    """Whether a point lies on an edge."""
    chord = edge.end - edge.start
    if edge.is_line:
        local = (point - edge.start) / chord
        return abs(local.imag * chord) < ON_EDGE_TOL and -1e-6 < local.real < 1.0 + 1e-6
    ray = point - edge.centre
    if abs(abs(ray) - edge.radius) >= ON_EDGE_TOL:
        return False
    turn = float(np.angle(ray / (edge.start - edge.centre)))
    share = turn % (2.0 * np.pi) if edge.sweep > 0.0 else -(-turn % (2.0 * np.pi))
    return bool(abs(share) <= abs(edge.sweep) + 1e-6)
