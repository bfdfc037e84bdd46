"""Steel ring round a wire: Ampere's law gives H, so B(H) is met exactly.

H = I / (2 pi r) in a ring of 30 to 50 mm, steel S19; flux = int B dr and W = int 2 pi r w dr by
quadrature of the explicit law (6 digits). The steel comes from 40 points, as from a card, to 2.1 T.
"""

import math

import numpy as np
import pytest
from annulus import Ring, ring_mesh
from plain_field import Material, PlainField, solve_plain
from steel_s19 import s19_tabulated

from lamwright.solver.integrals import element_middles, flux_density

INNER, OUTER = 0.030, 0.050  # m
SWEEP = math.pi / 6.0  # the field has no angle in it: any sector will do
TURN = 2.0 * math.pi

CASES = {  # I: B at 30, 40, 50 mm (T); flux (Wb/m); W, W' (J/m)
    20.0: (0.318315, 0.241224, 0.193926, 4.92155e-3, 0.0488411, 0.0495899),
    200.0: (1.46353, 1.33756, 1.22393, 26.7925e-3, 1.92161, 3.43689),
    2000.0: (1.86668, 1.84787, 1.83044, 36.9619e-3, 7.46038, 66.4634),
    20000.0: (2.02869, 1.99379, 1.97223, 39.9192e-3, 33.4211, 764.963),
}


def ring_field(current: float) -> PlainField:
    mesh = ring_mesh(INNER, (Ring("rotor_iron", OUTER, 12),), SWEEP, 6)
    radius, angle = np.hypot(*mesh.nodes.T), np.arctan2(mesh.nodes[:, 1], mesh.nodes[:, 0])
    inside = np.flatnonzero(np.abs(radius - INNER) < 1e-9)
    inside = inside[np.argsort(angle[inside])]
    # H along the inner circle, by Simpson's rule on each edge: I / (2 pi) per radian.
    share = np.zeros(inside.size)
    for k in range(0, inside.size - 2, 2):
        share[k : k + 3] += np.array([1.0, 4.0, 1.0]) / 6.0
    load = np.zeros(radius.size)
    load[inside] = current / TURN * SWEEP * share / share.sum()
    outside = np.flatnonzero(np.abs(radius - OUTER) < 1e-9)
    steel = Material(np.arange(mesh.elements.shape[0]), s19_tabulated())
    return solve_plain(mesh, (steel,), load, {0.0: outside}, scale=load.sum())


@pytest.mark.parametrize("current", CASES)
def test_ring_round_a_wire(current: float) -> None:
    """B within 1e-3 (the curve is tabulated), flux and energies within 5e-4.

    The 2000 A row finds a wrong curve beyond the points, the 20 A row a wrong initial slope.
    """
    b_30, b_40, b_50, flux, energy, coenergy = CASES[current]
    field = ring_field(current)
    radius = np.hypot(*field.mesh.nodes.T)
    a_inner = field.a[np.abs(radius - INNER) < 1e-9]
    assert a_inner == pytest.approx(flux, rel=5e-4)
    assert field.energy * TURN / SWEEP == pytest.approx(energy, rel=5e-4)
    assert field.coenergy * TURN / SWEEP == pytest.approx(coenergy, rel=5e-4)

    r = np.hypot(*element_middles(field.mesh).T)
    b = np.hypot(*flux_density(field.mesh, field.a).T)
    fit = np.polynomial.Polynomial.fit(r, b, 6)
    for place, expected in ((0.030, b_30), (0.040, b_40), (0.050, b_50)):
        assert fit(place) == pytest.approx(expected, rel=1e-3)
