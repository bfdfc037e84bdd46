"""In-plane vibration of bars, rings and discs against closed forms.

Rings and discs: u = grad phi + curl psi, phi and psi Bessel functions of omega r / c_p and
omega r / c_s, times cos and sin of n theta; the determinant of the stresses on the free edges is 0
(derived here; Love 1927 for the disc). c_p^2 = E / (rho (1 - nu^2)), c_s^2 = E / (2 rho (1 + nu)).
Thin rings: Hoppe 1871. Elements are of second order, so a tolerance of 1e-3 to 5e-3 is what a
coarse mesh leaves.
"""

import math

import numpy as np
import pytest
from scipy.optimize import brentq
from scipy.special import jv, jvp, yv, yvp

from lamwright.geometry.section import Region
from lamwright.solver.elastic import ElasticMaterial, elastic_body
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.modal import Period, index_modes, lowest_modes
from lamwright.solver.supports import (
    CoupledSides,
    coupled_sides,
    unsupported,
    with_coupled_sides,
    with_fixed,
)
from tests.annulus import Ring, ring_mesh
from tests.plates import STEEL, polygon

OUTER = 0.1  # m
C_P = math.sqrt(STEEL.youngs_modulus / STEEL.density / (1.0 - STEEL.poissons_ratio**2))
C_S = math.sqrt(STEEL.youngs_modulus / STEEL.density / 2.0 / (1.0 + STEEL.poissons_ratio))


def ring_period(
    inner: float, layers: int, around: int, periods: int, material: ElasticMaterial = STEEL
) -> Period:
    """A free ring (a disc for `inner` = 0) of outer radius OUTER, `around` elements in a period."""
    angle = 2.0 * math.pi / periods
    mesh = ring_mesh(inner, [Ring("iron", OUTER, layers)], angle, around)
    body = elastic_body(mesh, material)
    if periods == 1:
        none = np.zeros(0, dtype=np.int64)
        return Period(body, unsupported(mesh), CoupledSides(none, none, angle), 1)
    sides = coupled_sides(mesh, angle)
    supports = with_coupled_sides(unsupported(mesh), mesh, sides)
    return Period(body, supports, sides, periods)


def _edge_terms(n: int, omega: np.ndarray, radius: float, is_second: bool) -> np.ndarray:
    """Stresses (n_omega, 2, 2) over E / (1 - nu^2): rows radial, shear; columns phi, psi.

    u_r = phi' + n psi / r, u_theta = -n phi / r - psi' (with cos, sin n theta taken out).
    """
    nu, r = STEEL.poissons_ratio, radius
    z, zp = (yv, yvp) if is_second else (jv, jvp)
    columns = []
    for k, kind in ((omega / C_P, "phi"), (omega / C_S, "psi")):
        f, f1, f2 = z(n, k * r), k * zp(n, k * r), k * k * zp(n, k * r, 2)
        if kind == "phi":
            u, u1, v, v1 = f1, f2, -n * f / r, -n * f1 / r + n * f / r**2
        else:
            u, u1, v, v1 = n * f / r, n * f1 / r - n * f / r**2, -f1, -f2
        radial = u1 + nu * (u + n * v) / r
        shear = 0.5 * (1.0 - nu) * (v1 - v / r - n * u / r)
        columns.append(np.stack([radial, shear], axis=-1))
    return np.stack(columns, axis=-1)


def exact_frequencies(n: int, inner: float, highest: float) -> list[float]:
    """All frequencies in Hz up to `highest` of a free ring or disc with n waves, n >= 1."""

    def determinant(omega: np.ndarray) -> np.ndarray:
        matrix = _edge_terms(n, omega, OUTER, False)
        if inner > 0.0:
            low, second = (_edge_terms(n, omega, inner, s) for s in (False, True))
            upper = np.concatenate([matrix, _edge_terms(n, omega, OUTER, True)], axis=-1)
            matrix = np.concatenate([upper, np.concatenate([low, second], axis=-1)], axis=-2)
        return np.linalg.det(matrix / np.abs(matrix).max(axis=-2, keepdims=True))

    tried = 2.0 * math.pi * np.linspace(0.002 * highest, highest, 3000)
    values = determinant(tried)
    turns = np.flatnonzero(values[1:] * values[:-1] < 0.0)
    return [
        brentq(lambda x: float(determinant(np.array([x]))[0]), tried[k], tried[k + 1]) / 2 / math.pi
        for k in turns
    ]


@pytest.mark.parametrize("n", [1, 2, 3])
def test_a_solid_disc_as_by_bessel_functions(n):
    """The two lowest with n waves of a free disc, taken out of all modes of a whole circle.

    Each comes twice. Love 1927, derived above; 7 layers of elements leave 1e-3.
    """
    exact = exact_frequencies(n, 0.0, 40e3)[:2]
    modes = lowest_modes(ring_period(0.0, 7, 28, 1), 26)
    found = [mode.frequency for mode in modes if mode.waves == n][:4]
    assert found == pytest.approx(np.repeat(exact, 2)[: len(found)], rel=1e-3)
    assert len(found) >= 2


@pytest.mark.parametrize("share", [0.5, 0.9])
@pytest.mark.parametrize("n", [1, 2, 3, 4])
def test_a_free_ring_as_by_bessel_functions(share, n):
    """Thick and thin: the two lowest of cyclic index n, of nine periods.

    Three layers of elements across leave up to 4e-3, five 1e-3, eight 2e-4 (measured).
    """
    exact = exact_frequencies(n, share * OUTER, 120e3)[:2]
    period = ring_period(share * OUTER, 5, 8, 9)
    found = [m.frequency for m in index_modes(period, n, 3) if not m.is_rigid and m.waves == n]
    assert found
    assert found[:2] == pytest.approx(exact[: len(found[:2])], rel=2e-3)


@pytest.mark.parametrize("n", [2, 3, 4])
def test_a_thin_ring_bends_as_hoppe_says(n):
    """omega^2 = n^2 (n^2 - 1)^2 / (n^2 + 1) E I / (rho A R^4), a ring of h / R = 1 / 50.

    Shear and turning of the section, left out there, are of the order (n h / R)^2 / 12: 5e-4.
    """
    h = OUTER / 50.5
    mean = OUTER - 0.5 * h
    bending = STEEL.youngs_modulus * h**2 / (12.0 * STEEL.density * mean**4)
    exact = math.sqrt(bending / (n**2 + 1)) * n * (n**2 - 1) / (2.0 * math.pi)
    modes = lowest_modes(ring_period(OUTER - h, 1, 12, 8), 4)
    found = [mode for mode in modes if mode.waves == n]
    assert found[0].frequency == pytest.approx(exact, rel=5e-3)
    assert found[0].wave_share > 0.999


def test_a_thin_ring_breathes():
    """Omega R = sqrt(E / rho); h / R = 1 / 50 leaves (h / R)^2 / 12 = 3e-5."""
    h = OUTER / 50.5
    speed = math.sqrt(STEEL.youngs_modulus / STEEL.density)
    exact = speed / (OUTER - 0.5 * h) / (2.0 * math.pi)
    modes = index_modes(ring_period(OUTER - h, 1, 12, 8), 0, 8)
    radial = [mode for mode in modes if not mode.is_rigid and mode.waves == 0]
    assert radial[0].frequency == pytest.approx(exact, rel=1e-3)


def test_a_narrow_wedge_held_at_its_tip_stretches():
    """U = a J_1(k r) + b Y_1(k r) without lateral strain's stress (nu = 0), derived: a bar's wave.

    u(inner) = 0, u'(outer) = 0, k = omega / sqrt(E / rho). One element wide, of 360 periods that
    all move outward alike.
    """
    material = ElasticMaterial(STEEL.youngs_modulus, 1e-9, STEEL.density)
    inner = 0.5 * OUTER
    period = ring_period(inner, 12, 1, 360, material)
    mesh = period.body.mesh
    bore = np.flatnonzero(np.hypot(*mesh.nodes.T) < inner + 1e-9)
    held = with_fixed(with_fixed(period.supports, bore, 0), bore, 1)
    supports = with_coupled_sides(held, mesh, period.sides)
    modes = index_modes(Period(period.body, supports, period.sides, 360), 0, 6)
    speed = math.sqrt(material.youngs_modulus / material.density)

    def condition(omega: float) -> float:
        k = omega / speed
        return float(jv(1, k * inner) * yvp(1, k * OUTER) - yv(1, k * inner) * jvp(1, k * OUTER))

    quarter = 2.0 * math.pi * speed / 4.0 / (OUTER - inner)
    exact = brentq(condition, 0.8 * quarter, 1.5 * quarter) / (2.0 * math.pi)
    radial = [m for m in modes if m.turned_share < 1e-6]
    assert radial[0].frequency == pytest.approx(exact, rel=1e-4)


def test_a_bar_stretches():
    """f_k = k c / (2 L), c = sqrt(E / rho), of a free slender strip, nu = 0; k = 1 to 3.

    It also bends, and turns and shifts as a whole: the stretching modes are those that move along.
    """
    material = ElasticMaterial(STEEL.youngs_modulus, 1e-9, STEEL.density)
    length, height = 0.2, 0.01
    mesh = mesh_regions(
        [_strip(length, height)],
        lambda _: height,
    )
    none = np.zeros(0, dtype=np.int64)
    sides = CoupledSides(none, none, 2.0 * math.pi)
    modes = index_modes(Period(elastic_body(mesh, material), unsupported(mesh), sides, 1), 0, 24)
    speed = math.sqrt(material.youngs_modulus / material.density)
    along = [
        mode.frequency
        for mode in modes
        if not mode.is_rigid
        and np.sum(np.abs(mode.shape[:, 0]) ** 2) > 0.9 * np.sum(np.abs(mode.shape) ** 2)
    ]
    exact = [k * speed / (2.0 * length) for k in (1, 2, 3)]
    assert along[:3] == pytest.approx(exact, rel=1e-4)


def _strip(length: float, height: float) -> Region:
    x, y = 0.5 * length, 0.5 * height
    outline = polygon(complex(-x, -y), complex(x, -y), complex(x, y), complex(-x, y))
    return Region("plate", "rotor_steel", outline)
