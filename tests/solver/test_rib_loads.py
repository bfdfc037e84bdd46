"""Force and moment on a section: exact against statics on any mesh."""

import math

import numpy as np
import pytest

from lamwright.geometry.section import Region, Rib
from lamwright.solver.elastic import centrifugal_force, elastic_body
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.rib_loads import rib_loads
from tests.plates import (
    NODE_TOL,
    SPEED,
    STEEL,
    at_x,
    at_y,
    fine_arcs,
    of_stress,
    polygon,
    pulled,
    sector,
    spun,
    uniform,
)

LENGTH, DEPTH = 40e-3, 10e-3


def wall(z: np.ndarray) -> np.ndarray:
    """The bar's left end."""
    return np.abs(z.real) < NODE_TOL


def bar(traction):
    """A bar clamped at x = 0 under a traction at x = LENGTH, five elements deep."""
    region = Region(
        "bar",
        "rotor_steel",
        polygon(0j, LENGTH + 0j, LENGTH + 1j * DEPTH, 1j * DEPTH),
    )
    mesh = mesh_regions([region], lambda edge: 2e-3)
    return pulled(mesh, [(wall, 1), (wall, 1j)], [(at_x(LENGTH), traction)])


@pytest.mark.parametrize("x", [7.3e-3, 20e-3, 33.1e-3])
def test_a_cantilever_carries_shear_and_a_growing_moment(x):
    """End shear V along -y: force on what lies behind is -V, moment about the middle V (L - x).

    Seen from the root, the iron before the line pulls the iron behind it down: equilibrium, met to
    the solver's rounding on any mesh, wherever the line cuts it (1e-8).
    """
    shear = 1e5 * DEPTH
    field = bar(uniform(0.0, -1e5))
    # The normal is the line's direction turned by -90 degrees: upward line, normal along +x.
    cut = Rib("cut", "tangential", 1, x + 0j, x + 1j * DEPTH)
    fx, fy, moment = rib_loads(field.body, field.moved, [cut], 0.0)[0]
    assert abs(fx) < 1e-8 * shear
    assert fy == pytest.approx(-shear, rel=1e-8)
    assert moment == pytest.approx(-shear * (LENGTH - x), rel=1e-8)


def test_a_line_run_the_other_way_swaps_the_sides():
    """Start and end exchanged: what was before is behind; action equals reaction, 1e-8."""
    field = bar(uniform(3e5, -1e5))
    ends = (20e-3 + 0j, 20e-3 + 1j * DEPTH)
    there, back = (
        rib_loads(field.body, field.moved, [Rib("cut", "radial", 1, *pair)], 0.0)[0]
        for pair in (ends, ends[::-1])
    )
    assert back == pytest.approx(-there, rel=1e-8)


def test_pure_bending_is_all_moment():
    """Linear traction s y at the end: no force, moment -int s y^2 dy = -s h^3/12; 1e-8."""
    slope = 1e9
    field = bar(
        of_stress(lambda z: np.stack([slope * (z.imag - 0.5 * DEPTH), 0 * z.real, 0 * z.real], 1))
    )
    cut = Rib("cut", "radial", 1, 15e-3 + 0j, 15e-3 + 1j * DEPTH)
    fx, fy, moment = rib_loads(field.body, field.moved, [cut], 0.0)[0]
    whole = slope * DEPTH**3 / 12.0
    assert moment == pytest.approx(-whole, rel=1e-8)
    assert max(abs(fx), abs(fy)) * DEPTH < 1e-8 * whole


def test_centrifugal_force_beyond_a_line_is_what_it_carries():
    """A bar spun about its root: the line at x carries rho omega^2 (L^2 - x^2)/2 per depth.

    Pull behind the line is cut off exactly, so what is left is the solver's rounding: 1e-8.
    """
    region = Region("bar", "rotor_steel", polygon(0j, LENGTH + 0j, LENGTH + 1j * DEPTH, 1j * DEPTH))
    mesh = mesh_regions([region], lambda edge: 2e-3)
    spin = centrifugal_force(elastic_body(mesh, STEEL), SPEED)
    field = pulled(mesh, [(at_x(0.0), 1), (at_y(0.0), 1j)], [], extra=spin)
    for x in (5e-3, 21.7e-3, 36e-3):
        cut = Rib("cut", "radial", 1, x + 0j, x + 1j * DEPTH)
        fx, _, _ = rib_loads(field.body, field.moved, [cut], SPEED)[0]
        expected = STEEL.density * SPEED**2 * (LENGTH**2 - x**2) / 2.0 * DEPTH
        assert fx == pytest.approx(expected, rel=1e-8)


def test_heat_does_not_pull():
    """An even free strain in a free ring: no force on any section, rounding only."""
    field = spun(
        sector(15e-3, 50e-3, 1.0), 1.0, fine_arcs(2e-3, 5e-3, 15e-3), speed=0.0,
        heat=lambda nodes: np.full(len(nodes), 1e-3),
    )  # fmt: skip
    ray = np.exp(0.5j)
    cut = Rib("cut", "tangential", 1, complex(15e-3 * ray), complex(50e-3 * ray))
    strain = np.full(field.body.mesh.elements.shape, 1e-3)
    load = rib_loads(field.body, field.moved, [cut], 0.0, strain)[0]
    scale = STEEL.youngs_modulus * 1e-3 * 35e-3
    assert np.abs(load[:2]).max() < 1e-9 * scale
    assert math.isfinite(load[2])
