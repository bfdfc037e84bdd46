"""The edge of a pole over a flat plane, by conformal mapping.

Rectangular pole (corner at x = 0, face at height g for x < 0, side upward), potential difference U,
B_0 = mu0 U / g. Schwarz-Christoffel mapping (derived): on the plane B/B_0 = 1/s with
x/g = (2 s + ln((s - 1)/(s + 1)))/pi.

The open side is closed by an arc of 60 g about the origin, a line of flux to within 1/60^2.
"""

import math

import numpy as np
import pytest
from plain_field import Material, PlainField, solve_plain
from scipy.interpolate import CubicSpline

from lamwright.geometry.curves import Path, arc, line
from lamwright.geometry.section import Region
from lamwright.solver.kernel import quadrature
from lamwright.solver.mesh import RegionSettings, mesh_regions
from lamwright.solver.mesh_sizes import SizeSources
from lamwright.solver.steel import MU_0, linear_law

GAP, LEFT, FAR = 0.5e-3, 3e-3, 30e-3  # m
B_0 = 0.8  # T, aimed at; the field is scaled to it


@pytest.fixture(scope="module")
def pole_edge() -> PlainField:
    """The field, scaled so that B = B_0 between the faces far from the edge."""
    corner = complex(0.0, GAP)
    a, b, c, d = complex(-LEFT, 0.0), complex(FAR, 0.0), complex(0.0, FAR), complex(-LEFT, GAP)
    edges = (line(a, b), arc(b, c, 0j, ccw=True), line(c, corner), line(corner, d), line(d, a))
    place = np.linspace(-4.0, 4.0, 81) * GAP
    mesh = mesh_regions(
        [Region("air", "air", Path(edges))],
        lambda edge: 0.25 * GAP if edge.start in (d, corner) else 1e-3,
        RegionSettings(growth=0.15),
        refine_at=SizeSources(
            np.append(place + 0j, corner),
            np.append(np.full(place.size, 0.08 * GAP), 0.001 * GAP),
        ),
    )
    x, y = mesh.nodes.T
    left = np.flatnonzero(np.abs(x + LEFT) < 1e-9)
    right = np.flatnonzero(np.abs(np.hypot(x, y) - FAR) < 1e-8)
    air = Material(np.arange(mesh.elements.shape[0]), linear_law(1.0))
    flux = -1e-3  # Wb/m; B_y = -dA/dx
    field = solve_plain(mesh, (air,), np.zeros(x.size), {0.0: left, flux: right}, 1e-3 / MU_0)
    on_plane = np.flatnonzero(np.abs(y) < 1e-9)
    on_plane = on_plane[np.argsort(x[on_plane])]
    b_left = -CubicSpline(x[on_plane], field.a[on_plane])(-0.8 * LEFT, 1)
    scale = B_0 / float(b_left)
    return PlainField(mesh, field.a * scale, field.energy * scale**2, 0.0, field.report)


PLANE = {-2.0: 0.999495, -1.0: 0.988634, -0.5: 0.950547, 0.0: 0.833557}  # x/g: B/B_0
PLANE |= {0.5: 0.644587, 1.0: 0.478153, 2.0: 0.290626, 3.0: 0.203311}


@pytest.mark.parametrize("x", PLANE)
def test_flux_density_on_the_plane(pole_edge: PlainField, x: float) -> None:
    """B/B_0 at x/g within 0.5 %, as the slope of A along the plane."""
    mesh = pole_edge.mesh
    plane = np.flatnonzero(np.abs(mesh.nodes[:, 1]) < 1e-9)
    plane = plane[np.argsort(mesh.nodes[plane, 0])]
    slope = CubicSpline(mesh.nodes[plane, 0], pole_edge.a[plane])(x * GAP, 1)
    assert -float(slope) / B_0 == pytest.approx(PLANE[x], rel=5e-3)


def node_at(field: PlainField, place: complex) -> int:
    return int(np.argmin(np.hypot(*(field.mesh.nodes - [place.real, place.imag]).T)))


def test_face_carries_flux_of_an_extra_width(pole_edge: PlainField) -> None:
    """Flux of the face = B_0 (width + (2 - 2 ln 2)/pi g) per edge; the extra width within 0.5 %."""
    flux = pole_edge.a[node_at(pole_edge, -LEFT + 0j)] - pole_edge.a[node_at(pole_edge, 1j * GAP)]
    extra = flux / B_0 - LEFT
    assert extra / GAP == pytest.approx((2.0 - 2.0 * math.log(2.0)) / math.pi, rel=5e-3)


@pytest.mark.parametrize(("h", "flux"), [(1, 0.693363), (2, 0.971980), (4, 1.30686), (9, 1.75206)])
def test_flux_of_the_side(pole_edge: PlainField, h: float, flux: float) -> None:
    """Flux from the side up to h above the corner, in mu0 U = B_0 g, within 0.5 %."""
    x, y = pole_edge.mesh.nodes.T
    side = np.flatnonzero((np.abs(x) < 1e-9) & (y > GAP * (1.0 - 1e-9)))
    side = side[np.argsort(y[side])]
    a_side = np.interp((1.0 + h) * GAP, y[side], pole_edge.a[side])
    assert (pole_edge.a[side[0]] - a_side) / (B_0 * GAP) == pytest.approx(flux, rel=5e-3)


def test_sideways_force_on_the_edge(pole_edge: PlainField) -> None:
    """Force along x = B_0^2 g/(2 mu0) = 127.324 N/m (virtual work), within 0.5 %.

    Maxwell's stress weighted over the air's area by a function that is 1 on the pole and 0 on the
    plane, as the torque is over the gap (Coulomb 1983, from memory; derived from div T = 0), with
    the end terms on the left line and the arc, and the part of the side beyond the arc (0.7 %).
    """
    mesh = pole_edge.mesh
    x, y = mesh.nodes.T
    to_pole = np.where(x < 0.0, GAP - y, np.hypot(x, np.maximum(GAP - y, 0.0)))
    w = y / np.maximum(y + to_pole, 1e-12)
    quad = quadrature(mesh.nodes, mesh.elements, 6)
    grad_a = np.einsum("eqdi,ei->eqd", quad.grad, pole_edge.a[mesh.elements])
    grad_w = np.einsum("eqdi,ei->eqd", quad.grad, w[mesh.elements])
    b_x, b_y = grad_a[..., 1], -grad_a[..., 0]
    t_xx, t_xy = 0.5 * (b_x**2 - b_y**2) / MU_0, b_x * b_y / MU_0
    inside = np.sum(quad.weight * (t_xx * grad_w[..., 0] + t_xy * grad_w[..., 1]))
    left = B_0**2 / (2.0 * MU_0) * 0.5 * GAP  # w = y / g
    # On the arc B = (2 / pi) mu0 U / r along the arc: -B^2/(2 mu0) int w cos(theta) r dtheta.
    b_far = 2.0 / math.pi * B_0 * GAP / FAR
    theta = np.linspace(0.0, 0.5 * math.pi, 2001)
    w_far = np.sin(theta) / (np.sin(theta) + np.cos(theta))
    arc_term = -(b_far**2) / (2.0 * MU_0) * FAR * np.trapezoid(w_far * np.cos(theta), theta)
    beyond = b_far**2 / (2.0 * MU_0) * FAR  # the side beyond the arc, B = (2 / pi) mu0 U / y
    assert left + arc_term - inside + beyond == pytest.approx(127.324, rel=5e-3)
