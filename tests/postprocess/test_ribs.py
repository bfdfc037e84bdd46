"""Rib reports: equilibrium of the cut-off carriers, margins, growth, on rotors of all kinds."""

import cmath
import math
from dataclasses import replace

import numpy as np
import pytest
import shapely

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.section import CrossSection, Rib
from lamwright.postprocess.ribs import RibReport, rib_report, rim_growth, section_stress
from lamwright.solver.rotor_stress import rotor_stress
from lamwright.solver.types import StressSolution
from tests.outlines import b1_design, plain_design, polygon
from tests.plates import MPA, SPEED, steel_card
from tests.random_designs import random_design

DENSITY, YIELD = 7650.0, 380.0 * MPA
CUT = 1e-9  # m, width of the cut through a rib


def ribbed_design(count: int) -> MachineDesign:
    """B1 with one or two radial ribs."""
    design = b1_design()
    keys = {"radial_ribs": count, "radial_rib_mm": 0.8, "fillet_mm": 0.5}
    if count == 2:
        keys["radial_rib_offset_mm"] = 4.0
    barrier = design.rotor.barrier[0].model_copy(update=keys)
    rotor = design.rotor.model_copy(update={"barrier": (barrier,)})
    return design.model_copy(update={"rotor": rotor})


DESIGNS_BY_NAME = {
    "three barriers": plain_design,
    "b1": b1_design,
    "one radial rib": lambda: ribbed_design(1),
    "two radial ribs": lambda: ribbed_design(2),
    "random 2": lambda: random_design(np.random.default_rng(2)),
}
Solved = tuple[CrossSection, StressSolution, RibReport]


@pytest.fixture(scope="module", params=DESIGNS_BY_NAME)
def solved(request: pytest.FixtureRequest) -> Solved:
    """A rotor at 18 000 rpm and its report."""
    section = cross_section(DESIGNS_BY_NAME[request.param]())
    card = steel_card()
    solution = rotor_stress(section, card, SPEED)
    return section, solution, rib_report(solution, section, YIELD)


def pull_beyond(section: CrossSection, ribs: list[Rib]) -> complex:
    """Centrifugal force in N/m of the iron that some ribs alone hold, from the outline itself."""
    iron = section.rotor[0]
    shape = polygon(iron.outer).difference(
        shapely.unary_union([polygon(hole).buffer(0) for hole in iron.holes])
    )
    for rib in ribs:
        over = 1e-6 * (rib.end - rib.start) / rib.width
        ends = [rib.start - over, rib.end + over]
        cut = shapely.LineString([(z.real, z.imag) for z in ends])
        shape = shape.difference(cut.buffer(CUT, cap_style="flat"))
    axis = cmath.exp(0.5j * math.pi / section.pole_pairs)
    rim = 0.9999 * section.rotor_radius * axis
    (island,) = [p for p in shape.geoms if p.contains(shapely.Point(rim.real, rim.imag))]
    first_moment = island.area * complex(island.centroid.x, island.centroid.y)
    return DENSITY * SPEED**2 * first_moment


def test_ribs_hold_what_lies_beyond_their_barrier(solved: Solved):
    """The ribs of a barrier together carry the pull of all iron beyond it: C8's free body.

    0.5 % asked; nodal forces are in equilibrium, what is left are the arcs' chords: 0.05 %. A right
    tangential rib's load acts on the carrier, all others' on the iron that holds it.
    """
    section, solution, _ = solved
    for barrier in {rib.barrier for rib in section.ribs}:
        ribs = [k for k, rib in enumerate(section.ribs) if rib.barrier == barrier]
        held = 0j
        for k in ribs:
            load = complex(*solution.rib_loads[k, :2])
            held += load if section.ribs[k].name.endswith("right") else -load
        pull = pull_beyond(section, [section.ribs[k] for k in ribs])
        assert abs(held + pull) < 5e-4 * abs(pull)


def test_mean_tension_alone_is_in_equilibrium():
    """B1's carrier is held by two tangential ribs: 2 (N sin a + V cos a) w = pull, from the report.

    a is the rib's angle from the q axis; 0.5 % asked, 0.05 % held.
    """
    section = cross_section(b1_design())
    card = steel_card()
    report = rib_report(rotor_stress(section, card, SPEED), section, YIELD)
    right, left = report.ribs
    assert right.mean_tension == pytest.approx(left.mean_tension, rel=2e-3)
    angle = 0.25 * math.pi - cmath.phase(right.rib.start)
    along_q = right.mean_tension * math.sin(angle) - right.mean_shear * math.cos(angle)
    along_q += left.mean_tension * math.sin(angle) + left.mean_shear * math.cos(angle)
    pull = abs(pull_beyond(section, [right.rib, left.rib]))
    assert along_q * right.rib.width == pytest.approx(pull, rel=5e-4)


def test_margins_and_yield_speeds(solved: Solved):
    """Definitions: margin yield/peak, mean yield speed omega sqrt(yield/mean), over all iron."""
    _, solution, report = solved
    for row in report.ribs:
        assert row.yield_margin == pytest.approx(YIELD / row.peak)
        if row.mean_tension > 0.0:
            ratio = (row.mean_yield_speed / solution.speed) ** 2
            assert ratio * row.mean_tension == pytest.approx(YIELD)
        else:
            assert row.mean_yield_speed == math.inf
    assert report.peak == solution.von_mises.max()
    assert report.peak >= max(row.peak for row in report.ribs)
    assert report.yield_margin == pytest.approx(YIELD / report.peak)
    assert report.speed == solution.speed


def test_peaks_are_where_they_are_said_to_be(solved: Solved):
    """At the named place a node has the named stress; pairs of ribs mirror each other."""
    section, solution, report = solved
    z = solution.mesh.nodes @ np.array([1.0, 1.0j])
    for row in report.ribs:
        node = int(np.argmin(np.abs(z - row.peak_at)))
        assert solution.von_mises[node] == row.peak
    turn = cmath.exp(-0.5j * math.pi / section.pole_pairs)
    pairs = zip(report.ribs[::1], report.ribs[1:], strict=False)
    for right, left in pairs:
        if right.rib.name.endswith("right"):
            at, mirrored = right.peak_at * turn, (left.peak_at * turn).conjugate()
            assert left.peak == pytest.approx(right.peak, rel=2e-2)
            # A flat peak may sit anywhere on its top: within half a rib.
            assert abs(at - mirrored) < 0.5 * max(right.rib.width, 1e-3)


def test_growth(solved: Solved):
    """Largest growth is at least that of both axes; the gap left is the gap less it."""
    section, solution, report = solved
    assert rim_growth(solution, section) == (
        report.growth_d,
        report.growth_q,
        report.growth_max,
    )
    assert report.growth_max >= max(report.growth_d, report.growth_q) * (1.0 - 1e-9)
    assert 0.0 < report.growth_max < section.gap
    assert report.gap_left == pytest.approx(section.gap - report.growth_max)


def test_bending_is_that_of_the_recovered_stress():
    """B1's rib: hoop at its two ends differs by twice the bending of a curved thick beam, roughly.

    C10 has 576.7 and -58.9 MPa: half their difference is 317.8, the straight beam's share of the
    same moment 305; 5 % is what curvature and the near cap make of it.
    """
    section = cross_section(b1_design())
    card = steel_card()
    report = rib_report(rotor_stress(section, card, SPEED), section, YIELD)
    for row in report.ribs:
        assert row.bending == pytest.approx(-0.5 * (576.7 + 58.9) * MPA, rel=0.05)


def test_section_stress_of_known_loads():
    """Unit rib along y, normal +x: force (3, 2) and moment -1/6 on 1 m are 3, 2 and 1 Pa; exact."""
    rib = Rib("rib", "radial", 1, 0j, 1j)
    found = section_stress(rib, np.array([3.0, 2.0, -1.0 / 6.0]))
    assert found == pytest.approx((3.0, 2.0, 1.0), rel=1e-15)


def test_a_pressed_rib_never_yields_on_average(solved: Solved):
    """All loads reversed: ribs that were pulled are pressed; infinity, not an error."""
    section, solution, report = solved
    pressed = rib_report(replace(solution, rib_loads=-solution.rib_loads), section, YIELD)
    for before, after in zip(report.ribs, pressed.ribs, strict=True):
        assert after.mean_tension == -before.mean_tension
        assert math.isinf(after.mean_yield_speed) == (before.mean_tension >= 0.0)
