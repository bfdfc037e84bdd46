"""Mean hoop stress over a whole cut through the axis, and the speed at which it meets a strength.

A cut through the axis at the angle theta has the net length l(theta) of iron on both sides of the
axis; the half beyond it pulls with rho omega^2 int |distance to the cut| dA / 2 over all iron. Of
all cuts the one counts whose speed is lowest. For a ring it is rho omega^2 (b^3 - a^3)/(3 (b - a)).
Source: Robinson, Trans. ASME 66 (1944), from memory; for any outline derived from equilibrium.
It bounds the burst from above: the two halves moving apart are a motion of collapse that dissipates
yield x length for Tresca, and 2/sqrt(3) of it for von Mises (kinematic theorem).
Axes: n_angle cuts, n_edge pieces of the outline.
"""

import math

import numpy as np

from lamwright.solver.isoparametric import boundary_edges, points_at, quadrature, six_points
from lamwright.solver.types import FloatArray, PlanarMesh

CUTS = 720  # of half a turn: a quarter of a degree apart
MISES_FACTOR = 2.0 / math.sqrt(3.0)


def mean_hoop_speed(mesh: PlanarMesh, period: float, density: float, strength: float) -> float:
    """Lowest speed in rad/s at which the mean hoop stress of a whole cut is `strength` in Pa.

    Args:
        mesh: of the iron over one period, from the angle 0 on.
        period: rad, a whole part of a turn.
        density: kg/m^3 of the iron.
        strength: Pa.
    """
    copies = round(2.0 * math.pi / period)
    # Half a step off the axes, so that no cut runs along a side of the mesh.
    angle = (np.arange(CUTS) + 0.5) * math.pi / CUTS
    net = _net_length(mesh, angle % period) + _net_length(mesh, (angle + math.pi) % period)
    weight = quadrature(mesh).weight.ravel()
    place = (points_at(mesh, six_points()[0]) @ [1.0, 1.0j]).ravel()
    pull = np.zeros(CUTS)  # per rho omega^2, m^3
    for k, theta in enumerate(angle):
        turned = place * np.exp(-1j * theta)
        for copy in range(copies):
            pull[k] += 0.5 * weight @ np.abs((turned * np.exp(1j * copy * period)).imag)
    return float(np.sqrt(strength / density * (net / pull).min()))


def _net_length(mesh: PlanarMesh, angle: FloatArray) -> FloatArray:
    """Length (n_angle,) in m of iron on rays from the axis inside the mesh's sector.

    The body is left of an edge of the outline: a ray leaves it through an edge that goes round the
    axis counter-clockwise and enters it through one that goes clockwise.
    """
    edges = boundary_edges(mesh)
    halves = np.concatenate([edges[:, [0, 2]], edges[:, [2, 1]]])
    ends = mesh.nodes[halves] @ [1.0, 1.0j]  # (n_edge, 2)
    length = np.empty(len(angle))
    for k, theta in enumerate(angle):
        local = ends * np.exp(-1j * theta)
        first, second = local[:, 0], local[:, 1]
        crosses = (first.imag <= 0.0) != (second.imag <= 0.0)
        a, b = first[crosses], second[crosses]
        at = (a.real * b.imag - b.real * a.imag) / (b.imag - a.imag)
        length[k] = np.sum(np.where(at > 0.0, at * np.sign(b.imag - a.imag), 0.0))
    return length
