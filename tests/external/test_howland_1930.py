"""A round hole in the middle of a strip under tension.

Source: Howland, Phil. Trans. R. Soc. A 229 (1930); the fit 3 - 3.14 x + 3.667 x^2 - 1.527 x^3 of
its net stress concentration, and Heywood's 2 + 0.284 (1 - x) - 0.600 (1 - x)^2 + 1.32 (1 - x)^3,
x = d/W, both as in Pilkey, Peterson's Stress Concentration Factors, 3rd ed. 2008 (fits from
memory). Check values C5; finite element and boundary collocation values C9.
"""

import math

import pytest

from lamwright.geometry.curves import Edge, Path, arc, line
from lamwright.geometry.section import Region
from lamwright.solver.mesh import mesh_regions
from tests.plates import MPA, at_x, at_y, fine_arcs, pulled, uniform

RADIUS, PULL = 1e-3, 100.0 * MPA


def gross_factor(x: float) -> float:
    """Largest stress at the hole over the stress far away, d/W = x: a quarter on rollers.

    The strip is pulled at three widths from the hole (there its trace is below 1e-4, St Venant).
    """
    half = RADIUS / x
    length = RADIUS + 6.0 * half
    edges: list[Edge] = [
        line(RADIUS + 0j, length + 0j),
        line(length + 0j, length + 1j * half),
        line(length + 1j * half, 1j * half),
        line(1j * half, 1j * RADIUS),
        arc(1j * RADIUS, RADIUS + 0j, 0j, ccw=False),
    ]
    fine = 2 * math.pi * RADIUS / 72
    sizes = fine_arcs(fine, min(half / 3.0, 2e-3), RADIUS)
    mesh = mesh_regions([Region("strip", "rotor_steel", Path(tuple(edges)))], sizes)
    field = pulled(
        mesh, [(at_x(0.0), 1), (at_y(0.0), 1j)], [(at_x(length), uniform(PULL, 0.0))]
    )  # fmt: skip
    return float(field.polar(1j * RADIUS)[1]) / PULL


@pytest.mark.parametrize(
    ("x", "gross", "fit", "heywood"),
    [
        (0.1, 3.0361, 2.72114, 2.73188),
        (0.2, 3.1526, 2.50646, 2.51904),
        (0.3, 3.3744, 2.34680, 2.35756),
        (0.5, 4.3476, 2.15587, 2.15700),
    ],
)
def test_hole_in_a_strip(x, gross, fit, heywood):
    """Gross factor within 0.5 % of C9's values, net factor within 1 % of both published fits.

    The fits are 0.4 to 0.8 % low (check values C9), which is why theirs is 1 %.
    """
    found = gross_factor(x)
    assert found == pytest.approx(gross, rel=5e-3)
    assert 3 - 3.14 * x + 3.667 * x**2 - 1.527 * x**3 == pytest.approx(fit, rel=1e-5)
    y = 1 - x
    assert 2 + 0.284 * y - 0.600 * y**2 + 1.32 * y**3 == pytest.approx(heywood, rel=1e-5)
    assert found * (1 - x) == pytest.approx(fit, rel=1e-2)
    assert found * (1 - x) == pytest.approx(heywood, rel=1e-2)
