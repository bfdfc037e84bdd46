"""A flat bar with a step in its width, under tension: the stress in the fillet.

Source of the case: Pilkey, Peterson's Stress Concentration Factors, 3rd ed. 2008 (charts from
photoelasticity, which read 2 to 4 % low). The values are those of the check values C9: finite
elements of order 5, two meshes agree to the digits given. Tolerance 0.5 %.
"""

import math

import numpy as np
import pytest

from lamwright.geometry.curves import Path, arc, line
from lamwright.geometry.section import Region
from lamwright.solver.mesh import mesh_regions
from tests.plates import MPA, at_x, at_y, edges_on, fine_arcs, pulled, uniform

PULL = 100.0 * MPA  # on the narrow end
NARROW = 5e-3  # half width d/2


def fillet_factor(wide_share: float, fillet_share: float) -> float:
    """Largest stress over that of the narrow end, D/d and r/d given; the upper half on rollers."""
    wide, radius = NARROW * wide_share, 2 * NARROW * fillet_share
    reach = 6 * wide
    centre = radius + 1j * (NARROW + radius)
    edges = (
        line(-reach + 0j, reach + 0j),
        line(reach + 0j, reach + 1j * NARROW),
        line(reach + 1j * NARROW, radius + 1j * NARROW),
        arc(radius + 1j * NARROW, 1j * (NARROW + radius), centre, ccw=False),
        line(1j * (NARROW + radius), 1j * wide),
        line(1j * wide, -reach + 1j * wide),
        line(-reach + 1j * wide, -reach + 0j),
    )
    sizes = fine_arcs(0.5 * math.pi * radius / 24, 1.5e-3, radius)
    mesh = mesh_regions([Region("bar", "rotor_steel", Path(edges))], sizes)
    field = pulled(
        mesh, [(at_x(-reach), 1), (at_y(0.0), 1j)], [(at_x(reach), uniform(PULL, 0.0))]
    )  # fmt: skip
    arc_nodes = np.unique(edges_on(mesh, lambda z: np.abs(np.abs(z - centre) - radius) < 1e-9))
    return max(float(field.polar(complex(field.places[n]), centre)[1]) for n in arc_nodes) / PULL


@pytest.mark.parametrize(
    ("wide", "fillet", "factor"),
    [
        (1.5, 0.1, 2.2947),
        (1.5, 0.2, 1.8612),
        (2.0, 0.05, 3.231),
        (2.0, 0.1, 2.506),
        (1.2, 0.1, 1.968),
    ],
)
def test_stepped_bar(wide, fillet, factor):
    """Stress concentration on the narrow section, 0.5 %; Peterson's own fit reads 2.227 once."""
    assert fillet_factor(wide, fillet) == pytest.approx(factor, rel=5e-3)
