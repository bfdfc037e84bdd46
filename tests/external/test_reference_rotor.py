"""Stress of the reference rotor B1: four poles, one round-ended arc barrier a pole, rib 0.6 mm.

Source: check values C10, finite elements there; the rotor is invented. E 210 GPa, nu 0.3,
rho 7650 kg/m^3, 18 000 rpm, bore free. Tolerances as stated there: peak 2 %, mean 1 %,
growth 0.3 %.
"""

import cmath
import math

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.ribs import RibReport, rib_report
from lamwright.solver.locate import values_at
from lamwright.solver.rotor_stress import rotor_stress
from lamwright.solver.stress_recovery import turned_stress
from lamwright.solver.types import StressSolution
from tests.outlines import b1_design
from tests.plates import MPA, SPEED, steel_card

Solved = tuple[CrossSection, StressSolution, RibReport]


@pytest.fixture(scope="module")
def solved() -> Solved:
    """B1 at 18 000 rpm with the tool's own settings."""
    section = cross_section(b1_design())
    card = steel_card()
    solution = rotor_stress(section, card, SPEED)
    return section, solution, rib_report(solution, section, 350.0 * MPA)


def test_peak_and_its_place(solved: Solved):
    """721.9 MPa on the cap at (35.069, +-16.750) mm from the q axis, within half an element."""
    _, solution, report = solved
    assert report.peak / MPA == pytest.approx(721.9, rel=2e-2)
    assert abs(report.peak / MPA - 721.9) < report.peak_error / MPA
    assert report.yield_margin == pytest.approx(350.0 / 721.9, rel=2e-2)
    for rib in report.ribs:
        assert rib.peak / MPA == pytest.approx(721.9, rel=2e-2)
        at = rib.peak_at * cmath.exp(-0.25j * math.pi) * 1e3
        assert (at.real, abs(at.imag)) == pytest.approx((35.069, 16.750), abs=0.15)
    assert solution.refinements >= 1


def test_rib_section(solved: Solved):
    """Mean hoop 237.68 MPa, 1 %; inner 576.7, outer -58.9 MPa on the section, 2 % of the peak.

    The mean alone would call this rib safe at 350 MPa: the bending doubles it.
    """
    _, solution, report = solved
    for rib in report.ribs:
        assert rib.mean_tension / MPA == pytest.approx(237.68, rel=1e-2)
        assert rib.mean_yield_speed == pytest.approx(SPEED * math.sqrt(350.0 / 237.68), rel=5e-3)
        ends = np.array([rib.rib.start, rib.rib.end])
        stress = values_at(solution.mesh, solution.stress, np.column_stack([ends.real, ends.imag]))
        hoop = [
            turned_stress(s, -cmath.phase(z))[1] / MPA for s, z in zip(stress, ends, strict=True)
        ]
        assert hoop == pytest.approx([576.7, -58.9], abs=0.02 * 721.9)


def test_growth_and_bore(solved: Solved):
    """40.757 um on the q axis, 1.9956 um on the d axis, 0.3 %; bore 31.5 MPa, 2 %."""
    section, solution, report = solved
    assert report.growth_q * 1e6 == pytest.approx(40.757, rel=3e-3)
    assert report.growth_d * 1e6 == pytest.approx(1.9956, rel=3e-3)
    assert report.growth_max == pytest.approx(report.growth_q, rel=1e-6)
    assert report.gap_left == pytest.approx(section.gap - report.growth_q, rel=1e-9)
    radius = np.hypot(solution.mesh.nodes[:, 0], solution.mesh.nodes[:, 1])
    bore = np.abs(radius - section.shaft_radius) < 1e-9
    assert solution.von_mises[bore].max() / MPA == pytest.approx(31.5, rel=2e-2)
