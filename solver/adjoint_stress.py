"""Slope of the ribs' peak stress by the places of all nodes: the adjoint of plane stress.

The largest of many stresses has no slope where two are equal, so it is smoothed,

    J = (sum_n l_n vm_n^p / sum_n l_n)^(1/p)

over the nodes n on free edges of all ribs' zones, with the von Mises stresses that are reported
(`stress_recovery`: on a free edge sigma = E epsilon along it). l_n is the length of edge that the
node stands for (Simpson's shares); without it nodes that lie closer on one side of the peak would
draw the slope there, from mesh to mesh by 0.1 MPa per degree. It is held while the mesh moves: what
J counts are nodes, not a longer edge. J lies below the largest, and this bias, which hardly depends
on any key, is returned. What lies inside a rib is left out: bending and notches put the peak on its
surface. The slope of J is a weighted sum of the nodes' slopes, with nearly all weight on those near
the peak.

With K u = f and K lambda = dJ/du:  dJ/dx at constant u + lambda . (df/dx - dK/dx u).
Source: derived; adjoint method, textbook matter. Cost: one factorisation, one solution more.
Axes: n_node, n_elem, n_qp, n_edge free edges, 2 directions, 3 stresses xx yy xy, 6 nodes.
"""

from dataclasses import dataclass

import numpy as np

from lamwright.geometry.section import CrossSection, rotor_cell

from .elastic import ElasticBody, ElasticMaterial, elastic_body, stress_of_strain, summed, von_mises
from .isoparametric import boundary_edges, points_at, shape, six_points
from .rib_zones import zone_of_node
from .rotor_stress import sides_of, spin_centre
from .stiffness import SupportedBody, supported
from .supports import unsupported, with_coupled_sides, without_drift
from .types import FloatArray, IntArray, PlanarMesh

# p of the norm, between a smooth figure and one that only nodes within 1 % of the peak make.
SHARPNESS = 200.0
ON_AXIS_TOL = 1e-6  # of the rotor's radius: far above rounding and a mesh's own unbalance
# Derivatives along an edge at its start, end and middle by its three nodes, per unit of place.
EDGE_SLOPE: FloatArray = np.array([[-3.0, -1.0, 4.0], [1.0, 3.0, -4.0], [-1.0, 1.0, 0.0]])


@dataclass(frozen=True, slots=True, eq=False)
class PeakSlope:
    """The smoothed peak of the ribs, and its slope by the nodes' places."""

    smoothed: float  # Pa
    peak: float  # Pa, largest of the nodes that count
    slope: FloatArray  # (n_node, 2), Pa/m

    @property
    def bias(self) -> float:
        """By how much the smoothed peak lies above the largest, relative to it; negative."""
        return self.smoothed / self.peak - 1.0


@dataclass(frozen=True, slots=True, eq=False)
class SpinningPole:
    """One pole of the lamination with a free bore, spinning: what rotor_stress solves."""

    held: SupportedBody
    edges: IntArray  # (n_edge, 3), free edges: start, end, middle
    counts: IntArray  # (n_counts,), nodes on free edges of ribs
    share: FloatArray  # (n_counts,), of these edges' length that each stands for
    speed: float  # rad/s

    @property
    def body(self) -> ElasticBody:
        """Mesh and material."""
        return self.held.body


def spinning_pole(
    section: CrossSection, mesh: PlanarMesh, material: ElasticMaterial, speed: float
) -> SpinningPole:
    """Ready to be solved: sides coupled, bore free, no turning about the axis.

    Args:
        section: a sector, for the ribs.
        mesh: of the iron of the rotor's period, refined as far as the figure needs.
        material: of the iron.
        speed: rad/s.

    Raises:
        ValueError: for a rotor without symmetry, which spins about a point that moves with it.
    """
    section = rotor_cell(section)
    sides = sides_of(section, mesh)
    supports = with_coupled_sides(unsupported(mesh), mesh, sides)
    supports = without_drift(supports, mesh, sides)
    on_side = np.zeros(len(mesh.nodes), dtype=np.bool_)
    on_side[sides.first] = on_side[sides.second] = True
    edges = boundary_edges(mesh)
    edges = edges[~on_side[edges[:, 2]]]
    in_rib = zone_of_node(section, mesh) < len(section.ribs)
    nodes = np.unique(edges)
    counts = nodes[in_rib[nodes] & ~on_side[nodes]]
    share = _length_of_node(mesh, edges)[counts]
    body = elastic_body(mesh, material)
    if abs(spin_centre(body, sides)) > ON_AXIS_TOL * section.rotor_radius:
        raise ValueError("slopes of the stress of an unbalanced rotor are not computed")
    return SpinningPole(supported(body, supports), edges, counts, share / share.sum(), speed)


def smoothed_peak(pole: SpinningPole, moved: FloatArray) -> tuple[float, float]:
    """The smoothed and the largest von Mises stress in Pa of the ribs' free edges.

    Args:
        pole: what is spinning.
        moved: (n_node, 2), its displacement in m.
    """
    value, peak, _ = _smoothed(_edge_stress(pole, moved)[pole.counts], pole.share)
    return value, peak


def peak_slope(pole: SpinningPole, moved: FloatArray) -> PeakSlope:
    """The smoothed peak of the ribs and its slope.

    Args:
        pole: what is spinning.
        moved: (n_node, 2), its displacement in m, solved on the same mesh.
    """
    mesh = pole.body.mesh
    stress = _edge_stress(pole, moved)[pole.counts]
    value, peak, weight = _smoothed(stress, pole.share)
    sx, sy, txy = stress.T
    # d sigma_vm / d (sx, sy, txy), derived.
    by_stress = np.stack([2.0 * sx - sy, 2.0 * sy - sx, 6.0 * txy], axis=1)
    of_node = np.zeros((len(mesh.nodes), 3))
    of_node[pole.counts] = (weight / (2.0 * von_mises(stress)))[:, None] * by_stress
    by_moved, by_place = _edge_slopes(pole, moved, of_node)
    dual = pole.held.displacement(by_moved, held=False)
    return PeakSlope(value, peak, by_place + _work_slope(pole, moved, dual))


def _smoothed(stress: FloatArray, share: FloatArray) -> tuple[float, float, FloatArray]:
    """Smoothed and largest von Mises stress of nodes (n, 3), and d smoothed / d node (n,)."""
    level = von_mises(stress)
    peak = float(level.max())
    smoothed = peak * float(share @ (level / peak) ** SHARPNESS) ** (1.0 / SHARPNESS)
    return smoothed, peak, share * (level / smoothed) ** (SHARPNESS - 1.0)


def _edge_stress(pole: SpinningPole, moved: FloatArray) -> FloatArray:
    """Stress (n_node, 3) at nodes on free edges, the mean of their edges'; 0 elsewhere."""
    mesh, edges = pole.body.mesh, pole.edges
    along, moves = EDGE_SLOPE @ mesh.nodes[edges], EDGE_SLOPE @ moved[edges]
    length2 = np.sum(along**2, axis=2)
    factor = _modulus(pole)[:, None] * np.sum(along * moves, axis=2) / length2**2
    x, y = along[..., 0], along[..., 1]
    stress = np.stack([x * x, y * y, x * y], axis=2) * factor[..., None]
    return np.asarray(summed(edges, stress, len(mesh.nodes)) / _met(pole)[:, None])


def _edge_slopes(
    pole: SpinningPole, moved: FloatArray, of_node: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Slopes (n_node, 2) of sum(of_node * edge stress) by displacements and by places.

    With t along the edge, m its displacement, S = t . m, L = t . t, q = a . (tx^2, ty^2, tx ty),
    a place adds E S q / L^2.
    """
    mesh, edges = pole.body.mesh, pole.edges
    t, m = EDGE_SLOPE @ mesh.nodes[edges], EDGE_SLOPE @ moved[edges]
    a = (of_node / _met(pole)[:, None])[edges]  # (n_edge, 3 places, 3)
    modulus = _modulus(pole)[:, None]
    x, y = t[..., 0], t[..., 1]
    s, length2 = np.sum(t * m, axis=2), np.sum(t * t, axis=2)
    q = a[..., 0] * x * x + a[..., 1] * y * y + a[..., 2] * x * y
    q_t = np.stack([2.0 * a[..., 0] * x + a[..., 2] * y, 2.0 * a[..., 1] * y + a[..., 2] * x], 2)
    by_m = (modulus * q / length2**2)[..., None] * t
    by_t = (modulus / length2**2)[..., None] * (
        q[..., None] * m + s[..., None] * q_t - (4.0 * s * q / length2)[..., None] * t
    )
    by_moved, by_place = (np.einsum("pk,epd->ekd", EDGE_SLOPE, by) for by in (by_m, by_t))
    n_node = len(mesh.nodes)
    return summed(edges, by_moved, n_node), summed(edges, by_place, n_node)


def _work_slope(pole: SpinningPole, moved: FloatArray, dual: FloatArray) -> FloatArray:
    """Slope (n_node, 2) in N/m of lambda . (f - K u) by the places of the nodes.

    With d(d_k u) = -sum_e d_k v_e d_e u and f = sigma(u) : grad lambda (derived, as form_slope):
    G_i = int rho omega^2 [(x . lambda) grad N_i + N_i lambda]
          - int [f grad N_i - (sigma(lambda) grad N_i) . grad u - (sigma(u) grad N_i) . grad l].
    """
    body = pole.body
    mesh, grad, weight = body.mesh, body.quad.grad, body.quad.weight
    grad_u, grad_l = (
        np.einsum("eqdi,eik->eqdk", grad, field[mesh.elements]) for field in (moved, dual)
    )
    stress_u, stress_l = (_stress(body, g) for g in (grad_u, grad_l))
    density = np.einsum("eqdk,eqdk->eq", stress_u, grad_l)
    pull = np.einsum("eqdk,eqck->eqdc", stress_l, grad_u)
    pull += np.einsum("eqdk,eqck->eqdc", stress_u, grad_l)
    places = six_points()[0]
    n = shape(places)
    load = body.density * pole.speed**2  # (n_elem,), N/m^4
    dual_qp = np.einsum("qi,eik->eqk", n, dual[mesh.elements])
    work = load[:, None] * np.sum(points_at(mesh, places) * dual_qp, axis=2)
    for d in (0, 1):
        pull[..., d, d] += work - density
    slope = np.einsum("eq,eqdc,eqdi->eic", weight, pull, grad, optimize=True)
    slope += np.einsum("eq,qi,eqc->eic", load[:, None] * weight, n, dual_qp, optimize=True)
    return summed(mesh.elements, slope, len(mesh.nodes))


def _stress(body: ElasticBody, gradient: FloatArray) -> FloatArray:
    """Stresses (n_elem, n_qp, 2, 2) in Pa of displacement gradients of the same shape."""
    slide = gradient[..., 0, 1] + gradient[..., 1, 0]
    strain = np.stack([gradient[..., 0, 0], gradient[..., 1, 1], slide], axis=2)
    xx, yy, xy = np.moveaxis(stress_of_strain(body, strain), 2, 0)
    return np.stack([np.stack([xx, xy], axis=-1), np.stack([xy, yy], axis=-1)], axis=-2)


def _length_of_node(mesh: PlanarMesh, edges: IntArray) -> FloatArray:
    """Length (n_node,) in m of the edges that each node stands for, a middle for two thirds."""
    length = np.linalg.norm(mesh.nodes[edges[:, 1]] - mesh.nodes[edges[:, 0]], axis=1)
    shares = length[:, None, None] * np.array([[1.0], [1.0], [4.0]]) / 6.0
    return summed(edges, shares, len(mesh.nodes))[:, 0]


def _met(pole: SpinningPole) -> FloatArray:
    """How many free edges (n_node,) meet at each node, at least 1."""
    met = np.bincount(pole.edges.ravel(), minlength=len(pole.body.mesh.nodes))
    return np.maximum(met, 1).astype(np.float64)


def _modulus(pole: SpinningPole) -> FloatArray:
    """Young's modulus (n_edge,) in Pa of the element at each free edge."""
    mesh = pole.body.mesh
    element = np.zeros(len(mesh.nodes), dtype=np.int64)
    element[mesh.elements[:, 3:]] = np.arange(len(mesh.elements))[:, None]
    return np.asarray(pole.body.youngs_modulus[element[pole.edges[:, 2]]])
