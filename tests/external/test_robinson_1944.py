"""Mean hoop stress of a spinning ring, its burst speed and the speed of first yield.

Source: Robinson, Trans. ASME 66 (1944) A-373 (from memory): a ring bursts when its mean hoop
stress rho omega^2 (b^3 - a^3)/(3 (b - a)) meets the yield strength; equilibrium of half a ring,
derived. First yield is elastic (see test_timoshenko_goodier_1970). Check values C3: yield 350 MPa,
b = 50 mm, 18 000 rpm. What is tested is what the tool states of a rib: mean tension, the speed at
which it yields on average, margin. The plastic limit itself is not computed.
Tolerance: mean 1e-4, nodal forces are in equilibrium but for the rim's chords; first yield 0.3 %,
half of 0.5 % of stress.
"""

import cmath
import math

import numpy as np
import pytest

from lamwright.geometry.curves import circle
from lamwright.geometry.section import Region, Rib
from lamwright.postprocess.ribs import section_stress
from lamwright.solver.elastic import centrifugal_force, elastic_body, von_mises
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.rib_loads import rib_loads
from tests.plates import (
    MPA,
    SPEED,
    STEEL,
    Field,
    balanced_supports,
    fine_arcs,
    pulled,
    sector,
    spun,
)

QUARTER, YIELD, RIM = 0.5 * math.pi, 350.0 * MPA, 50e-3
RPM = 30.0 / math.pi


def ring(bore: float) -> tuple[Field, Rib]:
    """A spun ring and its section along a ray."""
    ray = cmath.exp(0.25j * math.pi)
    field = spun(sector(bore, RIM, QUARTER), QUARTER, fine_arcs(1e-3, 2.5e-3, bore))
    return field, Rib("cut", "tangential", 1, bore * ray, RIM * ray)


def whole_disc() -> tuple[Field, Rib]:
    """A whole spun disc and its section along a diameter; three supports carry nothing."""
    mesh = mesh_regions([Region("disc", "rotor_steel", circle(0j, RIM))], lambda edge: 2.5e-3)
    spin = centrifugal_force(elastic_body(mesh, STEEL), SPEED)
    return pulled(mesh, balanced_supports(RIM), [], extra=spin), Rib(
        "cut", "tangential", 1, -1j * RIM, 1j * RIM
    )


@pytest.mark.parametrize(
    ("bore", "mean", "burst", "first_yield"),
    [
        (0.0, 22.6507, 70_756.3, 63_605.2),
        (15e-3, 31.4845, 60_014.7, 44_552.4),
        (30e-3, 44.3955, 50_540.2, 43_350.9),
    ],
)
def test_mean_hoop_burst_and_first_yield(bore, mean, burst, first_yield):
    """Both speeds go with the square root of yield over stress; no shear on a ray by symmetry.

    The shear is not an equilibrium of its own on a mesh without mirror: 0.1 % of the tension.
    """
    field, cut = ring(bore) if bore else whole_disc()
    load = rib_loads(field.body, field.moved, [cut], SPEED)[0]
    tension, shear, _ = section_stress(cut, load)
    assert tension / MPA == pytest.approx(mean, rel=1e-4)
    assert abs(shear) < 1e-3 * tension
    assert SPEED * math.sqrt(YIELD / tension) * RPM == pytest.approx(burst, rel=1e-4)
    peak = float(np.max(von_mises(field.stress)))
    assert SPEED * math.sqrt(YIELD / peak) * RPM == pytest.approx(first_yield, rel=3e-3)
