"""What a field is worth at the terminals and at the shaft: linkages, torque, energies.

All values are of the whole machine: a sector's integral times the number of sectors times
the stack length. Axes: n_elem elements, n_qp quadrature points, n_node nodes.
"""

import math

import numpy as np

from .isoparametric import shape, shape_slope
from .steel import MU_0, SteelLaw
from .types import FloatArray, PlanarMesh, Quadrature

_PHASES = 2.0 * math.pi / 3.0 * np.arange(3)


def phase_currents(i_d: float, i_q: float, theta_e: float) -> FloatArray:
    """Phase currents (3,) in A from dq currents, amplitude invariant, d axis at `theta_e` rad."""
    angle = theta_e - _PHASES
    currents: FloatArray = i_d * np.cos(angle) - i_q * np.sin(angle)
    return currents


def dq_values(abc: FloatArray, theta_e: float) -> tuple[float, float]:
    """D and q values of phase values (3,), the inverse of `phase_currents`."""
    angle = theta_e - _PHASES
    d = 2.0 / 3.0 * float(abc @ np.cos(angle))
    q = -2.0 / 3.0 * float(abc @ np.sin(angle))
    return d, q


def gap_torque(quad: Quadrature, places: FloatArray, a_elem: FloatArray, thickness: float) -> float:
    """Torque of a sector per metre of stack, Maxwell's stress averaged over the gap, in N.

    Source: Arkkio, Acta Polytechnica Scandinavica EE 59, 1987 (from memory; re-derived: the
    torque on any circle is r^2/mu0 int B_r B_theta d theta, averaged over the radius).

    Args:
        quad: of the gap's elements.
        places: (n_elem, n_qp, 2), positions of its points in m.
        a_elem: (n_elem, 6) in Wb/m.
        thickness: radial gap that the elements fill, in m.
    """
    grad_a = np.einsum("eqdi,ei->eqd", quad.grad, a_elem)
    b_x, b_y = grad_a[..., 1], -grad_a[..., 0]
    x, y = places[..., 0], places[..., 1]
    # T = 1/(mu0 delta) int r B_r B_theta dS, with r B_r = x B_x + y B_y, r B_theta = x B_y - y B_x
    product = (x * b_x + y * b_y) * (x * b_y - y * b_x) / np.hypot(x, y)
    return float(np.sum(quad.weight * product)) / (MU_0 * thickness)


def steel_energies(
    weight: FloatArray, b2: FloatArray, nu: FloatArray, law: SteelLaw
) -> tuple[float, float]:
    """Energy and coenergy of elements of one steel, per metre of stack, in J/m.

    Args:
        weight: of the quadrature points in m^2, any shape, as the others.
        b2: |B|^2 in T^2.
        nu: reluctivity in m/H.
        law: of the steel.
    """
    energy = float(np.sum(weight * law.energy_density(b2)))
    # int B dH = H B - int H dB, H B = nu |B|^2
    return energy, float(np.sum(weight * nu * b2)) - energy


def flux_density(mesh: PlanarMesh, a: FloatArray) -> FloatArray:
    """Flux density in the middle of every element.

    Args:
        mesh: of a part.
        a: (n_node,) vector potential in Wb/m.

    Returns:
        (n_elem, 2), B_x and B_y in T.
    """
    middle = np.full((1, 2), 1.0 / 3.0)
    slope = shape_slope(middle)[0]  # (2, 6)
    jacobian = np.einsum("ki,eid->ekd", slope, mesh.nodes[mesh.elements])
    grad_a = np.linalg.solve(jacobian, (a[mesh.elements] @ slope.T)[..., None])[..., 0]
    return np.stack([grad_a[:, 1], -grad_a[:, 0]], axis=-1)


def element_middles(mesh: PlanarMesh) -> FloatArray:
    """Positions (n_elem, 2) in m where `flux_density` holds."""
    middles: FloatArray = shape(np.full((1, 2), 1.0 / 3.0))[0] @ mesh.nodes[mesh.elements]
    return middles
