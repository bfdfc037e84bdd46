"""Rotors beyond yield: bounds of the burst, growth that stays, zones, start and stop."""

import functools
import math
from pathlib import Path

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.design_hardening import HardeningCurve
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.figures import plastic_figure
from lamwright.postprocess.figures_plastic import strain_limit, worst_ribs
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.mean_hoop import MISES_FACTOR, mean_hoop_speed
from lamwright.postprocess.plastic_ribs import PlasticReport, PlasticStudy, plastic_study
from lamwright.postprocess.ribs import rib_report
from lamwright.solver.limit_load import limit_load
from lamwright.solver.plastic_rotor import spinning_body
from lamwright.solver.refine import refined
from lamwright.solver.rotor_stress import (
    StressSettings,
    lamination_circles,
    rotor_stress,
    sides_of,
    stress_on,
)
from lamwright.solver.types import StressSolution
from tests.annulus import Ring, ring_mesh
from tests.outlines import b1_design, plain_design
from tests.plates import MPA, SPEED, STEEL, steel_card

CARD, YIELD = steel_card(), 350.0 * MPA


@functools.cache
def solved(name: str = "b1") -> tuple[CrossSection, StressSolution]:
    """A rotor at 18 000 rpm: elastic."""
    section = cross_section({"b1": b1_design, "plain": plain_design}[name]())
    return section, rotor_stress(section, CARD, SPEED, StressSettings(tolerance=0.05))


@functools.cache
def burst(name: str = "b1") -> float:
    """Its burst speed in rad/s, lower bound."""
    return untested(name).burst_low


@functools.cache
def untested(name: str = "b1") -> PlasticReport:
    """Its report at next to no speed."""
    return study(0.01, 0.01, name).report


def study(test: float, running: float, name: str = "b1", card=CARD) -> PlasticStudy:
    """The rotor after a test at a share of 18 000 rpm."""
    return plastic_study(*solved(name), card, test * SPEED, running * SPEED)


@pytest.mark.parametrize("name", ["b1", "plain"])
def test_burst_lies_between_first_yield_and_the_bounds_of_simple_motions(name):
    """First yield <= lower <= upper <= cuts: statics below, motions of collapse above.

    Upper, rigorous (kinematic theorem, derived): the outermost carrier leaves along the q axis, its
    ribs part along their lines. A line that opens by n and slides by t dissipates
    yield sqrt(4 n^2/3 + t^2/3) per length. And every whole cut through the axis, see `mean_hoop`.
    """
    section, solution = solved(name)
    report = untested(name)
    assert report.mean_rib_speed == min(
        row.mean_yield_speed for row in rib_report(solution, section, YIELD).ribs
    )
    assert report.first_yield_speed <= report.burst_low <= report.burst_high
    assert report.burst_high <= 1.0026 * report.burst_low  # 0.5 % of the load asked
    assert report.burst_low <= math.sqrt(MISES_FACTOR) * report.mean_hoop_speed
    axis = np.exp(0.5j * section.pole_angle)
    outer = [k for k, rib in enumerate(section.ribs) if rib.barrier == 1]
    power = lost = 0.0
    for k in outer:
        rib = section.ribs[k]
        along = (rib.end - rib.start) / rib.width
        opening, sliding = (axis * np.conj(-1j * along)).real, (axis * np.conj(along)).real
        lost += YIELD * rib.width * math.sqrt((4.0 * opening**2 + sliding**2) / 3.0)
        power += abs((complex(*solution.rib_loads[k][:2]) * np.conj(axis)).real)
    assert report.burst_low <= SPEED * math.sqrt(lost / power)


def test_burst_goes_with_the_root_of_strength_and_not_with_the_test():
    """Limit load = strength x geometry: sqrt(480/350) with the tensile strength, exact.

    At another test speed the same burst, within the bounds' own distance.
    """
    one, other = untested(), study(0.3, 0.3).report
    assert one.burst_tensile == pytest.approx(one.burst_low * math.sqrt(480.0 / 350.0), rel=1e-12)
    assert other.burst_low == pytest.approx(one.burst_low, rel=1e-3)


def test_below_first_yield_nothing_stays():
    """The elastic answer returns to 0: growth below 1e-12 m, no zone, every cycle elastic."""
    found = study(0.5, 0.4)
    report = found.report
    assert report.first_yield_speed > 0.5 * SPEED
    assert report.survives
    assert report.regime == "elastic"
    assert abs(report.growth_max) < 1e-12
    assert report.largest_strain == report.yielded_share == 0.0
    assert worst_ribs(report) == ()
    assert all(row.section_share == row.zone_area == 0.0 for row in report.ribs)


def test_growth_stays_where_ribs_yielded():
    """B1 at 93 % of its burst: the carrier stands out on the q axis, both ribs alike by symmetry.

    More speed, more of all; a hardening steel keeps less. Left is less than the growth at speed.
    """
    share = burst() / SPEED
    low, high = (study(x * share, x * share / 1.2).report for x in (0.8, 0.93))
    assert 0.0 < low.growth_q < high.growth_q
    assert 0.0 < low.yielded_share < high.yielded_share
    assert low.largest_strain < high.largest_strain
    first, second = high.ribs
    assert first.largest_strain == pytest.approx(second.largest_strain, rel=0.1)
    assert first.section_share == pytest.approx(second.section_share, abs=0.15)
    assert first.zone_area < high.yielded_share * 0.002  # m^2: B1's quarter is 930 mm^2
    assert high.regime in ("shakedown", "alternating")
    curve = HardeningCurve(
        plastic_strain=(0.0, 0.1), true_stress_mpa=(350.0, 800.0), source="invented"
    )
    hard = CARD.model_copy(update={"hardening": curve})
    kept = study(0.93 * share, 0.7 * share, card=hard).report
    assert kept.hardens
    assert 0.0 < kept.growth_q < high.growth_q
    assert kept.burst_low == pytest.approx(high.burst_low, rel=1e-3)  # of perfect plasticity


def test_a_test_beyond_burst_is_told_as_collapse():
    """5 % above the upper bound: no figure of growth, the zones are those that tear."""
    found = study(1.05 * burst() / SPEED, 0.5)
    report = found.report
    assert not report.survives
    assert report.regime == "collapse"
    assert math.isinf(report.growth_q)
    assert math.isinf(report.largest_strain)
    assert all(row.section_share > 0.3 for row in report.ribs)
    assert report.yielded_share < 0.2


def test_mean_hoop_speed_of_a_ring_is_robinsons():
    """Yield = rho omega^2 (b^3 - a^3)/(3 (b - a)); the chords' areas and lengths err by 1e-4."""
    a, b = 15e-3, 50e-3
    mesh = ring_mesh(a, (Ring("rotor_steel", b, 6),), math.pi / 3.0, 10)
    found = mean_hoop_speed(mesh, math.pi / 3.0, STEEL.density, YIELD)
    exact = math.sqrt(YIELD * 3.0 * (b - a) / STEEL.density / (b**3 - a**3))
    assert found == pytest.approx(exact, rel=5e-4)


@pytest.mark.parametrize("share", [0.9, 1.1])
def test_figure_shows_the_zones(share):
    """Coloured pieces in drawing and close-up, a scale that covers them, letters apart."""
    section, _ = solved()
    found = study(share * burst() / SPEED, 0.3)
    figure = plastic_figure("b1", section, found, Style())
    figure.canvas.draw()
    zones = [c for ax in figure.axes for c in ax.collections if c.get_array() is not None]
    assert len(zones) == 2  # B1's two ribs are alike: one close-up
    limit = strain_limit(found)
    for zone in zones:
        values = np.asarray(zone.get_array())
        assert values.min() > 0.0
        assert values.max() <= limit
    assert limit < 2.1 * 100.0 * found.strain.max()


@pytest.mark.slow
@pytest.mark.parametrize("name", ["b1", "plain"])
def test_burst_on_four_times_the_elements(name):
    """The mesh of the elastic solution is within 1 % of the burst: it errs upward."""
    section, solution = solved(name)
    sides = sides_of(section, solution.mesh)
    every = np.arange(len(solution.mesh.elements))
    finer = refined(solution.mesh, every, lamination_circles(section), sides)
    again = stress_on(section, finer, CARD, SPEED, StressSettings())
    fine = plastic_study(section, again, CARD, 0.01 * SPEED, 0.01 * SPEED).report
    assert fine.burst_low <= 1.002 * burst(name)
    assert fine.burst_low == pytest.approx(burst(name), rel=1e-2)


DESIGNS = sorted((Path(__file__).parents[2] / "designs").glob("**/*.toml"))
MACHINES = [path for path in DESIGNS if path.parent.name in ("designs", "gallery")]


@pytest.mark.slow
@pytest.mark.parametrize("path", MACHINES, ids=lambda path: path.stem)
def test_burst_of_every_shipped_rotor_is_found(path):
    """Bounds close on all; first yield below, whole cuts through the axis above (both rigorous).

    0.5 % of the load between the bounds is 0.25 % of the speed, so the middle is within 0.5 %.
    """
    machine = read_machine(path)
    section, card = cross_section(machine.design), machine.rotor_steel
    duty = machine.design.duty
    speed = duty.overspeed_factor * duty.maximum_speed_rpm * math.pi / 30.0
    solution = rotor_stress(section, card, speed, StressSettings(tolerance=0.05))
    spinning = spinning_body(section, solution.mesh, card, speed)
    found = limit_load(spinning.plastic, spinning.force)
    assert found.first_yield < found.lower <= found.upper <= 1.005 * found.lower
    strength = 1e6 * card.yield_strength_mpa.value
    density = card.density_kg_per_m3.value
    period = spinning.section.sector_angle
    whole = mean_hoop_speed(solution.mesh, period, density, strength)
    assert spinning.speed(found.lower) < math.sqrt(MISES_FACTOR) * whole
