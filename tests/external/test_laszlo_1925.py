"""Elastic-plastic spinning ring: radius of the plastic front against speed.

Source: Laszlo, Z. angew. Math. Mech. 5 (1925), from memory; the equations are derived here. From
the bore a to the front c the ring yields and its stresses follow from equilibrium alone; beyond,
they are Lame's with the spin's own part,
    s_r = A + B/r^2 - (3 + nu)/8 rho omega^2 r^2,
    s_hoop = A - B/r^2 - (1 + 3 nu)/8 rho omega^2 r^2,
with s_r(b) = 0, both continuous at c. Strains do not enter, nor does the flow rule.
Tresca: s_hoop = yield, so s_r = yield (1 - a/r) - rho omega^2 (r^3 - a^3)/(3 r), closed form.
Data of check values C3, bore 15 mm. 2 % of the radius is asked and 1 % held, the front being
read from the area that has flowed: a layer of elements is 0.9 mm.
"""

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from lamwright.solver.elastic import centrifugal_force, elastic_body
from lamwright.solver.plastic import load_path
from lamwright.solver.plastic_kernel import plastic_body
from lamwright.solver.return_mapping import perfectly_plastic
from lamwright.solver.supports import (
    coupled_sides,
    unsupported,
    with_coupled_sides,
    without_drift,
)
from tests.annulus import Ring, ring_mesh
from tests.plates import MPA, STEEL

BORE, RIM, YIELD, NU = 15e-3, 50e-3, 350.0 * MPA, STEEL.poissons_ratio
ANGLE = math.pi / 6.0


def radial_tresca(c: float, pull: float) -> tuple[float, float]:
    """Radial and hoop stress in Pa at the front, plastic side; pull = rho omega^2."""
    return YIELD * (1.0 - BORE / c) - pull * (c**3 - BORE**3) / (3.0 * c), YIELD


def radial_mises(c: float, pull: float) -> tuple[float, float]:
    """The same where the hoop stress is on von Mises' ellipse."""

    def hoop(radial):
        return 0.5 * (radial + np.sqrt(4.0 * YIELD**2 - 3.0 * radial**2))

    found = solve_ivp(
        lambda r, s: (hoop(s) - s) / r - pull * r, (BORE, c), [0.0], rtol=1e-9, atol=1.0
    )
    radial = float(found.y[0, -1])
    return radial, float(hoop(radial))


LAWS = {"Tresca": radial_tresca, "von Mises": radial_mises}


def speed_of_front(c: float, criterion: str) -> float:
    """Speed in rad/s at which the front stands at c."""

    def jump(speed: float) -> float:
        pull = STEEL.density * speed**2
        radial, hoop = LAWS[criterion](c, pull)
        radial += (3 + NU) / 8 * pull * c**2
        hoop += (1 + 3 * NU) / 8 * pull * c**2
        big_a, big_b = 0.5 * (radial + hoop), 0.5 * (radial - hoop) * c**2
        return big_a + big_b / RIM**2 - (3 + NU) / 8 * pull * RIM**2

    return float(brentq(jump, 3000.0, 7000.0, xtol=1e-6))


@pytest.mark.parametrize("criterion", ["Tresca", "von Mises"])
def test_plastic_front_against_speed(criterion):
    """Fronts at 18 to 40 mm, one path of rising speed."""
    mesh = ring_mesh(BORE, (Ring("rotor_steel", RIM, 40),), ANGLE, 5)
    body = elastic_body(mesh, STEEL)
    sides = coupled_sides(mesh, ANGLE)
    supports = without_drift(with_coupled_sides(unsupported(mesh), mesh, sides), mesh, sides)
    plastic = plastic_body(body, supports, perfectly_plastic(YIELD), criterion)
    fronts = [18e-3, 22e-3, 27e-3, 33e-3, 40e-3]
    speeds = [speed_of_front(c, criterion) for c in fronts]
    assert speeds == sorted(speeds)
    path = load_path(plastic, centrifugal_force(body, 1.0), [speed**2 for speed in speeds])
    for c, state in zip(fronts, path.stops, strict=True):
        area = float(body.quad.weight[state.hardened > 0.0].sum())
        assert math.sqrt(BORE**2 + 2.0 * area / ANGLE) == pytest.approx(c, rel=1e-2)
