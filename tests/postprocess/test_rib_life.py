"""Life of zones: sign of the stress, scatter, Miner's sum, overflow, cautions and figures."""

import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_steel_card
from lamwright.postprocess.life_figures import life_cautions, life_figures, local_rule
from lamwright.postprocess.rib_life import (
    CyclicCurve,
    cyclic_curve,
    median_life,
    zone_lives,
    zone_stress,
)
from lamwright.solver.rib_zones import zone_of_node
from lamwright.solver.rotor_stress import StressSettings, rotor_stress
from tests.outlines import b1_design

CARD = read_steel_card(Path(__file__).parents[2] / "designs" / "steel" / "demo_050.toml")
DATA = CARD.fatigue
assert DATA is not None
ONCE = ((1.0, 1.0),)


def lives(stress, speeds=ONCE, card=CARD, data=DATA):
    return zone_lives(np.asarray(stress, dtype=float), card, data, speeds)


def test_one_zone_by_hand():
    """0 to 300 MPa, SWT: sqrt(300 x 150) over 0.75 x 850, to the power 1/0.09; 10^(2 x 0.25)."""
    (life,) = lives([[300e6, -10e6]])
    median = 0.5 * (math.sqrt(300.0 * 150.0) / (0.75 * 850.0)) ** (1.0 / -0.09)
    assert life.median == pytest.approx(median, rel=1e-12)
    assert life.low == pytest.approx(median / 10**0.5)
    assert life.high == pytest.approx(median * 10**0.5)
    assert (life.maximum, life.amplitude) == (300e6, pytest.approx(1e6 * math.sqrt(45e3)))


def test_the_worse_of_tension_and_pressure_counts():
    """Pressure has no mean stress: 300 is worse than -420 by SWT (212 to 210), not than -430."""
    near, far = lives([[300e6, -420e6], [300e6, -430e6]])
    assert near.maximum == 300e6
    assert far.maximum < 0.0


def test_starts_to_two_speeds_add_by_miner():
    """1 / N = 0.9 / N_1 + 0.1 / N_2; a share of none changes nothing."""
    (first,), (second,) = lives([[250e6, 0.0]]), lives([[250e6, 0.0]], ((1.44, 1.0),))
    (both,) = lives([[250e6, 0.0]], ((1.0, 0.9), (1.44, 0.1)))
    assert 1.0 / both.median == pytest.approx(0.9 / first.median + 0.1 / second.median)
    assert both.maximum == first.maximum
    assert lives([[250e6, 0.0]], ((1.0, 1.0), (1.44, 0.0))) == (first,)


@pytest.mark.parametrize("method", ["goodman", "smith-watson-topper", "morrow"])
def test_more_stress_never_lasts_longer(method):
    """From a hundredth of yield to thrice it: below and well beyond yield each is worse.

    Just beyond yield Neuber's mean stress drops; there the amplitude stays that of yield.
    """
    data = DATA.model_copy(update={"method": method})
    stress = np.linspace(0.01, 3.0, 300) * 380e6
    amplitude = np.array([life.amplitude for life in lives(np.c_[stress, 0 * stress], data=data)])
    assert np.all(np.diff(amplitude) >= 0.0)
    assert np.all(np.diff(amplitude[:99]) > 0.0)
    assert np.all(np.diff(amplitude[150:]) > 0.0)


def test_a_place_without_stress_lasts_for_ever():
    """Infinite, not an overflow; a place with next to none as well."""
    nothing, hardly = lives([[0.0, 0.0], [1.0, 0.0]])
    assert nothing.median == math.inf
    assert hardly.median > 1e80
    steep = DATA.model_copy(update={"strength_exponent": -0.02})
    assert median_life(1.0, steep) == math.inf


def test_zones_of_a_rotor_have_its_peaks():
    """B1: the greater of tension and pressure is each zone's peak; its rib's outside is pressed.

    checks C10: the rib bends, inside 577 MPa pulled, outside -59 MPa at 18 000 rpm.
    """
    section = cross_section(b1_design())
    solution = rotor_stress(section, CARD, 1884.96, StressSettings(tolerance=0.1))
    found = zone_stress(section, solution)
    assert found.shape == (3, 2)
    zone = zone_of_node(section, solution.mesh)
    peaks = [solution.von_mises[zone == k].max() for k in range(3)]
    assert np.abs(found).max(axis=1) == pytest.approx(peaks)
    assert np.all(found[:2, 0] > 600e6)
    assert np.all(found[:2, 1] < -40e6)


def test_figures_are_the_shortest_and_cautions_say_which():
    """Another zone than a rib's, lives beyond the tested ones, a place that bears none."""
    found = lives([[200e6, 0.0], [150e6, 0.0], [240e6, 0.0]])
    figures = life_figures(found, DATA, 0.1)
    assert (figures.low, figures.median) == (found[2].low, found[2].median)
    told = life_cautions(found, CARD, DATA)
    assert "the shortest life is not of a rib: look at bore, carriers and holes" in told
    assert any(line.startswith("2 of 2 ribs have lives beyond the 1e+07 cycles") for line in told)
    assert any("invented" in line and "0.25" in line for line in told)
    none = replace(found[0], median=0.0, low=0.0, high=0.0)
    assert any("bears no cycle" in line for line in life_cautions((none, *found[1:]), CARD, DATA))


def test_the_rule_used_is_named():
    """Elastic up to yield, then Neuber's rule with the curve that the card has."""
    flat = DATA.model_copy(update={"cyclic_strength_mpa": None, "cyclic_exponent": None})
    stress = np.array([[400e6, 0.0], [0.0, -100e6]])
    assert local_rule(stress, 0.9, CARD, DATA) == "elastic"
    assert local_rule(stress, 1.0, CARD, DATA) == "Neuber's rule, Ramberg-Osgood"
    assert local_rule(stress, 1.0, CARD, flat) == "Neuber's rule, perfectly plastic"
    assert cyclic_curve(CARD, flat) == CyclicCurve(210e9, 380e6, 0.0)
