"""A hub shrunk on a solid shaft, at standstill and spinning.

Source: Lame's thick ring (1852), textbook matter; check values C2: shaft r = 15 mm, hub 15..50 mm,
same steel, radial interference 10 um. Once the shaft's oversize is a free strain of interference
/ a and the parts are tied; once they are in contact. Tolerance 0.5 % as asked.
"""

import cmath
import math

import numpy as np
import pytest

from lamwright.geometry.curves import Path, arc, line, reversed_edge
from lamwright.geometry.section import Region
from lamwright.solver.elastic import (
    ElasticMaterial,
    centrifugal_force,
    elastic_body,
    free_strain_force,
    node_stress,
)
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.pressed import Fit, Heat, Pressed, pressed
from lamwright.solver.pressed_stress import loosening, stress_at
from lamwright.solver.shaft import Shaft
from lamwright.solver.stiffness import displacement
from lamwright.solver.stress_recovery import turned_stress
from lamwright.solver.supports import (
    coupled_sides,
    unsupported,
    with_coupled_sides,
    with_fixed,
    with_radial,
)
from tests.annulus import Ring, ring_mesh, ring_on_shaft
from tests.plates import MPA, NODE_TOL, SPEED, STEEL, sector

SHAFT, HUB, FIT = 15e-3, 50e-3, 10e-6
ANGLE = math.pi / 3.0


def parts() -> list[Region]:
    """A sixth of shaft and hub, sharing the arc between them."""
    side = cmath.exp(1j * ANGLE)
    joint = arc(complex(SHAFT), SHAFT * side, 0j, ccw=True)
    rim = arc(complex(HUB), HUB * side, 0j, ccw=True)
    shaft = Path((line(0j, SHAFT + 0j), joint, line(SHAFT * side, 0j)))
    hub = Path(
        (line(SHAFT + 0j, HUB + 0j), rim, line(HUB * side, SHAFT * side), reversed_edge(joint))
    )
    return [Region("shaft", "shaft", shaft), Region("hub", "rotor_steel", hub)]


def hub_bore(speed: float) -> tuple[float, float]:
    """Pressure and hoop stress in Pa on the hub's side of the joint, at `speed` in rad/s."""
    mesh = mesh_regions(parts(), lambda edge: 1.5e-3, turn_sides=ANGLE)
    body = elastic_body(mesh, STEEL)
    oversize = np.zeros(mesh.elements.shape)
    oversize[mesh.elements_of("shaft")] = FIT / SHAFT
    sides = coupled_sides(mesh, ANGLE)
    supports = with_coupled_sides(unsupported(mesh), mesh, sides)
    supports = with_fixed(supports, sides.first[:1], 1)
    force = free_strain_force(body, oversize) + centrifugal_force(body, speed)
    moved = displacement(body, force, supports)
    hub = mesh.elements_of("hub")
    stress, places = node_stress(body, moved, oversize)[hub], mesh.nodes[mesh.elements[hub]]
    on = np.abs(np.hypot(places[..., 0], places[..., 1]) - SHAFT) < NODE_TOL
    angle = np.arctan2(places[on][:, 1], places[on][:, 0])
    polar = [turned_stress(s, -a) for s, a in zip(stress[on], angle, strict=True)]
    radial, hoop, _ = np.mean(polar, axis=0)
    return -float(radial), float(hoop)


def test_shrink_fit_at_standstill():
    """P = E d (b^2 - a^2)/(2 a b^2) = 63.7 MPa; hub bore hoop p (b^2 + a^2)/(b^2 - a^2) = 76.3."""
    pressure, hoop = hub_bore(0.0)
    lame = STEEL.youngs_modulus * FIT * (HUB**2 - SHAFT**2) / (2 * SHAFT * HUB**2)
    assert lame / MPA == pytest.approx(63.7, rel=1e-6)
    assert pressure == pytest.approx(lame, rel=5e-3)
    assert hoop / MPA == pytest.approx(76.3, rel=5e-3)


def test_shrink_fit_loosens_with_the_square_of_the_speed():
    """Pressure 38.1924 MPa at 18 000 rpm and zero at 2978.77 rad/s (28 445.1 rpm)."""
    still, _ = hub_bore(0.0)
    spinning, _ = hub_bore(18_000.0 * math.pi / 30.0)
    assert spinning / MPA == pytest.approx(38.1924, rel=5e-3)
    loose, _ = hub_bore(2978.77)
    assert abs(loose) < 5e-3 * still


def test_a_ring_moved_outward_at_its_bore():
    """A rigid shaft with interference d: p = E d/a / ((b^2 + a^2)/(b^2 - a^2) + nu), Lame.

    Growth of the rim 2 p a^2 b / (E (b^2 - a^2)) to 1e-4, as asked for discs.
    """
    mesh = mesh_regions([sector(SHAFT, HUB, ANGLE)], lambda edge: 1.5e-3, turn_sides=ANGLE)
    body = elastic_body(mesh, STEEL)
    radius = np.hypot(mesh.nodes[:, 0], mesh.nodes[:, 1])
    sides = coupled_sides(mesh, ANGLE)
    bore = np.flatnonzero(np.abs(radius - SHAFT) < NODE_TOL)
    supports = with_radial(unsupported(mesh), mesh, bore, FIT)
    supports = with_fixed(with_coupled_sides(supports, mesh, sides), sides.first[:1], 1)
    moved = displacement(body, np.zeros(mesh.nodes.shape), supports)
    ratio = (HUB**2 + SHAFT**2) / (HUB**2 - SHAFT**2)
    pressure = STEEL.youngs_modulus * FIT / SHAFT / (ratio + STEEL.poissons_ratio)
    rim = np.abs(radius - HUB) < NODE_TOL
    growth = np.sum(moved * mesh.nodes, axis=1)[rim] / HUB
    lame = 2 * pressure * SHAFT**2 * HUB / (STEEL.youngs_modulus * (HUB**2 - SHAFT**2))
    assert growth == pytest.approx(np.full(growth.shape, lame), rel=1e-4)
    stress, places = node_stress(body, moved), mesh.nodes[mesh.elements]
    on = np.abs(np.hypot(places[..., 0], places[..., 1]) - SHAFT) < NODE_TOL
    # Radial and hoop stress add up to the same in any frame: p (ratio - 1). At a loaded edge the
    # elements' own stresses are taken, whose mean errs more than that of a free edge: 1 %.
    both = np.mean(stress[on][:, 0] + stress[on][:, 1])
    assert both == pytest.approx(pressure * (ratio - 1), rel=1e-2)


def in_contact(shaft: Shaft, fit: float = FIT, heat: Heat | None = None) -> Pressed:
    """A quarter of the hub on a shaft, layers finer towards the bore."""
    rings = [Ring("hub", 1.2 * SHAFT, 3), Ring("hub", 25e-3, 4), Ring("hub", HUB, 6)]
    mesh = ring_mesh(SHAFT, rings, math.pi / 2.0, 30)
    return pressed(ring_on_shaft(SHAFT, HUB), mesh, STEEL, Fit(shaft, fit), heat)


def test_contact_of_the_same_parts():
    """C2: 63.7000 MPa, bore hoop 76.3000 MPa at rest, 38.1924 MPa at 18 000 rpm; all 0.5 %."""
    item = in_contact(Shaft(STEEL))
    at_rest = stress_at(item, 0.0)
    assert at_rest.closed.all()
    assert at_rest.mean_pressure / MPA == pytest.approx(63.7, rel=1e-4)
    assert at_rest.pressure / MPA == pytest.approx(63.7, rel=5e-3)
    bore = at_rest.solution.stress[item.nodes[0]] / MPA  # on the x axis
    assert bore == pytest.approx([-63.7, 76.3, 0.0], rel=5e-3, abs=1e-3)
    assert stress_at(item, SPEED).mean_pressure / MPA == pytest.approx(38.1924, rel=5e-4)


def test_contact_is_lost_at_the_speed_of_the_closed_form():
    """C2: 28 445.1 rpm, 0.01 % everywhere, 0.2 % at the first node; no pressure is left beyond.

    At the corners and middles of edges the pressure differs by as much.
    """
    item = in_contact(Shaft(STEEL))
    lost = loosening(item)
    rpm = 30.0 / math.pi
    assert rpm * lost.everywhere == pytest.approx(28_445.1, rel=1e-4)
    assert rpm * lost.first == pytest.approx(28_445.1, rel=2e-3)
    assert np.all(stress_at(item, 1.001 * lost.everywhere).pressure == 0.0)


@pytest.mark.parametrize("bore", [0.0, 5e-3])
def test_hot_hub_on_a_cold_shaft_of_another_material(bore):
    """Lame's rings of unlike materials, solid and hollow, and their free growths; 0.1 %.

    p = d / (a (C_hub + C_shaft)), C_hub = ((b2 + a2)/(b2 - a2) + nu)/E and
    C_shaft = ((a2 + c2)/(a2 - c2) - nu_s)/E_s (derived from Lame's solution, c the shaft's bore);
    heat changes d by the difference of the free growths.
    """
    alloy = ElasticMaterial(youngs_modulus=110e9, poissons_ratio=0.33, density=4500.0)
    heat = Heat(expansion=12e-6, bore=40.0, shaft=15.0)
    item = in_contact(Shaft(alloy, bore, 9e-6), 20e-6, heat)
    a2, b2, c2 = SHAFT**2, HUB**2, bore**2
    hub = ((b2 + a2) / (b2 - a2) + STEEL.poissons_ratio) / STEEL.youngs_modulus
    shaft = ((a2 + c2) / (a2 - c2) - alloy.poissons_ratio) / alloy.youngs_modulus
    d = 20e-6 + SHAFT * (9e-6 * 15.0 - 12e-6 * 40.0)
    assert stress_at(item, 0.0).mean_pressure == pytest.approx(d / SHAFT / (hub + shaft), rel=1e-3)


def test_loosening_of_a_thick_ring_on_a_hollow_shaft():
    """Both parts spin: d = growth of the hub's bore - growth of the shaft's rim; 0.1 %.

    Rotating annulus, Timoshenko & Goodier art. 32: bore growth
    rho w2 a ((3 + nu) b2 + (1 - nu) a2) / (4 E), rim growth with bore c likewise, a and c swapped.
    """
    bore = 8e-3
    lost = loosening(in_contact(Shaft(STEEL, bore)))
    nu, a2, b2, c2 = STEEL.poissons_ratio, SHAFT**2, HUB**2, bore**2
    opens = (3.0 + nu) * b2 + (1.0 - nu) * a2 - ((3.0 + nu) * c2 + (1.0 - nu) * a2)
    want = math.sqrt(FIT * 4.0 * STEEL.youngs_modulus / (STEEL.density * SHAFT * opens))
    assert lost.everywhere == pytest.approx(want, rel=1e-3)


def test_uniform_heat_moves_both_parts_and_the_rim():
    """C7: +100 K in both parts leaves the pressure and adds 60.0000 um at b = 50 mm."""
    cold, hot = (
        stress_at(in_contact(Shaft(STEEL), heat=heat), 0.0)
        for heat in (None, Heat(expansion=12e-6, bore=100.0, shaft=100.0))
    )
    rim = int(np.argmax(cold.solution.mesh.nodes[:, 0]))
    grown = hot.solution.displacement[rim, 0] - cold.solution.displacement[rim, 0]
    assert 1e6 * grown == pytest.approx(60.0, rel=1e-6)
    assert hot.mean_pressure == pytest.approx(cold.mean_pressure, rel=1e-9)
