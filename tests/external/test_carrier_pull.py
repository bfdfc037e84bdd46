"""The pull of a flux carrier on its ribs, estimated by hand.

Source: check values C8, derived: the centrifugal force of a ring sector R1..R2 of half angle alpha
along its middle is rho omega^2 (R2^3 - R1^3)/3 2 sin(alpha); ribs pulled straight share it.
Data there: 45..49.5 mm, 30 degrees, 7650 kg/m^3, 18 000 rpm: 273 280 N per metre.
"""

import cmath
import math
from dataclasses import replace

import pytest

from lamwright.geometry.curves import Path, arc, line
from lamwright.geometry.section import Region, Rib
from lamwright.postprocess.ribs import section_stress
from lamwright.solver.elastic import centrifugal_force, elastic_body
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.rib_loads import rib_loads
from tests.plates import MPA, SPEED, STEEL, at_x, at_y, pulled

INNER, OUTER, HALF = 45e-3, 49.5e-3, math.radians(30.0)
PULL = STEEL.density * SPEED**2  # rho omega^2, N/m^4


def test_centrifugal_force_of_a_ring_sector():
    """The nodal forces of the sector alone add up to 273 280 N/m; 1e-5 for the arcs' chords."""
    first, last = cmath.exp(-1j * HALF), cmath.exp(1j * HALF)
    path = Path(
        (
            line(INNER * first, OUTER * first),
            arc(OUTER * first, OUTER * last, 0j, ccw=True),
            line(OUTER * last, INNER * last),
            arc(INNER * last, INNER * first, 0j, ccw=False),
        )
    )
    mesh = mesh_regions([Region("carrier", "rotor_steel", path)], lambda edge: 1.5e-3)
    force = centrifugal_force(elastic_body(mesh, STEEL), SPEED).sum(axis=0)
    expected = PULL * (OUTER**3 - INNER**3) / 3.0 * 2.0 * math.sin(HALF)
    assert expected == pytest.approx(273_280.0, rel=1e-5)
    assert force[0] == pytest.approx(expected, rel=1e-5)
    assert abs(force[1]) < 1e-6 * expected


def test_one_radial_rib_holds_its_carrier():
    """A straight rib of 1 mm on the middle line: 273.28 MPa of the carrier, and its own mass.

    The rib runs from a wall at 40 mm through the carrier's inner face, so its section at 42 mm
    carries the sector and the rib's part beyond: equilibrium, 0.05 % for the arcs' chords and the
    sliver between rib and inner face (w^2/12 R, 1e-6 of the carrier).
    """
    width, wall, cut_at = 1e-3, 40e-3, 42e-3
    last = cmath.exp(1j * HALF)
    foot = math.sqrt(INNER**2 - 0.25 * width**2) + 0.5j * width
    edges = (
        line(complex(wall), complex(OUTER)),
        arc(complex(OUTER), OUTER * last, 0j, ccw=True),
        line(OUTER * last, INNER * last),
        arc(INNER * last, foot, 0j, ccw=False),
        line(foot, wall + 0.5j * width),
        line(wall + 0.5j * width, complex(wall)),
    )
    region = Region("carrier", "rotor_steel", Path(edges))
    mesh = mesh_regions([region], lambda edge: 0.15e-3 if edge.length < 6e-3 else 1e-3)
    spin = centrifugal_force(elastic_body(mesh, STEEL), SPEED)
    field = pulled(mesh, [(at_x(wall), 1), (at_y(0.0), 1j)], [], extra=spin)
    # Half the rib is meshed: its section from the middle line to its side.
    cut = Rib("rib", "radial", 1, cut_at + 0j, cut_at + 0.5j * width)
    tension, _, _ = section_stress(cut, rib_loads(field.body, field.moved, [cut], SPEED)[0])
    own = PULL * (INNER**2 - cut_at**2) / 2.0
    assert (tension - own) / MPA == pytest.approx(273.280, rel=5e-4)


def test_a_mass_on_two_ribs():
    """50 g at 40 mm in a stack of 100 mm: 7106.12 N; on two ribs of 1 mm: 35.5306 MPa.

    A 2 mm block of that mass: its load is linear in the radius, so its centre alone counts.
    """
    corners = [1e-3 * z for z in (39 - 1j, 41 - 1j, 41 + 1j, 39 + 1j)]
    path = Path(tuple(line(a, b) for a, b in zip(corners, [*corners[1:], corners[0]], strict=True)))
    mesh = mesh_regions([Region("mass", "rotor_steel", path)], lambda edge: 1e-3)
    stack, area = 0.1, 4e-6
    heavy = replace(STEEL, density=0.05 / (stack * area))
    force = stack * centrifugal_force(elastic_body(mesh, heavy), SPEED).sum(axis=0)
    assert force == pytest.approx([7106.12, 0.0], rel=1e-6, abs=1e-6)
    assert force[0] / (2 * 1e-3 * stack) / MPA == pytest.approx(35.5306, rel=2e-6)
